//! Owns the expansion of a checked network into every reaction that runs: the written ones, then
//! what grains do (H2 formation, charging, freeze-out, desorption, reactions on ices).
//!
//! It never evaluates a rate. The order of species and reactions is part of the run file; it is
//! documented in networks/README.md.

use super::check::STANDARD_SPECTRUM;
use super::groups::{self, Group};
use super::layout::{Below, IceLine, Standing, SurfaceLine};
use super::model::{
    Binding, Cause, Chemistry, GrainOptions, Phase, Range, Reaction, Shielding, Species, SpeciesId,
};
use super::names;
use super::read::{Entry, Network};
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

    /// A reaction written in the file, other than on surfaces.
    fn written(&mut self, entry: &Entry) {
        let file = &self.network.file;
        let range = |valid, below: Option<Below>| Range {
            valid,
            below: below.unwrap_or(Below::Extend),
        };
        let below = |below: Option<Below>| below.unwrap_or(Below::Extend);
        // Every line type carries these three; only the cause differs.
        macro_rules! origin {
            ($line:expr) => {
                Origin {
                    line: entry.line,
                    within: $line.within.unwrap_or(default_within($line.standing)),
                    standing: $line.standing,
                    source: &$line.source,
                }
            };
        }
        let (cause, origin) = match entry.group {
            Group::Gas | Group::ThreeBody => {
                let lines = if entry.group == Group::Gas {
                    &file.gas
                } else {
                    &file.three_body
                };
                let line = &lines[entry.index];
                let pieces = groups::pieces(line);
                (
                    Cause::PowerLaw {
                        pieces,
                        below: below(line.below),
                    },
                    origin!(line),
                )
            }
            Group::ThirdBody => {
                let line = &file.third_body[entry.index];
                let pieces = groups::pieces(line);
                (
                    Cause::ThirdBody {
                        pieces,
                        below: below(line.below),
                    },
                    origin!(line),
                )
            }
            Group::Capture => {
                let line = &file.capture[entry.index];
                let range = range(line.valid, line.below);
                let (langevin, x_300k) = (line.langevin, line.x_300k);
                (
                    Cause::Capture {
                        langevin,
                        x_300k,
                        range,
                    },
                    origin!(line),
                )
            }
            Group::Falloff => {
                let line = &file.falloff[entry.index];
                let numbers = |l: &super::layout::LimitLine| [l.at_300k, l.slope, l.barrier];
                let (low, high) = (numbers(&line.low), numbers(&line.high));
                let range = range(line.valid, line.below);
                (
                    Cause::Falloff {
                        low,
                        high,
                        centre: line.centre,
                        range,
                    },
                    origin!(line),
                )
            }
            Group::Light => {
                let line = &file.light[entry.index];
                let others = file
                    .spectra
                    .keys()
                    .map(|name| line.spectra.get(name).copied());
                let rates = std::iter::once(Some(line.rate)).chain(others).collect();
                let named = |name: &String| file.shielding.iter().position(|s| s.name == *name);
                let shield = line.shield.as_ref().and_then(named);
                (
                    Cause::Light {
                        rates,
                        extinction: line.extinction,
                        shield,
                    },
                    origin!(line),
                )
            }
            Group::Cosmic => {
                let line = &file.cosmic[entry.index];
                let cause = match (line.direct, line.secondary) {
                    (Some(value), _) => Cause::Ionisation { value },
                    (None, value) => Cause::SecondaryLight {
                        value: value.unwrap_or(0.0),
                    },
                };
                (cause, origin!(line))
            }
            Group::Surface => return,
        };
        let (consumed, products) = (self.ids(&entry.reactants), self.ids(&entry.products));
        self.add(entry.change.clone(), consumed, products, cause, &origin);
    }

    fn hydrogen_formation(&mut self) {
        let network = self.network;
        let Some(line) = network
            .file
            .dust
            .as_ref()
            .and_then(|d| d.hydrogen_formation.as_ref())
        else {
            return;
        };
        let (Some(h), Some(h2)) = (network.roster.find("H"), network.roster.find("H2")) else {
            return;
        };
        let origin = dust_origin(network.line("dust.hydrogen_formation"), &line.source);
        let cause = Cause::HydrogenFormation {
            at_100k: line.at_100k,
            slope: line.slope,
        };
        let change = "H + H -> H2 (on dust)".to_string();
        self.push(change, vec![h], vec![h, h], vec![h2], cause, &origin);
    }

    /// Electrons, then every ion, on grains of every charge that can take theirs.
    fn charging(&mut self) {
        let network = self.network;
        let Some(block) = &network.file.dust else {
            return;
        };
        let n = self.options.charge_states;
        if let Some(electron) = network.roster.find("e-") {
            let origin = dust_origin(network.line("dust.electron_sticking"), "");
            let sticking = block.electron_sticking.unwrap_or(0.6);
            for grain in -n + 1..=n {
                let cause = charging(sticking, &self.species[electron], grain, 1.0);
                let consumed = vec![electron, self.dust_id(grain)];
                let products = vec![self.dust_id(grain - 1)];
                self.add(
                    self.text(&consumed, &products),
                    consumed,
                    products,
                    cause,
                    &origin,
                );
            }
        }
        let sticking = block.ion_sticking.unwrap_or(1.0);
        for (i, (line, (ion, becomes))) in block
            .neutralisation
            .iter()
            .zip(&network.neutralisation)
            .enumerate()
        {
            let place = network.line(&format!("dust.neutralisation[{i}]"));
            let origin = dust_origin(place, &line.source);
            for grain in -n..n {
                let cause = charging(sticking, &self.species[*ion], grain, line.share);
                let consumed = vec![*ion, self.dust_id(grain)];
                let mut products = becomes.clone();
                products.push(self.dust_id(grain + 1));
                self.add(
                    self.text(&consumed, &products),
                    consumed,
                    products,
                    cause,
                    &origin,
                );
            }
        }
    }

    /// Freeze-out and desorption of one ice line.
    fn ice(&mut self, index: usize) {
        let network = self.network;
        let line = &network.file.ices[index];
        let ice_place = network.roster.gas + index;
        let (gas, ice) = (network.roster.gas_form(ice_place), ice_place + self.dust);
        let binding = self.binding(index);
        let mut origin = Origin {
            line: network.line(&format!("ices[{index}]")),
            within: 1.0,
            standing: Standing::Evaluated,
            source: "",
        };
        // Sticking is kinetic theory; the binding carries the uncertainty of the line.
        let cause = Cause::Accretion {
            mass: binding.mass,
            hydrogen: line.species == "H",
        };
        self.add(
            self.text(&[gas], &[ice]),
            vec![gas],
            vec![ice],
            cause,
            &origin,
        );
        origin.within = line.within.unwrap_or(default_within(line.standing));
        origin.standing = line.standing;
        origin.source = match &line.pure {
            Some(pure) if self.options.pure_ice => &pure.source,
            _ => &line.source,
        };
        let back = self.text(&[ice], &[gas]);
        let cause = Cause::ThermalDesorption {
            binding: binding.clone(),
        };
        self.add(back.clone(), vec![ice], vec![gas], cause, &origin);
        self.add(
            back,
            vec![ice],
            vec![gas],
            Cause::CosmicDesorption { binding },
            &origin,
        );
        for (j, channel) in line.photodesorption.iter().enumerate() {
            let products = network.photodesorption[index][j].clone();
            origin.line = network.line(&format!("ices[{index}].photodesorption[{j}]"));
            origin.source = &channel.source;
            let cause = Cause::Photodesorption {
                yields: channel.yields,
            };
            self.add(
                self.text(&[ice], &products),
                vec![ice],
                products,
                cause,
                &origin,
            );
        }
    }

    fn binding(&self, index: usize) -> Binding {
        let line: &IceLine = &self.network.file.ices[index];
        let species = &self.network.roster.species[self.network.roster.gas + index];
        let (energy, prefactor) = match &line.pure {
            Some(pure) if self.options.pure_ice => (pure.energy, pure.prefactor),
            _ => (line.energy, line.prefactor),
        };
        let atoms: u32 = species.atoms.iter().map(|(_, count)| count).sum();
        let ratio = match atoms {
            1 => self.options.hop_ratio_atoms,
            _ => self.options.hop_ratio_molecules,
        };
        let hop_energy = line.hop_energy.unwrap_or(line.energy);
        let hop_barrier = line.hop_barrier.unwrap_or(ratio * hop_energy);
        Binding {
            energy,
            prefactor,
            hop_energy,
            hop_barrier,
            mass: species.mass,
        }
    }

    /// A surface line: the part that stays, then the part that leaves.
    fn surface(&mut self, entry: &Entry) {
        let network = self.network;
        let line = &network.file.surface[entry.index];
        let &[a, b] = &entry.reactants[..] else {
            return;
        };
        let origin = Origin {
            line: entry.line,
            within: line.within.unwrap_or(default_within(line.standing)),
            standing: line.standing,
            source: &line.source,
        };
        let share = line.share.unwrap_or(1.0);
        let gas = network.roster.gas;
        let (first, second) = (self.binding(a - gas), self.binding(b - gas));
        let consumed = self.ids(&entry.reactants);
        let products = self.ids(&entry.products);
        if entry
            .products
            .iter()
            .all(|place| !network.roster.is_ice(*place))
        {
            let cause = encounter(line, first, second, a == b, share);
            self.add(entry.change.clone(), consumed, products, cause, &origin);
            return;
        }
        let leaves = line.leaves.unwrap_or(self.options.leaving_share);
        let stays = encounter(
            line,
            first.clone(),
            second.clone(),
            a == b,
            share * (1.0 - leaves),
        );
        self.add(
            entry.change.clone(),
            consumed.clone(),
            products,
            stays,
            &origin,
        );
        if leaves > 0.0 {
            let gone: Vec<usize> = entry
                .products
                .iter()
                .map(|s| network.roster.gas_form(*s))
                .collect();
            let cause = encounter(line, first, second, a == b, share * leaves);
            self.add(self.text(&consumed, &gone), consumed, gone, cause, &origin);
        }
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

fn charging(sticking: f64, projectile: &Species, grain: i32, share: f64) -> Cause {
    let (charge, mass) = (projectile.charge, projectile.mass);
    Cause::Charging {
        sticking,
        charge,
        mass,
        grain,
        share,
    }
}

fn encounter(line: &SurfaceLine, first: Binding, second: Binding, same: bool, share: f64) -> Cause {
    let reduced_mass = first.mass * second.mass / (first.mass + second.mass);
    Cause::Surface {
        same,
        barrier: line.barrier,
        // Without a barrier the width plays no part.
        width: line.width.unwrap_or(1.0),
        tunnelling_mass: line.tunnelling_mass.unwrap_or(reduced_mass),
        share,
        first,
        second,
    }
}

/// The lines of `dust` have a source but no standing.
fn dust_origin(line: usize, source: &str) -> Origin<'_> {
    let standing = Standing::Recalled;
    Origin {
        line,
        within: default_within(standing),
        standing,
        source,
    }
}
