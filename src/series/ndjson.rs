//! Rows as NDJSON, a JSON object a line: reading them, and answering them in their own text.

use std::borrow::Cow;

use serde::de::{Deserialize, Deserializer, MapAccess, Visitor};
use serde_json::value::RawValue;

use crate::document::{Code, Fault, Faults, Members, Node, Place};
use crate::frames::{Clock, Time};
use crate::question::{Question, uncertainty as question_uncertainty};
use crate::transform::transform;

use super::block::{Block, MISSING, Takes, numbers, refuse};
use super::carry::Carried;
use super::names::{self, MEMBERS};
use super::scan::{self, Passed, Scanned, Span};
use super::uncertainty;
use super::way::{RowMotion, Way};
use super::{Format, Series};

/// Where the parts of a row stand in the text of its block.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Line {
    pub(super) from: usize,
    /// Of the text of the row alone, in which the other places are.
    pub(super) length: usize,
    pub(super) e: Span,
    pub(super) b: Span,
    pub(super) uncertainty: Span,
    /// Whether it is an object with members, and can be answered as one.
    pub(super) object: bool,
}

/// Reads rows of one block after another.
pub(super) struct Reader<'s> {
    series: &'s Series,
    takes: Takes,
    passed: Passed,
    /// Members that go along to another format, if rows go to one.
    carries: Option<&'s [String]>,
}

