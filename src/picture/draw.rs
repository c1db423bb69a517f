//! Lines, marks and words, and the sheet they are drawn on.

use svg::Document;
use svg::node::element::{
    Description, Group, Line, Polygon, Polyline, Rectangle, Style, Text, Title,
};

use super::style::STYLE;

/// A place on the sheet, in pixels from its upper left corner.
pub(super) type Point = (f64, f64);

/// Where a text stands to its place.
#[derive(Clone, Copy)]
pub(super) enum Anchor {
    Start,
    Middle,
    End,
}

/// A picture with its words for those who do not see it.
pub(super) fn sheet(size: Point, title: &str, about: &str, content: Group) -> String {
    let (width, height) = size;
    let paper = Rectangle::new()
        .set("class", "paper")
        .set("width", width)
        .set("height", height);
    let document = Document::new()
        .set("viewBox", format!("0 0 {width} {height}"))
        .set("width", width)
        .set("height", height)
        .set("role", "img")
        .set("aria-labelledby", "title about")
        .add(Title::new(title).set("id", "title"))
        .add(
            Description::new()
                .set("id", "about")
                .add(svg::node::Text::new(about)),
        )
        .add(Style::new(STYLE))
        .add(paper)
        .add(content);
    format!("{document}\n")
}

/// Words.
pub(super) fn text(class: &str, at: Point, anchor: Anchor, words: impl Into<String>) -> Text {
    let anchor = match anchor {
        Anchor::Start => "start",
        Anchor::Middle => "middle",
        Anchor::End => "end",
    };
    Text::new(words)
        .set("class", class)
        .set("x", px(at.0))
        .set("y", px(at.1))
        .set("text-anchor", anchor)
}

/// A straight line.
pub(super) fn line(class: &str, from: Point, to: Point) -> Line {
    Line::new()
        .set("class", class)
        .set("x1", px(from.0))
        .set("y1", px(from.1))
        .set("x2", px(to.0))
        .set("y2", px(to.1))
}

/// A line through points.
pub(super) fn polyline(class: &str, points: &[Point]) -> Polyline {
    Polyline::new()
        .set("class", class)
        .set("points", list(points))
}

/// A closed figure.
pub(super) fn polygon(class: &str, points: &[Point]) -> Polygon {
    Polygon::new()
        .set("class", class)
        .set("points", list(points))
}

fn list(points: &[Point]) -> String {
    let points = points.iter().map(|(x, y)| format!("{},{}", px(*x), px(*y)));
    points.collect::<Vec<_>>().join(" ")
}

/// To a hundredth of a pixel.
pub(super) fn px(x: f64) -> f64 {
    (x * 100.0).round() / 100.0 + 0.0
}
