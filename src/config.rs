//! Every flag and `LODEFRAME_*` variable, with its default, in one place.
//!
//! Flags are read as text and checked together, so that a start that fails names every fault.

use std::{net::SocketAddr, path::PathBuf, sync::Arc, time::Duration};

use clap::{CommandFactory, Parser, Subcommand, ValueEnum};
use tokio_rustls::rustls::ServerConfig;

mod check;
mod environment;
mod settings;
mod tls;
mod tokens;

pub use environment::{environment, unknown_variables};
pub use settings::Settings;
pub use tokens::Tokens;

/// The command line.
#[derive(Parser, Debug)]
#[command(
    name = "lodeframe",
    version,
    about = "Restates measured electric and magnetic fields in the frame where they are needed.",
    after_help = "Every setting is also a variable: --max-body is LODEFRAME_MAX_BODY. A flag wins.\n\
Exit codes: 0 ended as asked, 1 cannot start (address in use, socket passed on unfit), 2 wrong settings or catalogue.",
    args_conflicts_with_subcommands = true
)]
pub struct CommandLine {
    /// What to do; `serve` when left out.
    #[command(subcommand)]
    pub command: Option<Command>,
    /// The settings of `serve`, which need not be named.
    #[command(flatten)]
    pub serve: Settings,
}

/// What the program can do.
#[derive(Subcommand, Debug)]
pub enum Command {
    /// Answer requests until told to stop (the default).
    Serve(Box<Settings>),
    /// Check a catalogue of frames and print its tree.
    Check {
        /// The catalogue (TOML).
        file: PathBuf,
    },
    /// Make a bearer token: prints the line for the file of --tokens, and beside it, on standard
    /// error, the token itself, which is stored nowhere.
    Token {
        /// Whom the token is for; it stands in the log beside what was asked with it.
        name: String,
    },
    /// Print the OpenAPI document and end.
    Openapi,
}

/// How the log is written.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum LogForm {
    /// One line of `name=value` pairs an event.
    Text,
    /// One JSON object a line.
    Json,
    /// Nothing.
    Off,
}

/// The settings as checked.
#[derive(Clone, Debug)]
pub struct Config {
    /// Where to listen.
    pub listen: SocketAddr,
    /// Whether anyone may ask on an address that other machines reach.
    pub open: bool,
    /// Who may ask; `None` answers anyone.
    pub tokens: Option<Tokens>,
    /// Certificate and key; `None` speaks plain HTTP.
    pub tls: Option<Arc<ServerConfig>>,
    /// Origins that browsers may ask from.
    pub cors_origins: Vec<String>,
    /// The catalogue of named frames.
    pub frames: Option<PathBuf>,
    /// How the log is written.
    pub log: LogForm,
    /// Largest body of a single question, bytes.
    pub max_body: usize,
    /// Connections held open at once.
    pub max_connections: usize,
    /// Requests answered at once.
    pub max_concurrent: usize,
    /// Steps in the way of one question.
    pub max_steps: usize,
    /// Points in one sweep.
    pub max_points: usize,
    /// Monte Carlo trials of one question.
    pub max_trials: usize,
    /// Longest row of a series, bytes.
    pub max_row: usize,
    /// Largest batch of rows, bytes.
    pub max_batch: usize,
    /// Answer of a series that waits for its client, bytes.
    pub buffer: usize,
    /// Time for one request until its answer begins.
    pub request_timeout: Duration,
    /// Time for headers to arrive.
    pub idle_timeout: Duration,
    /// Time to finish after being told to stop.
    pub grace: Duration,
}

impl Default for Config {
    /// The configuration that no flags give, whatever the environment says.
    fn default() -> Config {
        let command = CommandLine::command().mut_args(|arg| arg.env(None::<&str>));
        let matches = command.get_matches_from(["lodeframe"]);
        let line = <CommandLine as clap::FromArgMatches>::from_arg_matches(&matches)
            .expect("the defaults parse");
        line.serve.check().expect("the defaults are right")
    }
}
