//! From the columns of a batch to blocks of rows.

use std::sync::Arc;

use arrow_array::cast::AsArray;
use arrow_array::types::Float64Type;
use arrow_array::{Array, ArrayRef, RecordBatch};
use arrow_cast::display::{ArrayFormatter, FormatOptions};
use arrow_schema::{DataType, Field, Schema, SchemaRef, TimeUnit};

use crate::document::{Code, Fault, Path};
use crate::frames::{Clock, Time};

use super::super::Series;
use super::super::block::{Block, Takes};
use super::super::carry::Carried;
use super::super::column::Column;
use super::super::csv;
use super::super::header::Header;
use super::super::names::Role;
use super::super::uncertainty;

/// The columns of a stream of batches, and what they are for.
#[derive(Clone, Debug)]
pub(in crate::series) struct Table {
    pub(in crate::series) header: Header,
}

/// The columns of one batch as far as they count.
pub(in crate::series) struct Sheets {
    columns: Vec<(Role, ArrayRef)>,
    cells: Vec<Option<ArrayRef>>,
}

impl Table {
    /// Looks at the schema; `cells` names the columns that go along to another format.
    ///
    /// # Errors
    /// Every fault found in it.
    pub(in crate::series) fn read(
        schema: &Schema,
        series: &Series,
        cells: &[String],
    ) -> Result<Table, Vec<Fault>> {
        let names = schema.fields().iter().map(|field| field.name().clone());
        let header = Header::read(names.collect(), series, cells)?;
        let mut faults = Vec::new();
        for (field, column) in schema.fields().iter().zip(&header.columns) {
            let (kind, Some(role)) = (field.data_type(), column.role) else {
                continue;
            };
            let (right, expected) = match (role, series.clock) {
                (Role::Time, Clock::Calendar) => {
                    let expected = "a timestamp with a time zone, or RFC 3339 as text";
                    let zoned = matches!(kind, DataType::Timestamp(_, Some(_)));
                    (zoned || kind.is_string(), expected)
                }
                _ => (kind.is_numeric(), "numbers, best float64"),
            };
            if right {
                continue;
            }
            let detail = format!("expected {expected}, and the column is of {kind}");
            let path = Path::default().field(field.name());
            faults.push(Fault::at(&path, Code::WrongType, detail));
        }
        if faults.is_empty() {
            Ok(Table { header })
        } else {
            Err(faults)
        }
    }

    /// The schema of batches answered in place.
    pub(in crate::series) fn answered(&self, schema: &Schema) -> SchemaRef {
        let mut fields: Vec<Field> = schema
            .fields()
            .iter()
            .map(|field| (**field).clone())
            .collect();
        for (field, column) in fields.iter_mut().zip(&self.header.columns) {
            if let Some(Role::Field(_) | Role::Uncertainty(_)) = column.role {
                let doubles = field.clone().with_data_type(DataType::Float64);
                *field = doubles.with_nullable(true);
            }
        }
        let added = self.header.added;
        for (i, name) in added.names().enumerate() {
            let number = i < added.numbers().count();
            let kind = if number {
                DataType::Float64
            } else {
                DataType::Utf8
            };
            fields.push(Field::new(name, kind, true));
        }
        Arc::new(Schema::new_with_metadata(fields, schema.metadata().clone()))
    }

    /// The columns of a batch that count, their numbers as doubles.
    pub(in crate::series) fn open(&self, batch: &RecordBatch, cells: usize) -> Sheets {
        let mut sheets = Sheets {
            columns: Vec::new(),
            cells: vec![None; cells],
        };
        for (what, column) in self.header.columns.iter().zip(batch.columns()) {
            match what.role {
                Some(Role::Time) => sheets.columns.push((Role::Time, column.clone())),
                Some(role) => {
                    let doubles = arrow_cast::cast(column, &DataType::Float64);
                    let doubles = doubles.expect("every type of number becomes a double");
                    sheets.columns.push((role, doubles));
                }
                None => {}
            }
            if let Some(cell) = what.cell {
                sheets.cells[cell] = Some(column.clone());
            }
        }
        sheets
    }
}

