//! Owns the integration of one cell: the solver's settings, the output times and the ladder of
//! retries.
//!
//! It never repairs a state (clipping, rescaling to conserve): what comes out is what was computed.
//! Neither does it panic or loop for ever: whatever goes wrong ends in [`Status::Failed`].

use std::panic::{AssertUnwindSafe, catch_unwind};

use diffsol::{
    Bdf, BdfState, DiffsolError, FaerSparseLU, LinearSolver, OdeBuilder, OdeSolverMethod,
    OdeSolverProblem, OdeSolverState, Vector, error::OdeSolverError,
};

use super::equations::{Equations, SparseMatrix, StateVector, slice, slice_mut};
use super::lu::StaticLu;
use super::mechanism::{Coefficients, Mechanism};

/// Accuracy asked of every step: |error| <= relative |y| + smallest, in the root mean square over
/// the species.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Tolerance {
    pub relative: f64,
    /// In units of the state.
    pub smallest: f64,
}

impl Default for Tolerance {
    fn default() -> Self {
        Tolerance {
            relative: 1e-5,
            smallest: 1e-25,
        }
    }
}

/// What solves the linear systems of Newton's iteration.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum LinearAlgebra {
    /// The LU of this engine ([`StaticLu`]).
    #[default]
    Static,
    /// The sparse LU with partial pivoting of the library faer: a cross-check.
    Faer,
}

/// How an integration ended.
#[derive(Debug, Clone, PartialEq)]
pub enum Status {
    Finished,
    /// `time_s` is how far it came, in seconds.
    Failed {
        time_s: f64,
        reason: String,
    },
}

/// What an integration took, all attempts together (but for one that ended in a panic of the
/// solver library).
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Work {
    pub steps: usize,
    pub error_test_failures: usize,
    pub newton_iterations: usize,
    pub newton_failures: usize,
    /// Evaluations of the right-hand side.
    pub rhs: usize,
    /// Evaluations of the Jacobian.
    pub jacobians: usize,
    pub factorisations: usize,
    /// First rung of the ladder: restarts at order 1 from the current state.
    pub restarts: usize,
    /// Second rung: returns to the last snapshot with ten times tighter tolerance.
    pub tightenings: usize,
}

/// Snapshots (one per time reached, in order) and how it went.
#[derive(Debug, Clone, PartialEq)]
pub struct Outcome {
    pub snapshots: Vec<Vec<f64>>,
    pub status: Status,
    pub work: Work,
}

/// A ceiling of steps, far above what a cell takes (one to five thousand), that ends any loop.
const MOST_STEPS: usize = 200_000;
/// Restarts allowed between two output times before the next rung.
const MOST_RESTARTS: usize = 5;
/// First step after a restart, as a share of the time.
const RESTART_STEP: f64 = 1e-6;
/// Each tightening divides the relative tolerance by this, down to a few times round-off.
const TIGHTENING: f64 = 10.0;
/// Tightenings before giving up.
const MOST_TIGHTENINGS: usize = 2;
/// Relative tolerance below which no tightening goes.
const TIGHTEST: f64 = 1e-12;
/// First step after a tightening, relative to the one the solver would choose.
const SMALLER_FIRST_STEP: f64 = 1e-3;

/// Why an attempt stopped before the last output time.
enum Stop {
    /// The solver said so; the next rung may help.
    Solver(String),
    /// Nothing would help.
    Final(String),
}

/// Integrates from t = 0 and `start` to every one of `times` (s, ascending, the first may be 0).
///
/// Variable-order BDF (NDF) with the exact Jacobian. A solver failure climbs a ladder: restart at
/// order 1 with the derivative recomputed and a first step of 1e-6 of the time; then back to the
/// last snapshot with a smaller first step and ten times tighter tolerance, twice at most; then
/// the outcome is [`Status::Failed`] with the snapshots reached. The same input gives the same bits.
pub fn integrate(
    mechanism: &Mechanism,
    coefficients: &Coefficients,
    start: &[f64],
    times: &[f64],
    tolerance: &Tolerance,
) -> Outcome {
    let linear_algebra = LinearAlgebra::default();
    integrate_with(
        mechanism,
        coefficients,
        start,
        times,
        tolerance,
        linear_algebra,
    )
}

