//! Owns Langmuir-Hinshelwood chemistry: thermal hopping, tunnelling through a rectangular barrier,
//! and the competition of reaction with diffusion.
//!
//! It never confines reactions to layers: the factor `Encounters` of `kinetics::mechanism` does.

use super::ice::{harmonic_frequency, thermal_desorption};
use crate::network::model::{Barrier, Binding};
use crate::units::{ATOMIC_MASS, BOLTZMANN, PLANCK_REDUCED};

/// Thermal hopping rate from site to site, s^-1: nu_harmonic exp(-E_hop/T_dust)
/// (Hasegawa, Herbst & Leung 1992, ApJS 82, 167).
pub fn hopping(binding: &Binding, site_density: f64, t_dust: f64) -> f64 {
    harmonic_frequency(site_density, binding.hop_energy, binding.mass)
        * (-binding.hop_barrier / t_dust).exp()
}

/// Probability of tunnelling through a rectangular barrier of height `barrier` (K) and `width` (A)
/// for `mass` (amu): exp(-2 (a/hbar) sqrt(2 mu k_B E)) (Hasegawa, Herbst & Leung 1992).
pub fn tunnelling(barrier: f64, width: f64, mass: f64) -> f64 {
    let momentum = (2.0 * mass * ATOMIC_MASS * BOLTZMANN * barrier).sqrt();
    (-2.0 * width * 1e-8 / PLANCK_REDUCED * momentum).exp()
}

/// Rate at which two adsorbed species that share a site cross a barrier, s^-1: attempts at the
/// faster of their vibrations times the larger of exp(-E/T_dust) and tunnelling.
pub fn crossing(pair: [&Binding; 2], barrier: Barrier, site_density: f64, t_dust: f64) -> f64 {
    let [a, b] = pair.map(|b| harmonic_frequency(site_density, b.hop_energy, b.mass));
    let through = tunnelling(barrier.height, barrier.width, barrier.mass);
    a.max(b) * (-barrier.height / t_dust).exp().max(through)
}

/// Probability that two species which share a site cross the barrier `own` before they cross
/// another of the pair's `barriers`, hop away or desorb: p / (sum of p + hops + desorptions)
/// (Garrod & Pauly 2011, ApJ 735, 15, for one barrier); 1 where there is none.
pub fn reaction_probability(
    pair: [&Binding; 2],
    own: Barrier,
    barriers: &[Barrier],
    site_density: f64,
    t_dust: f64,
) -> f64 {
    if own.height == 0.0 {
        return 1.0;
    }
    let rate = |barrier: &Barrier| crossing(pair, *barrier, site_density, t_dust);
    let parts = pair.map(|b| hopping(b, site_density, t_dust) + thermal_desorption(b, t_dust));
    let all: f64 = barriers.iter().map(rate).sum::<f64>() + parts[0] + parts[1];
    let reacts = rate(&own);
    if reacts == 0.0 { 0.0 } else { reacts / all }
}

/// Encounter coefficient per pair of abundances, s^-1: either partner hops over `sites` (per H);
/// a species meeting itself counts each pair once.
pub fn encounter(
    pair: [&Binding; 2],
    same: bool,
    sites: f64,
    site_density: f64,
    t_dust: f64,
) -> f64 {
    let [a, b] = pair.map(|b| hopping(b, site_density, t_dust));
    (a + b) / sites * if same { 0.5 } else { 1.0 }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn hydrogen() -> Binding {
        Binding {
            energy: 650.0,
            prefactor: 4.04e12,
            hop_energy: 650.0,
            hop_barrier: 227.5,
            mass: 1.008,
        }
    }

    fn carbon_monoxide() -> Binding {
        Binding {
            energy: 1390.0,
            prefactor: 9.14e14,
            hop_energy: 1300.0,
            hop_barrier: 650.0,
            mass: 28.01,
        }
    }

    const REDUCED: f64 = 1.008 * 28.01 / 29.018;

    fn barrier(height: f64) -> Barrier {
        Barrier {
            height,
            width: 1.0,
            mass: REDUCED,
        }
    }

    /// Fails if hbar, the width's unit or the square root is off. By hand with CODATA 2018:
    /// H + CO, 2500 K, 1 A: 2 a/hbar sqrt(2 mu k E) = 20.03, one attempt in 5e8.
    #[test]
    fn tunnelling_of_h_through_the_co_barrier() {
        let mu: f64 = 1.008 * 28.01 / 29.018;
        let exponent = 2e-8 / 1.054_571_817e-27
            * (2.0 * mu * 1.660_539_066_6e-24 * 1.380_649e-16 * 2500.0).sqrt();
        let p = tunnelling(2500.0, 1.0, mu);
        assert!((p.ln() + exponent).abs() < 1e-7);
        assert!((exponent - 20.03).abs() < 0.01, "{exponent}");
    }

    /// Fails if the competition is left out: at 10 K H crosses the CO barrier more often than it
    /// hops away (by hand: 8.1e3 against 5.3e2 s^-1), so most encounters react although one attempt
    /// in 5e8 succeeds (Garrod & Pauly 2011); a slow barrier follows p/(hop + desorb).
    #[test]
    fn competition_with_diffusion() {
        let (h, co) = (hydrogen(), carbon_monoxide());
        let kappa = |height, t| {
            reaction_probability([&h, &co], barrier(height), &[barrier(height)], 1.5e15, t)
        };
        assert!(
            (kappa(2500.0, 10.0) - 0.938).abs() < 2e-3,
            "{}",
            kappa(2500.0, 10.0)
        );
        let p = harmonic_frequency(1.5e15, 650.0, 1.008) * tunnelling(20000.0, 1.0, REDUCED);
        let slow = p / (hopping(&h, 1.5e15, 30.0) + thermal_desorption(&h, 30.0));
        assert!((kappa(20000.0, 30.0) / slow - 1.0).abs() < 1e-2);
        assert_eq!(kappa(0.0, 10.0), 1.0);
    }

    /// Fails if barriers of one pair do not compete: their probabilities must sum to at most one,
    /// in the ratio of their crossing rates.
    #[test]
    fn barriers_of_one_pair_compete() {
        let (h, co) = (hydrogen(), carbon_monoxide());
        let barriers = [barrier(2000.0), barrier(2600.0)];
        let kappa =
            barriers.map(|own| reaction_probability([&h, &co], own, &barriers, 1.5e15, 8.0));
        let p = barriers.map(|own| crossing([&h, &co], own, 1.5e15, 8.0));
        assert!(kappa[0] + kappa[1] <= 1.0 && kappa[0] + kappa[1] > 0.99);
        assert!((kappa[0] / kappa[1] / (p[0] / p[1]) - 1.0).abs() < 1e-12);
    }

    /// Fails if pairs of one species are counted twice.
    #[test]
    fn a_species_meets_itself_half_as_often() {
        let h = hydrogen();
        let same = encounter([&h, &h], true, 3.5e-6, 1.5e15, 10.0);
        assert!((same / (hopping(&h, 1.5e15, 10.0) / 3.5e-6) - 1.0).abs() < 1e-14);
    }
}
