//! Owns what rows of the same change become: pieces of one entry, entries that add, or duplicates.
//!
//! It never looks at a single row's numbers: the reader of networks has judged them.

use super::laws::{Coefficient, Line};
use super::sources::Sources;
use crate::network::groups::Group;
use crate::network::layout::Standing;
use crate::network::model::Piece;
use std::collections::HashMap;

/// Ends of ranges that differ by less than this share are the same.
const SAME: f64 = 1e-9;

/// A row that could not be joined with the others of its change, and why.
pub type Refused = (usize, String);

/// Joins lines, given in the order of the table; the result is in the order of expansion.
pub fn join(
    lines: Vec<Line>,
    meet_within: f64,
    sources: &mut Sources,
) -> (Vec<Line>, Vec<Refused>) {
    let mut changes: Vec<Vec<Line>> = Vec::new();
    let mut places: HashMap<(&str, Vec<String>, Vec<String>), usize> = HashMap::new();
    for line in lines {
        let key = (
            drive(&line),
            sorted(&line.reactants),
            sorted(&line.products),
        );
        let place = *places.entry(key).or_insert(changes.len());
        if place == changes.len() {
            changes.push(Vec::new());
        }
        changes[place].push(line);
    }
    let (mut joined, mut refused) = (Vec::new(), Vec::new());
    for lines in changes {
        let mut entries = entries(lines, meet_within, sources, &mut refused);
        entries.sort_by_key(order);
        for later in entries.iter_mut().skip(1) {
            later.adds = true;
        }
        joined.extend(entries);
    }
    joined.sort_by_key(order);
    (joined, refused)
}

/// The order of expansion, by first row within a group.
fn order(line: &Line) -> (usize, usize) {
    let group = super::write::GROUPS
        .iter()
        .position(|group| *group == line.group);
    (
        group.unwrap_or(usize::MAX),
        line.rows.first().copied().unwrap_or(0),
    )
}

fn sorted(names: &[String]) -> Vec<String> {
    let mut names = names.to_vec();
    names.sort();
    names
}

/// Lines of different causes may share a change; the reader of networks draws the same borders.
fn drive(line: &Line) -> &'static str {
    match (&line.coefficient, line.group) {
        (Coefficient::Secondary(_), _) => "secondary",
        (_, Group::Gas | Group::Capture | Group::Falloff | Group::ThreeBody) => "encounters",
        (_, group) => group.key(),
    }
}

/// The entries that the rows of one change make.
fn entries(
    lines: Vec<Line>,
    meet_within: f64,
    sources: &mut Sources,
    refused: &mut Vec<Refused>,
) -> Vec<Line> {
    // Every layer is one entry; the rows of a layer do not overlap.
    let mut layers: Vec<Vec<Line>> = Vec::new();
    for line in lines {
        let own = layers
            .iter()
            .position(|layer| takes(layer, &line, meet_within));
        let first = layers.first().and_then(|layer| layer.first());
        match (own, first) {
            (Some(own), _) => layers[own].push(line),
            (None, None) => layers.push(vec![line]),
            (None, Some(first)) if adds(first, &line) => layers.push(vec![line]),
            (None, Some(first)) => {
                refused.push((line.rows[0], duplicate(first, &layers, &line, meet_within)))
            }
        }
    }
    layers
        .into_iter()
        .filter_map(|layer| pieces(layer, meet_within, sources, refused))
        .collect()
}

fn range(line: &Line) -> Option<[f64; 2]> {
    match &line.coefficient {
        Coefficient::Power(pieces) => pieces.first().map(|piece| piece.valid),
        _ => None,
    }
}

/// Whether a row may be a further piece beside those of a layer.
fn takes(layer: &[Line], line: &Line, meet_within: f64) -> bool {
    layer.iter().all(|other| {
        other.group == line.group
            && match (range(other), range(line)) {
                (Some(one), Some(two)) => !overlap(one, two, meet_within),
                _ => false,
            }
    })
}

fn overlap(one: [f64; 2], two: [f64; 2], meet_within: f64) -> bool {
    let common = one[1].min(two[1]) - one[0].max(two[0]);
    common > meet_within.max(SAME * one[1])
}

/// Whether the mapping lets the two add up. Light and cosmic rays have no second entries.
fn adds(first: &Line, line: &Line) -> bool {
    (first.may_add || line.may_add) && !matches!(line.group, Group::Light | Group::Cosmic)
}

