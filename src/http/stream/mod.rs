//! A series over one connection: the answer is sent while the question still arrives.
//!
//! A task of its own drives it ([`drive`]); the handler waits only for the first bytes of the
//! answer, or for what speaks against it.

mod coding;
mod drive;
mod failure;
mod packing;
mod unread;

use std::sync::Arc;

use axum::body::Body;
use tokio::sync::oneshot;

use super::{AppState, problem::Problem};
use crate::series::{Format, Intake, Limits, Outlet, Series};
pub(super) use coding::Coding;
use drive::Drive;

/// Names of the trailers that hold the counts of rows: read, answered, refused.
pub(super) const TRAILERS: [&str; 3] =
    ["lodeframe-read", "lodeframe-answered", "lodeframe-refused"];

/// Answers the rows of a body, in the formats and codings given for question and answer; with counts
/// after the last row as trailers, if the client takes them. The body given back ends properly only
/// when the answer is whole.
///
/// # Errors
/// What is wrong before the first byte of the answer.
pub(super) async fn answer(
    state: AppState,
    series: Series,
    formats: [Format; 2],
    trailers: bool,
    codings: [Coding; 2],
    body: Body,
) -> Result<Body, Problem> {
    let [input, output] = formats;
    let limits = Limits {
        row: state.config.max_row,
        batch: state.config.max_batch,
    };
    let outlet = Outlet::new(&series, output);
    let intake = Intake::new(Arc::new(series), input, output, limits);
    let (head, begun) = oneshot::channel();
    let (unread, answer) = unread::channel(state.config.buffer);
    let [packed, packs] = codings;
    let body = packed.unpacked(body);
    let drive = Drive::new(state, intake, outlet, body, unread, head, packs);
    tokio::spawn(drive.run(trailers));
    match begun.await {
        Ok(begun) => begun.map(|()| Body::new(answer)),
        // The task ended without a word, with all others: the service is at its end.
        Err(_) => Err(Problem::from_status(
            axum::http::StatusCode::INTERNAL_SERVER_ERROR,
        )),
    }
}
