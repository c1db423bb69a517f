//! The settings as written, flag by flag.

use std::path::PathBuf;

use clap::Args;

/// The settings as written; [`Settings::check`] reads them.
#[derive(Args, Clone, Debug)]
pub struct Settings {
    #[command(flatten)]
    pub(super) access: Access,
    #[command(flatten)]
    pub(super) content: Content,
    #[command(flatten)]
    pub(super) limits: Limits,

    /// Print the settings in effect as an environment file, and end.
    #[arg(long, help_heading = "What it knows and tells")]
    pub print_config: bool,
}

#[derive(Args, Clone, Debug)]
#[command(next_help_heading = "Where it listens, and who may ask")]
pub(super) struct Access {
    /// Address and port to listen on, unless systemd passes on a socket.
    #[arg(
        long,
        env = "LODEFRAME_LISTEN",
        value_name = "ADDRESS:PORT",
        default_value = "127.0.0.1:7410"
    )]
    pub(super) listen: String,

    /// Answer only who shows a bearer token of this file; `lodeframe token NAME` makes its lines.
    #[arg(long, env = "LODEFRAME_TOKENS", value_name = "FILE")]
    pub(super) tokens: Option<PathBuf>,

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
    pub(super) open: String,

    /// Certificate chain (PEM) for TLS, the service's own certificate first.
    #[arg(long, env = "LODEFRAME_TLS_CERT", value_name = "FILE")]
    pub(super) tls_cert: Option<PathBuf>,

    /// Private key (PEM) of that certificate.
    #[arg(long, env = "LODEFRAME_TLS_KEY", value_name = "FILE")]
    pub(super) tls_key: Option<PathBuf>,

    /// Origins whose pages may ask from a browser, such as `https://lab.example:8443` (repeatable).
    #[arg(
        long,
        env = "LODEFRAME_CORS_ORIGIN",
        value_name = "ORIGIN",
        value_delimiter = ','
    )]
    pub(super) cors_origin: Vec<String>,
}

#[derive(Args, Clone, Debug)]
#[command(next_help_heading = "What it knows and tells")]
pub(super) struct Content {
    /// Catalogue of named frames (TOML); `lodeframe check FILE` tries one.
    #[arg(long, env = "LODEFRAME_FRAMES", value_name = "FILE")]
    pub(super) frames: Option<PathBuf>,

    /// How the log is written to standard error: text, json or off.
    #[arg(
        long,
        env = "LODEFRAME_LOG",
        value_name = "FORM",
        default_value = "text"
    )]
    pub(super) log: String,
}

#[derive(Args, Clone, Debug)]
#[command(next_help_heading = "Limits (sizes in B, KiB, MiB; times in ms, s, min)")]
pub(super) struct Limits {
    /// Largest body of a single question.
    #[arg(
        long,
        env = "LODEFRAME_MAX_BODY",
        value_name = "SIZE",
        default_value = "1MiB"
    )]
    pub(super) max_body: String,

    /// Connections held open at once; more are turned away with 503.
    #[arg(
        long,
        env = "LODEFRAME_MAX_CONNECTIONS",
        value_name = "COUNT",
        default_value = "4096"
    )]
    pub(super) max_connections: String,

    /// Requests answered at once; more are turned away with 503.
    #[arg(
        long,
        env = "LODEFRAME_MAX_CONCURRENT",
        value_name = "COUNT",
        default_value = "1024"
    )]
    pub(super) max_concurrent: String,

    /// Steps that the way of one question may have.
    #[arg(
        long,
        env = "LODEFRAME_MAX_STEPS",
        value_name = "COUNT",
        default_value = "1000"
    )]
    pub(super) max_steps: String,

    /// Points that one sweep may have.
    #[arg(
        long,
        env = "LODEFRAME_MAX_POINTS",
        value_name = "COUNT",
        default_value = "10000"
    )]
    pub(super) max_points: String,

    /// Monte Carlo trials that one question may ask for.
    #[arg(
        long,
        env = "LODEFRAME_MAX_TRIALS",
        value_name = "COUNT",
        default_value = "1000000"
    )]
    pub(super) max_trials: String,

    /// Longest row of a series, as text.
    #[arg(
        long,
        env = "LODEFRAME_MAX_ROW",
        value_name = "SIZE",
        default_value = "1MiB"
    )]
    pub(super) max_row: String,

    /// Largest batch of rows of a series in the Arrow format.
    #[arg(
        long,
        env = "LODEFRAME_MAX_BATCH",
        value_name = "SIZE",
        default_value = "16MiB"
    )]
    pub(super) max_batch: String,

    /// Answer of a series that waits for a client which does not read it.
    #[arg(
        long,
        env = "LODEFRAME_BUFFER",
        value_name = "SIZE",
        default_value = "1MiB"
    )]
    pub(super) buffer: String,

    /// Time for one request, from its headers to the head of its answer.
    #[arg(
        long,
        env = "LODEFRAME_REQUEST_TIMEOUT",
        value_name = "TIME",
        default_value = "30s"
    )]
    pub(super) request_timeout: String,

    /// Time for the headers of a request to arrive, and for a connection to stay without one.
    #[arg(
        long,
        env = "LODEFRAME_IDLE_TIMEOUT",
        value_name = "TIME",
        default_value = "75s"
    )]
    pub(super) idle_timeout: String,

    /// Time that running requests get to finish when the service is told to stop.
    #[arg(
        long,
        env = "LODEFRAME_GRACE",
        value_name = "TIME",
        default_value = "30s"
    )]
    pub(super) grace: String,
}
