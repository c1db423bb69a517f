//! The one layer around every route: request id, trace context, limits, time, panics, problems,
//! security headers, metrics and the access log.
//!
//! They are fused into one future because each tower layer costs a boxed future and a pass over
//! the request; six of the usual ones cost a third of the throughput of a single reading.

use std::{
    convert::Infallible,
    panic::{AssertUnwindSafe, catch_unwind},
    pin::Pin,
    task::{Context, Poll},
    time::{Duration, Instant},
};

use axum::{
    extract::Request,
    http::{HeaderMap, HeaderName, HeaderValue, Method, StatusCode, header},
    response::{IntoResponse, Response},
};
use pin_project_lite::pin_project;
use tower::{Layer, Service};
use uuid::Uuid;

use super::{AppState, guard::Holder, log, metrics::Route, problem::Problem};
use crate::document::Code;

/// Longest path and query, bytes.
const MAX_URI: usize = 8 * 1024;
/// Largest header section, bytes of names and values.
const MAX_HEADERS: usize = 16 * 1024;

/// The path whose bodies never need end, and which watches over their pauses itself.
const STREAM: &str = "/v1/series";

const REQUEST_ID: HeaderName = HeaderName::from_static("x-request-id");
const TRACEPARENT: HeaderName = HeaderName::from_static("traceparent");

/// An answer that is not a page needs nothing at all from a browser; pages bring their own policy.
const NOTHING: HeaderValue = HeaderValue::from_static("default-src 'none'; frame-ancestors 'none'");

/// Wraps every route in [`Observed`].
#[derive(Clone)]
pub struct Observe(pub AppState);

impl<S> Layer<S> for Observe {
    type Service = Observed<S>;

    fn layer(&self, inner: S) -> Observed<S> {
        Observed {
            inner,
            state: self.0.clone(),
        }
    }
}

/// A route with everything around it that is the same for all.
#[derive(Clone)]
pub struct Observed<S> {
    inner: S,
    state: AppState,
}

impl<S> Service<Request> for Observed<S>
where
    S: Service<Request, Response = Response, Error = Infallible>,
{
    type Response = Response;
    type Error = Infallible;
    type Future = Answering<S::Future>;

    fn poll_ready(&mut self, cx: &mut Context<'_>) -> Poll<Result<(), Infallible>> {
        self.inner.poll_ready(cx)
    }

    fn call(&mut self, request: Request) -> Self::Future {
        let record = Record::start(&self.state, &request);
        let refusal = record.refusal(&request);
        Answering {
            inner: refusal.is_none().then(|| self.inner.call(request)),
            refusal,
            timeout: None,
            streams: record.route.as_str() == STREAM,
            record,
        }
    }
}

pin_project! {
    /// The answer in the making.
    pub struct Answering<F> {
        // `None` when the request is refused before it reaches its handler.
        #[pin]
        inner: Option<F>,
        refusal: Option<Response>,
        // Set only when the handler has to wait; most answers are ready at once.
        timeout: Option<Pin<Box<tokio::time::Sleep>>>,
        // Whether it may take as long as it likes.
        streams: bool,
        record: Record,
    }
}

impl<F: Future<Output = Result<Response, Infallible>>> Future for Answering<F> {
    type Output = Result<Response, Infallible>;

    fn poll(self: Pin<&mut Self>, cx: &mut Context<'_>) -> Poll<Self::Output> {
        let this = self.project();
        let Some(inner) = this.inner.as_pin_mut() else {
            let refusal = this.refusal.take().expect("polled after it was ready");
            return Poll::Ready(Ok(this.record.finish(refusal)));
        };
        // A panic leaves nothing half-changed that others could see: handlers share only counters.
        let response = match catch_unwind(AssertUnwindSafe(|| inner.poll(cx))) {
            Ok(Poll::Ready(Ok(response))) => response,
            Ok(Poll::Pending) if *this.streams => return Poll::Pending,
            Ok(Poll::Pending) => {
                let limit = this.record.state.config.request_timeout;
                let timeout = this
                    .timeout
                    .get_or_insert_with(|| Box::pin(tokio::time::sleep(limit)));
                std::task::ready!(timeout.as_mut().poll(cx));
                timed_out(limit)
            }
            Err(_) => {
                this.record.state.metrics.panics.inc();
                Problem::from_status(StatusCode::INTERNAL_SERVER_ERROR).into_response()
            }
        };
        Poll::Ready(Ok(this.record.finish(response)))
    }
}

fn timed_out(limit: Duration) -> Response {
    let detail = format!(
        "The request did not arrive whole within {} s.",
        limit.as_secs_f64()
    );
    closing(Problem::new(Code::RequestTimeout, detail))
}

/// The problem as the last answer of its connection: what else comes on it is not read.
fn closing(problem: Problem) -> Response {
    let mut response = problem.into_response();
    let close = HeaderValue::from_static("close");
    response.headers_mut().insert(header::CONNECTION, close);
    response
}

