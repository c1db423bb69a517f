//! The way of a question to its target frame: steps, a shorthand of one step, or names.

use std::sync::Arc;

use super::{Deployment, uncertainty};
use crate::chain::{self, step};
use crate::document::{Code, Faults, Members, Notice, Place};
use crate::frames::{Sensor, Time, Walk};
use crate::physics::lorentz::Step;
use crate::physics::resolved::Resolved;
use crate::units::Units;

/// The ways to name the target; exactly one is needed.
pub(crate) const WAYS: [&str; 5] = ["steps", "velocity", "boost", "rotation", "from"];

/// The way, resolved.
#[derive(Debug)]
pub(crate) struct Way {
    /// From the frame of the reading to the target.
    pub(crate) resolved: Arc<Resolved>,
    /// The sensor that the reading comes from, and the units it is calibrated to.
    pub(crate) sensor: Option<(Sensor, Units)>,
    /// What is to be said about the way.
    pub(crate) notices: Vec<Notice>,
}

/// Reads the way.
pub(crate) fn read(
    members: Members,
    units: &Units,
    deployment: &Deployment,
    faults: &mut Faults,
) -> Option<Way> {
    let root = Place::ROOT;
    for name in ["to", "time"] {
        if members.get(name).is_some() && members.get("from").is_none() {
            let detail = format!("{name:?} goes with \"from\", which is not given");
            faults.note(&root.field(name), Code::ConflictingFields, detail);
        }
    }
    let (form, _) = faults.exactly_one(members, &root, &WAYS)?;
    if form == "from" {
        uncertainty::of_other_ways(members, form, faults);
        return named(members, inverse(members, faults), deployment, faults);
    }
    of_steps(steps(members, units, deployment, faults)?, faults)
}

/// Reads `inverse`: whether the whole way is taken backwards.
pub(crate) fn inverse(members: Members, faults: &mut Faults) -> Option<bool> {
    match members.get("inverse") {
        Some(node) => faults.boolean(node, &Place::ROOT.field("inverse")),
        None => Some(false),
    }
}

/// Reads a way of steps, in any form but by names; backwards if `inverse`.
pub(crate) fn steps(
    members: Members,
    units: &Units,
    deployment: &Deployment,
    faults: &mut Faults,
) -> Option<Vec<Step>> {
    let inverse = inverse(members, faults);
    let (form, node) = faults.exactly_one(members, &Place::ROOT, &WAYS)?;
    let place = Place::ROOT.field(form);
    uncertainty::of_other_ways(members, form, faults);
    let steps = if form == "steps" {
        chain::steps(node, &place, units, deployment.steps, faults)?
    } else {
        let step = match form {
            "velocity" => step::boost::velocity(node, &place, units, faults),
            "boost" => step::boost::read(node, &place, units, faults),
            _ => step::rotate::read(node, &place, units, faults),
        };
        vec![uncertainty::of_step(members, form, step, units, faults)?]
    };
    Some(if inverse? {
        chain::inverse(steps)
    } else {
        steps
    })
}

fn of_steps(steps: Vec<Step>, faults: &mut Faults) -> Option<Way> {
    match Resolved::new(steps) {
        Ok(resolved) => Some(Way {
            resolved: Arc::new(resolved),
            sensor: None,
            notices: Vec::new(),
        }),
        Err(impossible) => {
            faults.note(
                &Place::ROOT,
                chain::code(&impossible),
                impossible.to_string(),
            );
            None
        }
    }
}

fn named(
    members: Members,
    inverse: Option<bool>,
    deployment: &Deployment,
    faults: &mut Faults,
) -> Option<Way> {
    let walk = walk(members, inverse, deployment, faults);
    let place = Place::ROOT.field("time");
    let catalogue = deployment.frames.as_ref()?;
    let time = match members.get("time") {
        Some(node) => Some(Time::read(node, &place, catalogue.clock, faults)?),
        None => None,
    };
    let walk = walk?;
    let passage = walk
        .at(time)
        .map_err(|fault| faults.note(&place, fault.code, fault.detail))
        .ok()?;
    // A sensor's numbers are raw only where the reading begins.
    let sensor = walk.sensor().filter(|_| inverse == Some(false));
    Some(Way {
        resolved: passage.way,
        sensor: sensor.map(|sensor| (*sensor, catalogue.units)),
        notices: passage.notices,
    })
}

/// Reads `from` and `to`: the walk between them, still at no time; backwards if `inverse`.
pub fn walk(
    members: Members,
    inverse: Option<bool>,
    deployment: &Deployment,
    faults: &mut Faults,
) -> Option<Arc<Walk>> {
    let root = Place::ROOT;
    let Some(catalogue) = &deployment.frames else {
        let detail = "this service was started without a catalogue of frames (--frames FILE)";
        faults.note(&root.field("from"), Code::UnknownFrame, detail);
        return None;
    };
    let mut end = |name| {
        let node = faults.needed(members, &root, name)?;
        let place = root.field(name);
        let found = catalogue.find(faults.text(node, &place)?);
        found
            .map_err(|fault| faults.note(&place, fault.code, fault.detail))
            .ok()
    };
    let (from, to) = (end("from"), end("to"));
    let (from, to) = if inverse? { (to?, from?) } else { (from?, to?) };
    let walk = catalogue.walk(from, to);
    walk.map_err(|fault| faults.note(&root.field("to"), fault.code, fault.detail))
        .ok()
}
