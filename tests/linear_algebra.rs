//! Owns the check of the static LU on the matrices I - c J of real cells: small backward error in
//! every component, which is what keeps sums of elements, charge and dust.
//!
//! It never integrates with anything but the default settings.

use std::path::Path;

use faer::linalg::solvers::Solve;
use faer::sparse::{SparseColMat, SymbolicSparseColMat};
use frostclock::kinetics::Coefficients;
use frostclock::kinetics::lu::Factors;
use frostclock::rates::cell_rates;
use frostclock::run::{Prepared, cell};

/// max over i of |b - A x|_i / (|A| |x| + |b|)_i: how much, relatively, entries of A and b must
/// change for x to be exact (Oettli & Prager 1964, Numer. Math. 6, 405).
fn backward_error(pattern: (&[usize], &[usize]), a: &[f64], x: &[f64], b: &[f64], t: bool) -> f64 {
    let (col_ptr, row_idx) = pattern;
    let (mut residual, mut size) = (b.to_vec(), b.iter().map(|b| b.abs()).collect::<Vec<_>>());
    for column in 0..x.len() {
        for entry in col_ptr[column]..col_ptr[column + 1] {
            let (i, j) = if t {
                (column, row_idx[entry])
            } else {
                (row_idx[entry], column)
            };
            residual[i] -= a[entry] * x[j];
            size[i] += (a[entry] * x[j]).abs();
        }
    }
    let ratios = residual.iter().zip(&size);
    ratios
        .map(|(r, s)| if *s == 0.0 { 0.0 } else { r.abs() / s })
        .fold(0.0, f64::max)
}

/// I - c J at the state `y`.
fn newton_matrix(run: &Prepared, coefficients: &Coefficients, y: &[f64], c: f64) -> Vec<f64> {
    let mechanism = &run.mechanism;
    let (col_ptr, row_idx) = mechanism.pattern();
    let mut values = vec![0.0; row_idx.len()];
    mechanism.jacobian(coefficients, y, &mut values, &mut mechanism.scratch());
    for (column, bounds) in col_ptr.windows(2).enumerate() {
        for entry in bounds[0]..bounds[1] {
            let one = if row_idx[entry] == column { 1.0 } else { 0.0 };
            values[entry] = one - c * values[entry];
        }
    }
    values
}

/// The solution by the LU with partial pivoting of the library faer.
fn by_faer(pattern: (&[usize], &[usize]), a: &[f64], b: &[f64]) -> Vec<f64> {
    let n = b.len();
    let (col_ptr, row_idx) = (pattern.0.to_vec(), pattern.1.to_vec());
    let symbolic = SymbolicSparseColMat::new_checked(n, n, col_ptr, None, row_idx);
    let matrix = SparseColMat::new(symbolic, a.to_vec());
    let lu = matrix.sp_lu().expect("a regular matrix");
    lu.solve(&faer::Col::from_fn(n, |i| b[i]))
        .iter()
        .copied()
        .collect()
}

/// Elimination in a bad order or an unstable one (growth of entries) would raise the backward
/// error from round-off to order one, as partial pivoting does for the small components.
#[test]
fn real_matrices_are_solved_component_by_component() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("cases/tirune.yaml");
    let case = frostclock::case::open(&path).expect("the demo case");
    let run = Prepared::new(&case).expect("the demo case");
    let (n, pattern) = (run.mechanism.species(), run.mechanism.pattern());
    let mut factors = Factors::new(run.mechanism.elimination().clone());
    let mut random = fastrand::Rng::with_seed(5);
    let mut work = vec![0.0; n];
    let (mut errors, mut extreme, mut transposed) = (vec![], vec![], vec![]);
    let (mut faer, mut difference) = (vec![], vec![]);
    // Warm and irradiated, dense and warm, the middle, cold and thin.
    for number in [9, 0, 67, 173] {
        let cell = &run.disk.cells[number];
        let rates = cell_rates(&run.chemistry, &run.disk.fields, cell, &run.setting);
        let record = cell::compute(&run, number);
        for y in record.abundances.chunks_exact(n).step_by(15) {
            for power in -2..=15 {
                let a = newton_matrix(&run, &rates.coefficients, y, 10f64.powi(power));
                factors.factorise(&a).expect("a regular matrix");
                // Residuals of Newton's iteration scale with the abundances, those of its
                // transpose (gradients) do not.
                let b: Vec<f64> = y.iter().map(|y| y * (random.f64() - 0.5)).collect();
                let mut x = b.clone();
                factors.solve(&mut x, &mut work);
                let error = backward_error(pattern, &a, &x, &b, false);
                if power == 15 {
                    extreme.push(error)
                } else {
                    errors.push(error)
                }
                let other = by_faer(pattern, &a, &b);
                faer.push(backward_error(pattern, &a, &other, &b, false));
                // By the largest component, which pivoting does get right, the two agree.
                let largest = |x: &[f64]| x.iter().fold(0.0f64, |m, x| m.max(x.abs()));
                let apart: Vec<f64> = x.iter().zip(&other).map(|(x, o)| x - o).collect();
                difference.push(largest(&apart) / largest(&x));
                let b: Vec<f64> = (0..n).map(|_| random.f64() - 0.5).collect();
                let mut x = b.clone();
                factors.solve_transposed(&mut x, &mut work);
                if power < 15 {
                    transposed.push(backward_error(pattern, &a, &x, &b, true));
                }
            }
        }
    }
    let ordered = |errors: &mut Vec<f64>, what| {
        errors.sort_by(f64::total_cmp);
        let (median, worst) = (errors[errors.len() / 2], errors[errors.len() - 1]);
        println!("{what}: median {median:.1e}, worst {worst:.1e}");
        (median, worst)
    };
    let (median, worst) = ordered(&mut errors, "static");
    assert!(median < 1e-14 && worst < 5e-9, "{median:e} {worst:e}");
    // At 1e15 s, beyond the steps of any run, c times the fastest exchange exceeds 1e16: the 1 on
    // the diagonal is lost in the values themselves.
    let (median, _) = ordered(&mut extreme, "static at 1e15 s");
    assert!(median < 1e-14, "{median:e}");
    let (median, _) = ordered(&mut transposed, "transposed");
    assert!(median < 1e-12, "{median:e}");
    let (median, _) = ordered(&mut difference, "difference of the two");
    assert!(median < 1e-12, "{median:e}");
    let (_, pivoted) = ordered(&mut faer, "faer");
    assert!(
        worst < 1e-3 * pivoted,
        "why not partial pivoting: {pivoted:e}"
    );
}
