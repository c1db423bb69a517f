//! Threads that answer requests.

use std::{
    collections::HashSet,
    sync::{Arc, mpsc},
    thread::{self, available_parallelism},
};

use lodeframe::http::workers::Workers;
use tokio::sync::Notify;

#[test]
fn tasks_go_where_the_fewest_are() {
    let workers = Workers::start().expect("threads");
    let (tell, told) = mpsc::channel();
    let done: Vec<Arc<Notify>> = (0..available_parallelism().map_or(1, usize::from))
        .map(|_| {
            let (tell, done) = (tell.clone(), Arc::new(Notify::new()));
            let wait = done.clone();
            workers.spawn(async move {
                tell.send(thread::current().id()).expect("somebody listens");
                wait.notified().await;
            });
            done
        })
        .collect();
    // While none has ended, each has a thread of its own.
    let threads: HashSet<_> = told.iter().take(done.len()).collect();
    assert_eq!(threads.len(), done.len());
}

#[test]
fn what_still_runs_is_dropped_with_the_threads() {
    let workers = Workers::start().expect("threads");
    let (tell, told) = mpsc::channel::<()>();
    let (begun, begin) = mpsc::channel();
    workers.spawn(async move {
        let _held = tell;
        begun.send(()).expect("somebody listens");
        std::future::pending().await
    });
    begin.recv().expect("it begins");
    drop(workers);
    assert_eq!(told.try_recv(), Err(mpsc::TryRecvError::Disconnected));
}

#[test]
fn a_task_that_panics_takes_no_thread_with_it() {
    let workers = Workers::start().expect("threads");
    let (tell, told) = mpsc::channel();
    for number in 0..64 {
        let tell = tell.clone();
        workers.spawn(async move {
            assert!(number % 2 == 0, "an odd one");
            tell.send(number).expect("somebody listens");
        });
    }
    drop(tell);
    assert_eq!(told.iter().count(), 32);
}
