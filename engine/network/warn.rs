//! Owns the doubts about a network that is valid: each is one small function.
//!
//! It never refuses anything.

use super::collisions;
use super::findings::{Warning, WarningKind};
use super::groups::{self, Group};
use super::limits;
use super::model::Piece;
use super::read::{Entry, Network};
use std::collections::HashSet;

/// Endothermicity (kJ/mol) that no barrier needs to answer for: the enthalpies are not better.
const ENDOTHERMIC: f64 = 8.0;
/// Ratio of two pieces at their joint that still counts as meeting.
const JUMP: f64 = 1.05;

/// All warnings, by line.
pub(super) fn all(network: &Network) -> Vec<Warning> {
    let mut warnings = Vec::new();
    never_formed_or_destroyed(network, &mut warnings);
    never_neutralised(network, &mut warnings);
    collisions::above_limit(network, &mut warnings);
    for entry in &network.entries {
        endothermic(network, entry, &mut warnings);
        changes_nothing(entry, &mut warnings);
    }
    jumps(network, &mut warnings);
    warnings.sort_by_key(|warning| warning.line);
    warnings
}

/// Species without source or sink. Freezing out and coming back is neither: gas and ice of one
/// species are looked at together.
fn never_formed_or_destroyed(network: &Network, warnings: &mut Vec<Warning>) {
    let (formed, destroyed) = formed_and_destroyed(network);
    for place in 0..network.roster.gas {
        let name = &network.roster.species[place].name;
        let mut warn = |kind, what: &str| {
            let line = network.line(&format!("species[{place}]"));
            let text = format!("nothing {what} it");
            warnings.push(Warning {
                line,
                entry: format!("species {name}"),
                text,
                kind,
            });
        };
        if !formed.contains(&place) {
            warn(WarningKind::NeverFormed, "forms");
        }
        if !destroyed.contains(&place) {
            warn(WarningKind::NeverDestroyed, "destroys");
        }
    }
}

/// Gas species (also for their ices) with a source, and with a sink.
fn formed_and_destroyed(network: &Network) -> (HashSet<usize>, HashSet<usize>) {
    let roster = &network.roster;
    let (mut formed, mut destroyed) = (HashSet::new(), HashSet::new());
    let mut change = |left: &[usize], right: &[usize]| {
        let of = |side: &[usize]| side.iter().map(|s| roster.gas_form(*s)).collect::<Vec<_>>();
        let (left, right) = (of(left), of(right));
        let count = |side: &[usize], s| side.iter().filter(|other| **other == s).count();
        for s in left.iter().chain(&right).copied() {
            let (before, after) = (count(&left, s), count(&right, s));
            if after > before {
                formed.insert(s);
            } else if after < before {
                destroyed.insert(s);
            }
        }
    };
    for entry in &network.entries {
        change(&entry.reactants, &entry.products);
    }
    for (ice, channels) in network.photodesorption.iter().enumerate() {
        for products in channels {
            change(&[roster.gas + ice], products);
        }
    }
    let electron = roster.find("e-");
    for (ion, becomes) in &network.neutralisation {
        change(&[*ion], becomes);
    }
    if let (Some(electron), Some(dust)) = (electron, &network.file.dust) {
        change(&[electron], &[]);
        if let (Some(h), Some(h2), true) = (
            roster.find("H"),
            roster.find("H2"),
            dust.hydrogen_formation.is_some(),
        ) {
            change(&[h, h], &[h2]);
        }
    }
    (formed, destroyed)
}

/// Cations that stay what they are when they meet a grain.
fn never_neutralised(network: &Network, warnings: &mut Vec<Warning>) {
    if network.neutralisation.is_empty() {
        return;
    }
    let known: HashSet<usize> = network.neutralisation.iter().map(|(ion, _)| *ion).collect();
    for (place, species) in network.roster.species.iter().enumerate() {
        if species.charge > 0 && !known.contains(&place) {
            warnings.push(Warning {
                line: network.line(&format!("species[{place}]")),
                entry: format!("species {}", species.name),
                text: "no line of `dust.neutralisation` says what grains make of it".to_string(),
                kind: WarningKind::NeverNeutralised,
            });
        }
    }
}

