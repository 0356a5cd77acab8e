//! Owns the answer to whether a run may continue a journal, and if not, what differs.
//!
//! It never reads a file.

use std::path::Path;

use crate::errors::InputError;
use crate::store::header::{CELL_NUMBERS, RunHeader, cell_numbers};
use crate::units::number_text;

/// How many differing lines of a case are shown.
const LINES_SHOWN: usize = 3;

/// What keeps the run of `now` from continuing the journal of `then`.
pub(super) fn differences(path: &Path, then: &RunHeader, now: &RunHeader) -> Vec<InputError> {
    const WAY_OUT: &str = " (or start over with --fresh, or choose another output)";
    let differs = |what: String, then: &str, now: &str| {
        InputError::new(
            path,
            None,
            what,
            format!("`{then}`"),
            format!("`{now}`{WAY_OUT}"),
        )
    };
    let mut found = Vec::new();
    if then.engine_version != now.engine_version {
        found.push(differs(
            "engine version".into(),
            &then.engine_version,
            &now.engine_version,
        ));
    }
    if then.kernel != now.kernel {
        found.push(differs(
            "numerical kernel".into(),
            &then.kernel,
            &now.kernel,
        ));
    }
    for (line, then, now) in differing_lines(&then.case_text, &now.case_text) {
        found.push(differs(format!("resolved case, line {line}"), then, now));
    }
    if let Some((line, then, now)) = differing_lines(&then.network_text, &now.network_text).next() {
        found.push(differs(format!("network text, line {line}"), then, now));
    }
    if let Some((line, then, now)) = differing_lines(&then.thermo_text, &now.thermo_text).next() {
        found.push(differs(format!("polynomials, line {line}"), then, now));
    }
    // Compared by their bytes, as the hash is: the cells of a table may differ in the last bit.
    if found.is_empty() && then.input_hash() != now.input_hash() {
        let cell = then
            .disk
            .cells
            .iter()
            .zip(&now.disk.cells)
            .position(|(t, n)| t != n);
        let what = match cell {
            Some(cell) => format!("conditions of cell {cell}"),
            None => "cells of the disk".to_string(),
        };
        let counted = |header: &RunHeader| format!("{} cells", header.disk.cells.len());
        let (then, now) = match cell {
            Some(cell) => differing_conditions(then, now, cell),
            None => (counted(then), counted(now)),
        };
        found.push(differs(what, &then, &now));
    }
    // The same inputs expanded otherwise: only an engine changed without a new version does that.
    let axes = |header: &RunHeader| {
        let caution_count = header.caution_names.len();
        (
            header.species.clone(),
            header.times_yr.clone(),
            caution_count,
        )
    };
    if found.is_empty() && axes(then) != axes(now) {
        let counted = |header: &RunHeader| {
            format!(
                "{} species, {} times",
                header.species.len(),
                header.times_yr.len()
            )
        };
        found.push(differs(
            "expanded inputs".into(),
            &counted(then),
            &counted(now),
        ));
    }
    found
}

/// The first lines that differ, 1-based; a missing line reads as empty.
fn differing_lines<'a>(
    then: &'a str,
    now: &'a str,
) -> impl Iterator<Item = (usize, &'a str, &'a str)> {
    let count = then.lines().count().max(now.lines().count());
    let (mut then, mut now) = (then.lines(), now.lines());
    (1..=count)
        .map(move |line| (line, then.next().unwrap_or(""), now.next().unwrap_or("")))
        .filter(|(_, then, now)| then != now)
        .take(LINES_SHOWN)
}

/// The conditions of a cell by the names of their columns.
fn conditions(header: &RunHeader, cell: usize) -> Vec<(String, f64)> {
    let Some(cell) = header.disk.cells.get(cell) else {
        return Vec::new();
    };
    let plain = CELL_NUMBERS.iter().zip(cell_numbers(cell));
    let mut all: Vec<_> = plain
        .map(|((name, unit, _), value)| (format!("{name} [{unit}]"), value))
        .collect();
    for (field, light) in header.disk.fields.iter().zip(&cell.light) {
        let field = &field.name;
        all.push((format!("UV_{field} [Draine]"), light.strength));
        all.push((format!("AV_{field} [mag]"), light.extinction));
        for (s, species) in header.disk.column_species.iter().enumerate() {
            all.push((format!("N_{species}_{field} [cm-2]"), light.columns[s]));
            // NaN stands for "not given", here as in the run file.
            let shield = light.shields[s].unwrap_or(f64::NAN);
            all.push((format!("shield_{species}_{field} [1]"), shield));
        }
    }
    all
}

/// Those conditions of a cell that differ, as each of the two has them.
fn differing_conditions(then: &RunHeader, now: &RunHeader, cell: usize) -> (String, String) {
    let (then, now) = (conditions(then, cell), conditions(now, cell));
    let pairs = then
        .iter()
        .zip(&now)
        .filter(|(t, n)| t.0 != n.0 || t.1.to_bits() != n.1.to_bits());
    let word = |(name, value): &(String, f64)| format!("{name} {}", number_text(*value));
    let (then, now): (Vec<_>, Vec<_>) = pairs
        .take(LINES_SHOWN)
        .map(|(t, n)| (word(t), word(n)))
        .unzip();
    (then.join(", "), now.join(", "))
}
