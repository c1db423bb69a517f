//! What the service costs on top of a bare axum handler that parses and prints the same JSON.
//!
//! `cargo bench --bench http_overhead [-- CASE]` starts both servers as processes of their own, the
//! service with its access log on the null device, and drives them in turn over 32 kept-alive
//! connections on loopback. It prints requests a second and the ratio service/bare, the median
//! over the rounds.

use std::{
    io::{BufRead, BufReader},
    net::SocketAddr,
    process::{Child, Command, Stdio},
    sync::{
        Arc,
        atomic::{AtomicBool, AtomicU64, Ordering},
    },
    time::{Duration, Instant},
};

use axum::{
    Router,
    body::Bytes,
    http::{HeaderValue, header::CONTENT_TYPE},
    response::{IntoResponse, Response},
    routing::{get, post},
};
use serde::{Deserialize, Serialize};
use tokio::{
    io::{AsyncReadExt, AsyncWriteExt},
    net::{TcpListener, TcpStream},
};

const CONNECTIONS: usize = 32;
const ROUNDS: usize = 7;
const ROUND: Duration = Duration::from_secs(2);

/// The reading of both servers.
const QUESTION: &str = r#"{"e":[0.0,1.2,0.0],"b":[0.0,0.0,45000.0],"units":{"e":"mV/m","b":"nT","velocity":"km/s"},"velocity":[7.6,0,0]}"#;

/// The name of a case, and the request line and body it sends.
const CASES: [(&str, &str, &str); 2] = [
    ("health", "GET /health/live", ""),
    ("transform", "POST /v1/transform", QUESTION),
];

fn main() {
    let args: Vec<String> = std::env::args().collect();
    match args.iter().position(|arg| arg == "--bare") {
        Some(place) => bare(&args[place + 1]),
        None => compare(&args),
    }
}

/// Starts both servers and drives them in turn.
fn compare(args: &[String]) {
    let service = Server::start(
        Command::new(env!("CARGO_BIN_EXE_lodeframe")).args(["--listen", "127.0.0.1:0"]),
    );
    let transform = service.answer(CASES[1].1, CASES[1].2);
    let bare = Server::start(
        Command::new(std::env::current_exe().expect("the path of this program"))
            .args(["--bare", body(&transform)]),
    );
    for (name, line, body) in CASES {
        if args.len() > 2 && !args.iter().any(|arg| arg == name) {
            continue;
        }
        let request = request(line, body);
        let mut rounds: Vec<(f64, f64)> = (0..=ROUNDS)
            .map(|_| {
                (
                    drive(bare.address, &request),
                    drive(service.address, &request),
                )
            })
            .collect();
        rounds.remove(0); // The first round only warms up.
        for (bare, service) in &rounds {
            println!(
                "{name}: bare {bare:8.0}/s, service {service:8.0}/s, ratio {:.3}",
                service / bare
            );
        }
        let mut ratios: Vec<f64> = rounds
            .iter()
            .map(|(bare, service)| service / bare)
            .collect();
        ratios.sort_by(f64::total_cmp);
        println!("{name}: median ratio {:.3}", ratios[ratios.len() / 2]);
    }
}

/// A server in a process of its own, stopped when dropped.
struct Server {
    process: Child,
    address: SocketAddr,
}

impl Server {
    /// Starts a server whose first line of output ends with its address in words of `http://..`.
    fn start(command: &mut Command) -> Server {
        let mut process = command
            .stdout(Stdio::piped())
            .stderr(Stdio::null())
            .spawn()
            .expect("the server starts");
        let mut line = String::new();
        BufReader::new(process.stdout.take().expect("piped"))
            .read_line(&mut line)
            .expect("the server prints its address");
        let address = line
            .split_whitespace()
            .find_map(|word| word.strip_prefix("http://"));
        let address = address.and_then(|word| word.parse().ok());
        Server {
            process,
            address: address.unwrap_or_else(|| panic!("an address in {line:?}")),
        }
    }

    /// One whole answer, head and body.
    fn answer(&self, line: &str, body: &str) -> String {
        runtime().block_on(async {
            let mut stream = TcpStream::connect(self.address).await.expect("it listens");
            first_answer(&mut stream, &request(line, body)).await
        })
    }
}

impl Drop for Server {
    fn drop(&mut self) {
        let _ = self.process.kill();
        let _ = self.process.wait();
    }
}

fn runtime() -> tokio::runtime::Runtime {
    let mut builder = tokio::runtime::Builder::new_current_thread();
    builder.enable_all().build().expect("a runtime")
}

fn request(line: &str, body: &str) -> String {
    format!(
        "{line} HTTP/1.1\r\nhost: localhost\r\ncontent-type: application/json\r\ncontent-length: {}\r\n\r\n{body}",
        body.len()
    )
}

