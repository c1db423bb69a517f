//! Bytes of a series as they come, cut into jobs of whole rows.

use std::sync::Arc;

use bytes::Bytes;

use crate::document::{Code, Fault, Node};

use super::block::Block;
use super::carry::Carried;
use super::cut::Cutter;
use super::header::Header;
use super::outlet::Done;
use super::print::{self, Columns};
use super::{Format, Series, csv, ndjson};

/// How much a series may hold at once.
#[derive(Clone, Copy, Debug)]
pub struct Limits {
    /// Longest row, bytes.
    pub row: usize,
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
    input: Format,
    output: Format,
    limits: Limits,
    cutter: Cutter,
    /// Known once the header, or the first row, has come.
    plan: Option<Arc<Plan>>,
    /// What the answer begins with.
    preamble: Vec<u8>,
    begun: bool,
}

/// What is the same for all jobs of a series.
#[derive(Debug)]
struct Plan {
    series: Arc<Series>,
    input: Input,
    /// `None` when rows are answered in their own text.
    anew: Option<(Format, Columns)>,
}

#[derive(Debug)]
enum Input {
    Ndjson,
    Csv(Header, &'static [u8]),
}

/// A block of whole rows, to be answered on any thread.
#[derive(Debug)]
pub struct Job {
    plan: Arc<Plan>,
    text: Bytes,
    preamble: Vec<u8>,
}

const LF: &[u8] = b"\n";
const CRLF: &[u8] = b"\r\n";

impl Intake {
    /// Rows of one format, to be answered in another or the same.
    pub fn new(series: Arc<Series>, input: Format, output: Format, limits: Limits) -> Intake {
        Intake {
            series,
            input,
            output,
            limits,
            cutter: Cutter::new(input == Format::Csv),
            plan: None,
            preamble: Vec::new(),
            begun: false,
        }
    }

    /// Takes more bytes.
    pub fn push(&mut self, bytes: &[u8]) {
        self.cutter.push(bytes);
    }

    /// How many bytes wait to be cut off.
    pub fn waiting(&self) -> usize {
        self.cutter.waiting()
    }

    /// A job of all whole rows that wait, if they have at least so many bytes.
    ///
    /// # Errors
    /// The header is wrong, or a row is too long.
    pub fn job(&mut self, least: usize) -> Result<Option<Job>, Refusal> {
        if !self.begin(false)? {
            return self.not_too_long().map(|()| None);
        }
        let whole = self.cutter.whole();
        if whole == 0 {
            return self.not_too_long().map(|()| None);
        }
        if whole < least {
            return Ok(None);
        }
        let text = self.cutter.cut();
        Ok(self.of(text))
    }

    /// The last job, once all bytes have come; the last row need not end with a line.
    ///
    /// # Errors
    /// The header is wrong, or missing.
    pub fn last(&mut self) -> Result<Option<Job>, Refusal> {
        self.begin(true)?;
        let text = self.cutter.rest();
        if text.is_empty() && self.preamble.is_empty() {
            return Ok(None);
        }
        Ok(self.of(text))
    }

    fn of(&mut self, text: Bytes) -> Option<Job> {
        let plan = self.plan.clone()?;
        Some(Job {
            plan,
            text,
            preamble: std::mem::take(&mut self.preamble),
        })
    }

    fn not_too_long(&self) -> Result<(), Refusal> {
        let (length, most) = (self.cutter.unfinished(), self.limits.row);
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
        if !self.begun {
            if self.cutter.waiting() < BOM.len() && !all {
                return Ok(false);
            }
            self.cutter.strip(BOM);
            self.begun = true;
        }
        let plan = match self.input {
            Format::Ndjson => self.begin_ndjson(all),
            Format::Csv => self.begin_csv(all)?,
        };
        self.plan = plan.map(Arc::new);
        Ok(self.plan.is_some())
    }

