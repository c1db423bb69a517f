//! A writer that gathers lines in memory; a thread of its own writes them a few times a second.
//!
//! Per line that is one copy under a lock. Handing each line to the thread, or writing it at once,
//! costs a request several microseconds, as much as reading, solving and printing a reading.

use std::{
    io::Write,
    mem,
    sync::{Arc, Condvar, Mutex, MutexGuard},
    thread::{self, JoinHandle},
    time::Duration,
};

/// Bytes that wait for a slow reader of the log; further lines are dropped and counted.
const WAITING: usize = 1 << 20;
/// How long lines are gathered before they are written.
const GATHER: Duration = Duration::from_millis(50);

/// A handle to the gathered lines; all clones gather into the same.
#[derive(Clone, Default)]
pub(super) struct Gather(Arc<Shared>);

#[derive(Default)]
struct Shared {
    lines: Mutex<Lines>,
    /// Told when there is something to write after there was nothing.
    some: Condvar,
}

#[derive(Default)]
struct Lines {
    text: Vec<u8>,
    dropped: u64,
    closed: bool,
}

/// Writes what is left when dropped.
pub struct Guard {
    gather: Gather,
    writer: Option<JoinHandle<()>>,
}

impl Gather {
    /// Starts the thread that writes to `out`.
    pub(super) fn start(out: impl Write + Send + 'static) -> (Gather, Guard) {
        let gather = Gather::default();
        let writer = gather.clone();
        let writer = thread::Builder::new()
            .name("log".to_owned())
            .spawn(move || writer.write_to(out))
            .expect("a thread for the log");
        let guard = Guard {
            gather: gather.clone(),
            writer: Some(writer),
        };
        (gather, guard)
    }

    /// Adds one line, which ends with a newline.
    pub(super) fn line(&self, line: &[u8]) {
        let mut lines = self.lines();
        if lines.text.len() + line.len() > WAITING {
            lines.dropped += 1;
            return;
        }
        let first = lines.text.is_empty();
        lines.text.extend_from_slice(line);
        drop(lines);
        if first {
            self.0.some.notify_one();
        }
    }

    fn lines(&self) -> MutexGuard<'_, Lines> {
        // Nothing that holds the lock can panic half-way.
        self.0
            .lines
            .lock()
            .unwrap_or_else(|poison| poison.into_inner())
    }

    fn write_to(&self, mut out: impl Write) {
        let mut text = Vec::new();
        let mut closed = false;
        while !closed {
            let idle = |lines: &mut Lines| lines.text.is_empty() && !lines.closed;
            let lines = self.0.some.wait_while(self.lines(), idle);
            let mut lines = lines.unwrap_or_else(|poison| poison.into_inner());
            mem::swap(&mut lines.text, &mut text);
            let dropped = mem::take(&mut lines.dropped);
            closed = lines.closed;
            drop(lines);
            if dropped > 0 {
                let _ = writeln!(text, "{dropped} lines of the log were dropped");
            }
            // A log that nobody can read any more is no reason to stop answering.
            let _ = out.write_all(&text).and_then(|()| out.flush());
            text.clear();
            if !closed {
                thread::sleep(GATHER);
            }
        }
    }
}

impl Drop for Guard {
    fn drop(&mut self) {
        self.gather.lines().closed = true;
        self.gather.0.some.notify_one();
        if let Some(writer) = self.writer.take() {
            // A writer that panicked has nothing left to write.
            let _ = writer.join();
        }
    }
}
