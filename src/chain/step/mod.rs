//! One step of a way. A new kind of step is one file here, one row of `KINDS` and one arm of
//! [`Change`].

pub mod boost;
pub mod rotate;

use std::sync::Arc;

use crate::chain::code;
use crate::document::{Faults, Members, Node, Place};
use crate::physics::lorentz::{Change, Step};
use crate::physics::uncertain::{Errors, UncertainStep};
use crate::units::Units;

/// Reads what stands under the name of the step.
type Read = fn(&Node, &Place, &Units, &mut Faults) -> Option<Step>;

/// The kinds of step, by name.
const KINDS: [(&str, Read); 2] = [("boost", boost::read), ("rotate", rotate::read)];

/// Reads a step: an object with exactly one member, its kind.
pub fn read(node: &Node, place: &Place, units: &Units, faults: &mut Faults) -> Option<Step> {
    let names = KINDS.map(|(name, _)| name);
    let members = faults.members(node, place, &names)?;
    let (kind, body) = faults.exactly_one(members, place, &names)?;
    let (_, read) = KINDS.into_iter().find(|(name, _)| *name == kind)?;
    read(body, &place.field(kind), units, faults)
}

/// Reads what is uncertain about a change, in the units given, from the members of its step.
type ReadErrors = fn(Members, &Node, &Place, &Units, &mut Faults) -> Option<Errors>;

/// Reads `inverse` and `uncertainty` and joins them with the change.
fn finish(
    change: Option<Change>,
    members: Members,
    read: ReadErrors,
    place: &Place,
    units: &Units,
    faults: &mut Faults,
) -> Option<Step> {
    let inverse = match members.get("inverse") {
        Some(node) => faults.boolean(node, &place.field("inverse")),
        None => Some(false),
    };
    let errors = match members.get("uncertainty") {
        Some(node) => {
            let place = place.field("uncertainty");
            read(members, node, &place, units, faults).map(Some)
        }
        None => Some(None),
    };
    let step = Step {
        inverse: inverse?,
        ..Step::exact(change?)
    };
    match errors? {
        Some(errors) => uncertain(step, errors, place, &place.field("uncertainty"), faults),
        None => Some(step),
    }
}

/// The step with its errors; `at` is where they stand.
pub fn uncertain(
    step: Step,
    errors: Errors,
    place: &Place,
    at: &Place,
    faults: &mut Faults,
) -> Option<Step> {
    if let Err(impossible) = errors.check(&step.change) {
        faults.note(at, code(&impossible), impossible.to_string());
        return None;
    }
    let source = place.path().pointer();
    Some(Step {
        uncertainty: Some(Arc::new(UncertainStep { errors, source })),
        ..step
    })
}
