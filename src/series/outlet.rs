//! Answers of blocks put in order, with the rows counted.

use arrow_array::RecordBatch;
use arrow_buffer::Buffer;
use arrow_ipc::writer::StreamEncoder;
use bytes::Bytes;

use super::intake::Refusal;
use super::problem;
use super::{Format, Series};

/// The answer to one block of rows.
#[derive(Debug, Default)]
pub struct Done {
    /// The rows as bytes.
    pub(super) bytes: Vec<u8>,
    /// The rows as a batch.
    pub(super) batch: Option<RecordBatch>,
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
pub struct Outlet {
    output: Format,
    end: bool,
    counts: Counts,
    stopped: bool,
    /// Writes batches, once there is one.
    encoder: Option<StreamEncoder>,
}

impl Outlet {
    /// Nothing answered yet.
    pub fn new(series: &Series, output: Format) -> Outlet {
        Outlet {
            output,
            end: series.end,
            counts: Counts::default(),
            stopped: false,
            encoder: None,
        }
    }

    /// The bytes of the next block, in pieces. After a row that ended the series there are none.
    pub fn accept(&mut self, done: Done) -> Vec<Bytes> {
        if self.stopped {
            return Vec::new();
        }
        let before = self.counts.read;
        self.counts.read += done.counts.read;
        self.counts.answered += done.counts.answered;
        self.counts.refused += done.counts.refused;
        self.stopped = done.stopped;
        if let Some(batch) = done.batch {
            return self.encoded(&batch);
        }
        if done.numbers.is_empty() {
            return pieces(done.bytes);
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
        pieces(bytes)
    }

    /// A batch as bytes; its columns are shared, not copied.
    fn encoded(&mut self, batch: &RecordBatch) -> Vec<Bytes> {
        let encoder = self.encoder.get_or_insert_with(|| {
            StreamEncoder::try_new(&batch.schema()).expect("a schema that was read can be written")
        });
        let buffers = encoder.encode(batch);
        joined(buffers.expect("a batch of the schema can be written"))
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
    pub fn end(&mut self) -> Vec<Bytes> {
        if let Some(encoder) = self.encoder.take() {
            return joined(encoder.finish().expect("an end has no faults"));
        }
        let Counts {
            read,
            answered,
            refused,
        } = self.counts;
        match self.output {
            Format::Ndjson if self.end => pieces(
                format!(
                    "{{\"end\":{{\"read\":{read},\"answered\":{answered},\"refused\":{refused}}}}}\n"
                )
                .into_bytes(),
            ),
            _ => Vec::new(),
        }
    }

    /// What can still be said in the answer when the series fails after it has begun: NDJSON has
    /// room for a problem, which no end follows.
    pub fn failed(&self, refusal: &Refusal) -> Vec<Bytes> {
        match self.output {
            Format::Ndjson => {
                let row = self.counts.read + 1;
                let problem = problem::as_json(&refusal.faults);
                pieces(format!("{{\"row\":{row},\"problem\":{problem}}}\n").into_bytes())
            }
            Format::Csv | Format::Arrow => Vec::new(),
        }
    }
}

/// All of it in one piece, if there is any.
fn pieces(mut bytes: Vec<u8>) -> Vec<Bytes> {
    if bytes.is_empty() {
        return Vec::new();
    }
    // Where nobody reads, what waits counts by its bytes, not by the room they were written in.
    if bytes.capacity() > bytes.len() + bytes.len() / 8 {
        bytes.shrink_to_fit();
    }
    vec![bytes.into()]
}

/// Pieces smaller than this are copied together: each one costs more to send than to copy.
const SMALL: usize = 4096;

/// Buffers as bytes in few pieces, without a copy of the large ones.
fn joined(buffers: Vec<Buffer>) -> Vec<Bytes> {
    let mut pieces = Vec::new();
    let mut small: Vec<u8> = Vec::new();
    for buffer in buffers {
        if buffer.len() < SMALL {
            small.extend_from_slice(&buffer);
            continue;
        }
        if !small.is_empty() {
            pieces.push(std::mem::take(&mut small).into());
        }
        pieces.push(Bytes::from_owner(Shared(buffer)));
    }
    if !small.is_empty() {
        pieces.push(small.into());
    }
    pieces
}

/// A buffer that columns share, as bytes.
struct Shared(Buffer);

impl AsRef<[u8]> for Shared {
    fn as_ref(&self) -> &[u8] {
        &self.0
    }
}
