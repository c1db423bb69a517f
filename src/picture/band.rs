//! The band around a curve: as far as its standard uncertainty reaches to either side.

use svg::node::element::Group;

use super::draw::{Point, polygon, polyline};
use super::plot::{Area, Axis, Curve, thinned};

/// Draws the band of a curve, if its values are uncertain. Its edges have the dashes of the curve,
/// so that it is known without its colour.
pub(super) fn band(
    mut group: Group,
    area: Area,
    x: Axis,
    at: &[f64],
    y: Axis,
    curve: &Curve,
) -> Group {
    let Some(uncertainties) = curve.uncertainties else {
        return group;
    };
    let mut pieces: Vec<Vec<(Point, Point)>> = vec![Vec::new()];
    for ((at, value), uncertainty) in at.iter().zip(curve.values).zip(uncertainties) {
        let ends = value
            .zip(*uncertainty)
            .and_then(|(value, u)| reach(y, value, u));
        match (x.along(*at), ends) {
            (Some(at), Some((low, high))) => {
                let at = area.across(at);
                if let Some(piece) = pieces.last_mut() {
                    piece.push(((at, area.up(low)), (at, area.up(high))));
                }
            }
            _ => pieces.push(Vec::new()),
        }
    }
    let edge = format!("edge {} {}", curve.colour, curve.dashes);
    for piece in pieces.iter().filter(|piece| piece.len() > 1) {
        let (low, high): (Vec<Point>, Vec<Point>) = piece.iter().copied().unzip();
        let (low, high) = (thinned(&low), thinned(&high));
        let around: Vec<Point> = low.iter().chain(high.iter().rev()).copied().collect();
        group = group
            .add(polygon(&format!("band full-{}", curve.colour), &around))
            .add(polyline(&edge, &low))
            .add(polyline(&edge, &high));
    }
    group
}

/// From where to where along the axis a value lies with its standard uncertainty u.
fn reach(axis: Axis, value: f64, u: f64) -> Option<(f64, f64)> {
    let (low, high) = (value - u, value + u);
    if !axis.logarithmic {
        return Some((axis.along(low)?, axis.along(high)?));
    }
    let far = axis.along(low.abs().max(high.abs()))?;
    // Where zero is within reach there is no lowest power of ten.
    let near = match low <= 0.0 && high >= 0.0 {
        true => 0.0,
        false => axis.along(low.abs().min(high.abs()))?,
    };
    Some((near, far))
}

/// What an axis must hold of a curve: its values, and the ends of its band. On a logarithmic axis
/// a band may go down out of sight, lest one value about zero press all curves together.
pub(super) fn extent<'a>(curve: &'a Curve, logarithmic: bool) -> impl Iterator<Item = f64> + 'a {
    curve.values.iter().enumerate().flat_map(move |(i, value)| {
        let value = value.unwrap_or(f64::NAN);
        let u = curve.uncertainties.and_then(|all| all[i]).unwrap_or(0.0);
        let seen = move |end: &f64| !logarithmic || end.abs() >= value.abs() / 10.0;
        [value, value - u, value + u].into_iter().filter(seen)
    })
}
