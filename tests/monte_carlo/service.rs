//! Trials as the service makes them: beside each other, for one client, as long as it waits.

use std::sync::Arc;

use axum::{
    Router,
    body::Body,
    http::{Request, header},
};
use lodeframe::{
    AppState,
    answer::{Answer, Plan},
    app,
    config::Config,
    document::Node,
    http::schema::examples,
    pool::Pool,
    question::{Deployment, Question},
};
use serde_json::{Value, json};
use tokio::task::{JoinSet, yield_now};
use tower::ServiceExt;

use crate::support::{self, service};

fn request(question: &Value) -> Request<Body> {
    Request::post("/v1/transform")
        .header(header::CONTENT_TYPE, "application/json")
        .body(Body::from(question.to_string()))
        .expect("a request")
}

async fn send(question: Value) -> support::Answer {
    support::send(service(), request(&question)).await
}

/// A boost along x that is uncertain along it alone.
fn fast(beta: f64, sigma: f64) -> Value {
    json!({
        "e": [0.0, 30.0, 0.0], "b": [0.0, 0.0, 1.0], "units": {"e": "kV/m", "b": "G"},
        "boost": {"beta": [beta, 0.0, 0.0], "uncertainty": [sigma, 0.0, 0.0]},
        "monte_carlo": {"trials": 50_000, "seed": 3},
    })
}

fn code(answer: &Value) -> Vec<&str> {
    let notices = answer["notices"].as_array().expect("notices");
    notices
        .iter()
        .filter_map(|notice| notice["code"].as_str())
        .collect()
}

/// The same bits on one thread, two and seven, whichever block is done first, and over HTTP.
#[tokio::test]
async fn threads_and_order_change_no_bit() {
    let mut asked = examples::trials();
    asked["monte_carlo"]["trials"] = json!(30_001);
    let node = Node::from_json(asked.to_string().as_bytes())
        .expect("JSON")
        .into_owned();
    let deployment = Deployment {
        steps: 10,
        trials: 100_000,
        frames: None,
    };
    let question = Question::read(&node, &deployment).expect("right");
    let mut alone = Answer::to(&question).expect("in range");
    let plan = Arc::new(Plan::new(&question, &mut alone).expect("trials are asked for"));
    let mut others = alone.clone();
    plan.finish(&mut alone);
    let expected = serde_json::to_value(&alone).expect("JSON");
    assert_eq!(expected["monte_carlo"]["trials"], 30_001);
    for threads in [1, 2, 7] {
        let pool = Arc::new(Pool::new(threads));
        let mut running = JoinSet::new();
        for number in (0..plan.blocks()).rev() {
            let (plan, pool) = (plan.clone(), pool.clone());
            running.spawn(async move {
                let block = pool.run(move || plan.block(number)).await;
                (number, block)
            });
        }
        let mut blocks = running.join_all().await;
        blocks.sort_by_key(|(number, _)| *number);
        let blocks: Vec<_> = blocks.into_iter().map(|(_, block)| block).collect();
        let tails = std::array::from_fn(|component| plan.tails(&blocks, component));
        others.monte_carlo = None;
        others.notices.truncate(0);
        plan.conclude(&blocks, tails, &mut others);
        let found = serde_json::to_value(&others).expect("JSON");
        assert_eq!(found["monte_carlo"], expected["monte_carlo"], "{threads}");
    }
    let served = send(asked.clone()).await.json();
    assert_eq!(served["monte_carlo"], expected["monte_carlo"]);
    asked["monte_carlo"]["seed"] = json!(2);
    let other = send(asked).await.json();
    assert_ne!(
        other["monte_carlo"]["estimate"],
        expected["monte_carlo"]["estimate"]
    );
}

