//! Rows as CSV (RFC 4180): commas, fields in quotes where they need them, lines that end with LF
//! or CRLF, a header row. What the standard leaves open is read as the `csv` crate reads it.

use std::borrow::Cow;

use memchr::{memchr, memchr2};

use crate::document::{Code, Fault, Path};
use crate::frames::{Clock, Time};

use super::Series;
use super::block::{Block, MISSING, Takes};
use super::carry::Carried;
use super::header::{Column, Header};
use super::job::ROW;
use super::names::Role;
use super::number;
use super::scan::Span;
use super::uncertainty;
use super::way::RowMotion;

/// Where a row stands in the text of its block.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Line {
    pub(super) from: usize,
    /// Without the end of the line; the other places count from its start.
    pub(super) length: usize,
    /// The fields of ex ey ez bx by bz and of their uncertainties, in this order.
    pub(super) field: [Span; 12],
    /// Whether it has as many fields as the header.
    pub(super) whole: bool,
}

/// The names in a header row, without the end of its line.
///
/// # Errors
/// It is empty or not UTF-8.
pub(super) fn names(row: &[u8]) -> Result<Vec<String>, Fault> {
    let syntax = |detail: &str| Fault::whole(Code::Syntax, detail);
    let row = std::str::from_utf8(row)
        .map_err(|_| syntax("the header row is not UTF-8; save the table as UTF-8"))?;
    if row.trim().is_empty() {
        return Err(syntax(
            "the table has no header row; it begins with the names of the columns",
        ));
    }
    let mut names = Vec::new();
    let mut rest = Some(row.as_bytes());
    while let Some(text) = rest {
        let end = field_end(text);
        let name = unquoted(&text[..end]);
        names.push(String::from_utf8_lossy(&name).into_owned());
        rest = text.get(end + 1..);
    }
    Ok(names)
}

/// Reads rows of one block after another.
pub(super) struct Reader<'s> {
    series: &'s Series,
    header: &'s Header,
    takes: Takes,
    /// How many cells go along to another format.
    cells: usize,
}

/// What one row says.
struct Row {
    field: [f64; 6],
    standard: [f64; 6],
    motion: RowMotion,
    time: Option<Time>,
    faults: Vec<Fault>,
}

impl<'s> Reader<'s> {
    /// For rows under a header.
    pub(super) fn new(series: &'s Series, header: &'s Header, cells: usize) -> Reader<'s> {
        Reader {
            series,
            header,
            takes: Takes::of(series),
            cells,
        }
    }

    /// Reads all rows of a text. Lines without anything are none.
    pub(super) fn read(&self, text: &[u8], block: &mut Block, carried: &mut Carried) -> Vec<Line> {
        let mut lines = Vec::with_capacity(text.len() / ROW);
        let mut cells: Vec<Option<Cow<[u8]>>> = vec![None; self.cells];
        let uncertain = self.header.uncertain();
        let mut from = 0;
        while from < text.len() {
            let blank = match text[from..] {
                [b'\n', ..] => 1,
                [b'\r', b'\n', ..] => 2,
                _ => 0,
            };
            if blank > 0 {
                from += blank;
                continue;
            }
            let mut row = Row {
                field: MISSING,
                standard: MISSING,
                motion: RowMotion::NONE,
                time: None,
                faults: Vec::new(),
            };
            let (line, next) = self.row(&text[from..], &mut row, &mut cells);
            if uncertain != [false; 2] && row.faults.is_empty() {
                match uncertainty::of_columns(&row.field, &row.standard, uncertain) {
                    Ok(found) => block
                        .uncertain
                        .extend(found.map(|found| (block.rows, found))),
                    Err(faults) => row.faults = faults,
                }
            }
            if !row.faults.is_empty() {
                block.bad.push((block.rows, row.faults));
            }
            block.push(self.takes, row.field, &row.motion, row.time);
            for cell in &mut cells {
                carried.push(cell.take().as_deref());
            }
            lines.push(Line { from, ..line });
            from += next;
        }
        lines
    }

    /// Reads the row at the start of a text; also says where the next one starts.
    fn row<'t>(
        &self,
        text: &'t [u8],
        row: &mut Row,
        cells: &mut [Option<Cow<'t, [u8]>>],
    ) -> (Line, usize) {
        let mut line = Line::default();
        let mut at = 0;
        let mut count = 0;
        loop {
            let rest = &text[at..];
            let column = self.header.columns.get(count);
            count += 1;
            let end = match column {
                Some(Column {
                    role: Some(role), ..
                }) => {
                    let (value, end) = number_field(rest);
                    let place = match role {
                        Role::Field(i) => Some(*i),
                        Role::Uncertainty(i) => Some(6 + *i),
                        _ => None,
                    };
                    if let Some(i) = place {
                        line.field[i] = Span {
                            from: at as u32,
                            to: (at + end) as u32,
                        };
                    }
                    self.take(*role, value, &rest[..end], count - 1, row);
                    end
                }
                _ => field_end(rest),
            };
            if let Some(Column {
                cell: Some(cell), ..
            }) = column
            {
                let text = unquoted(&rest[..end]);
                cells[*cell] = (!text.is_empty()).then_some(text);
            }
            at += end;
            if text.get(at) != Some(&b',') {
                break;
            }
            at += 1;
        }
        let next = match text[at..] {
            [b'\r', b'\n', ..] => at + 2,
            [] => at,
            // The end of a line, or a last CR whose LF never came.
            _ => at + 1,
        };
        line.length = at;
        let width = self.header.columns.len();
        line.whole = count == width;
        if !line.whole {
            let detail = format!("the row has {count} fields and the header {width}");
            row.field = MISSING;
            row.motion = RowMotion::NONE;
            row.time = None;
            row.faults = vec![Fault::whole(Code::WrongLength, detail)];
            cells.fill(None);
        }
        (line, next)
    }

    /// Takes the value of a column of ours.
    #[inline]
    fn take(&self, role: Role, value: Option<f64>, text: &[u8], column: usize, row: &mut Row) {
        if role == Role::Time {
            self.take_time(text, row);
            return;
        }
        let value = match value {
            Some(value) => value,
            None => self.odd(text, column, row),
        };
        match role {
            Role::Field(i) => row.field[i] = value,
            Role::Velocity(i) => row.motion.velocity[i] = value,
            Role::Quaternion(i) => row.motion.quaternion[i] = value,
            Role::Angle => row.motion.angle = value,
            Role::Uncertainty(i) => row.standard[i] = value,
            Role::Time => {}
        }
    }

    /// A number that is missing, in quotes or among spaces, or none at all.
    #[cold]
    fn odd(&self, text: &[u8], column: usize, row: &mut Row) -> f64 {
        let text = unquoted(text);
        let trimmed = text.trim_ascii();
        if is_missing(trimmed) {
            return f64::NAN;
        }
        let shown = String::from_utf8_lossy(trimmed);
        let (code, detail) = match shown.parse::<f64>() {
            Ok(value) if value.is_finite() => return value,
            Ok(_) => (
                Code::NumberOutOfRange,
                format!("{shown:?} is not a finite double; the largest is about 1.8e308"),
            ),
            Err(_) => (
                Code::WrongType,
                format!("expected a number or nothing, got {shown:?}"),
            ),
        };
        let path = Path::default().field(&self.header.names[column]);
        row.faults.push(Fault::at(&path, code, detail));
        f64::NAN
    }

    fn take_time(&self, text: &[u8], row: &mut Row) {
        let text = unquoted(text);
        let text = text.trim_ascii();
        if is_missing(text) {
            return;
        }
        match time(text, self.series.clock) {
            Ok(time) => row.time = Some(time),
            Err(detail) => {
                let path = Path::default().field("time");
                row.faults.push(Fault::at(&path, Code::WrongTime, detail));
            }
        }
    }
}

