//! The page at the root, whole within the binary.

use axum::{
    extract::{Path, rejection::PathRejection},
    http::header,
    response::{IntoResponse, Response},
};

use crate::{
    document::Code,
    http::problem::{CommonProblems, Problem, ProblemDocument},
};

/// What the page may do: scripts, styles and questions of this service, and pictures that it
/// fetched itself.
const POLICY: &str = "default-src 'none'; script-src 'self'; style-src 'self'; \
     img-src 'self' blob: data:; connect-src 'self'; base-uri 'none'; form-action 'none'; \
     frame-ancestors 'none'";

/// A file of the page: its name, its media type and its text.
type File = (&'static str, &'static str, &'static str);

macro_rules! files {
    ($($name:literal $kind:literal),* $(,)?) => {
        &[$(($name, $kind, include_str!(concat!("../../page/", $name)))),*]
    };
}

/// What the page asks for.
const FILES: &[File] = files![
    "style.css" "text/css",
    "access.js" "text/javascript",
    "app.js" "text/javascript",
    "answer.js" "text/javascript",
    "ask.js" "text/javascript",
    "dom.js" "text/javascript",
    "faults.js" "text/javascript",
    "fields.js" "text/javascript",
    "file.js" "text/javascript",
    "frames.js" "text/javascript",
    "keep.js" "text/javascript",
    "numbers.js" "text/javascript",
    "paste.js" "text/javascript",
    "range.js" "text/javascript",
    "slices.js" "text/javascript",
    "steps.js" "text/javascript",
];

/// The page of the service.
#[utoipa::path(
    get, path = "/", tag = "service", operation_id = "page",
    responses((status = 200, description = "The page", body = String, content_type = "text/html"), CommonProblems),
)]
pub(crate) async fn page() -> Response {
    let headers = [
        (header::CONTENT_TYPE, "text/html; charset=utf-8"),
        (header::CONTENT_SECURITY_POLICY, POLICY),
        (header::REFERRER_POLICY, "no-referrer"),
        (header::CACHE_CONTROL, "no-cache"),
    ];
    (headers, include_str!("../../page/index.html")).into_response()
}

/// A style sheet or script of the page.
#[utoipa::path(
    get, path = "/page/{file}", tag = "service", operation_id = "page_asset",
    params(("file" = String, Path, description = "The name of the file", example = "app.js")),
    responses(
        (status = 200, description = "The file", content(
            (String = "text/css"), (String = "text/javascript"),
        )),
        (status = 404, description = "There is no such file", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn page_asset(
    file: Result<Path<String>, PathRejection>,
) -> Result<Response, Problem> {
    let asked = file.map(|Path(name)| name).unwrap_or_default();
    let (_, kind, text) = FILES
        .iter()
        .find(|(name, _, _)| *name == asked)
        .ok_or_else(|| Problem::new(Code::NotFound, "The page has no file of this name."))?;
    let headers = [
        (header::CONTENT_TYPE, format!("{kind}; charset=utf-8")),
        (header::CACHE_CONTROL, "no-cache".to_owned()),
    ];
    Ok((headers, *text).into_response())
}
