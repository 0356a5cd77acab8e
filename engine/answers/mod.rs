//! Owns the answers read off a run file: values at any time, histories, summaries.
//!
//! It never integrates and never rebuilds a network: `inquiry` will.

pub mod interpolate;
pub mod overview;
pub mod select;
