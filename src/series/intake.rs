//! Bytes of a series as they come, cut into jobs of whole rows.

use std::sync::Arc;

use crate::document::{Code, Fault, Node};

use super::arrow::{Frames, Table};
use super::cut::Cutter;
use super::header::Header;
use super::job::{Input, Job, Plan, Rows};
use super::print::Columns;
use super::run::BLOCK;
use super::{Format, Series, csv, uncertainty};

/// How much a series may hold at once.
#[derive(Clone, Copy, Debug)]
pub struct Limits {
    /// Longest row of text, bytes.
    pub row: usize,
    /// Largest batch of Arrow, bytes.
    pub batch: usize,
}

/// Why a series cannot go on.
#[derive(Clone, Debug)]
pub struct Refusal {
    /// What is wrong; places are names of columns.
    pub faults: Vec<Fault>,
}

/// Takes bytes and gives jobs.
#[derive(Debug)]
pub struct Intake {
    series: Arc<Series>,
    output: Format,
    limits: Limits,
    source: Source,
    /// Known once the header, or the first row, has come.
    plan: Option<Arc<Plan>>,
    /// What the answer begins with.
    preamble: Vec<u8>,
    begun: bool,
    /// Whether any job was given.
    given: bool,
    /// What is wrong with bytes taken, of which whole rows came before.
    refusal: Option<Refusal>,
}

/// What has come and is not yet cut off.
#[derive(Debug)]
enum Source {
    Text(Format, Cutter),
    Arrow(Box<Frames>),
}

const LF: &[u8] = b"\n";
const CRLF: &[u8] = b"\r\n";
/// The mark that some programs put before UTF-8.
const BOM: &[u8] = b"\xef\xbb\xbf";

impl Intake {
    /// Rows of one format, to be answered in another or the same.
    pub fn new(series: Arc<Series>, input: Format, output: Format, limits: Limits) -> Intake {
        let source = match input {
            Format::Ndjson | Format::Csv => Source::Text(input, Cutter::new(input == Format::Csv)),
            Format::Arrow => Source::Arrow(Box::new(Frames::new(limits.batch))),
        };
        Intake {
            series,
            output,
            limits,
            source,
            plan: None,
            preamble: Vec::new(),
            begun: false,
            given: false,
            refusal: None,
        }
    }

    /// Takes more bytes.
    pub fn push(&mut self, bytes: &[u8]) {
        match &mut self.source {
            Source::Text(_, cutter) => cutter.push(bytes),
            Source::Arrow(frames) if self.refusal.is_none() => {
                self.refusal = frames.push(bytes).map_err(Refusal::of).err();
            }
            Source::Arrow(_) => {}
        }
    }

    /// Whether enough waits for a job of the usual size.
    pub fn is_full(&self) -> bool {
        match &self.source {
            Source::Text(_, cutter) => cutter.waiting() >= BLOCK,
            Source::Arrow(frames) => frames.is_ready() || frames.waits() || self.refusal.is_some(),
        }
    }

    /// Whether the next job has to be unpacked first, which takes as long as to answer it.
    pub fn is_packed(&self) -> bool {
        matches!(&self.source, Source::Arrow(frames) if frames.waits() && !frames.is_ready())
    }

    fn unpack(&mut self) {
        if let (Source::Arrow(frames), None) = (&mut self.source, &self.refusal) {
            self.refusal = frames.unpack().map_err(Refusal::of).err();
        }
    }

    /// The next job of whole rows that wait, if they have at least so many bytes; batches are jobs
    /// as they are.
    ///
    /// # Errors
    /// The header is wrong, a row or batch is too long, or the bytes are none of the format.
    pub fn job(&mut self, least: usize) -> Result<Option<Job>, Refusal> {
        self.unpack();
        let begun = self.begin(false)?;
        let rows = match &mut self.source {
            Source::Text(_, cutter) => {
                let whole = if begun { cutter.whole() } else { 0 };
                if whole == 0 {
                    return self.not_too_long().map(|()| None);
                }
                (whole >= least).then(|| Rows::Text(cutter.cut()))
            }
            Source::Arrow(frames) => {
                match (begun.then(|| frames.next()).flatten(), &self.refusal) {
                    (None, Some(refusal)) => return Err(refusal.clone()),
                    (batch, _) => batch.map(Rows::Batch),
                }
            }
        };
        Ok(rows.and_then(|rows| self.of(rows)))
    }

    /// The next job once all bytes have come, until there is none; the last row of a text need not
    /// end with a line.
    ///
    /// # Errors
    /// As for [`job`](Self::job), or the bytes end too early.
    pub fn last(&mut self) -> Result<Option<Job>, Refusal> {
        self.unpack();
        self.begin(true)?;
        let rows = match &mut self.source {
            Source::Text(_, cutter) => {
                let text = cutter.rest();
                let more = !text.is_empty() || !self.preamble.is_empty();
                // Also a stream of batches without rows has its columns.
                let columns = self.output == Format::Arrow && !self.given;
                (more || columns).then_some(Rows::Text(text))
            }
            Source::Arrow(frames) => match frames.next() {
                Some(batch) => Some(Rows::Batch(batch)),
                None => {
                    if let Some(refusal) = &self.refusal {
                        return Err(refusal.clone());
                    }
                    frames.end().map_err(Refusal::of)?;
                    let schema = frames.schema().filter(|_| !self.given);
                    schema.map(|schema| Rows::Batch(arrow_array::RecordBatch::new_empty(schema)))
                }
            },
        };
        Ok(rows.and_then(|rows| self.of(rows)))
    }

