//! Owns the numerical factorisation A = L U on a static pattern, and its solves.
//!
//! It never exchanges rows: pivots are the diagonal entries in the order of the pattern. For the
//! matrix I - c J of a kinetic system, whose columns are dominated by their diagonal, that keeps
//! the backward error small component by component; a matrix for which it does not (a pivot that
//! is zero or not finite) is reported, never divided by. Nothing is allocated after `new`.

use std::sync::Arc;

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
    /// Reciprocals of the pivots.
    reciprocals: Vec<f64>,
    /// The row at work, spread over its places; zero between calls.
    spread: Vec<f64>,
}

impl Factors {
    pub fn new(pattern: Arc<Pattern>) -> Factors {
        Factors {
            values: vec![0.0; pattern.columns.len()],
            reciprocals: vec![1.0; pattern.count()],
            spread: vec![0.0; pattern.count()],
            pattern,
        }
    }

    pub fn pattern(&self) -> &Pattern {
        &self.pattern
    }

    /// Factorises the matrix of the given values, in the order of the pattern's columns.
    ///
    /// Row by row: each row is spread out, the rows of U above it are subtracted, and it is
    /// gathered again.
    pub fn factorise(&mut self, matrix: &[f64]) -> Result<(), SingularPivot> {
        let Factors {
            pattern,
            values,
            reciprocals,
            spread,
        } = self;
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
            let pivot = spread[at];
            spread[at] = 0.0;
            let columns = &pattern.columns[row.upper()];
            for (value, &column) in values[row.upper()].iter_mut().zip(columns) {
                *value = spread[column as usize];
                spread[column as usize] = 0.0;
            }
            let reciprocal = 1.0 / pivot;
            // A pivot that is not finite comes of values that are not, or of growth beyond range.
            if pivot == 0.0 || !pivot.is_finite() || !reciprocal.is_finite() {
                spread.fill(0.0);
                return Err(SingularPivot {
                    row: pattern.order[at] as usize,
                    pivot,
                });
            }
            reciprocals[at] = reciprocal;
        }
        Ok(())
    }

    /// Replaces b by the solution of A x = b; `work` is as long as b.
    pub fn solve(&self, b: &mut [f64], work: &mut [f64]) {
        let pattern = &*self.pattern;
        for (at, (&row, &index)) in pattern.rows.iter().zip(&pattern.order).enumerate() {
            work[at] = b[index as usize] - self.product(row.lower(), work);
        }
        let backward = pattern.rows.iter().zip(&pattern.order).enumerate().rev();
        for (at, (&row, &index)) in backward {
            work[at] = (work[at] - self.product(row.upper(), work)) * self.reciprocals[at];
            b[index as usize] = work[at];
        }
    }

    /// Replaces b by the solution of A^T x = b; `work` is as long as b.
    pub fn solve_transposed(&self, b: &mut [f64], work: &mut [f64]) {
        let pattern = &*self.pattern;
        for (to, &index) in work.iter_mut().zip(&pattern.order) {
            *to = b[index as usize];
        }
        for (at, &row) in pattern.rows.iter().enumerate() {
            work[at] *= self.reciprocals[at];
            self.subtract(work[at], row.upper(), work);
        }
        let backward = pattern.rows.iter().zip(&pattern.order).enumerate().rev();
        for (at, (&row, &index)) in backward {
            self.subtract(work[at], row.lower(), work);
            b[index as usize] = work[at];
        }
    }

    /// The sum of a run of entries times the elements of `x` at their columns.
    #[inline]
    fn product(&self, run: std::ops::Range<usize>, x: &[f64]) -> f64 {
        let columns = &self.pattern.columns[run.clone()];
        let (fours, rest) = columns.as_chunks::<4>();
        let (value_fours, value_rest) = self.values[run].as_chunks::<4>();
        // Four sums hide the latency of the additions.
        let mut sums = [0.0f64; 4];
        for (four, values) in fours.iter().zip(value_fours) {
            for i in 0..4 {
                sums[i] += values[i] * x[four[i] as usize];
            }
        }
        let rest = rest.iter().zip(value_rest);
        let rest = rest.fold(0.0, |sum, (&column, value)| {
            sum + value * x[column as usize]
        });
        ((sums[0] + sums[1]) + (sums[2] + sums[3])) + rest
    }

    /// Subtracts `multiple` times a run of entries from the elements of `x` at their columns.
    #[inline]
    fn subtract(&self, multiple: f64, run: std::ops::Range<usize>, x: &mut [f64]) {
        let columns = &self.pattern.columns[run.clone()];
        for (&column, value) in columns.iter().zip(&self.values[run]) {
            x[column as usize] -= multiple * value;
        }
    }
}
