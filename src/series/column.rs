//! A column of numbers: the series' own, or shared with the batch that it came in.

use std::ops::Deref;

use arrow_buffer::ScalarBuffer;

/// Doubles of which NaN is missing.
#[derive(Debug)]
pub(super) enum Column {
    /// In memory of its own.
    Own(Vec<f64>),
    /// In that of a batch, which others may read too.
    Shared(ScalarBuffer<f64>),
}

impl Column {
    /// The numbers to be changed; what was shared is copied first.
    #[inline]
    pub(super) fn own(&mut self) -> &mut Vec<f64> {
        if let Column::Shared(shared) = self {
            *self = Column::Own(shared.to_vec());
        }
        match self {
            Column::Own(own) => own,
            Column::Shared(_) => unreachable!("it has just become its own"),
        }
    }

    /// So many numbers that are missing.
    pub(super) fn missing(rows: usize) -> Column {
        vec![f64::NAN; rows].into()
    }
}

impl Default for Column {
    fn default() -> Column {
        Column::Own(Vec::new())
    }
}

impl From<Vec<f64>> for Column {
    fn from(own: Vec<f64>) -> Column {
        Column::Own(own)
    }
}

impl From<Column> for ScalarBuffer<f64> {
    fn from(column: Column) -> Self {
        match column {
            Column::Own(own) => own.into(),
            Column::Shared(shared) => shared,
        }
    }
}

impl Deref for Column {
    type Target = [f64];

    fn deref(&self) -> &[f64] {
        match self {
            Column::Own(own) => own,
            Column::Shared(shared) => shared,
        }
    }
}
