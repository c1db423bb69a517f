//! How the tests ask the service.

use std::path::Path;

use axum::{
    Router,
    body::Body,
    http::{HeaderMap, Request, StatusCode},
};
use http_body_util::BodyExt;
use lodeframe::{AppState, app, config::Config, frames};
use serde_json::Value;
use tower::ServiceExt;

/// A whole answer.
pub(crate) struct Answer {
    pub(crate) status: StatusCode,
    pub(crate) headers: HeaderMap,
    pub(crate) body: Vec<u8>,
}

impl Answer {
    pub(crate) fn text(&self) -> &str {
        std::str::from_utf8(&self.body).expect("UTF-8")
    }

    pub(crate) fn json(&self) -> Value {
        serde_json::from_slice(&self.body)
            .unwrap_or_else(|error| panic!("{error}: {}", self.text()))
    }

    pub(crate) fn header(&self, name: &str) -> &str {
        let value = self.headers.get(name);
        value.map_or("", |value| value.to_str().expect("visible ASCII"))
    }

    /// Checks that this is a problem document of the code, whole and consistent, and gives it.
    #[track_caller]
    pub(crate) fn problem(&self, code: &str) -> Value {
        assert_eq!(
            self.header("content-type"),
            "application/problem+json",
            "{}",
            self.text()
        );
        let problem = self.json();
        assert_eq!(problem["type"], format!("/problems/{code}"), "{problem}");
        assert_eq!(problem["status"], self.status.as_u16());
        let id = format!("urn:uuid:{}", self.header("x-request-id"));
        assert_eq!(problem["instance"], id);
        assert!(problem["title"].is_string() && problem["detail"].is_string());
        assert!(problem["errors"].is_array());
        problem
    }
}

/// The service with its default settings and the demonstration's catalogue.
pub(crate) fn service() -> Router {
    let file = concat!(env!("CARGO_MANIFEST_DIR"), "/deploy/demo/frames.toml");
    let catalogue = frames::load(Path::new(file)).expect("the demonstration is right");
    app(AppState::new(Config::default(), Some(catalogue)))
}

/// Sends a request to a router of its own.
pub(crate) async fn send(app: Router, request: Request<Body>) -> Answer {
    let response = app.oneshot(request).await.expect("a router does not fail");
    let (head, body) = response.into_parts();
    Answer {
        status: head.status,
        headers: head.headers,
        body: body
            .collect()
            .await
            .expect("a whole body")
            .to_bytes()
            .to_vec(),
    }
}

/// `GET` with headers.
pub(crate) async fn get(path: &str, headers: &[(&str, &str)]) -> Answer {
    let mut request = Request::get(path);
    for (name, value) in headers {
        request = request.header(*name, *value);
    }
    send(service(), request.body(Body::empty()).expect("a request")).await
}
