//! Reading a choice of units.

use crate::document::{Code, Faults, Node, Place};
use crate::units::{Quantity, Unit, Units, find, of_quantity};

/// Reads an object of UCUM codes by quantity; what it leaves out stays as in `base`.
pub fn units(
    node: &Node,
    place: &Place,
    quantities: &[Quantity],
    base: Units,
    faults: &mut Faults,
) -> Option<Units> {
    let mut names = [""; Quantity::ALL.len()];
    for (name, quantity) in names.iter_mut().zip(quantities) {
        *name = quantity.name();
    }
    let members = faults.members(node, place, &names[..quantities.len()])?;
    let mut units = base;
    for quantity in quantities {
        let name = quantity.name();
        let Some(node) = members.get(name) else {
            continue;
        };
        let place = place.field(name);
        if let Some(unit) = unit(*quantity, node, &place, faults) {
            units.set(unit);
        }
    }
    Some(units)
}

fn unit(
    quantity: Quantity,
    node: &Node,
    place: &Place,
    faults: &mut Faults,
) -> Option<&'static Unit> {
    let code = faults.text(node, place)?;
    let found = find(quantity, code);
    if found.is_none() {
        let codes: Vec<&str> = of_quantity(quantity).map(|unit| unit.code).collect();
        let detail = format!(
            "{code:?} is not a unit of {} known here; known are {} (UCUM, case-sensitive)",
            quantity.name(),
            codes.join(", ")
        );
        faults.note(place, Code::UnknownUnit, detail);
    }
    found
}
