//! Answers of blocks put in order, with the rows counted.

use super::intake::Refusal;
use super::problem;
use super::{Format, Series};

/// The answer to one block of rows.
#[derive(Debug, Default)]
pub struct Done {
    /// The rows as bytes.
    pub(super) bytes: Vec<u8>,
    /// Where in the bytes the number of a row belongs, and which row of the block it is: only
    /// here, in order, is it known how many rows came before.
    pub(super) numbers: Vec<(usize, usize)>,
    /// The rows.
    pub(super) counts: Counts,
    /// Whether a bad row ended the series here.
    pub(super) stopped: bool,
}

/// Rows of a series so far.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Counts {
    /// Rows read.
    pub read: u64,
    /// Rows answered with a field, of which components may be missing.
    pub answered: u64,
    /// Rows answered with a problem.
    pub refused: u64,
}

/// Puts answers in order.
#[derive(Debug)]
pub struct Outlet {
    output: Format,
    end: bool,
    counts: Counts,
    stopped: bool,
}

impl Outlet {
    /// Nothing answered yet.
    pub fn new(series: &Series, output: Format) -> Outlet {
        Outlet {
            output,
            end: series.end,
            counts: Counts::default(),
            stopped: false,
        }
    }

    /// The bytes of the next block. After a row that ended the series there are none.
    pub fn accept(&mut self, done: Done) -> Vec<u8> {
        if self.stopped {
            return Vec::new();
        }
        let before = self.counts.read;
        self.counts.read += done.counts.read;
        self.counts.answered += done.counts.answered;
        self.counts.refused += done.counts.refused;
        self.stopped = done.stopped;
        if done.numbers.is_empty() {
            return done.bytes;
        }
        let mut bytes = Vec::with_capacity(done.bytes.len() + 8 * done.numbers.len());
        let mut copied = 0;
        for (place, row) in done.numbers {
            bytes.extend_from_slice(&done.bytes[copied..place]);
            let number = before + row as u64 + 1;
            bytes.extend_from_slice(number.to_string().as_bytes());
            copied = place;
        }
        bytes.extend_from_slice(&done.bytes[copied..]);
        bytes
    }

    /// Whether a bad row ended the series.
    pub fn stopped(&self) -> bool {
        self.stopped
    }

    /// Rows so far.
    pub fn counts(&self) -> Counts {
        self.counts
    }

    /// What stands after the last row of a whole answer.
    pub fn end(&self) -> Vec<u8> {
        let Counts {
            read,
            answered,
            refused,
        } = self.counts;
        match self.output {
            Format::Ndjson if self.end => format!(
                "{{\"end\":{{\"read\":{read},\"answered\":{answered},\"refused\":{refused}}}}}\n"
            )
            .into_bytes(),
            _ => Vec::new(),
        }
    }

    /// What can still be said in the answer when the series fails after it has begun: NDJSON has
    /// room for a problem, which no end follows.
    pub fn failed(&self, refusal: &Refusal) -> Vec<u8> {
        match self.output {
            Format::Ndjson => {
                let row = self.counts.read + 1;
                let problem = problem::as_json(&refusal.faults);
                format!("{{\"row\":{row},\"problem\":{problem}}}\n").into_bytes()
            }
            Format::Csv => Vec::new(),
        }
    }
}
