//! Owns the expansion of a checked network into every reaction that runs: the written ones, then
//! what grains do (H2 formation, charging, freeze-out, desorption, reactions on ices).
//!
//! It never evaluates a rate. The order of species and reactions is part of the run file; it is
//! documented in networks/README.md.

mod grains;
mod reverse;
mod written;

use super::check::STANDARD_SPECTRUM;
use super::groups::{self, Group};
use super::layout::Standing;
use super::model::{
    Cause, Chemistry, GrainOptions, Phase, Reaction, Shielding, Species, SpeciesId,
};
use super::names;
use super::read::Network;
use crate::errors::InputError;
use std::collections::HashMap;
use std::mem::Discriminant;
use std::path::Path;

/// Name of the state variable that sums all adsorbed abundances.
pub const ICE_TOTAL: &str = "ices(total)";

/// Most charges of either sign that a grain can have.
const MOST_CHARGES: i32 = 100;

/// Uncertainty factor where a line has no `within`.
pub fn default_within(standing: Standing) -> f64 {
    match standing {
        Standing::Evaluated => 1.3,
        Standing::Measured => 1.5,
        Standing::Recalled => 2.0,
        Standing::Estimated => 3.0,
    }
}

/// Expands a network as the options of the grains ask.
pub fn expand(network: &Network, options: &GrainOptions) -> Result<Chemistry, Vec<InputError>> {
    let charges = options.charge_states;
    if !(0..=MOST_CHARGES).contains(&charges) {
        return Err(vec![InputError::new(
            Path::new(""),
            None,
            "grains.charge_states",
            charges.to_string(),
            format!("a whole number from 0 to {MOST_CHARGES}"),
        )]);
    }
    let column_species = column_species(network);
    let mut expansion = Expansion::new(network, options);
    for entry in &network.entries {
        if entry.group != Group::Surface {
            expansion.written(entry);
            if groups::reversible(&network.file, entry.group, entry.index) {
                expansion.reverse(entry);
            }
        }
    }
    expansion.hydrogen_formation();
    expansion.charging();
    for ice in 0..network.file.ices.len() {
        expansion.ice(ice);
    }
    for entry in network
        .entries
        .iter()
        .filter(|entry| entry.group == Group::Surface)
    {
        expansion.surface(entry);
    }
    Ok(Chemistry {
        name: network.file.network.clone(),
        species: expansion.species,
        reactions: expansion.reactions,
        spectra: spectra(network),
        shielding: shielding(network, &column_species),
        column_species,
        options: options.clone(),
    })
}

/// The standard spectrum, then those of the file.
fn spectra(network: &Network) -> Vec<String> {
    let standard = std::iter::once(STANDARD_SPECTRUM.to_string());
    standard
        .chain(network.file.spectra.keys().cloned())
        .collect()
}

/// H2, then every other species whose column shields, in file order.
fn column_species(network: &Network) -> Vec<String> {
    let mut species = vec!["H2".to_string()];
    for line in &network.file.shielding {
        if !species.contains(&line.column) {
            species.push(line.column.clone());
        }
    }
    species
}

fn shielding(network: &Network, column_species: &[String]) -> Vec<Shielding> {
    let log = |row: &Vec<f64>| row.iter().map(|factor| factor.log10()).collect();
    let law = |line: &super::layout::ShieldingLine| Shielding {
        name: line.name.clone(),
        law: line.law,
        column: column_species
            .iter()
            .position(|name| *name == line.column)
            .unwrap_or(0),
        h2: 0,
        log_column: line.log_column.clone(),
        log_h2: line.log_h2.clone(),
        log_factor: line.factor.iter().map(log).collect(),
    };
    network.file.shielding.iter().map(law).collect()
}

/// What a reaction inherits from the line it comes from.
struct Origin<'a> {
    line: usize,
    within: f64,
    standing: Standing,
    source: &'a str,
}

/// The state of an expansion under way.
struct Expansion<'a> {
    network: &'a Network,
    options: &'a GrainOptions,
    species: Vec<Species>,
    reactions: Vec<Reaction>,
    /// Uncertainty groups by cause and reactants.
    groups: HashMap<(Discriminant<Cause>, Vec<SpeciesId>), usize>,
    /// How many dust states stand between gas and ices.
    dust: usize,
}

impl<'a> Expansion<'a> {
    fn new(network: &'a Network, options: &'a GrainOptions) -> Self {
        let roster = &network.roster;
        let mut species = roster.species[..roster.gas].to_vec();
        if network.file.dust.is_some() {
            species.extend((-options.charge_states..=options.charge_states).map(dust));
        }
        let dust = species.len() - roster.gas;
        species.extend_from_slice(&roster.species[roster.gas..]);
        if roster.species.len() > roster.gas {
            species.push(ice_total());
        }
        let (reactions, groups) = (Vec::new(), HashMap::new());
        Expansion {
            network,
            options,
            species,
            reactions,
            groups,
            dust,
        }
    }

    /// State places of roster places.
    fn ids(&self, places: &[usize]) -> Vec<SpeciesId> {
        let gas = self.network.roster.gas;
        let id = |place: &usize| {
            if *place < gas {
                *place
            } else {
                *place + self.dust
            }
        };
        places.iter().map(id).collect()
    }

    /// Place of the grain of charge `charge`; only asked for within the options' range.
    fn dust_id(&self, charge: i32) -> SpeciesId {
        self.network.roster.gas + (charge + self.options.charge_states) as usize
    }

    /// Adds a reaction whose rate law holds exactly what it consumes.
    fn add(
        &mut self,
        change: String,
        consumed: Vec<SpeciesId>,
        products: Vec<SpeciesId>,
        cause: Cause,
        origin: &Origin,
    ) {
        self.push(change, consumed.clone(), consumed, products, cause, origin);
    }

    fn push(
        &mut self,
        change: String,
        reactants: Vec<SpeciesId>,
        consumed: Vec<SpeciesId>,
        products: Vec<SpeciesId>,
        cause: Cause,
        origin: &Origin,
    ) {
        let mut key = reactants.clone();
        key.sort_unstable();
        let next = self.groups.len();
        let group = *self
            .groups
            .entry((std::mem::discriminant(&cause), key))
            .or_insert(next);
        self.reactions.push(Reaction {
            change,
            reactants,
            consumed,
            products,
            cause,
            line: origin.line,
            group,
            within: origin.within,
            standing: origin.standing,
            source: origin.source.to_string(),
        });
    }

    /// The written form of a generated change.
    fn text(&self, left: &[SpeciesId], right: &[SpeciesId]) -> String {
        let side = |ids: &[SpeciesId]| {
            ids.iter()
                .map(|id| self.species[*id].name.as_str())
                .collect::<Vec<_>>()
                .join(" + ")
        };
        format!("{} -> {}", side(left), side(right))
    }
}

fn dust(charge: i32) -> Species {
    Species {
        name: names::dust_name(charge),
        phase: Phase::Dust,
        charge,
        mass: 0.0,
        atoms: vec![("dust".to_string(), 1)],
    }
}

fn ice_total() -> Species {
    Species {
        name: ICE_TOTAL.to_string(),
        phase: Phase::IceTotal,
        charge: 0,
        mass: 0.0,
        atoms: Vec::new(),
    }
}
