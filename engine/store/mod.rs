//! Owns the run file: one HDF5 file per run that explains itself to any reader.
//!
//! [`assemble()`] writes it whole or not at all, from the records of a journal; [`open`] reads it back.
//! It never computes chemistry, and never appends to a file that exists.
//!
//! Layout: `abundance[cell, time, species]` with the dimension scales `cell`, `time` (yr), `species`
//! and `element`; the conditions of each cell, `status[cell]` and what is known of each species beside
//! it; groups `work`, `checks` and `provenance`. Nothing in it differs between identical runs but
//! `work/seconds`.

pub mod assemble;
pub mod bytes;
mod collected;
pub mod durable;
pub mod header;
mod layout;
mod put;
mod read;
mod scales;

use crate::errors::Failure;
use crate::run::record::CellRecord;

pub use assemble::{assemble, check_target};
pub use header::{RunHeader, SpeciesInfo, Tolerances};
pub use read::{RunFile, open};

/// Where the records of [`assemble()`] come from: called once per cell, in ascending order; None where
/// there is none.
pub type RecordSource<'a> = dyn FnMut(usize) -> Result<Option<CellRecord>, Failure> + 'a;

/// Root attribute by which a run file is known, and the version of its layout.
const LAYOUT_ATTRIBUTE: &str = "frostclock_run_layout";
const LAYOUT_VERSION: i32 = 1;

/// Chunk of `abundance[cell, time, species]`: one cell's history and one species' map both read
/// quickly (measured on 3000 x 60 x 600 values: 6 ms and 53 ms).
const CHUNK: [usize; 3] = [16, 15, 120];

#[cfg(test)]
pub(crate) mod samples;
#[cfg(test)]
mod tests;
