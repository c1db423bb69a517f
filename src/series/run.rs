//! A whole series in process: from a reader to a writer, on as many threads as asked for.

use std::collections::VecDeque;
use std::io::{self, Read, Write};
use std::sync::Arc;
use std::sync::mpsc::{self, Receiver, TryRecvError};

use rayon::Yield;

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
/// also reads and writes.
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
    // Enough that no thread waits while one reads or writes; a single one waits for none.
    let most = if threads == 1 { 1 } else { 8 * threads };
    let answer = || {
        rayon::scope_fifo(|scope| {
            let mut bytes = vec![0; BLOCK];
            let (mut whole, mut ended) = (false, None);
            let mut asked = VecDeque::<Receiver<Done>>::new();
            loop {
                if ended.is_none() && asked.len() < most {
                    match gather(&mut intake, &mut read, &mut bytes, &mut whole) {
                        Ok(Some(job)) => {
                            let (answer, answered) = mpsc::sync_channel(1);
                            scope.spawn_fifo(move |_| drop(answer.send(job.run())));
                            asked.push_back(answered);
                        }
                        Ok(None) => ended = Some(Ok(())),
                        Err(failure) => ended = Some(Err(failure)),
                    }
                    continue;
                }
                // Nothing comes of a job that panicked; the scope hands its panic on.
                let Some(done) = asked.pop_front().and_then(await_helping) else {
                    break;
                };
                for piece in outlet.accept(done) {
                    write.write_all(&piece)?;
                }
                if outlet.stopped() {
                    return Ok(());
                }
            }
            ended.unwrap_or(Ok(()))
        })
    };
    pool.install(answer)?;
    for piece in outlet.end() {
        write.write_all(&piece)?;
    }
    write.flush()?;
    Ok(outlet.counts())
}

/// The next job, unless there are no more.
fn gather(
    intake: &mut Intake,
    read: &mut impl Read,
    bytes: &mut [u8],
    whole: &mut bool,
) -> Result<Option<Job>, Failure> {
    while !*whole {
        if let Some(job) = intake.job(BLOCK).map_err(Failure::Refused)? {
            return Ok(Some(job));
        }
        let length = read.read(bytes)?;
        intake.push(&bytes[..length]);
        *whole = length == 0;
    }
    intake.last().map_err(Failure::Refused)
}

/// An answer, once it is there; answers other jobs meanwhile.
fn await_helping(answered: Receiver<Done>) -> Option<Done> {
    loop {
        match answered.try_recv() {
            Err(TryRecvError::Empty) if rayon::yield_now() == Some(Yield::Executed) => {}
            Ok(done) => return Some(done),
            Err(_) => return answered.recv().ok(),
        }
    }
}