/// [`integrate`] with linear algebra of choice.
pub fn integrate_with(
    mechanism: &Mechanism,
    coefficients: &Coefficients,
    start: &[f64],
    times: &[f64],
    tolerance: &Tolerance,
    linear_algebra: LinearAlgebra,
) -> Outcome {
    let mut run = Run {
        mechanism,
        coefficients,
        times,
        tolerance: *tolerance,
        linear_algebra,
        snapshots: Vec::with_capacity(times.len()),
        from: (0.0, start.to_vec()),
        reached: 0.0,
        work: Work::default(),
    };
    if let Err(reason) = run.check() {
        return run.end(Some(reason));
    }
    while run.times.get(run.snapshots.len()) == Some(&0.0) {
        run.snapshots.push(start.to_vec());
    }
    loop {
        if run.snapshots.len() == times.len() {
            return run.end(None);
        }
        // A panic inside the solver library leaves nothing of ours broken: `run` holds only
        // finished snapshots and counters, and the solver is dropped.
        let attempt = catch_unwind(AssertUnwindSafe(|| run.attempt()));
        let reason = match attempt {
            Ok(Ok(())) => return run.end(None),
            Ok(Err(Stop::Final(reason))) => return run.end(Some(reason)),
            Ok(Err(Stop::Solver(reason))) => reason,
            Err(panic) => format!("the solver library stopped: {}", message(&*panic)),
        };
        if run.work.tightenings >= MOST_TIGHTENINGS || run.tolerance.relative <= TIGHTEST {
            return run.end(Some(reason));
        }
        run.work.tightenings += 1;
        run.tolerance.relative = (run.tolerance.relative / TIGHTENING).max(TIGHTEST);
    }
}

/// One cell under way.
struct Run<'a> {
    mechanism: &'a Mechanism,
    coefficients: &'a Coefficients,
    times: &'a [f64],
    tolerance: Tolerance,
    linear_algebra: LinearAlgebra,
    snapshots: Vec<Vec<f64>>,
    /// Time and state the next attempt begins from: the last snapshot, or the start.
    from: (f64, Vec<f64>),
    /// How far the last attempt came.
    reached: f64,
    work: Work,
}

impl<'a> Run<'a> {
    /// What makes an integration impossible before it begins.
    fn check(&self) -> Result<(), String> {
        self.mechanism
            .check(self.coefficients)
            .map_err(|error| error.to_string())?;
        let (found, expected) = (self.from.1.len(), self.mechanism.species());
        if found != expected {
            return Err(format!("{found} initial abundances for {expected} species"));
        }
        if let Some((species, value)) = not_finite(&self.from.1) {
            return Err(format!(
                "the initial abundance of species {species} is {value}"
            ));
        }
        let Tolerance { relative, smallest } = self.tolerance;
        let possible = relative > 0.0 && relative < 1.0 && smallest > 0.0 && smallest.is_finite();
        if !possible {
            return Err(format!(
                "no integration with the tolerances {relative} and {smallest}"
            ));
        }
        let mut earlier = 0.0;
        for &time in self.times {
            if !(time >= earlier && time.is_finite()) {
                return Err(format!("output time {time} s after {earlier} s"));
            }
            earlier = time;
        }
        Ok(())
    }

    fn end(self, reason: Option<String>) -> Outcome {
        let status = match reason {
            None => Status::Finished,
            Some(reason) => Status::Failed {
                time_s: self.reached,
                reason,
            },
        };
        Outcome {
            snapshots: self.snapshots,
            status,
            work: self.work,
        }
    }

    /// One solver from the last snapshot on, through the remaining times if all goes well.
    fn attempt(&mut self) -> Result<(), Stop> {
        match self.linear_algebra {
            LinearAlgebra::Static => {
                self.attempt_with(StaticLu::new(self.mechanism.elimination().clone()))
            }
            LinearAlgebra::Faer => self.attempt_with(FaerSparseLU::default()),
        }
    }

    fn attempt_with<S: LinearSolver<SparseMatrix>>(&mut self, linear: S) -> Result<(), Stop> {
        let (t0, start) = (self.from.0, self.from.1.clone());
        self.reached = t0;
        let equations = Equations::new(self.mechanism, self.coefficients, start);
        let problem = problem(equations, t0, &self.tolerance).map_err(said)?;
        let mut state = problem.bdf_state::<S>().map_err(said)?;
        first_step(
            &mut state,
            t0,
            self.times.last().copied().unwrap_or(t0),
            self.work.tightenings > 0,
        );
        let mut solver: Bdf<'_, _, S> = Bdf::new(&problem, state, linear).map_err(said)?;
        let before = self.work;
        let result = self.advance(&mut solver);
        let statistics = solver.get_statistics();
        let (rhs, jacobians) = problem.eqn.calls();
        self.work.steps = before.steps + statistics.number_of_steps;
        self.work.error_test_failures =
            before.error_test_failures + statistics.number_of_error_test_failures;
        self.work.newton_iterations =
            before.newton_iterations + statistics.number_of_nonlinear_solver_iterations;
        self.work.newton_failures =
            before.newton_failures + statistics.number_of_nonlinear_solver_fails;
        self.work.factorisations =
            before.factorisations + statistics.number_of_linear_solver_setups;
        self.work.rhs = before.rhs + rhs;
        self.work.jacobians = before.jacobians + jacobians;
        result
    }

