//! Questions of the OpenAPI document and their true answers. All values are invented.

use serde_json::{Value, json};

use crate::{
    answer::Answer,
    document::{Node, from_query},
    question::{Deployment, Question},
    sweep::{Sweep, Swept},
};

/// Where the examples are asked.
const DEPLOYMENT: Deployment = Deployment {
    steps: 10,
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

/// What the service answers.
pub fn answer_to(question: Value) -> Answer {
    let text = question.to_string();
    let node = Node::from_json(text.as_bytes()).expect("an example is JSON");
    let question = Question::read(&node, &DEPLOYMENT).expect("an example is right");
    Answer::to(&question).expect("an example has an answer")
}

/// What the service answers to the examples of the parameters of a sweep.
pub fn swept() -> Swept {
    let query = "over=beta&start=0&stop=0.99&points=5&e=0,1.2,0&b=0,0,45000\
                 &units.e=mV/m&units.b=nT&units.velocity=km/s&boost.direction=1,0,0";
    let node = from_query(query).expect("an example is a query");
    let sweep = Sweep::read(node, &DEPLOYMENT, 10).expect("an example is right");
    sweep.answer(&DEPLOYMENT).expect("an example has an answer")
}
