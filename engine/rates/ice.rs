//! Owns how single molecules leave the ice: thermally, by cosmic-ray heating, by light.
//!
//! It never counts layers: the factors of `kinetics::mechanism` do, with the current state.

use crate::network::model::Binding;
use crate::units::{ATOMIC_MASS, BOLTZMANN};
use std::f64::consts::PI;

/// First-order thermal desorption rate, s^-1: nu exp(-E/T_dust) (Polanyi & Wigner 1925).
pub fn thermal_desorption(binding: &Binding, t_dust: f64) -> f64 {
    binding.prefactor * (-binding.energy / t_dust).exp()
}

/// Grain radius for which the share of time spent hot was worked out, cm (Hasegawa & Herbst 1993).
pub const COSMIC_HEATING_RADIUS: f64 = 1e-5;

/// Desorption by cosmic-ray heating, s^-1 (Hasegawa & Herbst 1993, MNRAS 261, 83): a grain of
/// 0.1 um spends 3.16e-19 of the time near 70 K at zeta = 1.3e-17 s^-1; proportional to zeta. Used as
/// it is for other radii (a caution of the cell).
pub fn cosmic_desorption(binding: &Binding, zeta_cosmic: f64) -> f64 {
    3.16e-19 * thermal_desorption(binding, 70.0) * zeta_cosmic / 1.3e-17
}

/// Photodesorption rate per molecule of an ice no thicker than `lit_layers`, s^-1: photons per
/// projected area times yield, over four times the sites per area and the layers that share them
/// (a grain's surface is four times its cross-section).
pub fn photodesorption(flux: f64, yields: f64, site_density: f64, lit_layers: f64) -> f64 {
    flux * yields / (4.0 * site_density * lit_layers)
}

/// Characteristic vibration frequency of an adsorbed species in a harmonic well, s^-1
/// (Hasegawa, Herbst & Leung 1992, ApJS 82, 167): sqrt(2 n_s k_B E/(pi^2 m)); n_s in cm^-2, E in K,
/// m in amu.
pub fn harmonic_frequency(site_density: f64, energy: f64, mass: f64) -> f64 {
    (2.0 * site_density * BOLTZMANN * energy / (PI * PI * mass * ATOMIC_MASS)).sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::disk::conditions::REFERENCE_DUST_AREA;
    use crate::rates::dust::accretion;

    fn binding(energy: f64, prefactor: f64, mass: f64) -> Binding {
        Binding {
            energy,
            prefactor,
            hop_energy: energy,
            hop_barrier: 0.5 * energy,
            mass,
        }
    }

    /// Fails if desorption or accretion is off by more than rounding: half-depletion temperatures
    /// (adsorption equals first-order desorption), closed_form_checks.md section 1.
    #[test]
    fn half_depletion_temperatures() {
        let table = [
            (28.01, 1150.0, 1.00e12, [19.86, 21.60, 23.66, 26.17, 29.28]),
            (28.01, 1390.0, 9.14e14, [21.49, 23.15, 25.10, 27.40, 30.16]),
            (28.014, 1152.0, 4.51e14, [17.98, 19.39, 21.03, 22.99, 25.34]),
            (16.043, 1232.0, 5.43e13, [20.00, 21.63, 23.55, 25.85, 28.65]),
            (44.009, 3196.0, 6.81e16, [46.44, 49.79, 53.68, 58.22, 63.60]),
            (
                17.031,
                5362.0,
                1.94e15,
                [83.13, 89.58, 97.11, 106.04, 116.79],
            ),
            (
                18.015,
                5705.0,
                4.96e15,
                [87.17, 93.83, 101.59, 110.76, 121.75],
            ),
            (
                32.042,
                6621.0,
                3.18e17,
                [94.79, 101.53, 109.31, 118.39, 129.12],
            ),
        ];
        for (mass, energy, nu, temperatures) in table {
            for (n_h, expected) in [1e4, 1e6, 1e8, 1e10, 1e12].into_iter().zip(temperatures) {
                let (mut low, mut high) = (5.0, 300.0);
                for _ in 0..100 {
                    let t = 0.5 * (low + high);
                    let gains = accretion(1.0, mass, REFERENCE_DUST_AREA, n_h, t);
                    if thermal_desorption(&binding(energy, nu, mass), t) > gains {
                        high = t;
                    } else {
                        low = t;
                    }
                }
                assert!(
                    (low - expected).abs() < 0.012,
                    "{low} instead of {expected} K ({energy} K)"
                );
            }
        }
    }

    /// Fails if the harmonic prefactor loses a factor: values of set A in the shared facts
    /// (binding.csv; Hasegawa, Herbst & Leung 1992 with n_s = 1.5e15 cm^-2).
    #[test]
    fn harmonic_frequencies() {
        for (energy, mass, nu) in [
            (650.0, 1.008, 4.04e12),
            (1300.0, 28.01, 1.08e12),
            (5600.0, 18.015, 2.80e12),
        ] {
            assert!((harmonic_frequency(1.5e15, energy, mass) / nu - 1.0).abs() < 5e-3);
        }
    }

    /// Fails if the duty cycle or its scaling with zeta is off. By hand for CO (1150 K, 1e12 s^-1):
    /// 3.16e-19 * 1e12 * exp(-1150/70) = 2.31e-14 s^-1 at the standard rate.
    #[test]
    fn cosmic_ray_desorption_of_co() {
        let k = cosmic_desorption(&binding(1150.0, 1e12, 28.0), 1.3e-17);
        assert!((k / 2.31e-14 - 1.0).abs() < 5e-3, "{k:e}");
        assert!(
            (cosmic_desorption(&binding(1150.0, 1e12, 28.0), 1.3e-16) / k - 10.0).abs() < 1e-12
        );
    }
}
