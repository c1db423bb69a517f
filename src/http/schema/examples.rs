//! Questions of the OpenAPI document and their true answers. All values are invented.

use std::{
    collections::BTreeMap,
    sync::{Mutex, PoisonError},
};

use serde_json::{Value, json};

use crate::{
    answer::{Answer, Plan},
    document::{Node, from_query},
    question::{Deployment, Question},
    series::{self, Format, Limits, Series},
    sweep::{Sweep, Swept},
};

/// Where the examples are asked.
const DEPLOYMENT: Deployment = Deployment {
    steps: 10,
    trials: 100_000,
    frames: None,
};

/// A probe pair on a satellite, restated for an observer at rest below it.
pub fn orbiting_probe() -> Value {
    json!({
        "e": [12.5, 340.0, -3.75],
        "b": [1200.0, -450.0, 44700.0],
        "units": {"e": "mV/m", "b": "nT", "velocity": "km/s"},
        "velocity": [7.6, 0.0, 0.0],
        "inverse": true,
    })
}

/// A turn of the axes, then a boost, with all parts of the answer.
pub fn turned_axes() -> Value {
    json!({
        "e": [0.0, 1.2, 0.0],
        "b": [0.0, 0.0, 45000.0],
        "units": {"e": "mV/m", "b": "nT", "velocity": "km/s", "angle": "deg"},
        "steps": [
            {"rotate": {"axis": [0.0, 0.0, 1.0], "angle": 30.0}},
            {"boost": {"velocity": [7.6, 0.0, 0.0]}},
        ],
        "include": ["tensor", "matrix", "energy", "parallel_frame"],
    })
}

/// The same axes and boost with what is uncertain about them and about the reading, and where the
/// uncertainty of the answer comes from.
pub fn uncertain_reading() -> Value {
    json!({
        "e": [0.0, 1.2, 0.0],
        "b": [0.0, 0.0, 45000.0],
        "units": {"e": "mV/m", "b": "nT", "velocity": "km/s", "angle": "deg"},
        "steps": [
            {"rotate": {"axis": [0.0, 0.0, 1.0], "angle": 30.0, "uncertainty": [0.1, 0.1, 0.2]}},
            {"boost": {"velocity": [7.6, 0.0, 0.0], "uncertainty": [0.01, 0.01, 0.01]}},
        ],
        "uncertainty": {"e": [0.1, 0.1, 0.1], "b": [5.0, 5.0, 5.0]},
        "include": ["budget", "parallel_frame"],
    })
}

/// A boost whose velocity is so uncertain that the law of propagation is judged by trials.
pub fn trials() -> Value {
    json!({
        "e": [0.0, 30.0, 0.0],
        "b": [0.0, 0.0, 1.0],
        "units": {"e": "kV/m", "b": "G"},
        "boost": {"beta": [0.9, 0.0, 0.0], "uncertainty": [0.02, 0.02, 0.02]},
        "uncertainty": {"e": [0.1, 0.1, 0.1], "b": [0.002, 0.002, 0.002]},
        "monte_carlo": {"trials": 20_000, "seed": 1},
    })
}

/// The field beside a beam, in the frame of its particles.
pub fn fast_beam() -> Value {
    json!({
        "e": [0.0, 30.0, 0.0],
        "b": [0.0, 0.0, 1.0],
        "units": {"e": "kV/m", "b": "G", "energy": "GeV"},
        "boost": {"direction": [1.0, 0.0, 0.0], "kinetic_energy": 26.0, "particle": "proton"},
    })
}

/// A plane wave on an observer who moves along with it, in strong light.
pub fn plane_wave() -> Value {
    json!({
        "e": [0.0, 299_792_458.0, 0.0],
        "b": [0.0, 0.0, 1.0],
        "boost": {"beta": [0.6, 0.0, 0.0]},
        "include": ["parallel_frame"],
    })
}

/// What the service answers; worked out once, however often the paths are described.
pub fn answer_to(question: Value) -> Answer {
    static ANSWERS: Mutex<BTreeMap<String, Answer>> = Mutex::new(BTreeMap::new());
    let text = question.to_string();
    let mut answers = ANSWERS.lock().unwrap_or_else(PoisonError::into_inner);
    let answer = answers.entry(text);
    answer.or_insert_with_key(|text| work_out(text)).clone()
}

fn work_out(text: &str) -> Answer {
    let node = Node::from_json(text.as_bytes()).expect("an example is JSON");
    let question = Question::read(&node, &DEPLOYMENT).expect("an example is right");
    let mut answer = Answer::to(&question).expect("an example has an answer");
    if let Some(plan) = Plan::new(&question, &mut answer) {
        plan.finish(&mut answer);
    }
    answer
}

/// What the service answers to the examples of the parameters of a sweep.
pub fn swept() -> Swept {
    let query = "over=beta&start=0&stop=0.99&points=5&e=0,1.2,0&b=0,0,45000\
                 &units.e=mV/m&units.b=nT&units.velocity=km/s&boost.direction=1,0,0\
                 &uncertainty.e=0.1,0.1,0.1";
    let node = from_query(query).expect("an example is a query");
    let sweep = Sweep::read(node, &DEPLOYMENT, 10).expect("an example is right");
    sweep.answer(&DEPLOYMENT).expect("an example has an answer")
}

/// Enough for them.
const LIMITS: Limits = Limits {
    row: 1024,
    batch: 1024,
};

/// Rows of a probe on a satellite as text, each with its velocity.
pub fn rows(format: Format) -> &'static str {
    match format {
        Format::Ndjson => {
            "{\"time\":0,\"e\":[0,1.2,0],\"b\":[0,0,45000],\"velocity\":[7.6,0,0]}\n\
             {\"time\":1,\"e\":[0,1.3,0],\"b\":[0,90,45100],\"velocity\":[7.6,0.1,0]}\n"
        }
        _ => {
            "time,ex,ey,ez,bx,by,bz,vx,vy,vz\r\n\
             0,0,1.2,0,0,0,45000,7.6,0,0\r\n\
             1,0,1.3,0,0,90,45100,7.6,0.1,0\r\n"
        }
    }
}

/// What the service answers to them, when the query holds the examples of its parameters.
pub fn rows_answered(format: Format) -> String {
    let query = "units.e=mV/m&units.b=nT&units.velocity=km/s&velocity=row";
    let node = from_query(query).expect("an example is a query");
    let series = Series::read(node, &DEPLOYMENT).expect("an example is right");
    let (rows, mut answer) = (rows(format).as_bytes(), Vec::new());
    series::run(series, [format; 2], LIMITS, 1, rows, &mut answer)
        .expect("an example has an answer");
    String::from_utf8(answer).expect("an answer is UTF-8")
}
