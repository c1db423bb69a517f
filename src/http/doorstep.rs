//! What becomes of a connection more than the service holds.

use std::{convert::Infallible, future::ready, sync::Arc, time::Duration};

use axum::response::Response;
use hyper::{body::Incoming, server::conn::http1, service::service_fn};
use hyper_util::rt::TokioIo;
use tokio::{net::TcpStream, sync::Semaphore};
use uuid::Uuid;

use super::problem::Problem;
use crate::document::Code;

/// Connections told at once that there is no place; further ones are closed without a word.
const TOLD: usize = 64;
/// How long one may take to ask before it is closed.
const PATIENCE: Duration = Duration::from_secs(1);

/// Where surplus connections are told to come again.
pub(super) struct Doorstep(Arc<Semaphore>);

impl Doorstep {
    pub(super) fn new() -> Doorstep {
        Doorstep(Arc::new(Semaphore::new(TOLD)))
    }

    /// Answers the first request of a connection with 503, and closes it.
    pub(super) fn turn_away(&self, stream: TcpStream, most: usize) {
        let Ok(place) = self.0.clone().try_acquire_owned() else {
            return;
        };
        tokio::spawn(async move {
            let _place = place;
            let answer =
                service_fn(|_: hyper::Request<Incoming>| ready(Ok::<_, Infallible>(full(most))));
            let connection = http1::Builder::new()
                .keep_alive(false)
                .serve_connection(TokioIo::new(stream), answer);
            // Whatever comes of it, the client is gone afterwards.
            let _ = tokio::time::timeout(PATIENCE, connection).await;
        });
    }
}

fn full(most: usize) -> Response {
    let problem = Problem::new(
        Code::Overloaded,
        format!(
            "{most} connections are open, as many as the service holds; try again after a second."
        ),
    );
    let mut response = Response::default();
    problem.write(Uuid::new_v4(), &mut response);
    response
}
