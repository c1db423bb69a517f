//! Many readings at once, each on a way that takes some of its numbers from its own row: the
//! platform's velocity, its attitude, or the phase of its spin.
//!
//! The numbers are those of single readings, bit for bit.

use super::block::{Columns, Readings, Refused, Setting};
use super::boost::Motion;
use super::error::Impossible;
use super::lorentz::{Change, Step};
use super::resolved::Resolved;
use super::rotation::Turn;
use super::scale::Scale;

/// A step that may take its numbers from the row.
#[derive(Clone, Debug, PartialEq)]
pub struct RowStep {
    /// What changes.
    pub change: RowChange,
    /// Whether the step is taken backwards.
    pub inverse: bool,
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
}

impl From<Step> for RowStep {
    fn from(step: Step) -> RowStep {
        RowStep {
            change: RowChange::Fixed(step.change),
            inverse: step.inverse,
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
        Rows { steps, setting }
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
        for row in 0..readings.len() {
            let answer = self.solve_row(readings.row(row), motions, row);
            answers.set(row, answer, &mut refused);
        }
        refused
    }

    fn solve_row(
        &self,
        reading: [[f64; 3]; 2],
        motions: Motions,
        row: usize,
    ) -> Result<[[f64; 3]; 2], Impossible> {
        let mut steps = Vec::with_capacity(self.steps.len());
        for step in &self.steps {
            let Some(step) = motions.step(step, row)? else {
                return Ok([[f64::NAN; 3]; 2]);
            };
            steps.push(step);
        }
        for step in &steps {
            match &step.change {
                Change::Boost(motion) => motion.check()?,
                Change::Rotate(turn) => turn.check().map(|_| ())?,
            }
        }
        self.setting.solve(&Resolved::new(steps)?, reading)
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
            ..Step::exact(change)
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
