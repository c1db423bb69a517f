//! What goes along from one format to another: the time of each row, and the columns of `keep`.

/// Cells of text, row by row.
#[derive(Debug, Default)]
pub(super) struct Carried {
    /// Of how many columns.
    pub(super) columns: usize,
    text: Vec<u8>,
    /// Where each cell ends, and whether it holds anything.
    ends: Vec<(u32, bool)>,
}

impl Carried {
    /// No cells yet.
    pub(super) fn new(columns: usize) -> Carried {
        Carried {
            columns,
            ..Carried::default()
        }
    }

    /// Adds the next cell; `None` for a missing one.
    pub(super) fn push(&mut self, cell: Option<&[u8]>) {
        self.text.extend_from_slice(cell.unwrap_or_default());
        self.ends.push((self.text.len() as u32, cell.is_some()));
    }

    /// Leaves empty whatever is not there of so many rows.
    pub(super) fn fill(&mut self, rows: usize) {
        let end = self.text.len() as u32;
        let all = self.ends.len().max(rows * self.columns);
        self.ends.resize(all, (end, false));
    }

    /// A cell of a row.
    pub(super) fn cell(&self, row: usize, column: usize) -> Option<&[u8]> {
        let place = row * self.columns + column;
        let (end, given) = self.ends[place];
        let start = place.checked_sub(1).map_or(0, |before| self.ends[before].0);
        given.then(|| &self.text[start as usize..end as usize])
    }
}