/// What is known of one request from its start to its end.
struct Record {
    state: AppState,
    id: Uuid,
    method: Method,
    route: Route,
    trace: Option<HeaderValue>,
    started: Instant,
    running: i64,
    finished: bool,
}

impl Record {
    fn start(state: &AppState, request: &Request) -> Record {
        Record {
            id: Uuid::new_v4(),
            method: request.method().clone(),
            route: Route::of(request),
            trace: request
                .headers()
                .get(TRACEPARENT)
                .filter(|value| is_traceparent(value))
                .cloned(),
            started: Instant::now(),
            running: state.metrics.enter(),
            finished: false,
            state: state.clone(),
        }
    }

    /// Why the request is answered without looking at what it asks.
    fn refusal(&self, request: &Request) -> Option<Response> {
        let most = self.state.config.max_concurrent;
        if self.running > most as i64 {
            self.state.metrics.shed.inc();
            let detail = format!(
                "{most} requests are running, as many as the service takes on; try again after a second."
            );
            return Some(Problem::new(Code::Overloaded, detail).into_response());
        }
        let uri = request.uri();
        let length = uri.path().len() + uri.query().map_or(0, |query| query.len() + 1);
        if length > MAX_URI {
            let detail = format!(
                "The path and query have {length} bytes; at most {MAX_URI} are read. Send the question as JSON by POST."
            );
            return Some(Problem::new(Code::UriTooLong, detail).into_response());
        }
        let Headers { length, ambiguous } = Headers::of(request.headers());
        if ambiguous {
            let detail = "The request has several Host headers, or a Transfer-Encoding other than chunked; send one Host, and the body as it is.";
            return Some(closing(Problem::new(Code::Syntax, detail)));
        }
        (length > MAX_HEADERS).then(|| {
            let detail =
                format!("The headers have {length} bytes; at most {MAX_HEADERS} are read.");
            Problem::new(Code::HeadersTooLarge, detail).into_response()
        })
    }

    fn finish(&mut self, mut response: Response) -> Response {
        if response.status().is_client_error() || response.status().is_server_error() {
            let problem = response.extensions_mut().remove::<Problem>();
            let problem = problem.unwrap_or_else(|| Problem::from_status(response.status()));
            self.state.metrics.problem(problem.code());
            problem.write(self.id, &mut response);
        }
        let headers = response.headers_mut();
        headers.insert(REQUEST_ID, id_header(self.id));
        headers.insert(
            header::X_CONTENT_TYPE_OPTIONS,
            HeaderValue::from_static("nosniff"),
        );
        headers
            .entry(header::CONTENT_SECURITY_POLICY)
            .or_insert(NOTHING);
        let holder = response.extensions().get::<Holder>();
        self.end(response.status(), holder.map(|holder| &*holder.0));
        response
    }

    fn end(&mut self, status: StatusCode, holder: Option<&str>) {
        self.finished = true;
        let time = self.started.elapsed();
        self.state
            .metrics
            .answered(self.route.clone(), status, time);
        log::access(&log::Access {
            method: self.method.as_str(),
            route: self.route.as_str(),
            status: status.as_u16(),
            time,
            id: self.id,
            trace: self.trace.as_ref().and_then(|value| value.to_str().ok()),
            holder,
        });
    }
}

impl Drop for Record {
    fn drop(&mut self) {
        self.state.metrics.leave();
        if !self.finished {
            // The client went away before its answer began.
            self.end(StatusCode::REQUEST_TIMEOUT, None);
        }
    }
}

/// What one pass over the headers finds.
#[derive(Default)]
struct Headers {
    /// Bytes of names and values.
    length: usize,
    /// Whether two readers could take the request for different ones (RFC 9112 §3.2 and §6.1).
    ambiguous: bool,
}

impl Headers {
    fn of(headers: &HeaderMap) -> Headers {
        let mut found = Headers::default();
        let (mut hosts, mut codings) = (0, 0);
        for (name, value) in headers {
            found.length += name.as_str().len() + value.len() + 4;
            if name == header::HOST {
                hosts += 1;
            } else if name == header::TRANSFER_ENCODING {
                codings += 1;
                found.ambiguous |= !value.as_bytes().eq_ignore_ascii_case(b"chunked");
            }
        }
        found.ambiguous |= hosts > 1 || codings > 1;
        found
    }
}

fn id_header(id: Uuid) -> HeaderValue {
    let mut buffer = Uuid::encode_buffer();
    let text = id.as_hyphenated().encode_lower(&mut buffer);
    HeaderValue::from_str(text).expect("hex digits and hyphens")
}

/// Whether a header is a trace context of version 00 (W3C Trace Context §3.2), the only form that
/// may be copied into a log line.
fn is_traceparent(value: &HeaderValue) -> bool {
    let bytes = value.as_bytes();
    bytes.len() == 55
        && bytes.starts_with(b"00-")
        && bytes.iter().enumerate().all(|(place, byte)| match place {
            2 | 35 | 52 => *byte == b'-',
            _ => matches!(byte, b'0'..=b'9' | b'a'..=b'f'),
        })
}
