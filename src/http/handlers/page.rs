//! The page at the root.

use axum::response::Response;

use super::html;
use crate::http::problem::CommonProblems;

/// The page of the service.
#[utoipa::path(
    get, path = "/", tag = "service", operation_id = "page",
    responses((status = 200, description = "The page", body = String, content_type = "text/html"), CommonProblems),
)]
pub(crate) async fn page() -> Response {
    html(include_str!("../../page/index.html"))
}
