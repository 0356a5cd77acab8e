//! Owns the list of species a network file knows: its gas species and their adsorbed forms.
//!
//! It never holds dust or the ice total: those come with the expansion.

use super::findings::Findings;
use super::layout::NetworkFile;
use super::model::{Phase, Species};
use super::names::{self, NameError};
use std::collections::HashMap;

/// Gas species in file order, then ices in file order.
#[derive(Debug, Clone, Default)]
pub struct Roster {
    pub species: Vec<Species>,
    /// How many of them are gas.
    pub gas: usize,
    places: HashMap<String, usize>,
}

impl Roster {
    /// Collects the species of a file; what cannot be taken is left out and reported.
    pub(super) fn collect(file: &NetworkFile, findings: &mut Findings) -> Roster {
        let mut roster = Roster::default();
        for (i, line) in file.species.iter().enumerate() {
            let place = format!("species[{i}]");
            let entry = format!("species {}", line.name);
            match gas_species(&line.name) {
                Err(error) => findings.add(&place, entry, error.found, error.expected),
                Ok(species) => roster.take(species, &place, &entry, "species", findings),
            }
        }
        roster.gas = roster.species.len();
        for (i, line) in file.ices.iter().enumerate() {
            let place = format!("ices[{i}].species");
            let entry = format!("ice {}", line.species);
            match roster.adsorbed(&line.species) {
                Err(error) => findings.add(&place, entry, error.found, error.expected),
                Ok(ice) => roster.take(ice, &place, &entry, "ices", findings),
            }
        }
        roster
    }

    /// The place of a species.
    pub fn find(&self, name: &str) -> Option<usize> {
        self.places.get(name).copied()
    }

    /// The place of a species in a change, or why it cannot stand there.
    pub fn resolve(&self, name: &str) -> Result<usize, NameError> {
        if let Some(place) = self.find(name) {
            return Ok(place);
        }
        let (found, expected) = match names::species(name)?.phase {
            Phase::Ice => (
                "without a line in `ices`",
                "an adsorbed species that `ices` lists",
            ),
            Phase::Dust => (
                "as a written species",
                "gas or ice; reactions with dust are generated",
            ),
            _ => (
                "which is not in `species`",
                "a species that `species` lists",
            ),
        };
        Err(NameError {
            found: format!("`{name}` {found}"),
            expected: expected.to_string(),
        })
    }

    /// Whether the species at this place is adsorbed.
    pub fn is_ice(&self, place: usize) -> bool {
        place >= self.gas
    }

    /// The gas form of a species (itself if it is gas).
    pub fn gas_form(&self, place: usize) -> usize {
        let name = &self.species[place].name;
        names::gas_name(name)
            .and_then(|gas| self.find(gas))
            .unwrap_or(place)
    }

    /// The adsorbed form of a neutral gas species of this roster.
    fn adsorbed(&self, gas: &str) -> Result<Species, NameError> {
        let found = |what: &str| format!("`{gas}`{what}");
        let expected = |what: &str| what.to_string();
        let Some(place) = self.find(gas).filter(|place| *place < self.gas) else {
            return Err(NameError {
                found: found(", which is not in `species`"),
                expected: expected("the gas species that freezes out, listed in `species`"),
            });
        };
        let partner = &self.species[place];
        if partner.charge != 0 || partner.atoms.is_empty() {
            let found = found(", which carries a charge");
            return Err(NameError {
                found,
                expected: expected("a neutral species"),
            });
        }
        names::species(&names::adsorbed_name(gas))
    }

    fn take(
        &mut self,
        species: Species,
        place: &str,
        entry: &str,
        list: &str,
        findings: &mut Findings,
    ) {
        if self.find(&species.name).is_some() {
            let found = format!("`{}` a second time in `{list}`", species.name);
            return findings.add(place, entry, found, "every species once");
        }
        self.places.insert(species.name.clone(), self.species.len());
        self.species.push(species);
    }
}

fn gas_species(name: &str) -> Result<Species, NameError> {
    let species = names::species(name)?;
    let expected = match species.phase {
        Phase::Ice => "gas species; adsorbed ones follow from `ices`",
        Phase::Dust => "gas species; dust is generated",
        _ => return Ok(species),
    };
    Err(NameError {
        found: format!("`{name}`"),
        expected: expected.to_string(),
    })
}
