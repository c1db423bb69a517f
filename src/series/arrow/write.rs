//! From solved blocks to batches.

use std::sync::Arc;

use arrow_array::{Array, ArrayRef, Float64Array, RecordBatch, StringArray};
use arrow_buffer::NullBuffer;
use arrow_schema::{Field, Schema, SchemaRef};

use super::super::block::Block;
use super::super::carry::Carried;
use super::super::header::Header;
use super::super::names::COLUMNS;
use super::super::outlet::Done;
use super::super::print::{Columns, each_row, noted};
use super::super::problem;

/// Answers gathered row by row for one batch.
#[derive(Debug, Default)]
pub(in crate::series) struct Sheet {
    /// The field, and its uncertainties.
    answers: [Vec<f64>; 12],
    notices: Vec<Option<String>>,
    problems: Vec<Option<String>>,
    cells: Vec<Vec<Option<String>>>,
}

impl Sheet {
    /// With room for so many rows.
    pub(in crate::series) fn with_rows(rows: usize) -> Sheet {
        Sheet {
            answers: std::array::from_fn(|_| Vec::with_capacity(rows)),
            problems: Vec::with_capacity(rows),
            ..Sheet::default()
        }
    }

    /// Adds the rows of a block, with what goes along from another format.
    pub(in crate::series) fn add(
        &mut self,
        block: Block,
        carried: &Carried,
        stop: bool,
        done: &mut Done,
    ) {
        self.cells.resize_with(carried.columns, Vec::new);
        let before = done.counts.read;
        each_row(&block, stop, done, |row, faults, _| {
            for (i, cells) in self.cells.iter_mut().enumerate() {
                let cell = carried.cell(row, i);
                cells.push(cell.map(|text| String::from_utf8_lossy(text).into_owned()));
            }
            if !block.notices.is_empty() {
                self.notices.resize(self.problems.len(), None);
                let codes = noted(&block, row);
                let given = faults.is_none() && !codes.is_empty();
                self.notices.push(given.then_some(codes));
            }
            self.problems.push(faults.map(problem::as_text));
        });
        let rows = (done.counts.read - before) as usize;
        if !block.standard.is_empty() || !self.answers[6].is_empty() {
            // Rows before these had none.
            let before = before_here(&self.answers);
            for (i, all) in self.answers[6..].iter_mut().enumerate() {
                all.resize(before, f64::NAN);
                let standard = |row| block.standard(row).map_or(f64::NAN, |known| known[i]);
                all.extend((0..rows).map(standard));
            }
        }
        for (all, column) in self.answers.iter_mut().zip(block.field) {
            all.extend_from_slice(&column[..rows]);
        }
    }

    /// The rows as a batch of columns that another format does not have.
    pub(in crate::series) fn batch(self, columns: &Columns) -> RecordBatch {
        let (time, _) = columns.time_and_kept();
        let mut cells = columns.cells.iter().zip(self.cells);
        let text = |(name, cells): (&String, Vec<Option<String>>)| {
            (name.clone(), Arc::new(StringArray::from(cells)) as ArrayRef)
        };
        let mut all: Vec<(String, ArrayRef)> = cells.by_ref().take(time.len()).map(text).collect();
        let rows = self.problems.len();
        for (i, mut column) in self.answers.into_iter().enumerate() {
            if columns.answers[i / 3] {
                column.resize(rows, f64::NAN);
                let (name, _) = COLUMNS[1 + i];
                all.push((name.to_owned(), doubles(column)));
            }
        }
        all.extend(cells.map(text));
        if columns.notices {
            all.push(("notices".to_owned(), texts(self.notices, rows)));
        }
        all.push((
            "problem".to_owned(),
            Arc::new(StringArray::from(self.problems)),
        ));
        let fields: Vec<Field> = all
            .iter()
            .map(|(name, column)| Field::new(name, column.data_type().clone(), true))
            .collect();
        let columns = all.into_iter().map(|(_, column)| column).collect();
        RecordBatch::try_new(Arc::new(Schema::new(fields)), columns)
            .expect("columns of one length and the types they say")
    }
}

/// The batch with its field replaced, and its problems; the other columns are shared.
pub(in crate::series) fn answered_in_place(
    batch: &RecordBatch,
    header: &Header,
    schema: &SchemaRef,
    sheet: Sheet,
) -> RecordBatch {
    let rows = sheet.problems.len();
    let mut columns: Vec<ArrayRef> = batch
        .columns()
        .iter()
        .map(|column| {
            if column.len() == rows {
                column.clone()
            } else {
                column.slice(0, rows)
            }
        })
        .collect();
    let mut added = Vec::new();
    for (i, mut column) in sheet.answers.into_iter().enumerate() {
        let place = header.place_of(i);
        if place.is_none() && header.added.numbers().all(|added| added != i) {
            continue;
        }
        column.resize(rows, f64::NAN);
        match place {
            Some(place) => columns[place] = doubles(column),
            None => added.push(doubles(column)),
        }
    }
    columns.extend(added);
    if header.added.notices {
        columns.push(texts(sheet.notices, rows));
    }
    columns.push(Arc::new(StringArray::from(sheet.problems)));
    RecordBatch::try_new(schema.clone(), columns)
        .expect("columns of one length and the types of the schema")
}

/// Texts of so many rows, of which the last ones may be missing.
fn texts(mut texts: Vec<Option<String>>, rows: usize) -> ArrayRef {
    texts.resize(rows, None);
    Arc::new(StringArray::from(texts))
}

/// How many rows a sheet has so far.
fn before_here(answers: &[Vec<f64>; 12]) -> usize {
    answers[0].len()
}

/// Numbers of which NaN is missing.
fn doubles(values: Vec<f64>) -> ArrayRef {
    let known = values.iter().any(|x| x.is_nan()).then(|| {
        let valid: NullBuffer = values
            .iter()
            .map(|x| !x.is_nan())
            .collect::<Vec<bool>>()
            .into();
        valid
    });
    Arc::new(Float64Array::new(values.into(), known))
}
