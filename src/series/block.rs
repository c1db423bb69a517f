//! A block of rows as columns of numbers: readings in, answers in their place.

use std::sync::Arc;

use crate::chain;
use crate::document::{Code, Fault, Notice, Path, Segment};
use crate::frames::{Passage, Time, Walker};
use crate::physics::block::{Columns, Readings, Refused};
use crate::physics::covariance::Covariance;
use crate::physics::rows::{Motions, Rows};
use crate::physics::{self, Impossible};
use crate::transform::{INVARIANT_OUT_OF_RANGE, Reading, transform};

use super::Series;
use super::column::Column;
use super::way::{RowMotion, Taken, Way};

/// Rows as columns; NaN stands for a missing number. A column that no row has is empty.
#[derive(Debug, Default)]
pub(super) struct Block {
    /// How many rows there are.
    pub(super) rows: usize,
    /// ex ey ez bx by bz: the question, and once solved the answer.
    pub(super) field: [Column; 6],
    /// The velocity of each row's own motion.
    pub(super) velocity: [Column; 3],
    /// The quaternion of each row's own attitude.
    pub(super) quaternion: [Column; 4],
    /// The angle of each row's own turn.
    pub(super) angle: Column,
    /// When each reading was taken.
    pub(super) time: Vec<Option<Time>>,
    /// Rows that bring a way of another kind, with their answer, in order.
    pub(super) apart: Vec<(usize, [f64; 6])>,
    /// The errors of the field of rows that have some, in order.
    pub(super) uncertain: Vec<(usize, Covariance<6>)>,
    /// The standard uncertainties of their answers; NaN where there is none.
    pub(super) standard: Vec<(usize, [f64; 6])>,
    /// The codes of notices on answers, in order.
    pub(super) notices: Vec<(usize, Vec<&'static str>)>,
    /// What is wrong with rows, in order.
    pub(super) bad: Vec<(usize, Vec<Fault>)>,
}

/// A field of which nothing is known.
pub(super) const MISSING: [f64; 6] = [f64::NAN; 6];

impl Block {
    /// No rows yet, and room for so many.
    pub(super) fn with_capacity(takes: Takes, rows: usize) -> Block {
        let mut block = Block::default();
        let wanted = [
            (true, &mut block.field[..]),
            (takes.velocity, &mut block.velocity),
            (takes.quaternion, &mut block.quaternion),
            (takes.angle, std::slice::from_mut(&mut block.angle)),
        ];
        for (_, columns) in wanted.into_iter().filter(|(wanted, _)| *wanted) {
            columns
                .iter_mut()
                .for_each(|column| column.own().reserve(rows));
        }
        block
    }

    /// Adds a row: what it says of the field and, as far as the series takes it, of its motion.
    pub(super) fn push(
        &mut self,
        takes: Takes,
        field: [f64; 6],
        motion: &RowMotion,
        time: Option<Time>,
    ) {
        for (column, value) in self.field.iter_mut().zip(field) {
            column.own().push(value);
        }
        if takes.velocity {
            for (column, value) in self.velocity.iter_mut().zip(motion.velocity) {
                column.own().push(value);
            }
        }
        if takes.quaternion {
            for (column, value) in self.quaternion.iter_mut().zip(motion.quaternion) {
                column.own().push(value);
            }
        }
        if takes.angle {
            self.angle.own().push(motion.angle);
        }
        if takes.time {
            self.time.push(time);
        }
        self.rows += 1;
    }

    /// Solves every row that is not bad: the columns of the field become those of the answer.
    pub(super) fn solve(&mut self, series: &Series) {
        self.refuse_unmeasured(series);
        self.find_uncertainties(series);
        for (row, _) in &self.bad {
            self.field
                .iter_mut()
                .for_each(|column| column.own()[*row] = f64::NAN);
        }
        let found = if series.blank.e_dot_b_zero.is_some() {
            self.solve_each(series)
        } else {
            self.solve_all(series)
        };
        for (row, answer) in std::mem::take(&mut self.apart) {
            self.set(row, &answer);
        }
        for (row, fault) in found {
            self.refuse(row, vec![fault]);
        }
    }

