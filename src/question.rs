//! One question: a reading, the way to the target frame, and what the answer should hold.

use crate::chain::{self, step};
use crate::document::{Code, Fault, Faults, Members, Node, Place};
use crate::physics::field::FieldUnits;
use crate::physics::lorentz::Step;
use crate::physics::precise::Resolved;
use crate::physics::tensor::Signature;
use crate::transform::Reading;
use crate::units::{Quantity, Units};

/// The names a question may have at its top level.
pub const KNOWN: [&str; 11] = [
    "e",
    "b",
    "units",
    "answer_units",
    "steps",
    "boost",
    "velocity",
    "rotation",
    "inverse",
    "include",
    "signature",
];

/// The ways to name the target; exactly one is needed.
const WAYS: [&str; 4] = ["steps", "velocity", "boost", "rotation"];

/// What an answer holds on request.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Part {
    /// The field tensor and its dual.
    Tensor,
    /// The net Lorentz matrix.
    Matrix,
    /// Energy density, Poynting vector and Maxwell stress.
    Energy,
    /// The frame in which E and B are parallel.
    ParallelFrame,
}

const PARTS: [(&str, Part); 4] = [
    ("tensor", Part::Tensor),
    ("matrix", Part::Matrix),
    ("energy", Part::Energy),
    ("parallel_frame", Part::ParallelFrame),
];

/// What a deployment allows.
#[derive(Clone, Copy, Debug)]
pub struct Limits {
    /// Most steps a way may have.
    pub steps: usize,
}

/// A question understood.
#[derive(Clone, Debug)]
pub struct Question {
    /// The reading.
    pub reading: Reading,
    /// The way, resolved.
    pub way: Resolved,
    /// Units of the question.
    pub units: Units,
    /// Units of the answer.
    pub answer_units: Units,
    /// Parts asked for.
    pub include: Vec<Part>,
    /// Convention of the tensor.
    pub signature: Signature,
}

impl Question {
    /// Reads a question.
    ///
    /// # Errors
    /// Every fault found in it.
    pub fn read(node: &Node, limits: &Limits) -> Result<Question, Vec<Fault>> {
        let mut faults = Faults::default();
        let question = read(node, limits, &mut faults);
        match question {
            Some(question) if faults.0.is_empty() => Ok(question),
            _ => Err(faults.0),
        }
    }

    /// The units of E and B in the answer.
    pub fn target_units(&self) -> FieldUnits {
        field_units(&self.answer_units)
    }
}

fn field_units(units: &Units) -> FieldUnits {
    FieldUnits {
        e: units.si(Quantity::E),
        b: units.si(Quantity::B),
    }
}

fn read(node: &Node, limits: &Limits, faults: &mut Faults) -> Option<Question> {
    let root = Place::ROOT;
    let members = faults.members(node, &root, &KNOWN)?;
    let units = match members.get("units") {
        Some(node) => {
            let place = root.field("units");
            chain::units(node, &place, &Quantity::ALL, Units::default(), faults)
        }
        None => Some(Units::default()),
    };
    // With units unread, the rest is still checked: in SI, so that nothing else is blamed.
    let reading_units = units.unwrap_or_default();
    let answer_units = match members.get("answer_units") {
        Some(node) => {
            let place = root.field("answer_units");
            let choices = [Quantity::E, Quantity::B];
            chain::units(node, &place, &choices, reading_units, faults)
        }
        None => Some(reading_units),
    };
    let e = partial("e", members, faults);
    let b = partial("b", members, faults);
    let way = way(members, &reading_units, limits, faults).and_then(|steps| {
        let resolved = Resolved::new(steps);
        resolved
            .map_err(|impossible| {
                let detail = impossible.to_string();
                faults.note(&root, chain::code(&impossible), detail);
            })
            .ok()
    });
    let include = match members.get("include") {
        Some(node) => parts(node, &root.field("include"), faults),
        None => Some(Vec::new()),
    };
    let signature = match members.get("signature") {
        Some(node) => {
            let choices = [
                ("mostly_minus", Signature::MostlyMinus),
                ("mostly_plus", Signature::MostlyPlus),
            ];
            faults.choice(node, &root.field("signature"), &choices)
        }
        None => Some(Signature::default()),
    };
    let units = units?;
    let reading = Reading {
        e: e?,
        b: b?,
        units: field_units(&units),
    };
    Some(Question {
        reading,
        way: way?,
        units,
        answer_units: answer_units?,
        include: include?,
        signature: signature?,
    })
}

/// E or B. At least one of them must be named; one that is left out is missing, not zero.
fn partial(name: &str, members: Members, faults: &mut Faults) -> Option<[Option<f64>; 3]> {
    let place = Place::ROOT.field(name);
    match members.given(name) {
        Some(node) => faults.partial_vector(node, &place),
        None => {
            if name == "b" && members.given("e").is_none() {
                let detail = "a reading needs \"e\", \"b\" or both; one left out is missing, \
                              never zero";
                faults.note(&Place::ROOT, Code::MissingField, detail);
            }
            Some([None; 3])
        }
    }
}

fn way(members: Members, units: &Units, limits: &Limits, faults: &mut Faults) -> Option<Vec<Step>> {
    let root = Place::ROOT;
    let inverse = match members.get("inverse") {
        Some(node) => faults.boolean(node, &root.field("inverse")),
        None => Some(false),
    };
    let (form, node) = faults.exactly_one(members, &root, &WAYS)?;
    let place = root.field(form);
    let steps = match form {
        "steps" => chain::steps(node, &place, units, limits.steps, faults)?,
        "velocity" => vec![step::boost::velocity(node, &place, units, faults)?],
        "boost" => vec![step::boost::read(node, &place, units, faults)?],
        _ => vec![step::rotate::read(node, &place, units, faults)?],
    };
    Some(if inverse? {
        chain::inverse(steps)
    } else {
        steps
    })
}

fn parts(node: &Node, place: &Place, faults: &mut Faults) -> Option<Vec<Part>> {
    let items = faults.list(node, place)?;
    let mut parts = Vec::new();
    for (i, item) in items.iter().enumerate() {
        let part = faults.choice(item, &place.index(i), &PARTS)?;
        if !parts.contains(&part) {
            parts.push(part);
        }
    }
    Some(parts)
}
