//! One question: a reading, the way to the target frame, and what the answer should hold.

mod assume;
mod monte_carlo;
pub(crate) mod uncertainty;
pub mod way;

pub use monte_carlo::{FEWEST as FEWEST_TRIALS, MonteCarlo};

use std::sync::Arc;

use crate::chain;
use crate::document::{Code, Fault, Faults, Members, Node, Notice, Place};
use crate::frames::{Catalogue, Channel, Sensor};
use crate::physics::covariance::Covariance;
use crate::physics::field::FieldUnits;
use crate::physics::resolved::Resolved;
use crate::physics::tensor::Signature;
use crate::physics::uncertain::UncertainReading;
use crate::transform::Reading;
use crate::units::{Quantity, Units};
use way::Way;

/// The names a question may have at its top level.
pub const KNOWN: [&str; 17] = [
    "e",
    "b",
    "units",
    "answer_units",
    "steps",
    "boost",
    "velocity",
    "rotation",
    "from",
    "to",
    "time",
    "inverse",
    "assume",
    "uncertainty",
    "monte_carlo",
    "include",
    "signature",
];

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
    /// What the uncertainty of each component comes from.
    Budget,
}

const PARTS: [(&str, Part); 5] = [
    ("tensor", Part::Tensor),
    ("matrix", Part::Matrix),
    ("energy", Part::Energy),
    ("parallel_frame", Part::ParallelFrame),
    ("budget", Part::Budget),
];

/// What a deployment allows and knows.
#[derive(Clone, Debug)]
pub struct Deployment {
    /// Most steps a way may have.
    pub steps: usize,
    /// Most trials it may ask for.
    pub trials: usize,
    /// The catalogue of named frames, if there is one.
    pub frames: Option<Arc<Catalogue>>,
}

/// A question understood.
#[derive(Clone, Debug)]
pub struct Question {
    /// The reading.
    pub reading: Reading,
    /// The errors of the reading; `None` when it is exact.
    pub uncertainty: Option<Arc<UncertainReading>>,
    /// The trials asked for.
    pub monte_carlo: Option<MonteCarlo>,
    /// The sensor it comes from, by name.
    pub sensor: Option<String>,
    /// The way, resolved.
    pub way: Arc<Resolved>,
    /// Units of the question.
    pub units: Units,
    /// Units of the answer.
    pub answer_units: Units,
    /// Parts asked for.
    pub include: Vec<Part>,
    /// Convention of the tensor.
    pub signature: Signature,
    /// What is to be said about the way.
    pub notices: Vec<Notice>,
    /// The hash of the catalogue that the service has, used or not.
    pub catalogue: Option<Arc<str>>,
}

impl Question {
    /// Reads a question.
    ///
    /// # Errors
    /// Every fault found in it.
    pub fn read(node: &Node, deployment: &Deployment) -> Result<Question, Vec<Fault>> {
        Question::read_along(node, deployment, |members, units, faults| {
            way::read(members, units, deployment, faults)
        })
    }

