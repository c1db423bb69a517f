//! Three axes seen from a fixed direction, and arrows on them.

use svg::node::element::{Circle, Ellipse, Group};

use super::draw::{Anchor, Point, line, polygon, px, text};

/// A parallel projection: x towards the viewer and to the left, y to the right, z up.
#[derive(Clone, Copy)]
pub(super) struct View {
    /// Where the axes meet.
    pub(super) origin: Point,
    /// Pixels to a unit.
    pub(super) unit: f64,
}

/// What tells an arrow from others.
pub(super) struct Pen {
    /// Class of the colour: one, two, three or all.
    pub(super) colour: &'static str,
    /// Class of the dashes.
    pub(super) dashes: &'static str,
    /// Letter at the tip.
    pub(super) label: String,
}

/// Unit vectors of the sheet (right, up) for azimuth 28° and elevation 20° of the viewer.
const RIGHT: [f64; 3] = [-0.469_472, 0.882_948, 0.0];
const UP: [f64; 3] = [-0.301_985, -0.160_567, 0.939_693];

impl View {
    /// Where a vector ends.
    pub(super) fn at(&self, v: [f64; 3]) -> Point {
        let along = |axis: [f64; 3]| (0..3).map(|i| axis[i] * v[i]).sum::<f64>();
        (
            self.origin.0 + self.unit * along(RIGHT),
            self.origin.1 - self.unit * along(UP),
        )
    }

    /// The axes with their names, the negative halves faint.
    pub(super) fn axes(&self, names: [&str; 3]) -> Group {
        let mut group = Group::new();
        for (i, name) in names.into_iter().enumerate() {
            let along = |length: f64| {
                let mut v = [0.0; 3];
                v[i] = length;
                self.at(v)
            };
            let end = along(1.17);
            group = group
                .add(line("drop", self.origin, along(-1.0)))
                .add(line("axis", self.origin, along(1.0)))
                .add(text("soft", (end.0, end.1 + 4.0), Anchor::Middle, name));
        }
        group
    }

    /// The outline of an ellipsoid about the tip of an arrow, by its half axes.
    pub(super) fn outline(&self, tip: [f64; 3], half_axes: [[f64; 3]; 3], class: &str) -> Ellipse {
        let sheet = half_axes.map(|axis| {
            let (x, y) = self.at(axis);
            (x - self.origin.0, y - self.origin.1)
        });
        let sum = |of: fn(Point) -> f64| sheet.into_iter().map(of).sum::<f64>();
        // The projection of Σ aᵢaᵢᵀ, and its principal axes.
        let (xx, yy) = (sum(|(x, _)| x * x), sum(|(_, y)| y * y));
        let xy = sum(|(x, y)| x * y);
        let (mean, apart) = (0.5 * (xx + yy), libm::hypot(0.5 * (xx - yy), xy));
        let angle = 0.5 * libm::atan2(2.0 * xy, xx - yy);
        let (cx, cy) = self.at(tip);
        let turn = format!("rotate({} {} {})", px(angle.to_degrees()), px(cx), px(cy));
        Ellipse::new()
            .set("class", class)
            .set("cx", px(cx))
            .set("cy", px(cy))
            .set("rx", px((mean + apart).sqrt()))
            .set("ry", px((mean - apart).max(0.0).sqrt()))
            .set("transform", turn)
    }

    /// An arrow with its letter, and how it stands over the plane of x and y.
    pub(super) fn arrow(&self, v: [f64; 3], pen: &Pen) -> Group {
        let tip = self.at(v);
        let foot = self.at([v[0], v[1], 0.0]);
        let mut group = Group::new();
        if distance(foot, tip) > 4.0 && distance(foot, self.origin) > 4.0 {
            group = group
                .add(line("drop", self.origin, foot))
                .add(line("drop", foot, tip));
        }
        let length = distance(self.origin, tip);
        let full = format!("full-{}", pen.colour);
        if length < 3.0 {
            let dot = Circle::new().set("class", &*full).set("r", 3);
            let at = (self.origin.0 + 6.0, self.origin.1 - 6.0);
            return group
                .add(dot.set("cx", self.origin.0).set("cy", self.origin.1))
                .add(text("bold", at, Anchor::Start, &*pen.label));
        }
        let (dx, dy) = (
            (tip.0 - self.origin.0) / length,
            (tip.1 - self.origin.1) / length,
        );
        let back = |along: f64, aside: f64| {
            (
                tip.0 - along * dx - aside * dy,
                tip.1 - along * dy + aside * dx,
            )
        };
        let head = length.min(9.0);
        // Beside the tip, to the right of steep arrows and above flat ones, clear of the axis names.
        let (right, up) = if dy.abs() > dx.abs() {
            (11.0, 0.0)
        } else {
            (0.0, 11.0)
        };
        let at = (tip.0 + right, tip.1 - up + 4.0);
        group
            .add(line(
                &format!("line {} {}", pen.colour, pen.dashes),
                self.origin,
                back(head * 0.7, 0.0),
            ))
            .add(polygon(
                &full,
                &[tip, back(head, head * 0.42), back(head, -head * 0.42)],
            ))
            .add(text("bold", at, Anchor::Middle, &*pen.label))
    }
}

fn distance(a: Point, b: Point) -> f64 {
    libm::hypot(a.0 - b.0, a.1 - b.1)
}

/// The length of a vector.
pub(super) fn length([x, y, z]: [f64; 3]) -> f64 {
    libm::hypot(libm::hypot(x, y), z)
}
