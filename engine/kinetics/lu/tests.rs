//! Owns the tests of the static LU on invented matrices: against faer, transposed, singular.
//!
//! It never uses a network: matrices of real cells are in tests/linear_algebra.rs.

use std::sync::{Arc, LazyLock};

use diffsol_la::{FaerContext, LinearOp, LinearSolver};
use faer::linalg::solvers::Solve;
use faer::sparse::{SparseColMat, SymbolicSparseColMat, Triplet};

use super::{Factors, Pattern, SingularPivot, StaticLu};
use crate::kinetics::equations::{SparseMatrix, StateVector, slice};
use diffsol::{Matrix, Vector};

/// A matrix in compressed columns.
#[derive(Clone)]
struct Columns {
    col_ptr: Vec<usize>,
    row_idx: Vec<usize>,
    values: Vec<f64>,
}

impl Columns {
    fn new(entries: &[Vec<(usize, f64)>]) -> Columns {
        let mut matrix = Columns {
            col_ptr: vec![0],
            row_idx: Vec::new(),
            values: Vec::new(),
        };
        for column in entries {
            for &(row, value) in column {
                matrix.row_idx.push(row);
                matrix.values.push(value);
            }
            matrix.col_ptr.push(matrix.row_idx.len());
        }
        matrix
    }

    fn faer(&self) -> SparseColMat<usize, f64> {
        let n = self.col_ptr.len() - 1;
        let mut triplets = Vec::new();
        for column in 0..n {
            for entry in self.col_ptr[column]..self.col_ptr[column + 1] {
                triplets.push(Triplet::new(
                    self.row_idx[entry],
                    column,
                    self.values[entry],
                ));
            }
        }
        SparseColMat::try_new_from_triplets(n, n, &triplets).unwrap()
    }

    fn factors(&self) -> Factors {
        Factors::new(Arc::new(Pattern::new(&self.col_ptr, &self.row_idx)))
    }
}

/// A random matrix whose columns are dominated by their diagonal, with `share` of its entries and
/// a full first row and column, as of a species that takes part in everything.
fn random(random: &mut fastrand::Rng, n: usize, share: f64) -> Columns {
    let mut columns = Vec::new();
    for column in 0..n {
        let mut entries: Vec<(usize, f64)> = Vec::new();
        for row in 0..n {
            if row != column && (row * column == 0 || random.f64() < share) {
                entries.push((row, random.f64() - 0.7));
            }
        }
        let size: f64 = entries.iter().map(|(_, value)| value.abs()).sum();
        entries.push((column, 1.0 + size));
        entries.sort_by_key(|&(row, _)| row);
        columns.push(entries);
    }
    Columns::new(&columns)
}

fn assert_near(found: &[f64], expected: &faer::Col<f64>, what: &str) {
    let size = expected.iter().fold(0.0f64, |size, x| size.max(x.abs()));
    for (i, (found, expected)) in found.iter().zip(expected.iter()).enumerate() {
        let error = (found - expected).abs();
        assert!(error < 1e-12 * size, "{what}, {i}: {found} for {expected}");
    }
}

/// A wrong index in ordering, fill, head, block or either solve shows as a wrong solution; the
/// reuse of one plan and one set of factors shows what a call leaves behind.
#[test]
fn random_systems_agree_with_faer() {
    let mut rng = fastrand::Rng::with_seed(3);
    let (mut with_head, mut with_block) = (0, 0);
    for round in 0..60 {
        let n = 1 + rng.usize(0..80);
        let share = [0.0, 0.02, 0.1, 0.6][round % 4];
        let mut matrix = random(&mut rng, n, share);
        let mut factors = matrix.factors();
        let block = Pattern::new(&matrix.col_ptr, &matrix.row_idx).block();
        with_head += usize::from(block < n);
        with_block += usize::from(block > 4);
        for again in 0..2 {
            let what = format!("round {round}.{again}, {n} rows, block {block}");
            factors.factorise(&matrix.values).unwrap();
            let b: Vec<f64> = (0..n).map(|_| rng.f64() - 0.5).collect();
            let right = faer::Col::from_fn(n, |i| b[i]);
            let lu = matrix.faer().sp_lu().unwrap();
            let mut work = vec![f64::NAN; n];
            let mut x = b.clone();
            factors.solve(&mut x, &mut work);
            assert_near(&x, &lu.solve(&right), &what);
            let mut x = b.clone();
            factors.solve_transposed(&mut x, &mut work);
            assert_near(
                &x,
                &lu.solve_transpose(&right),
                &format!("{what}, transposed"),
            );
            matrix.values.iter_mut().for_each(|value| *value *= 1.7);
        }
    }
    assert!(
        with_head > 10 && with_block > 10,
        "{with_head} {with_block}"
    );
}

