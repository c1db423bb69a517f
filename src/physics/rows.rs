//! Many readings at once, each on a way that takes some of its numbers from its own row: the
//! platform's velocity, its attitude, or the phase of its spin.
//!
//! The numbers are those of single readings, bit for bit.

use std::sync::Arc;

use super::block::{Columns, Readings, Refused, Setting};
use super::boost::Motion;
use super::double_double::{Arithmetic, Portable};
use super::error::Impossible;
use super::fields::Fields;
use super::lanes::{LANES, Work, dispatch};
use super::lorentz::{Change, Step};
use super::passes::{Nets, Pass, passes};
use super::resolved::Resolved;
use super::restated::{Answers, Units};
use super::rotation::Turn;
use super::scale::Scale;
use super::uncertain::UncertainStep;

/// A step that may take its numbers from the row.
#[derive(Clone, Debug, PartialEq)]
pub struct RowStep {
    /// What changes.
    pub change: RowChange,
    /// Whether the step is taken backwards.
    pub inverse: bool,
    /// Its errors; `None` when it is exact.
    pub uncertainty: Option<Arc<UncertainStep>>,
}

/// What a step changes, and where its numbers are.
#[derive(Clone, Debug, PartialEq)]
pub enum RowChange {
    /// In the step, the same for every row; it has passed its check.
    Fixed(Change),
    /// A boost by the velocity of the row.
    Velocity {
        /// What turns its components into v/c.
        beta: Scale,
    },
    /// A turn by the quaternion of the row.
    Quaternion,
    /// A turn about a fixed axis by the angle of the row.
    Angle {
        /// Any length but zero.
        axis: [f64; 3],
        /// What turns the angle into radians.
        radians: Scale,
    },
}

/// The numbers of the rows that their ways take, column by column; a NaN is missing. A column
/// that no step takes may be empty.
#[derive(Clone, Copy, Debug, Default)]
pub struct Motions<'a> {
    /// Components of the velocity.
    pub velocity: [&'a [f64]; 3],
    /// w, x, y, z.
    pub quaternion: [&'a [f64]; 4],
    /// The angle.
    pub angle: &'a [f64],
}

/// Ways of many rows that differ in the numbers of some steps, ready for any number of blocks.
#[derive(Clone, Debug)]
pub struct Rows {
    steps: Vec<RowStep>,
    setting: Setting,
    units: Units<Portable>,
    /// How the steps are taken in two doubles, if those hold them.
    passes: Option<Vec<Pass>>,
    portable: bool,
}

impl From<Step> for RowStep {
    fn from(step: Step) -> RowStep {
        RowStep {
            change: RowChange::Fixed(step.change),
            inverse: step.inverse,
            uncertainty: step.uncertainty,
        }
    }
}

impl RowStep {
    /// The step taken the other way.
    pub fn undone(self) -> RowStep {
        RowStep {
            inverse: !self.inverse,
            ..self
        }
    }
}

impl Rows {
    /// Prepares a way of steps in their order.
    pub fn new(steps: Vec<RowStep>, setting: Setting) -> Rows {
        let passes = passes(&steps).filter(|_| setting.is_tame());
        Rows {
            steps,
            setting,
            units: Units::of(&setting),
            passes,
            portable: false,
        }
    }

    /// The same without the instructions that only some processors have: the same bits, slower.
    pub fn portable(self) -> Rows {
        Rows {
            portable: true,
            ..self
        }
    }

    /// E' and B' of every reading, in place of what `answers` held. What depends on a missing
    /// component is missing; a row refused, or without a number that its way takes, is missing
    /// as a whole.
    ///
    /// # Panics
    /// The columns differ in length, or one that a step takes is not there.
    pub fn solve(&self, readings: Readings, motions: Motions, answers: &mut Columns) -> Refused {
        let mut refused = Refused::new();
        answers.resize(readings.len());
        let (mut fields, mut lanes, mut nets) = (Fields::ZERO, Answers::NONE, Nets::NONE);
        for start in (0..readings.len()).step_by(LANES) {
            if let Some(passes) = &self.passes {
                let work = Lane {
                    rows: self,
                    passes,
                    readings: &readings,
                    motions: &motions,
                    start,
                    fields: &mut fields,
                    nets: &mut nets,
                    answers: &mut lanes,
                };
                dispatch(work, self.portable);
            }
            for i in 0..answers.take(&lanes, start) {
                if lanes.lacks(i) || fields.is_incomplete(i) {
                    let row = start + i;
                    let answer = self.solve_row(readings.row(row), motions, row);
                    answers.set(row, answer, &mut refused);
                }
            }
        }
        refused
    }

    fn solve_row(
        &self,
        reading: [[f64; 3]; 2],
        motions: Motions,
        row: usize,
    ) -> Result<[[f64; 3]; 2], Impossible> {
        match self.way(motions, row)? {
            Some(way) => self.setting.solve(&way, reading),
            None => Ok([[f64::NAN; 3]; 2]),
        }
    }

    /// The way of one row; `None` when it lacks a number that a step takes.
    ///
    /// # Errors
    /// A number is infinite, or the motion is none that a frame can have.
    pub fn way(&self, motions: Motions, row: usize) -> Result<Option<Resolved>, Impossible> {
        let mut steps = Vec::with_capacity(self.steps.len());
        for step in &self.steps {
            let Some(step) = motions.step(step, row)? else {
                return Ok(None);
            };
            steps.push(step);
        }
        for step in &steps {
            match &step.change {
                Change::Boost(motion) => motion.check()?,
                Change::Rotate(turn) => turn.check().map(|_| ())?,
            }
        }
        Resolved::new(steps).map(Some)
    }
}

/// The work on some rows.
struct Lane<'p> {
    rows: &'p Rows,
    passes: &'p [Pass],
    readings: &'p Readings<'p>,
    motions: &'p Motions<'p>,
    start: usize,
    fields: &'p mut Fields,
    nets: &'p mut Nets,
    answers: &'p mut Answers,
}

