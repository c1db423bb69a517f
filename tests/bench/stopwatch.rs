//! How long something takes.

use std::fs;
use std::time::Instant;

/// Time on the clock and time on a processor: on a shared machine the second says more.
pub(crate) struct Stopwatch(Instant, f64);

impl Stopwatch {
    /// From now on.
    pub(crate) fn start() -> Stopwatch {
        Stopwatch(Instant::now(), busy_seconds())
    }

    /// On the clock, and on a processor.
    pub(crate) fn seconds(&self) -> [f64; 2] {
        [self.0.elapsed().as_secs_f64(), busy_seconds() - self.1]
    }
}

/// Time that this thread has run on a processor, in s.
fn busy_seconds() -> f64 {
    let text = fs::read_to_string("/proc/thread-self/schedstat").unwrap_or_default();
    let nanoseconds = text
        .split(' ')
        .next()
        .and_then(|first| first.parse::<f64>().ok());
    nanoseconds.map_or(f64::NAN, |nanoseconds| nanoseconds / 1e9)
}
