//! One plot: curves over a range, with their names at their right ends.

use svg::node::element::{Group, Rectangle};

use super::band::band;
use super::draw::{Anchor, Point, line, polyline, text};
use super::mark::{Mark, marks};
use super::number::short;
use super::ticks;

/// Where a plot stands, inside its labels.
#[derive(Clone, Copy)]
pub(super) struct Area {
    pub(super) left: f64,
    pub(super) right: f64,
    pub(super) top: f64,
    pub(super) bottom: f64,
}

impl Area {
    /// Where something stands that is so far along the horizontal axis.
    pub(super) fn across(&self, along: f64) -> f64 {
        self.left + along * (self.right - self.left)
    }

    /// Where something stands that is so far along the vertical axis.
    pub(super) fn up(&self, along: f64) -> f64 {
        self.bottom - along * (self.bottom - self.top)
    }
}

/// One curve. A missing value breaks it.
pub(super) struct Curve<'a> {
    pub(super) name: String,
    pub(super) colour: &'static str,
    pub(super) dashes: &'static str,
    pub(super) mark: Mark,
    pub(super) values: &'a [Option<f64>],
    /// Standard uncertainties of the values, when they have any.
    pub(super) uncertainties: Option<&'a [Option<f64>]>,
}

/// An axis: what it stands for from one end of the area to the other.
#[derive(Clone, Copy)]
pub(super) struct Axis {
    pub(super) low: f64,
    pub(super) high: f64,
    /// Whether the numbers above are powers of ten.
    pub(super) logarithmic: bool,
}

/// Decades below the largest value that a logarithmic axis goes down to.
const DECADES: f64 = 12.0;
/// Points closer than this, in pixels, are drawn as one.
const RESOLUTION: f64 = 0.25;

impl Axis {
    /// An axis that holds all the values.
    pub(super) fn holding(values: impl Iterator<Item = f64>, logarithmic: bool) -> Axis {
        let (low, high) = values
            .map(|value| {
                if logarithmic {
                    libm::log10(value.abs())
                } else {
                    value
                }
            })
            .filter(|value| value.is_finite())
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), value| {
                (low.min(value), high.max(value))
            });
        let (low, high) = match (low.is_finite(), logarithmic) {
            (false, _) => (0.0, 1.0),
            (true, true) => (low.max(high - DECADES), high),
            // Zero belongs to the picture: a small change of a large field shall look small.
            (true, false) => (low.min(0.0), high.max(0.0)),
        };
        let room = match (high - low) * 0.06 {
            0.0 => 0.5,
            room => room,
        };
        Axis {
            low: low - room,
            high: high + room,
            logarithmic,
        }
    }

    /// How far along the axis a value is, from 0 to 1; `None` where it has no place.
    pub(super) fn along(&self, value: f64) -> Option<f64> {
        let value = if self.logarithmic {
            libm::log10(value.abs())
        } else {
            value
        };
        let along = (value - self.low) / (self.high - self.low);
        along.is_finite().then_some(along.clamp(0.0, 1.0))
    }

    fn ticks(&self, count: usize) -> Vec<(f64, String)> {
        let place = |value: f64| (value - self.low) / (self.high - self.low);
        if self.logarithmic {
            let powers = ticks::powers(self.low, self.high, count);
            return powers
                .into_iter()
                .map(|n| (place(n), format!("1e{n}")))
                .collect();
        }
        let round = ticks::linear(self.low, self.high, count);
        round
            .into_iter()
            .map(|value| (place(value), short(value, 6)))
            .collect()
    }
}

/// Draws the frame with its ticks, the curves and their names.
pub(super) fn plot(area: Area, x: Axis, at: &[f64], y: Axis, curves: &[Curve]) -> Group {
    let mut group = frame(area, x, y);
    for curve in curves {
        group = band(group, area, x, at, y, curve);
    }
    let mut ends: Vec<(f64, &Curve)> = Vec::new();
    for (n, curve) in curves.iter().enumerate() {
        let mut pieces: Vec<Vec<Point>> = vec![Vec::new()];
        for (at, value) in at.iter().zip(curve.values) {
            match (x.along(*at), value.and_then(|value| y.along(value))) {
                (Some(at), Some(value)) => {
                    if let Some(piece) = pieces.last_mut() {
                        piece.push((area.across(at), area.up(value)));
                    }
                }
                _ => pieces.push(Vec::new()),
            }
        }
        let class = format!("line {} {}", curve.colour, curve.dashes);
        for piece in pieces.iter().filter(|piece| piece.len() > 1) {
            group = group.add(polyline(&class, &thinned(piece)));
        }
        group = marks(group, curve.mark, curve.colour, &pieces, n);
        if let Some((_, y)) = pieces.iter().flatten().max_by(|a, b| a.0.total_cmp(&b.0)) {
            ends.push((*y, curve));
        }
    }
    names(group, area, ends)
}

fn frame(area: Area, x: Axis, y: Axis) -> Group {
    let mut group = Group::new();
    for (along, words) in y.ticks(5) {
        let at = area.up(along);
        group = group
            .add(line("grid", (area.left, at), (area.right, at)))
            .add(text(
                "number",
                (area.left - 6.0, at + 4.0),
                Anchor::End,
                words,
            ));
    }
    for (along, words) in x.ticks(6) {
        let at = area.across(along);
        group = group
            .add(line("grid", (at, area.top), (at, area.bottom)))
            .add(text(
                "number",
                (at, area.bottom + 15.0),
                Anchor::Middle,
                words,
            ));
    }
    group.add(
        Rectangle::new()
            .set("class", "frame")
            .set("x", area.left)
            .set("y", area.top)
            .set("width", area.right - area.left)
            .set("height", area.bottom - area.top),
    )
}

/// The same curve without points that fall on one another.
pub(super) fn thinned(points: &[Point]) -> Vec<Point> {
    let mut kept = vec![points[0]];
    let last = points.len() - 1;
    for (i, point) in points.iter().enumerate().skip(1) {
        let before = kept[kept.len() - 1];
        if i == last || libm::hypot(point.0 - before.0, point.1 - before.1) >= RESOLUTION {
            kept.push(*point);
        }
    }
    kept
}

/// The names beside the right ends, moved apart where they would cover one another.
fn names(mut group: Group, area: Area, mut ends: Vec<(f64, &Curve)>) -> Group {
    const APART: f64 = 12.0;
    ends.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut lowest = area.top - APART;
    for end in &mut ends {
        end.0 = end.0.max(lowest + APART);
        lowest = end.0;
    }
    let mut highest = area.bottom + APART;
    for (y, curve) in ends.iter_mut().rev() {
        *y = y.min(highest - APART);
        highest = *y;
        let class = format!("bold full-{}", curve.colour);
        group = group.add(text(
            &class,
            (area.right + 6.0, *y + 4.0),
            Anchor::Start,
            &*curve.name,
        ));
    }
    group
}
