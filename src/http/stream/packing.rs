//! Answers that go out compressed (`Content-Encoding`), a block at a time: each block can be
//! unpacked as soon as it has come, and what is held does not grow with the answer.

use std::io;

use async_compression::{
    Level,
    tokio::write::{GzipEncoder, ZstdEncoder},
};
use bytes::Bytes;
use futures_util::FutureExt;
use tokio::io::{AsyncWrite, AsyncWriteExt};

use super::Coding;

/// Quick rather than tight: rows come faster than the best levels pack them, and numbers gain
/// little there.
const LEVEL: Level = Level::Precise(1);

/// Packs an answer piece by piece.
pub(super) enum Packer {
    Gzip(Box<GzipEncoder<Vec<u8>>>),
    Zstd(Box<ZstdEncoder<Vec<u8>>>),
}

impl Packer {
    /// For an answer in this coding; `None` for one that goes as it is.
    pub(super) fn new(coding: Coding) -> Option<Packer> {
        match coding {
            Coding::Identity => None,
            Coding::Gzip => {
                let encoder = GzipEncoder::with_quality(Vec::new(), LEVEL);
                Some(Packer::Gzip(Box::new(encoder)))
            }
            Coding::Zstd => {
                let encoder = ZstdEncoder::with_quality(Vec::new(), LEVEL);
                Some(Packer::Zstd(Box::new(encoder)))
            }
        }
    }

    /// The pieces packed, to the last byte. Only after the `last` ones the stream is whole:
    /// whoever unpacks one that breaks off before that is told.
    pub(super) fn pack(&mut self, pieces: &[Bytes], last: bool) -> Bytes {
        let packed = match self {
            Packer::Gzip(encoder) => {
                write(&mut **encoder, pieces, last);
                encoder.get_mut()
            }
            Packer::Zstd(encoder) => {
                write(&mut **encoder, pieces, last);
                encoder.get_mut()
            }
        };
        std::mem::take(packed).into()
    }
}

/// Writes to an encoder over memory, which never fails and has nothing to wait for.
fn write(mut encoder: impl AsyncWrite + Unpin, pieces: &[Bytes], last: bool) {
    let all = async {
        for piece in pieces {
            encoder.write_all(piece).await?;
        }
        if last {
            encoder.shutdown().await
        } else {
            encoder.flush().await
        }
    };
    let written: Option<io::Result<()>> = all.now_or_never();
    let written = written.expect("memory is always ready");
    written.expect("memory takes every byte");
}
