//! Bytes of an Arrow stream, put together to batches. A message is held whole, so its size is
//! looked at before its bytes are taken; that of compressed buffers, which say it, before they are
//! unpacked, and one message at a time.

use std::collections::VecDeque;
use std::panic::{AssertUnwindSafe, catch_unwind};

use arrow_array::RecordBatch;
use arrow_buffer::{Buffer, MutableBuffer};
use arrow_ipc::reader::StreamDecoder;
use arrow_ipc::{MessageHeader, root_as_message};
use arrow_schema::SchemaRef;
use bytes::{Buf, Bytes};

use crate::document::{Code, Fault};

/// The bytes that begin a message: a mark, and the length of what describes it.
const PREFIX: usize = 8;
const MARK: [u8; 4] = [0xff; 4];
/// Rows of a larger batch that are answered together: few enough that their columns stay in the
/// caches of a core and are allocated from memory at hand. Not a multiple of 512, so that columns
/// do not fall on each other there.
const TOGETHER: usize = 4000;

/// Takes bytes and gives batches.
#[derive(Debug)]
pub(in crate::series) struct Frames {
    decoder: StreamDecoder,
    /// What has come of the description of a message, its prefix included.
    head: Vec<u8>,
    /// What has come of its body, and how long that is, once described.
    body: Option<(MutableBuffer, usize)>,
    /// Where in the body compressed buffers stand, each with its length.
    packed: Vec<(usize, usize)>,
    /// What came behind a message that waits to be unpacked.
    rest: Bytes,
    most: usize,
    ready: VecDeque<RecordBatch>,
    ended: bool,
}

impl Frames {
    /// Nothing yet; a message may have so many bytes.
    pub(in crate::series) fn new(most: usize) -> Frames {
        Frames {
            decoder: StreamDecoder::new(),
            head: Vec::new(),
            body: None,
            packed: Vec::new(),
            rest: Bytes::new(),
            most,
            ready: VecDeque::new(),
            ended: false,
        }
    }

    /// Takes more bytes.
    ///
    /// # Errors
    /// They are no Arrow stream, or a message is too large.
    pub(in crate::series) fn push(&mut self, bytes: &[u8]) -> Result<(), Fault> {
        if self.waits() {
            self.rest = [&self.rest, bytes].concat().into();
            return Ok(());
        }
        let taken = self.gather(bytes)?;
        self.rest = Bytes::copy_from_slice(&bytes[taken..]);
        Ok(())
    }

    /// Whether a whole message waits to be unpacked.
    pub(in crate::series) fn waits(&self) -> bool {
        let mut body = self.body.iter();
        !self.packed.is_empty() && body.all(|(body, length)| body.len() == *length)
    }

    /// Unpacks messages until there is a batch, or no whole one waits any more.
    ///
    /// # Errors
    /// As for [`push`](Self::push).
    pub(in crate::series) fn unpack(&mut self) -> Result<(), Fault> {
        while self.ready.is_empty() && self.waits() {
            self.decode()?;
            let mut rest = std::mem::take(&mut self.rest);
            let taken = self.gather(&rest)?;
            rest.advance(taken);
            self.rest = rest;
        }
        Ok(())
    }

    /// Takes bytes up to a whole message that is packed; how many.
    fn gather(&mut self, all: &[u8]) -> Result<usize, Fault> {
        let mut bytes = all;
        while !bytes.is_empty() && !self.waits() {
            if self.ended {
                return Err(broken("bytes follow its end"));
            }
            let taken = match &mut self.body {
                Some((body, length)) => {
                    let taken = bytes.len().min(*length - body.len());
                    body.extend_from_slice(&bytes[..taken]);
                    if body.len() == *length && self.packed.is_empty() {
                        self.decode()?;
                    }
                    taken
                }
                None => {
                    let taken = bytes.len().min(self.lacking()?);
                    self.head.extend_from_slice(&bytes[..taken]);
                    if self.lacking()? == 0 {
                        self.described()?;
                    }
                    taken
                }
            };
            bytes = &bytes[taken..];
        }
        Ok(all.len() - bytes.len())
    }

    /// The next rows of whole batches.
    pub(in crate::series) fn next(&mut self) -> Option<RecordBatch> {
        let batch = self.ready.pop_front()?;
        let rows = batch.num_rows();
        if rows <= TOGETHER {
            return Some(batch);
        }
        self.ready
            .push_front(batch.slice(TOGETHER, rows - TOGETHER));
        Some(batch.slice(0, TOGETHER))
    }

    /// Whether a whole batch waits.
    pub(in crate::series) fn is_ready(&self) -> bool {
        !self.ready.is_empty()
    }

    /// The schema, once it has come.
    pub(in crate::series) fn schema(&self) -> Option<SchemaRef> {
        self.decoder.schema()
    }

