//! Owns running the cells of a disk: which cell runs where, the journal that makes a run
//! restartable, progress and signals.
//!
//! It never integrates anything itself: what one cell does is a function handed to [`workers`].

mod frame;
pub mod journal;
pub mod progress;
pub mod record;
mod same_run;
pub mod signals;
pub mod workers;
