//! Owns what every reaction does in one cell: its coefficient from the cell's conditions.
//!
//! One file per cause holds the physics as pure functions; `cell` applies them to a whole
//! network. It never integrates and never looks at abundances: what depends on the state is left
//! to the factors of `kinetics::mechanism`, which `steps` chooses.

mod cell;
pub mod dust;
pub mod ice;
pub mod light;
mod reverse;
pub mod shielding;
mod steps;
pub mod surface;
pub mod two_body;

pub use cell::{CAUTIONS, Cautions, CellRates, Setting, cell_rates};
pub use steps::mechanism;
