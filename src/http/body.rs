//! The body of a request, read whole.

use axum::{
    body::Body,
    extract::{FromRequest, Request},
    http::{HeaderMap, header},
};
use bytes::Bytes;
use http_body_util::{BodyExt, LengthLimitError, Limited};

use super::{AppState, problem::Problem};
use crate::document::Code;

/// A body that says it is JSON in UTF-8 and is no longer than `--max-body`; not yet parsed.
pub struct JsonBody(pub Bytes);

impl FromRequest<AppState> for JsonBody {
    type Rejection = Problem;

    async fn from_request(request: Request, state: &AppState) -> Result<JsonBody, Problem> {
        let (head, body) = request.into_parts();
        check_type(&head.headers)?;
        read(body, state.config.max_body).await.map(JsonBody)
    }
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

async fn read(body: Body, limit: usize) -> Result<Bytes, Problem> {
    match Limited::new(body, limit).collect().await {
        Ok(collected) => Ok(collected.to_bytes()),
        Err(error) if error.is::<LengthLimitError>() => Err(too_large(limit)),
        // The limit reports its own kind of error inside the body's.
        Err(error)
            if std::iter::successors(error.source(), |e| e.source())
                .any(|e| e.is::<LengthLimitError>()) =>
        {
            Err(too_large(limit))
        }
        Err(_) => Err(Problem::new(
            Code::Syntax,
            "The body broke off, or its chunks were not well-formed; send it whole.",
        )),
    }
}

fn too_large(limit: usize) -> Problem {
    Problem::new(
        Code::BodyTooLarge,
        format!("The body is longer than the {limit} bytes that a single question may have."),
    )
}
