//! The trials themselves: a question with errors made ready, and blocks of answers drawn from it.
//!
//! A trial is the exact answer and what the drawn errors change in it: errors of the reading are
//! carried through the steps, and each step with errors adds its own change (see the
//! module `finite`). That is the transformation with errors, not an approximation of
//! it, but plain doubles keep its digits also where E and −v×B all but cancel.

use super::finite::Fields;
use super::lanes::{Lanes, WIDTH, add, product};
use super::moments::Moments;
use super::normal::{Normals, Streams};
use super::reading::Reading;
use super::stage::{self, Stage};
use crate::physics::constants::C;
use crate::physics::error::Impossible;
use crate::physics::field::Measured;
use crate::physics::resolved::Resolved;
use crate::physics::uncertain::UncertainReading;

/// Trials in a block, of which each has its own stream of draws: the same question has the same
/// draws whatever computes its blocks. About a millisecond of work.
pub const BLOCK: usize = 4096;

/// A question with errors, ready for any number of trials.
#[derive(Clone, Debug)]
pub struct Trials {
    reading: Option<Reading>,
    stages: Vec<Stage>,
    /// What turns E' and cB' of the trials into multiples of the unit that each component is
    /// counted in.
    scales: [[f64; 3]; 2],
    draws: usize,
    trials: usize,
    streams: Vec<Normals>,
}

/// The answers of a block of trials.
#[derive(Clone, Debug)]
pub struct Block {
    /// How far E' and B' are from the exact answer, component by component, in the units that
    /// the trials were made with.
    pub values: [Vec<f64>; 6],
    /// Their sums.
    pub moments: Moments<6>,
    /// Draws that no frame can do: they are not among the values.
    pub refused: u64,
}

impl Block {
    /// How many trials were made, refused ones included.
    pub fn trials(&self) -> u64 {
        self.moments.count() + self.refused
    }
}

impl Trials {
    /// Makes a question ready. `units` says in how many V/m and T each component of the answer
    /// is counted; near its standard uncertainty, no square leaves the range.
    ///
    /// # Errors
    /// A field between the steps is larger than the largest double.
    pub fn new(
        way: &Resolved,
        field: &Measured,
        uncertain: Option<&UncertainReading>,
        units: [f64; 6],
        trials: usize,
        seed: u64,
    ) -> Result<Trials, Impossible> {
        // Numbers near one: a power of two divides E and cB alike.
        let n = stage::exponent(field, uncertain);
        let reading = uncertain.map(|uncertain| Reading::new(field, uncertain, n));
        let stages = stage::of(way, field, n)?;
        let of_changes = stages.iter().map(|stage| match stage {
            Stage::Carry(_) => 0,
            Stage::Draw(change, _) => change.draws(),
        });
        let draws = reading.as_ref().map_or(0, Reading::draws) + of_changes.sum::<usize>();
        let scales = std::array::from_fn(|which| {
            let per_unit = if which == 0 { 1.0 } else { 1.0 / C };
            std::array::from_fn(|i| {
                let unit = libm::scalbn(units[3 * which + i], -n);
                per_unit / unit
            })
        });
        Ok(Trials {
            reading,
            stages,
            scales,
            draws,
            trials,
            streams: Streams::new(seed).take(trials.div_ceil(BLOCK)).collect(),
        })
    }

    /// How many blocks there are.
    pub fn blocks(&self) -> usize {
        self.streams.len()
    }

    /// One of the blocks.
    ///
    /// # Panics
    /// There are not so many.
    pub fn block(&self, number: usize) -> Block {
        let count = BLOCK.min(self.trials - number * BLOCK);
        let mut normals = self.streams[number].clone();
        let mut draws = vec![Lanes::all(0.0); self.draws];
        // Whole lanes are written, those that do not count overwritten or cut off.
        let mut values: [Vec<f64>; 6] = std::array::from_fn(|_| vec![0.0; count + WIDTH]);
        let mut kept = 0;
        let mut refused = 0;
        for first in (0..count).step_by(WIDTH) {
            for lanes in &mut draws {
                normals.fill(&mut lanes.0);
            }
            let (answers, possible) = self.draw(&draws);
            for (values, answers) in values.iter_mut().zip(answers.as_flattened()) {
                values[kept..kept + WIDTH].copy_from_slice(&answers.0);
            }
            let wanted = WIDTH.min(count - first);
            if possible == [true; WIDTH] {
                kept += wanted;
                continue;
            }
            for (lane, possible) in possible.into_iter().enumerate().take(wanted) {
                if possible {
                    for (values, answers) in values.iter_mut().zip(answers.as_flattened()) {
                        values[kept] = answers.0[lane];
                    }
                    kept += 1;
                } else {
                    refused += 1;
                }
            }
        }
        for values in &mut values {
            values.truncate(kept);
        }
        let moments = Moments::of(values.each_ref().map(Vec::as_slice));
        Block {
            values,
            moments,
            refused,
        }
    }

    /// One trial with draws of one's own, as many as [`draws`](Self::draws): how far each component
    /// of the answer is from the exact one, or nothing where no frame can do what was drawn.
    ///
    /// # Panics
    /// There are fewer draws.
    pub fn trial(&self, draws: &[f64]) -> Option<[f64; 6]> {
        let draws: Vec<Lanes> = draws.iter().map(|x| Lanes::all(*x)).collect();
        let (answers, possible) = self.draw(&draws);
        let [e, b] = answers.map(|v| v.map(|x| x.0[0]));
        possible[0].then_some([e[0], e[1], e[2], b[0], b[1], b[2]])
    }

    /// How many independent draws one trial takes: those of the reading, then those of each step.
    pub fn draws(&self) -> usize {
        self.draws
    }

    /// The answers that these draws give, and which of them are possible.
    #[inline(always)]
    fn draw(&self, draws: &[Lanes]) -> (Fields, [bool; WIDTH]) {
        let mut rest = draws;
        let mut take = |count: usize| {
            let (own, others) = rest.split_at(count);
            rest = others;
            own
        };
        let mut possible = [true; WIDTH];
        let mut errors: Fields = [[Lanes::all(0.0); 3]; 2];
        if let Some(reading) = &self.reading {
            errors = reading.draw(take(reading.draws()));
        }
        for stage in &self.stages {
            match stage {
                Stage::Carry(matrix) => {
                    let [[e0, e1, e2], [b0, b1, b2]] = errors;
                    let [e0, e1, e2, b0, b1, b2] = product(matrix, &[e0, e1, e2, b0, b1, b2]);
                    errors = [[e0, e1, e2], [b0, b1, b2]];
                }
                Stage::Draw(change, field) => {
                    let finite = change.draw(take(change.draws()));
                    let added = finite.change(field, &errors);
                    errors = [add(&errors[0], &added[0]), add(&errors[1], &added[1])];
                    for (possible, own) in possible.iter_mut().zip(finite.possible) {
                        *possible &= own;
                    }
                }
            }
        }
        for (errors, scales) in errors.iter_mut().zip(&self.scales) {
            for (errors, scale) in errors.iter_mut().zip(scales) {
                *errors = *errors * *scale;
            }
        }
        (errors, possible)
    }
}
