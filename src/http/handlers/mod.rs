//! One file for each resource.

pub(super) mod constants;
pub(super) mod frames;
pub(super) mod health;
pub(super) mod metrics;
pub(super) mod openapi;
pub(super) mod page;
pub(super) mod problems;
pub(super) mod reference;
pub(super) mod series;
pub(super) mod sweep;
pub(super) mod transform;
pub(super) mod units;

use axum::{
    http::{HeaderValue, header},
    response::{IntoResponse, Response},
};

use super::accept;

/// JSON as an answer.
pub(super) fn json(value: &impl serde::Serialize) -> Response {
    // Most answers fit without growing.
    let mut text = Vec::with_capacity(1024);
    serde_json::to_writer(&mut text, value).expect("answers have a JSON form");
    let mut response = Response::new(text.into());
    let kind = HeaderValue::from_static(accept::JSON);
    response.headers_mut().insert(header::CONTENT_TYPE, kind);
    response
}

/// Columns as CSV.
fn csv(text: String) -> Response {
    let kind = HeaderValue::from_static("text/csv; charset=utf-8; header=present");
    ([(header::CONTENT_TYPE, kind)], text).into_response()
}

/// A picture. It may carry styles, which dark screens need, but no script runs in it.
fn svg(text: String) -> Response {
    const POLICY: &str = "default-src 'none'; style-src 'unsafe-inline'; frame-ancestors 'none'";
    let headers = [
        (header::CONTENT_TYPE, accept::SVG),
        (header::CONTENT_SECURITY_POLICY, POLICY),
    ];
    (headers, text).into_response()
}

/// A page for people: styles of its own, scripts of this service, nothing from elsewhere.
fn html(text: impl Into<axum::body::Body>) -> Response {
    const POLICY: &str = "default-src 'none'; script-src 'self'; style-src 'self' 'unsafe-inline'; \
         img-src 'self' data:; connect-src 'self'; base-uri 'none'; form-action 'self'; \
         frame-ancestors 'none'";
    let headers = [
        (header::CONTENT_TYPE, "text/html; charset=utf-8"),
        (header::CONTENT_SECURITY_POLICY, POLICY),
        (header::REFERRER_POLICY, "no-referrer"),
    ];
    (headers, text.into()).into_response()
}
