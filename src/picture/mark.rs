//! Marks on a curve, so that it is known without its colour.

use svg::node::element::{Circle, Group};

use super::draw::{Point, polygon, px};

/// What is drawn on a curve here and there.
#[derive(Clone, Copy)]
pub(super) enum Mark {
    Disc,
    Square,
    Triangle,
    None,
}

/// Pixels between marks on a curve.
const APART: f64 = 58.0;

/// Marks the nth curve of a plot, so that marks of different curves do not meet.
pub(super) fn marks(
    mut group: Group,
    kind: Mark,
    colour: &str,
    pieces: &[Vec<Point>],
    n: usize,
) -> Group {
    let mut left = APART * (0.4 + 0.2 * n as f64);
    for pair in pieces.iter().flat_map(|piece| piece.windows(2)) {
        left -= libm::hypot(pair[1].0 - pair[0].0, pair[1].1 - pair[0].1);
        if left <= 0.0 {
            group = mark(group, kind, colour, pair[1]);
            left = APART;
        }
    }
    group
}

fn mark(group: Group, kind: Mark, colour: &str, (x, y): Point) -> Group {
    let full = format!("full-{colour}");
    let corners: &[Point] = match kind {
        Mark::Disc => {
            let disc = Circle::new()
                .set("class", full)
                .set("cx", px(x))
                .set("cy", px(y));
            return group.add(disc.set("r", 3));
        }
        Mark::Square => &[(-3.0, -3.0), (3.0, -3.0), (3.0, 3.0), (-3.0, 3.0)],
        Mark::Triangle => &[(0.0, -4.0), (3.8, 3.0), (-3.8, 3.0)],
        Mark::None => return group,
    };
    let corners: Vec<Point> = corners.iter().map(|(dx, dy)| (x + dx, y + dy)).collect();
    group.add(polygon(&full, &corners))
}
