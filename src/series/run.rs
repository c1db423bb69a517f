//! A whole series in process: from a reader to a writer, on as many threads as asked for.

use std::io::{self, Read, Write};
use std::sync::Arc;

use rayon::iter::{IntoParallelIterator, ParallelIterator};

use super::{Counts, Done, Format, Intake, Job, Limits, Outlet, Refusal, Series};

/// Bytes of rows in one job: few enough that their columns stay in the caches of a core, enough
/// that a hand-over to another thread does not count.
pub const BLOCK: usize = 128 * 1024;

/// What ends a series before its end.
#[derive(Debug, thiserror::Error)]
pub enum Failure {
    /// The rows cannot be understood.
    #[error("{}", .0.faults[0].detail)]
    Refused(Refusal),
    /// Reading or writing failed.
    #[error(transparent)]
    Io(#[from] io::Error),
}

/// Answers everything that `read` gives, in order, to `write`; on this thread alone, or on
/// `threads` of them.
///
/// # Errors
/// The rows cannot be understood, or reading or writing fails.
pub fn run(
    series: Series,
    [input, output]: [Format; 2],
    limits: Limits,
    threads: usize,
    mut read: impl Read,
    mut write: impl Write,
) -> Result<Counts, Failure> {
    let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build();
    let pool = pool.map_err(io::Error::other)?;
    let mut outlet = Outlet::new(&series, output);
    let mut intake = Intake::new(Arc::new(series), input, output, limits);
    let mut bytes = vec![0; BLOCK];
    let mut waiting: Vec<Job> = Vec::new();
    loop {
        let length = read.read(&mut bytes)?;
        intake.push(&bytes[..length]);
        let next = |intake: &mut Intake| match length {
            0 => intake.last(),
            _ => intake.job(BLOCK),
        };
        while let Some(job) = next(&mut intake).map_err(Failure::Refused)? {
            waiting.push(job);
        }
        // A few jobs a thread, so that none waits long for the slowest.
        if length == 0 || waiting.len() >= 4 * threads {
            let jobs = std::mem::take(&mut waiting);
            let done: Vec<Done> = if threads == 1 {
                jobs.into_iter().map(Job::run).collect()
            } else {
                pool.install(|| jobs.into_par_iter().map(Job::run).collect())
            };
            for piece in done.into_iter().flat_map(|done| outlet.accept(done)) {
                write.write_all(&piece)?;
            }
        }
        if length == 0 || outlet.stopped() {
            break;
        }
    }
    for piece in outlet.end() {
        write.write_all(&piece)?;
    }
    write.flush()?;
    Ok(outlet.counts())
}
