//! How bodies are compressed. Those that come so (`Content-Encoding`) are unpacked a piece at a
//! time: what is held does not grow with what they unpack to.

use std::io;

use async_compression::tokio::bufread::{GzipDecoder, ZstdDecoder};
use axum::{
    body::Body,
    http::{HeaderMap, header},
};
use http_body_util::BodyExt;
use tokio_util::io::{ReaderStream, StreamReader};

use crate::{
    document::Code,
    http::{accept::negotiate_coding, problem::Problem},
};

/// Bytes unpacked at once.
const PIECE: usize = 64 * 1024;

/// How a body is compressed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(in crate::http) enum Coding {
    Identity,
    Gzip,
    Zstd,
}

impl Coding {
    /// The coding that the headers name (RFC 9110 §8.4).
    ///
    /// # Errors
    /// It is none that is read here.
    pub(in crate::http) fn of(headers: &HeaderMap) -> Result<Coding, Problem> {
        let mut values = headers.get_all(header::CONTENT_ENCODING).iter();
        let named = match (values.next(), values.next()) {
            (None, _) => return Ok(Coding::Identity),
            (Some(one), None) => one.to_str().unwrap_or_default(),
            (Some(_), Some(_)) => "several in a row",
        };
        match named.trim().to_ascii_lowercase().as_str() {
            "identity" => Ok(Coding::Identity),
            "gzip" | "x-gzip" => Ok(Coding::Gzip),
            "zstd" => Ok(Coding::Zstd),
            _ => Err(Problem::new(
                Code::UnsupportedMediaType,
                format!(
                    "The Content-Encoding is {named:?}; a series is read as it is, or as gzip or zstd."
                ),
            )),
        }
    }

    /// The coding of the answer that the client would like best (RFC 9110 §12.5.3).
    ///
    /// # Errors
    /// It takes none that is written here.
    pub(in crate::http) fn accepted(headers: &HeaderMap) -> Result<Coding, Problem> {
        Ok(
            match negotiate_coding(headers, &["zstd", "gzip", "identity"])? {
                "zstd" => Coding::Zstd,
                "gzip" => Coding::Gzip,
                _ => Coding::Identity,
            },
        )
    }

    /// Its name, where one is sent.
    pub(in crate::http) fn name(self) -> Option<&'static str> {
        match self {
            Coding::Identity => None,
            Coding::Gzip => Some("gzip"),
            Coding::Zstd => Some("zstd"),
        }
    }

    /// The body unpacked. What is no such coding breaks it off.
    pub(super) fn unpacked(self, body: Body) -> Body {
        if self == Coding::Identity {
            return body;
        }
        let packed = StreamReader::new(body.map_err(io::Error::other).into_data_stream());
        match self {
            Coding::Zstd => {
                let mut unpacked = ZstdDecoder::new(packed);
                unpacked.multiple_members(true);
                Body::from_stream(ReaderStream::with_capacity(unpacked, PIECE))
            }
            _ => {
                let mut unpacked = GzipDecoder::new(packed);
                unpacked.multiple_members(true);
                Body::from_stream(ReaderStream::with_capacity(unpacked, PIECE))
            }
        }
    }
}
