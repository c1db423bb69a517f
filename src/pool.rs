//! Threads for heavy work, as many as the machine has cores.
//!
//! Work that takes longer than a single reading goes here in blocks of about a millisecond: the
//! threads that answer requests stay free, and whoever has many blocks waits between them like
//! everyone else, since blocks start in the order in which they were handed over.

use std::panic::{AssertUnwindSafe, catch_unwind, resume_unwind};
use std::pin::Pin;
use std::task::{Context, Poll, ready};
use std::thread;

use tokio::sync::oneshot;

/// How much lower the priority of these threads is than that of threads that answer requests: where
/// cores are short, single readings come first.
#[cfg(target_os = "linux")]
const NICENESS: i32 = 10;

/// The threads. They end when it is dropped and their work is done.
pub struct Pool(rayon::ThreadPool);

impl Pool {
    /// A pool of this many threads.
    ///
    /// # Panics
    /// The system gives no threads.
    pub fn new(threads: usize) -> Pool {
        let pool = rayon::ThreadPoolBuilder::new()
            .num_threads(threads)
            .thread_name(|number| format!("compute-{number}"))
            .start_handler(|_| step_back())
            .build();
        Pool(pool.expect("threads to compute on"))
    }

    /// A pool of one thread for each core.
    pub fn of_all_cores() -> Pool {
        Pool::new(std::thread::available_parallelism().map_or(1, usize::from))
    }

    /// How many blocks run at once.
    pub fn threads(&self) -> usize {
        self.0.current_num_threads()
    }

    /// Hands over one block of work, whose result is to be awaited.
    pub fn run<T: Send + 'static>(&self, work: impl FnOnce() -> T + Send + 'static) -> Work<T> {
        let (sender, receiver) = oneshot::channel();
        self.0.spawn(move || {
            if !sender.is_closed() {
                // The panic goes on where the result is awaited; a result that nobody awaits any
                // more is no loss.
                let _ = sender.send(catch_unwind(AssertUnwindSafe(work)));
            }
        });
        Work(receiver)
    }
}

/// A block of work under way, and once awaited its result, or its panic. Dropped before that, a
/// block that has not begun never does, and the result of one that has is thrown away.
#[must_use = "a block that is dropped may never begin"]
pub struct Work<T>(oneshot::Receiver<thread::Result<T>>);

impl<T> Future for Work<T> {
    type Output = T;

    fn poll(mut self: Pin<&mut Self>, context: &mut Context<'_>) -> Poll<T> {
        let result = ready!(Pin::new(&mut self.0).poll(context));
        match result.expect("every block is run while its result is awaited") {
            Ok(result) => Poll::Ready(result),
            Err(panic) => resume_unwind(panic),
        }
    }
}

/// Lowers the priority of this thread. On Linux each has its own; elsewhere that would be the whole
/// service's. A system that forbids it only makes single readings wait longer.
fn step_back() {
    #[cfg(target_os = "linux")]
    let _ = rustix::process::nice(NICENESS);
}
