//! The life of the process under systemd, the number of its connections, and panics.

use std::{
    io::{Read, Write},
    net::{TcpListener, TcpStream},
    os::{fd::OwnedFd, unix::net::UnixDatagram},
    pin::Pin,
    process::{Command, Stdio},
    task::{Context, Poll},
    time::Duration,
};

use axum::{body::Body, http::Request};
use http_body_util::BodyExt;
use tower::ServiceExt;

use crate::start::{Running, lodeframe};
use crate::stream::{NDJSON, PATH, ROW, request};
use crate::support::{send, service};

const GET: &str = "GET /health/ready HTTP/1.1\r\nhost: localhost\r\n";

/// The whole answer to a request whose connection ends with it.
fn ask(mut stream: TcpStream) -> String {
    let wait = Some(Duration::from_secs(30));
    stream.set_read_timeout(wait).expect("a socket option");
    stream
        .write_all(format!("{GET}connection: close\r\n\r\n").as_bytes())
        .expect("it reads");
    let mut answer = String::new();
    stream.read_to_string(&mut answer).expect("it answers");
    answer
}

/// The program as systemd starts it for a socket (sd_listen_fds(3)): the socket is descriptor 3.
fn activated(socket: &TcpListener, args: &str) -> Command {
    let socket: OwnedFd = socket.try_clone().expect("a descriptor").into();
    let program = env!("CARGO_BIN_EXE_lodeframe");
    let script =
        format!("exec 3<&0 0</dev/null; LISTEN_PID=$$ LISTEN_FDS=1 exec '{program}' serve {args}");
    let mut command = Command::new("/bin/sh");
    command
        .env_clear()
        .args(["-c", &script])
        .stdin(Stdio::from(socket));
    command
}

#[test]
fn a_socket_passed_on_outlives_the_service() {
    let socket = TcpListener::bind("127.0.0.1:0").expect("a free port");
    let address = socket.local_addr().expect("an address");
    let first = Running::spawn(&mut activated(&socket, ""));
    assert_eq!(first.address, address);
    assert!(ask(first.connect()).starts_with("HTTP/1.1 200"));
    first.terminate();
    assert_eq!(first.end().0, Some(0));
    // Nobody serves, and yet the connection is not refused; whoever comes next answers it.
    let waiting = TcpStream::connect(address).expect("the socket is still open");
    let second = Running::spawn(&mut activated(&socket, ""));
    assert!(ask(waiting).starts_with("HTTP/1.1 200"));
    second.terminate();
    assert_eq!(second.end().0, Some(0));
}

#[test]
fn a_socket_passed_on_is_no_way_around_the_tokens() {
    let socket = TcpListener::bind("0.0.0.0:0").expect("a free port");
    let output = activated(&socket, "").output().expect("it runs");
    assert_eq!(output.status.code(), Some(1));
    let message = String::from_utf8(output.stderr).expect("UTF-8");
    assert!(message.contains("--tokens FILE"), "{message}");
    let open = Running::spawn(&mut activated(&socket, "--open"));
    open.terminate();
    assert_eq!(open.end().0, Some(0));
}

#[test]
fn the_manager_is_told_when_it_is_ready_and_when_it_stops() {
    // sd_notify(3): datagrams of NAME=value to the socket that NOTIFY_SOCKET names.
    let path = std::env::temp_dir().join(format!("lodeframe-notify-{}", std::process::id()));
    let manager = UnixDatagram::bind(&path).expect("a socket");
    let wait = Some(Duration::from_secs(30));
    manager.set_read_timeout(wait).expect("a socket option");
    let news = || {
        let mut text = [0; 200];
        let length = manager.recv(&mut text).expect("news");
        String::from_utf8_lossy(&text[..length]).trim().to_owned()
    };
    let mut command = lodeframe(&["serve", "--listen", "127.0.0.1:0"]);
    let running = Running::spawn(command.env("NOTIFY_SOCKET", &path));
    assert_eq!(news(), "READY=1");
    assert!(ask(running.connect()).starts_with("HTTP/1.1 200"));
    running.terminate();
    assert_eq!(news(), "STOPPING=1");
    assert_eq!(running.end().0, Some(0));
    std::fs::remove_file(path).expect("it was there");
}

#[test]
fn more_connections_than_allowed_are_turned_away() {
    let running = Running::start(&["--max-connections", "2"]);
    let hold = || {
        let mut stream = running.connect();
        stream
            .write_all(format!("{GET}\r\n").as_bytes())
            .expect("it reads");
        stream.read_exact(&mut [0]).expect("it answers");
        stream
    };
    let held = [hold(), hold()];
    let refused = ask(running.connect());
    assert!(refused.starts_with("HTTP/1.1 503"), "{refused}");
    for part in [
        "\r\nretry-after: 1\r\n",
        "\r\ncontent-type: application/problem+json\r\n",
        "\r\nconnection: close\r\n",
        "/problems/overloaded",
        "2 connections are open",
    ] {
        assert!(refused.contains(part), "{part} in\n{refused}");
    }
    drop(held);
    // A place is free as soon as the service has seen the end of its connection.
    let again = (0..100).find_map(|_| {
        std::thread::sleep(Duration::from_millis(20));
        Some(ask(running.connect())).filter(|answer| answer.starts_with("HTTP/1.1 200"))
    });
    assert!(again.is_some(), "no place was given back");
    running.terminate();
    assert_eq!(running.end().0, Some(0));
}

