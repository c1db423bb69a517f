//! The step `rotate`: to axes that are turned. Also the shorthand `rotation` of a question.

use crate::chain::{code, uncertainty};
use crate::document::{Code, Faults, Members, Node, Place};
use crate::physics::lorentz::{Change, Step};
use crate::physics::rotation::Turn;
use crate::physics::uncertain::Errors;
use crate::units::{Quantity, Units};

const FORMS: [&str; 4] = ["axis", "quaternion", "matrix", "euler"];
const KNOWN: [&str; 7] = [
    "axis",
    "angle",
    "quaternion",
    "matrix",
    "euler",
    "inverse",
    "uncertainty",
];

/// Reads the body of the step.
pub fn read(node: &Node, place: &Place, units: &Units, faults: &mut Faults) -> Option<Step> {
    let members = faults.members(node, place, &KNOWN)?;
    let turn = form(members, place, units, faults).and_then(|turn| {
        let checked = turn.check();
        if let Err(impossible) = &checked {
            let given = FORMS.iter().find(|name| members.get(name).is_some());
            let place = place.field(given.unwrap_or(&"axis"));
            faults.note(&place, code(impossible), impossible.to_string());
        }
        checked.ok().map(|_| Change::Rotate(turn))
    });
    super::finish(turn, members, errors, place, units, faults)
}

/// Reads what is uncertain about a rotation: small angles about the next axes.
pub fn errors(
    _: Members,
    node: &Node,
    place: &Place,
    units: &Units,
    faults: &mut Faults,
) -> Option<Errors> {
    Some(Errors::Axes {
        angles: uncertainty::vector(node, place, faults)?,
        radians: units.si(Quantity::Angle),
    })
}

fn form(members: Members, place: &Place, units: &Units, faults: &mut Faults) -> Option<Turn> {
    let (form, node) = faults.exactly_one(members, place, &FORMS)?;
    if form != "axis" && members.get("angle").is_some() {
        let detail = format!("\"angle\" goes with \"axis\", not with {form:?}");
        faults.note(&place.field("angle"), Code::ConflictingFields, detail);
    }
    let radians = units.si(Quantity::Angle);
    let at = place.field(form);
    match form {
        "axis" => {
            let axis = faults.vector(node, &at);
            let angle = faults
                .needed(members, place, "angle")
                .and_then(|node| faults.number(node, &place.field("angle")));
            Some(Turn::AxisAngle {
                axis: axis?,
                angle: angle?,
                radians,
            })
        }
        "quaternion" => {
            let names = ["w", "x", "y", "z"];
            let own = faults.members(node, &at, &names)?;
            let parts = names.map(|name| {
                let node = faults.needed(own, &at, name)?;
                faults.number(node, &at.field(name))
            });
            let [w, x, y, z] = parts;
            Some(Turn::Quaternion([w?, x?, y?, z?]))
        }
        "matrix" => Some(Turn::Matrix(faults.matrix(node, &at)?)),
        _ => {
            let own = faults.members(node, &at, &["axes", "angles", "about"])?;
            let axes = faults
                .needed(own, &at, "axes")
                .and_then(|node| euler_axes(node, &at.field("axes"), faults));
            let angles = faults.needed(own, &at, "angles").and_then(|node| {
                faults.numbers(node, &at.field("angles"), "three angles, one for each axis")
            });
            let choices = [("moving", true), ("fixed", false)];
            let moving = faults
                .needed(own, &at, "about")
                .and_then(|node| faults.choice(node, &at.field("about"), &choices));
            Some(Turn::Euler {
                axes: axes?,
                angles: angles?,
                radians,
                moving: moving?,
            })
        }
    }
}

fn euler_axes(node: &Node, place: &Place, faults: &mut Faults) -> Option<[usize; 3]> {
    let text = faults.text(node, place)?;
    let axes: Option<Vec<usize>> = text.chars().map(|c| "xyz".find(c)).collect();
    let sequence = axes.and_then(|axes| <[usize; 3]>::try_from(axes).ok());
    match sequence {
        Some([a, b, c]) if a != b && b != c => sequence,
        _ => {
            let detail = format!(
                "{text:?} is not a sequence of three axes, each of x, y, z and none twice in a \
                 row, such as \"zyx\" or \"zxz\""
            );
            faults.note(place, Code::UnknownChoice, detail);
            None
        }
    }
}
