//! Owns the rules for reversible lines: their species have polynomials, their reverse is not
//! listed too, and doubts about how fast it is.
//!
//! It never expands: `expand` makes the reverse.

use crate::network::equilibrium::{log_constant, sum};
use crate::network::findings::{Findings, Warning, WarningKind};
use crate::network::groups::{self, Group};
use crate::network::layout::{Below, NetworkFile};
use crate::network::limits;
use crate::network::read::{Entry, Network};
use crate::network::roster::Roster;
use crate::network::thermo::Thermo;

/// Most particles that a rate law of the kinetics core can hold.
const MOST_PARTICLES: usize = 3;

/// Every reversible line can be reversed, in one way only.
pub(in crate::network) fn reversible(
    file: &NetworkFile,
    roster: &Roster,
    entries: &[Entry],
    thermo: &Thermo,
    findings: &mut Findings,
) {
    let declared = |entry: &&Entry| groups::reversible(file, entry.group, entry.index);
    for entry in entries.iter().filter(declared) {
        let mut wrong = |found: String, expected: &str| {
            findings.add(&entry.place("reversible"), &entry.change, found, expected);
        };
        if entry.products.len() > MOST_PARTICLES {
            let found = format!("{} products", entry.products.len());
            wrong(found, "at most 3 in a reversible reaction");
        }
        if entry.group == Group::Gas && entry.products.len() == 1 {
            let found = "a reversible reaction whose only product sheds its energy as light";
            let expected =
                "two products, or a line of `falloff`; the reverse would be driven by light";
            wrong(found.to_string(), expected);
        }
        if let Some(other) = entries.iter().find(|other| reverses(other, entry)) {
            let found = format!("the reverse on line {} too", other.line);
            wrong(found, "the reverse listed or `reversible: true`, not both");
        }
        if file.thermo.is_none() {
            let found = "`reversible` without polynomials".to_string();
            wrong(
                found,
                "`thermo: standard` (or a path) at the top of the file",
            );
            continue;
        }
        match thermo.terms(entry, roster) {
            Err(species) => {
                let found = format!("`{species}`, which has no polynomials");
                let expected = format!("species that the polynomials `{}` list", thermo.name);
                wrong(found, &expected);
            }
            Ok(terms) if sum(&terms).is_empty() => {
                let found = "polynomials without a common range of temperature".to_string();
                wrong(found, "ranges that overlap");
            }
            Ok(_) => {}
        }
    }
}

/// Whether `other` is what `entry` does backwards. A lone product of `gas` was stabilised by
/// light, which is not the reverse of a break-up by collisions.
fn reverses(other: &Entry, entry: &Entry) -> bool {
    let collision = match other.group {
        Group::Gas | Group::Capture => other.products.len() > 1,
        Group::Falloff | Group::ThreeBody | Group::ThirdBody => true,
        Group::Light | Group::Cosmic | Group::Surface => false,
    };
    // An exchange of partners that gives the same species is its own reverse.
    let itself = std::ptr::eq(other, entry);
    collision
        && !itself
        && other.reactant_set() == entry.product_set()
        && other.product_set() == entry.reactant_set()
}

/// Reverses that run faster than anything can, between 10 and 4000 K: the forward coefficient
/// does not fall with the heat it needs.
pub(in crate::network) fn improbable_reverses(network: &Network) -> Vec<Warning> {
    const TEMPERATURES: [f64; 8] = [10.0, 30.0, 100.0, 300.0, 700.0, 1500.0, 2500.0, 4000.0];
    let mut warnings = Vec::new();
    let file = &network.file;
    let declared = |entry: &&Entry| groups::reversible(file, entry.group, entry.index);
    for entry in network.entries.iter().filter(declared) {
        let Ok(terms) = network.thermo.terms(entry, &network.roster) else {
            continue;
        };
        let polynomials = sum(&terms);
        let gained = entry.products.len() as i32 - entry.reactants.len() as i32;
        let charged = entry
            .products
            .iter()
            .any(|s| network.roster.species[*s].charge != 0);
        let limit = limit(entry, charged);
        let fast = TEMPERATURES.into_iter().find_map(|t| {
            let (constant, _) = log_constant(&polynomials, gained, t);
            let log = log_forward(file, entry, t) - constant;
            (log > limit.ln()).then_some((t, log / std::f64::consts::LN_10))
        });
        if let Some((t, log)) = fast {
            warnings.push(Warning {
                line: entry.line,
                entry: entry.change.clone(),
                text: format!(
                    "its reverse has a coefficient of 10^{log:.1} (cgs) at {t} K, above {limit:.0e}: \
                     at this temperature the forward coefficient does not fit the heat of reaction"
                ),
                kind: WarningKind::AboveCollisionLimit,
            });
        }
    }
    warnings
}

/// A generous bound for a coefficient, in cgs by its order; with charges attraction adds to it.
fn limit(entry: &Entry, charged: bool) -> f64 {
    let third_body = usize::from(entry.group == Group::ThirdBody);
    match entry.products.len() + third_body {
        1 => 1e18,
        2 if charged => 1e-4,
        2 if third_body > 0 => 1e-4,
        2 => 1e-8,
        3 => 1e-24,
        _ => 1e-34,
    }
}

/// ln of the forward coefficient (high-pressure limit of a falloff) at T.
fn log_forward(file: &NetworkFile, entry: &Entry, t: f64) -> f64 {
    let power = |a: f64, b: f64, c: f64, at: f64| a.ln() + b * (at / 300.0).ln() - c / at;
    let zero = f64::NEG_INFINITY;
    let line = match entry.group {
        Group::Falloff => {
            let line = &file.falloff[entry.index];
            let below = line.below.unwrap_or(Below::Extend);
            let high = &line.high;
            let at = limits::evaluated_at(line.valid, below, t);
            return at.map_or(zero, |at| power(high.at_300k, high.slope, high.barrier, at));
        }
        Group::ThreeBody => &file.three_body[entry.index],
        Group::ThirdBody => &file.third_body[entry.index],
        _ => &file.gas[entry.index],
    };
    let pieces = groups::pieces(line);
    let Some(here) = pieces.iter().find(|p| t <= p.valid[1]).or(pieces.last()) else {
        return zero;
    };
    let below = line.below.unwrap_or(Below::Extend);
    let at = limits::evaluated_at(here.valid, below, t);
    at.map_or(zero, |at| power(here.at_300k, here.slope, here.barrier, at))
}