    /// Reads a question whose way is read by other rules.
    ///
    /// # Errors
    /// Every fault found in it.
    pub(crate) fn read_along(
        node: &Node,
        deployment: &Deployment,
        way: impl FnOnce(Members, &Units, &mut Faults) -> Option<Way>,
    ) -> Result<Question, Vec<Fault>> {
        let mut faults = Faults::default();
        let question = read(node, deployment, way, &mut faults);
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

fn read(
    node: &Node,
    deployment: &Deployment,
    way: impl FnOnce(Members, &Units, &mut Faults) -> Option<Way>,
    faults: &mut Faults,
) -> Option<Question> {
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
    let e = partial("e", members, faults);
    let b = partial("b", members, faults);
    let covariance = uncertainty::of_reading(members, [e, b], faults);
    let way = way(members, &reading_units, faults);
    let (sensor, calibrated) = match way.as_ref().and_then(|way| way.sensor) {
        Some((sensor, calibrated)) => (sensor, calibrated),
        None => (Sensor::default(), reading_units),
    };
    // Raw numbers have no unit of ours: calibrated, they are in that of the catalogue.
    let mut calibrated_units = reading_units;
    let mut answer_base = reading_units;
    for (quantity, channel) in [(Quantity::E, sensor.e), (Quantity::B, sensor.b)] {
        if channel.is_some() {
            calibrated_units.set(calibrated.get(quantity));
            if !names_unit(members, quantity) {
                answer_base.set(calibrated.get(quantity));
            }
        }
    }
    let answer_units = match members.get("answer_units") {
        Some(node) => {
            let place = root.field("answer_units");
            let choices = [Quantity::E, Quantity::B];
            chain::units(node, &place, &choices, answer_base, faults)
        }
        None => Some(answer_base),
    };
    for (name, values, channel) in [("e", e, sensor.e), ("b", b, sensor.b)] {
        measured_axes(name, values, channel, faults);
    }
    let assume = match members.get("assume") {
        Some(node) => assume::read(node, &root.field("assume"), &reading_units, faults).map(Some),
        None => Some(None),
    };
    let monte_carlo = monte_carlo::read(members, deployment.trials, faults);
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
        units: field_units(&calibrated_units),
        calibration: [sensor.e, sensor.b].map(|channel| channel.map(|c| c.calibration)),
        e_dot_b_zero: assume?,
    };
    let way = way?;
    let calibration = [sensor.e, sensor.b].map(|channel| channel?.uncertainty);
    let covariance = match covariance? {
        None if calibration == [None; 2] => None,
        None => Covariance::of_standard([0.0; 6]).ok(),
        given => given,
    };
    let uncertainty = covariance.map(|field| Arc::new(UncertainReading { field, calibration }));
    let monte_carlo = monte_carlo?;
    if monte_carlo.is_some() && uncertainty.is_none() && !way.resolved.is_uncertain() {
        monte_carlo::nothing_uncertain(faults);
    }
    Some(Question {
        reading,
        uncertainty,
        monte_carlo,
        sensor: way.sensor.and_then(|_| {
            let name = faults.text(members.get("from")?, &root.field("from"))?;
            Some(name.to_owned())
        }),
        way: way.resolved,
        units,
        answer_units: answer_units?,
        include: include?,
        signature: signature?,
        notices: way.notices,
        catalogue: deployment.frames.as_ref().map(|frames| frames.hash.clone()),
    })
}

/// Whether `units` names that of a quantity.
fn names_unit(members: Members, quantity: Quantity) -> bool {
    match members.get("units").map(Node::plain) {
        Some(Node::Object(units)) => units.iter().any(|(name, _)| name == quantity.name()),
        _ => false,
    }
}

/// E or B. At least one of them must be named; one that is left out is missing, not zero.
fn partial(name: &str, members: Members, faults: &mut Faults) -> Option<[Option<f64>; 3]> {
    let place = Place::ROOT.field(name);
    if let Some(node) = members.given(name) {
        return faults.partial_vector(node, &place);
    }
    if name == "b" && members.given("e").is_none() {
        let detail = "a reading needs \"e\", \"b\" or both; one left out is missing, never zero";
        faults.note(&Place::ROOT, Code::MissingField, detail);
    }
    Some([None; 3])
}

/// A sensor has no value on an axis that it does not measure.
pub(crate) fn measured_axes(
    name: &str,
    values: Option<[Option<f64>; 3]>,
    channel: Option<Channel>,
    faults: &mut Faults,
) {
    let (Some(values), Some(channel)) = (values, channel) else {
        return;
    };
    for i in (0..3).filter(|i| values[*i].is_some() && !channel.axes[*i]) {
        let detail = format!(
            "the sensor does not measure {}; leave that component null",
            ["x", "y", "z"][i]
        );
        let place = Place::ROOT.field(name);
        faults.note(&place.index(i), Code::AxisNotMeasured, detail);
    }
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
