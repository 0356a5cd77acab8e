//! Owns the disk: its cells and their conditions, read from a table or made from a recipe.
//!
//! It never touches chemistry: species appear only by the names of their shielding columns.

pub mod columns;
pub mod conditions;
pub mod ionisation;
pub mod light;
pub mod recipe;
pub mod structure;
pub mod table;

pub use conditions::{Conditions, Disk, FieldKind, Light};
pub use recipe::Recipe;
pub use table::write_table;
