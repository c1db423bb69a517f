//! A block of rows as columns of numbers: readings in, answers in their place.

use crate::chain;
use crate::document::{Code, Fault, Path, Segment};
use crate::frames::{Sensor, Time, Walker};
use crate::physics::Impossible;
use crate::physics::field::Measured;
use crate::physics::reduction::Reduction;
use crate::physics::resolved::Resolved;
use crate::transform::{Reading, transform};

use super::Series;
use super::way::{RowMotion, Taken, Template, Way};

/// Rows as columns; NaN stands for a missing number. A column that no row has is empty.
#[derive(Debug, Default)]
pub(super) struct Block {
    /// How many rows there are.
    pub(super) rows: usize,
    /// ex ey ez bx by bz: the question, and once solved the answer.
    pub(super) field: [Vec<f64>; 6],
    /// The velocity of each row's own motion.
    pub(super) velocity: [Vec<f64>; 3],
    /// The quaternion of each row's own attitude.
    pub(super) quaternion: [Vec<f64>; 4],
    /// The angle of each row's own turn.
    pub(super) angle: Vec<f64>,
    /// When each reading was taken.
    pub(super) time: Vec<Option<Time>>,
    /// Rows that bring a way of another kind, with their answer, in order.
    pub(super) apart: Vec<(usize, [f64; 6])>,
    /// What is wrong with rows, in order.
    pub(super) bad: Vec<(usize, Vec<Fault>)>,
}

/// A field of which nothing is known.
pub(super) const MISSING: [f64; 6] = [f64::NAN; 6];

impl Block {
    /// Adds a row: what it says of the field and, as far as the series takes it, of its motion.
    pub(super) fn push(
        &mut self,
        takes: Takes,
        field: [f64; 6],
        motion: &RowMotion,
        time: Option<Time>,
    ) {
        for (column, value) in self.field.iter_mut().zip(field) {
            column.push(value);
        }
        if takes.velocity {
            for (column, value) in self.velocity.iter_mut().zip(motion.velocity) {
                column.push(value);
            }
        }
        if takes.quaternion {
            for (column, value) in self.quaternion.iter_mut().zip(motion.quaternion) {
                column.push(value);
            }
        }
        if takes.angle {
            self.angle.push(motion.angle);
        }
        if takes.time {
            self.time.push(time);
        }
        self.rows += 1;
    }

    /// Solves every row that is not bad: the columns of the field become those of the answer.
    pub(super) fn solve(&mut self, series: &Series) {
        let mut walker = match &series.way {
            Way::Walk(walk) => Some(Walker::new(walk.clone())),
            _ => None,
        };
        let mut known_bad = self.bad.iter().map(|(row, _)| *row).peekable();
        let mut apart = self.apart.iter().peekable();
        let mut found = Vec::new();
        for row in 0..self.rows {
            let answer = if known_bad.next_if_eq(&row).is_some() {
                MISSING
            } else if let Some((_, answer)) = apart.next_if(|(own, _)| *own == row) {
                *answer
            } else {
                let answered = self.answer(row, series, walker.as_mut());
                answered.unwrap_or_else(|fault| {
                    found.push((row, vec![fault]));
                    MISSING
                })
            };
            for (column, value) in self.field.iter_mut().zip(answer) {
                column[row] = value;
            }
        }
        if !found.is_empty() {
            self.bad.append(&mut found);
            self.bad.sort_by_key(|(row, _)| *row);
        }
    }

    fn answer(
        &self,
        row: usize,
        series: &Series,
        walker: Option<&mut Walker>,
    ) -> Result<[f64; 6], Fault> {
        let field = std::array::from_fn(|i| self.field[i][row]);
        measured_axes(&series.sensor, &field)?;
        match &series.way {
            Way::Fixed(way) => apply(series, way, field),
            Way::Template(template) => by_template(series, template, &self.motion(row), field),
            Way::Own { boost, turn } => {
                let motion = self.motion(row);
                let moves = motion.velocity.iter().any(|x| !x.is_nan());
                by_template(series, if moves { boost } else { turn }, &motion, field)
            }
            Way::Walk(_) => {
                let (Some(walker), Some(time)) = (walker, self.time[row]) else {
                    return Ok(MISSING);
                };
                let passage = walker.at(Some(time)).map_err(|fault| {
                    let time = Path(vec![Segment::Field("time".into())]);
                    Fault::at(&time, fault.code, fault.detail)
                })?;
                apply(series, &passage.way, field)
            }
        }
    }