    /// Steps and interpolates; restarts at order 1 where the solver gives up.
    fn advance<'p, 'm: 'p>(
        &mut self,
        solver: &mut impl OdeSolverMethod<'p, Equations<'m>>,
    ) -> Result<(), Stop> {
        let species = self.mechanism.species();
        let mut snapshot = StateVector::zeros(species, diffsol::FaerContext::new());
        let mut restarts = 0;
        while let Some(&time) = self.times.get(self.snapshots.len()) {
            while solver.state().t < time {
                let stepped = solver.step();
                let state = solver.state();
                self.reached = state.t;
                if let Some((species, value)) = not_finite(slice(state.y)) {
                    return Err(Stop::Solver(format!(
                        "the abundance of species {species} became {value}"
                    )));
                }
                if self.work.steps + solver.get_statistics().number_of_steps >= MOST_STEPS {
                    return Err(Stop::Final(format!("no end after {MOST_STEPS} steps")));
                }
                let Err(error) = stepped else { continue };
                if restarts == MOST_RESTARTS || state.t <= 0.0 || !helped_by_restart(&error) {
                    return Err(said(error));
                }
                restarts += 1;
                self.work.restarts += 1;
                self.restart(solver);
            }
            solver
                .interpolate_inplace(time, &mut snapshot)
                .map_err(said)?;
            self.snapshots.push(slice(&snapshot).to_vec());
            self.from = (time, slice(&snapshot).to_vec());
            restarts = 0;
        }
        Ok(())
    }

    /// Forgets the history: order 1, derivative recomputed, a small first step.
    fn restart<'p, 'm: 'p>(&self, solver: &mut impl OdeSolverMethod<'p, Equations<'m>>) {
        let mut scratch = self.mechanism.scratch();
        let state = solver.state_mut();
        let y = slice(state.y);
        self.mechanism
            .rhs(self.coefficients, y, slice_mut(state.dy), &mut scratch);
        *state.h = RESTART_STEP * *state.t;
    }
}

/// The solver's settings: measured on gas-grain networks of 270 to 570 species.
fn problem<'m>(
    equations: Equations<'m>,
    t0: f64,
    tolerance: &Tolerance,
) -> Result<OdeSolverProblem<Equations<'m>>, DiffsolError> {
    let mut problem = OdeBuilder::<SparseMatrix>::new()
        .t0(t0)
        .rtol(tolerance.relative)
        .atol([tolerance.smallest])
        .build_from_eqn(equations)?;
    let options = &mut problem.ode_options;
    // Fast cells need first steps far below the default minimum of 2.2e-16 s.
    options.min_timestep = 1e-60;
    options.max_number_timesteps = MOST_STEPS;
    options.max_nonlinear_solver_failures = 100;
    options.max_nonlinear_solver_iterations = 6;
    // Factors above 2 save some work (6 % of steps at 10, 180 cells of the demo) and lose digits
    // of the linear invariants: round-off in the history grows with every large change of step
    // (zero-instability), and the error test sees it only when it reaches the tolerance. Demo,
    // below 100 K: elements off by 1e-11 at 10, 1e-12 at 2; ice total by 2e-5 against 1e-6.
    options.max_timestep_growth = Some(2.0);
    options.min_timestep_growth = Some(1.2);
    options.threshold_to_update_rhs_jacobian = 1e9;
    options.update_rhs_jacobian_after_steps = 10;
    Ok(problem)
}

/// Keeps the solver's first step within the span, and makes it smaller on a second attempt.
fn first_step(state: &mut BdfState<StateVector>, t0: f64, end: f64, smaller: bool) {
    let span = end - t0;
    let h = state.as_mut().h;
    // The solver's estimate is NaN or 0 where the derivative overflows or the state is 0.
    if !(*h > 0.0 && *h < span) {
        *h = 1e-3 * span;
    }
    if smaller {
        *h *= SMALLER_FIRST_STEP;
    }
}

/// Whether a fresh start from the current state may cure the failure.
fn helped_by_restart(error: &DiffsolError) -> bool {
    matches!(
        error,
        DiffsolError::OdeSolverError(
            OdeSolverError::TooManyErrorTestFailures { .. }
                | OdeSolverError::TooManyNonlinearSolverFailures { .. }
                | OdeSolverError::StepSizeTooSmall { .. }
        )
    )
}

fn said(error: DiffsolError) -> Stop {
    Stop::Solver(error.to_string())
}

/// The first number that is not finite, with its index.
fn not_finite(values: &[f64]) -> Option<(usize, f64)> {
    values
        .iter()
        .copied()
        .enumerate()
        .find(|(_, value)| !value.is_finite())
}

/// What a panic said.
fn message(panic: &(dyn std::any::Any + Send)) -> &str {
    match (panic.downcast_ref::<&str>(), panic.downcast_ref::<String>()) {
        (Some(text), _) => text,
        (_, Some(text)) => text,
        _ => "without a message",
    }
}
