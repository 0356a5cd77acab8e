//! Owns running the cells of a disk: making a case ready, which cell runs where, the journal that
//! makes a run restartable, progress and signals.
//!
//! It never holds physics: rates and integration are functions it calls, one cell at a time.

pub mod balance;
pub mod cell;
mod frame;
pub mod grid;
pub mod journal;
pub mod prepare;
pub mod progress;
pub mod record;
mod same_run;
pub mod signals;
pub mod workers;

pub use grid::{Options, Summary, gather, journal_path, run};
pub use prepare::Prepared;