    /// All rows in one go.
    fn solve_all(&mut self, series: &Series) -> Vec<(usize, Fault)> {
        let setting = series.setting();
        let mut answers = Columns::default();
        let blame = |found: Refused| found.into_iter().map(|(row, why)| (row, refuse(&why)));
        let mut found: Vec<(usize, Fault)> = match &series.way {
            Way::Fixed(way) => {
                let block = physics::block::Block::new(way.clone(), setting);
                blame(block.solve(self.readings(), &mut answers)).collect()
            }
            Way::Rows(template) => {
                let rows = template.rows(setting);
                blame(rows.solve(self.readings(), self.motions(), &mut answers)).collect()
            }
            Way::Own { boost, turn } => {
                let rows = boost.rows(setting);
                let mut found: Vec<_> =
                    blame(rows.solve(self.readings(), self.motions(), &mut answers)).collect();
                if self.quaternion[0].iter().any(|w| !w.is_nan()) {
                    let mut turned = Columns::default();
                    let rows = turn.rows(setting);
                    found.extend(blame(rows.solve(
                        self.readings(),
                        self.motions(),
                        &mut turned,
                    )));
                    let turns = |row: &usize| !self.quaternion[0][*row].is_nan();
                    for row in (0..self.rows).filter(turns) {
                        let pairs = answers.e.iter_mut().chain(&mut answers.b);
                        for (column, turned) in pairs.zip(turned.e.iter().chain(&turned.b)) {
                            column[row] = turned[row];
                        }
                    }
                }
                found
            }
            Way::Walk(_) => return self.solve_each(series),
        };
        found.sort_by_key(|(row, _)| *row);
        let ([ex, ey, ez], [bx, by, bz]) = (answers.e, answers.b);
        self.field = [ex, ey, ez, bx, by, bz].map(Column::from);
        found
    }

    /// One row after the other, where each is a case of its own.
    fn solve_each(&mut self, series: &Series) -> Vec<(usize, Fault)> {
        let mut walker = series.walker();
        let rows = series.way.rows(series.setting());
        let mut found = Vec::new();
        for row in 0..self.rows {
            let answer = self
                .passage(row, series, &rows, walker.as_mut())
                .and_then(|passage| match passage {
                    Some(passage) => self.transformed(row, series, passage),
                    None => Ok((MISSING, Vec::new())),
                });
            match answer {
                Ok((answer, notices)) => {
                    self.set(row, &answer);
                    self.note(row, &notices);
                }
                Err(fault) => {
                    self.set(row, &MISSING);
                    found.push((row, fault));
                }
            }
        }
        // Those of rows with a way of another kind were noted as they were read.
        self.notices.sort_by_key(|(row, _)| *row);
        found
    }

    /// The way of one row; `None` where it is not known.
    pub(super) fn passage(
        &self,
        row: usize,
        series: &Series,
        rows: &[Rows],
        walker: Option<&mut Walker>,
    ) -> Result<Option<Passage>, Fault> {
        let unremarkable = |way| Passage {
            way,
            notices: Vec::new(),
        };
        if let Way::Fixed(way) = &series.way {
            return Ok(Some(unremarkable(way.clone())));
        }
        if let Some(walker) = walker {
            let Some(time) = self.time[row] else {
                return Ok(None);
            };
            let passage = walker.at(Some(time)).map_err(|fault| {
                let time = Path(vec![Segment::Field("time".into())]);
                Fault::at(&time, fault.code, fault.detail)
            })?;
            return Ok(Some(passage));
        }
        let turns = rows.len() > 1 && !self.quaternion[0][row].is_nan();
        let way = rows[usize::from(turns)].way(self.motions(), row);
        way.map(|way| way.map(|way| unremarkable(Arc::new(way))))
            .map_err(|why| refuse(&why))
    }

    /// One row restated, just as a question that stands alone.
    fn transformed(
        &self,
        row: usize,
        series: &Series,
        passage: Passage,
    ) -> Result<([f64; 6], Vec<Notice>), Fault> {
        let reading = self.reading(row, series);
        let answer = transform(&passage.way, &reading, series.target);
        let answer = answer.map_err(|why| refuse(&why))?;
        let mut notices = passage.notices;
        notices.extend(answer.notices);
        Ok((numbers(answer.e, answer.b), notices))
    }

