//! A reading before and after: E and B as arrows on three axes, in two panels of one scale.

use std::sync::Arc;

use svg::node::element::Group;

use super::draw::{Anchor, line, sheet, text};
use super::motion::{motion, moves, turned_axes};
use super::number::short;
use super::shown::{PRIMES, Shown, Side};
use super::space::View;
use crate::answer::{Answer, NetTransformation};
use crate::physics::resolved::Resolved;
use crate::question::Question;
use crate::units::Quantity;

const WIDTH: f64 = 400.0;
const PANEL: f64 = 196.0;

/// The picture of an answered question.
pub fn reading(question: &Question, answer: &Answer) -> String {
    let read = as_read(question);
    let shown = [Quantity::E, Quantity::B].map(|quantity| {
        // What was read is shown as it was read.
        let before = Side {
            uncertainties: [None; 4],
            ..Side::of(read.as_ref(), quantity)
        };
        Shown::new(
            question,
            quantity,
            [before, Side::of(Some(answer), quantity)],
        )
    });
    let view = |left: f64| View {
        origin: (left + PANEL / 2.0, 136.0),
        unit: 88.0,
    };
    let (before, after) = (view(0.0), view(WIDTH - PANEL));
    let mut content = Group::new()
        .add(text("head", (10.0, 20.0), Anchor::Start, "As read"))
        .add(text(
            "head",
            (WIDTH - PANEL + 10.0, 20.0),
            Anchor::Start,
            "In the target frame",
        ))
        .add(line("grid", (WIDTH / 2.0, 10.0), (WIDTH / 2.0, 240.0)))
        .add(before.axes(["x", "y", "z"]))
        .add(after.axes(["x′", "y′", "z′"]))
        .add(turned_axes(&before, &answer.net));
    if let Some(motion) = motion(&before, &answer.net) {
        content = content.add(motion);
    }
    for shown in &shown {
        let arrows = [shown.arrow(&before, 0), shown.arrow(&after, 1)];
        for arrow in arrows.into_iter().flatten() {
            content = content.add(arrow);
        }
    }
    content = scales(content, &shown, question, &answer.net);
    content = table(content, &shown, 300.0);
    let title = "A reading of E and B, as read and in the target frame";
    sheet(
        (WIDTH, 400.0),
        title,
        &about(&shown, question, &answer.net),
        content,
    )
}

/// The reading in its own frame, in the units of the answer: calibrated and completed, if it was
/// to be.
fn as_read(question: &Question) -> Option<Answer> {
    let nowhere = Resolved::new(Vec::new()).ok()?;
    let read = Question {
        way: Arc::new(nowhere),
        ..question.clone()
    };
    Answer::to(&read).ok()
}

/// What the axes stand for, and how the target moves.
fn scales(
    content: Group,
    shown: &[Shown; 2],
    question: &Question,
    net: &NetTransformation,
) -> Group {
    let reach = shown
        .each_ref()
        .map(|field| format!("{} {} {}", field.name, short(field.reach, 3), field.unit));
    let uncertain = shown
        .iter()
        .any(|field| field.sides.iter().any(|side| side.coverage.is_some()));
    let ellipses = if uncertain {
        "; ellipses: 95 % coverage"
    } else {
        ""
    };
    let words = format!("Each half axis: {}, {}{ellipses}", reach[0], reach[1]);
    content
        .add(text("soft", (10.0, 256.0), Anchor::Start, words))
        .add(text(
            "soft",
            (10.0, 273.0),
            Anchor::Start,
            moves(question, net),
        ))
}

/// The numbers behind the arrows.
fn table(mut content: Group, shown: &[Shown; 2], top: f64) -> Group {
    const COLUMNS: [f64; 4] = [136.0, 220.0, 304.0, 388.0];
    let bottom = top + 5.0;
    for (name, x) in ["x", "y", "z", "length"].into_iter().zip(COLUMNS) {
        content = content.add(text("soft", (x, top), Anchor::End, name));
    }
    content = content.add(line("grid", (10.0, bottom), (WIDTH - 10.0, bottom)));
    let rows = shown.iter().flat_map(|field| {
        field
            .sides
            .iter()
            .zip(PRIMES)
            .map(move |side| (field, side))
    });
    for (i, (field, (side, prime))) in rows.enumerate() {
        let y = top + 22.0 + 18.0 * i as f64;
        let full = format!("bold full-{}", field.colour);
        let name = format!("{}{prime}", field.name);
        content = content
            .add(text(&full, (10.0, y), Anchor::Start, name))
            .add(text("soft", (28.0, y), Anchor::Start, &*field.unit));
        for (words, x) in side.numbers().into_iter().zip(COLUMNS) {
            content = content.add(text("number", (x, y), Anchor::End, words));
        }
    }
    content
}

fn about(shown: &[Shown; 2], question: &Question, net: &NetTransformation) -> String {
    let field = |field: &Shown| {
        let [before, after] = field.sides.each_ref().map(|side| {
            let [x, y, z, _] = side.numbers();
            format!("({x}, {y}, {z}) {}", field.unit)
        });
        format!(
            "The {} is {before} as read and {after} in the target frame.",
            field.quantity
        )
    };
    format!(
        "{} {} {}.",
        field(&shown[0]),
        field(&shown[1]),
        moves(question, net)
    )
}
