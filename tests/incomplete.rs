//! Readings with missing components, and E·B = 0.

use lodeframe::answer::Answer;
use lodeframe::chain;
use lodeframe::document::{Code, Node};
use lodeframe::question::{Deployment, Question};
use serde_json::{Value, json};

/// The answer, or the codes of what is wrong.
fn ask(question: Value) -> Result<Answer, Vec<Code>> {
    let deployment = Deployment {
        steps: 10,
        trials: 100_000,
        frames: None,
    };
    let text = question.to_string();
    let node = Node::from_json(text.as_bytes()).expect("well-formed");
    let question = Question::read(&node, &deployment)
        .map_err(|faults| faults.iter().map(|fault| fault.code).collect::<Vec<_>>())?;
    Answer::to(&question).map_err(|impossible| vec![chain::code(&impossible)])
}

fn two_axis(b: Value, min_angle: f64) -> Value {
    json!({"e": [3, -4, null], "b": b, "velocity": [0, 0, 0], "units": {"angle": "deg"},
           "assume": {"e_dot_b_zero": {"min_angle": min_angle}}})
}

#[test]
fn a_missing_component_of_e_follows_from_e_dot_b() {
    let answer = ask(two_axis(json!([1, 2, 8]), 15.0)).expect("an answer");
    assert_eq!(answer.e, [Some(3.0), Some(-4.0), Some(0.625)]);
    let invariants = answer.invariants.expect("a whole field");
    assert_eq!(invariants.e_dot_cb, Some(0.0));
    let codes: Vec<&str> = answer.notices.iter().map(|notice| &*notice.code).collect();
    assert_eq!(codes[0], "e_dot_b_assumed");
    // Any of the three axes may be the missing one.
    for (e, filled) in [
        (json!([null, 3, -4]), [Some(13.0), Some(3.0), Some(-4.0)]),
        (json!([3, null, -4]), [Some(3.0), Some(6.5), Some(-4.0)]),
    ] {
        let mut question = two_axis(json!([2, 2, 5]), 5.0);
        if e[1].is_null() {
            question["b"] = json!([2, 8, 14.5]);
        } else {
            question["b"] = json!([2, 2, 8]);
        }
        question["e"] = e;
        assert_eq!(ask(question).expect("an answer").e, filled);
    }
}

#[test]
fn b_near_the_measured_plane_is_refused() {
    // atan(8/√5) = 74.4°, atan(0.5/√5) = 12.6°.
    assert!(ask(two_axis(json!([1, 2, 8]), 74.0)).is_ok());
    assert_eq!(
        ask(two_axis(json!([1, 2, 8]), 75.0)).unwrap_err(),
        [Code::FieldInPlane]
    );
    assert_eq!(
        ask(two_axis(json!([1, 2, 0.5]), 15.0)).unwrap_err(),
        [Code::FieldInPlane]
    );
    assert!(ask(two_axis(json!([1, 2, 0.5]), 12.0)).is_ok());
    assert_eq!(
        ask(two_axis(json!([1, 2, 0]), 1e-9)).unwrap_err(),
        [Code::FieldInPlane]
    );
    assert_eq!(
        ask(two_axis(json!([0, 0, 0]), 15.0)).unwrap_err(),
        [Code::FieldInPlane]
    );
    // Left out, the angle is 15 degrees.
    let mut question = two_axis(json!([1, 2, 0.5]), 1.0);
    question["assume"]["e_dot_b_zero"] = json!({});
    assert_eq!(ask(question).unwrap_err(), [Code::FieldInPlane]);
}

#[test]
fn an_angle_that_makes_no_sense_is_refused() {
    for angle in [0.0, -15.0, 90.5] {
        let found = ask(two_axis(json!([1, 2, 8]), angle)).unwrap_err();
        assert_eq!(found, [Code::AngleOutOfRange], "{angle}");
    }
    // 15 without a unit are radians.
    let mut question = two_axis(json!([1, 2, 8]), 15.0);
    question["units"] = Value::Null;
    assert_eq!(ask(question).unwrap_err(), [Code::AngleOutOfRange]);
}

#[test]
fn nothing_is_assumed_where_it_does_not_help() {
    let is_filled = |answer: &Answer| answer.notices.iter().any(|n| n.code == "e_dot_b_assumed");
    // A whole reading is taken as it is, whatever its E·B.
    let mut whole = two_axis(json!([1, 2, 8]), 15.0);
    whole["e"] = json!([3, -4, 5]);
    let answer = ask(whole).expect("an answer");
    assert_eq!(answer.e[2], Some(5.0));
    assert!(!is_filled(&answer));
    // With two components missing, or one of B, none follows.
    for (e, b) in [
        (json!([3, null, null]), json!([1, 2, 8])),
        (json!([3, -4, null]), json!([1, null, 8])),
        (json!([3, -4, null]), Value::Null),
    ] {
        let mut question = two_axis(b, 15.0);
        question["e"] = e;
        let answer = ask(question).expect("an answer");
        assert_eq!(answer.e[2], None);
        assert!(!is_filled(&answer));
        assert!(answer.notices.iter().any(|n| n.code == "missing_component"));
    }
}

#[test]
fn what_does_not_depend_on_a_missing_component_is_answered() {
    let answer = ask(json!({"e": [1, 2, null], "velocity": [100, 0, 0]})).expect("an answer");
    assert_eq!(
        (answer.e, answer.b),
        ([Some(1.0), None, None], [None, None, None])
    );
    let turned = json!({"e": [1, 2, null], "units": {"angle": "deg"},
                        "rotation": {"axis": [0, 0, 1], "angle": 90}});
    assert_eq!(
        ask(turned).expect("an answer").e,
        [Some(2.0), Some(-1.0), None]
    );
    // A boost along x touches neither E nor B along x.
    let along = json!({"e": [1, 2, 3], "b": [4, null, 6], "velocity": [100, 0, 0]});
    let answer = ask(along).expect("an answer");
    assert_eq!(answer.e.map(|x| x.is_some()), [true, true, false]);
    assert_eq!(answer.b.map(|x| x.is_some()), [true, false, true]);
    assert!(answer.invariants.is_none());
}
