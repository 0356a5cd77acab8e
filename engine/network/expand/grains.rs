//! Owns the reactions that grains bring: H2 formation, charging, freeze-out, desorption and
//! reactions on ices.

use super::{Expansion, Origin, default_within};
use crate::network::groups::Group;
use crate::network::layout::{IceLine, Standing, SurfaceLine};
use crate::network::model::{Barrier, Binding, Cause, Species};
use crate::network::read::Entry;

impl Expansion<'_> {
    pub(super) fn hydrogen_formation(&mut self) {
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
    pub(super) fn charging(&mut self) {
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
    pub(super) fn ice(&mut self, index: usize) {
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
    pub(super) fn surface(&mut self, entry: &Entry) {
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
        let gas = network.roster.gas;
        let pair = [self.binding(a - gas), self.binding(b - gas)];
        let own = barrier(line, &pair);
        let barriers = self.barriers(entry, &pair);
        let branching = line.share.unwrap_or(1.0);
        let cause = |share: f64| Cause::Surface {
            first: pair[0].clone(),
            second: pair[1].clone(),
            same: a == b,
            share: branching * share,
            own,
            barriers: barriers.clone(),
        };
        let stays_in_ice = |place: &usize| network.roster.is_ice(*place);
        let consumed = self.ids(&entry.reactants);
        let products = self.ids(&entry.products);
        let change = entry.change.clone();
        if !entry.products.iter().any(stays_in_ice) {
            self.add(change, consumed, products, cause(1.0), &origin);
            return;
        }
        let leaves = line.leaves.unwrap_or(self.options.leaving_share);
        self.add(
            change,
            consumed.clone(),
            products,
            cause(1.0 - leaves),
            &origin,
        );
        if leaves > 0.0 {
            let gas_form = |place: &usize| network.roster.gas_form(*place);
            let gone: Vec<usize> = entry.products.iter().map(gas_form).collect();
            let change = self.text(&consumed, &gone);
            self.add(change, consumed, gone, cause(leaves), &origin);
        }
    }

    /// The different barriers that the channels of the pair of `entry` cross.
    fn barriers(&self, entry: &Entry, pair: &[Binding; 2]) -> Vec<Barrier> {
        let met = entry.reactant_set();
        let mut barriers = Vec::new();
        for other in &self.network.entries {
            if other.group == Group::Surface && other.reactant_set() == met {
                let barrier = barrier(&self.network.file.surface[other.index], pair);
                if !barriers.contains(&barrier) {
                    barriers.push(barrier);
                }
            }
        }
        barriers
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

fn barrier(line: &SurfaceLine, pair: &[Binding; 2]) -> Barrier {
    let reduced_mass = pair[0].mass * pair[1].mass / (pair[0].mass + pair[1].mass);
    Barrier {
        height: line.barrier,
        // Without a barrier the width plays no part.
        width: line.width.unwrap_or(1.0),
        mass: line.tunnelling_mass.unwrap_or(reduced_mass),
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
