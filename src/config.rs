//! Every flag and `LODEFRAME_*` variable, with its default, in one place.
//!
//! Flags are read as text and checked together, so that a start that fails names every fault.

use std::ffi::OsString;
use std::fmt::Display;
use std::net::SocketAddr;
use std::path::PathBuf;
use std::str::FromStr;
use std::time::Duration;

use clap::{Args, CommandFactory, Parser, Subcommand, ValueEnum};

/// The command line.
#[derive(Parser, Debug)]
#[command(
    name = "lodeframe",
    version,
    about = "Restates measured electric and magnetic fields in the frame where they are needed.",
    after_help = "Exit codes: 0 stopped as asked, 1 could not start (address in use), 2 wrong settings or catalogue.",
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
    /// Print the OpenAPI document and end.
    Openapi,
}

/// The settings as written; [`Settings::check`] reads them.
#[derive(Args, Clone, Debug)]
pub struct Settings {
    /// Address and port to listen on.
    #[arg(
        long,
        env = "LODEFRAME_LISTEN",
        value_name = "ADDRESS:PORT",
        default_value = "127.0.0.1:7410"
    )]
    listen: String,

    /// Answer anyone who can reach an address other than loopback, without tokens.
    #[arg(
        long,
        env = "LODEFRAME_OPEN",
        value_name = "true|false",
        num_args = 0..=1,
        require_equals = true,
        default_missing_value = "true",
        default_value = "false"
    )]
    open: String,

    /// Origins whose pages may ask from a browser, such as `https://lab.example:8443` (repeatable).
    #[arg(
        long,
        env = "LODEFRAME_CORS_ORIGIN",
        value_name = "ORIGIN",
        value_delimiter = ','
    )]
    cors_origin: Vec<String>,

    /// Catalogue of named frames (TOML); `lodeframe check FILE` tries one.
    #[arg(long, env = "LODEFRAME_FRAMES", value_name = "FILE")]
    frames: Option<PathBuf>,

    /// How the log is written to standard error: text, json or off.
    #[arg(
        long,
        env = "LODEFRAME_LOG",
        value_name = "FORM",
        default_value = "text"
    )]
    log: String,

    /// Largest body of a single question.
    #[arg(
        long,
        env = "LODEFRAME_MAX_BODY",
        value_name = "SIZE",
        default_value = "1MiB"
    )]
    max_body: String,

    /// Requests answered at once; more are turned away with 503.
    #[arg(
        long,
        env = "LODEFRAME_MAX_CONCURRENT",
        value_name = "COUNT",
        default_value = "1024"
    )]
    max_concurrent: String,

    /// Steps that the way of one question may have.
    #[arg(
        long,
        env = "LODEFRAME_MAX_STEPS",
        value_name = "COUNT",
        default_value = "1000"
    )]
    max_steps: String,

    /// Points that one sweep may have.
    #[arg(
        long,
        env = "LODEFRAME_MAX_POINTS",
        value_name = "COUNT",
        default_value = "10000"
    )]
    max_points: String,

    /// Longest row of a series, as text.
    #[arg(
        long,
        env = "LODEFRAME_MAX_ROW",
        value_name = "SIZE",
        default_value = "1MiB"
    )]
    max_row: String,

    /// Largest batch of rows of a series in the Arrow format.
    #[arg(
        long,
        env = "LODEFRAME_MAX_BATCH",
        value_name = "SIZE",
        default_value = "16MiB"
    )]
    max_batch: String,

    /// Answer of a series that waits for a client which does not read it.
    #[arg(
        long,
        env = "LODEFRAME_BUFFER",
        value_name = "SIZE",
        default_value = "1MiB"
    )]
    buffer: String,

    /// Time for one request, from its headers to the head of its answer.
    #[arg(
        long,
        env = "LODEFRAME_REQUEST_TIMEOUT",
        value_name = "TIME",
        default_value = "30s"
    )]
    request_timeout: String,

    /// Time for the headers of a request to arrive, and for a connection to stay without one.
    #[arg(
        long,
        env = "LODEFRAME_IDLE_TIMEOUT",
        value_name = "TIME",
        default_value = "75s"
    )]
    idle_timeout: String,

    /// Time that running requests get to finish when the service is told to stop.
    #[arg(
        long,
        env = "LODEFRAME_GRACE",
        value_name = "TIME",
        default_value = "30s"
    )]
    grace: String,
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
    /// Origins that browsers may ask from.
    pub cors_origins: Vec<String>,
    /// The catalogue of named frames.
    pub frames: Option<PathBuf>,
    /// How the log is written.
    pub log: LogForm,
    /// Largest body of a single question, bytes.
    pub max_body: usize,
    /// Requests answered at once.
    pub max_concurrent: usize,
    /// Steps in the way of one question.
    pub max_steps: usize,
    /// Points in one sweep.
    pub max_points: usize,
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

