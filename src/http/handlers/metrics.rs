//! The counters of the service.

use axum::{
    extract::State,
    http::header::CONTENT_TYPE,
    response::{IntoResponse, Response},
};

use crate::http::{AppState, problem::CommonProblems};

const OPENMETRICS: &str = "application/openmetrics-text; version=1.0.0; charset=utf-8";

/// The counters of the service, as OpenMetrics text.
#[utoipa::path(
    get, path = "/metrics", tag = "service", operation_id = "metrics",
    responses(
        (status = 200, description = "All counters", body = String,
         content_type = "application/openmetrics-text",
         example = "# HELP lodeframe_requests_in_flight Requests being answered.\n# TYPE lodeframe_requests_in_flight gauge\nlodeframe_requests_in_flight 1\n# EOF\n"),
        CommonProblems,
    ),
)]
pub(crate) async fn metrics(State(state): State<AppState>) -> Response {
    ([(CONTENT_TYPE, OPENMETRICS)], state.metrics.text()).into_response()
}