/// Where the law of propagation is exact, the trials agree with it, and validate it.
#[tokio::test]
async fn a_linear_question_is_validated() {
    let asked = json!({
        "e": [12.5, 340.0, -3.75], "b": [1200.0, -450.0, 44700.0],
        "units": {"e": "mV/m", "b": "nT", "velocity": "km/s"},
        "velocity": [7.6, 0.0, 0.0], "inverse": true,
        // u of 0.5 and more than 10 of the last digits: the tolerance is 5 % and 2 % of it.
        "uncertainty": {"e": [0.11, 0.11, 0.11], "b": [11.0, 11.0, 11.0], "velocity": [0.001, 0.001, 0.001]},
        "monte_carlo": {"trials": 100_000},
    });
    let answer = send(asked).await.json();
    let (first, trials) = (&answer["uncertainty"], &answer["monte_carlo"]);
    assert_eq!(trials["refused"], 0);
    assert_eq!(trials["seed"], 0);
    let number = |value: &Value| value.as_f64().expect("a number");
    // Standard deviations of estimates from n trials: u/√n, and u_i u_j √((1+r²)/n).
    let n = 100_000f64;
    for (name, offset) in [("e", 0), ("b", 3)] {
        for i in 0..3 {
            let u = number(&first[name][i]);
            let off = number(&trials["estimate"][name][i]) - number(&answer[name][i]);
            assert!(off.abs() < 4.0 * u / n.sqrt(), "{name} {i}: {off} of {u}");
            let ratio = number(&trials["standard_uncertainty"][name][i]) / u;
            assert!(
                (ratio - 1.0).abs() < 4.0 / (2.0 * n).sqrt(),
                "{name} {i}: {ratio}"
            );
            for j in 0..6 {
                let place = |matrix: &Value| number(&matrix["covariance"][offset + i][j]);
                let other = number(if j < 3 {
                    &first["e"][j]
                } else {
                    &first["b"][j - 3]
                });
                let off = (place(trials) - place(first)) / (u * other);
                assert!(off.abs() < 4.0 * (2.0 / n).sqrt(), "{name} {i} {j}: {off}");
            }
            let [low, high] = [0, 1].map(|end| {
                (number(&trials["intervals"][name][i][end]) - number(&answer[name][i])) / u
            });
            // Ends of the shortest interval spread by 0.024 u with so many trials.
            assert!(
                (low + 1.96).abs() < 0.1 && (high - 1.96).abs() < 0.1,
                "{low} {high}"
            );
        }
    }
    assert_eq!(first["linear"], true);
    assert_eq!(trials["validation"]["validated"], true, "{trials}");
}

/// A speed that is uncertain by much of its distance from c: what first order says is refuted.
#[tokio::test]
async fn a_question_that_is_not_linear_is_not_validated() {
    let answer = send(examples::trials()).await.json();
    assert_eq!(answer["uncertainty"]["linear"], false);
    let validation = &answer["monte_carlo"]["validation"];
    assert_eq!(validation["validated"], false);
    let by = &validation["b"][2];
    let (d, tolerance) = (by["d_low"].as_f64(), by["tolerance"].as_f64());
    assert!(d > tolerance && by["settled"] == true, "{validation}");
}

/// As many draws are refused as reach c: a share of 1 − Φ((1−β)/σ), here.
#[tokio::test]
async fn draws_past_light_are_counted_and_left_out() {
    let (beta, sigma, n) = (0.999, 0.001, 50_000f64);
    let answer = send(fast(beta, sigma)).await.json();
    let share = 0.5 * libm::erfc((1.0 - beta) / sigma / 2f64.sqrt());
    let refused = answer["monte_carlo"]["refused"].as_f64().expect("a number");
    let off = (refused - share * n) / (share * (1.0 - share) * n).sqrt();
    assert!(off.abs() < 4.0, "{refused}");
    assert!(code(&answer).contains(&"draws_refused"), "{answer}");
    assert!(answer["monte_carlo"]["estimate"]["e"][1].is_number());
}

/// With nearly all of them refused nothing is said of the few that are left.
#[tokio::test]
async fn too_few_possible_draws_say_nothing() {
    let mut asked = fast(0.999, 0.001);
    // Across the motion γσ = 45: hardly any draw stays below c.
    asked["boost"]["uncertainty"] = json!([0.0, 1.0, 1.0]);
    let answer = send(asked).await.json();
    let trials = &answer["monte_carlo"];
    assert!(trials["refused"].as_u64() > Some(48_000), "{trials}");
    assert!(trials["estimate"]["e"][1].is_null() && trials["covariance"][0][0].is_null());
    assert!(trials["intervals"]["b"][0].is_null() && trials["validation"]["validated"].is_null());
    assert!(code(&answer).contains(&"draws_refused"));
}