#[test]
fn every_limit_is_explained_to_whoever_runs_it() {
    let help = lodeframe(&["--help"]).output().expect("it runs");
    let help = String::from_utf8(help.stdout).expect("UTF-8");
    let (_, limits) = help.split_once("\nLimits").expect("a heading");
    let (limits, _) = limits.split_once("\n\n").expect("an end");
    let flags = limits
        .split_whitespace()
        .filter(|word| word.starts_with("--"));
    let explained = include_str!("../DEVELOPERS.md");
    let mut count = 0;
    for flag in flags {
        assert!(explained.contains(&format!("`{flag}`")), "{flag}");
        count += 1;
    }
    assert!(count >= 10, "{count} limits in\n{limits}");
}

#[test]
fn a_series_without_an_end_is_told_that_the_service_stops() {
    let running = Running::start(&["--grace", "300ms"]);
    let mut stream = running.connect();
    let row = "{\"e\":[1,2,3],\"b\":[4,5,6]}\n";
    let head = "POST /v1/series?velocity=7,8,9 HTTP/1.1\r\nhost: localhost\r\n\
         content-type: application/x-ndjson\r\ntransfer-encoding: chunked\r\n\r\n";
    write!(stream, "{head}{:x}\r\n{row}\r\n", row.len()).expect("it reads");
    // The first row is answered while the series goes on.
    let mut answer = Vec::new();
    while !answer.ends_with(b"}\n\r\n") {
        let mut byte = [0];
        stream.read_exact(&mut byte).expect("it answers");
        answer.push(byte[0]);
    }
    let begun = std::time::Instant::now();
    running.terminate();
    let mut last = String::new();
    // The connection is cut, properly or not, after the last word.
    let _ = stream.read_to_string(&mut last);
    assert!(begun.elapsed() >= Duration::from_millis(300), "grace");
    assert!(last.contains("{\"row\":2,\"problem\":{"), "{last}");
    assert!(last.contains("/problems/stopping"), "{last}");
    assert!(
        !last.contains("\r\n0\r\n"),
        "not as if it were whole: {last}"
    );
    assert_eq!(running.end().0, Some(0));
}

/// A body that hands over one row, lets it be answered and then panics, as a fault of the service
/// would while a series runs.
struct Panics(Vec<Option<&'static str>>);

impl axum::body::HttpBody for Panics {
    type Data = axum::body::Bytes;
    type Error = std::convert::Infallible;

    fn poll_frame(
        mut self: Pin<&mut Self>,
        cx: &mut Context<'_>,
    ) -> Poll<Option<Result<hyper::body::Frame<Self::Data>, Self::Error>>> {
        match self.0.pop().expect("a panic that was meant") {
            Some(row) => Poll::Ready(Some(Ok(hyper::body::Frame::data(row.into())))),
            None => {
                cx.waker().wake_by_ref();
                Poll::Pending
            }
        }
    }
}

#[tokio::test]
async fn a_panic_ends_its_series_alone_and_is_counted() {
    let app = service();
    let headers = [("content-type", NDJSON)];
    for (before, answer, counted) in [(vec![None, Some(ROW)], 200, 1), (vec![], 500, 2)] {
        let body = Body::new(Panics(before));
        let response = app.clone().oneshot(request(PATH, &headers, body)).await;
        let response = response.expect("a router does not fail");
        assert_eq!(response.status(), answer);
        let mut body = response.into_body();
        let mut text = Vec::new();
        let cut = loop {
            match body.frame().await {
                Some(Ok(frame)) => text.extend_from_slice(frame.data_ref().expect("data")),
                Some(Err(_)) => break true,
                None => break false,
            }
        };
        // An answer that has begun is cut after a last word; no panic is ever a proper end.
        assert_eq!(cut, answer == 200);
        let last = text
            .split(|byte| *byte == b'\n')
            .rfind(|line| !line.is_empty());
        let last: serde_json::Value = serde_json::from_slice(last.expect("a word")).expect("JSON");
        let problem = if cut { &last["problem"] } else { &last };
        assert_eq!(problem["type"], "/problems/internal");
        assert!(!problem.to_string().contains("that was meant"));
        let metrics = Request::get("/metrics").body(Body::empty()).unwrap();
        let metrics = send(app.clone(), metrics).await;
        for line in [
            format!("lodeframe_panics_total {counted}"),
            "lodeframe_requests_in_flight 1".to_owned(),
        ] {
            let found = metrics.text().lines().any(|own| own == line);
            assert!(found, "{line}: {}", metrics.text());
        }
    }
    // Others go on.
    let answer = send(app, request(PATH, &headers, ROW)).await;
    assert!(answer.text().contains("\"answered\":1"));
}
