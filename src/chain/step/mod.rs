//! One step of a way. A new kind of step is one file here, one row of `KINDS` and one arm of
//! [`Change`].

pub mod boost;
pub mod rotate;

use crate::document::{Faults, Node, Place};
use crate::physics::lorentz::{Change, Step};
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

/// Reads `inverse` and joins it with the change.
fn with_inverse(
    change: Option<Change>,
    inverse: Option<&Node>,
    place: &Place,
    faults: &mut Faults,
) -> Option<Step> {
    let inverse = match inverse {
        Some(node) => faults.boolean(node, &place.field("inverse")),
        None => Some(false),
    };
    Some(Step {
        change: change?,
        inverse: inverse?,
        uncertainty: None,
    })
}
