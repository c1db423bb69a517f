//! A series over HTTP: answered while it is asked, within bounds, and never whole by mistake.

use std::{
    pin::Pin,
    task::{Context, Poll},
    time::Duration,
};

use axum::{
    Router,
    body::{Body, Bytes, HttpBody},
    http::{HeaderMap, Request, StatusCode},
    response::Response,
};
use http_body_util::BodyExt;
use hyper::body::Frame;
use lodeframe::{AppState, app, config::Config};
use serde_json::{Value, json};
use tokio::sync::mpsc;
use tower::ServiceExt;

use crate::support::{Answer, send, service};

pub(crate) const PATH: &str = "/v1/series?velocity=row&units.velocity=km/s";
pub(crate) const NDJSON: &str = "application/x-ndjson";
pub(crate) const ROW: &str = "{\"e\":[0,0,0],\"b\":[0,0,1],\"velocity\":[1,0,0]}\n";

/// A body that a test sends piece by piece; an `Err` breaks it off.
struct Pieces(mpsc::UnboundedReceiver<Result<Bytes, std::io::Error>>);

pub(crate) type Sender = mpsc::UnboundedSender<Result<Bytes, std::io::Error>>;

impl HttpBody for Pieces {
    type Data = Bytes;
    type Error = std::io::Error;

    fn poll_frame(
        mut self: Pin<&mut Self>,
        cx: &mut Context<'_>,
    ) -> Poll<Option<Result<Frame<Bytes>, std::io::Error>>> {
        let piece = std::task::ready!(self.0.poll_recv(cx));
        Poll::Ready(piece.map(|piece| piece.map(Frame::data)))
    }
}

pub(crate) fn pieces() -> (Sender, Body) {
    let (sender, receiver) = mpsc::unbounded_channel();
    (sender, Body::new(Pieces(receiver)))
}

pub(crate) fn row(sender: &Sender, text: &str) {
    sender
        .send(Ok(Bytes::copy_from_slice(text.as_bytes())))
        .expect("someone reads");
}

pub(crate) fn request(
    path: &str,
    headers: &[(&str, &str)],
    body: impl Into<Body>,
) -> Request<Body> {
    let mut request = Request::post(path);
    for (name, value) in headers {
        request = request.header(*name, *value);
    }
    request.body(body.into()).expect("a request")
}

pub(crate) async fn ask(path: &str, headers: &[(&str, &str)], body: impl Into<Body>) -> Answer {
    send(service(), request(path, headers, body)).await
}

pub(crate) fn with(config: Config) -> Router {
    app(AppState::new(config, None))
}

async fn open(app: Router, body: Body) -> Response {
    let request = request(PATH, &[("content-type", NDJSON)], body);
    app.oneshot(request).await.expect("a router does not fail")
}

/// The next line of an answer that is sent line by line.
async fn line(answer: &mut Body) -> Value {
    let frame = answer.frame().await.expect("a frame").expect("no failure");
    serde_json::from_slice(&frame.into_data().expect("data")).expect("one line")
}

#[tokio::test]
async fn rows_are_answered_in_the_format_asked_for() {
    let table = "ex,ey,ez,bx,by,bz,vx,vy,vz\n0,0,0,0,0,1,1,0,0\n0,0,0,0,0,1,4e5,0,0\n";
    let csv = ask(
        PATH,
        &[
            ("content-type", "text/csv; charset=UTF-8"),
            ("te", "trailers"),
        ],
        table,
    )
    .await;
    assert_eq!(csv.status, StatusCode::OK);
    assert_eq!(
        csv.header("content-type"),
        "text/csv; charset=utf-8; header=present"
    );
    assert_eq!(
        csv.header("trailer"),
        "lodeframe-read, lodeframe-answered, lodeframe-refused"
    );
    let mut reader = csv::Reader::from_reader(&csv.body[..]);
    let rows: Vec<csv::StringRecord> = reader.records().map(Result::unwrap).collect();
    assert_eq!(&rows[0][1], "-1000.0000000055633");
    assert!(rows[1][9].starts_with("faster_than_light"));

    let ndjson = ask(
        PATH,
        &[("content-type", "text/csv"), ("accept", NDJSON)],
        table,
    )
    .await;
    assert_eq!(ndjson.header("content-type"), NDJSON);
    let rows: Vec<Value> = ndjson
        .text()
        .lines()
        .map(|line| serde_json::from_str(line).unwrap())
        .collect();
    assert_eq!(rows[0]["e"], json!([0.0, -1000.0000000055633, 0.0]));
    assert_eq!(rows[1]["row"], 2);
    assert_eq!(
        rows[2],
        json!({"end": {"read": 2, "answered": 1, "refused": 1}})
    );
}

