//! Whether the service is alive and ready.

use axum::response::Response;
use serde::Serialize;
use utoipa::ToSchema;

use super::json;
use crate::http::problem::CommonProblems;

/// The state of the service.
#[derive(Serialize, ToSchema)]
#[schema(example = json!({"status": "ok"}))]
pub(crate) struct Health {
    /// Always `ok`: a service that is not does not answer.
    status: &'static str,
}

/// Is the process alive?
#[utoipa::path(
    get, path = "/health/live", tag = "service", operation_id = "live",
    responses((status = 200, description = "It answers", body = Health), CommonProblems),
)]
pub(crate) async fn live() -> Response {
    json(&Health { status: "ok" })
}

/// Is everything loaded, so that questions can be sent?
///
/// The service listens only once everything is loaded, and stops listening when it is told to
/// stop, so a connection that is refused means "not ready".
#[utoipa::path(
    get, path = "/health/ready", tag = "service", operation_id = "ready",
    responses((status = 200, description = "It is ready", body = Health), CommonProblems),
)]
pub(crate) async fn ready() -> Response {
    json(&Health { status: "ok" })
}