    fn motion(&self, row: usize) -> RowMotion {
        let at = |column: &Vec<f64>| column.get(row).copied().unwrap_or(f64::NAN);
        RowMotion {
            velocity: self.velocity.each_ref().map(at),
            quaternion: self.quaternion.each_ref().map(at),
            angle: at(&self.angle),
        }
    }
}

/// What a series takes from each row beside its field.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct Takes {
    pub(super) velocity: bool,
    pub(super) quaternion: bool,
    pub(super) angle: bool,
    pub(super) time: bool,
}

impl Takes {
    /// What this series takes.
    pub(super) fn of(series: &Series) -> Takes {
        let own = matches!(series.way, Way::Own { .. });
        Takes {
            velocity: own || series.takes(Taken::Velocity),
            quaternion: own || series.takes(Taken::Quaternion),
            angle: series.takes(Taken::Angle),
            time: series.takes_time(),
        }
    }
}

fn by_template(
    series: &Series,
    template: &Template,
    motion: &RowMotion,
    field: [f64; 6],
) -> Result<[f64; 6], Fault> {
    match template.resolve(motion)? {
        Some(way) => apply(series, &way, field),
        None => Ok(MISSING),
    }
}

/// A sensor has no value on an axis that it does not measure.
fn measured_axes(sensor: &Sensor, field: &[f64; 6]) -> Result<(), Fault> {
    for (i, value) in field.iter().enumerate().filter(|(_, x)| !x.is_nan()) {
        let (name, channel) = [("e", sensor.e), ("b", sensor.b)][i / 3];
        if channel.is_some_and(|channel| !channel.axes[i % 3]) {
            let place = Path(vec![Segment::Field(name.into()), Segment::Index(i % 3)]);
            let detail = format!(
                "the sensor does not measure {}, and the row says {value}; leave it missing",
                ["x", "y", "z"][i % 3]
            );
            return Err(Fault::at(&place, Code::AxisNotMeasured, detail));
        }
    }
    Ok(())
}

/// Restates one reading, just as a question that stands alone.
fn apply(series: &Series, way: &Resolved, field: [f64; 6]) -> Result<[f64; 6], Fault> {
    let missing = field.iter().any(|x| x.is_nan());
    let blank = &series.blank;
    if missing {
        let reading = reading(blank, field);
        let answer = transform(way, &reading, series.target).map_err(|error| refuse(&error))?;
        return Ok(numbers(answer.e, answer.b));
    }
    let [e, b] = halves(field);
    let measured = Measured {
        e,
        b,
        units: blank.units,
        reduction: Reduction {
            e: blank.calibration[0],
            b: blank.calibration[1],
            filled: None,
        },
    };
    let applied = way
        .apply(&measured, series.target)
        .map_err(|error| refuse(&error))?;
    let ([ex, ey, ez], [bx, by, bz]) = (applied.e, applied.b);
    Ok([ex, ey, ez, bx, by, bz])
}

fn halves([ex, ey, ez, bx, by, bz]: [f64; 6]) -> [[f64; 3]; 2] {
    [[ex, ey, ez], [bx, by, bz]]
}

/// A reading of which NaN is missing.
pub(super) fn reading(blank: &Reading, field: [f64; 6]) -> Reading {
    let [e, b] = halves(field).map(|v| v.map(|x| (!x.is_nan()).then_some(x)));
    Reading { e, b, ..*blank }
}

/// The numbers of an answer, NaN where it has none.
pub(super) fn numbers(e: [Option<f64>; 3], b: [Option<f64>; 3]) -> [f64; 6] {
    let all = [e, b].map(|v| v.map(|x| x.unwrap_or(f64::NAN)));
    let [[ex, ey, ez], [bx, by, bz]] = all;
    [ex, ey, ez, bx, by, bz]
}

/// What cannot be answered, blamed on the place that mends it.
pub(super) fn refuse(error: &Impossible) -> Fault {
    let code = chain::code(error);
    let name = match code {
        Code::FieldInPlane => "b",
        // The unit is in the query; no member of the row would mend it.
        _ => return Fault::whole(code, error.to_string()),
    };
    let place = Path(vec![Segment::Field(name.into())]);
    Fault::at(&place, code, error.to_string())
}
