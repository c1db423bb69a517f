//! The browsable API reference, whole within the binary.

use std::sync::Arc;

use axum::{
    extract::{Path, rejection::PathRejection},
    http::header::{CACHE_CONTROL, CONTENT_TYPE},
    response::{IntoResponse, Response},
};
use utoipa_swagger_ui::Config;

use super::html;
use crate::{
    document::Code,
    http::problem::{CommonProblems, Problem, ProblemDocument},
};

/// What the page asks for; nothing else of what the viewer brings is served.
const ASSETS: [&str; 2] = ["swagger-ui.css", "swagger-ui-bundle.js"];

/// The browsable reference of every path.
#[utoipa::path(
    get, path = "/reference", tag = "service", operation_id = "reference",
    responses((status = 200, description = "A page", body = String, content_type = "text/html"), CommonProblems),
)]
pub(crate) async fn reference() -> Response {
    html(include_str!("../../page/reference.html"))
}

/// A style sheet or script of the reference.
#[utoipa::path(
    get, path = "/reference/{file}", tag = "service", operation_id = "reference_asset",
    params(("file" = String, Path, description = "The name of the file", example = "swagger-ui.css")),
    responses(
        (status = 200, description = "The file", content(
            (String = "text/css"), (String = "text/javascript"),
        )),
        (status = 404, description = "There is no such file", body = ProblemDocument, content_type = "application/problem+json"),
        CommonProblems,
    ),
)]
pub(crate) async fn reference_asset(
    file: Result<Path<String>, PathRejection>,
) -> Result<Response, Problem> {
    let missing = || Problem::new(Code::NotFound, "The reference has no file of this name.");
    let Path(file) = file.map_err(|_| missing())?;
    if file == "start.js" {
        let kind = [(CONTENT_TYPE, "text/javascript")];
        return Ok((kind, include_str!("../../page/reference.js")).into_response());
    }
    if !ASSETS.contains(&file.as_str()) {
        return Err(missing());
    }
    let asset = utoipa_swagger_ui::serve(&file, Arc::new(Config::from("/openapi.json")))
        .ok()
        .flatten()
        .ok_or_else(missing)?;
    let headers = [
        (CONTENT_TYPE, asset.content_type),
        (CACHE_CONTROL, "public, max-age=86400".to_owned()),
    ];
    Ok((headers, asset.bytes.into_owned()).into_response())
}
