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

/// Answers everything that `read` gives, in order, to `write`; on so many threads, of which one
/// reads and one writes while others answer.
///
/// # Errors
/// The rows cannot be understood, or reading or writing fails.
pub fn run(
    series: Series,
    [input, output]: [Format; 2],
    limits: Limits,
    threads: usize,
    mut read: impl Read + Send,
    mut write: impl Write + Send,
) -> Result<Counts, Failure> {
    let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build();
    let pool = pool.map_err(io::Error::other)?;
    let mut outlet = Outlet::new(&series, output);
    let mut intake = Intake::new(Arc::new(series), input, output, limits);
    // A few jobs a thread, so that none waits long for the slowest; one, where it waits for none.
    let most = if threads == 1 { 1 } else { 4 * threads };
    pool.install(|| {
        let mut bytes = vec![0; BLOCK];
        let (mut jobs, mut done) = (Vec::<Job>::new(), Vec::<Done>::new());
        let mut ended = None;
        while ended.is_none() || !jobs.is_empty() || !done.is_empty() {
            let gather = || match &ended {
                None => gather(&mut intake, &mut read, &mut bytes, most),
                Some(_) => (Vec::new(), None),
            };
            let answer = || jobs.into_par_iter().map(Job::run).collect();
            let send = || send(&mut outlet, done, &mut write);
            let ((gathered, end), (answered, sent)) =
                rayon::join(gather, || rayon::join(answer, send));
            sent?;
            if outlet.stopped() {
                break;
            }
            (jobs, done) = (gathered, answered);
            ended = ended.or(end);
        }
        if let Some(Err(failure)) = ended {
            return Err(failure);
        }
        for piece in outlet.end() {
            write.write_all(&piece)?;
        }
        write.flush()?;
        Ok(outlet.counts())
    })
}

/// The next jobs, and once there are no more, why.
fn gather(
    intake: &mut Intake,
    read: &mut impl Read,
    bytes: &mut [u8],
    most: usize,
) -> (Vec<Job>, Option<Result<(), Failure>>) {
    let mut jobs = Vec::new();
    while jobs.len() < most {
        let length = match read.read(bytes) {
            Ok(length) => length,
            Err(failure) => return (jobs, Some(Err(failure.into()))),
        };
        intake.push(&bytes[..length]);
        loop {
            let job = match length {
                0 => intake.last(),
                _ => intake.job(BLOCK),
            };
            match job {
                Ok(Some(job)) => jobs.push(job),
                Ok(None) => break,
                Err(refusal) => return (jobs, Some(Err(Failure::Refused(refusal)))),
            }
        }
        if length == 0 {
            return (jobs, Some(Ok(())));
        }
    }
    (jobs, None)
}

fn send(outlet: &mut Outlet, done: Vec<Done>, write: &mut impl Write) -> io::Result<()> {
    for piece in done.into_iter().flat_map(|done| outlet.accept(done)) {
        write.write_all(&piece)?;
    }
    Ok(())
}
