//! The OpenAPI document.

use axum::{
    extract::State,
    http::header::CONTENT_TYPE,
    response::{IntoResponse, Response},
};

use crate::http::{AppState, accept, problem::CommonProblems};

/// This document.
#[utoipa::path(
    get, path = "/openapi.json", tag = "service", operation_id = "openapi",
    responses((status = 200, description = "The OpenAPI 3.1 document of the service", body = serde_json::Value), CommonProblems),
)]
pub(crate) async fn openapi(State(state): State<AppState>) -> Response {
    ([(CONTENT_TYPE, accept::JSON)], state.openapi.clone()).into_response()
}
