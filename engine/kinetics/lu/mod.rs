//! Owns the linear algebra of Newton's iteration: a sparse LU on a pattern that is fixed and
//! ordered once per network.
//!
//! It never knows kinetics: any square pattern, any values. Ordering (`order`, `pattern`) is
//! shared by all threads; numbers (`factors`) belong to one; `solver` fits them to the integrator.

mod dense;
mod factors;
mod order;
mod pattern;
mod solver;
#[cfg(test)]
mod tests;

pub use factors::{Factors, SingularPivot};
pub use pattern::Pattern;
pub use solver::StaticLu;
