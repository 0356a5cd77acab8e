//! Owns the reaction network: the file's layout, its reading and checks, and the expansion into
//! every reaction that runs.
//!
//! It never evaluates the rate of a run: `rates` does.

pub mod audit;
mod check;
mod collisions;
pub mod compare;
pub mod equilibrium;
pub mod expand;
pub mod findings;
pub mod groups;
pub mod layout;
pub mod limits;
pub mod model;
pub mod names;
pub mod read;
pub mod roster;
pub mod thermo;
mod warn;

pub use expand::expand;
pub use findings::{Severity, Warning, WarningKind};
pub use read::{Network, read, read_all, read_with};

#[cfg(test)]
mod tests;
