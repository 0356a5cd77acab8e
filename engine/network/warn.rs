//! Owns the doubts about a network that is valid: each is one small function.
//!
//! It never refuses anything.

use super::findings::{Warning, WarningKind};
use super::groups::{self, Group};
use super::layout::Below;
use super::limits;
use super::model::{Piece, Species};
use super::read::{Entry, Network};
use std::collections::{BTreeMap, HashSet};

/// Endothermicity (kJ/mol) that no barrier needs to answer for: the enthalpies are not better.
const ENDOTHERMIC: f64 = 8.0;
/// Margin over the capture limit: measured coefficients and polarisabilities are not better.
const CAPTURE_MARGIN: f64 = 1.3;
/// What two neutrals can reach at most, cm^3 s^-1.
const NEUTRAL_LIMIT: f64 = 1e-9;
/// Coefficients scaled to a limit and rounded in the file are not above it.
const ROUNDING: f64 = 1.01;
/// Ratio of two pieces at their joint that still counts as meeting.
const JUMP: f64 = 1.05;

/// All warnings, by line.
pub(super) fn all(network: &Network) -> Vec<Warning> {
    let mut warnings = Vec::new();
    never_formed_or_destroyed(network, &mut warnings);
    never_neutralised(network, &mut warnings);
    above_limit(network, &mut warnings);
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

/// A coefficient as a function of T.
type Coefficient<'a> = Box<dyn Fn(f64) -> f64 + 'a>;

/// The coefficient of a two-body gas reaction (high-pressure limit of a falloff).
fn coefficient<'a>(network: &'a Network, entry: &Entry) -> Option<Coefficient<'a>> {
    let file = &network.file;
    match entry.group {
        Group::Gas => {
            let line = &file.gas[entry.index];
            let (pieces, below) = (groups::pieces(line), line.below.unwrap_or(Below::Extend));
            Some(Box::new(move |t| limits::pieces(&pieces, below, t)))
        }
        Group::Capture => {
            let line = &file.capture[entry.index];
            let below = line.below.unwrap_or(Below::Extend);
            Some(Box::new(move |t| {
                let at = limits::evaluated_at(line.valid, below, t);
                let of = |at: f64| limits::dipole_factor(line.x_300k * (300.0 / at).sqrt());
                at.map_or(0.0, |at| line.langevin * of(at))
            }))
        }
        Group::Falloff => {
            let line = &file.falloff[entry.index];
            let below = line.below.unwrap_or(Below::Extend);
            let high = &line.high;
            Some(Box::new(move |t| {
                limits::evaluated_at(line.valid, below, t).map_or(0.0, |at| {
                    limits::power_law(high.at_300k, high.slope, high.barrier, at)
                })
            }))
        }
        _ => None,
    }
}

/// Sums the channels of every pair and compares with what collisions allow.
fn above_limit(network: &Network, warnings: &mut Vec<Warning>) {
    let mut pairs: BTreeMap<[usize; 2], Vec<(&Entry, Coefficient)>> = BTreeMap::new();
    for entry in &network.entries {
        let (Some(coefficient), &[a, b]) = (coefficient(network, entry), &entry.reactants[..])
        else {
            continue;
        };
        pairs
            .entry([a.min(b), a.max(b)])
            .or_default()
            .push((entry, coefficient));
    }
    for ([a, b], channels) in &pairs {
        let pair = [&network.roster.species[*a], &network.roster.species[*b]];
        let total = |t: f64| channels.iter().map(|(_, k)| k(t)).sum::<f64>();
        let excess = match neutral_of(pair) {
            Partner::None => continue,
            Partner::Neutrals => [10.0, 30.0, 100.0, 300.0, 1000.0]
                .map(|t| (t, total(t), NEUTRAL_LIMIT))
                .into_iter()
                .find(|(_, k, limit)| *k > ROUNDING * limit),
            Partner::Ion {
                neutral,
                reduced_mass,
            } => {
                let place = if neutral == 0 { *a } else { *b };
                let line = &network.file.species[place];
                let Some(polarisability) = line.polarisability.filter(|p| *p > 0.0) else {
                    continue;
                };
                let dipole = line.dipole.unwrap_or(0.0);
                [10.0, 300.0]
                    .map(|t| {
                        (
                            t,
                            total(t),
                            CAPTURE_MARGIN
                                * limits::capture(polarisability, dipole, reduced_mass, t),
                        )
                    })
                    .into_iter()
                    .find(|(_, k, limit)| *k > ROUNDING * limit)
            }
        };
        if let (Some((t, k, limit)), Some((first, _))) = (excess, channels.first()) {
            let all = if channels.len() > 1 {
                " (all channels of the pair)"
            } else {
                ""
            };
            warnings.push(Warning {
                line: first.line,
                entry: first.change.clone(),
                text: format!(
                    "{k:.2e} cm^3 s^-1 at {t} K{all}, above the limit of collisions {limit:.2e}"
                ),
                kind: WarningKind::AboveCollisionLimit,
            });
        }
    }
}

/// Which collision limit a pair has.
enum Partner {
    /// Attracts at long range: recombination and the like.
    None,
    Neutrals,
    /// One ion; `neutral` is the place (0 or 1) of the other. amu.
    Ion {
        neutral: usize,
        reduced_mass: f64,
    },
}

fn neutral_of(pair: [&Species; 2]) -> Partner {
    let reduced_mass = pair[0].mass * pair[1].mass / (pair[0].mass + pair[1].mass);
    let electron = pair.iter().any(|s| s.charge != 0 && s.atoms.is_empty());
    match (pair[0].charge, pair[1].charge) {
        (0, 0) => Partner::Neutrals,
        _ if electron => Partner::None,
        (0, _) => Partner::Ion {
            neutral: 0,
            reduced_mass,
        },
        (_, 0) => Partner::Ion {
            neutral: 1,
            reduced_mass,
        },
        _ => Partner::None,
    }
}

/// Reactions of the gas that need heat but have no barrier.
fn endothermic(network: &Network, entry: &Entry, warnings: &mut Vec<Warning>) {
    if barrier(network, entry).is_none_or(|barrier| barrier > 0.0) {
        return;
    }
    let heat = |side: &[usize]| -> Option<f64> {
        side.iter()
            .map(|s| network.file.species.get(*s)?.enthalpy)
            .sum()
    };
    let (Some(before), Some(after)) = (heat(&entry.reactants), heat(&entry.products)) else {
        return;
    };
    if after - before > ENDOTHERMIC {
        warnings.push(Warning {
            line: entry.line,
            entry: entry.change.clone(),
            text: format!(
                "no barrier, but endothermic by {:.1} kJ/mol",
                after - before
            ),
            kind: WarningKind::Endothermic,
        });
    }
}

/// The barrier (K) of a gas reaction at its lowest temperatures; None for what light drives.
fn barrier(network: &Network, entry: &Entry) -> Option<f64> {
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
