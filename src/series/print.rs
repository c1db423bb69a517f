//! Answers as text: in the text of their own rows, or printed anew in another format.

use super::block::{Block, MISSING};
use super::carry::Carried;
use super::csv::push_field;
use super::header::{Added, Header};
use super::names::COLUMNS;
use super::number::{self, Texts};
use super::outlet::Done;
use super::scan::Span;
use super::{csv, ndjson, problem};

/// What an answer has in another format than the question.
#[derive(Clone, Debug)]
pub(super) struct Columns {
    /// Whether there is E, B, the uncertainty of E, and of B.
    pub(super) answers: [bool; 4],
    /// Whether there are notices.
    pub(super) notices: bool,
    /// The names of what goes along: the time, if there is one, and what is kept.
    pub(super) cells: Vec<String>,
}

/// How lines of CSV end that come from another format (RFC 4180).
const CRLF: &[u8] = b"\r\n";

impl Columns {
    /// Those of a table, with what goes along.
    pub(super) fn of(header: &Header, cells: Vec<String>) -> Columns {
        let mut answers = [0, 3, 6, 9].map(|first| header.place_of(first).is_some());
        let Added {
            uncertainty,
            notices,
        } = header.added;
        for (there, added) in answers[2..].iter_mut().zip(uncertainty) {
            *there |= added;
        }
        Columns {
            answers,
            notices,
            cells,
        }
    }

    /// The header row of CSV.
    pub(super) fn header(&self) -> Vec<u8> {
        let mut out = Vec::new();
        let (time, kept) = self.time_and_kept();
        let names = COLUMNS[1..13].iter().enumerate();
        let field = names.filter(|(i, _)| self.answers[i / 3]);
        let names = time.iter().map(String::as_str);
        let names = names.chain(field.map(|(_, (name, _))| *name));
        let names = names.chain(kept.iter().map(String::as_str));
        let notices = self.notices.then_some("notices");
        for name in names.chain(notices).chain(["problem"]) {
            if !out.is_empty() {
                out.push(b',');
            }
            push_field(&mut out, name.as_bytes());
        }
        out.extend_from_slice(CRLF);
        out
    }

    pub(super) fn time_and_kept(&self) -> (&[String], &[String]) {
        let time = self.cells.first().is_some_and(|name| name == "time");
        self.cells.split_at(usize::from(time))
    }
}

/// Counts the rows of a block that are answered, with a field or a problem: all, or those up to
/// the first bad one where that ends the series.
pub(super) fn count(block: &Block, stop: bool, done: &mut Done) -> usize {
    let (rows, refused) = match block.bad.first() {
        Some((bad, _)) if stop => (bad + 1, 1),
        _ => (block.rows, block.bad.len()),
    };
    done.stopped = stop && refused > 0;
    done.counts.read += rows as u64;
    done.counts.refused += refused as u64;
    done.counts.answered += (rows - refused) as u64;
    rows
}

/// Goes through the rows of a block, as far as they [`count`].
fn each_row(
    block: &Block,
    stop: bool,
    done: &mut Done,
    mut write: impl FnMut(usize, Option<&[crate::document::Fault]>, &mut Done),
) {
    let mut bad = block.bad.iter().peekable();
    for row in 0..count(block, stop, done) {
        let faults = bad.next_if(|(own, _)| *own == row);
        write(row, faults.map(|(_, faults)| &faults[..]), done);
    }
}

/// The numbers of the answer to a row as text, nothing where there is none: those of the field
/// (0 to 5) and their uncertainties (6 to 11).
#[inline]
fn answers<'t>(texts: &'t mut Texts<12>, block: &Block, row: usize) -> [&'t [u8]; 12] {
    let standard = block.standard(row).unwrap_or(&MISSING);
    texts.of(std::array::from_fn(|i| match i.checked_sub(6) {
        None => block.field[i][row],
        Some(i) => standard[i],
    }))
}

/// A vector of an answer as JSON.
fn push_vector(out: &mut Vec<u8>, vector: &[&[u8]]) {
    for (i, text) in vector.iter().enumerate() {
        out.push(if i == 0 { b'[' } else { b',' });
        if text.is_empty() {
            out.extend_from_slice(b"null");
        } else {
            number::push(out, text);
        }
    }
    out.push(b']');
}