fn duplicate(first: &Line, layers: &[Vec<Line>], line: &Line, meet_within: f64) -> String {
    let rival = layers
        .iter()
        .flatten()
        .find(|other| match (range(other), range(line)) {
            (Some(one), Some(two)) => other.group == line.group && overlap(one, two, meet_within),
            _ => false,
        });
    let (other, how) = match rival {
        Some(rival) => (rival, " in an overlapping range"),
        None => (first, ""),
    };
    let expected = if matches!(line.group, Group::Light | Group::Cosmic) {
        "one row"
    } else {
        "one row, ranges that meet, or `adds: true` in the law if both add up"
    };
    format!(
        "found the same change as line {}{how}, expected {expected}",
        other.rows[0]
    )
}

/// Makes one entry of rows that do not overlap; those across a gap are refused.
fn pieces(
    mut layer: Vec<Line>,
    meet_within: f64,
    sources: &mut Sources,
    refused: &mut Vec<Refused>,
) -> Option<Line> {
    if layer.len() < 2 {
        return layer.pop();
    }
    let oldest = layer
        .iter()
        .filter_map(|line| line.rows.first().copied())
        .min()?;
    let low = |line: &Line| range(line).map_or(0.0, |valid| valid[0]);
    layer.sort_by(|a, b| low(a).total_cmp(&low(b)));
    // Chains of rows whose ranges meet; the one with the first row of the table is kept.
    let mut chains: Vec<Vec<Line>> = Vec::new();
    for mut line in layer {
        let end = chains
            .last()
            .and_then(|chain| chain.last())
            .and_then(range)
            .map(|valid| valid[1]);
        let valid = range(&line)?;
        let meets = end
            .filter(|end| (valid[0] - end).abs() <= meet_within.max(SAME * end) && *end < valid[1]);
        match (meets, chains.last_mut()) {
            (Some(end), Some(chain)) => {
                start_at(&mut line, end);
                chain.push(line);
            }
            _ => chains.push(vec![line]),
        }
    }
    let holds = |chain: &Vec<Line>| chain.iter().any(|line| line.rows[0] == oldest);
    let (mut kept, others): (Vec<_>, Vec<_>) = chains.into_iter().partition(holds);
    let kept = kept.pop()?;
    for line in others.into_iter().flatten() {
        let [low, high] = range(&line)?;
        let found = format!(
            "found the range {low} to {high} K apart from that of line {oldest} with the same change"
        );
        refused.push((line.rows[0], format!("{found}, expected ranges that meet")));
    }
    together(kept, sources)
}

/// Moves the start of a piece to where the one before it ends.
fn start_at(line: &mut Line, end: f64) {
    if let Coefficient::Power(pieces) = &mut line.coefficient {
        for piece in pieces.iter_mut() {
            if (piece.valid[0] - end).abs() > SAME * end {
                let was = piece.valid[0];
                line.note.push(format!("from {end} instead of {was} K"));
            }
            piece.valid[0] = end;
        }
    }
}

/// One entry of ascending pieces: as uncertain and as doubtful as the worst of them.
fn together(chain: Vec<Line>, sources: &mut Sources) -> Option<Line> {
    let all: Vec<Piece> = (chain.iter())
        .flat_map(|line| match &line.coefficient {
            Coefficient::Power(pieces) => pieces.clone(),
            _ => Vec::new(),
        })
        .collect();
    let keys: Vec<&str> = chain.iter().map(|line| line.source.as_str()).collect();
    let source = sources.together(&keys);
    let within = chain.iter().filter_map(|line| line.within).reduce(f64::max);
    let standing = chain
        .iter()
        .map(|line| line.standing)
        .max_by_key(|s| doubt(*s))?;
    let mut rows: Vec<usize> = chain.iter().flat_map(|line| line.rows.clone()).collect();
    rows.sort_unstable();
    let mut note: Vec<String> = Vec::new();
    for text in chain.iter().flat_map(|line| &line.note) {
        if !note.contains(text) {
            note.push(text.clone());
        }
    }
    let lowest = chain.into_iter().next()?;
    let coefficient = Coefficient::Power(all);
    Some(Line {
        rows,
        coefficient,
        within,
        standing,
        source,
        note,
        ..lowest
    })
}

fn doubt(standing: Standing) -> u8 {
    match standing {
        Standing::Evaluated => 0,
        Standing::Measured => 1,
        Standing::Recalled => 2,
        Standing::Estimated => 3,
    }
}
