//! Cuts a stream of bytes where rows end.

use bytes::{Bytes, BytesMut};
use memchr::{memchr, memchr2, memrchr};

/// The bytes that have come and are not yet cut off.
#[derive(Debug)]
pub(super) struct Cutter {
    pending: BytesMut,
    /// Up to here the bytes were looked at.
    seen: usize,
    /// Here the last whole row ends.
    end: usize,
    /// Whether fields may be quoted, so that a line may end within one.
    quotes: bool,
    /// Whether the last byte looked at stands in one.
    state: Quotes,
}

/// Where quoted fields begin and end.
#[derive(Debug, Default)]
struct Quotes {
    within: bool,
    /// Just after the last quote that closed: there another one doubles it.
    closed: Option<usize>,
}

impl Quotes {
    /// Meets a quote.
    fn meet(&mut self, text: &[u8], at: usize) {
        if self.within {
            self.within = false;
            self.closed = Some(at + 1);
        } else {
            // Elsewhere in a field that does not begin with one, it is a letter like others.
            let begins = at == 0 || matches!(text[at - 1], b',' | b'\n');
            self.within = begins || self.closed == Some(at);
        }
    }
}

impl Cutter {
    /// Nothing yet; in a table fields may be quoted.
    pub(super) fn new(table: bool) -> Cutter {
        Cutter {
            pending: BytesMut::new(),
            seen: 0,
            end: 0,
            quotes: table,
            state: Quotes::default(),
        }
    }

    /// Takes more bytes.
    pub(super) fn push(&mut self, bytes: &[u8]) {
        self.pending.extend_from_slice(bytes);
    }

    /// Bytes that wait.
    pub(super) fn waiting(&self) -> usize {
        self.pending.len()
    }

    /// Bytes of whole rows that wait.
    pub(super) fn whole(&mut self) -> usize {
        let fresh = &self.pending[self.seen..];
        let plain = !self.quotes || (!self.state.within && memchr(b'"', fresh).is_none());
        if plain {
            if let Some(last) = memrchr(b'\n', fresh) {
                self.end = self.seen + last + 1;
            }
        } else {
            self.look_at_quotes();
        }
        self.seen = self.pending.len();
        self.end
    }

    /// Bytes of the row that has begun and not ended.
    pub(super) fn unfinished(&self) -> usize {
        self.pending.len() - self.end
    }

    /// Cuts off all whole rows.
    pub(super) fn cut(&mut self) -> Bytes {
        let end = self.end;
        self.forget(end);
        self.pending.split_to(end).freeze()
    }

    /// Cuts off the first row alone, if it is whole.
    pub(super) fn cut_first(&mut self) -> Option<Bytes> {
        let whole = self.whole();
        let first = first_row(&self.pending[..whole], self.quotes)?;
        self.forget(first);
        Some(self.pending.split_to(first).freeze())
    }

    /// Takes this away where the bytes begin with it.
    pub(super) fn strip(&mut self, mark: &[u8]) {
        if self.pending.starts_with(mark) {
            let _ = self.pending.split_to(mark.len());
        }
    }

    /// The first row that is not blank, if it is whole, or if (`all`) there are no more bytes.
    pub(super) fn first(&mut self, all: bool) -> Option<&[u8]> {
        let end = if all {
            self.pending.len()
        } else {
            self.whole()
        };
        let mut rows = self.pending[..end].split(|byte| *byte == b'\n');
        let first = rows.find(|row| !row.trim_ascii().is_empty());
        if all {
            Some(first.unwrap_or_default())
        } else {
            first
        }
    }

    /// Cuts off everything; a last row need not end with a line.
    pub(super) fn rest(&mut self) -> Bytes {
        *self = Cutter {
            pending: std::mem::take(&mut self.pending),
            ..Cutter::new(self.quotes)
        };
        self.pending.split().freeze()
    }

    /// Counts from a later byte on.
    fn forget(&mut self, bytes: usize) {
        self.end -= bytes;
        self.seen -= bytes;
        self.state.closed = self.state.closed.and_then(|at| at.checked_sub(bytes));
    }

    fn look_at_quotes(&mut self) {
        let mut at = self.seen;
        loop {
            let rest = &self.pending[at..];
            let next = if self.state.within {
                memchr(b'"', rest)
            } else {
                memchr2(b'"', b'\n', rest)
            };
            let Some(next) = next else { return };
            at += next;
            match self.pending[at] {
                b'"' => self.state.meet(&self.pending, at),
                _ => self.end = at + 1,
            }
            at += 1;
        }
    }
}

/// How long the first row of some whole rows is.
fn first_row(rows: &[u8], quotes: bool) -> Option<usize> {
    let mut state = Quotes::default();
    for at in memchr::memchr2_iter(b'"', b'\n', rows) {
        match rows[at] {
            b'"' if quotes => state.meet(rows, at),
            b'\n' if !state.within => return Some(at + 1),
            _ => {}
        }
    }
    None
}
