//! The log: one line a request, and the few events of the service itself, as text or as JSON.
//!
//! It holds route templates, never paths or queries; no token and no field value reaches it.

use std::{
    cell::RefCell,
    fmt, io,
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
pub fn event(level: &'static str, event: &'static str, detail: &dyn fmt::Display) {
    write(|line| {
        line.word("level", level);
        line.text("event", event);
        line.text("detail", &detail.to_string());
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
    pub(super) holder: Option<&'a str>,
}

/// Logs one answered request.
pub(super) fn access(access: &Access<'_>) {
    write(|line| {
        line.word("level", "info");
        line.word("event", "request");
        line.word("method", access.method);
        line.word("route", access.route);
        line.number("status", access.status.into());
        line.number("microseconds", access.time.as_micros() as u64);
        let mut id = Uuid::encode_buffer();
        line.word("request", access.id.as_hyphenated().encode_lower(&mut id));
        if let Some(trace) = access.trace {
            line.word("trace", trace);
        }
        if let Some(holder) = access.holder {
            line.word("token_of", holder);
        }
    });
}

fn write(fields: impl FnOnce(&mut Line)) {
    let Some(log) = LOG.get() else { return };
    let mut line = Line {
        json: log.json,
        text: String::with_capacity(256),
    };
    line.time(SystemTime::now());
    fields(&mut line);
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

    /// A value that needs no escapes; JSON has it in quotes.
    fn word(&mut self, name: &'static str, value: &str) {
        self.name(name);
        let quote = if self.json { "\"" } else { "" };
        self.text.push_str(quote);
        self.text.push_str(value);
        self.text.push_str(quote);
    }

    /// The time in UTC to the microsecond (RFC 3339).
    fn time(&mut self, now: SystemTime) {
        thread_local! {
            /// The last second written, since writing one takes as long as the rest of a line.
            static SECOND: RefCell<(u64, String)> = const { RefCell::new((0, String::new())) };
        }
        let since = now.duration_since(SystemTime::UNIX_EPOCH);
        let since = since.unwrap_or_default();
        SECOND.with_borrow_mut(|(second, text)| {
            if *second != since.as_secs() {
                *second = since.as_secs();
                *text = humantime::format_rfc3339_seconds(now).to_string();
                text.pop(); // The Z, which comes after the fraction.
            }
            self.word("time", text);
        });
        let end = if self.json {
            self.text.pop();
            "Z\""
        } else {
            "Z"
        };
        // Seven digits without the first: the six that a fraction of a second has.
        let fraction = 1_000_000 + since.subsec_micros();
        self.text.push('.');
        self.text
            .push_str(&itoa::Buffer::new().format(fraction)[1..]);
        self.text.push_str(end);
    }

    fn number(&mut self, name: &'static str, value: u64) {
        self.name(name);
        self.text.push_str(itoa::Buffer::new().format(value));
    }

    /// Any text, in quotes and escaped.
    fn text(&mut self, name: &'static str, value: &str) {
        self.name(name);
        let quoted = serde_json::to_string(value).expect("a text has a JSON form");
        self.text.push_str(&quoted);
    }
}