impl Work for Lane<'_> {
    #[inline(always)]
    fn run<A: Arithmetic>(self) {
        let Rows { setting, units, .. } = self.rows;
        self.fields.load::<A>(self.readings, self.start, setting);
        self.nets.clear();
        for pass in self.passes {
            self.nets
                .take::<A>(pass, self.motions, self.start, self.fields);
        }
        self.nets.answer(self.fields, units.by::<A>(), self.answers);
    }
}

impl Motions<'_> {
    /// The step with the numbers of a row; `None` when one is missing.
    fn step(&self, step: &RowStep, row: usize) -> Result<Option<Step>, Impossible> {
        let change = match &step.change {
            RowChange::Fixed(change) => Some(change.clone()),
            RowChange::Velocity { beta } => numbers(self.velocity, row)?
                .map(|value| Change::Boost(Motion::Velocity { value, beta: *beta })),
            RowChange::Quaternion => {
                numbers(self.quaternion, row)?.map(|q| Change::Rotate(Turn::Quaternion(q)))
            }
            RowChange::Angle { axis, radians } => numbers([self.angle], row)?.map(|[angle]| {
                Change::Rotate(Turn::AxisAngle {
                    axis: *axis,
                    angle,
                    radians: *radians,
                })
            }),
        };
        Ok(change.map(|change| Step {
            inverse: step.inverse,
            uncertainty: step.uncertainty.clone(),
            change,
        }))
    }
}

/// The numbers of a row; `None` when one is missing.
fn numbers<const N: usize>(
    columns: [&[f64]; N],
    row: usize,
) -> Result<Option<[f64; N]>, Impossible> {
    let numbers = columns.map(|column| column[row]);
    if numbers.iter().any(|x| x.is_infinite()) {
        return Err(Impossible::Infinite);
    }
    Ok(numbers.iter().all(|x| !x.is_nan()).then_some(numbers))
}