/// Sends a request and reads one answer with a `content-length`.
async fn first_answer(stream: &mut TcpStream, request: &str) -> String {
    stream
        .write_all(request.as_bytes())
        .await
        .expect("it takes requests");
    let mut answer = Vec::new();
    loop {
        stream.read_buf(&mut answer).await.expect("it answers");
        let text = String::from_utf8_lossy(&answer);
        if let Some((head, body)) = text.split_once("\r\n\r\n") {
            let length = head
                .lines()
                .find_map(|line| line.strip_prefix("content-length: "));
            if length.and_then(|text| text.parse().ok()) == Some(body.len()) {
                return text.into_owned();
            }
        }
    }
}

fn body(answer: &str) -> &str {
    answer.split_once("\r\n\r\n").map_or("", |(_, body)| body)
}

/// Requests a second over all connections.
fn drive(address: SocketAddr, request: &str) -> f64 {
    let done = Arc::new(AtomicU64::new(0));
    let stop = Arc::new(AtomicBool::new(false));
    let started = Instant::now();
    runtime().block_on(async {
        let tasks: Vec<_> = (0..CONNECTIONS)
            .map(|_| tokio::spawn(ask(address, request.to_owned(), done.clone(), stop.clone())))
            .collect();
        tokio::time::sleep(ROUND).await;
        stop.store(true, Ordering::Relaxed);
        for task in tasks {
            task.await.expect("every answer is as long as the first");
        }
    });
    done.load(Ordering::Relaxed) as f64 / started.elapsed().as_secs_f64()
}

/// Asks the same again and again. All answers to one request are equally long, so that the load
/// generator need not parse them.
async fn ask(address: SocketAddr, request: String, done: Arc<AtomicU64>, stop: Arc<AtomicBool>) {
    let mut stream = TcpStream::connect(address).await.expect("it listens");
    stream.set_nodelay(true).expect("a TCP option");
    let mut answer = first_answer(&mut stream, &request).await.into_bytes();
    while !stop.load(Ordering::Relaxed) {
        stream
            .write_all(request.as_bytes())
            .await
            .expect("it takes requests");
        stream.read_exact(&mut answer).await.expect("it answers");
        assert!(
            answer.starts_with(b"HTTP/1.1 200 OK\r\n"),
            "{}",
            String::from_utf8_lossy(&answer)
        );
        done.fetch_add(1, Ordering::Relaxed);
    }
}

/// The bare server: axum and serde_json, nothing else.
fn bare(answer: &str) {
    let answer: Option<Answer> = serde_json::from_str(answer).ok();
    let answer: &'static Option<Answer> = Box::leak(Box::new(answer));
    let app = Router::new()
        .route("/health/live", get(async || json(&Health { status: "ok" })))
        .route(
            "/v1/transform",
            post(
                async |body: Bytes| match serde_json::from_slice::<Question>(&body) {
                    Ok(question) => {
                        std::hint::black_box(question);
                        json(
                            answer
                                .as_ref()
                                .expect("the service answers the transform case"),
                        )
                    }
                    Err(error) => error.to_string().into_response(),
                },
            ),
        );
    let runtime = tokio::runtime::Runtime::new().expect("a runtime");
    runtime.block_on(async {
        let listener = TcpListener::bind("127.0.0.1:0").await.expect("a free port");
        println!("http://{}", listener.local_addr().expect("bound"));
        axum::serve(listener, app).await.expect("it serves");
    });
}

fn json(value: &impl Serialize) -> Response {
    let text = serde_json::to_vec(value).expect("it has a JSON form");
    (
        [(CONTENT_TYPE, HeaderValue::from_static("application/json"))],
        text,
    )
        .into_response()
}

#[derive(Serialize)]
struct Health {
    status: &'static str,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
#[allow(
    dead_code,
    reason = "read from JSON as the service reads it, and then dropped"
)]
struct Question {
    e: [f64; 3],
    b: [f64; 3],
    units: QuestionUnits,
    velocity: [f64; 3],
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
#[allow(dead_code, reason = "see Question")]
struct QuestionUnits {
    e: String,
    b: String,
    velocity: String,
}

/// The answer of the service to [`QUESTION`], every field of it.
#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Answer {
    e: [f64; 3],
    b: [f64; 3],
    units: AnswerUnits,
    invariants: Invariants,
    net: Net,
    notices: Vec<Notice>,
    provenance: Provenance,
}

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct AnswerUnits {
    e: String,
    b: String,
}

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Invariants {
    e2_minus_c2b2: f64,
    e_dot_cb: f64,
    kind: String,
    residual: f64,
}

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Net {
    velocity: [f64; 3],
    beta: [f64; 3],
    gamma: f64,
    rapidity: f64,
    rotation: Quaternion,
    wigner_angle: f64,
}

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Quaternion {
    w: f64,
    x: f64,
    y: f64,
    z: f64,
}

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Notice {
    code: String,
    detail: String,
}

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Provenance {
    engine: String,
    constants: String,
    frames: Option<String>,
}
