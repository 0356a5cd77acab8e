//! Owns the static LU in the shape the integrator library (diffsol) asks for.
//!
//! It never panics on a matrix without a factorisation: every solve is then an error, which the
//! integrator answers with a smaller step.

use std::cell::RefCell;
use std::sync::Arc;

use diffsol::matrix::{Matrix, MatrixCommon};
use diffsol_la::error::LinearSolverError;
use diffsol_la::{FaerContext, LaError, LinearOp, LinearSolver};

use super::{Factors, Pattern, SingularPivot};
use crate::kinetics::equations::{SparseMatrix, StateVector, slice_mut};

/// The linear solver of Newton's iteration.
#[derive(Default)]
pub struct StaticLu {
    /// The plan handed over; without one, or with one of another pattern, it is made afresh.
    pattern: Option<Arc<Pattern>>,
    problem: Option<Problem>,
}

/// What exists once the pattern is known.
struct Problem {
    matrix: SparseMatrix,
    factors: Factors,
    /// How the last factorisation went.
    state: Result<(), SingularPivot>,
    work: RefCell<Vec<f64>>,
}

impl StaticLu {
    /// A solver that uses the plan made for the network.
    pub fn new(pattern: Arc<Pattern>) -> StaticLu {
        StaticLu {
            pattern: Some(pattern),
            problem: None,
        }
    }

    fn solve_with(
        &self,
        b: &mut StateVector,
        solve: impl Fn(&Factors, &mut [f64], &mut [f64]),
    ) -> Result<(), LaError> {
        let problem = self
            .problem
            .as_ref()
            .ok_or(LinearSolverError::LuNotInitialized)?;
        problem
            .state
            .map_err(|error| LinearSolverError::Other(error.to_string()))?;
        solve(
            &problem.factors,
            slice_mut(b),
            &mut problem.work.borrow_mut(),
        );
        Ok(())
    }
}

impl LinearSolver<SparseMatrix> for StaticLu {
    fn set_sparsity<C: LinearOp<V = StateVector, T = f64, M = SparseMatrix, C = FaerContext>>(
        &mut self,
        op: &C,
    ) {
        let matrix =
            SparseMatrix::new_from_sparsity(op.nrows(), op.ncols(), op.sparsity(), *op.context());
        let given = matrix.inner()[0].symbolic();
        let (col_ptr, row_idx) = (given.col_ptr(), given.row_idx());
        let pattern = match self.pattern.take() {
            Some(pattern) if pattern.fits(col_ptr, row_idx) => pattern,
            _ => Arc::new(Pattern::new(col_ptr, row_idx)),
        };
        self.pattern = Some(pattern.clone());
        self.problem = Some(Problem {
            matrix,
            work: RefCell::new(vec![0.0; pattern.count()]),
            factors: Factors::new(pattern),
            state: Ok(()),
        });
    }

    fn set_linearisation<
        C: LinearOp<V = StateVector, T = f64, M = SparseMatrix, C = FaerContext>,
    >(
        &mut self,
        op: &C,
    ) {
        // Without a pattern the solves say that there is nothing to solve with.
        if let Some(problem) = &mut self.problem {
            op.matrix_inplace(&mut problem.matrix);
            problem.state = problem.factors.factorise(problem.matrix.inner()[0].val());
        }
    }

    fn solve_in_place(&self, b: &mut StateVector) -> Result<(), LaError> {
        self.solve_with(b, Factors::solve)
    }

    fn solve_transpose_in_place(&self, b: &mut StateVector) -> Result<(), LaError> {
        self.solve_with(b, Factors::solve_transposed)
    }
}
