//! What a question lets the service assume about what was not measured.

use crate::document::{Code, Faults, Node, Place};
use crate::transform::EDotBZero;
use crate::units::{Quantity, Units};

/// The angle in degrees below which E·B = 0 is not used unless the question says otherwise.
const DEFAULT_DEGREES: f64 = 15.0;

/// Reads `assume`.
pub(super) fn read(
    node: &Node,
    place: &Place,
    units: &Units,
    faults: &mut Faults,
) -> Option<EDotBZero> {
    let members = faults.members(node, place, &["e_dot_b_zero"])?;
    let node = faults.needed(members, place, "e_dot_b_zero")?;
    let place = place.field("e_dot_b_zero");
    let members = faults.members(node, &place, &["min_angle"])?;
    let Some(node) = members.get("min_angle") else {
        return Some(EDotBZero {
            min_angle: DEFAULT_DEGREES.to_radians(),
        });
    };
    let place = place.field("min_angle");
    let given = faults.number(node, &place)?;
    let unit = units.get(Quantity::Angle);
    let min_angle = given * unit.si.to_f64();
    if min_angle > 0.0 && min_angle <= std::f64::consts::FRAC_PI_2 {
        return Some(EDotBZero { min_angle });
    }
    let detail = format!(
        "min_angle is {given} {}; it is above 0 and at most a right angle. Is units.angle as meant?",
        unit.code
    );
    faults.note(&place, Code::AngleOutOfRange, detail);
    None
}