/// The uncertainties of an answer as JSON.
fn push_uncertainty(out: &mut Vec<u8>, block: &Block, row: usize, answers: &[&[u8]; 12]) {
    if block.standard(row).is_none() {
        out.extend_from_slice(b"null");
        return;
    }
    out.extend_from_slice(b"{\"e\":");
    push_vector(out, &answers[6..9]);
    out.extend_from_slice(b",\"b\":");
    push_vector(out, &answers[9..]);
    out.push(b'}');
}

/// The notices on an answer as a member after others, if there are any.
fn push_notices(out: &mut Vec<u8>, block: &Block, row: usize) {
    let codes = block.notices(row);
    if !codes.is_empty() {
        out.extend_from_slice(b",\"notices\":[\"");
        out.extend_from_slice(codes.join("\",\"").as_bytes());
        out.extend_from_slice(b"\"]");
    }
}

/// The notices on an answer as text: their codes with spaces between them.
pub(super) fn noted(block: &Block, row: usize) -> String {
    block.notices(row).join(" ")
}

/// The problem of a bad row, and the place for its number.
fn push_problem(done: &mut Done, row: usize, faults: &[crate::document::Fault]) {
    done.bytes.extend_from_slice(b"\"row\":");
    done.numbers.push((done.bytes.len(), row));
    done.bytes.extend_from_slice(b",\"problem\":");
    done.bytes
        .extend_from_slice(problem::as_json(faults).as_bytes());
    done.bytes.extend_from_slice(b"}\n");
}

/// NDJSON rows in their own text, e and b replaced.
pub(super) fn ndjson_in_place(
    text: &[u8],
    lines: &[ndjson::Line],
    block: &Block,
    stop: bool,
    done: &mut Done,
) {
    each_row(block, stop, done, |row, faults, done| {
        let line = &lines[row];
        let text = &text[line.from..line.from + line.length];
        if let Some(faults) = faults
            && !line.object
        {
            done.bytes.push(b'{');
            push_problem(done, row, faults);
            return;
        }
        let mut parts = [(line.e, 0), (line.b, 3), (line.uncertainty, 6)];
        parts.sort_unstable_by_key(|(span, _)| span.from);
        let mut texts = Texts::new();
        let answers = answers(&mut texts, block, row);
        let mut copied = 0;
        for (span, first) in parts.into_iter().filter(|(span, _)| !span.is_none()) {
            done.bytes
                .extend_from_slice(&text[copied..span.from as usize]);
            match first {
                _ if faults.is_some() => done.bytes.extend_from_slice(b"null"),
                6 => push_uncertainty(&mut done.bytes, block, row, &answers),
                _ => push_vector(&mut done.bytes, &answers[first..first + 3]),
            }
            copied = span.to as usize;
        }
        done.bytes.extend_from_slice(&text[copied..text.len() - 1]);
        match faults {
            None => {
                if line.uncertainty.is_none() && block.standard(row).is_some() {
                    done.bytes.extend_from_slice(b",\"uncertainty\":");
                    push_uncertainty(&mut done.bytes, block, row, &answers);
                }
                push_notices(&mut done.bytes, block, row);
                done.bytes.extend_from_slice(b"}\n");
            }
            Some(faults) => {
                done.bytes.push(b',');
                push_problem(done, row, faults);
            }
        }
    });
}

/// CSV rows in their own text, the fields of e and b replaced.
pub(super) fn csv_in_place(
    text: &[u8],
    lines: &[csv::Line],
    header: &Header,
    line_end: &[u8],
    block: &Block,
    stop: bool,
    done: &mut Done,
) {
    // In the order in which they stand in a row.
    let order: Vec<usize> = header.answers_in_order();
    each_row(block, stop, done, |row, faults, done| {
        let line = &lines[row];
        let out = &mut done.bytes;
        let mut texts = Texts::new();
        let answers = answers(&mut texts, block, row);
        if line.whole {
            let text = &text[line.from..line.from + line.length];
            let mut copied = 0;
            for i in &order {
                let span: Span = line.field[*i];
                match &text[copied..span.from as usize] {
                    // By far the most usual, and a copy of any length would cost more.
                    [comma] => out.push(*comma),
                    between => out.extend_from_slice(between),
                }
                number::push(out, answers[*i]);
                copied = span.to as usize;
            }
            out.extend_from_slice(&text[copied..]);
        } else {
            out.extend(std::iter::repeat_n(b',', header.names.len() - 1));
        }
        out.push(b',');
        for i in header.added.numbers() {
            number::push(out, answers[i]);
            out.push(b',');
        }
        if header.added.notices {
            if faults.is_none() {
                push_field(out, noted(block, row).as_bytes());
            }
            out.push(b',');
        }
        if let Some(faults) = faults {
            push_field(out, problem::as_text(faults).as_bytes());
        }
        out.extend_from_slice(line_end);
    });
}

