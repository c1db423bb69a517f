//! The body of a request, read whole.

use std::error::Error;

use axum::{
    BoxError,
    body::HttpBody,
    extract::Request,
    http::{HeaderMap, header},
};
use bytes::Bytes;
use http_body_util::{BodyExt, LengthLimitError, Limited};

use super::problem::Problem;
use crate::document::Code;

/// The body of a request that says it is JSON in UTF-8; not yet parsed.
///
/// # Errors
/// It is of another type, longer than `limit` bytes, or breaks off.
pub async fn json_body(request: Request, limit: usize) -> Result<Bytes, Problem> {
    check_type(request.headers())?;
    let mut body = Limited::new(request.into_body(), limit);
    let first = match body.frame().await {
        None => return Ok(Bytes::new()),
        Some(frame) => frame.map_err(|error| broken(error, limit))?,
    };
    let first = first.into_data().unwrap_or_default();
    if body.is_end_stream() {
        // By far the most usual: all of it came at once.
        return Ok(first);
    }
    let rest = body.collect().await.map_err(|error| broken(error, limit))?;
    Ok([first, rest.to_bytes()].concat().into())
}

fn check_type(headers: &HeaderMap) -> Result<(), Problem> {
    let unsupported = |detail: String| Problem::new(Code::UnsupportedMediaType, detail);
    if let Some(coding) = headers.get(header::CONTENT_ENCODING)
        && !coding.as_bytes().eq_ignore_ascii_case(b"identity")
    {
        return Err(unsupported(
            "The body is compressed (Content-Encoding); send it as it is.".to_owned(),
        ));
    }
    let Some(kind) = headers.get(header::CONTENT_TYPE) else {
        return Err(unsupported(
            "The request has no Content-Type; send Content-Type: application/json.".to_owned(),
        ));
    };
    if kind.as_bytes() == b"application/json" {
        return Ok(());
    }
    let kind = kind.to_str().unwrap_or_default().to_ascii_lowercase();
    let mut parts = kind.split(';').map(str::trim);
    let essence = parts.next().unwrap_or_default();
    if essence != "application/json"
        && !(essence.starts_with("application/") && essence.ends_with("+json"))
    {
        return Err(unsupported(format!(
            "The Content-Type is {essence:?}; this path reads application/json."
        )));
    }
    let charset = parts.find_map(|part| part.strip_prefix("charset="));
    match charset.map(|name| name.trim_matches('"')) {
        None | Some("utf-8" | "utf8" | "us-ascii") => Ok(()),
        Some(other) => Err(unsupported(format!(
            "The charset of the body is {other:?}; JSON is UTF-8."
        ))),
    }
}

fn broken(error: BoxError, limit: usize) -> Problem {
    // The limit reports its own kind of error, perhaps inside the body's.
    let mut cause: Option<&dyn Error> = Some(&*error);
    while let Some(error) = cause
        && !error.is::<LengthLimitError>()
    {
        cause = error.source();
    }
    if cause.is_some() {
        return Problem::new(
            Code::BodyTooLarge,
            format!("The body is longer than the {limit} bytes that a single question may have."),
        );
    }
    Problem::new(
        Code::Syntax,
        "The body broke off, or its chunks were not well-formed; send it whole.",
    )
}
