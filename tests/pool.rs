//! Heavy work on threads of its own.

use std::sync::{
    Arc, Barrier, Mutex,
    atomic::{AtomicUsize, Ordering},
    mpsc,
};

use axum::{
    body::Body,
    http::{Request, StatusCode},
};
use lodeframe::{AppState, app, config::Config, pool::Pool};
use percent_encoding::{NON_ALPHANUMERIC, utf8_percent_encode};
use tokio::task::{JoinSet, yield_now};

use crate::support::send;

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

/// While the pool is busy a long question waits for it, and a short one does not.
#[tokio::test]
async fn a_long_question_lets_short_ones_pass() {
    let steps = |n: usize| vec![r#"{"boost":{"velocity":[1e8,0,0]}}"#; n].join(",");
    let question = |n: usize| format!(r#"{{"e":[1,2,3],"b":[0,0,1e-8],"steps":[{}]}}"#, steps(n));
    let post = |body: String| {
        let request = Request::post("/v1/transform").header("content-type", "application/json");
        request.body(Body::from(body)).expect("a request")
    };
    let by_url = |n: usize| {
        let steps = format!("[{}]", steps(n));
        let steps = utf8_percent_encode(&steps, NON_ALPHANUMERIC);
        let path = format!("/v1/transform?e=1,2,3&b=0,0,1e-8&steps={steps}");
        Request::get(path).body(Body::empty()).expect("a request")
    };
    for (long, short) in [
        (post(question(100)), post(question(1))),
        (by_url(100), by_url(1)),
    ] {
        let state = AppState::new(Config::default(), None);
        let threads = state.pool.threads();
        let free = Arc::new(Barrier::new(threads + 1));
        let occupy = |_| {
            let free = free.clone();
            state.pool.run(move || free.wait())
        };
        let _occupied: Vec<_> = (0..threads).map(occupy).collect();
        let (app, order) = (app(state.clone()), Mutex::new(Vec::new()));
        let ask = async |name, request| {
            let answer = send(app.clone(), request).await;
            assert_eq!(answer.status, StatusCode::OK, "{}", answer.text());
            order.lock().expect("no panic").push(name);
        };
        let short_first = async {
            ask("short", short).await;
            free.wait();
        };
        tokio::join!(ask("long", long), short_first);
        assert_eq!(*order.lock().expect("no panic"), ["short", "long"]);
    }
}
