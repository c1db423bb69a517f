//! How the target frame stands and moves, beside the reading: its axes, its velocity, its words.

use svg::node::element::Group;

use super::draw::{Anchor, line, text};
use super::number::short;
use super::space::{Pen, View, length};
use crate::answer::NetTransformation;
use crate::question::Question;
use crate::units::Quantity;

/// Turns smaller than this, in radians, cannot be seen.
const VISIBLE_TURN: f64 = 0.02;

/// The axes of the target as they stand on those of the reading, when they are turned.
pub(super) fn turned_axes(view: &View, net: &NetTransformation) -> Group {
    let q = &net.rotation;
    let sine = libm::hypot(libm::hypot(q.x, q.y), q.z);
    let mut group = Group::new();
    if 2.0 * libm::atan2(sine, q.w.abs()) < VISIBLE_TURN {
        return group;
    }
    // The images of the unit vectors under v → q v q*.
    let (w, x, y, z) = (q.w, q.x, q.y, q.z);
    let images = [
        [
            1.0 - 2.0 * (y * y + z * z),
            2.0 * (x * y + w * z),
            2.0 * (x * z - w * y),
        ],
        [
            2.0 * (x * y - w * z),
            1.0 - 2.0 * (x * x + z * z),
            2.0 * (y * z + w * x),
        ],
        [
            2.0 * (x * z + w * y),
            2.0 * (y * z - w * x),
            1.0 - 2.0 * (x * x + y * y),
        ],
    ];
    for (image, name) in images.into_iter().zip(["x′", "y′", "z′"]) {
        let end = view.at(image.map(|x| 0.98 * x));
        group = group
            .add(line("turned", view.origin, view.at(image.map(|x| 0.9 * x))))
            .add(text("soft", (end.0, end.1 + 4.0), Anchor::Middle, name));
    }
    group
}

/// The direction in which the target moves; its speed is said in words.
pub(super) fn motion(view: &View, net: &NetTransformation) -> Option<Group> {
    let speed = length(net.beta);
    if speed == 0.0 {
        return None;
    }
    let pen = Pen {
        colour: "three",
        dashes: "dotted",
        label: "v".into(),
    };
    Some(view.arrow(net.beta.map(|x| 0.55 * x / speed), &pen))
}

/// The same in words.
pub(super) fn moves(question: &Question, net: &NetTransformation) -> String {
    let turn = 2.0
        * libm::atan2(
            libm::hypot(libm::hypot(net.rotation.x, net.rotation.y), net.rotation.z),
            net.rotation.w,
        );
    let turn = match turn {
        0.0 => String::new(),
        turn => format!("; axes turned by {}°", short(turn.to_degrees(), 4)),
    };
    let speed = length(net.beta);
    if speed == 0.0 {
        return format!("The target does not move{turn}");
    }
    let unit = question.units.get(Quantity::Velocity).code;
    let speed = match speed < 0.1 {
        true => format!("{} {unit}", short(length(net.velocity), 6)),
        false => format!("{} c, γ = {}", short(speed, 6), short(net.gamma, 6)),
    };
    format!("v: the target moves at {speed}{turn}")
}
