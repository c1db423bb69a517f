//! One frame as the catalogue describes it.

use super::sensor::Sensor;
use super::time::{Clock, Time};
use super::turning::{Turning, UncertainTurning};
use crate::chain::{self, uncertainty};
use crate::document::{Code, Faults, Members, Node, Place};
use crate::physics::boost::Motion;
use crate::physics::covariance::Covariance;
use crate::physics::lorentz::Step;
use crate::physics::resolved::Resolved;
use crate::units::{Quantity, Units};

/// A frame as written, its parent still a name and its track still a file.
#[derive(Clone, Debug)]
pub(super) struct Draft {
    /// Its name.
    pub(super) name: String,
    /// What it is, in words.
    pub about: Option<String>,
    /// The name of its parent; `None` for the root.
    pub parent: Option<String>,
    /// What leads from the parent to it; `None` when that could not be read.
    pub link: Option<DraftLink>,
    /// What it reads, if it is a sensor.
    pub sensor: Option<Sensor>,
}

/// What leads from a parent to a frame.
#[derive(Clone, Debug)]
pub(super) enum DraftLink {
    /// Steps that never change.
    Steps(Vec<Step>),
    /// A steady turn.
    Turning(Turning),
    /// A track.
    Track {
        /// The file, beside the catalogue.
        file: String,
        /// The longest time between rows, in s.
        max_gap: Option<f64>,
        /// Whether times outside are answered.
        extrapolate: bool,
    },
}

const KNOWN: [&str; 9] = [
    "about",
    "parent",
    "steps",
    "track",
    "max_gap",
    "extrapolate",
    "turning",
    "position",
    "sensor",
];
/// What may lead from the parent to a frame: none or one of them.
const LINKS: [&str; 3] = ["steps", "track", "turning"];

/// Reads the table of a frame; what cannot be read is noted and left out.
pub(super) fn read(
    name: &str,
    node: &Node,
    place: &Place,
    units: &Units,
    clock: Clock,
    faults: &mut Faults,
) -> Draft {
    let mut draft = Draft {
        name: name.to_owned(),
        about: None,
        parent: None,
        link: None,
        sensor: None,
    };
    let Some(members) = faults.members(node, place, &KNOWN) else {
        return draft;
    };
    let mut text = |name| {
        let node = members.get(name)?;
        faults.text(node, &place.field(name)).map(str::to_owned)
    };
    (draft.about, draft.parent) = (text("about"), text("parent"));
    if members.get("parent").is_none() {
        for name in LINKS
            .into_iter()
            .chain(["sensor"])
            .filter(|name| members.get(name).is_some())
        {
            let detail =
                format!("{name:?} leads from a parent to this frame, but no parent is given");
            faults.note(&place.field(name), Code::MissingField, detail);
        }
    }
    draft.link = link(members, place, units, clock, faults);
    draft.sensor = members
        .get("sensor")
        .and_then(|node| Sensor::read(node, &place.field("sensor"), faults));
    draft
}

fn link(
    members: Members,
    place: &Place,
    units: &Units,
    clock: Clock,
    faults: &mut Faults,
) -> Option<DraftLink> {
    for (owner, owned) in [
        ("track", "max_gap"),
        ("track", "extrapolate"),
        ("turning", "position"),
    ] {
        if members.get(owned).is_some() && members.get(owner).is_none() {
            let detail = format!("{owned:?} goes with {owner:?}, which is not given");
            faults.note(&place.field(owned), Code::ConflictingFields, detail);
        }
    }
    if LINKS.iter().all(|name| members.get(name).is_none()) {
        return Some(DraftLink::Steps(Vec::new()));
    }
    let (form, node) = faults.exactly_one(members, place, &LINKS)?;
    let at = place.field(form);
    match form {
        "steps" => {
            let steps = chain::steps(node, &at, units, usize::MAX, faults)?;
            if let Err(impossible) = Resolved::new(steps.clone()) {
                faults.note(&at, chain::code(&impossible), impossible.to_string());
            }
            Some(DraftLink::Steps(steps))
        }
        "turning" => {
            let turning = turning(members, node, place, units, clock, faults)?;
            if let Err(impossible) = turning.check() {
                faults.note(&at, chain::code(&impossible), impossible.to_string());
            }
            Some(DraftLink::Turning(turning))
        }
        _ => {
            let file = faults.text(node, &at);
            let max_gap = members.get("max_gap").map_or(Some(None), |node| {
                let place = place.field("max_gap");
                let gap = faults.number(node, &place)?;
                if gap <= 0.0 {
                    let detail = format!("max_gap is {gap} s; it is above 0");
                    faults.note(&place, Code::WrongTime, detail);
                }
                Some(Some(gap))
            });
            let extrapolate = members.get("extrapolate").map_or(Some(false), |node| {
                faults.boolean(node, &place.field("extrapolate"))
            });
            Some(DraftLink::Track {
                file: file?.to_owned(),
                max_gap: max_gap?,
                extrapolate: extrapolate?,
            })
        }
    }
}

fn turning(
    members: Members,
    node: &Node,
    place: &Place,
    units: &Units,
    clock: Clock,
    faults: &mut Faults,
) -> Option<Turning> {
    let at = place.field("turning");
    let known = ["angular_velocity", "epoch", "phase", "uncertainty"];
    let own = faults.members(node, &at, &known)?;
    let angular_velocity = faults
        .needed(own, &at, "angular_velocity")
        .and_then(|node| faults.vector(node, &at.field("angular_velocity")));
    let epoch = faults
        .needed(own, &at, "epoch")
        .and_then(|node| Time::read(node, &at.field("epoch"), clock, faults));
    let phase = own
        .get("phase")
        .map_or(Some(0.0), |node| faults.number(node, &at.field("phase")));
    let position = members.get("position").map_or(Some(None), |node| {
        faults.vector(node, &place.field("position")).map(Some)
    });
    let uncertainty = own.get("uncertainty").map_or(Some(None), |node| {
        uncertain_turning(
            node,
            &at.field("uncertainty"),
            members.get("position").is_some(),
            faults,
        )
        .map(Some)
    });
    let rate = units.si(Quantity::AngularVelocity);
    Some(Turning {
        angular_velocity: angular_velocity?,
        rate,
        epoch: epoch?,
        phase: phase?,
        radians: units.si(Quantity::Angle),
        position: position?,
        beta: Motion::to_beta(rate.times(units.si(Quantity::Length))),
        uncertainty: uncertainty?,
    })
}

fn uncertain_turning(
    node: &Node,
    place: &Place,
    at_point: bool,
    faults: &mut Faults,
) -> Option<Box<UncertainTurning>> {
    let members = faults.members(node, place, &["angular_velocity", "phase", "position"])?;
    if !at_point && members.get("position").is_some() {
        let detail = "the frame has no position whose uncertainty this could be";
        faults.note(&place.field("position"), Code::ConflictingFields, detail);
    }
    let phase = members.get("phase").map_or(Some(0.0), |node| {
        uncertainty::number(node, &place.field("phase"), faults)
    });
    let mut vector = |name| match members.get(name) {
        Some(node) => uncertainty::vector(node, &place.field(name), faults),
        None => Covariance::of_standard([0.0; 3]).ok(),
    };
    let (angular_velocity, position) = (vector("angular_velocity"), vector("position"));
    Some(Box::new(UncertainTurning {
        angular_velocity: angular_velocity?,
        phase: phase?,
        position: position?,
    }))
}
