//! Owns the kinetic system in the shape the integrator library (diffsol) asks for, and the counts
//! of its evaluations.
//!
//! It never decides anything about steps or tolerances.

use std::cell::{Cell, RefCell};

use diffsol::{
    ConstantOp, FaerContext, FaerSparseMat, FaerVec, NonLinearOp, NonLinearOpJacobian,
    OdeEquations, OdeEquationsRef, Op, ParameterisedOp, UnitCallable, Vector, matrix::MatrixCommon,
    vector::VectorCommon,
};
use faer::sparse::SymbolicSparseColMat;

use super::mechanism::{Coefficients, Mechanism, Scratch};

/// The matrix of the Newton iteration.
pub type SparseMatrix = FaerSparseMat<f64>;
/// The vector of the state.
pub type StateVector = FaerVec<f64>;

/// One cell's equations dy/dt = f(y) with y(t0) = start.
pub struct Equations<'m> {
    mechanism: &'m Mechanism,
    coefficients: &'m Coefficients,
    start: Vec<f64>,
    scratch: RefCell<Scratch>,
    pattern: SymbolicSparseColMat<usize>,
    /// Sequential: one cell is one thread's work, and results must not depend on thread counts.
    context: FaerContext,
    rhs_calls: Cell<usize>,
    jacobian_calls: Cell<usize>,
}

impl<'m> Equations<'m> {
    pub fn new(mechanism: &'m Mechanism, coefficients: &'m Coefficients, start: Vec<f64>) -> Self {
        let n = mechanism.species();
        let (col_ptr, row_idx) = mechanism.pattern();
        Equations {
            mechanism,
            coefficients,
            start,
            scratch: RefCell::new(mechanism.scratch()),
            pattern: SymbolicSparseColMat::new_checked(
                n,
                n,
                col_ptr.to_vec(),
                None,
                row_idx.to_vec(),
            ),
            context: FaerContext::new(),
            rhs_calls: Cell::new(0),
            jacobian_calls: Cell::new(0),
        }
    }

    /// How often the right-hand side and the Jacobian were evaluated.
    pub fn calls(&self) -> (usize, usize) {
        (self.rhs_calls.get(), self.jacobian_calls.get())
    }
}

/// The right-hand side as an operator.
pub struct Rhs<'a, 'm>(&'a Equations<'m>);

/// The initial state as an operator.
pub struct Start<'a, 'm>(&'a Equations<'m>);

macro_rules! square_operator {
    ($type:ty, $equations:ident => $path:expr) => {
        impl Op for $type {
            type T = f64;
            type V = StateVector;
            type M = SparseMatrix;
            type C = FaerContext;
            fn context(&self) -> &FaerContext {
                let $equations = self;
                &$path.context
            }
            fn nstates(&self) -> usize {
                let $equations = self;
                $path.mechanism.species()
            }
            fn nout(&self) -> usize {
                self.nstates()
            }
            fn nparams(&self) -> usize {
                0
            }
        }
    };
}

square_operator!(Equations<'_>, this => this);
square_operator!(Rhs<'_, '_>, this => this.0);
square_operator!(Start<'_, '_>, this => this.0);

impl NonLinearOp for Rhs<'_, '_> {
    fn call_inplace(&self, x: &StateVector, _t: f64, y: &mut StateVector) {
        let Equations {
            mechanism,
            coefficients,
            scratch,
            rhs_calls,
            ..
        } = self.0;
        rhs_calls.set(rhs_calls.get() + 1);
        mechanism.rhs(
            coefficients,
            slice(x),
            slice_mut(y),
            &mut scratch.borrow_mut(),
        );
    }
}

impl NonLinearOpJacobian for Rhs<'_, '_> {
    /// Never called by the integrator: it takes the matrix. Kept correct for whoever does.
    fn jac_mul_inplace(&self, x: &StateVector, t: f64, v: &StateVector, y: &mut StateVector) {
        let matrix = self.jacobian(x, t);
        let (col_ptr, row_idx) = self.0.mechanism.pattern();
        let (v, y) = (slice(v), slice_mut(y));
        y.fill(0.0);
        let values = matrix.inner()[0].val();
        for (column, bounds) in col_ptr.windows(2).enumerate() {
            for entry in bounds[0]..bounds[1] {
                y[row_idx[entry]] += values[entry] * v[column];
            }
        }
    }

    fn jacobian_inplace(&self, x: &StateVector, _t: f64, y: &mut SparseMatrix) {
        use diffsol::Matrix;
        let Equations {
            mechanism,
            coefficients,
            scratch,
            jacobian_calls,
            ..
        } = self.0;
        jacobian_calls.set(jacobian_calls.get() + 1);
        let values = y.inner_mut()[0].val_mut();
        mechanism.jacobian(coefficients, slice(x), values, &mut scratch.borrow_mut());
    }

    fn jacobian_sparsity(&self) -> Option<SymbolicSparseColMat<usize>> {
        Some(self.0.pattern.clone())
    }
}

impl ConstantOp for Start<'_, '_> {
    fn call_inplace(&self, _t: f64, y: &mut StateVector) {
        slice_mut(y).copy_from_slice(&self.0.start);
    }
}

impl<'a, 'm> OdeEquationsRef<'a> for Equations<'m> {
    type Rhs = Rhs<'a, 'm>;
    type Init = Start<'a, 'm>;
    type Mass = ParameterisedOp<'a, UnitCallable<SparseMatrix>>;
    type Root = ParameterisedOp<'a, UnitCallable<SparseMatrix>>;
    type Out = ParameterisedOp<'a, UnitCallable<SparseMatrix>>;
    type Reset = ParameterisedOp<'a, UnitCallable<SparseMatrix>>;
}

impl<'m> OdeEquations for Equations<'m> {
    fn rhs(&self) -> Rhs<'_, 'm> {
        Rhs(self)
    }
    fn mass(&self) -> Option<<Self as OdeEquationsRef<'_>>::Mass> {
        None
    }
    fn init(&self) -> Start<'_, 'm> {
        Start(self)
    }
    fn set_params(&mut self, _p: &StateVector) {}
    fn get_params(&self, _p: &mut StateVector) {}
}

/// The numbers of a state vector.
pub fn slice(vector: &StateVector) -> &[f64] {
    vector.inner().col_as_slice(0)
}

/// The numbers of a state vector, to write.
pub fn slice_mut(vector: &mut StateVector) -> &mut [f64] {
    vector.inner_mut().col_as_slice_mut(0)
}
