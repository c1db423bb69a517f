//! Threads that answer requests, one a core, each with a runtime of its own.
//!
//! A connection stays with the thread it was given to. Threads that take tasks from each other wake
//! each other again and again for work of a few microseconds, which costs a seventh of the
//! throughput of single readings. In return nothing long may run here: see [`crate::pool`].

use std::{
    io,
    sync::Arc,
    thread::{self, JoinHandle},
};

use tokio::{
    runtime::{self, Handle},
    sync::oneshot,
};

/// The threads. Dropped, they end, and with them whatever they still run.
pub struct Workers(Vec<Worker>);

struct Worker {
    runtime: Handle,
    /// Shared by the tasks given to it, which tells how many there are.
    tasks: Arc<()>,
    stop: Option<oneshot::Sender<()>>,
    thread: Option<JoinHandle<()>>,
}

impl Workers {
    /// Starts one thread a core.
    ///
    /// # Errors
    /// The system gives no threads, or nothing to wait for sockets with.
    pub fn start() -> io::Result<Workers> {
        let threads = thread::available_parallelism().map_or(1, usize::from);
        let workers: io::Result<_> = (0..threads).map(Worker::start).collect();
        workers.map(Workers)
    }

    /// Runs a task on the thread that has the fewest. What it waits for must be of that thread's
    /// runtime.
    pub fn spawn(&self, task: impl Future<Output = ()> + Send + 'static) {
        let least = self.0.iter().min_by_key(|worker| worker.tasks());
        let worker = least.expect("there is at least one thread");
        let counted = worker.tasks.clone();
        // Boxed, since a future that awaits another has room for it twice.
        let task = Box::pin(task);
        worker.runtime.spawn(async move {
            task.await;
            drop(counted);
        });
    }
}

impl Worker {
    fn start(number: usize) -> io::Result<Worker> {
        let runtime = runtime::Builder::new_current_thread()
            .enable_all()
            .build()?;
        let handle = runtime.handle().clone();
        let (stop, stopped) = oneshot::channel();
        let thread = thread::Builder::new()
            .name(format!("answer-{number}"))
            .spawn(move || {
                // Told to stop or left alone, it ends either way.
                let _ = runtime.block_on(stopped);
            })?;
        Ok(Worker {
            runtime: handle,
            tasks: Arc::default(),
            stop: Some(stop),
            thread: Some(thread),
        })
    }

    fn tasks(&self) -> usize {
        Arc::strong_count(&self.tasks)
    }
}

impl Drop for Workers {
    fn drop(&mut self) {
        // All are told before any is waited for.
        for worker in &mut self.0 {
            worker.stop.take();
        }
        for worker in &mut self.0 {
            if let Some(thread) = worker.thread.take() {
                // Panics of tasks were caught; there is nothing left to report.
                let _ = thread.join();
            }
        }
    }
}
