//! The types that describe a question and the reader that understands it name the same members.

use lodeframe::document::{Code, Node};
use lodeframe::question::{Deployment, Question};
use serde_json::{Value, json};

const DEPLOYMENT: Deployment = Deployment {
    steps: 10,
    trials: 100_000,
    frames: None,
};

fn document() -> Value {
    serde_json::from_str(&lodeframe::http::openapi::text()).expect("the document is JSON")
}

/// The members that a schema of the document describes, sorted.
fn described(schema: &str) -> Vec<String> {
    let document = document();
    let properties = &document["components"]["schemas"][schema]["properties"];
    let mut names: Vec<String> = properties
        .as_object()
        .expect(schema)
        .keys()
        .cloned()
        .collect();
    names.sort();
    names
}

/// The members that the reader knows, sorted: it lists them when it meets one it does not know.
fn understood(question: Value) -> Vec<String> {
    let text = question.to_string();
    let node = Node::from_json(text.as_bytes()).expect("well-formed");
    let faults = Question::read(&node, &DEPLOYMENT).expect_err("a slip");
    let fault = faults
        .iter()
        .find(|fault| fault.code == Code::UnknownField)
        .expect("the slip");
    let (_, list) = fault.detail.split_once("known are ").expect("a list");
    let list = list.split(';').next().unwrap_or_default();
    let mut names: Vec<String> = list.split(", ").map(str::to_owned).collect();
    names.sort();
    names
}

#[test]
fn schema_and_reader_know_the_same_members() {
    let slip = json!({"slip": 1});
    let cases = [
        ("Question", slip.clone()),
        ("Units", json!({"units": slip})),
        ("UnitsOfAnswer", json!({"answer_units": slip})),
        ("Assume", json!({"assume": slip})),
        ("EDotBZero", json!({"assume": {"e_dot_b_zero": slip}})),
        ("UncertaintyOfQuestion", json!({"uncertainty": slip})),
        ("MonteCarloOfQuestion", json!({"monte_carlo": slip})),
        ("CovarianceOfVector", json!({"uncertainty": {"e": slip}})),
        (
            "OfDirectedBoost",
            json!({"boost": {"direction": [1, 0, 0], "gamma": 2, "uncertainty": slip}}),
        ),
        (
            "OfTurningBoost",
            json!({"boost": {"angular_velocity": [1, 0, 0], "position": [0, 1, 0], "uncertainty": slip}}),
        ),
        ("Boost", json!({"boost": slip})),
        ("Rotate", json!({"rotation": slip})),
        (
            "AttitudeQuaternion",
            json!({"rotation": {"quaternion": slip}}),
        ),
        ("Euler", json!({"rotation": {"euler": slip}})),
        (
            "OtherParticle",
            json!({"boost": {"direction": [1, 0, 0], "kinetic_energy": 1, "particle": slip}}),
        ),
    ];
    for (schema, question) in cases {
        assert_eq!(described(schema), understood(question), "{schema}");
    }
}

#[test]
fn every_unit_of_the_table_is_described_and_understood() {
    let document = document();
    for quantity in lodeframe::units::Quantity::ALL {
        let schema = &document["components"]["schemas"]["Units"]["properties"][quantity.name()];
        let described = schema["description"].as_str().expect("a description");
        for unit in lodeframe::units::of_quantity(quantity) {
            assert!(
                described.contains(unit.code),
                "{} of {}",
                unit.code,
                quantity.name()
            );
            let text = json!({
                "e": [1, 0, 0], "units": {quantity.name(): unit.code}, "velocity": [0, 0, 0],
            })
            .to_string();
            let node = Node::from_json(text.as_bytes()).expect("well-formed");
            assert!(Question::read(&node, &DEPLOYMENT).is_ok(), "{}", unit.code);
        }
    }
}
