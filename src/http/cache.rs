//! Answers that a cache may keep (RFC 9110 §8.8.3 and §13.1.2, RFC 9111).

use axum::{
    http::{
        HeaderMap, HeaderValue, StatusCode,
        header::{ACCEPT, CACHE_CONTROL, ETAG, IF_NONE_MATCH, VARY},
    },
    response::{IntoResponse, Response},
};
use sha2::{Digest, Sha256};

/// How long an answer may be kept: it never changes for one version of the service.
pub const IMMUTABLE: &str = "public, max-age=86400";

/// A strong entity tag of everything the bytes of an answer depend on.
///
/// Each part is hashed with its length before it, so that moving a byte from one part to the next
/// changes the tag.
pub fn etag(parts: &[&[u8]]) -> HeaderValue {
    let mut hash = Sha256::new();
    for part in parts {
        hash.update((part.len() as u64).to_be_bytes());
        hash.update(part);
    }
    // 128 bits are plenty against collisions by chance, and half as long on the wire.
    let mut text = String::with_capacity(34);
    text.push('"');
    for byte in &hash.finalize()[..16] {
        for digit in [byte >> 4, byte & 15] {
            text.push(char::from(b"0123456789abcdef"[usize::from(digit)]));
        }
    }
    text.push('"');
    HeaderValue::try_from(text).expect("hex digits in quotes")
}

/// Whether the client already holds the answer with this tag.
fn held(headers: &HeaderMap, etag: &HeaderValue) -> bool {
    headers
        .get_all(IF_NONE_MATCH)
        .iter()
        .filter_map(|value| value.to_str().ok())
        .flat_map(|value| value.split(','))
        .map(|tag| tag.trim())
        .any(|tag| {
            tag == "*" || tag.strip_prefix("W/").unwrap_or(tag).as_bytes() == etag.as_bytes()
        })
}

/// Answers 304 when the client holds the answer, and otherwise makes it; either way with the
/// headers that let a cache keep it.
///
/// # Errors
/// Those of `answer`, which say nothing about caching.
pub async fn cached<E>(
    request: &HeaderMap,
    etag: HeaderValue,
    cache_control: &'static str,
    answer: impl Future<Output = Result<Response, E>>,
) -> Result<Response, E> {
    let mut response = if held(request, &etag) {
        StatusCode::NOT_MODIFIED.into_response()
    } else {
        answer.await?
    };
    let headers = response.headers_mut();
    headers.insert(ETAG, etag);
    headers.insert(CACHE_CONTROL, HeaderValue::from_static(cache_control));
    headers.insert(VARY, HeaderValue::from_name(ACCEPT));
    Ok(response)
}
