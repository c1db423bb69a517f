//! Many readings at once, column by column, all on one way.
//!
//! The numbers are those of single readings, bit for bit.

use std::sync::Arc;

use super::double_double::{Arithmetic, Dd, Portable};
use super::error::Impossible;
use super::field::{FieldUnits, Kernel, Measured};
use super::fields::Fields;
use super::lanes::{LANES, Work, dispatch, tame};
use super::missing::{ALL_KNOWN, Known};
use super::reduction::{Calibration, Reduction};
use super::resolved::Resolved;
use super::restated::{Answers, Units};

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
    units: Units<Portable>,
    /// The transformation, if two doubles hold it.
    kernel: Option<Kernel<Dd>>,
    /// Whether its direction is one of doubles.
    as_given: bool,
    portable: bool,
}

impl Block {
    /// Prepares a way that is the same for all rows.
    pub fn new(way: Arc<Resolved>, setting: Setting) -> Block {
        let kernel = Kernel::new(way.net(), setting.units, ());
        let fits = way.fits_dd() && setting.is_tame() && kernel.numbers().all(|x| tame(x.hi));
        let mut direction = kernel.motion.iter().flat_map(|(d, ..)| d);
        let as_given = way.chained() == 0.0 && direction.all(|d| d.lo == 0.0);
        Block {
            way,
            setting,
            units: Units::of(&setting),
            as_given,
            kernel: fits.then_some(kernel),
            portable: false,
        }
    }

    /// The same without the instructions that only some processors have: the same bits, slower.
    pub fn portable(self) -> Block {
        Block {
            portable: true,
            ..self
        }
    }

    /// E' and B' of every reading, in place of what `answers` held. What depends on a missing
    /// component is missing; a row refused is missing as a whole.
    ///
    /// # Panics
    /// The columns differ in length.
    pub fn solve(&self, readings: Readings, answers: &mut Columns) -> Refused {
        let mut refused = Refused::new();
        answers.resize(readings.len());
        let (mut fields, mut lanes) = (Fields::ZERO, Answers::NONE);
        let mut last = (ALL_KNOWN, ALL_KNOWN);
        for start in (0..readings.len()).step_by(LANES) {
            if let Some(kernel) = &self.kernel {
                dispatch(
                    Pass {
                        block: self,
                        kernel,
                        readings: &readings,
                        start,
                        fields: &mut fields,
                        answers: &mut lanes,
                    },
                    self.portable,
                );
            }
            for i in 0..answers.take(&lanes, start) {
                let (row, reading) = (start + i, readings.row(start + i));
                if lanes.lacks(i) {
                    answers.set(row, self.setting.solve(&self.way, reading), &mut refused);
                } else if fields.is_incomplete(i) {
                    // Gaps are usually the same from row to row.
                    let given = self.setting.given(reading);
                    if last.0 != given {
                        last = (given, self.way.known(self.setting.units, given));
                    }
                    answers.hide(row, last.1);
                }
            }
        }
        refused
    }
}

/// The work on some rows of a block.
struct Pass<'p> {
    block: &'p Block,
    kernel: &'p Kernel<Dd>,
    readings: &'p Readings<'p>,
    start: usize,
    fields: &'p mut Fields,
    answers: &'p mut Answers,
}

impl Work for Pass<'_> {
    #[inline(always)]
    fn run<A: Arithmetic>(self) {
        let setting = &self.block.setting;
        self.fields.load::<A>(self.readings, self.start, setting);
        let Kernel { motion, matrix, .. } = self.kernel.by::<A>();
        let chained = self.block.way.chained();
        let motion = motion.map(|motion| move |_| (motion, chained));
        let matrix = matrix.map(|matrix| move |_| matrix);
        let units = self.block.units.by::<A>();
        self.answers
            .fill(self.fields, units, self.block.as_given, motion, matrix);
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
        let given = self.given(row);
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
            let known = way.known(self.units, given);
            for (answer, known) in answer.iter_mut().zip(known) {
                for (x, known) in answer.iter_mut().zip(known) {
                    *x = if known { *x } else { f64::NAN };
                }
            }
        }
        Ok(answer)
    }

    /// Which components of the field a row gives.
    fn given(&self, row: [[f64; 3]; 2]) -> Known {
        std::array::from_fn(|which| {
            let given = row[which].map(|x| !x.is_nan());
            self.calibration[which].map_or(given, |calibration| calibration.known(given))
        })
    }

    /// Whether its numbers stay well inside the range of doubles.
    pub(super) fn is_tame(&self) -> bool {
        let each = self.calibration.iter().flatten();
        each.flat_map(Calibration::numbers).all(tame)
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

    /// Takes the answers of rows from `start` on, as many as there are, and says how many.
    pub(super) fn take(&mut self, lanes: &Answers, start: usize) -> usize {
        let count = LANES.min(self.e[0].len() - start);
        let parts = [(&mut self.e, &lanes.e), (&mut self.b, &lanes.b)];
        for (columns, lanes) in parts {
            for (column, lanes) in columns.iter_mut().zip(lanes) {
                column[start..start + count].copy_from_slice(&lanes[..count]);
            }
        }
        count
    }

    /// Leaves of a row what is known.
    fn hide(&mut self, row: usize, [e, b]: Known) {
        for i in 0..3 {
            for (column, known) in [(&mut self.e[i], e[i]), (&mut self.b[i], b[i])] {
                column[row] = if known { column[row] } else { f64::NAN };
            }
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