    /// Whether the bytes may end here.
    ///
    /// # Errors
    /// They end within a message, before the schema, or without the marker of their end.
    pub(in crate::series) fn end(&self) -> Result<(), Fault> {
        if self.schema().is_none() {
            return Err(broken("it ends before its schema"));
        }
        if self.ended {
            return Ok(());
        }
        Err(broken(if self.head.is_empty() {
            "it ends without the marker of its end, so whatever wrote it did not finish; close the \
             writer"
        } else {
            "it ends within a message"
        }))
    }

    /// How many bytes of the description are still to come.
    fn lacking(&self) -> Result<usize, Fault> {
        let have = self.head.len();
        let Some(prefix) = self.head.first_chunk::<PREFIX>() else {
            return Ok(PREFIX - have);
        };
        let [.., a, b, c, d] = *prefix;
        if prefix[..4] != MARK {
            return Err(broken(
                "a message does not begin with the mark of one (a file of Arrow is no stream; nor \
                 are streams from before Arrow 0.15)",
            ));
        }
        let length = u32::from_le_bytes([a, b, c, d]) as usize;
        self.bounded(length, "")?;
        Ok(PREFIX + length - have)
    }

    /// The description is whole: what follows?
    fn described(&mut self) -> Result<(), Fault> {
        if self.head.len() == PREFIX {
            // The decoder looks at a message without a body only when more follows it.
            self.ended = true;
            return self.decode();
        }
        let message = root_as_message(&self.head[PREFIX..]);
        let message = message.map_err(|error| broken(&error.to_string()))?;
        let batch = match message.header_type() {
            MessageHeader::DictionaryBatch => {
                let dictionary = message.header_as_dictionary_batch();
                dictionary.and_then(|dictionary| dictionary.data())
            }
            _ => message.header_as_record_batch(),
        };
        let packed = batch.filter(|batch| batch.compression().is_some());
        let buffers = packed.and_then(|batch| batch.buffers());
        let place = |buffer: &arrow_ipc::Buffer| {
            let [from, length] = [buffer.offset(), buffer.length()].map(usize::try_from);
            Some((from.ok()?, length.ok().filter(|length| *length > 0)?))
        };
        self.packed = buffers.iter().flatten().filter_map(place).collect();
        let length = usize::try_from(message.bodyLength())
            .map_err(|_| broken("a message has a negative length"))?;
        self.bounded(length, "")?;
        self.body = Some((MutableBuffer::new(length), length));
        if length == 0 {
            // There is nothing to unpack, whatever it says.
            self.packed.clear();
            self.decode()
        } else {
            Ok(())
        }
    }

    /// How many bytes the compressed buffers of a body will have, as each says before its own.
    fn unpacked(&self, body: &[u8]) -> usize {
        let each = self.packed.iter().map(|(from, length)| {
            let prefix = body.get(*from..).and_then(<[u8]>::first_chunk);
            match prefix.map(|prefix| i64::from_le_bytes(*prefix)) {
                // It is not compressed after all; or there is none, which the decoder will find.
                Some(-1) | None => *length,
                Some(unpacked) => usize::try_from(unpacked).unwrap_or(0),
            }
        });
        each.fold(0, usize::saturating_add)
    }

    fn bounded(&self, length: usize, unpacked: &str) -> Result<(), Fault> {
        if length <= self.most {
            return Ok(());
        }
        let detail = format!(
            "a batch has {length} bytes{unpacked}; this service takes up to {} at once. Write smaller \
             batches, such as of 65536 rows",
            self.most
        );
        Err(Fault::whole(Code::BatchTooLarge, detail))
    }

    /// Decodes a whole message.
    fn decode(&mut self) -> Result<(), Fault> {
        if let Some((body, _)) = &self.body {
            self.bounded(self.unpacked(body), " unpacked")?;
        }
        self.packed.clear();
        let head = Buffer::from_vec(std::mem::take(&mut self.head));
        // In a buffer of its own, which begins where a processor likes it to, columns need no copy.
        let body = self.body.take().map(|(body, _)| Buffer::from(body));
        let decoder = &mut self.decoder;
        let ready = &mut self.ready;
        let decoded = catch_unwind(AssertUnwindSafe(|| {
            for mut part in [Some(head), body].into_iter().flatten() {
                while !part.is_empty() {
                    ready.extend(decoder.decode(&mut part)?);
                }
            }
            Ok(())
        }));
        match decoded {
            Ok(Ok(())) => {}
            Ok(Err::<(), arrow_schema::ArrowError>(error)) => {
                return Err(broken(&error.to_string()));
            }
            Err(_) => return Err(broken("a message contradicts itself")),
        }
        Ok(())
    }
}

fn broken(why: &str) -> Fault {
    Fault::whole(
        Code::Syntax,
        format!("the body is not a well-formed Arrow IPC stream: {why}"),
    )
}