/// A pivot that cannot be divided by is named by its row, in head and block alike, and the next
/// matrix is factorised as if nothing had happened.
#[test]
fn a_singular_matrix_is_reported_and_forgotten() {
    let mut rng = fastrand::Rng::with_seed(4);
    for (n, share) in [(60, 0.02), (12, 0.9)] {
        let matrix = random(&mut rng, n, share);
        let mut factors = matrix.factors();
        let b: Vec<f64> = (0..n).map(|_| rng.f64()).collect();
        let solution = |factors: &Factors| {
            let mut x = b.clone();
            factors.solve(&mut x, &mut vec![0.0; n]);
            x
        };
        factors.factorise(&matrix.values).unwrap();
        let before = solution(&factors);
        for row in 0..n {
            let mut zero = matrix.clone();
            for (value, _) in zero
                .values
                .iter_mut()
                .zip(&zero.row_idx)
                .filter(|(_, r)| **r == row)
            {
                *value = 0.0;
            }
            assert_eq!(
                factors.factorise(&zero.values),
                Err(SingularPivot { row, pivot: 0.0 })
            );
        }
        let mut overflow = matrix.values.clone();
        overflow[n / 2] = f64::INFINITY;
        assert!(factors.factorise(&overflow).is_err());
        overflow[n / 2] = f64::NAN;
        assert!(factors.factorise(&overflow).is_err());
        factors.factorise(&matrix.values).unwrap();
        assert_eq!(solution(&factors), before, "{n} rows");
    }
}

/// What the integrator sees: errors, never a panic or a vector of NaN, from a solver that was not
/// set up, from a singular matrix, and a plan of another pattern is not used.
#[test]
fn the_integrator_gets_errors() {
    let mut b = StateVector::from_vec(vec![1.0, 2.0], FaerContext::new());
    assert!(StaticLu::default().solve_in_place(&mut b).is_err());
    let other = Arc::new(Pattern::new(&[0, 1], &[0]));
    let mut solver = StaticLu::new(other);
    solver.set_sparsity(&Two([1.0, 2.0, 2.0, 4.0]));
    solver.set_linearisation(&Two([1.0, 2.0, 2.0, 4.0]));
    let error = solver.solve_in_place(&mut b).unwrap_err().to_string();
    assert!(error.contains("the pivot of row 1 is 0"), "{error}");
    assert!(solver.solve_transpose_in_place(&mut b).is_err());
    assert_eq!(slice(&b), [1.0, 2.0]);
    solver.set_linearisation(&Two([2.0, 1.0, 0.0, 4.0]));
    solver.solve_in_place(&mut b).unwrap();
    assert_eq!(slice(&b), [0.5, 0.375]);
}

/// A two by two matrix, column after column.
struct Two([f64; 4]);

impl LinearOp for Two {
    type T = f64;
    type V = StateVector;
    type M = SparseMatrix;
    type C = FaerContext;
    fn nrows(&self) -> usize {
        2
    }
    fn ncols(&self) -> usize {
        2
    }
    fn context(&self) -> &FaerContext {
        static CONTEXT: LazyLock<FaerContext> = LazyLock::new(FaerContext::new);
        &CONTEXT
    }
    fn matrix_inplace(&self, y: &mut SparseMatrix) {
        y.inner_mut()[0].val_mut().copy_from_slice(&self.0);
    }
    fn sparsity(&self) -> Option<SymbolicSparseColMat<usize>> {
        let (col_ptr, row_idx) = (vec![0, 2, 4], vec![0, 1, 0, 1]);
        Some(SymbolicSparseColMat::new_checked(
            2, 2, col_ptr, None, row_idx,
        ))
    }
}
