//! Owns the audit of a network by name: errors of the reader, findings of the file, and
//! coefficients that go wrong somewhere between the coldest ice and the hottest gas.
//!
//! It never evaluates a law of its own: it asks `rates`, as a run does.

use super::{listing, text};
use crate::disk::conditions::Conditions;
use crate::errors::Failure;
use crate::network::audit::Finding;
use crate::network::findings::{Warning, WarningKind};
use crate::network::model::{Cause, Chemistry, GrainOptions, Reaction};
use crate::network::{self, Network};
use std::path::PathBuf;

/// Between these temperatures (K) every coefficient must be a sensible number.
pub const EXTREMES: [f64; 2] = [5.0, 4000.0];
/// Temperatures tried, ends included.
const STEPS: usize = 60;
/// More than two particles of the gas ever have, cm^3 s^-1: dissociative recombination, the
/// fastest there is, reaches some 1e-5 at 5 K. Own choice.
const RUNAWAY: f64 = 1e-4;

/// A network that was looked at.
#[derive(Debug)]
pub struct Audit {
    pub path: PathBuf,
    /// None if it has errors.
    pub network: Option<Network>,
    /// By severity, then by line.
    pub findings: Vec<Finding>,
}

/// Audits a network by its built-in name or the path of its file.
///
/// # Errors
/// A file that cannot be read; what is wrong in it is among the findings.
pub fn audit(name: &str) -> Result<Audit, Failure> {
    let (path, text) = text(name)?;
    let read = network::read_all(&path, &text).and_then(|network| {
        Ok((
            network::expand(&network, &GrainOptions::default())?,
            network,
        ))
    });
    let (network, mut findings) = match read {
        Ok((chemistry, network)) => {
            let mut findings = network.audit();
            let of = |warning| Finding::warning(&path, warning);
            findings.extend(coefficients(&chemistry).into_iter().map(of));
            (Some(network), findings)
        }
        Err(errors) => (None, errors.iter().map(Finding::from).collect()),
    };
    findings.sort_by_key(|finding| (finding.severity, finding.line));
    Ok(Audit {
        path,
        network,
        findings,
    })
}

/// Reactions whose coefficient is no number, negative or absurd at any temperature of [`EXTREMES`]
/// (gas and dust alike), with all other conditions usual.
pub fn coefficients(chemistry: &Chemistry) -> Vec<Warning> {
    let mut worst: Vec<Option<(f64, f64)>> = vec![None; chemistry.reactions.len()];
    for t in temperatures() {
        let asked = listing::Asked {
            t_gas: t,
            t_dust: t,
            // Densities of 1 leave coefficients what they are.
            n_h: 1.0,
            ..listing::Asked::default()
        };
        let conditions: Conditions = asked.conditions(chemistry);
        let values = listing::values(chemistry, &asked, &conditions);
        for ((reaction, k), worst) in chemistry.reactions.iter().zip(values).zip(&mut worst) {
            let bad = !(k.is_finite() && k >= 0.0) || (bounded(reaction) && k > RUNAWAY);
            let worse = worst.is_none_or(|(_, before): (f64, f64)| k > before);
            if bad && worse {
                *worst = Some((t, k));
            }
        }
    }
    (chemistry.reactions.iter().zip(worst))
        .filter_map(|(reaction, worst)| {
            let (t, k) = worst?;
            let (kind, what) = match k.is_finite() && k >= 0.0 {
                true => (WarningKind::Runaway, format!("{k:.1e} cm^3 s^-1")),
                false => (WarningKind::NoNumber, format!("a coefficient of {k:.1e}")),
            };
            Some(Warning {
                line: reaction.line,
                entry: reaction.change.clone(),
                text: format!("{what} at {t:.0} K"),
                kind,
            })
        })
        .collect()
}

fn temperatures() -> impl Iterator<Item = f64> {
    let [low, high] = EXTREMES;
    let step = (high / low).ln() / STEPS as f64;
    (0..=STEPS).map(move |i| match i {
        STEPS => high,
        i => low * (step * i as f64).exp(),
    })
}

/// Whether the bound of two-body coefficients applies: two particles of the gas meet.
fn bounded(reaction: &Reaction) -> bool {
    let grains = matches!(
        reaction.cause,
        Cause::Charging { .. } | Cause::Surface { .. } | Cause::HydrogenFormation { .. }
    );
    reaction.reactants.len() == 2 && !grains
}
