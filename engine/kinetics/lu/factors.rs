//! Owns the numerical factorisation A = L U on a static pattern, and its solves.
//!
//! It never exchanges rows: pivots are the diagonal entries in the order of the pattern. For the
//! matrix I - c J of a kinetic system, whose columns are dominated by their diagonal, that keeps
//! the backward error small component by component; a matrix for which it does not (a pivot that
//! is zero or not finite) is reported, never divided by. Nothing is allocated after `new`.

use std::ops::Range;
use std::sync::Arc;

use super::dense;
use super::pattern::Pattern;

/// Why there is no factorisation.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
#[error("the pivot of row {row} is {pivot}")]
pub struct SingularPivot {
    /// Row of the matrix, as numbered by the caller.
    pub row: usize,
    pub pivot: f64,
}

/// The factors of one matrix, with work space for the next.
#[derive(Debug, Clone)]
pub struct Factors {
    pattern: Arc<Pattern>,
    /// Values of L (unit diagonal left out) and U beside [`Pattern::columns`].
    values: Vec<f64>,
    /// Reciprocals of the pivots, the block's included.
    reciprocals: Vec<f64>,
    /// The trailing block, row after row.
    block: Vec<f64>,
    /// The row at work, spread over its places; zero between calls.
    spread: Vec<f64>,
}

impl Factors {
    pub fn new(pattern: Arc<Pattern>) -> Factors {
        let block = pattern.count() - pattern.head;
        Factors {
            values: vec![0.0; pattern.columns.len()],
            reciprocals: vec![1.0; pattern.count()],
            block: vec![0.0; block * block],
            spread: vec![0.0; pattern.count()],
            pattern,
        }
    }

    /// Factorises the matrix of the given values, in the order of the pattern's columns.
    ///
    /// Row by row: each row is spread out, multiples of the rows of U above it are subtracted, and
    /// it is gathered again; what is left of the last rows after that is the dense block.
    pub fn factorise(&mut self, matrix: &[f64]) -> Result<(), SingularPivot> {
        let head = self.pattern.head;
        let result = self.head_and_block(matrix).and_then(|()| {
            let reciprocals = &mut self.reciprocals[head..];
            dense::factorise(&mut self.block, reciprocals).map_err(|mut bad| {
                bad.at += head;
                bad
            })
        });
        result.map_err(|bad| {
            self.spread.fill(0.0);
            SingularPivot {
                row: self.pattern.order[bad.at] as usize,
                pivot: bad.pivot,
            }
        })
    }

    /// The rows of the head, and the block before its own elimination.
    fn head_and_block(&mut self, matrix: &[f64]) -> Result<(), dense::BadPivot> {
        let Factors {
            pattern,
            values,
            reciprocals,
            block,
            spread,
        } = self;
        let (head, size) = (pattern.head, pattern.count() - pattern.head);
        let mut first = 0usize;
        for (at, (&row, &end)) in pattern.rows.iter().zip(&pattern.entry_ends).enumerate() {
            for &(index, place) in &pattern.entries[first..end as usize] {
                spread[place as usize] = matrix[index as usize];
            }
            first = end as usize;
            for entry in row.lower() {
                let above = pattern.columns[entry] as usize;
                let multiple = spread[above] * reciprocals[above];
                spread[above] = 0.0;
                values[entry] = multiple;
                let upper = pattern.rows[above].upper();
                let terms = pattern.columns[upper.clone()].iter().zip(&values[upper]);
                for (&column, &value) in terms {
                    spread[column as usize] -= multiple * value;
                }
            }
            if at < head {
                let pivot = std::mem::take(&mut spread[at]);
                let columns = &pattern.columns[row.upper()];
                for (value, &column) in values[row.upper()].iter_mut().zip(columns) {
                    *value = std::mem::take(&mut spread[column as usize]);
                }
                reciprocals[at] = dense::reciprocal(at, pivot)?;
            } else {
                block[(at - head) * size..][..size].copy_from_slice(&spread[head..]);
                spread[head..].fill(0.0);
            }
        }
        Ok(())
    }

    /// Replaces b by the solution of A x = b; `work` is as long as b.
    pub fn solve(&self, b: &mut [f64], work: &mut [f64]) {
        let pattern = &*self.pattern;
        for (at, (&row, &index)) in pattern.rows.iter().zip(&pattern.order).enumerate() {
            work[at] = b[index as usize] - self.product(row.lower(), work);
        }
        let head = pattern.head;
        dense::solve(&self.block, &self.reciprocals[head..], &mut work[head..]);
        for at in (0..head).rev() {
            let row = pattern.rows[at];
            work[at] = (work[at] - self.product(row.upper(), work)) * self.reciprocals[at];
        }
        for (&from, &index) in work.iter().zip(&pattern.order) {
            b[index as usize] = from;
        }
    }

    /// Replaces b by the solution of A^T x = b; `work` is as long as b.
    pub fn solve_transposed(&self, b: &mut [f64], work: &mut [f64]) {
        let pattern = &*self.pattern;
        for (to, &index) in work.iter_mut().zip(&pattern.order) {
            *to = b[index as usize];
        }
        let head = pattern.head;
        for (at, &row) in pattern.rows[..head].iter().enumerate() {
            work[at] *= self.reciprocals[at];
            self.subtract(work[at], row.upper(), work);
        }
        dense::solve_transposed(&self.block, &self.reciprocals[head..], &mut work[head..]);
        for (at, &row) in pattern.rows.iter().enumerate().rev() {
            self.subtract(work[at], row.lower(), work);
        }
        for (&from, &index) in work.iter().zip(&pattern.order) {
            b[index as usize] = from;
        }
    }

    /// The sum of a run of entries times the elements of `x` at their columns. Four sums hide the
    /// latency of the additions.
    #[inline]
    fn product(&self, run: Range<usize>, x: &[f64]) -> f64 {
        let (fours, rest) = self.pattern.columns[run.clone()].as_chunks::<4>();
        let (value_fours, value_rest) = self.values[run].as_chunks::<4>();
        let mut sums = [0.0f64; 4];
        for (four, values) in fours.iter().zip(value_fours) {
            for i in 0..4 {
                sums[i] += values[i] * x[four[i] as usize];
            }
        }
        let mut last = 0.0;
        for (&column, value) in rest.iter().zip(value_rest) {
            last += value * x[column as usize];
        }
        ((sums[0] + sums[1]) + (sums[2] + sums[3])) + last
    }

    /// Subtracts `multiple` times a run of entries from the elements of `x` at their columns.
    #[inline]
    fn subtract(&self, multiple: f64, run: Range<usize>, x: &mut [f64]) {
        let columns = &self.pattern.columns[run.clone()];
        for (&column, value) in columns.iter().zip(&self.values[run]) {
            x[column as usize] -= multiple * value;
        }
    }
}