/// A time as it stands in a table.
///
/// # Errors
/// It is none of this clock.
pub(super) fn time(text: &[u8], clock: Clock) -> Result<Time, String> {
    let text = String::from_utf8_lossy(text);
    match clock {
        Clock::Calendar => Time::from_rfc3339(&text).map_err(|why| format!("{text:?}: {why}")),
        Clock::Seconds => {
            let seconds = text
                .parse()
                .ok()
                .filter(|seconds: &f64| seconds.is_finite());
            seconds.and_then(Time::from_seconds).ok_or_else(|| {
                format!("{text:?} is not a number of seconds from the epoch of the catalogue")
            })
        }
    }
}

/// Whether a cell says that there is no number.
fn is_missing(text: &[u8]) -> bool {
    text.is_empty() || text.eq_ignore_ascii_case(b"nan") || text == b"null"
}

/// A plain number at the start of a text, if the field is one; and where the field ends.
#[inline]
fn number_field(text: &[u8]) -> (Option<f64>, usize) {
    if let Some((value, length)) = number::field(text)
        && matches!(
            text[length..],
            [] | [b',' | b'\n', ..] | [b'\r'] | [b'\r', b'\n', ..]
        )
    {
        return (Some(value), length);
    }
    (None, field_end(text))
}

/// Where the field at the start of a text ends: at a comma, the end of the line, or of the text.
#[inline]
fn field_end(text: &[u8]) -> usize {
    let mut at = 0;
    if text.first() == Some(&b'"') {
        at = 1;
        loop {
            match memchr(b'"', &text[at..]) {
                Some(close) => at += close + 1,
                None => return text.len(),
            }
            if text.get(at) != Some(&b'"') {
                break;
            }
            at += 1;
        }
    }
    let end = memchr2(b',', b'\n', &text[at..]).map_or(text.len(), |end| at + end);
    let crlf = text.get(end) != Some(&b',') && end > at && text[end - 1] == b'\r';
    end - usize::from(crlf)
}

/// The value of a field: what stands in quotes, doubled quotes as one.
pub(super) fn unquoted(field: &[u8]) -> Cow<'_, [u8]> {
    let Some(rest) = field.strip_prefix(b"\"") else {
        return Cow::Borrowed(field);
    };
    if let Some(close) = memchr(b'"', rest)
        && close + 1 == rest.len()
    {
        return Cow::Borrowed(&rest[..close]);
    }
    let mut value = Vec::with_capacity(rest.len());
    let mut at = 0;
    while let Some(close) = memchr(b'"', &rest[at..]) {
        value.extend_from_slice(&rest[at..at + close]);
        at += close + 1;
        if rest.get(at) != Some(&b'"') {
            break;
        }
        value.push(b'"');
        at += 1;
    }
    value.extend_from_slice(&rest[at..]);
    Cow::Owned(value)
}

/// Appends a text as a field, in quotes where it needs them.
pub(super) fn push_field(out: &mut Vec<u8>, text: &[u8]) {
    let plain = memchr::memchr3(b',', b'"', b'\n', text).is_none() && memchr(b'\r', text).is_none();
    if plain {
        out.extend_from_slice(text);
        return;
    }
    out.push(b'"');
    for part in text.split_inclusive(|byte| *byte == b'"') {
        out.extend_from_slice(part);
        if part.ends_with(b"\"") {
            out.push(b'"');
        }
    }
    out.push(b'"');
}