impl Sheets {
    /// The rows as a block.
    pub(in crate::series) fn block(&self, series: &Series, rows: usize) -> Block {
        let mut block = Block {
            rows,
            ..Block::default()
        };
        let uncertain = [0, 3].map(|first| {
            let wanted = Role::Uncertainty(first);
            self.columns.iter().any(|(role, _)| *role == wanted)
        });
        let mut standard: [Column; 6] = Default::default();
        for (role, column) in &self.columns {
            let place = match role {
                Role::Field(i) => &mut block.field[*i],
                Role::Velocity(i) => &mut block.velocity[*i],
                Role::Quaternion(i) => &mut block.quaternion[*i],
                Role::Angle => &mut block.angle,
                Role::Uncertainty(i) => &mut standard[*i],
                Role::Time => {
                    read_times(column, series.clock, &mut block);
                    continue;
                }
            };
            let column = column.as_primitive::<Float64Type>();
            *place = Column::Shared(column.values().clone());
            if let Some(nulls) = column.nulls() {
                let missing = (0..rows).filter(|row| nulls.is_null(*row));
                missing.for_each(|row| place.own()[row] = f64::NAN);
            }
        }
        let takes = Takes::of(series);
        let wanted = [
            (true, &mut block.field[..]),
            (takes.velocity, &mut block.velocity),
            (takes.quaternion, &mut block.quaternion),
            (takes.angle, std::slice::from_mut(&mut block.angle)),
            (uncertain != [false; 2], &mut standard),
        ];
        for (_, columns) in wanted.into_iter().filter(|(wanted, _)| *wanted) {
            let absent = columns.iter_mut().filter(|column| column.is_empty());
            absent.for_each(|column| *column = Column::missing(rows));
        }
        for row in (0..rows).filter(|_| uncertain != [false; 2]) {
            let at = |columns: &[Column; 6]| columns.each_ref().map(|column| column[row]);
            match uncertainty::of_columns(&at(&block.field), &at(&standard), uncertain) {
                Ok(found) => block.uncertain.extend(found.map(|found| (row, found))),
                Err(faults) => block.refuse(row, faults),
            }
        }
        block
    }

    /// What goes along to another format.
    pub(in crate::series) fn carried(&self, rows: usize) -> Carried {
        let mut carried = Carried::new(self.cells.len());
        let options = FormatOptions::default();
        let formatters: Vec<Option<ArrayFormatter>> = self
            .cells
            .iter()
            .map(|cell| ArrayFormatter::try_new(cell.as_ref()?, &options).ok())
            .collect();
        for row in 0..rows {
            for (cell, formatter) in self.cells.iter().zip(&formatters) {
                let given = cell.as_ref().is_some_and(|cell| cell.is_valid(row));
                let text = formatter.as_ref().filter(|_| given);
                let text = text.and_then(|text| text.value(row).try_to_string().ok());
                carried.push(text.as_ref().map(String::as_bytes));
            }
        }
        carried
    }
}

/// Reads when the rows of a block were taken.
fn read_times(column: &ArrayRef, clock: Clock, block: &mut Block) {
    let text = match column.data_type() {
        DataType::Timestamp(unit, _) => {
            let ticks = arrow_cast::cast(column, &DataType::Int64);
            let Ok(ticks) = ticks else { return };
            let ticks = ticks.as_primitive::<arrow_array::types::Int64Type>();
            let second = match unit {
                TimeUnit::Second => 1,
                TimeUnit::Millisecond => 1_000,
                TimeUnit::Microsecond => 1_000_000,
                TimeUnit::Nanosecond => 1_000_000_000,
            };
            let times = ticks.iter().map(|t| t.map(|t| Time::from_ticks(t, second)));
            block.time = times.collect();
            return;
        }
        kind if kind.is_numeric() => {
            let seconds = arrow_cast::cast(column, &DataType::Float64);
            let Ok(seconds) = seconds else { return };
            let seconds = seconds.as_primitive::<Float64Type>();
            for (row, seconds) in seconds.iter().enumerate() {
                let seconds = seconds.filter(|seconds| !seconds.is_nan());
                let time = seconds.map(|seconds| {
                    Time::from_seconds(seconds)
                        .ok_or_else(|| format!("{seconds} s is past 9e15 s, the largest time kept"))
                });
                push_time(block, row, time);
            }
            return;
        }
        _ => arrow_cast::cast(column, &DataType::Utf8),
    };
    let Ok(text) = text else { return };
    for (row, text) in text.as_string::<i32>().iter().enumerate() {
        let text = text.map(str::trim).filter(|text| !text.is_empty());
        push_time(
            block,
            row,
            text.map(|text| csv::time(text.as_bytes(), clock)),
        );
    }
}

fn push_time(block: &mut Block, row: usize, time: Option<Result<Time, String>>) {
    let time = time.transpose().unwrap_or_else(|detail| {
        let path = Path::default().field("time");
        let fault = Fault::at(&path, Code::WrongTime, detail);
        block.bad.push((row, vec![fault]));
        None
    });
    block.time.push(time);
}
