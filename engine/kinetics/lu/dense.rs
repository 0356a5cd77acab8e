//! Owns the LU of a small dense matrix without exchange of rows: the trailing block of the
//! sparse factorisation, where nearly every entry is filled.
//!
//! It never allocates, and stops at a pivot it cannot divide by.

/// Rows eliminated together: each row below is then read and written once for four pivots.
const PANEL: usize = 4;

/// A pivot that is zero, or whose reciprocal or value is not finite.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct BadPivot {
    pub at: usize,
    pub pivot: f64,
}

/// The reciprocal of a pivot that can be divided by. One that is not finite comes of values that
/// are not, or of growth beyond range.
#[inline]
pub(super) fn reciprocal(at: usize, pivot: f64) -> Result<f64, BadPivot> {
    let reciprocal = 1.0 / pivot;
    if pivot.is_finite() && reciprocal.is_finite() {
        Ok(reciprocal)
    } else {
        Err(BadPivot { at, pivot })
    }
}

/// Replaces the square matrix `a` (row after row) by its factors L (unit diagonal left out) and U,
/// and fills in the reciprocals of the pivots.
pub(super) fn factorise(a: &mut [f64], reciprocals: &mut [f64]) -> Result<(), BadPivot> {
    let size = reciprocals.len();
    for first in (0..size).step_by(PANEL) {
        let end = (first + PANEL).min(size);
        for at in first..end {
            let (above, rest) = a.split_at_mut(at * size);
            let row = &mut rest[..size];
            for pivot in first..at {
                let multiple = row[pivot] * reciprocals[pivot];
                row[pivot] = multiple;
                let upper = &above[pivot * size..][pivot + 1..size];
                subtract(multiple, upper, &mut row[pivot + 1..]);
            }
            reciprocals[at] = reciprocal(at, row[at])?;
        }
        // Only a full panel has rows below it.
        let (above, below) = a.split_at_mut(end * size);
        let panel = &above[first * size..];
        for row in below.chunks_exact_mut(size) {
            subtract_panel(first, panel, &reciprocals[first..end], row);
        }
    }
    Ok(())
}

/// Eliminates the four columns from `first` on in one row below the panel.
#[inline]
fn subtract_panel(first: usize, panel: &[f64], reciprocals: &[f64], row: &mut [f64]) {
    let size = row.len();
    let (left, right) = row.split_at_mut(first + PANEL);
    let multiples = &mut left[first..];
    for pivot in 0..PANEL {
        let upper = &panel[pivot * size + first..][..PANEL];
        multiples[pivot] *= reciprocals[pivot];
        for later in pivot + 1..PANEL {
            multiples[later] -= multiples[pivot] * upper[later];
        }
    }
    let upper = |pivot: usize| &panel[pivot * size..][first + PANEL..size];
    let panels = upper(0)
        .iter()
        .zip(upper(1))
        .zip(upper(2).iter().zip(upper(3)));
    let [m0, m1, m2, m3] = [multiples[0], multiples[1], multiples[2], multiples[3]];
    for (entry, ((u0, u1), (u2, u3))) in right.iter_mut().zip(panels) {
        *entry = *entry - m0 * u0 - m1 * u1 - m2 * u2 - m3 * u3;
    }
}

/// Replaces b by the solution of L U x = b.
pub(super) fn solve(a: &[f64], reciprocals: &[f64], b: &mut [f64]) {
    let size = b.len();
    for at in 0..size {
        let row = &a[at * size..][..size];
        b[at] -= product(&row[..at], &b[..at]);
    }
    for at in (0..size).rev() {
        let row = &a[at * size..][..size];
        b[at] = (b[at] - product(&row[at + 1..], &b[at + 1..])) * reciprocals[at];
    }
}

/// Replaces b by the solution of (L U)^T x = b.
pub(super) fn solve_transposed(a: &[f64], reciprocals: &[f64], b: &mut [f64]) {
    let size = b.len();
    for at in 0..size {
        let row = &a[at * size..][..size];
        let (done, rest) = b.split_at_mut(at + 1);
        done[at] *= reciprocals[at];
        subtract(done[at], &row[at + 1..], rest);
    }
    for at in (0..size).rev() {
        let row = &a[at * size..][..size];
        let (rest, done) = b.split_at_mut(at);
        subtract(done[0], &row[..at], rest);
    }
}

/// The scalar product. Eight sums hide the latency of the additions.
#[inline]
fn product(a: &[f64], b: &[f64]) -> f64 {
    let (a_eights, a_rest) = a.as_chunks::<8>();
    let (b_eights, b_rest) = b.as_chunks::<8>();
    let mut sums = [0.0f64; 8];
    for (a, b) in a_eights.iter().zip(b_eights) {
        for i in 0..8 {
            sums[i] += a[i] * b[i];
        }
    }
    let rest = a_rest
        .iter()
        .zip(b_rest)
        .fold(0.0, |sum, (a, b)| sum + a * b);
    let [a, b, c, d, e, f, g, h] = sums;
    (((a + e) + (b + f)) + ((c + g) + (d + h))) + rest
}

/// b -= multiple * a.
#[inline]
fn subtract(multiple: f64, a: &[f64], b: &mut [f64]) {
    for (b, a) in b.iter_mut().zip(a) {
        *b -= multiple * a;
    }
}
