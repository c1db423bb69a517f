//! Lodeframe restates measured electric and magnetic fields in the frame where they are needed.
//!
//! # Map
//!
//! A module imports only from those above it in this list; `tests/layering.rs` checks it.
//!
//! | module | what it holds |
//! |---|---|
//! | [`physics`] | fields and frames as numbers: boosts, rotations, tensor, invariants, precision |
//! | [`units`] | the table of UCUM codes |
//! | [`document`] | a question as a tree of values, and the faults found in it |
//! | [`chain`] | steps of a way, as written |
//! | [`frames`] | the catalogue of named frames: file, tree, tracks over time |
//! | [`transform`] | the meeting point: a reading and a resolved way give the answer |
//! | [`question`] | what is asked, read from a tree |
//! | [`answer`] | what is answered, as JSON |
//! | [`pool`] | threads for heavy work |
//! | [`sweep`] | the same question over a range of speeds or angles |
//! | [`series`] | rows of readings in, the same rows restated out, in several formats |
//! | [`picture`] | SVG pictures of answers |
//! | [`config`] | every flag and variable, with its default |
//! | [`http`] | paths, handlers, problems, middleware; the only part that knows axum |

pub mod answer;
pub mod chain;
pub mod config;
pub mod document;
pub mod frames;
pub mod http;
pub mod physics;
pub mod picture;
pub mod pool;
pub mod question;
pub mod series;
pub mod sweep;
pub mod transform;
pub mod units;

pub use http::{AppState, app};

/// Blocks of rows come and go in hundreds of kilobytes, which the allocator of the system gives
/// back each time and gets anew page by page.
#[global_allocator]
static ALLOCATOR: mimalloc::MiMalloc = mimalloc::MiMalloc;
