//! A square matrix of which only the entries that are not zero are held.

use rayon::prelude::*;

/// The least rows that are worth a task of their own.
const ROWS_A_TASK: usize = 512;

/// A sparse square matrix by rows.
#[derive(Debug, Clone)]
pub struct Sparse {
    row_start: Vec<usize>,
    columns: Vec<u32>,
    values: Vec<f64>,
}

impl Sparse {
    /// The matrix of `n` rows and columns with these entries `(row, column, value)`, each position once, in any order.
    ///
    /// # Panics
    /// If a row or column is `n` or above.
    pub fn new(n: usize, entries: impl Iterator<Item = (u32, u32, f64)> + Clone) -> Self {
        let mut row_start = vec![0; n + 1];
        for (row, _, _) in entries.clone() {
            row_start[row as usize + 1] += 1;
        }
        for row in 0..n {
            row_start[row + 1] += row_start[row];
        }
        let n_entries = row_start[n];
        let mut next = row_start.clone();
        let (mut columns, mut values) = (vec![0; n_entries], vec![0.0; n_entries]);
        for (row, column, value) in entries {
            assert!((column as usize) < n, "column {column} of {n}");
            let position = &mut next[row as usize];
            (columns[*position], values[*position]) = (column, value);
            *position += 1;
        }
        Self { row_start, columns, values }
    }

    /// Number of rows, and of columns.
    pub fn n(&self) -> usize {
        self.row_start.len() - 1
    }

    /// The entries of a row, as column and value.
    pub fn row(&self, row: usize) -> impl DoubleEndedIterator<Item = (usize, f64)> + Clone {
        let range = self.row_start[row]..self.row_start[row + 1];
        self.columns[range.clone()].iter().map(|column| *column as usize).zip(self.values[range].iter().copied())
    }

    /// All entries, row by row.
    pub fn entries(&self) -> impl Iterator<Item = (usize, usize, f64)> + Clone {
        (0..self.n()).flat_map(|row| self.row(row).map(move |(column, value)| (row, column, value)))
    }

    /// The matrix with rows and columns exchanged; its rows run by rising column.
    #[must_use]
    pub(super) fn transposed(&self) -> Self {
        let mut entries = Vec::with_capacity(self.values.len());
        for row in 0..self.n() {
            let range = self.row_start[row]..self.row_start[row + 1];
            let row = u32::try_from(row).expect("columns are held in 32 bits, and there are as many rows");
            entries.extend(range.map(|position| (self.columns[position], row, self.values[position])));
        }
        Self::new(self.n(), entries.iter().copied())
    }

    /// The same with each row's entries by falling value (ties: by column).
    #[must_use]
    pub(super) fn strongest_first(mut self) -> Self {
        for row in 0..self.n() {
            let range = self.row_start[row]..self.row_start[row + 1];
            let mut entries: Vec<(usize, f64)> = self.row(row).collect();
            entries.sort_by(|a, b| b.1.total_cmp(&a.1).then(a.0.cmp(&b.0)));
            for (position, (column, value)) in range.zip(entries) {
                self.columns[position] = u32::try_from(column).expect("it was held in 32 bits");
                self.values[position] = value;
            }
        }
        self
    }

    /// The matrix times a vector. Each row is summed by itself, in its own order, so that threads change nothing.
    pub(super) fn times(&self, vector: &[f64], product: &mut [f64]) {
        product.par_iter_mut().with_min_len(ROWS_A_TASK).enumerate().for_each(|(row, sum)| {
            *sum = self.row(row).map(|(column, value)| value * vector[column]).sum();
        });
    }
}
