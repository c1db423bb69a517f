//! The steps of answering one reading, each alone: `cargo bench --bench single`.

use criterion::{Criterion, criterion_group, criterion_main};
use lodeframe::answer::Answer;
use lodeframe::document::Node;
use lodeframe::question::{Deployment, Question};
use std::hint::black_box;

const QUESTION: &str = r#"{"e":[0.0,1.2,0.0],"b":[0.0,0.0,45000.0],"units":{"e":"mV/m","b":"nT","velocity":"km/s"},"velocity":[7.6,0,0]}"#;
/// The same, its reading and its velocity uncertain.
const UNCERTAIN: &str = r#"{"e":[0.0,1.2,0.0],"b":[0.0,0.0,45000.0],"units":{"e":"mV/m","b":"nT","velocity":"km/s"},"velocity":[7.6,0,0],"uncertainty":{"e":[0.1,0.1,0.1],"b":[5,5,5],"velocity":[0.01,0.01,0.01]}}"#;
const DEPLOYMENT: Deployment = Deployment {
    steps: 10,
    trials: 100_000,
    frames: None,
};

fn steps(c: &mut Criterion) {
    let node = Node::from_json(QUESTION.as_bytes()).expect("well-formed");
    let question = Question::read(&node, &DEPLOYMENT).expect("right");
    let answer = Answer::to(&question).expect("in range");
    c.bench_function("parse the text", |b| {
        b.iter(|| Node::from_json(black_box(QUESTION.as_bytes())));
    });
    c.bench_function("read the question", |b| {
        b.iter(|| Question::read(black_box(&node), &DEPLOYMENT));
    });
    c.bench_function("answer", |b| b.iter(|| Answer::to(black_box(&question))));
    let uncertain = Node::from_json(UNCERTAIN.as_bytes()).expect("well-formed");
    let uncertain = Question::read(&uncertain, &DEPLOYMENT).expect("right");
    c.bench_function("answer with uncertainties", |b| {
        b.iter(|| Answer::to(black_box(&uncertain)));
    });
    c.bench_function("print the answer", |b| {
        b.iter(|| serde_json::to_vec(black_box(&answer)));
    });
}

criterion_group!(benches, steps);
criterion_main!(benches);
