//! The command line: start, and a graceful stop.

use std::path::Path;
use std::process::ExitCode;

use clap::{ArgMatches, CommandFactory, FromArgMatches};
use lodeframe::{
    AppState,
    config::{Command, CommandLine, Config, Settings, Tokens, environment, unknown_variables},
    frames::{self, Catalogue, LoadFault},
    http::{
        app,
        listen::{listener, room},
        log, openapi,
        serve::serve,
    },
};
use sd_notify::NotifyState;
use tokio::{
    net::TcpListener,
    signal::unix::{SignalKind, signal},
};

/// The service could not start, for a reason outside its settings.
const CANNOT_START: u8 = 1;
/// The settings are wrong.
const WRONG_SETTINGS: u8 = 2;

fn main() -> ExitCode {
    let matches = CommandLine::command().get_matches();
    let line = CommandLine::from_arg_matches(&matches).unwrap_or_else(|error| error.exit());
    match line.command {
        Some(Command::Check { file }) => check(&file),
        Some(Command::Openapi) => {
            print!("{}", openapi::text());
            ExitCode::SUCCESS
        }
        Some(Command::Token { name }) => token(&name),
        Some(Command::Serve(settings)) => start(&settings, &matches),
        None => start(&line.serve, &matches),
    }
}

fn start(settings: &Settings, matches: &ArgMatches) -> ExitCode {
    let mut faults = unknown_variables(std::env::vars_os().map(|(name, _)| name));
    let config = settings.check().unwrap_or_else(|found| {
        faults.extend(found);
        Config::default()
    });
    if !faults.is_empty() {
        eprintln!("lodeframe cannot start:\n  {}", faults.join("\n  "));
        return ExitCode::from(WRONG_SETTINGS);
    }
    if settings.print_config {
        print!("{}", environment(matches));
        return ExitCode::SUCCESS;
    }
    let frames = match config.frames.as_deref().map(frames::load).transpose() {
        Ok(frames) => frames,
        Err(faults) => {
            eprintln!("lodeframe cannot start:\n  {}", lines(&faults).join("\n  "));
            return ExitCode::from(WRONG_SETTINGS);
        }
    };
    let _log = log::start(config.log, std::io::stderr());
    let listener = match listener(&config) {
        Ok(listener) => listener,
        Err(fault) => {
            eprintln!("lodeframe cannot start: {fault}");
            return ExitCode::from(CANNOT_START);
        }
    };
    // For what comes in; what answers has threads of its own.
    let runtime = tokio::runtime::Builder::new_current_thread()
        .enable_all()
        .build();
    match runtime.and_then(|runtime| runtime.block_on(run(listener, config, frames))) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            eprintln!("lodeframe cannot start: {error}");
            ExitCode::from(CANNOT_START)
        }
    }
}

/// Loads a catalogue as the service would, and prints its tree or its faults.
fn check(file: &Path) -> ExitCode {
    match frames::load(file) {
        Ok(catalogue) => {
            println!("{catalogue}");
            ExitCode::SUCCESS
        }
        Err(faults) => {
            eprintln!("{}", lines(&faults).join("\n"));
            ExitCode::from(WRONG_SETTINGS)
        }
    }
}

/// Makes a bearer token: its line for the file goes to standard output, the secret beside it.
fn token(name: &str) -> ExitCode {
    match Tokens::make(name) {
        Ok((secret, line)) => {
            eprintln!(
                "The token of {name}, shown only now (send it as Authorization: Bearer TOKEN):\n{secret}\n\
                 Its line for the file of --tokens, which does not give it away:"
            );
            println!("{line}");
            ExitCode::SUCCESS
        }
        Err(fault) => {
            eprintln!("{fault}");
            ExitCode::from(WRONG_SETTINGS)
        }
    }
}

fn lines(faults: &[LoadFault]) -> Vec<String> {
    faults.iter().map(LoadFault::to_string).collect()
}

async fn run(
    listener: std::net::TcpListener,
    config: Config,
    frames: Option<Catalogue>,
) -> std::io::Result<()> {
    let listener = TcpListener::from_std(listener)?;
    let (mut terminate, mut interrupt) = (
        signal(SignalKind::terminate())?,
        signal(SignalKind::interrupt())?,
    );
    let stop = async move {
        tokio::select! {
            _ = terminate.recv() => {}
            _ = interrupt.recv() => {}
        }
    };
    let address = listener.local_addr()?;
    let scheme = if config.tls.is_some() {
        "https"
    } else {
        "http"
    };
    if let Err(fault) = room(&config) {
        log::event("warn", "too few open files", &fault);
    }
    let readable = config.tokens.is_some() && config.tls.is_none();
    let state = AppState::new(config, frames);
    let app = app(state.clone());
    println!(
        "Lodeframe {} listens on {scheme}://{address} (stop with Ctrl-C)",
        env!("CARGO_PKG_VERSION")
    );
    if readable && !address.ip().is_loopback() {
        log::event(
            "warn",
            "tokens travel readable",
            &"without --tls-cert whoever sees the network sees them; let a proxy on this machine speak TLS, or give a certificate",
        );
    }
    tell_manager(NotifyState::Ready);
    serve(listener, app, &state, async {
        stop.await;
        tell_manager(NotifyState::Stopping);
    })
    .await
}

/// Tells systemd, when it started the service, what the service is about to do.
fn tell_manager(news: NotifyState<'_>) {
    if let Err(error) = sd_notify::notify(&[news]) {
        log::event("warn", "systemd does not listen", &error);
    }
}
