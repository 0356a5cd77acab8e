//! Owns the answer to whether a run may continue a journal, and if not, what differs.
//!
//! It never reads a file.

use std::path::Path;

use crate::errors::InputError;
use crate::store::header::RunHeader;

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
        let counted = |header: &RunHeader| match cell {
            Some(cell) => conditions_in_words(header, cell),
            None => format!("{} cells", header.disk.cells.len()),
        };
        found.push(differs(what, &counted(then), &counted(now)));
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

fn conditions_in_words(header: &RunHeader, cell: usize) -> String {
    let Some(cell) = header.disk.cells.get(cell) else {
        return "none".to_string();
    };
    format!(
        "{} au, {} au, n_H {} cm^-3, T_gas {} K, T_dust {} K, {:?}",
        cell.radius, cell.height, cell.n_h, cell.t_gas, cell.t_dust, cell.light
    )
}
