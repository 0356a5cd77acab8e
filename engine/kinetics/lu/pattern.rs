//! Owns the static plan of the factorisation: where every entry of the matrix and of its factors
//! stands, once per network.
//!
//! It never holds values: see `factors`.

use super::order::{Elimination, eliminate};

/// The pattern of a matrix with its order of elimination and the lists the numerical work runs
/// through. Places are positions in that order.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Pattern {
    /// The pattern as given, in compressed columns.
    pub(super) col_ptr: Vec<usize>,
    pub(super) row_idx: Vec<usize>,
    /// The row (and column) of the matrix at each place.
    pub(super) order: Vec<u32>,
    /// End of each place's entries in `entries`; they begin where those of the place before end.
    pub(super) entry_ends: Vec<u32>,
    /// Entries of the matrix by rows: (index into the values, place of the column).
    pub(super) entries: Vec<(u32, u32)>,
    /// Where each place's row of L and of U stands in `columns`.
    pub(super) rows: Vec<Row>,
    /// Places of the columns of L and U, row by row: L left of the diagonal, then U right of it.
    pub(super) columns: Vec<u32>,
    /// The first place of the trailing block, which is kept as a dense matrix: its rows list only
    /// columns before it.
    pub(super) head: usize,
}

/// One row of the factors in [`Pattern::columns`].
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Row {
    pub start: u32,
    /// One past the last entry of L; those of U follow.
    pub lower_end: u32,
    pub end: u32,
}

impl Row {
    pub fn lower(self) -> std::ops::Range<usize> {
        self.start as usize..self.lower_end as usize
    }

    pub fn upper(self) -> std::ops::Range<usize> {
        self.lower_end as usize..self.end as usize
    }
}

impl Pattern {
    /// Orders the square pattern given in compressed columns (`row_idx[col_ptr[j]..col_ptr[j + 1]]`
    /// are the rows of column j). The diagonal is taken as full whether it is listed or not.
    pub fn new(col_ptr: &[usize], row_idx: &[usize]) -> Pattern {
        let count = col_ptr.len().saturating_sub(1);
        let elimination = eliminate(count, col_ptr, row_idx);
        let mut place = vec![0; count];
        for (at, &row) in elimination.order.iter().enumerate() {
            place[row] = at;
        }
        let mut by_row = vec![Vec::new(); count];
        for (column, bounds) in col_ptr.windows(2).enumerate() {
            for index in bounds[0]..bounds[1] {
                by_row[place[row_idx[index]]].push((index as u32, place[column] as u32));
            }
        }
        let (mut entries, mut entry_ends) = (Vec::with_capacity(row_idx.len()), Vec::new());
        for row in by_row {
            entries.extend(row);
            entry_ends.push(entries.len() as u32);
        }
        let head = head(&elimination);
        let (mut columns, mut rows) = (Vec::new(), Vec::with_capacity(count));
        let lists = elimination.lower.iter().zip(&elimination.upper);
        for (at, (lower, upper)) in lists.enumerate() {
            let start = columns.len() as u32;
            let sparse = lower.iter().filter(|&&column| column < head);
            columns.extend(sparse.map(|&column| column as u32));
            let lower_end = columns.len() as u32;
            if at < head {
                columns.extend(upper.iter().map(|&column| column as u32));
            }
            rows.push(Row {
                start,
                lower_end,
                end: columns.len() as u32,
            });
        }
        Pattern {
            col_ptr: col_ptr.to_vec(),
            row_idx: row_idx.to_vec(),
            order: elimination.order.iter().map(|&row| row as u32).collect(),
            entry_ends,
            entries,
            rows,
            columns,
            head,
        }
    }

    /// The number of rows.
    pub fn count(&self) -> usize {
        self.order.len()
    }

    /// Whether this is the plan of the pattern given.
    pub fn fits(&self, col_ptr: &[usize], row_idx: &[usize]) -> bool {
        self.col_ptr == col_ptr && self.row_idx == row_idx
    }

    /// The size of the trailing block kept as a dense matrix.
    pub fn block(&self) -> usize {
        self.count() - self.head
    }
}

/// How many multiply-subtracts of the dense block take as long as one of the sparse head
/// (measured on the standard network, with the instructions every x86-64 processor has).
const DENSE_PER_SPARSE: usize = 6;

/// Where the trailing block begins for the least time of a factorisation: what is sparse costs a
/// scattered multiply-subtract for every pair of a column of L and a row of U, the block a third
/// of its size cubed.
fn head(elimination: &Elimination) -> usize {
    let count = elimination.order.len();
    let mut below = vec![0usize; count];
    for &column in elimination.lower.iter().flatten() {
        below[column] += 1;
    }
    let dense = |head: usize| (count - head).pow(3) / (3 * DENSE_PER_SPARSE);
    let mut sparse = 0;
    let mut best = (dense(0), 0);
    for (place, (below, upper)) in below.iter().zip(&elimination.upper).enumerate() {
        sparse += below * upper.len();
        best = best.min((sparse + dense(place + 1), place + 1));
    }
    best.1
}
