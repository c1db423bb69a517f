//! Heavy work on threads of its own.

use std::sync::{
    Arc, Barrier,
    atomic::{AtomicUsize, Ordering},
    mpsc,
};

use lodeframe::pool::Pool;
use tokio::task::{JoinSet, yield_now};

#[tokio::test]
async fn blocks_run_beside_each_other() {
    let pool = Arc::new(Pool::new(2));
    let both = Arc::new(Barrier::new(2));
    let mut blocks = JoinSet::new();
    for number in 0..2 {
        let (pool, both) = (pool.clone(), both.clone());
        blocks.spawn(async move {
            // Alone, neither would ever get past the barrier.
            let work = move || {
                both.wait();
                number
            };
            pool.run(work).await
        });
    }
    let mut results = blocks.join_all().await;
    results.sort();
    assert_eq!(results, [0, 1]);
}

#[tokio::test]
async fn a_block_that_nobody_awaits_never_begins() {
    let pool = Arc::new(Pool::new(1));
    let begun = Arc::new(AtomicUsize::new(0));
    let (go_on, wait) = mpsc::channel::<()>();
    let (occupied, pool2) = (pool.clone(), pool.clone());
    let first = tokio::spawn(async move { occupied.run(move || wait.recv()).await });
    yield_now().await;
    let count = begun.clone();
    let second = tokio::spawn(async move {
        pool2
            .run(move || count.fetch_add(1, Ordering::SeqCst))
            .await
    });
    yield_now().await;
    second.abort();
    assert!(second.await.expect_err("stopped").is_cancelled());
    go_on.send(()).expect("the first block waits");
    first.await.expect("no panic").expect("told to go on");
    pool.run(|| ()).await;
    assert_eq!(begun.load(Ordering::SeqCst), 0);
}

#[tokio::test]
async fn a_panic_reaches_whoever_awaits_the_block() {
    let pool = Pool::new(1);
    let failed = tokio::spawn(async move {
        let nothing: () = pool.run(|| panic!("in a block")).await;
        nothing
    });
    let panic = failed.await.expect_err("it panics").into_panic();
    assert_eq!(panic.downcast_ref(), Some(&"in a block"));
}