    /// What a row says of the field, as a reading.
    pub(super) fn reading(&self, row: usize, series: &Series) -> Reading {
        let [ex, ey, ez, bx, by, bz] = self.field.each_ref().map(|column| {
            let value = column[row];
            (!value.is_nan()).then_some(value)
        });
        Reading {
            e: [ex, ey, ez],
            b: [bx, by, bz],
            ..series.blank
        }
    }

    /// A sensor has no value on an axis that it does not measure.
    fn refuse_unmeasured(&mut self, series: &Series) {
        let channels = [("e", series.sensor.e), ("b", series.sensor.b)];
        let mut found = Vec::new();
        for (i, column) in self.field.iter().enumerate() {
            let (name, channel) = channels[i / 3];
            if channel.is_none_or(|channel| channel.axes[i % 3]) {
                continue;
            }
            for (row, value) in column.iter().enumerate().filter(|(_, x)| !x.is_nan()) {
                let place = Path(vec![Segment::Field(name.into()), Segment::Index(i % 3)]);
                let detail = format!(
                    "the sensor does not measure {}, and the row says {value}; leave it missing",
                    ["x", "y", "z"][i % 3]
                );
                found.push((row, Fault::at(&place, Code::AxisNotMeasured, detail)));
            }
        }
        for (row, fault) in found {
            self.refuse(row, vec![fault]);
        }
    }

    /// Notes what is wrong with a row.
    pub(super) fn refuse(&mut self, row: usize, faults: Vec<Fault>) {
        match self.bad.binary_search_by_key(&row, |(own, _)| *own) {
            Ok(place) => self.bad[place].1.extend(faults),
            Err(place) => self.bad.insert(place, (row, faults)),
        }
    }

    /// Notes what is to be said of the answer to a row.
    pub(super) fn note(&mut self, row: usize, notices: &[Notice]) {
        // Rows have no invariants.
        let codes = notices.iter().map(|notice| notice.code);
        let mut codes: Vec<_> = codes
            .filter(|code| *code != INVARIANT_OUT_OF_RANGE)
            .collect();
        codes.dedup();
        if !codes.is_empty() {
            self.notices.push((row, codes));
        }
    }

    /// The codes of the notices on the answer to a row.
    pub(super) fn notices(&self, row: usize) -> &[&'static str] {
        let found = self.notices.binary_search_by_key(&row, |(own, _)| *own);
        found.map_or(&[], |place| &self.notices[place].1)
    }

    /// The standard uncertainties of the answer to a row, if it has some.
    pub(super) fn standard(&self, row: usize) -> Option<&[f64; 6]> {
        let found = self.standard.binary_search_by_key(&row, |(own, _)| *own);
        found.ok().map(|place| &self.standard[place].1)
    }

    fn set(&mut self, row: usize, answer: &[f64; 6]) {
        for (column, value) in self.field.iter_mut().zip(answer) {
            column.own()[row] = *value;
        }
    }

    fn readings(&self) -> Readings<'_> {
        let [ex, ey, ez, bx, by, bz] = self.field.each_ref().map(|column| &column[..]);
        Readings {
            e: [ex, ey, ez],
            b: [bx, by, bz],
        }
    }

    fn motions(&self) -> Motions<'_> {
        Motions {
            velocity: self.velocity.each_ref().map(|column| &column[..]),
            quaternion: self.quaternion.each_ref().map(|column| &column[..]),
            angle: &self.angle,
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

/// The numbers of an answer, NaN where it has none.
pub(super) fn numbers(e: [Option<f64>; 3], b: [Option<f64>; 3]) -> [f64; 6] {
    let all = [e, b].map(|v| v.map(|x| x.unwrap_or(f64::NAN)));
    let [[ex, ey, ez], [bx, by, bz]] = all;
    [ex, ey, ez, bx, by, bz]
}

/// What cannot be answered, blamed on the place that mends it.
pub(super) fn refuse(why: &Impossible) -> Fault {
    let place: &[&str] = match why {
        Impossible::FieldInPlane { .. } => &["b"],
        Impossible::FasterThanLight { .. } => &["velocity"],
        Impossible::NotARotation { .. } | Impossible::NoDirection { .. } => {
            &["rotation", "quaternion"]
        }
        // No member of the row alone would mend it.
        _ => return Fault::whole(chain::code(why), why.to_string()),
    };
    let place = place.iter().map(|name| Segment::Field((*name).into()));
    Fault::at(&Path(place.collect()), chain::code(why), why.to_string())
}
