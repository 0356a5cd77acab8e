//! Owns the start of a run: which abundances a case begins with, made complete against a network.
//!
//! It never changes an abundance a user gave: what does not balance is an error.

use super::Block;
use super::checker::{Checker, NOT_NEGATIVE, quoted};
use super::layout::StartBlock;
use crate::errors::InputError;
use crate::network::layout::{CompositionLine, NetworkFile};
use crate::network::model::{Chemistry, Phase};
use crate::units::{Dimension, number_text};
use std::collections::BTreeMap;
use std::path::PathBuf;

/// Largest charge left over, relative to the positive charge, if electrons are given.
const CHARGE_BALANCE: f64 = 1.0e-6;
/// Charge, relative to the positive charge, that is no more than the rounding of a sum.
const ROUND_OFF: f64 = 1.0e-13;

/// The start as a case gives it, with the place to name in errors.
#[derive(Debug, Clone, PartialEq)]
pub struct StartChoice {
    pub file: PathBuf,
    pub line: Option<usize>,
    pub kind: StartKind,
}

#[derive(Debug, Clone, PartialEq)]
pub enum StartKind {
    /// A named composition of the network file.
    Composition(String),
    Abundances(Vec<GivenAbundance>),
}

#[derive(Debug, Clone, PartialEq)]
pub struct GivenAbundance {
    pub species: String,
    /// n(X)/n_H.
    pub value: f64,
    pub line: Option<usize>,
}

pub(super) fn read(check: &mut Checker, block: &StartBlock) -> Option<Block<StartChoice>> {
    let line = check.line("start");
    let choice = |check: &Checker, kind| StartChoice {
        file: check.file.to_path_buf(),
        line,
        kind,
    };
    match (&block.composition, &block.abundances) {
        (Some(name), None) => {
            let resolved = format!("start: {{composition: {}}}\n", quoted(name));
            let line = check.line("start.composition");
            let kind = StartKind::Composition(name.clone());
            Some(Block {
                value: StartChoice {
                    line,
                    ..choice(check, kind)
                },
                resolved,
            })
        }
        (None, Some(given)) => {
            let mut list = Vec::with_capacity(given.len());
            let mut resolved = String::from("start:\n  abundances:\n");
            for (species, quantity) in given {
                let key = format!("start.abundances.{species}");
                let value = check.required(&key, quantity, Dimension::Number, NOT_NEGATIVE);
                resolved += &format!("    {}: {}\n", quoted(species), value.text);
                let line = check.line(&key);
                list.push(GivenAbundance {
                    species: species.clone(),
                    value: value.value,
                    line,
                });
            }
            if list.is_empty() {
                check.error("start.abundances", "no species", "abundances by species");
            }
            Some(Block {
                value: choice(check, StartKind::Abundances(list)),
                resolved,
            })
        }
        (composition, _) => {
            let found = if composition.is_some() {
                "both"
            } else {
                "neither"
            };
            check.error("start", found, "either `composition` or `abundances`");
            None
        }
    }
}

/// The named compositions of a network file, as [`start_state`] takes them.
pub fn compositions(file: &NetworkFile) -> Vec<(String, BTreeMap<String, f64>)> {
    let pair = |line: &CompositionLine| (line.name.clone(), line.abundances.clone());
    file.compositions.iter().map(pair).collect()
}

