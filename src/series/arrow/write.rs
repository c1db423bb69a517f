//! From solved blocks to batches.

use std::sync::Arc;

use arrow_array::{Array, ArrayRef, Float64Array, RecordBatch, StringArray};
use arrow_buffer::NullBuffer;
use arrow_schema::{Field, Schema, SchemaRef};

use super::super::block::Block;
use super::super::carry::Carried;
use super::super::column::Column;
use super::super::header::Header;
use super::super::names::COLUMNS;
use super::super::outlet::Done;
use super::super::print::{Columns, count, noted};
use super::super::problem;

/// The answers of a block, as far as a bad row did not end it.
#[derive(Debug)]
pub(in crate::series) struct Sheet {
    rows: usize,
    /// The field, and its uncertainties where there are any.
    answers: [Column; 12],
    /// The rows that have some.
    notices: Vec<(usize, String)>,
    problems: Vec<(usize, String)>,
    cells: Vec<Vec<Option<String>>>,
}

impl Sheet {
    /// Takes the rows of a block, with what goes along from another format.
    pub(in crate::series) fn of(
        block: Block,
        carried: &Carried,
        stop: bool,
        done: &mut Done,
    ) -> Sheet {
        let rows = count(&block, stop, done);
        let cell = |row, i| {
            let text = carried.cell(row, i)?;
            Some(String::from_utf8_lossy(text).into_owned())
        };
        let cells = (0..carried.columns).map(|i| (0..rows).map(|row| cell(row, i)).collect());
        let cells = cells.collect();
        let bad = block.bad.iter().take_while(|(row, _)| *row < rows);
        let problems = bad.map(|(row, faults)| (*row, problem::as_text(faults)));
        let problems = problems.collect();
        let is_good = |row: &usize| {
            block
                .bad
                .binary_search_by_key(row, |(own, _)| *own)
                .is_err()
        };
        let notices = block.notices.iter().map(|(row, _)| *row);
        let notices = notices.take_while(|row| *row < rows).filter(is_good);
        let notices = notices.map(|row| (row, noted(&block, row))).collect();
        let mut answers: [Column; 12] = Default::default();
        if !block.standard.is_empty() {
            for (i, all) in answers[6..].iter_mut().enumerate() {
                let standard = |row| block.standard(row).map_or(f64::NAN, |known| known[i]);
                *all = (0..rows).map(standard).collect::<Vec<_>>().into();
            }
        }
        for (all, column) in answers.iter_mut().zip(block.field) {
            *all = column;
        }
        Sheet {
            rows,
            answers,
            notices,
            problems,
            cells,
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
        let rows = self.rows;
        for (i, column) in self.answers.into_iter().enumerate() {
            if columns.answers[i / 3] {
                let (name, _) = COLUMNS[1 + i];
                all.push((name.to_owned(), doubles(column, rows)));
            }
        }
        all.extend(cells.map(text));
        if columns.notices {
            all.push(("notices".to_owned(), texts(self.notices, rows)));
        }
        all.push(("problem".to_owned(), texts(self.problems, rows)));
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
    let rows = sheet.rows;
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
    for (i, column) in sheet.answers.into_iter().enumerate() {
        let place = header.place_of(i);
        if place.is_none() && header.added.numbers().all(|added| added != i) {
            continue;
        }
        match place {
            Some(place) => columns[place] = doubles(column, rows),
            None => added.push(doubles(column, rows)),
        }
    }
    columns.extend(added);
    if header.added.notices {
        columns.push(texts(sheet.notices, rows));
    }
    columns.push(texts(sheet.problems, rows));
    RecordBatch::try_new(schema.clone(), columns)
        .expect("columns of one length and the types of the schema")
}

/// A column of so many rows, of which some have a text.
fn texts(given: Vec<(usize, String)>, rows: usize) -> ArrayRef {
    if given.is_empty() {
        return Arc::new(StringArray::new_null(rows));
    }
    let mut texts = vec![None; rows];
    for (row, text) in given {
        texts[row] = Some(text);
    }
    Arc::new(StringArray::from(texts))
}

/// So many numbers, of which NaN is missing, as are those that a column does not have.
fn doubles(mut values: Column, rows: usize) -> ArrayRef {
    if values.len() != rows {
        values.own().resize(rows, f64::NAN);
    }
    // One pass without a branch, since most columns have none.
    let missing = values.iter().filter(|x| x.is_nan()).count() > 0;
    let known = missing.then(|| values.iter().map(|x| !x.is_nan()).collect::<NullBuffer>());
    Arc::new(Float64Array::new(values.into(), known))
}
