//! Bytes of an Arrow stream, put together to batches. A message is held whole, so its size is
//! looked at before its bytes are taken.

use std::collections::VecDeque;
use std::panic::{AssertUnwindSafe, catch_unwind};

use arrow_array::RecordBatch;
use arrow_buffer::{Buffer, MutableBuffer};
use arrow_ipc::reader::StreamDecoder;
use arrow_ipc::{MessageHeader, root_as_message};
use arrow_schema::SchemaRef;

use crate::document::{Code, Fault};

/// The bytes that begin a message: a mark, and the length of what describes it.
const PREFIX: usize = 8;
const MARK: [u8; 4] = [0xff; 4];

/// Takes bytes and gives batches.
#[derive(Debug)]
pub(in crate::series) struct Frames {
    decoder: StreamDecoder,
    /// What has come of the description of a message, its prefix included.
    head: Vec<u8>,
    /// What has come of its body, and how long that is, once described.
    body: Option<(MutableBuffer, usize)>,
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
            most,
            ready: VecDeque::new(),
            ended: false,
        }
    }

    /// Takes more bytes.
    ///
    /// # Errors
    /// They are no Arrow stream, or a message is too large.
    pub(in crate::series) fn push(&mut self, mut bytes: &[u8]) -> Result<(), Fault> {
        while !bytes.is_empty() {
            if self.ended {
                return Err(broken("bytes follow its end"));
            }
            let taken = match &mut self.body {
                Some((body, length)) => {
                    let taken = bytes.len().min(*length - body.len());
                    body.extend_from_slice(&bytes[..taken]);
                    if body.len() == *length {
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
        Ok(())
    }

    /// The next batch that is whole.
    pub(in crate::series) fn next(&mut self) -> Option<RecordBatch> {
        self.ready.pop_front()
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
        self.bounded(length)?;
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
        if batch.is_some_and(|batch| batch.compression().is_some()) {
            let detail = "the buffers of a batch are compressed; write the stream without that, \
                          and compress the body as a whole (Content-Encoding) if it pays";
            return Err(Fault::whole(Code::UnsupportedMediaType, detail));
        }
        let length = usize::try_from(message.bodyLength())
            .map_err(|_| broken("a message has a negative length"))?;
        self.bounded(length)?;
        self.body = Some((MutableBuffer::new(length), length));
        if length == 0 { self.decode() } else { Ok(()) }
    }

    fn bounded(&self, length: usize) -> Result<(), Fault> {
        if length <= self.most {
            return Ok(());
        }
        let detail = format!(
            "a batch has {length} bytes; this service takes up to {} at once. Write smaller \
             batches, such as of 65536 rows",
            self.most
        );
        Err(Fault::whole(Code::BatchTooLarge, detail))
    }

    /// Decodes a whole message.
    fn decode(&mut self) -> Result<(), Fault> {
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
