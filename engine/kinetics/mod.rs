//! Owns the mathematics of a cell: the abstract kinetic system and its integration in time.
//!
//! It never knows chemistry, files or units: species are indices, coefficients are numbers in
//! units of the state.

pub mod equations;
#[cfg(test)]
mod exactness;
pub mod factor;
pub mod fluxes;
pub mod integrate;
#[cfg(test)]
mod invented_network;
pub mod jacobian;
pub mod lu;
pub mod mechanism;
pub mod sums;

pub use integrate::{LinearAlgebra, Outcome, Status, Tolerance, Work, integrate, integrate_with};
pub use mechanism::{Coefficients, Factor, Falloff, Mechanism, MechanismError, Scratch, Step};