impl<'s> Reader<'s> {
    /// For rows that are answered in their own text, or in another format to which these members
    /// go along.
    pub(super) fn new(series: &'s Series, carries: Option<&'s [String]>) -> Reader<'s> {
        Reader {
            series,
            takes: Takes::of(series),
            passed: Passed::default(),
            carries,
        }
    }

    /// Reads all rows of a text. Lines without anything are none.
    pub(super) fn read(
        &mut self,
        text: &[u8],
        block: &mut Block,
        carried: &mut Carried,
    ) -> Vec<Line> {
        let mut lines = Vec::with_capacity(text.len() / 128);
        let mut from = 0;
        while from < text.len() {
            let end = memchr::memchr(b'\n', &text[from..]).map_or(text.len(), |at| from + at);
            let row = text[from..end].trim_ascii_end();
            if !row.is_empty() {
                let line = self.row(row, block, carried);
                lines.push(Line {
                    from,
                    length: row.len(),
                    ..line
                });
            }
            from = end + 1;
        }
        lines
    }

    fn row(&mut self, text: &[u8], block: &mut Block, carried: &mut Carried) -> Line {
        if let Some(row) = scan::row(text, &self.passed)
            && let Some(time) = self.usual(&row, text)
        {
            let motion = RowMotion {
                velocity: row.velocity.unwrap_or([f64::NAN; 3]),
                quaternion: row.quaternion.unwrap_or([f64::NAN; 4]),
                angle: row.angle.unwrap_or(f64::NAN),
            };
            block.push(self.takes, row.field, &motion, time);
            if carried.columns > 0 {
                let time = (!row.time.is_none()).then(|| row.time.of(text));
                carried.push(time.map(unquoted).filter(|time| *time != b"null"));
            }
            let (e, b) = (row.e, row.b);
            return Line {
                e,
                b,
                object: true,
                ..Line::default()
            };
        }
        let mut faults = Faults::default();
        let mut line = Line::default();
        let before = block.rows;
        self.any_row(text, &mut line, block, carried, &mut faults);
        if block.rows == before {
            block.push(self.takes, MISSING, &RowMotion::NONE, None);
        }
        if !faults.0.is_empty() {
            block.bad.push((before, faults.0));
        }
        carried.fill(block.rows);
        line
    }

    /// Whether a scanned row is one that needs no further look; then its time, if that counts.
    fn usual(&self, row: &Scanned, text: &[u8]) -> Option<Option<Time>> {
        let only_time = |cells: &[String]| cells.iter().all(|name| name == "time");
        if (row.e.is_none() && row.b.is_none()) || !self.carries.is_none_or(only_time) {
            return None;
        }
        let own = [
            row.velocity.is_some(),
            row.quaternion.is_some(),
            row.angle.is_some(),
        ];
        let takes = self.takes;
        let fits = match &self.series.way {
            Way::Own { .. } => own[0] != own[1] && !own[2],
            _ => (0..3).all(|i| !own[i] || [takes.velocity, takes.quaternion, takes.angle][i]),
        };
        if !fits {
            return None;
        }
        if !self.series.takes_time() || row.time.is_none() {
            return Some(None);
        }
        let time = row.time.of(text);
        match (self.series.clock, time[0]) {
            (_, b'n') => Some(None),
            (Clock::Calendar, b'"') => {
                let text = std::str::from_utf8(unquoted(time)).ok()?;
                Time::from_rfc3339(text).ok().map(Some)
            }
            (Clock::Seconds, b'-' | b'0'..=b'9') => {
                let (seconds, _) = super::number::json(time)?;
                Time::from_seconds(seconds).map(Some)
            }
            _ => None,
        }
    }

    /// Reads a row of any form.
    fn any_row(
        &mut self,
        text: &[u8],
        line: &mut Line,
        block: &mut Block,
        carried: &mut Carried,
        faults: &mut Faults,
    ) {
        let Ok(Raw(members)) = serde_json::from_slice(text) else {
            faults.0.push(match Node::from_json(text) {
                Err(fault) => fault,
                Ok(other) => {
                    let detail = format!("expected an object, got {}", other.describe());
                    Fault::whole(Code::WrongType, detail)
                }
            });
            return;
        };
        line.object = !members.is_empty();
        let own = matches!(self.series.way, Way::Own { .. });
        let mut ours = Vec::new();
        for (i, (name, raw)) in members.iter().enumerate() {
            let place = Place::ROOT.field(name);
            if MEMBERS.contains(&name.as_ref()) || (own && name == "inverse") {
                if members[..i].iter().any(|(before, _)| before == name) {
                    faults.note(
                        &place,
                        Code::RepeatedField,
                        format!("{name:?} is given twice"),
                    );
                }
                let span = || {
                    let from = raw.get().as_ptr().addr() - text.as_ptr().addr();
                    Span {
                        from: from as u32,
                        to: (from + raw.get().len()) as u32,
                    }
                };
                match name.as_ref() {
                    "e" => line.e = span(),
                    "b" => line.b = span(),
                    "uncertainty" => line.uncertainty = span(),
                    _ => {}
                }
                match Node::from_json(raw.get().as_bytes()) {
                    Ok(node) => ours.push((name.clone(), node)),
                    Err(fault) => faults.note(&place, fault.code, fault.detail),
                }
            } else if let Some(slip) = names::slip(name, false, self.series.notices(Format::Ndjson))
            {
                faults.note(&place, Code::UnknownField, slip);
            } else {
                self.passed.add(name);
            }
        }
        for name in self.carries.unwrap_or_default() {
            let found = members.iter().find(|(own, _)| own == name);
            carried.push(found.and_then(|(_, raw)| cell(raw.get())).as_deref());
        }
        if !faults.0.is_empty() {
            return;
        }
        if own {
            self.own_way(ours, block, faults);
        } else {
            self.reading(&Node::Object(ours), block, faults);
        }
    }

    /// A row with a way of its own, asked as a question that stands alone.
    fn own_way(&self, ours: Vec<(Cow<str>, Node)>, block: &mut Block, faults: &mut Faults) {
        let mut question = ours;
        if let Node::Object(asked) = &self.series.question {
            question.extend(asked.iter().cloned());
        }
        let time = question.iter().position(|(name, _)| name == "time");
        let uncertain = question
            .iter()
            .any(|(name, node)| name == "uncertainty" && !node.is_null());
        let named = question
            .iter()
            .any(|(name, node)| name == "from" && !node.is_null());
        if let Some(time) = time.filter(|_| !named) {
            // The time of a reading whose way does not ask for it.
            question.remove(time);
        }
        let answer = Question::read(&Node::Object(question), &self.series.deployment);
        let answer = answer.and_then(|question| {
            let answer = transform(&question.way, &question.reading, question.target_units())
                .map_err(|error| vec![refuse(&error)])?;
            Ok((question, answer))
        });
        match answer {
            Ok((question, answer)) => {
                if uncertain || (!named && question.way.is_uncertain()) {
                    let reading = question.uncertainty.as_deref();
                    let standard = uncertainty::of_answer(&question.way, &answer, reading);
                    block.standard.push((block.rows, standard));
                }
                let mut notices = question.notices;
                notices.extend(answer.notices);
                block.note(block.rows, &notices);
                block.apart.push((block.rows, numbers(answer.e, answer.b)));
                block.push(self.takes, MISSING, &RowMotion::NONE, None);
            }
            Err(found) => faults.0.extend(found),
        }
    }

    /// A row of numbers for the way of the query.
    fn reading(&self, ours: &Node, block: &mut Block, faults: &mut Faults) {
        let root = Place::ROOT;
        let Some(members) = faults.any_members(ours, &root, "an object") else {
            return;
        };
        let nan = |v: [Option<f64>; 3]| v.map(|x| x.unwrap_or(f64::NAN));
        let vector = |name: &str, faults: &mut Faults| match members.given(name) {
            Some(node) => faults.partial_vector(node, &root.field(name)).map(nan),
            None => Some([f64::NAN; 3]),
        };
        let (e, b) = (vector("e", faults), vector("b", faults));
        if members.given("e").is_none() && members.given("b").is_none() {
            let detail =
                "a reading needs \"e\", \"b\" or both; one left out is missing, never zero";
            faults.note(&root, Code::MissingField, detail);
        }
        let options = |v: [f64; 3]| v.map(|x| (!x.is_nan()).then_some(x));
        let uncertain =
            question_uncertainty::of_reading(members, [e.map(options), b.map(options)], faults);
        question_uncertainty::of_other_ways(members, "", faults);
        let takes = self.takes;
        let used = [
            ("velocity", takes.velocity),
            ("rotation", takes.quaternion),
            ("angle", takes.angle),
            ("boost", false),
            ("steps", false),
            ("from", false),
            ("to", false),
        ];
        for (name, _) in used
            .into_iter()
            .filter(|(name, used)| !used && members.given(name).is_some())
        {
            let detail = format!(
                "{name:?} is a motion of the row, which the way of the query does not use: say \
                 \"row\" there, leave out the way of the query, or give the member another name"
            );
            faults.note(&root.field(name), Code::ConflictingFields, detail);
        }
        if !faults.0.is_empty() {
            return;
        }
        let motion = RowMotion {
            velocity: vector("velocity", faults).unwrap_or([f64::NAN; 3]),
            quaternion: quaternion(members, faults).unwrap_or([f64::NAN; 4]),
            angle: members
                .get("angle")
                .and_then(|node| faults.number(node, &root.field("angle")))
                .unwrap_or(f64::NAN),
        };
        let time = members.get("time").filter(|_| self.series.takes_time());
        let time =
            time.and_then(|node| Time::read(node, &root.field("time"), self.series.clock, faults));
        if let (Some([ex, ey, ez]), Some([bx, by, bz]), true) = (e, b, faults.0.is_empty()) {
            let uncertain = uncertain.flatten();
            block
                .uncertain
                .extend(uncertain.map(|found| (block.rows, found)));
            block.push(takes, [ex, ey, ez, bx, by, bz], &motion, time);
        }
    }
}