#[tokio::test]
async fn tables_end_with_counts_as_trailers_for_who_takes_them() {
    let table = "ex,ey,ez,bx,by,bz,vx,vy,vz\n0,0,0,0,0,1,1,0,0\n0,0,0,0,0,1,4e5,0,0\n";
    let headers = [("content-type", "text/csv"), ("te", "gzip;q=0.5, trailers")];
    let response = service()
        .oneshot(request(PATH, &headers, table))
        .await
        .unwrap();
    let collected = response.into_body().collect().await.expect("a whole body");
    let trailers = collected.trailers().expect("trailers");
    let expected: HeaderMap = [
        ("lodeframe-read", "2"),
        ("lodeframe-answered", "1"),
        ("lodeframe-refused", "1"),
    ]
    .into_iter()
    .map(|(name, value)| (name.parse().unwrap(), value.parse().unwrap()))
    .collect();
    assert_eq!(trailers, &expected);
    let response = service()
        .oneshot(request(PATH, &headers[..1], table))
        .await
        .unwrap();
    assert!(!response.headers().contains_key("trailer"));
    let collected = response.into_body().collect().await.expect("a whole body");
    assert!(collected.trailers().is_none());
}

#[tokio::test]
async fn each_row_is_answered_before_the_next_is_asked() {
    let (sender, body) = pieces();
    row(&sender, ROW);
    let mut answer = open(service(), body).await.into_body();
    for i in 0..20 {
        assert_eq!(
            line(&mut answer).await["b"],
            json!([0.0, 0.0, 1.0000000000055633]),
            "{i}"
        );
        // A row may also come in two parts.
        let (first, second) = ROW.split_at(i + 1);
        row(&sender, first);
        tokio::task::yield_now().await;
        row(&sender, second);
    }
    line(&mut answer).await;
    drop(sender);
    assert_eq!(line(&mut answer).await["end"]["read"], 21);
    assert!(answer.frame().await.is_none());
}

#[tokio::test]
async fn what_is_wrong_at_the_start_is_a_problem() {
    let field = "ex,ey,ez,bx,by,bz";
    let headers = [("content-type", "text/csv")];
    let problem = ask(
        "/v1/series?velocity=1,0,0",
        &headers,
        "ey,ez,bx,by,bz\n1,2,3,4,5\n",
    )
    .await
    .problem("missing_field");
    assert_eq!(problem["errors"][0]["column"], "ex");
    assert!(problem["errors"][0].get("pointer").is_none());
    let problem = ask("/v1/series?velocity=9e9,0,0&colour=red", &headers, field).await;
    assert_eq!(
        problem.problem("unknown_field")["errors"][0]["parameter"],
        "colour"
    );
    ask("/v1/series?velocity=1,0,0", &headers, "")
        .await
        .problem("syntax");
    let long = "x".repeat(20 << 20);
    for kind in [NDJSON, "text/csv"] {
        let answer = ask(
            "/v1/series?velocity=1,0,0",
            &[("content-type", kind)],
            long.clone(),
        )
        .await;
        assert_eq!(answer.status, StatusCode::PAYLOAD_TOO_LARGE);
        answer.problem("row_too_long");
    }
    for headers in [
        vec![],
        vec![("content-type", "application/json")],
        vec![("content-type", "text/csv; charset=latin1")],
        vec![("content-type", "text/csv; header=absent")],
        vec![("content-type", "text/csv"), ("content-encoding", "br")],
    ] {
        ask(PATH, &headers, field)
            .await
            .problem("unsupported_media_type");
    }
    let headers = [("content-type", NDJSON), ("accept", "image/png")];
    ask(PATH, &headers, ROW).await.problem("not_acceptable");
    let (sender, body) = pieces();
    sender.send(Err(std::io::Error::other("cut"))).unwrap();
    send(service(), request(PATH, &[("content-type", NDJSON)], body))
        .await
        .problem("syntax");
}

