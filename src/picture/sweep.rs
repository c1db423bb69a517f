//! A sweep: components and length of E' and B' against the quantity that runs.

use svg::node::element::Group;

use super::band::extent;
use super::draw::{Anchor, sheet, text};
use super::mark::Mark;
use super::number::{component, short};
use super::plot::{Area, Axis, Curve, plot};
use crate::sweep::{Columns, Division, Swept};

const WIDTH: f64 = 400.0;
const HEIGHT: f64 = 446.0;

/// The picture of an answered sweep.
pub fn sweep(swept: &Swept, division: Division) -> String {
    let mut content = Group::new();
    let known = swept.uncertainty.as_ref();
    let fields = [
        ("E", &swept.e, known.map(|known| &known.e), &swept.units.e),
        ("B", &swept.b, known.map(|known| &known.b), &swept.units.b),
    ];
    let (low, high) = ends(swept);
    let x = Axis {
        low: low.min(high),
        high: low.max(high),
        logarithmic: false,
    };
    let logarithmic = division == Division::Logarithmic;
    for (i, (name, columns, uncertain, unit)) in fields.into_iter().enumerate() {
        let top = 30.0 + 200.0 * i as f64;
        let area = Area {
            left: 58.0,
            right: 362.0,
            top,
            bottom: top + 156.0,
        };
        let curves = curves(name, columns, uncertain);
        let held = curves.iter().flat_map(|curve| extent(curve, logarithmic));
        let y = Axis::holding(held, logarithmic);
        let words = match logarithmic {
            true => format!("{name}′ in {unit}, absolute values"),
            false => format!("{name}′ in {unit}"),
        };
        content = content
            .add(text("head", (10.0, top - 10.0), Anchor::Start, words))
            .add(plot(area, x, &swept.values, y, &curves));
    }
    let words = running(swept);
    content = content.add(text("soft", (210.0, 422.0), Anchor::Middle, &*words));
    if known.is_some() {
        let words = "bands: ± one standard uncertainty";
        content = content.add(text("soft", (210.0, 438.0), Anchor::Middle, words));
    }
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

fn curves<'a>(name: &str, of: &'a Columns, uncertain: Option<&'a Columns>) -> [Curve<'a>; 4] {
    let curve = |name, column: fn(&Columns) -> &[Option<f64>], colour, dashes, mark| Curve {
        name,
        colour,
        dashes,
        mark,
        values: column(of),
        uncertainties: uncertain.map(column),
    };
    let named = |axis| format!("{name}′{axis}");
    [
        curve(
            format!("|{name}′|"),
            |c| &c.magnitude,
            "all",
            "thick",
            Mark::None,
        ),
        curve(named('x'), |c| &c.x, "one", "", Mark::Disc),
        curve(named('y'), |c| &c.y, "two", "dashed", Mark::Square),
        curve(named('z'), |c| &c.z, "three", "dotted", Mark::Triangle),
    ]
}

fn about(swept: &Swept) -> String {
    let (low, high) = ends(swept);
    let known = swept.uncertainty.as_ref();
    let last = swept.values.len() - 1;
    let field = |name: &str, unit: &str, columns: &Columns, uncertain: Option<&Columns>| {
        let uncertain = uncertain.map(Columns::named);
        let parts = columns
            .named()
            .into_iter()
            .enumerate()
            .map(|(n, (name, values))| {
                let end = |i: usize| {
                    let known = uncertain.and_then(|columns| columns[n].1[i]);
                    let value = component(values[i], known);
                    known.map_or(value.clone(), |u| format!("{value} ± {}", short(u, 2)))
                };
                format!("{name} from {} to {}", end(0), end(last))
            });
        format!(
            "{name}′ in {unit}: {}.",
            parts.collect::<Vec<_>>().join(", ")
        )
    };
    let bands = match known {
        Some(_) => " The bands, and what follows ±, are one standard uncertainty.",
        None => "",
    };
    format!(
        "As the {} goes from {} to {}, {} {}{bands}",
        running(swept),
        short(low, 6),
        short(high, 6),
        field("E", &swept.units.e, &swept.e, known.map(|known| &known.e)),
        field("B", &swept.units.b, &swept.b, known.map(|known| &known.b)),
    )
}
