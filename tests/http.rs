//! What every answer of the service has in common, and the resources that are not about fields.

use axum::{
    body::Body,
    http::{Request, StatusCode},
};
use lodeframe::{AppState, app, config::Config};

use crate::support::{get, send, service};

#[tokio::test]
async fn health_is_ok() {
    for path in ["/health/live", "/health/ready"] {
        let answer = get(path, &[]).await;
        assert_eq!(answer.status, StatusCode::OK);
        assert_eq!(answer.text(), r#"{"status":"ok"}"#);
    }
}

#[tokio::test]
async fn every_answer_has_an_id_of_its_own_and_safe_headers() {
    let (one, two) = (get("/health/live", &[]).await, get("/nowhere", &[]).await);
    for answer in [&one, &two] {
        let id: uuid::Uuid = answer.header("x-request-id").parse().expect("a UUID");
        assert_eq!(id.get_version_num(), 4);
        assert_eq!(answer.header("x-content-type-options"), "nosniff");
        assert_eq!(
            answer.header("content-security-policy"),
            "default-src 'none'; frame-ancestors 'none'"
        );
    }
    assert_ne!(one.header("x-request-id"), two.header("x-request-id"));
}

#[tokio::test]
async fn pages_load_nothing_from_outside() {
    for path in ["/", "/reference", "/problems"] {
        let page = get(path, &[("accept", "text/html,*/*;q=0.8")]).await;
        assert_eq!(
            page.header("content-type"),
            "text/html; charset=utf-8",
            "{path}"
        );
        let policy = page.header("content-security-policy");
        assert!(
            policy.starts_with("default-src 'none'; script-src 'self';"),
            "{policy}"
        );
        let outside = page.text().replace("http://127.0.0.1:7410", "");
        assert!(!outside.contains("//"), "{path} names another host");
        assert!(
            !page.text().contains("<script>"),
            "{path} has a script that its policy forbids"
        );
    }
}

#[tokio::test]
async fn the_reference_has_its_files() {
    let page = get("/reference", &[]).await;
    let parts = page
        .text()
        .split('"')
        .filter(|part| part.starts_with("/reference/"));
    let files: Vec<_> = parts.collect();
    assert_eq!(files.len(), 3);
    for file in files {
        let answer = get(file, &[]).await;
        assert_eq!(answer.status, StatusCode::OK, "{file}");
        let kind = if file.ends_with("css") {
            "text/css"
        } else {
            "text/javascript"
        };
        assert_eq!(answer.header("content-type"), kind, "{file}");
    }
    get("/reference/index.html", &[]).await.problem("not_found");
}

#[tokio::test]
async fn head_answers_like_get_without_a_body() {
    let request = Request::head("/openapi.json").body(Body::empty());
    let answer = send(service(), request.expect("a request")).await;
    assert_eq!(answer.status, StatusCode::OK);
    assert!(answer.body.is_empty());
    let whole = get("/openapi.json", &[]).await;
    assert_eq!(
        answer.header("content-length"),
        whole.body.len().to_string()
    );
}

#[tokio::test]
async fn metrics_are_openmetrics_text_by_route_template() {
    let app = service();
    for path in [
        "/problems/internal",
        "/problems/overflow",
        "/secret/path?token=abc",
    ] {
        send(
            app.clone(),
            Request::get(path).body(Body::empty()).expect("a request"),
        )
        .await;
    }
    let answer = send(
        app,
        Request::get("/metrics")
            .body(Body::empty())
            .expect("a request"),
    )
    .await;
    assert_eq!(
        answer.header("content-type"),
        "application/openmetrics-text; version=1.0.0; charset=utf-8"
    );
    let text = answer.text();
    for line in [
        "lodeframe_request_duration_seconds_count{route=\"/problems/{code}\",class=\"2xx\"} 2",
        "lodeframe_request_duration_seconds_count{route=\"unmatched\",class=\"4xx\"} 1",
        // The request for the metrics is itself running.
        "lodeframe_requests_in_flight 1",
        "lodeframe_requests_shed_total 0",
        "lodeframe_connections 0",
        "lodeframe_connections_shed_total 0",
        "lodeframe_problems_total{code=\"not_found\"} 1",
        "lodeframe_panics_total 0",
        "lodeframe_build_info{version=\"0.1.0\"} 1",
    ] {
        assert!(text.lines().any(|found| found == line), "{line} in\n{text}");
    }
    assert!(text.ends_with("# EOF\n"));
    assert!(!text.contains("secret"));
}

#[tokio::test]
async fn only_named_origins_may_ask_from_a_browser() {
    let config = Config {
        cors_origins: vec!["https://lab.example".to_owned()],
        ..Config::default()
    };
    let app = app(AppState::new(config, None));
    let ask = |origin: &str| {
        let request = Request::get("/health/live").header("origin", origin);
        send(app.clone(), request.body(Body::empty()).expect("a request"))
    };
    let allowed = ask("https://lab.example").await;
    assert_eq!(
        allowed.header("access-control-allow-origin"),
        "https://lab.example"
    );
    assert_eq!(
        allowed.header("access-control-expose-headers"),
        "etag,x-request-id"
    );
    assert_eq!(
        ask("https://other.example")
            .await
            .header("access-control-allow-origin"),
        ""
    );

    let preflight = Request::options("/problems")
        .header("origin", "https://lab.example")
        .header("access-control-request-method", "POST");
    let answer = send(
        app.clone(),
        preflight.body(Body::empty()).expect("a request"),
    )
    .await;
    assert_eq!(answer.status, StatusCode::OK);
    assert_eq!(
        answer.header("access-control-allow-origin"),
        "https://lab.example"
    );
}