/// Rows printed anew as NDJSON.
pub(super) fn ndjson(
    columns: &Columns,
    block: &Block,
    carried: &Carried,
    stop: bool,
    done: &mut Done,
) {
    let (time, kept) = columns.time_and_kept();
    let kept: Vec<Vec<u8>> = kept.iter().map(|name| json_text(name.as_bytes())).collect();
    each_row(block, stop, done, |row, faults, done| {
        let out = &mut done.bytes;
        let mut texts = Texts::new();
        let answers = answers(&mut texts, block, row);
        out.push(b'{');
        let name = |out: &mut Vec<u8>, name: &[u8]| {
            if out.last() != Some(&b'{') {
                out.push(b',');
            }
            out.extend_from_slice(name);
            out.push(b':');
        };
        if !time.is_empty()
            && let Some(cell) = carried.cell(row, 0)
        {
            name(out, b"\"time\"");
            match number::json(cell) {
                Some((_, length)) if length == cell.len() => out.extend_from_slice(cell),
                _ => out.extend_from_slice(&json_text(cell)),
            }
        }
        for (which, letter) in [b"\"e\"", b"\"b\""].into_iter().enumerate() {
            if columns.answers[which] {
                name(out, letter);
                match faults {
                    None => push_vector(out, &answers[3 * which..][..3]),
                    Some(_) => out.extend_from_slice(b"null"),
                }
            }
        }
        if columns.answers[2] || columns.answers[3] {
            name(out, b"\"uncertainty\"");
            match faults {
                None => push_uncertainty(out, block, row, &answers),
                Some(_) => out.extend_from_slice(b"null"),
            }
        }
        for (i, letter) in kept.iter().enumerate() {
            if let Some(cell) = carried.cell(row, time.len() + i) {
                name(out, letter);
                out.extend_from_slice(&json_text(cell));
            }
        }
        match faults {
            None => {
                push_notices(out, block, row);
                out.extend_from_slice(b"}\n");
            }
            Some(faults) => {
                out.push(b',');
                push_problem(done, row, faults);
            }
        }
    });
}

/// Rows printed anew as CSV.
pub(super) fn csv(
    columns: &Columns,
    block: &Block,
    carried: &Carried,
    stop: bool,
    done: &mut Done,
) {
    let (time, kept) = columns.time_and_kept();
    each_row(block, stop, done, |row, faults, done| {
        let out = &mut done.bytes;
        let cell = |out: &mut Vec<u8>, column: usize| {
            push_field(out, carried.cell(row, column).unwrap_or_default());
            out.push(b',');
        };
        let mut texts = Texts::new();
        let answers = answers(&mut texts, block, row);
        for column in 0..time.len() {
            cell(out, column);
        }
        for i in (0..12).filter(|i| columns.answers[i / 3]) {
            number::push(out, answers[i]);
            out.push(b',');
        }
        for column in 0..kept.len() {
            cell(out, time.len() + column);
        }
        if columns.notices {
            if faults.is_none() {
                push_field(out, noted(block, row).as_bytes());
            }
            out.push(b',');
        }
        if let Some(faults) = faults {
            push_field(out, problem::as_text(faults).as_bytes());
        }
        out.extend_from_slice(CRLF);
    });
}

/// A text as a JSON string; what is not UTF-8 is replaced.
fn json_text(text: &[u8]) -> Vec<u8> {
    serde_json::to_vec(&String::from_utf8_lossy(text)).expect("a text has a JSON form")
}
