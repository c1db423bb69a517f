//! The log: one line a request, and the few events of the service itself.
//!
//! It holds route templates, never paths or queries; no token and no field value reaches it.

use std::{io::Write, time::Duration};

use axum::http::Method;
use tracing_appender::non_blocking::{NonBlockingBuilder, WorkerGuard};
use uuid::Uuid;

use crate::config::LogForm;

/// Lines that wait for a slow reader of the log; further ones are dropped, not waited for.
const WAITING: usize = 8 * 1024;

/// Starts the log. It is written by a thread of its own until the guard is dropped.
pub fn start(form: LogForm, out: impl Write + Send + 'static) -> Option<WorkerGuard> {
    if form == LogForm::Off {
        return None;
    }
    let (writer, guard) = NonBlockingBuilder::default()
        .buffered_lines_limit(WAITING)
        .thread_name("log")
        .finish(out);
    let log = tracing_subscriber::fmt()
        .with_writer(writer)
        .with_ansi(false);
    match form {
        LogForm::Json => log.json().flatten_event(true).init(),
        _ => log.init(),
    }
    // The message of a panic may quote what was asked, so only its place is logged.
    std::panic::set_hook(Box::new(|panic| {
        let place = panic.location().map(ToString::to_string);
        tracing::error!(place, "panic");
    }));
    Some(guard)
}

/// One answered request.
pub(super) struct Access<'a> {
    pub(super) method: &'a Method,
    pub(super) route: &'a str,
    pub(super) status: u16,
    pub(super) time: Duration,
    pub(super) id: Uuid,
    pub(super) trace: Option<&'a str>,
}

/// Writes the line of one request.
pub(super) fn access(line: &Access<'_>) {
    tracing::info!(
        target: "access",
        method = line.method.as_str(),
        route = line.route,
        status = line.status,
        seconds = line.time.as_secs_f64(),
        request = %line.id,
        trace = line.trace,
    );
}
