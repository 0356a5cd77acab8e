//! Owns the check of the linear invariants: each element, charge, dust grains, and the ice total.
//!
//! It never repairs anything. Element sums, charge and dust number are kept by the solver to
//! round-off, so a drift is a defect of the code; it says nothing about accuracy.

use super::record::Balance;
use crate::network::model::{Chemistry, Phase};

/// What is counted, worked out once per network.
#[derive(Debug, Clone)]
pub struct Invariants {
    /// Atoms per species, by element (dust grains are the element `dust`).
    elements: Vec<(String, Vec<(usize, f64)>)>,
    charges: Vec<(usize, f64)>,
    ices: Vec<usize>,
    ice_total: Option<usize>,
}

impl Invariants {
    pub fn new(chemistry: &Chemistry) -> Self {
        let mut elements: Vec<(String, Vec<(usize, f64)>)> = Vec::new();
        for (id, species) in chemistry.species.iter().enumerate() {
            for (element, count) in &species.atoms {
                let entry = (id, f64::from(*count));
                match elements.iter_mut().find(|(name, _)| name == element) {
                    Some((_, list)) => list.push(entry),
                    None => elements.push((element.clone(), vec![entry])),
                }
            }
        }
        let of = |phase| {
            let all = chemistry.species.iter().enumerate();
            all.filter(move |(_, s)| s.phase == phase).map(|(id, _)| id)
        };
        Invariants {
            elements,
            charges: (chemistry.species.iter().enumerate())
                .filter(|(_, s)| s.charge != 0)
                .map(|(id, s)| (id, f64::from(s.charge)))
                .collect(),
            ices: of(Phase::Ice).collect(),
            ice_total: of(Phase::IceTotal).next(),
        }
    }

    /// Sum over species of atoms times abundance, for every element (and `dust`).
    pub fn totals(&self, state: &[f64]) -> Vec<(String, f64)> {
        let sum = |list: &[(usize, f64)]| list.iter().map(|(id, n)| n * state[*id]).sum();
        self.elements
            .iter()
            .map(|(name, list)| (name.clone(), sum(list)))
            .collect()
    }

    /// Drifts of `state` since `start`. Elements and dust relative to their own totals, charge
    /// relative to the sum of |charge| x abundance, the ice total relative to the sum of its parts
    /// (or to 1e-15 per H where there is hardly any ice).
    pub fn drift(&self, start: &[f64], state: &[f64]) -> Balance {
        let mut balance = Balance {
            elements: 0.0,
            charge: 0.0,
            dust: 0.0,
            ice: 0.0,
        };
        for ((name, before), (_, now)) in self.totals(start).iter().zip(self.totals(state)) {
            let drift = if *before == 0.0 {
                now.abs()
            } else {
                (now / before - 1.0).abs()
            };
            if name == "dust" {
                balance.dust = drift;
            } else {
                balance.elements = balance.elements.max(drift);
            }
        }
        let charge = |y: &[f64]| self.charges.iter().map(|(id, q)| q * y[*id]).sum::<f64>();
        let scale: f64 = self
            .charges
            .iter()
            .map(|(id, q)| (q * state[*id]).abs())
            .sum();
        // Below 1e-20 per H there is no charge to speak of: compare with that.
        balance.charge = (charge(state) - charge(start)).abs() / scale.max(1e-20);
        if let Some(total) = self.ice_total {
            let sum: f64 = self.ices.iter().map(|id| state[*id]).sum();
            // Below 1e-15 per H there is no ice to speak of: compare with that.
            balance.ice = (state[total] - sum).abs() / sum.abs().max(1e-15);
        }
        balance
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::network::model::{GrainOptions, Species};

    fn species(name: &str, phase: Phase, charge: i32, atoms: &[(&str, u32)]) -> Species {
        Species {
            name: name.to_string(),
            phase,
            charge,
            mass: 1.0,
            atoms: atoms.iter().map(|(e, n)| (e.to_string(), *n)).collect(),
        }
    }

    /// Gas, charges, grains, ices and their total, in the order of a state.
    fn chemistry() -> Chemistry {
        Chemistry {
            name: "invented".to_string(),
            species: vec![
                species("CO", Phase::Gas, 0, &[("C", 1), ("O", 1)]),
                species("C+", Phase::Gas, 1, &[("C", 1)]),
                species("O2", Phase::Gas, 0, &[("O", 2)]),
                species("e-", Phase::Gas, -1, &[]),
                species("dust-", Phase::Dust, -1, &[("dust", 1)]),
                species("dust", Phase::Dust, 0, &[("dust", 1)]),
                species("CO(ads)", Phase::Ice, 0, &[("C", 1), ("O", 1)]),
                species("ices(total)", Phase::IceTotal, 0, &[]),
            ],
            reactions: Vec::new(),
            spectra: Vec::new(),
            shielding: Vec::new(),
            column_species: Vec::new(),
            options: GrainOptions::default(),
        }
    }

    const START: [f64; 8] = [4.0, 2.0, 1.0, 1.5, 0.5, 1.5, 2.0, 2.0];

    fn drift(change: impl Fn(&mut [f64; 8])) -> [f64; 4] {
        let mut state = START;
        change(&mut state);
        Invariants::new(&chemistry())
            .drift(&START, &state)
            .numbers()
    }

    /// Fails if a sum is not watched in one direction or relative to something else: every check
    /// of conservation in the suite goes through here and would pass whatever happened.
    #[test]
    fn every_sum_that_changes_is_seen_in_both_directions() {
        assert_eq!(drift(|_| ()), [0.0; 4]);
        // 8 C and 8 O nuclei, 2 grains, charges of 4 in all, 2 adsorbed. Gas to ice keeps all.
        let frozen = drift(|y| {
            y[0] -= 1.0;
            y[6] += 1.0;
            y[7] += 1.0;
        });
        assert_eq!(frozen, [0.0; 4]);
        for sign in [1.0, -1.0] {
            assert_eq!(drift(|y| y[2] += 0.5 * sign)[0], 0.125, "elements");
            assert_eq!(drift(|y| y[5] += 0.5 * sign), [0.0, 0.0, 0.25, 0.0]);
            let charge = drift(|y| y[3] += 0.5 * sign);
            let expected = 0.5 / (4.0 + 0.5 * sign);
            assert_eq!(charge, [0.0, expected, 0.0, 0.0]);
            assert_eq!(drift(|y| y[7] += 0.5 * sign), [0.0, 0.0, 0.0, 0.25]);
        }
    }
}
