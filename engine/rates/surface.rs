//! Owns Langmuir-Hinshelwood chemistry: thermal hopping, tunnelling through a rectangular barrier,
//! and the competition of reaction with diffusion.
//!
//! It never confines reactions to layers: the factor `Encounters` of `kinetics::mechanism` does.

use super::ice::{harmonic_frequency, thermal_desorption};
use crate::network::model::Binding;
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

/// One pair of adsorbed reactants with its barrier.
pub struct Pair<'a> {
    pub first: &'a Binding,
    pub second: &'a Binding,
    /// K.
    pub barrier: f64,
    /// A.
    pub width: f64,
    /// amu.
    pub tunnelling_mass: f64,
}

/// Probability that two species which share a site react before one of them hops or desorbs
/// (Garrod & Pauly 2011, ApJ 735, 15): p/(p + hops + desorptions); 1 without a barrier.
pub fn reaction_probability(pair: &Pair, site_density: f64, t_dust: f64) -> f64 {
    if pair.barrier == 0.0 {
        return 1.0;
    }
    let frequency = |b: &Binding| harmonic_frequency(site_density, b.hop_energy, b.mass);
    let attempts = frequency(pair.first).max(frequency(pair.second));
    let crossing = (-pair.barrier / t_dust)
        .exp()
        .max(tunnelling(pair.barrier, pair.width, pair.tunnelling_mass));
    let reacts = attempts * crossing;
    let leaves: f64 = [pair.first, pair.second]
        .into_iter()
        .map(|b| hopping(b, site_density, t_dust) + thermal_desorption(b, t_dust))
        .sum();
    if reacts == 0.0 { 0.0 } else { reacts / (reacts + leaves) }
}

/// Encounter coefficient per pair of abundances, s^-1: either partner hops over `sites` (per H);
/// a species meeting itself counts each pair once.
pub fn encounter(pair: &Pair, same: bool, sites: f64, site_density: f64, t_dust: f64) -> f64 {
    let hops = hopping(pair.first, site_density, t_dust) + hopping(pair.second, site_density, t_dust);
    hops / sites * if same { 0.5 } else { 1.0 }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn hydrogen() -> Binding {
        Binding { energy: 650.0, prefactor: 4.04e12, hop_energy: 650.0, hop_barrier: 227.5, mass: 1.008 }
    }

    fn carbon_monoxide() -> Binding {
        Binding { energy: 1390.0, prefactor: 9.14e14, hop_energy: 1300.0, hop_barrier: 650.0, mass: 28.01 }
    }

    fn pair<'a>(h: &'a Binding, co: &'a Binding, barrier: f64) -> Pair<'a> {
        let reduced = 1.008 * 28.01 / 29.018;
        Pair { first: h, second: co, barrier, width: 1.0, tunnelling_mass: reduced }
    }

    /// Fails if hbar, the width's unit or the square root is off. By hand with CODATA 2018:
    /// H + CO, 2500 K, 1 A: 2 a/hbar sqrt(2 mu k E) = 14.07 -> 7.8e-7.
    #[test]
    fn tunnelling_of_h_through_the_co_barrier() {
        let mu: f64 = 1.008 * 28.01 / 29.018;
        let exponent = 2e-8 / 1.054_571_817e-27
            * (2.0 * mu * 1.660_539_066_6e-24 * 1.380_649e-16 * 2500.0).sqrt();
        let p = tunnelling(2500.0, 1.0, mu);
        assert!((p.ln() + exponent).abs() < 1e-9);
        assert!((exponent - 14.07).abs() < 0.03, "{exponent}");
    }

    /// Fails if the competition is left out: at 10 K H crosses the CO barrier more often than it
    /// hops away, so nearly every encounter reacts although one attempt in 1e6 succeeds (Garrod &
    /// Pauly 2011); a slow barrier follows p/(hop + desorb).
    #[test]
    fn competition_with_diffusion() {
        let (h, co) = (hydrogen(), carbon_monoxide());
        let kappa = reaction_probability(&pair(&h, &co, 2500.0), 1.5e15, 10.0);
        assert!(kappa > 0.99, "{kappa}");
        let kappa = reaction_probability(&pair(&h, &co, 20000.0), 1.5e15, 30.0);
        let p = 4.04e12 * tunnelling(20000.0, 1.0, 1.008 * 28.01 / 29.018);
        let slow = p / (hopping(&h, 1.5e15, 30.0) + thermal_desorption(&h, 30.0));
        assert!((kappa / slow - 1.0).abs() < 1e-2);
        assert_eq!(reaction_probability(&pair(&h, &co, 0.0), 1.5e15, 10.0), 1.0);
    }

    /// Fails if pairs of one species are counted twice.
    #[test]
    fn a_species_meets_itself_half_as_often() {
        let h = hydrogen();
        let same = encounter(&pair(&h, &h, 0.0), true, 3.5e-6, 1.5e15, 10.0);
        assert!((same / (hopping(&h, 1.5e15, 10.0) / 3.5e-6) - 1.0).abs() < 1e-14);
    }
}