/// What depends on a missing component is null here as in the law of propagation.
#[tokio::test]
async fn missing_components_stay_missing() {
    let asked = json!({
        "b": [18200.0, -2400.0, null], "units": {"b": "nT", "angle": "deg"},
        "rotation": {"axis": [0, 0, 1], "angle": 30, "uncertainty": [0.0, 0.0, 0.1]},
        "monte_carlo": {"trials": 10_000},
    });
    let answer = send(asked).await.json();
    let trials = &answer["monte_carlo"];
    for i in 0..3 {
        assert!(trials["estimate"]["e"][i].is_null());
        let known = answer["uncertainty"]["b"][i].is_number();
        assert_eq!(known, i < 2, "{answer}");
        assert_eq!(trials["estimate"]["b"][i].is_number(), known);
        assert_eq!(trials["intervals"]["b"][i].is_array(), known);
    }
    assert!(trials["validation"]["validated"].is_null());
}

#[tokio::test]
async fn faults_say_what_to_add() {
    let with = |changes: Value| {
        let mut question = fast(0.5, 0.01);
        for (name, value) in changes.as_object().expect("changes") {
            question[name] = value.clone();
        }
        question
    };
    for trials in [9_999, 1_000_001] {
        let answer = send(with(json!({"monte_carlo": {"trials": trials}}))).await;
        let problem = answer.problem("trials_out_of_range");
        assert_eq!(problem["errors"][0]["pointer"], "/monte_carlo/trials");
    }
    let exact = with(json!({"boost": {"beta": [0.5, 0, 0]}}));
    let problem = send(exact).await.problem("nothing_uncertain");
    assert_eq!(problem["errors"][0]["pointer"], "/monte_carlo");
    send(with(json!({"monte_carlo": {"trials": 1e4, "seed": 0.5}})))
        .await
        .problem("wrong_type");
    send(with(json!({"monte_carlo": {"rounds": 1}})))
        .await
        .problem("unknown_field");
}

/// By URL, with what is left out filled in: the same answer, and a tag of its own.
#[tokio::test]
async fn the_same_by_url() {
    let path = "/v1/transform?e=0,30,0&b=0,0,1&units.e=kV/m&units.b=G&boost.beta=0.5,0,0\
                &boost.uncertainty=.01,0,0&monte_carlo.trials=50000&monte_carlo.seed=3";
    let answer = support::get(path, &[]).await;
    let posted = send(fast(0.5, 0.01)).await.json();
    assert_eq!(answer.json()["monte_carlo"], posted["monte_carlo"]);
    let tag = answer.header("etag").to_owned();
    let other = support::get(&path.replace("seed=3", "seed=4"), &[]).await;
    assert_ne!(other.header("etag"), tag);
    let held = support::get(path, &[("if-none-match", &tag)]).await;
    assert_eq!(held.status, 304);
}

/// A client that goes away takes its trials with it: what has begun ends, nothing more begins.
#[tokio::test]
async fn nobody_draws_for_a_client_that_left() {
    let state = AppState::new(Config::default(), None);
    let router: Router = app(state.clone());
    let mut asked = fast(0.5, 0.01);
    asked["monte_carlo"]["trials"] = json!(1_000_000);
    let asking = tokio::spawn(router.oneshot(request(&asked)));
    while state.metrics.trials.get() == 0 {
        assert!(!asking.is_finished(), "it was to take longer");
        yield_now().await;
    }
    asking.abort();
    assert!(asking.await.expect_err("stopped").is_cancelled());
    // Blocks start in the order in which they were handed over, so these come last.
    let flush = async || {
        for _ in 0..50 * state.pool.threads() {
            state.pool.run(|| ()).await;
        }
    };
    flush().await;
    let drawn = state.metrics.trials.get();
    flush().await;
    assert!(drawn < 1_000_000);
    // One block on each thread may have been about to be counted.
    let most = (state.pool.threads() * 4096) as u64;
    assert!(state.metrics.trials.get() - drawn <= most);
}