/// The state a cell with `dust` grains per hydrogen nucleus starts in, in the order of
/// `chemistry.species`. `compositions` are those of the network file.
///
/// Electrons left out balance the charge; grains are all neutral; `ices(total)` is the sum of the
/// adsorbed species.
pub fn start_state(
    choice: &StartChoice,
    compositions: &[(String, BTreeMap<String, f64>)],
    chemistry: &Chemistry,
    dust: f64,
) -> Result<Vec<f64>, InputError> {
    let error = |line: Option<usize>, entry: &str, found: String, expected: String| {
        InputError::new(&choice.file, line, entry, found, expected)
    };
    let given = given_abundances(choice, compositions)?;
    let mut state = vec![0.0; chemistry.species.len()];
    let mut electrons_given = false;
    for abundance in &given {
        let entry = format!("start: {}", abundance.species);
        let place = chemistry.find(&abundance.species).ok_or_else(|| {
            let found = format!("{}, which the network does not have", abundance.species);
            error(
                abundance.line,
                &entry,
                found,
                format!("a species of the network `{}`", chemistry.name),
            )
        })?;
        match chemistry.species[place].phase {
            Phase::Gas | Phase::Ice => {}
            Phase::Dust | Phase::IceTotal => {
                let found = format!("an abundance of {}", abundance.species);
                let expected = "gas and adsorbed species only: it follows from the conditions";
                return Err(error(abundance.line, &entry, found, expected.to_string()));
            }
        }
        if !(abundance.value >= 0.0 && abundance.value.is_finite()) {
            let found = number_text(abundance.value);
            return Err(error(
                abundance.line,
                &entry,
                found,
                "a number of 0 or more".to_string(),
            ));
        }
        electrons_given |= abundance.species == "e-";
        state[place] = abundance.value;
    }

    let charges = || {
        chemistry
            .species
            .iter()
            .zip(&state)
            .map(|(s, x)| f64::from(s.charge) * x)
    };
    let positive: f64 = charges().filter(|q| *q > 0.0).sum();
    let excess: f64 = charges().sum();
    if electrons_given {
        if excess.abs() > CHARGE_BALANCE * positive {
            let found = format!("a charge of {} per hydrogen nucleus", number_text(excess));
            let expected = "charges that balance, or no e- (then electrons balance them)";
            return Err(error(choice.line, "start: e-", found, expected.to_string()));
        }
    } else if excess.abs() > ROUND_OFF * positive {
        if excess < 0.0 {
            let found = format!(
                "a negative charge of {} without electrons",
                number_text(excess)
            );
            let expected = "at least as much positive as negative charge";
            return Err(error(choice.line, "start", found, expected.to_string()));
        }
        let electrons = chemistry.find("e-").ok_or_else(|| {
            let found = "ions, and a network without e-".to_string();
            error(choice.line, "start", found, "neutral species".to_string())
        })?;
        state[electrons] = excess;
    }

    let neutral = |s: &crate::network::model::Species| s.phase == Phase::Dust && s.charge == 0;
    if let Some(place) = chemistry.species.iter().position(neutral) {
        state[place] = dust;
    }
    let adsorbed = chemistry
        .species
        .iter()
        .zip(&state)
        .filter(|(s, _)| s.phase == Phase::Ice);
    let ices: f64 = adsorbed.map(|(_, x)| x).sum();
    if let Some(place) = chemistry
        .species
        .iter()
        .position(|s| s.phase == Phase::IceTotal)
    {
        state[place] = ices;
    }
    Ok(state)
}

fn given_abundances(
    choice: &StartChoice,
    compositions: &[(String, BTreeMap<String, f64>)],
) -> Result<Vec<GivenAbundance>, InputError> {
    let name = match &choice.kind {
        StartKind::Abundances(list) => return Ok(list.clone()),
        StartKind::Composition(name) => name,
    };
    let Some((_, abundances)) = compositions.iter().find(|(known, _)| known == name) else {
        let known: Vec<&str> = compositions
            .iter()
            .map(|(known, _)| known.as_str())
            .collect();
        let expected = match known.as_slice() {
            [] => "`abundances`: the network has no compositions".to_string(),
            known => format!("a composition of the network: {}", known.join(", ")),
        };
        let found = format!("`{name}`");
        let entry = "start.composition";
        return Err(InputError::new(
            &choice.file,
            choice.line,
            entry,
            found,
            expected,
        ));
    };
    let given = |(species, &value): (&String, &f64)| GivenAbundance {
        species: species.clone(),
        value,
        line: choice.line,
    };
    Ok(abundances.iter().map(given).collect())
}

