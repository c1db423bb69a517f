//! The way from one frame to another: steps as written, resolved into one transformation.

pub mod step;
pub mod uncertainty;
mod units;

pub use units::units;

use crate::document::{Code, Faults, Node, Place};
use crate::physics::Impossible;
use crate::physics::lorentz::Step;
use crate::units::Units;

/// Reads a list of steps.
pub fn steps(
    node: &Node,
    place: &Place,
    units: &Units,
    limit: usize,
    faults: &mut Faults,
) -> Option<Vec<Step>> {
    let items = faults.list(node, place)?;
    if items.len() > limit {
        let detail = format!("{} steps; this service takes at most {limit}", items.len());
        faults.note(place, Code::TooManySteps, detail);
        return None;
    }
    let before = faults.0.len();
    let steps: Vec<Step> = items
        .iter()
        .enumerate()
        .filter_map(|(i, item)| step::read(item, &place.index(i), units, faults))
        .collect();
    (faults.0.len() == before).then_some(steps)
}

/// The steps that undo these.
pub fn inverse(steps: Vec<Step>) -> Vec<Step> {
    steps.into_iter().rev().map(Step::undone).collect()
}

/// The problem code of what physics refuses.
pub fn code(impossible: &Impossible) -> Code {
    match impossible {
        Impossible::FasterThanLight { .. } => Code::FasterThanLight,
        Impossible::NoDirection { .. } => Code::NoDirection,
        Impossible::BelowRest { .. } => Code::BelowRest,
        Impossible::NotARotation { .. } | Impossible::Mirror { .. } => Code::NotARotation,
        Impossible::Overflow { .. } => Code::Overflow,
        Impossible::Infinite => Code::NumberOutOfRange,
        Impossible::GammaOverflow { .. } | Impossible::PrecisionExhausted { .. } => {
            Code::PrecisionExhausted
        }
        Impossible::UncertainAtRest { .. } => Code::UncertainAtRest,
        Impossible::FieldInPlane { .. } => Code::FieldInPlane,
    }
}
