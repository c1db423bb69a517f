//! Drawn errors of a reading, and of the calibration of the sensor it comes from.

use super::finite::Fields;
use super::lanes::{Lanes, dot, product, scale, vector};
use crate::physics::double_double::Dd;
use crate::physics::field::Measured;
use crate::physics::real::round;
use crate::physics::reduction::Calibration;
use crate::physics::uncertain::{UncertainCalibration, UncertainReading};

/// A reading with errors, ready for draws.
#[derive(Clone, Debug)]
pub(super) struct Reading {
    /// Turns draws into errors of the numbers read.
    root: [[f64; 6]; 6],
    /// E and B without errors, in their units.
    exact: [[f64; 3]; 2],
    calibrations: [Option<Drawn>; 2],
    filled: Option<usize>,
    /// What turns E and B in their units into the unit of the trials.
    units: [f64; 2],
}

/// A calibration and its errors.
#[derive(Clone, Debug)]
struct Drawn {
    matrix: [[f64; 3]; 3],
    /// raw − offset.
    net: [f64; 3],
    /// Its standard uncertainties; `None` when it is exact.
    uncertainty: Option<UncertainCalibration>,
}

impl Reading {
    /// A reading whose E and cB are wanted in V/m divided by 2ⁿ.
    pub(super) fn new(field: &Measured, uncertain: &UncertainReading, n: i32) -> Reading {
        let calibrations = [(field.e, 0), (field.b, 1)].map(|(raw, which)| {
            let calibration = [field.reduction.e, field.reduction.b][which];
            calibration.map(|calibration| Drawn::new(calibration, raw, uncertain, which))
        });
        let volts = field.units.volts_per_metre::<Dd>(());
        Reading {
            root: *uncertain.field.root(),
            exact: field.vectors::<Dd>(()).map(|v| round(&v)),
            calibrations,
            filled: field.reduction.filled,
            units: volts.map(|unit| libm::scalbn(unit.hi, -n)),
        }
    }

    /// How many independent draws it takes.
    pub(super) fn draws(&self) -> usize {
        let calibrations = self.calibrations.iter().flatten();
        6 + 12 * calibrations.filter(|own| own.uncertainty.is_some()).count()
    }

    /// The errors of E and cB that these draws give, in the unit of the trials.
    #[inline(always)]
    pub(super) fn draw(&self, draws: &[Lanes]) -> Fields {
        let read = [draws[0], draws[1], draws[2], draws[3], draws[4], draws[5]];
        let [e0, e1, e2, b0, b1, b2] = product(&self.root, &read);
        let mut errors = [[e0, e1, e2], [b0, b1, b2]];
        let mut rest = &draws[6..];
        for (errors, calibration) in errors.iter_mut().zip(&self.calibrations) {
            if let Some(calibration) = calibration {
                *errors = calibration.errors(errors, &mut rest);
            }
        }
        if let Some(i) = self.filled {
            errors[0][i] = self.filled_error(i, &errors);
        }
        let [e, b] = errors;
        [
            scale(Lanes::all(self.units[0]), &e),
            scale(Lanes::all(self.units[1]), &b),
        ]
    }

    /// Of E_i from E·B = 0: its product with B_i with errors is what the products of the other
    /// components have changed by, and what the change of B_i takes from it.
    fn filled_error(&self, i: usize, [e_errors, b_errors]: &Fields) -> Lanes {
        let [e, b] = self.exact;
        let (j, k) = ((i + 1) % 3, (i + 2) % 3);
        let drawn = |x: Lanes, exact: f64| x + exact;
        let product = |j: usize| e_errors[j] * drawn(b_errors[j], b[j]) + b_errors[j] * e[j];
        -(product(j) + product(k) + b_errors[i] * e[i]) / drawn(b_errors[i], b[i])
    }
}

impl Drawn {
    fn new(
        calibration: Calibration,
        raw: [f64; 3],
        uncertain: &UncertainReading,
        which: usize,
    ) -> Drawn {
        let net = std::array::from_fn(|i| raw[i] - calibration.offset[i]);
        Drawn {
            matrix: calibration.matrix,
            net,
            uncertainty: uncertain.calibration[which],
        }
    }

    /// (M+δM)(δraw − δoffset) + δM (raw − offset). Takes its draws from the front of `rest`.
    #[inline(always)]
    fn errors(&self, raw: &[Lanes; 3], rest: &mut &[Lanes]) -> [Lanes; 3] {
        let Some(uncertainty) = &self.uncertainty else {
            return product(&self.matrix, raw);
        };
        let (own, others) = rest.split_at(12);
        *rest = others;
        let net: [Lanes; 3] = std::array::from_fn(|j| raw[j] - own[9 + j] * uncertainty.offset[j]);
        std::array::from_fn(|i| {
            let row: [Lanes; 3] =
                std::array::from_fn(|j| own[3 * i + j] * uncertainty.matrix[i][j]);
            let whole: [Lanes; 3] = std::array::from_fn(|j| row[j] + self.matrix[i][j]);
            dot(&whole, &net) + dot(&row, &vector(self.net))
        })
    }
}
