//! Reading a track: a CSV file (RFC 4180) with a header row.

use std::io::Read;

use csv::{ByteRecord, ReaderBuilder};

use super::fault::Reason;
use super::time::{Clock, Time};
use super::track::{Row, Track};
use crate::chain::code;
use crate::document::Code;
use crate::physics::boost::Motion;
use crate::physics::rotation::Turn;

/// The columns of a track, in groups that stand or fall together.
const GROUPS: [&[&str]; 5] = [
    &["time"],
    &["vx", "vy", "vz"],
    &["qw", "qx", "qy", "qz"],
    &["u_vx", "u_vy", "u_vz"],
    &["u_rx", "u_ry", "u_rz"],
];
/// A file with more bad rows than this is not listed to its end.
const LISTED: usize = 20;

/// What is wrong with one line of a track.
pub(super) type RowFault = (Option<u64>, Reason);

/// Fills a track with the rows of its file.
///
/// # Errors
/// Every fault of the header, else of the rows, with its line; past 20 of them their number.
pub(super) fn read(
    source: impl Read,
    mut track: Track,
    max_gap: Option<f64>,
) -> Result<Track, Vec<RowFault>> {
    let mut reader = ReaderBuilder::new()
        .has_headers(false)
        .flexible(true)
        .trim(csv::Trim::All)
        .buffer_capacity(1 << 17)
        .from_reader(source);
    let mut record = ByteRecord::new();
    let broken = |error: csv::Error| {
        let line = error.position().map(csv::Position::line);
        let detail = format!("the file could not be read: {error}");
        vec![(line, Reason::new(Code::UnreadableFile, detail))]
    };
    if !reader.read_byte_record(&mut record).map_err(broken)? {
        let detail = "the file is empty; a track begins with a header row such as \
                      time,vx,vy,vz,qw,qx,qy,qz";
        return Err(vec![(Some(1), Reason::new(Code::MissingField, detail))]);
    }
    let mut columns = Columns::of(&record)?;
    columns.slow = 0.5 / track.beta.to_f64();
    track.moves = columns.has(1);
    track.turns = columns.has(2);
    let mut faults = Faults::default();
    let mut before: Option<Row> = None;
    while reader.read_byte_record(&mut record).map_err(broken)? {
        let line = record.position().map(csv::Position::line);
        match columns.row(&record, &track) {
            Ok((row, uncertainty, departure)) => {
                if let Some(before) = &before
                    && let Err(reason) = row.follows(before, max_gap, track.clock)
                {
                    faults.note(line, reason);
                }
                before = Some(row);
                track.rows.push(row);
                track.uncertainties.extend(uncertainty);
                track.mended = track.mended.max(departure);
            }
            Err(reasons) => {
                for reason in reasons {
                    faults.note(line, reason);
                }
            }
        }
    }
    if track.rows.is_empty() && faults.listed.is_empty() {
        let detail = "the track has no row below its header; it needs at least one";
        faults.note(Some(1), Reason::new(Code::MissingField, detail));
    }
    faults.result()?;
    track.rows.shrink_to_fit();
    track.uncertainties.shrink_to_fit();
    Ok(track)
}

/// Faults of rows, up to a number worth reading.
#[derive(Default)]
struct Faults {
    listed: Vec<RowFault>,
    more: usize,
}

impl Faults {
    fn note(&mut self, line: Option<u64>, reason: Reason) {
        if self.listed.len() < LISTED {
            self.listed.push((line, reason));
        } else {
            self.more += 1;
        }
    }

    fn result(mut self) -> Result<(), Vec<RowFault>> {
        if let (1.., Some((_, last))) = (self.more, self.listed.last_mut()) {
            last.detail += &format!(" ({} more faults follow in this file)", self.more);
        }
        if self.listed.is_empty() {
            Ok(())
        } else {
            Err(self.listed)
        }
    }
}

/// Where each column of [`GROUPS`] stands; `None` for a group that the file does not have.
struct Columns {
    places: [Option<Vec<usize>>; 5],
    width: usize,
    /// Half of c: three components no larger are below it together.
    slow: f64,
}

impl Columns {
    fn of(header: &ByteRecord) -> Result<Columns, Vec<RowFault>> {
        let mut faults = Vec::new();
        let mut fault = |code, detail: String| faults.push((Some(1), Reason::new(code, detail)));
        let names: Vec<_> = header.iter().map(String::from_utf8_lossy).collect();
        let known = || GROUPS.iter().copied().flatten();
        for (i, name) in names.iter().enumerate() {
            if !known().any(|own| own == name) {
                let list: Vec<_> = known().copied().collect();
                let detail = format!(
                    "{name:?} is no column of a track; known are {}",
                    list.join(", ")
                );
                fault(Code::UnknownField, detail);
            }
            if names[..i].contains(name) {
                fault(
                    Code::RepeatedField,
                    format!("the column {name:?} stands twice"),
                );
            }
        }
        let place = |own: &str| names.iter().position(|name| name == own);
        let places = GROUPS.map(|group| {
            let found: Vec<usize> = group.iter().filter_map(|own| place(own)).collect();
            if !found.is_empty() && found.len() < group.len() {
                let detail = format!(
                    "{} stand together; some of them are missing",
                    group.join(", ")
                );
                fault(Code::MissingField, detail);
            }
            (found.len() == group.len()).then_some(found)
        });
        let any = |own: &str| place(own).is_some();
        if !any("time") {
            fault(Code::MissingField, "the column \"time\" is missing".into());
        }
        if !any("vx") && !any("qw") {
            let detail = "a track has vx, vy, vz or qw, qx, qy, qz or both; this one has neither";
            fault(Code::MissingField, detail.into());
        }
        for (of, own) in [("u_vx", "vx"), ("u_rx", "qw")] {
            if any(of) && !any(own) {
                let detail =
                    format!("{of:?} is the uncertainty of a column {own:?} that is missing");
                fault(Code::ConflictingFields, detail);
            }
        }
        if faults.is_empty() {
            let width = names.len();
            Ok(Columns {
                places,
                width,
                slow: 0.0,
            })
        } else {
            Err(faults)
        }
    }