/// The attitude of a row; NaN where a number is missing.
fn quaternion(members: Members, faults: &mut Faults) -> Option<[f64; 4]> {
    let place = Place::ROOT.field("rotation");
    let rotation = faults.members(members.get("rotation")?, &place, &["quaternion"])?;
    let node = rotation.get("quaternion")?;
    let place = place.field("quaternion");
    let parts = ["w", "x", "y", "z"];
    let own = faults.members(node, &place, &parts)?;
    Some(parts.map(|name| {
        let node = faults.needed(own, &place, name);
        let number = node.and_then(|node| faults.number(node, &place.field(name)));
        number.unwrap_or(f64::NAN)
    }))
}

/// The text that a value has in another format; `None` for null.
fn cell(raw: &str) -> Option<Cow<'_, [u8]>> {
    if raw == "null" {
        return None;
    }
    if !raw.starts_with('"') {
        return Some(Cow::Borrowed(raw.as_bytes()));
    }
    let text: String = serde_json::from_str(raw).ok()?;
    Some(Cow::Owned(text.into_bytes()))
}

fn unquoted(token: &[u8]) -> &[u8] {
    let inner = token
        .strip_prefix(b"\"")
        .and_then(|rest| rest.strip_suffix(b"\""));
    inner.unwrap_or(token)
}

/// The members of an object as they stand in its text.
struct Raw<'t>(Vec<(Cow<'t, str>, &'t RawValue)>);

impl<'de> Deserialize<'de> for Raw<'de> {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Raw<'de>, D::Error> {
        struct Rows;
        impl<'de> Visitor<'de> for Rows {
            type Value = Raw<'de>;
            fn expecting(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                f.write_str("an object")
            }
            fn visit_map<A: MapAccess<'de>>(self, mut map: A) -> Result<Raw<'de>, A::Error> {
                let mut members = Vec::new();
                while let Some(name) = map.next_key::<Name>()? {
                    members.push((name.0, map.next_value()?));
                }
                Ok(Raw(members))
            }
        }
        deserializer.deserialize_map(Rows)
    }
}

/// A name, borrowed where it holds no escapes.
#[derive(serde::Deserialize)]
struct Name<'t>(#[serde(borrow)] Cow<'t, str>);