    fn of(&mut self, rows: Rows) -> Option<Job> {
        self.given = true;
        let plan = self.plan.clone()?;
        Some(Job {
            plan,
            rows,
            preamble: std::mem::take(&mut self.preamble),
        })
    }

    fn not_too_long(&self) -> Result<(), Refusal> {
        let (Source::Text(_, cutter), most) = (&self.source, self.limits.row) else {
            return Ok(());
        };
        let length = cutter.unfinished();
        if length <= most {
            return Ok(());
        }
        let detail = format!(
            "a row has more than {length} bytes without an end; this service reads rows of at most \
             {most} bytes"
        );
        Err(Refusal::of(Fault::whole(Code::RowTooLong, detail)))
    }

    /// Reads what must be known before the first row; whether it is.
    fn begin(&mut self, all: bool) -> Result<bool, Refusal> {
        if self.plan.is_some() {
            return Ok(true);
        }
        if let (Source::Text(_, cutter), false) = (&mut self.source, self.begun) {
            if cutter.waiting() < BOM.len() && !all {
                return Ok(false);
            }
            cutter.strip(BOM);
            self.begun = true;
        }
        let read = match self.source {
            Source::Text(Format::Csv, _) => self.begin_csv(all)?,
            Source::Text(..) => self.begin_ndjson(all),
            Source::Arrow(_) => self.begin_arrow()?,
        };
        let plan = read.map(|(input, anew)| Plan {
            series: self.series.clone(),
            input,
            anew: anew.map(|columns| (self.output, columns)),
        });
        if let Some(Plan {
            anew: Some((Format::Csv, columns)),
            ..
        }) = &plan
        {
            self.preamble = columns.header();
        }
        self.plan = plan.map(Arc::new);
        Ok(self.plan.is_some())
    }

    fn begin_csv(&mut self, all: bool) -> Result<Option<(Input, Option<Columns>)>, Refusal> {
        let Source::Text(_, cutter) = &mut self.source else {
            return Ok(None);
        };
        let row = match cutter.cut_first() {
            Some(row) => row,
            None if all => cutter.rest(),
            None => return Ok(None),
        };
        let (row, line_end) = if let Some(row) = row.strip_suffix(CRLF) {
            (row, CRLF)
        } else {
            (row.strip_suffix(LF).unwrap_or(&row), LF)
        };
        let names = csv::names(row).map_err(Refusal::of)?;
        let anew = self.output != Format::Csv;
        let cells = self.cells(anew, |name| names.iter().any(|own| own == name));
        let header =
            Header::read(names, &self.series, &cells).map_err(|faults| Refusal { faults })?;
        if !anew {
            let mut added = String::new();
            for name in header.added.names() {
                added += ",";
                added += name;
            }
            self.preamble = [row, added.as_bytes(), line_end].concat();
        }
        let columns = anew.then(|| Columns::of(&header, cells));
        Ok(Some((Input::Csv(header, line_end), columns)))
    }

    /// In another format the answer has the columns that the first row asks for.
    fn begin_ndjson(&mut self, all: bool) -> Option<(Input, Option<Columns>)> {
        let Source::Text(_, cutter) = &mut self.source else {
            return None;
        };
        if self.output == Format::Ndjson {
            return Some((Input::Ndjson, None));
        }
        let first = cutter.first(all)?.to_vec();
        let node = Node::from_json(first.trim_ascii());
        let has = |name: &str| match &node {
            Ok(Node::Object(members)) => members.iter().any(|(own, _)| own == name),
            _ => false,
        };
        let neither = !has("e") && !has("b");
        let uncertain = self.series.uncertain || node.as_ref().is_ok_and(uncertainty::is_stated);
        let answers = [
            has("e") || neither,
            has("b") || neither,
            uncertain,
            uncertain,
        ];
        let cells = self.cells(true, has);
        let columns = Columns {
            answers,
            notices: self.series.notices(Format::Ndjson),
            cells,
        };
        Some((Input::Ndjson, Some(columns)))
    }

    fn begin_arrow(&mut self) -> Result<Option<(Input, Option<Columns>)>, Refusal> {
        let Source::Arrow(frames) = &mut self.source else {
            return Ok(None);
        };
        let Some(schema) = frames.schema() else {
            // What came before the schema was none.
            return self.refusal.clone().map_or(Ok(None), Err);
        };
        let anew = self.output != Format::Arrow;
        let cells = self.cells(anew, |name| schema.index_of(name).is_ok());
        let table =
            Table::read(&schema, &self.series, &cells).map_err(|faults| Refusal { faults })?;
        let columns = anew.then(|| Columns::of(&table.header, cells));
        let in_place = table.answered(&schema);
        Ok(Some((Input::Arrow(table, in_place), columns)))
    }

    /// What goes along to another format.
    fn cells(&self, anew: bool, has: impl Fn(&str) -> bool) -> Vec<String> {
        if !anew {
            return Vec::new();
        }
        let time = has("time").then(|| "time".to_owned());
        let kept = self.series.keep.iter().filter(|name| *name != "time");
        time.into_iter().chain(kept.cloned()).collect()
    }
}

impl Refusal {
    pub(super) fn of(fault: Fault) -> Refusal {
        Refusal {
            faults: vec![fault],
        }
    }
}