    fn begin_csv(&mut self, all: bool) -> Result<Option<Plan>, Refusal> {
        let row = match self.cutter.cut_first() {
            Some(row) => row,
            None if all => self.cutter.rest(),
            None => return Ok(None),
        };
        let (row, line_end) = if let Some(row) = row.strip_suffix(CRLF) {
            (row, CRLF)
        } else {
            (row.strip_suffix(LF).unwrap_or(&row), LF)
        };
        let names = csv::names(row).map_err(Refusal::of)?;
        let cells = match self.output {
            Format::Csv => Vec::new(),
            Format::Ndjson => self.cells(names.iter().any(|name| name == "time")),
        };
        let header =
            Header::read(names, &self.series, &cells).map_err(|faults| Refusal { faults })?;
        let anew = (self.output != Format::Csv).then(|| {
            let field = [0, 3].map(|first| header.has_field(first));
            (
                self.output,
                Columns {
                    field,
                    cells,
                    line_end,
                },
            )
        });
        if anew.is_none() {
            self.preamble = [row, b",problem", line_end].concat();
        }
        Ok(Some(Plan {
            series: self.series.clone(),
            input: Input::Csv(header, line_end),
            anew,
        }))
    }

    /// In another format the answer has the columns that the first row asks for.
    fn begin_ndjson(&mut self, all: bool) -> Option<Plan> {
        let mut anew = None;
        if self.output != Format::Ndjson {
            let first = self.cutter.first(all)?.to_vec();
            let node = Node::from_json(first.trim_ascii());
            let has = |name: &str| match &node {
                Ok(Node::Object(members)) => members.iter().any(|(own, _)| own == name),
                _ => false,
            };
            let neither = !has("e") && !has("b");
            let field = [has("e") || neither, has("b") || neither];
            let cells = self.cells(has("time"));
            let columns = Columns {
                field,
                cells,
                line_end: CRLF,
            };
            self.preamble = columns.header();
            anew = Some((self.output, columns));
        }
        Some(Plan {
            series: self.series.clone(),
            input: Input::Ndjson,
            anew,
        })
    }

    /// What goes along to another format.
    fn cells(&self, time: bool) -> Vec<String> {
        let time = time.then(|| "time".to_owned());
        let kept = self.series.keep.iter().filter(|name| *name != "time");
        time.into_iter().chain(kept.cloned()).collect()
    }
}

/// The mark that some programs put before UTF-8.
const BOM: &[u8] = b"\xef\xbb\xbf";

impl Refusal {
    pub(super) fn of(fault: Fault) -> Refusal {
        Refusal {
            faults: vec![fault],
        }
    }
}

impl Job {
    /// How many bytes of rows it holds.
    pub fn bytes(&self) -> usize {
        self.text.len()
    }

    /// Answers the rows.
    pub fn run(self) -> Done {
        let Plan {
            series,
            input,
            anew,
        } = &*self.plan;
        let mut done = Done {
            bytes: self.preamble,
            ..Done::default()
        };
        done.bytes.reserve(self.text.len() + self.text.len() / 8);
        let mut block = Block::default();
        let cells = anew.as_ref().map_or(0, |(_, columns)| columns.cells.len());
        let mut carried = Carried::new(cells);
        let (text, stop) = (&self.text[..], series.stop);
        match input {
            Input::Ndjson => {
                let mut reader =
                    ndjson::Reader::new(series, anew.as_ref().map(|(_, c)| &c.cells[..]));
                let lines = reader.read(text, &mut block, &mut carried);
                block.solve(series);
                if anew.is_none() {
                    print::ndjson_in_place(text, &lines, &block, stop, &mut done);
                }
            }
            Input::Csv(header, line_end) => {
                let reader = csv::Reader::new(series, header, cells);
                let lines = reader.read(text, &mut block, &mut carried);
                block.solve(series);
                if anew.is_none() {
                    let lines = &lines[..];
                    print::csv_in_place(text, lines, header, line_end, &block, stop, &mut done);
                }
            }
        }
        match anew {
            Some((Format::Ndjson, columns)) => {
                print::ndjson(columns, &block, &carried, stop, &mut done);
            }
            Some((Format::Csv, columns)) => {
                print::csv(columns, &block, &carried, stop, &mut done);
            }
            None => {}
        }
        done
    }
}