/// Nuclei of every element per hydrogen nucleus in `state`, in order of first appearance among
/// the species; grains count as the element `dust`.
pub fn element_totals(chemistry: &Chemistry, state: &[f64]) -> Vec<(String, f64)> {
    let mut totals: Vec<(String, f64)> = Vec::new();
    for (species, x) in chemistry.species.iter().zip(state) {
        if species.phase == Phase::IceTotal {
            continue;
        }
        for (element, count) in &species.atoms {
            let share = f64::from(*count) * x;
            match totals.iter_mut().find(|(known, _)| known == element) {
                Some((_, total)) => *total += share,
                None => totals.push((element.clone(), share)),
            }
        }
    }
    totals
}

/// What a start adds up to, for a person to check: every element and the charge per hydrogen
/// nucleus; and what is odd though it can be run: hydrogen has to add up to about 1. An abundance
/// relative to H2 by mistake shows here.
pub fn start_notes(chemistry: &Chemistry, state: &[f64]) -> Vec<String> {
    let totals = element_totals(chemistry, state);
    let listed: Vec<String> = totals
        .iter()
        .filter(|(element, _)| element != "dust")
        .map(|(element, total)| format!("{element} {total:.4e}"))
        .collect();
    let species = chemistry.species.iter().zip(state);
    let charge: f64 = species.map(|(s, x)| f64::from(s.charge) * x).sum();
    let mut notes = vec![format!(
        "start: per hydrogen nucleus {}; charge {charge:.1e}",
        listed.join(", ")
    )];
    match totals.iter().find(|(element, _)| element == "H") {
        Some((_, hydrogen)) if (hydrogen - 1.0).abs() > 0.01 => notes.push(format!(
            "start: the hydrogen in all species adds up to {hydrogen:.4} per hydrogen nucleus \
             instead of 1"
        )),
        _ => {}
    }
    notes
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::network::model::{GrainOptions, Species};

    fn species(name: &str, phase: Phase, charge: i32, atoms: &[(&str, u32)]) -> Species {
        let atoms = atoms
            .iter()
            .map(|(element, count)| (element.to_string(), *count))
            .collect();
        Species {
            name: name.to_string(),
            phase,
            charge,
            mass: 1.0,
            atoms,
        }
    }

    fn chemistry() -> Chemistry {
        Chemistry {
            name: "small".to_string(),
            species: vec![
                species("e-", Phase::Gas, -1, &[]),
                species("H2", Phase::Gas, 0, &[("H", 2)]),
                species("C+", Phase::Gas, 1, &[("C", 1)]),
                species("H-", Phase::Gas, -1, &[("H", 1)]),
                species("dust-", Phase::Dust, -1, &[("dust", 1)]),
                species("dust", Phase::Dust, 0, &[("dust", 1)]),
                species("dust+", Phase::Dust, 1, &[("dust", 1)]),
                species("H2O(ads)", Phase::Ice, 0, &[("H", 2), ("O", 1)]),
                species("CO(ads)", Phase::Ice, 0, &[("C", 1), ("O", 1)]),
                species("ices(total)", Phase::IceTotal, 0, &[]),
            ],
            reactions: Vec::new(),
            spectra: vec!["draine".to_string()],
            column_species: vec!["H2".to_string()],
            shielding: Vec::new(),
            options: GrainOptions::default(),
        }
    }

    fn choice(list: &[(&str, f64)]) -> StartChoice {
        let given = |(i, (species, value)): (usize, &(&str, f64))| GivenAbundance {
            species: species.to_string(),
            value: *value,
            line: Some(i + 10),
        };
        StartChoice {
            file: PathBuf::from("x.yaml"),
            line: Some(9),
            kind: StartKind::Abundances(list.iter().enumerate().map(given).collect()),
        }
    }

    /// Every invariant of a run is fixed here: charge, grains, the ice total, the elements.
    #[test]
    fn a_start_is_completed() {
        let chemistry = chemistry();
        let list = [
            ("H2", 0.4999),
            ("C+", 1.0e-4),
            ("H-", 1.0e-6),
            ("H2O(ads)", 1.0e-4),
            ("CO(ads)", 3.0e-5),
        ];
        let state = start_state(&choice(&list), &[], &chemistry, 1.8e-12).unwrap();
        let at = |name: &str| state[chemistry.find(name).unwrap()];
        assert!((at("e-") - 9.9e-5).abs() < 1e-18);
        assert_eq!((at("dust-"), at("dust"), at("dust+")), (0.0, 1.8e-12, 0.0));
        assert!((at("ices(total)") - 1.3e-4).abs() < 1e-18);
        let totals: BTreeMap<String, f64> =
            element_totals(&chemistry, &state).into_iter().collect();
        assert!((totals["H"] - 1.000_001).abs() < 1e-12);
        assert!((totals["C"] - 1.3e-4).abs() < 1e-15 && (totals["O"] - 1.3e-4).abs() < 1e-15);
        let notes = start_notes(&chemistry, &state);
        assert!(notes.len() == 1 && notes[0].contains("H 1.0000e0"), "{notes:?}");
        // Per H2 instead of per H nucleus: the slip the note is for.
        let twice = start_state(&choice(&[("H2", 1.0)]), &[], &chemistry, 1.8e-12).unwrap();
        assert_eq!(start_notes(&chemistry, &twice).len(), 2);
    }

    /// A composition of the network must give the same as its abundances written out.
    #[test]
    fn compositions_are_looked_up() {
        let chemistry = chemistry();
        let list: BTreeMap<String, f64> =
            [("H2".to_string(), 0.5), ("C+".to_string(), 1.0e-4)].into();
        let named = StartChoice {
            kind: StartKind::Composition("atoms".to_string()),
            ..choice(&[])
        };
        let compositions = [("atoms".to_string(), list)];
        let by_name = start_state(&named, &compositions, &chemistry, 1.0e-12).unwrap();
        let by_list = start_state(
            &choice(&[("H2", 0.5), ("C+", 1.0e-4)]),
            &[],
            &chemistry,
            1.0e-12,
        );
        assert_eq!(by_name, by_list.unwrap());
        let other = StartChoice {
            kind: StartKind::Composition("stars".to_string()),
            ..choice(&[])
        };
        let error = start_state(&other, &compositions, &chemistry, 1.0e-12).unwrap_err();
        assert_eq!((error.line, error.found.as_str()), (Some(9), "`stars`"));
        assert!(error.expected.ends_with("atoms"));
    }

    /// A start that does not balance would run, and be wrong throughout.
    #[test]
    fn what_does_not_balance_is_refused() {
        let chemistry = chemistry();
        let start = |list: &[(&str, f64)]| start_state(&choice(list), &[], &chemistry, 1.0e-12);
        assert!(start(&[("C+", 1.0e-4), ("e-", 1.0e-4)]).is_ok());
        assert!(start(&[("C+", 1.0e-4), ("e-", 1.000_000_5e-4)]).is_ok());
        for (list, line, found) in [
            (
                &[("C+", 1.0e-4), ("e-", 1.000_002e-4)][..],
                9,
                "a charge of",
            ),
            (&[("e-", 1.0e-4)], 9, "a charge of"),
            (&[("H-", 1.0e-4)], 9, "a negative charge"),
            (
                &[("H2", 0.5), ("HD", 1.0e-5)],
                11,
                "HD, which the network does not have",
            ),
            (&[("dust", 1.0e-12)], 10, "an abundance of dust"),
            (
                &[("ices(total)", 1.0e-4)],
                10,
                "an abundance of ices(total)",
            ),
            (&[("H2", -0.5)], 10, "-0.5"),
        ] {
            let error = start(list).unwrap_err();
            assert!(error.found.starts_with(found), "{error}");
            assert_eq!(error.line, Some(line), "{error}");
        }
    }
}
