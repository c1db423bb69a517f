//! A frame that moves along a track: velocity and attitude at given times.

use std::sync::Arc;

use super::fault::Reason;
use super::interpolate::{cosine, linear, slerp};
use super::time::{Clock, Time};
use crate::physics::boost::Motion;
use crate::physics::covariance::Covariance;
use crate::physics::lorentz::{Change, Step};
use crate::physics::rotation::Turn;
use crate::physics::scale::Scale;
use crate::physics::uncertain::{Errors, UncertainStep};

/// Samples of the motion of a frame as seen from its parent.
#[derive(Clone, Debug)]
pub struct Track {
    /// The file, as named in the catalogue.
    pub file: String,
    /// The samples, in the order of their times.
    pub rows: Vec<Row>,
    /// Standard uncertainties beside the rows: of the velocity in its unit, and of small angles
    /// about the axes of the frame; empty when the file has none.
    pub uncertainties: Vec<[f64; 6]>,
    /// Whether the file has velocities.
    pub moves: bool,
    /// Whether the file has attitudes.
    pub turns: bool,
    /// What turns velocities into v/c.
    pub beta: Scale,
    /// What turns the uncertainties of attitudes into radians.
    pub radians: Scale,
    /// Whether times before the first row and after the last one are answered.
    pub extrapolate: bool,
    /// The largest departure of an attitude from length one.
    pub mended: f64,
    /// How times are written.
    pub clock: Clock,
}

/// One sample.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Row {
    /// When.
    pub time: Time,
    /// Velocity of the frame as seen from its parent, on the parent's axes.
    pub velocity: [f64; 3],
    /// The turn that carries the parent's axes onto those of the frame: w, x, y, z.
    pub attitude: [f64; 4],
}

/// The motion at a time.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Sample {
    /// Velocity in the unit of the catalogue.
    pub velocity: [f64; 3],
    /// Attitude as a quaternion w, x, y, z.
    pub attitude: [f64; 4],
    /// Standard uncertainties of the velocity and of small angles about the axes of the frame.
    pub uncertainty: Option<[f64; 6]>,
    /// Seconds before the first row (negative) or after the last one; 0 inside.
    pub beyond: f64,
}

/// Neighbouring attitudes this close are not too far apart: half of 90°, and the rounding of six
/// decimals.
const FARTHEST_COSINE: f64 = std::f64::consts::FRAC_1_SQRT_2 - 2e-6;

impl Row {
    /// What forbids this row after another one.
    pub fn follows(&self, before: &Row, max_gap: Option<f64>, clock: Clock) -> Result<(), Reason> {
        if self.time <= before.time {
            return Err(if self.time == before.time {
                Reason::repeated_time(self.time.display(clock))
            } else {
                Reason::unsorted_times(self.time.display(clock), before.time.display(clock))
            });
        }
        if let Some(limit) = max_gap {
            let gap = self.time.since(before.time).hi;
            if gap > limit {
                return Err(Reason::gap_too_long(gap, limit));
            }
        }
        let cosine = cosine(before.attitude, self.attitude);
        if cosine < FARTHEST_COSINE {
            return Err(Reason::attitude_jump(2.0 * libm::acos(cosine).to_degrees()));
        }
        Ok(())
    }
}

impl Track {
    /// The times between which the motion is known.
    pub fn valid(&self) -> [Time; 2] {
        [self.rows[0].time, self.rows[self.rows.len() - 1].time]
    }

    /// The motion at a time. `hint` remembers the row found, so that the next later time is found
    /// without a search.
    pub fn sample(&self, time: Time, hint: &mut usize) -> Sample {
        let rows = &self.rows;
        let last = rows.len() - 1;
        let beyond = if time < rows[0].time {
            time.since(rows[0].time).hi
        } else if time > rows[last].time {
            time.since(rows[last].time).hi
        } else {
            0.0
        };
        let before = self.row_before(time, *hint);
        *hint = before;
        // Past the last row the last two rows lead on, before the first one the first two.
        let i = if beyond > 0.0 {
            before.saturating_sub(1)
        } else {
            before
        };
        let (a, b) = (&rows[i], &rows[(i + 1).min(last)]);
        let u = if time == a.time || a.time == b.time {
            0.0
        } else {
            time.since(a.time).hi / b.time.since(a.time).hi
        };
        let uncertainty = self.uncertainties.get(i).map(|from| {
            let to = &self.uncertainties[(i + 1).min(last)];
            // As if the two samples were off together: no less than the truth.
            std::array::from_fn(|k| (1.0 - u).abs() * from[k] + u.abs() * to[k])
        });
        Sample {
            velocity: linear(a.velocity, b.velocity, u),
            attitude: slerp(a.attitude, b.attitude, u),
            uncertainty,
            beyond,
        }
    }

    /// The last row not after the time; the first row for times before it.
    fn row_before(&self, time: Time, hint: usize) -> usize {
        let rows = &self.rows;
        let holds = |i: usize| {
            rows.get(i).is_some_and(|row| row.time <= time)
                && rows.get(i + 1).is_none_or(|next| time < next.time)
        };
        for i in [hint, hint + 1] {
            if holds(i) {
                return i;
            }
        }
        rows.partition_point(|row| row.time <= time)
            .saturating_sub(1)
    }

    /// The steps from the parent to the frame: a boost, then a turn. `source` is what a budget
    /// calls their errors.
    pub fn steps(&self, sample: &Sample, source: &dyn Fn() -> String) -> Vec<Step> {
        let boost = Change::Boost(Motion::Velocity {
            value: sample.velocity,
            beta: self.beta,
        });
        let turn = Change::Rotate(Turn::Quaternion(sample.attitude));
        let part = |offset: usize| {
            let all = sample.uncertainty?;
            let own = std::array::from_fn(|i| all[offset + i]);
            Covariance::of_standard(own).ok()
        };
        let axes = |angles| Errors::Axes {
            angles,
            radians: self.radians,
        };
        let has = [
            (self.moves, boost, part(0).map(Errors::Velocity)),
            (self.turns, turn, part(3).map(axes)),
        ];
        let step = |change, errors: Option<Errors>| Step {
            uncertainty: errors.map(|errors| {
                let source = source();
                Arc::new(UncertainStep { errors, source })
            }),
            ..Step::exact(change)
        };
        has.into_iter()
            .filter(|(has, ..)| *has)
            .map(|(_, change, errors)| step(change, errors))
            .collect()
    }
}
