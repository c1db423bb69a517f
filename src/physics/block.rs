//! Many readings at once, column by column, all on one way.
//!
//! The numbers are those of single readings, bit for bit.

use std::sync::Arc;

use super::error::Impossible;
use super::field::{FieldUnits, Measured};
use super::missing::ALL_KNOWN;
use super::reduction::{Calibration, Reduction};
use super::resolved::Resolved;

/// E and B of many readings, component by component, all of one length; a NaN is missing.
#[derive(Clone, Copy, Debug, Default)]
pub struct Readings<'a> {
    /// The components of E, in their unit.
    pub e: [&'a [f64]; 3],
    /// The components of B, in their unit.
    pub b: [&'a [f64]; 3],
}

/// E' and B' of many readings, component by component; a NaN is missing.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Columns {
    /// The components of E', in the unit of the answer.
    pub e: [Vec<f64>; 3],
    /// The components of B', in the unit of the answer.
    pub b: [Vec<f64>; 3],
}

/// Rows that have no answer, by their place in the block, and why.
pub type Refused = Vec<(usize, Impossible)>;

/// What is the same for all readings of a series.
#[derive(Clone, Copy, Debug)]
pub struct Setting {
    /// What a unit of the readings is, once calibrated.
    pub units: FieldUnits,
    /// What a unit of the answers is.
    pub to: FieldUnits,
    /// Calibration of E and of B, for raw numbers of a sensor.
    pub calibration: [Option<Calibration>; 2],
}

/// A way and a setting, ready for any number of blocks.
#[derive(Clone, Debug)]
pub struct Block {
    way: Arc<Resolved>,
    setting: Setting,
}

impl Block {
    /// Prepares a way that is the same for all rows.
    pub fn new(way: Arc<Resolved>, setting: Setting) -> Block {
        Block { way, setting }
    }

    /// E' and B' of every reading, in place of what `answers` held. What depends on a missing
    /// component is missing; a row refused is missing as a whole.
    ///
    /// # Panics
    /// The columns differ in length.
    pub fn solve(&self, readings: Readings, answers: &mut Columns) -> Refused {
        let mut refused = Refused::new();
        answers.resize(readings.len());
        for row in 0..readings.len() {
            let answer = self.setting.solve(&self.way, readings.row(row));
            answers.set(row, answer, &mut refused);
        }
        refused
    }
}

impl Setting {
    /// The answer to one row: E' and B' of a reading, NaN for what is missing in either.
    ///
    /// # Errors
    /// A component is infinite, or larger than the largest double in the unit of the answer.
    pub fn solve(&self, way: &Resolved, row: [[f64; 3]; 2]) -> Result<[[f64; 3]; 2], Impossible> {
        if row.as_flattened().iter().any(|x| x.is_infinite()) {
            return Err(Impossible::Infinite);
        }
        let given = row.map(|v| v.map(|x| !x.is_nan()));
        let [e, b] = row.map(|v| v.map(|x| if x.is_nan() { 0.0 } else { x }));
        let [calibration_e, calibration_b] = self.calibration;
        let reduction = Reduction {
            e: calibration_e,
            b: calibration_b,
            filled: None,
        };
        let measured = Measured {
            e,
            b,
            units: self.units,
            reduction,
        };
        let applied = way.apply(&measured, self.to)?;
        let mut answer = [applied.e, applied.b];
        if given != ALL_KNOWN {
            let known: [_; 2] = std::array::from_fn(|which| {
                let given = given[which];
                self.calibration[which].map_or(given, |calibration| calibration.known(given))
            });
            let known = way.known(self.units, known);
            for (answer, known) in answer.iter_mut().zip(known) {
                for (x, known) in answer.iter_mut().zip(known) {
                    *x = if known { *x } else { f64::NAN };
                }
            }
        }
        Ok(answer)
    }
}

impl Readings<'_> {
    /// How many readings there are.
    pub fn len(&self) -> usize {
        self.e[0].len()
    }

    /// Whether there are none.
    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    pub(super) fn row(&self, row: usize) -> [[f64; 3]; 2] {
        [self.e, self.b].map(|v| v.map(|column| column[row]))
    }
}

impl Columns {
    /// The columns as readings of a next way.
    pub fn view(&self) -> Readings<'_> {
        Readings {
            e: self.e.each_ref().map(|column| &column[..]),
            b: self.b.each_ref().map(|column| &column[..]),
        }
    }

    pub(super) fn resize(&mut self, len: usize) {
        for column in self.e.iter_mut().chain(&mut self.b) {
            column.resize(len, f64::NAN);
        }
    }

    pub(super) fn set(
        &mut self,
        row: usize,
        answer: Result<[[f64; 3]; 2], Impossible>,
        refused: &mut Refused,
    ) {
        let [e, b] = answer.unwrap_or_else(|why| {
            refused.push((row, why));
            [[f64::NAN; 3]; 2]
        });
        for i in 0..3 {
            self.e[i][row] = e[i];
            self.b[i][row] = b[i];
        }
    }
}
