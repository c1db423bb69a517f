//! Lodeframe restates measured electric and magnetic fields in the frame where they are needed.
//!
//! # Map
//!
//! A module imports only from those above it in this list; `tests/layering.rs` checks it.
//!
//! | module | what it holds |
//! |---|---|
//! | [`document`] | a question as a tree of values, and the faults found in it |
//! | [`config`] | every flag and variable, with its default |
//! | [`http`] | paths, handlers, problems, middleware; the only part that knows axum |

pub mod config;
pub mod document;
pub mod http;

pub use http::{AppState, app};
