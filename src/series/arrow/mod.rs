//! Rows as an Arrow IPC stream: batches of columns.
//!
//! Numbers of any type are read; all other columns pass through as they are, without a copy.

mod frame;
mod read;
mod write;

pub(super) use frame::Frames;
pub(super) use read::Table;
pub(super) use write::{Sheet, answered_in_place};
