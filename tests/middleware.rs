//! Limits, panics, bodies, negotiation and caching, on small handlers made for it.

use std::{
    convert::Infallible,
    pin::Pin,
    task::{Context, Poll},
    time::Duration,
};

use axum::{
    Router,
    body::{Body, Bytes, HttpBody},
    http::{HeaderMap, Request, StatusCode},
    response::{IntoResponse, Response},
    routing::{get, post},
};
use hyper::body::Frame;
use lodeframe::{
    AppState,
    config::Config,
    http::{
        accept::negotiate,
        body::json_body,
        cache::{cached, etag},
        middleware::Observe,
        problem::Problem,
    },
};

use crate::support::{Answer, send};

async fn panics() -> Response {
    panic!("the password is swordfish")
}

async fn negotiated(headers: HeaderMap) -> Result<Response, Problem> {
    let kind = negotiate(&headers, &["application/json", "image/svg+xml", "text/csv"])?;
    Ok(kind.into_response())
}

async fn kept(headers: HeaderMap) -> Result<Response, Problem> {
    cached(
        &headers,
        etag(&[b"question", b"json"]),
        "public, max-age=60",
        async { Ok("answer".into_response()) },
    )
    .await
}

fn service(config: Config) -> Router {
    let state = AppState::new(config, None);
    Router::new()
        .route("/panic", get(panics))
        .route("/never", get(std::future::pending::<Response>))
        .route("/echo", post(async |request| json_body(request, 100).await))
        .route("/accept", get(negotiated))
        .route("/kept", get(kept))
        .layer(Observe(state.clone()))
        .with_state(state)
}

async fn ask(path: &str, headers: &[(&str, &str)]) -> Answer {
    let mut request = Request::get(path);
    for (name, value) in headers {
        request = request.header(*name, *value);
    }
    send(
        service(Config::default()),
        request.body(Body::empty()).expect("a request"),
    )
    .await
}

async fn echo(kind: Option<&str>, body: impl Into<Body>) -> Answer {
    let config = Config {
        max_body: 100,
        ..Config::default()
    };
    let mut request = Request::post("/echo");
    if let Some(kind) = kind {
        request = request.header("content-type", kind);
    }
    send(
        service(config),
        request.body(body.into()).expect("a request"),
    )
    .await
}

#[tokio::test]
async fn a_panic_answers_500_and_says_nothing_of_itself() {
    let answer = ask("/panic", &[]).await;
    assert_eq!(answer.status, StatusCode::INTERNAL_SERVER_ERROR);
    answer.problem("internal");
    assert!(!answer.text().contains("swordfish"));
}

#[tokio::test(start_paused = true)]
async fn a_request_that_does_not_end_is_given_up() {
    let answer = ask("/never", &[]).await;
    assert_eq!(answer.status, StatusCode::REQUEST_TIMEOUT);
    assert_eq!(answer.header("connection"), "close");
    let problem = answer.problem("request_timeout");
    assert!(
        problem["detail"]
            .as_str()
            .is_some_and(|text| text.contains("30 s"))
    );
}

#[tokio::test(start_paused = true)]
async fn more_requests_than_allowed_are_turned_away() {
    let app = service(Config {
        max_concurrent: 1,
        ..Config::default()
    });
    let request = |path| Request::get(path).body(Body::empty()).expect("a request");
    let running = tokio::spawn(send(app.clone(), request("/never")));
    tokio::time::sleep(Duration::from_millis(1)).await;

    let shed = send(app.clone(), request("/accept")).await;
    assert_eq!(shed.status, StatusCode::SERVICE_UNAVAILABLE);
    assert_eq!(shed.header("retry-after"), "1");
    shed.problem("overloaded");

    // A client that goes away gives its place free.
    running.abort();
    assert!(running.await.is_err_and(|error| error.is_cancelled()));
    assert_eq!(send(app, request("/accept")).await.status, StatusCode::OK);
}

#[tokio::test]
async fn bodies_are_json_in_utf_8() {
    for kind in [
        "application/json",
        "application/json; charset=utf-8",
        "Application/JSON;charset=\"UTF-8\"",
        "application/vnd.example+json",
    ] {
        let answer = echo(Some(kind), "{}").await;
        assert_eq!(
            (answer.status, answer.text()),
            (StatusCode::OK, "{}"),
            "{kind}"
        );
    }
    for kind in [
        None,
        Some("text/plain"),
        Some("application/x-www-form-urlencoded"),
        Some("application/json; charset=latin1"),
        Some("application/jsonp"),
    ] {
        let answer = echo(kind, "{}").await;
        assert_eq!(
            answer.status,
            StatusCode::UNSUPPORTED_MEDIA_TYPE,
            "{kind:?}"
        );
        answer.problem("unsupported_media_type");
    }
}