    fn has(&self, group: usize) -> bool {
        self.places[group].is_some()
    }

    /// A row, its uncertainties, and how far its attitude is from length one.
    #[allow(clippy::type_complexity, reason = "three parts of one row")]
    fn row(
        &self,
        record: &ByteRecord,
        track: &Track,
    ) -> Result<(Row, Option<[f64; 6]>, f64), Vec<Reason>> {
        let mut faults = Vec::new();
        if record.len() != self.width {
            let detail = format!(
                "the row has {} values; the header names {} columns",
                record.len(),
                self.width
            );
            return Err(vec![Reason::new(Code::WrongLength, detail)]);
        }
        let time = self.time(record, track.clock, &mut faults);
        let velocity = self.numbers::<3>(record, 1, &mut faults);
        let attitude = self.numbers::<4>(record, 2, &mut faults);
        let mut departure = 0.0;
        if let Some(value) = velocity.filter(|v| v.iter().any(|x| x.abs() > self.slow)) {
            let motion = Motion::Velocity {
                value,
                beta: track.beta,
            };
            if let Err(impossible) = motion.check() {
                faults.push(Reason::new(code(&impossible), impossible.to_string()));
            }
        }
        if let (true, Some(attitude)) = (track.turns, attitude) {
            match Turn::Quaternion(attitude).check() {
                Ok(found) => departure = found,
                Err(impossible) => {
                    faults.push(Reason::new(code(&impossible), impossible.to_string()));
                }
            }
        }
        let sigmas = [3, 4].map(|group| self.numbers::<3>(record, group, &mut faults));
        for sigma in sigmas.iter().flatten().flatten() {
            if *sigma < 0.0 {
                let detail = format!("{sigma} is no standard uncertainty; it is 0 or positive");
                faults.push(Reason::new(Code::NegativeUncertainty, detail));
            }
        }
        match (time, velocity, attitude, sigmas) {
            (Some(time), Some(velocity), Some(attitude), [Some(v), Some(r)])
                if faults.is_empty() =>
            {
                let attitude = if track.turns {
                    attitude
                } else {
                    [1.0, 0.0, 0.0, 0.0]
                };
                let row = Row {
                    time,
                    velocity,
                    attitude,
                };
                let given = self.has(3) || self.has(4);
                let uncertainty = given.then_some([v[0], v[1], v[2], r[0], r[1], r[2]]);
                Ok((row, uncertainty, departure))
            }
            _ => Err(faults),
        }
    }

    fn time(&self, record: &ByteRecord, clock: Clock, faults: &mut Vec<Reason>) -> Option<Time> {
        let column = *self.places[0].as_ref()?.first()?;
        let text = std::str::from_utf8(&record[column]).unwrap_or_default();
        let time = match clock {
            Clock::Calendar => Time::from_rfc3339(text).map_err(|why| {
                if text.parse::<f64>().is_ok() {
                    "the catalogue names no epoch that seconds could count from; its times are \
                     written as RFC 3339"
                } else {
                    why
                }
            }),
            Clock::Seconds => number(text)
                .and_then(Time::from_seconds)
                .ok_or("expected seconds from the epoch of the catalogue, up to 9e15"),
        };
        time.map_err(|why| {
            let detail = format!("the time {text:?}: {why}");
            faults.push(Reason::new(Code::WrongTime, detail));
        })
        .ok()
    }

    /// The numbers of a group; zeros where the file has no such columns.
    fn numbers<const N: usize>(
        &self,
        record: &ByteRecord,
        group: usize,
        faults: &mut Vec<Reason>,
    ) -> Option<[f64; N]> {
        let mut values = [0.0; N];
        let Some(places) = &self.places[group] else {
            return Some(values);
        };
        let mut whole = true;
        for (i, place) in places.iter().enumerate() {
            let text = std::str::from_utf8(&record[*place]).unwrap_or_default();
            match number(text) {
                Some(value) => values[i] = value,
                None => {
                    whole = false;
                    let name = GROUPS[group][i];
                    let detail = format!(
                        "{name} is {text:?}, not a finite number; a track has no empty values: \
                         leave out the row"
                    );
                    faults.push(Reason::new(Code::WrongType, detail));
                }
            }
        }
        whole.then_some(values)
    }
}

fn number(text: &str) -> Option<f64> {
    text.parse().ok().filter(|value: &f64| value.is_finite())
}