#[tokio::test(start_paused = true)]
async fn pauses_are_short_enough_or_end_the_series() {
    let (sender, body) = pieces();
    let answer = send(service(), request(PATH, &[("content-type", NDJSON)], body)).await;
    assert_eq!(answer.status, StatusCode::REQUEST_TIMEOUT);
    answer.problem("request_timeout");
    drop(sender);

    let (sender, body) = pieces();
    row(&sender, ROW);
    let mut answer = open(service(), body).await.into_body();
    for _ in 0..5 {
        line(&mut answer).await;
        // Longer than any other request may take.
        tokio::time::sleep(Duration::from_secs(60)).await;
        row(&sender, ROW);
    }
    line(&mut answer).await;
    let last = line(&mut answer).await;
    assert_eq!(last["problem"]["type"], "/problems/request_timeout");
    assert!(answer.frame().await.expect("a cut").is_err());
}

#[tokio::test]
async fn no_failure_looks_like_a_whole_answer() {
    let failures: [&dyn Fn(&Sender); 2] =
        [&|sender| row(sender, &"[".repeat(2 << 20)), &|sender| {
            sender
                .send(Err(std::io::Error::other("the cable")))
                .unwrap()
        }];
    for fail in failures {
        let (sender, body) = pieces();
        row(&sender, ROW);
        let mut answer = open(service(), body).await.into_body();
        line(&mut answer).await;
        fail(&sender);
        let last = line(&mut answer).await;
        assert!(last.get("end").is_none() && last["problem"]["detail"].is_string());
        assert!(answer.frame().await.expect("a cut").is_err());
    }
}

#[tokio::test]
async fn whoever_does_not_read_is_served_up_to_the_buffer() {
    let config = Config {
        buffer: 100_000,
        idle_timeout: Duration::from_secs(2),
        ..Config::default()
    };
    let (sender, body) = pieces();
    let many = ROW.repeat(1000);
    for _ in 0..200 {
        row(&sender, &many);
    }
    let response = open(with(config), body).await;
    // When the service has given up, it has read a small part.
    sender.closed().await;
    let mut answer = response.into_body();
    let mut length = 0;
    let cut = loop {
        match answer.frame().await.expect("a frame") {
            Ok(frame) => length += frame.into_data().expect("data").len(),
            Err(cut) => break cut,
        }
    };
    let _ = cut;
    assert!((100_000..2_000_000).contains(&length), "{length}");
}

#[tokio::test]
async fn a_long_series_keeps_its_order_and_its_counts() {
    let mut text = String::new();
    for i in 0..30_000 {
        let v = if i % 10_000 == 5 { 4e5 } else { 1.0 };
        text += &format!("{{\"e\":[0,0,{i}],\"b\":[0,0,0],\"velocity\":[{v},0,0],\"n\":{i}}}\n");
    }
    let answer = ask(PATH, &[("content-type", NDJSON)], text).await;
    let rows: Vec<Value> = answer
        .text()
        .lines()
        .map(|line| serde_json::from_str(line).unwrap())
        .collect();
    assert_eq!(rows.len(), 30_001);
    for (i, row) in rows[..30_000].iter().enumerate() {
        assert_eq!(row["n"], i);
        if i % 10_000 == 5 {
            assert_eq!(row["row"], i + 1);
        } else {
            assert!(row["e"][2].is_number());
        }
    }
    assert_eq!(
        rows[30_000]["end"],
        json!({"read": 30_000, "answered": 29_997, "refused": 3})
    );
}

#[tokio::test]
async fn a_bad_row_can_end_the_series_and_rows_are_counted() {
    let app = service();
    let text = format!("{ROW}{}{ROW}", ROW.replace("[1,0,0]", "[4e5,0,0]"));
    let path = "/v1/series?velocity=row&units.velocity=km/s&on_error=stop";
    let answer = send(
        app.clone(),
        request(path, &[("content-type", NDJSON)], text),
    )
    .await;
    let rows: Vec<Value> = answer
        .text()
        .lines()
        .map(|line| serde_json::from_str(line).unwrap())
        .collect();
    assert_eq!(rows.len(), 3);
    assert_eq!(
        rows[2],
        json!({"end": {"read": 2, "answered": 1, "refused": 1}})
    );
    let metrics = send(app, Request::get("/metrics").body(Body::empty()).unwrap()).await;
    for line in [
        "lodeframe_rows_total{outcome=\"answered\"} 1",
        "lodeframe_rows_total{outcome=\"refused\"} 1",
    ] {
        assert!(
            metrics.text().lines().any(|own| own == line),
            "{}",
            metrics.text()
        );
    }
}