impl Settings {
    /// Reads and compares all settings.
    ///
    /// # Errors
    /// Every fault found, each a sentence that names the flag and what would be right.
    pub fn check(&self) -> Result<Config, Vec<String>> {
        let mut faults = Vec::new();
        let config = Config {
            listen: read(
                &mut faults,
                "listen",
                &self.listen,
                "an IP address and a port such as 127.0.0.1:7410 or [::1]:7410",
            )
            .unwrap_or(SocketAddr::from(([127, 0, 0, 1], 7410))),
            cors_origins: self.cors_origin.clone(),
            frames: self.frames.clone(),
            log: LogForm::from_str(&self.log, false).unwrap_or_else(|_| {
                faults.push(format!(
                    "--log is {:?}; it must be text, json or off.",
                    self.log
                ));
                LogForm::Off
            }),
            max_body: size(&mut faults, "max-body", &self.max_body),
            max_row: size(&mut faults, "max-row", &self.max_row),
            max_batch: size(&mut faults, "max-batch", &self.max_batch),
            buffer: size(&mut faults, "buffer", &self.buffer),
            max_concurrent: count(&mut faults, "max-concurrent", &self.max_concurrent),
            max_steps: count(&mut faults, "max-steps", &self.max_steps),
            max_points: count(&mut faults, "max-points", &self.max_points),
            request_timeout: time(&mut faults, "request-timeout", &self.request_timeout),
            idle_timeout: time(&mut faults, "idle-timeout", &self.idle_timeout),
            grace: read::<humantime::Duration>(&mut faults, "grace", &self.grace, TIME)
                .map_or(Duration::ZERO, Into::into),
        };
        let open = read(&mut faults, "open", &self.open, "true or false").unwrap_or(true);
        if !config.listen.ip().is_loopback() && !open {
            faults.push(format!(
                "--listen {} can be reached from other machines, and nothing would ask them who they are. \
                 Listen on 127.0.0.1, or add --open to answer anyone.",
                config.listen
            ));
        }
        faults.extend(self.cors_origin.iter().filter(|origin| !is_origin(origin)).map(|origin| {
            format!("--cors-origin is {origin:?}; it must be one origin by name, scheme://host or scheme://host:port, without a path or *.")
        }));
        if faults.is_empty() {
            Ok(config)
        } else {
            Err(faults)
        }
    }
}

/// The `LODEFRAME_*` variables among `names` that no flag knows.
pub fn unknown_variables(names: impl Iterator<Item = OsString>) -> Vec<String> {
    let command = CommandLine::command();
    let known: Vec<_> = command
        .get_arguments()
        .filter_map(|arg| arg.get_env())
        .collect();
    names
        .filter(|name| !known.contains(&name.as_os_str()))
        .map(|name| name.to_string_lossy().into_owned())
        .filter(|name| name.starts_with("LODEFRAME_"))
        .map(|name| {
            format!("{name} is not a variable that lodeframe knows; `lodeframe --help` lists them.")
        })
        .collect()
}

const TIME: &str = "a time such as 500ms, 30s or 2min";

fn read<T: FromStr>(
    faults: &mut Vec<String>,
    flag: &str,
    text: &str,
    right: impl Display,
) -> Option<T> {
    let value = text.parse().ok();
    if value.is_none() {
        faults.push(format!("--{flag} is {text:?}; it must be {right}."));
    }
    value
}

fn count(faults: &mut Vec<String>, flag: &str, text: &str) -> usize {
    read::<std::num::NonZeroUsize>(faults, flag, text, "a whole number from 1")
        .map_or(1, Into::into)
}

fn size(faults: &mut Vec<String>, flag: &str, text: &str) -> usize {
    let right = "a size such as 64KiB or 1MiB";
    let size = read::<bytesize::ByteSize>(faults, flag, text, right);
    size.map_or(0, |size| {
        usize::try_from(size.as_u64()).unwrap_or(usize::MAX)
    })
}

fn time(faults: &mut Vec<String>, flag: &str, text: &str) -> Duration {
    let time = read::<humantime::Duration>(faults, flag, text, TIME).map(Duration::from);
    if time == Some(Duration::ZERO) {
        faults.push(format!(
            "--{flag} is {text:?}; it must be longer than nothing."
        ));
    }
    time.unwrap_or(Duration::ZERO)
}

/// Whether the text is an origin as browsers write it (RFC 6454 §6.2): lower case, no path.
fn is_origin(text: &str) -> bool {
    let Ok(uri) = text.parse::<hyper::Uri>() else {
        return false;
    };
    let (Some(scheme), Some(authority)) = (uri.scheme_str(), uri.authority()) else {
        return false;
    };
    // A path, even the empty one that Uri adds, is not part of an origin.
    text == format!("{scheme}://{authority}")
        && !text.contains(['@', '*'])
        && text == text.to_lowercase()
}
