//! Owns the reaction network: the file's layout, its reading and checks, and the expansion into
//! every reaction that runs.
//!
//! It never evaluates a rate.

pub mod layout;
pub mod model;
pub mod names;
