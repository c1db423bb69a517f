//! The service as seen over HTTP.
//!
//! # How to add an endpoint
//!
//! 1. Write `handlers/<resource>.rs` with an `async fn` for each operation. It takes
//!    [`State<AppState>`](axum::extract::State) and, as needed, the request for
//!    [`json_body`](body::json_body) or [`RawQuery`](axum::extract::RawQuery), and answers `Result<Response, Problem>`. Turn faults
//!    into a problem with [`Problem::from_faults`](problem::Problem::from_faults).
//! 2. Describe it with `#[utoipa::path(..)]`: tag, operation id, the answer with a true example,
//!    and [`CommonProblems`](problem::CommonProblems) among the responses.
//! 3. Name it in `guarded` of [`router`] (or in `open`, when no token guards it), and write the document anew:
//!    `cargo run -- openapi > openapi/openapi.json`.
//!
//! Request ids, logs, metrics, limits and the text of problems come from [`middleware`]; a handler
//! does nothing for them. What may take longer than a millisecond goes to the [pool](crate::pool).

pub mod accept;
pub mod body;
pub mod cache;
mod doorstep;
mod frames;
mod gather;
mod guard;
mod handlers;
mod lazy_timer;
pub mod listen;
pub mod log;
pub mod metrics;
pub mod middleware;
mod monte_carlo;
pub mod openapi;
pub mod problem;
pub mod router;
pub mod schema;
pub mod serve;
mod state;
mod stream;
pub mod workers;

pub use router::app;
pub use state::AppState;
