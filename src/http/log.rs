//! The log: one line a request, and the few events of the service itself, as text or as JSON.
//!
//! It holds route templates, never paths or queries; no token and no field value reaches it.

use std::{
    fmt::{self, Write as _},
    io,
    sync::OnceLock,
    time::{Duration, SystemTime},
};

use uuid::Uuid;

use super::gather::{Gather, Guard};
use crate::config::LogForm;

/// The log of this process; before [`start`], and with `--log off`, lines go nowhere.
static LOG: OnceLock<Log> = OnceLock::new();

struct Log {
    json: bool,
    lines: Gather,
}

/// Starts the log of this process; what is left of it is written when the guard is dropped.
///
/// # Panics
/// When it was started before.
pub fn start(form: LogForm, out: impl io::Write + Send + 'static) -> Option<Guard> {
    // The message of a panic may quote what was asked, so only its place is logged.
    std::panic::set_hook(Box::new(|panic| match panic.location() {
        Some(place) => event("error", "panic", &place),
        None => event("error", "panic", &"somewhere"),
    }));
    if form == LogForm::Off {
        return None;
    }
    let (lines, guard) = Gather::start(out);
    let json = form == LogForm::Json;
    assert!(
        LOG.set(Log { json, lines }).is_ok(),
        "the log is started once"
    );
    Some(guard)
}

/// Logs an event of the service itself.
pub(super) fn event(level: &'static str, event: &str, detail: &dyn fmt::Display) {
    write(|line| {
        line.word("level", level)?;
        line.word("event", event)?;
        line.text("detail", detail)
    });
}

/// One answered request.
pub(super) struct Access<'a> {
    pub(super) method: &'a str,
    pub(super) route: &'a str,
    pub(super) status: u16,
    pub(super) time: Duration,
    pub(super) id: Uuid,
    pub(super) trace: Option<&'a str>,
}

/// Logs one answered request.
pub(super) fn access(access: &Access<'_>) {
    write(|line| {
        line.word("level", "info")?;
        line.word("event", "request")?;
        line.text("method", &access.method)?;
        line.word("route", access.route)?;
        line.number("status", access.status.into())?;
        line.number("microseconds", access.time.as_micros())?;
        let mut id = Uuid::encode_buffer();
        line.word("request", access.id.as_hyphenated().encode_lower(&mut id))?;
        access
            .trace
            .map_or(Ok(()), |trace| line.word("trace", trace))
    });
}

fn write(fields: impl FnOnce(&mut Line) -> fmt::Result) {
    let Some(log) = LOG.get() else { return };
    let mut line = Line {
        json: log.json,
        text: String::with_capacity(256),
    };
    let time = humantime::format_rfc3339_micros(SystemTime::now());
    // Writing into a String cannot fail.
    let _ = line.text("time", &time).and_then(|()| fields(&mut line));
    line.text.push_str(if log.json { "}\n" } else { "\n" });
    log.lines.line(line.text.as_bytes());
}

/// A line in the making: `name=value` pairs, or the members of a JSON object.
struct Line {
    json: bool,
    text: String,
}

impl Line {
    fn name(&mut self, name: &'static str) {
        let first = self.text.is_empty();
        if self.json {
            self.text.push_str(if first { "{\"" } else { ",\"" });
            self.text.push_str(name);
            self.text.push_str("\":");
        } else {
            if !first {
                self.text.push(' ');
            }
            self.text.push_str(name);
            self.text.push('=');
        }
    }

    /// A value that holds neither quotes nor control characters.
    fn word(&mut self, name: &'static str, value: &str) -> fmt::Result {
        self.name(name);
        let quote = if self.json { "\"" } else { "" };
        self.text.push_str(quote);
        self.text.push_str(value);
        self.text.push_str(quote);
        Ok(())
    }

    fn number(&mut self, name: &'static str, value: u128) -> fmt::Result {
        self.name(name);
        write!(self.text, "{value}")
    }

    /// Any value; quoted where the form asks for it.
    fn text(&mut self, name: &'static str, value: &dyn fmt::Display) -> fmt::Result {
        self.name(name);
        let value = value.to_string();
        if self.json || value.contains([' ', '"', '=', '\n']) {
            self.text += &serde_json::to_string(&value).map_err(|_| fmt::Error)?;
        } else {
            self.text += &value;
        }
        Ok(())
    }
}
