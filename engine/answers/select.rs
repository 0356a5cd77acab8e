//! Owns the choice of cells and species by what a person types.
//!
//! It never reads abundances.

use crate::disk::conditions::Conditions;
use crate::errors::InputError;
use crate::network::names::alike;
use crate::store::RunHeader;
use std::path::Path;

/// The cell nearest to (`radius`, `height`) in au, by straight distance in the (R, z) plane; the
/// first of equals. None without cells.
pub fn nearest(cells: &[Conditions], radius: f64, height: f64) -> Option<usize> {
    let distance = |c: &Conditions| (c.radius - radius).hypot(c.height - height);
    (0..cells.len()).min_by(|a, b| distance(&cells[*a]).total_cmp(&distance(&cells[*b])))
}

/// Species from a list separated by commas.
///
/// # Errors
/// A name the run does not have, with the names that look like it.
pub fn species(header: &RunHeader, list: &str) -> Result<Vec<usize>, InputError> {
    let wrong = |found: String, expected: String| {
        InputError::new(Path::new(""), None, "--species", found, expected)
    };
    let names: Vec<&str> = list
        .split(',')
        .map(str::trim)
        .filter(|n| !n.is_empty())
        .collect();
    if names.is_empty() {
        return Err(wrong(
            "an empty list".into(),
            "names separated by commas".into(),
        ));
    }
    names
        .into_iter()
        .map(|name| {
            header.find(name).ok_or_else(|| {
                let names = header.species.iter().map(|s| s.name.as_str());
                let alike = alike(names, name);
                let expected = if alike.is_empty() {
                    "a species of the run (`look --species` lists them)".to_string()
                } else {
                    format!("a species of the run, such as {}", alike.join(", "))
                };
                wrong(format!("`{name}`"), expected)
            })
        })
        .collect()
}