#[tokio::test]
async fn compressed_bodies_are_refused() {
    let request = Request::post("/echo")
        .header("content-type", "application/json")
        .header("content-encoding", "gzip");
    let request = request.body(Body::from("{}")).expect("a request");
    let answer = send(service(Config::default()), request).await;
    answer.problem("unsupported_media_type");
}

#[tokio::test]
async fn long_bodies_are_refused_with_and_without_a_length() {
    let json = Some("application/json");
    assert_eq!(echo(json, "x".repeat(100)).await.status, StatusCode::OK);
    let chunks = |count| Body::new(Chunks(count));
    assert_eq!(echo(json, chunks(10)).await.body.len(), 100);
    for answer in [
        echo(json, "x".repeat(101)).await,
        echo(json, chunks(11)).await,
    ] {
        assert_eq!(answer.status, StatusCode::PAYLOAD_TOO_LARGE);
        let problem = answer.problem("body_too_large");
        assert!(
            problem["detail"]
                .as_str()
                .is_some_and(|text| text.contains("100 bytes"))
        );
    }
}

/// A body of so many chunks of ten bytes, which does not know its length.
struct Chunks(usize);

impl HttpBody for Chunks {
    type Data = Bytes;
    type Error = Infallible;

    fn poll_frame(
        mut self: Pin<&mut Self>,
        _: &mut Context<'_>,
    ) -> Poll<Option<Result<Frame<Bytes>, Infallible>>> {
        let more = self.0.checked_sub(1);
        self.0 = more.unwrap_or(0);
        let chunk = Bytes::from_static(b"0123456789");
        Poll::Ready(more.map(|_| Ok(Frame::data(chunk))))
    }
}

#[tokio::test]
async fn the_accept_header_chooses() {
    // Cases in the sense of RFC 9110 §12.5.1: the most specific range gives the quality.
    for (accept, chosen) in [
        ("*/*", "application/json"),
        ("image/*", "image/svg+xml"),
        ("text/csv, application/json;q=0.9", "text/csv"),
        ("text/csv;q=0.2, application/json;q=0.5", "application/json"),
        ("*/*;q=0.5, application/json;q=0.1", "image/svg+xml"),
        ("*/*, application/json;q=0", "image/svg+xml"),
        ("TEXT/CSV", "text/csv"),
        ("text/csv ; header=present ; q=1.0, */*;q=0.1", "text/csv"),
    ] {
        assert_eq!(
            ask("/accept", &[("accept", accept)]).await.text(),
            chosen,
            "{accept}"
        );
    }
    assert_eq!(ask("/accept", &[]).await.text(), "application/json");
    for accept in [
        "application/xml",
        "",
        "image/png, */*;q=0",
        "text/csv;q=nonsense",
    ] {
        ask("/accept", &[("accept", accept)])
            .await
            .problem("not_acceptable");
    }
}

#[tokio::test]
async fn a_held_answer_is_not_sent_again() {
    let first = ask("/kept", &[]).await;
    let tag = first.header("etag").to_owned();
    assert_eq!(first.text(), "answer");
    assert!(
        tag.starts_with('"') && tag.ends_with('"') && tag.len() == 34,
        "{tag}"
    );
    for held in [tag.clone(), format!("\"other\", W/{tag}"), "*".to_owned()] {
        let again = ask("/kept", &[("if-none-match", &held)]).await;
        assert_eq!(again.status, StatusCode::NOT_MODIFIED, "{held}");
        assert!(again.body.is_empty());
        // RFC 9110 §15.4.5: a 304 carries the headers that the 200 would have carried.
        for name in ["etag", "cache-control", "vary"] {
            assert_eq!(again.header(name), first.header(name));
            assert_ne!(again.header(name), "");
        }
    }
    let other = ask("/kept", &[("if-none-match", "\"other\"")]).await;
    assert_eq!(other.status, StatusCode::OK);
}

#[test]
fn a_tag_knows_where_its_parts_end() {
    assert_ne!(etag(&[b"ab", b"c"]), etag(&[b"a", b"bc"]));
    assert_eq!(etag(&[b"ab", b"c"]), etag(&[b"ab", b"c"]));
}
