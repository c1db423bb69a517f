//! A series: rows of readings in, the same rows restated out, in the same order, in constant
//! memory. Bytes in three formats; knows no network.
//!
//! [`Series::read`] understands what the query asks. Then bytes go through an [`Intake`], which
//! cuts them into [`Job`]s of whole rows; each job is answered on any thread by itself; an
//! [`Outlet`] puts the answers in order, with the rows counted. [`run`] does all of it in process.

mod arrow;
mod ask;
mod block;
mod carry;
mod column;
mod csv;
mod cut;
mod header;
mod intake;
mod job;
mod names;
mod ndjson;
mod number;
mod outlet;
mod print;
mod problem;
mod run;
mod scan;
mod uncertainty;
mod way;

pub use ask::Series;
pub use intake::{Intake, Limits, Refusal};
pub use job::Job;
pub use outlet::{Counts, Done, Outlet};
pub use run::{BLOCK, Failure, run};

/// How rows are written as bytes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Format {
    /// A JSON object a line (`application/x-ndjson`).
    Ndjson,
    /// Comma-separated values with a header row (`text/csv`, RFC 4180).
    Csv,
    /// Batches of columns (`application/vnd.apache.arrow.stream`).
    Arrow,
}
