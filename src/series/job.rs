//! A block of whole rows, answered on any thread by itself.

use std::sync::Arc;

use arrow_array::RecordBatch;
use arrow_schema::SchemaRef;
use bytes::Bytes;

use super::arrow::{Sheet, Table, answered_in_place};
use super::block::{Block, Takes};
use super::carry::Carried;
use super::header::Header;
use super::outlet::Done;
use super::print::{self, Columns};
use super::{Format, Series, csv, ndjson};

/// Bytes of a short row of text, which says how many a block may have.
pub(super) const ROW: usize = 96;

/// What is the same for all jobs of a series.
#[derive(Debug)]
pub(super) struct Plan {
    pub(super) series: Arc<Series>,
    pub(super) input: Input,
    /// How rows are answered that are not answered in place.
    pub(super) anew: Option<(Format, Columns)>,
}

/// How rows are read.
#[derive(Debug)]
pub(super) enum Input {
    Ndjson,
    /// With how its lines end.
    Csv(Header, &'static [u8]),
    /// With the schema of batches answered in place.
    Arrow(Table, SchemaRef),
}

/// A block of whole rows, to be answered on any thread.
#[derive(Debug)]
pub struct Job {
    pub(super) plan: Arc<Plan>,
    pub(super) rows: Rows,
    /// What the answer begins with.
    pub(super) preamble: Vec<u8>,
}

/// The rows of a job.
#[derive(Debug)]
pub(super) enum Rows {
    Text(Bytes),
    Batch(RecordBatch),
}

impl Job {
    /// How many bytes of rows it holds.
    pub fn bytes(&self) -> usize {
        match &self.rows {
            Rows::Text(text) => text.len(),
            Rows::Batch(batch) => batch.get_array_memory_size(),
        }
    }

    /// Answers the rows.
    pub fn run(self) -> Done {
        let mut done = Done {
            bytes: self.preamble,
            ..Done::default()
        };
        match self.rows {
            Rows::Text(text) => self.plan.text(&text, &mut done),
            Rows::Batch(batch) => self.plan.batch(&batch, &mut done),
        }
        done
    }
}

impl Plan {
    fn text(&self, text: &[u8], done: &mut Done) {
        let Plan {
            series,
            input,
            anew,
        } = self;
        done.bytes.reserve(text.len() + text.len() / 8);
        let mut block = Block::with_capacity(Takes::of(series), text.len() / ROW);
        let cells = anew.as_ref().map(|(_, columns)| &columns.cells[..]);
        let mut carried = Carried::new(cells.map_or(0, <[String]>::len));
        let stop = series.stop;
        match input {
            Input::Ndjson => {
                let mut reader = ndjson::Reader::new(series, cells);
                let lines = reader.read(text, &mut block, &mut carried);
                self.solve(&mut block);
                if anew.is_none() {
                    print::ndjson_in_place(text, &lines, &block, stop, done);
                }
            }
            Input::Csv(header, line_end) => {
                let reader = csv::Reader::new(series, header, carried.columns);
                let lines = reader.read(text, &mut block, &mut carried);
                self.solve(&mut block);
                if anew.is_none() {
                    print::csv_in_place(text, &lines, header, line_end, &block, stop, done);
                }
            }
            Input::Arrow(..) => unreachable!("its rows come in batches"),
        }
        self.print(block, &carried, done);
    }

    fn batch(&self, batch: &RecordBatch, done: &mut Done) {
        let Input::Arrow(table, schema) = &self.input else {
            unreachable!("batches come with their table");
        };
        let series = &self.series;
        let cells = self
            .anew
            .as_ref()
            .map_or(0, |(_, columns)| columns.cells.len());
        let (sheets, rows) = (table.open(batch, cells), batch.num_rows());
        let mut block = sheets.block(series, rows);
        self.solve(&mut block);
        if self.anew.is_none() {
            let sheet = Sheet::of(block, &Carried::new(0), series.stop, done);
            done.batch = Some(answered_in_place(batch, &table.header, schema, sheet));
        } else {
            self.print(block, &sheets.carried(rows), done);
        }
    }

    fn solve(&self, block: &mut Block) {
        block.solve(&self.series);
        let input = match self.input {
            Input::Ndjson => Format::Ndjson,
            Input::Csv(..) => Format::Csv,
            Input::Arrow(..) => Format::Arrow,
        };
        if !self.series.notices(input) {
            block.notices.clear();
        }
    }

    /// Prints the rows of a block in another format than theirs.
    fn print(&self, block: Block, carried: &Carried, done: &mut Done) {
        let stop = self.series.stop;
        match &self.anew {
            Some((Format::Ndjson, columns)) => print::ndjson(columns, &block, carried, stop, done),
            Some((Format::Csv, columns)) => print::csv(columns, &block, carried, stop, done),
            Some((Format::Arrow, columns)) => {
                let sheet = Sheet::of(block, carried, stop, done);
                done.batch = Some(sheet.batch(columns));
            }
            None => {}
        }
    }
}
