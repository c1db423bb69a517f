//! A reading before and after: E and B as arrows on three axes, in two panels of one scale.

use std::sync::Arc;

use svg::node::element::Group;

use super::draw::{Anchor, Point, line, sheet, text};
use super::motion::{motion, moves, turned_axes};
use super::number::{component, short, vector};
use super::space::{Pen, View, length};
use super::ticks::round_up;
use crate::answer::{Answer, Ellipsoid, NetTransformation};
use crate::physics::resolved::Resolved;
use crate::question::Question;
use crate::units::Quantity;

const WIDTH: f64 = 400.0;
const PANEL: f64 = 196.0;
/// Ellipses longer than this many half axes would leave the panel, and are not drawn.
const LARGEST_OUTLINE: f64 = 1.5;

/// Components, as far as they are known.
type Known = [Option<f64>; 3];

/// One of the two fields, before and after, in the unit of the answer.
struct Shown {
    name: &'static str,
    quantity: &'static str,
    unit: String,
    before: Known,
    after: Known,
    /// Coverage ellipsoids of the two, where they are known.
    coverage: [Option<Ellipsoid>; 2],
    /// What the half axes stand for.
    reach: f64,
    colour: &'static str,
    dashes: &'static str,
}

impl Shown {
    fn new(
        question: &Question,
        quantity: Quantity,
        [before, after]: [Known; 2],
        coverage: [Option<Ellipsoid>; 2],
    ) -> Shown {
        let electric = quantity == Quantity::E;
        let largest = [before, after]
            .into_iter()
            .filter_map(known)
            .map(length)
            .fold(0.0, f64::max);
        Shown {
            name: if electric { "E" } else { "B" },
            quantity: if electric {
                "electric field E"
            } else {
                "magnetic flux density B"
            },
            unit: question.answer_units.get(quantity).code.into(),
            before,
            after,
            coverage,
            reach: if largest > 0.0 {
                round_up(largest)
            } else {
                1.0
            },
            colour: if electric { "two" } else { "one" },
            dashes: if electric { "" } else { "dashed" },
        }
    }

    fn arrow(&self, view: &View, which: usize) -> Option<Group> {
        let (v, prime) = [(self.before, ""), (self.after, "′")][which];
        let label = format!("{}{prime}", self.name);
        let pen = Pen {
            colour: self.colour,
            dashes: self.dashes,
            label,
        };
        let v = known(v)?.map(|x| x / self.reach);
        let arrow = view.arrow(v, &pen);
        let Some(ellipsoid) = &self.coverage[which] else {
            return Some(arrow);
        };
        let half_axes: [[f64; 3]; 3] = std::array::from_fn(|i| {
            let length = ellipsoid.half_axes[i] / self.reach;
            ellipsoid.directions[i].map(|x| x * length)
        });
        let longest = ellipsoid.half_axes[0] / self.reach;
        if longest > LARGEST_OUTLINE {
            return Some(arrow);
        }
        let class = format!("region full-{0} {0}", self.colour);
        Some(arrow.add(view.outline(v, half_axes, &class)))
    }
}

/// The picture of an answered question.
pub fn reading(question: &Question, answer: &Answer) -> String {
    let read = as_read(question);
    let coverage = |answer: Option<&Answer>| match answer.and_then(|a| a.uncertainty.as_ref()) {
        Some(found) => [found.coverage.e.clone(), found.coverage.b.clone()],
        None => [None, None],
    };
    let ([e0, b0], [e1, b1]) = (coverage(read.as_ref()), coverage(Some(answer)));
    let (e, b) = read.map_or(([None; 3], [None; 3]), |read| (read.e, read.b));
    let shown = [
        Shown::new(question, Quantity::E, [e, answer.e], [e0, e1]),
        Shown::new(question, Quantity::B, [b, answer.b], [b0, b1]),
    ];
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
        .any(|field| field.coverage.iter().any(Option::is_some));
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
    let rows = shown
        .iter()
        .flat_map(|field| [(field, "", field.before), (field, "′", field.after)]);
    for (i, (field, prime, v)) in rows.enumerate() {
        let y = top + 22.0 + 18.0 * i as f64;
        let full = format!("bold full-{}", field.colour);
        let name = format!("{}{prime}", field.name);
        let at: Point = (10.0, y);
        content = content.add(text(&full, at, Anchor::Start, name)).add(text(
            "soft",
            (28.0, y),
            Anchor::Start,
            &*field.unit,
        ));
        let size = known(v).map(length);
        let cells = [v[0], v[1], v[2], size];
        for (value, x) in cells.into_iter().zip(COLUMNS) {
            content = content.add(text("number", (x, y), Anchor::End, component(value)));
        }
    }
    content
}

fn about(shown: &[Shown; 2], question: &Question, net: &NetTransformation) -> String {
    let field = |field: &Shown| {
        format!(
            "The {} is {} {unit} as read and {} {unit} in the target frame.",
            field.quantity,
            vector(field.before),
            vector(field.after),
            unit = field.unit,
        )
    };
    format!(
        "{} {} {}.",
        field(&shown[0]),
        field(&shown[1]),
        moves(question, net)
    )
}

fn known(v: Known) -> Option<[f64; 3]> {
    match v {
        [Some(x), Some(y), Some(z)] => Some([x, y, z]),
        _ => None,
    }
}
