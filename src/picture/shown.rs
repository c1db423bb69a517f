//! One of the two fields, before and after: its arrows, its numbers.

use svg::node::element::Group;

use super::number::component;
use super::space::{Pen, View, length};
use super::ticks::round_up;
use crate::answer::{Answer, Ellipsoid};
use crate::question::Question;
use crate::units::Quantity;

/// Ellipses longer than this many half axes would leave the panel, and are not drawn.
const LARGEST_OUTLINE: f64 = 1.5;

/// What the letter of a field bears before and after.
pub(super) const PRIMES: [&str; 2] = ["", "′"];

/// Components, as far as they are known.
type Known = [Option<f64>; 3];

/// One of the two fields on one side of the way.
pub(super) struct Side {
    pub(super) field: Known,
    /// Standard uncertainties of the components and the length; their numbers have the digits that these support.
    pub(super) uncertainties: [Option<f64>; 4],
    pub(super) coverage: Option<Ellipsoid>,
}

impl Side {
    pub(super) fn of(answer: Option<&Answer>, quantity: Quantity) -> Side {
        let electric = quantity == Quantity::E;
        let field = answer.map_or(
            [None; 3],
            |answer| if electric { answer.e } else { answer.b },
        );
        let Some(found) = answer.and_then(|answer| answer.uncertainty.as_ref()) else {
            return Side {
                field,
                uncertainties: [None; 4],
                coverage: None,
            };
        };
        let (u, length, coverage) = match electric {
            true => (found.e, &found.magnitudes.e, &found.coverage.e),
            false => (found.b, &found.magnitudes.b, &found.coverage.b),
        };
        Side {
            field,
            uncertainties: [
                u[0],
                u[1],
                u[2],
                length.as_ref().map(|length| length.uncertainty),
            ],
            coverage: coverage.clone(),
        }
    }

    /// Its components and its length, in words.
    pub(super) fn numbers(&self) -> [String; 4] {
        let [x, y, z] = self.field;
        let values = [x, y, z, known(self.field).map(length)];
        std::array::from_fn(|i| component(values[i], self.uncertainties[i]))
    }
}

/// One of the two fields, before and after, in the unit of the answer.
pub(super) struct Shown {
    pub(super) name: &'static str,
    pub(super) quantity: &'static str,
    pub(super) unit: String,
    pub(super) sides: [Side; 2],
    /// What the half axes stand for.
    pub(super) reach: f64,
    pub(super) colour: &'static str,
    dashes: &'static str,
}

impl Shown {
    pub(super) fn new(question: &Question, quantity: Quantity, sides: [Side; 2]) -> Shown {
        let electric = quantity == Quantity::E;
        let largest = sides
            .iter()
            .filter_map(|side| known(side.field))
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
            sides,
            reach: if largest > 0.0 {
                round_up(largest)
            } else {
                1.0
            },
            colour: if electric { "two" } else { "one" },
            dashes: if electric { "" } else { "dashed" },
        }
    }

    pub(super) fn arrow(&self, view: &View, which: usize) -> Option<Group> {
        let (side, prime) = (&self.sides[which], PRIMES[which]);
        let label = format!("{}{prime}", self.name);
        let pen = Pen {
            colour: self.colour,
            dashes: self.dashes,
            label,
        };
        let v = known(side.field)?.map(|x| x / self.reach);
        let arrow = view.arrow(v, &pen);
        let Some(ellipsoid) = &side.coverage else {
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

fn known(v: Known) -> Option<[f64; 3]> {
    match v {
        [Some(x), Some(y), Some(z)] => Some([x, y, z]),
        _ => None,
    }
}
