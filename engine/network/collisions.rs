//! Owns the comparison of two-body coefficients with what collisions allow, over temperature.
//!
//! It never refuses anything, and it never evaluates a run: `rates` does.

use super::findings::{Warning, WarningKind};
use super::groups::{self, Group};
use super::layout::Below;
use super::limits;
use super::model::Species;
use super::read::{Entry, Network};
use std::collections::BTreeMap;

/// Margin over the capture limit: measured coefficients and polarisabilities are not better.
const CAPTURE_MARGIN: f64 = 1.3;
/// What two neutrals can reach at most, cm^3 s^-1.
const NEUTRAL_LIMIT: f64 = 1e-9;
/// Coefficients scaled to a limit and rounded in the file are not above it.
const ROUNDING: f64 = 1.01;
/// Where an ion and a neutral, and two neutrals, are compared with their limits, K.
const ION_RANGE: [f64; 2] = [10.0, 300.0];
const NEUTRAL_RANGE: [f64; 2] = [10.0, 1000.0];
/// Temperatures tried between the ends of these ranges.
const STEPS: usize = 12;

/// A coefficient as a function of T.
pub(super) type Coefficient<'a> = Box<dyn Fn(f64) -> f64 + 'a>;

/// The coefficient of a two-body gas reaction (high-pressure limit of a falloff), cm^3 s^-1.
pub(super) fn coefficient<'a>(network: &'a Network, entry: &Entry) -> Option<Coefficient<'a>> {
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

/// The channels of every pair of gas species with a two-body coefficient.
fn pairs(network: &Network) -> BTreeMap<[usize; 2], Vec<(&Entry, Coefficient<'_>)>> {
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
    pairs
}

/// Temperatures on `range`: its ends, steps between them, and where any of `channels` begins or
/// ends, since between those a coefficient may peak only there.
fn temperatures(network: &Network, channels: &[&Entry], range: [f64; 2]) -> Vec<f64> {
    let file = &network.file;
    let ends = |entry: &&Entry| match entry.group {
        Group::Gas => groups::pieces(&file.gas[entry.index])
            .iter()
            .flat_map(|piece| piece.valid)
            .collect(),
        Group::Capture => file.capture[entry.index].valid.to_vec(),
        Group::Falloff => file.falloff[entry.index].valid.to_vec(),
        _ => Vec::new(),
    };
    let within = |t: &f64| (range[0]..=range[1]).contains(t);
    grid(range)
        .chain(channels.iter().flat_map(ends).filter(within))
        .collect()
}

/// Steps on `range`, its ends included.
fn grid([low, high]: [f64; 2]) -> impl Iterator<Item = f64> {
    let step = (high / low).ln() / STEPS as f64;
    (0..=STEPS).map(move |i| match i {
        // The ends exactly: people look there first.
        0 => low,
        STEPS => high,
        i => low * (step * i as f64).exp(),
    })
}

/// The polarisability (A^3) and dipole (Debye) of a species, where the file has the former.
fn polar(network: &Network, place: usize) -> Option<(f64, f64)> {
    let line = &network.file.species[place];
    let polarisability = line.polarisability.filter(|p| *p > 0.0)?;
    Some((polarisability, line.dipole.unwrap_or(0.0)))
}

/// Sums the channels of every pair and compares with what collisions allow.
pub(super) fn above_limit(network: &Network, warnings: &mut Vec<Warning>) {
    for ([a, b], channels) in &pairs(network) {
        let pair = [&network.roster.species[*a], &network.roster.species[*b]];
        let total = |t: f64| channels.iter().map(|(_, k)| k(t)).sum::<f64>();
        let worst = |range, limit: &dyn Fn(f64) -> f64| {
            let entries: Vec<&Entry> = channels.iter().map(|(entry, _)| *entry).collect();
            temperatures(network, &entries, range)
                .into_iter()
                .map(|t| (t, total(t), limit(t)))
                .filter(|(_, k, limit)| *k > ROUNDING * limit)
                .max_by(|x, y| (x.1 / x.2).total_cmp(&(y.1 / y.2)))
        };
        let excess = match partner(pair) {
            Partner::None => continue,
            Partner::Neutrals => worst(NEUTRAL_RANGE, &|_| NEUTRAL_LIMIT),
            Partner::Ion {
                neutral,
                reduced_mass,
            } => {
                let Some((alpha, dipole)) = polar(network, [*a, *b][neutral]) else {
                    continue;
                };
                let capture = |t| limits::capture(alpha, dipole, reduced_mass, t);
                worst(ION_RANGE, &|t| CAPTURE_MARGIN * capture(t))
            }
        };
        if let (Some((t, k, limit)), Some((first, _))) = (excess, channels.first()) {
            let all = if channels.len() > 1 {
                " (all channels of the pair)"
            } else {
                ""
            };
            let text = format!(
                "{k:.2e} cm^3 s^-1 at {t:.0} K{all}, above the limit of collisions {limit:.2e}"
            );
            warnings.push(Warning {
                line: first.line,
                entry: first.change.clone(),
                text,
                kind: WarningKind::AboveCollisionLimit,
            });
        }
    }
}

/// Neutrals that react with ions and have no polarisability, so that no limit can be told.
pub(super) fn without_limit(network: &Network) -> Vec<usize> {
    let mut places: Vec<usize> = pairs(network)
        .keys()
        .filter_map(|pair| {
            let species = pair.map(|place| &network.roster.species[place]);
            match partner(species) {
                Partner::Ion { neutral, .. } => Some(pair[neutral]),
                _ => None,
            }
        })
        .filter(|place| polar(network, *place).is_none())
        .collect();
    places.sort_unstable();
    places.dedup();
    places
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

fn partner(pair: [&Species; 2]) -> Partner {
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