/// Reactions of the gas that need heat but have no barrier.
fn endothermic(network: &Network, entry: &Entry, warnings: &mut Vec<Warning>) {
    let explained = !reason(network, entry).trim().is_empty();
    if explained || barrier(network, entry).is_none_or(|barrier| barrier > 0.0) {
        return;
    }
    let Some(heat) = heat(network, entry) else {
        return;
    };
    if heat > ENDOTHERMIC {
        warnings.push(Warning {
            line: entry.line,
            entry: entry.change.clone(),
            text: format!("no barrier, but endothermic by {heat:.1} kJ/mol"),
            kind: WarningKind::Endothermic,
        });
    }
}

/// Heat (kJ/mol at 298 K) that a gas reaction takes up, where all enthalpies are known.
pub(super) fn heat(network: &Network, entry: &Entry) -> Option<f64> {
    let of = |side: &[usize]| -> Option<f64> {
        side.iter()
            .map(|s| network.file.species.get(*s)?.enthalpy)
            .sum()
    };
    Some(of(&entry.products)? - of(&entry.reactants)?)
}

/// What the line says about being endothermic without a barrier.
fn reason<'a>(network: &'a Network, entry: &Entry) -> &'a str {
    let file = &network.file;
    match entry.group {
        Group::Gas => &file.gas[entry.index].endothermic,
        Group::ThreeBody => &file.three_body[entry.index].endothermic,
        Group::ThirdBody => &file.third_body[entry.index].endothermic,
        Group::Capture => &file.capture[entry.index].endothermic,
        Group::Falloff => &file.falloff[entry.index].endothermic,
        Group::Light | Group::Cosmic | Group::Surface => "",
    }
}

/// The barrier (K) of a gas reaction at its lowest temperatures; None for what light drives.
pub(super) fn barrier(network: &Network, entry: &Entry) -> Option<f64> {
    let file = &network.file;
    let lowest = |line| groups::pieces(line).first().map(|piece| piece.barrier);
    match entry.group {
        Group::Gas => lowest(&file.gas[entry.index]),
        Group::ThreeBody => lowest(&file.three_body[entry.index]),
        Group::ThirdBody => lowest(&file.third_body[entry.index]),
        Group::Capture => Some(0.0),
        Group::Falloff => {
            let line = &file.falloff[entry.index];
            Some(line.low.barrier.max(line.high.barrier))
        }
        Group::Light | Group::Cosmic | Group::Surface => None,
    }
}

/// Reactions that give back what they take.
fn changes_nothing(entry: &Entry, warnings: &mut Vec<Warning>) {
    if entry.reactant_set() == entry.product_set() {
        warnings.push(Warning {
            line: entry.line,
            entry: entry.change.clone(),
            text: "the same species on both sides: it changes nothing".to_string(),
            kind: WarningKind::ChangesNothing,
        });
    }
}

/// Pieces that differ where they should meet.
fn jumps(network: &Network, warnings: &mut Vec<Warning>) {
    for (group, index, line) in groups::power_laws(&network.file) {
        for pair in groups::pieces(line).windows(2) {
            let ratio = jump(&pair[0], &pair[1]);
            if ratio.max(1.0 / ratio) > JUMP {
                warnings.push(Warning {
                    line: network.line(&format!("{}[{index}]", group.key())),
                    entry: line.change.clone(),
                    text: format!("jumps by a factor {ratio:.3} at {} K", pair[0].valid[1]),
                    kind: WarningKind::Jump,
                });
            }
        }
    }
}

/// Upper over lower piece at their joint.
fn jump(lower: &Piece, upper: &Piece) -> f64 {
    let joint = lower.valid[1];
    limits::piece(upper, joint) / limits::piece(lower, joint)
}
