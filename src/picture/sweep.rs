//! A sweep: components and length of E' and B' against the quantity that runs.

use svg::node::element::Group;

use super::draw::{Anchor, sheet, text};
use super::number::short;
use super::plot::{Area, Axis, Curve, Mark, plot};
use crate::sweep::{Columns, Division, Swept};

const WIDTH: f64 = 400.0;
const HEIGHT: f64 = 440.0;

/// The picture of an answered sweep.
pub fn sweep(swept: &Swept, division: Division) -> String {
    let mut content = Group::new();
    let fields = [
        ("E", &swept.e, &swept.units.e),
        ("B", &swept.b, &swept.units.b),
    ];
    let (low, high) = ends(swept);
    let x = Axis {
        low: low.min(high),
        high: low.max(high),
        logarithmic: false,
    };
    let logarithmic = division == Division::Logarithmic;
    for (i, (name, columns, unit)) in fields.into_iter().enumerate() {
        let top = 30.0 + 200.0 * i as f64;
        let area = Area {
            left: 58.0,
            right: 362.0,
            top,
            bottom: top + 156.0,
        };
        let curves = curves(name, columns);
        let values = curves
            .iter()
            .flat_map(|curve| curve.values)
            .flatten()
            .copied();
        let y = Axis::holding(values, logarithmic);
        let words = match logarithmic {
            true => format!("{name}′ in {unit}, absolute values"),
            false => format!("{name}′ in {unit}"),
        };
        content = content
            .add(text("head", (10.0, top - 10.0), Anchor::Start, words))
            .add(plot(area, x, &swept.values, y, &curves));
    }
    let words = running(swept);
    content = content.add(text(
        "soft",
        (210.0, HEIGHT - 18.0),
        Anchor::Middle,
        &*words,
    ));
    let title = format!("E and B in the target frame against {words}");
    sheet((WIDTH, HEIGHT), &title, &about(swept), content)
}

fn ends(swept: &Swept) -> (f64, f64) {
    let first = swept.values.first().copied().unwrap_or_default();
    (first, swept.values.last().copied().unwrap_or_default())
}

/// The quantity that runs, in words, with its unit.
fn running(swept: &Swept) -> String {
    match swept.over.as_str() {
        "beta" => "β, speed of the step in units of c".into(),
        "rapidity" => "rapidity of the step".into(),
        _ => format!("angle of the step in {}", swept.over_unit),
    }
}

fn curves<'a>(name: &str, columns: &'a Columns) -> [Curve<'a>; 4] {
    let [x, y, z, magnitude] = columns.named();
    let curve = |(component, values), colour, dashes, mark| Curve {
        name: format!("{name}′{component}"),
        colour,
        dashes,
        mark,
        values,
    };
    [
        Curve {
            name: format!("|{name}′|"),
            colour: "all",
            dashes: "thick",
            mark: Mark::None,
            values: magnitude.1,
        },
        curve((x.0, x.1), "one", "", Mark::Disc),
        curve((y.0, y.1), "two", "dashed", Mark::Square),
        curve((z.0, z.1), "three", "dotted", Mark::Triangle),
    ]
}

fn about(swept: &Swept) -> String {
    let (low, high) = ends(swept);
    let field = |name: &str, unit: &str, columns: &Columns| {
        let parts = columns.named().map(|(component, values)| {
            let end = |value: Option<&Option<f64>>| {
                value
                    .copied()
                    .flatten()
                    .map_or("missing".into(), |value| short(value, 6))
            };
            format!(
                "{component} from {} to {}",
                end(values.first()),
                end(values.last())
            )
        });
        format!("{name}′ in {unit}: {}.", parts.join(", "))
    };
    format!(
        "As the {} goes from {} to {}, {} {}",
        running(swept),
        short(low, 6),
        short(high, 6),
        field("E", &swept.units.e, &swept.e),
        field("B", &swept.units.b, &swept.b),
    )
}
