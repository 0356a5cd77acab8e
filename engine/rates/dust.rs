//! Owns collisions with grains: charging, sticking, accretion, and H2 formation.
//!
//! It never follows what sits on the grain: `ice` and `surface` do.

use crate::disk::conditions::REFERENCE_DUST_AREA;
use crate::units::{ATOMIC_MASS, BOLTZMANN, ELEMENTARY_CHARGE};
use std::f64::consts::PI;

/// Mean thermal speed sqrt(8 k_B T/(pi m)), cm s^-1; mass in amu, T in K.
pub fn mean_speed(mass: f64, t: f64) -> f64 {
    (8.0 * BOLTZMANN * t / (PI * mass * ATOMIC_MASS)).sqrt()
}

/// Reduced temperature tau = a k_B T/e^2 of a grain of radius `a` (cm) for unit charges
/// (Draine & Sutin 1987, ApJ 320, 803).
pub fn reduced_temperature(a: f64, t: f64) -> f64 {
    a * BOLTZMANN * t / (ELEMENTARY_CHARGE * ELEMENTARY_CHARGE)
}

/// Focusing factor J(tau, nu) of Draine & Sutin 1987 (ApJ 320, 803); nu = Z_grain e/q.
/// Neutral grain, attraction and repulsion with the image charge, as approximated there.
pub fn focusing(tau: f64, nu: f64) -> f64 {
    if nu == 0.0 {
        1.0 + (PI / (2.0 * tau)).sqrt()
    } else if nu < 0.0 {
        (1.0 - nu / tau) * (1.0 + (2.0 / (tau - 2.0 * nu)).sqrt())
    } else {
        let theta = nu / (1.0 + 1.0 / nu.sqrt());
        (1.0 + 1.0 / (4.0 * tau + 3.0 * nu).sqrt()).powi(2) * (-theta / tau).exp()
    }
}

/// Coefficient (cm^3 s^-1) of a particle of charge `charge` (e) and `mass` (amu) sticking to a
/// grain of charge `grain` (e) and radius `a` (cm): s pi a^2 v J (Draine & Sutin 1987).
pub fn charging(sticking: f64, charge: i32, mass: f64, grain: i32, a: f64, t: f64) -> f64 {
    let nu = f64::from(grain) / f64::from(charge);
    sticking * PI * a * a * mean_speed(mass, t) * focusing(reduced_temperature(a, t), nu)
}

/// Sticking probability of H (Hollenbach & McKee 1979, ApJS 41, 555):
/// 1/(1 + 0.04 sqrt(T_gas + T_dust) + 2e-3 T_gas + 8e-6 T_gas^2), K.
pub fn hydrogen_sticking(t_gas: f64, t_dust: f64) -> f64 {
    1.0 / (1.0 + 0.04 * (t_gas + t_dust).sqrt() + 2e-3 * t_gas + 8e-6 * t_gas * t_gas)
}

/// Rate (s^-1) at which a gas particle of `mass` (amu) sticks to grains of projected cross-section
/// `dust_area` (cm^2 per H) at `n_h` (cm^-3): S sigma_H n_H v.
pub fn accretion(sticking: f64, mass: f64, dust_area: f64, n_h: f64, t_gas: f64) -> f64 {
    sticking * dust_area * n_h * mean_speed(mass, t_gas)
}

/// Rate (s^-1, per H atom) of H2 formation on grains: R n_H with
/// R = at_100k (T_gas/100 K)^slope (cm^3 s^-1; Jura 1975, ApJ 197, 575), scaled with the dust's
/// cross-section. Each event takes two H.
pub fn hydrogen_formation(at_100k: f64, slope: f64, t_gas: f64, dust_area: f64, n_h: f64) -> f64 {
    at_100k * (t_gas / 100.0).powf(slope) * (dust_area / REFERENCE_DUST_AREA) * n_h
}

#[cfg(test)]
mod tests {
    use super::*;

    fn close(value: f64, expected: f64, relative: f64) {
        assert!(
            (value / expected - 1.0).abs() < relative,
            "{value:e} instead of {expected:e}"
        );
    }

    /// Fails if a mass, a square root or the cross-section is off: e-folding times of freeze-out
    /// with sticking 1 (shared facts, closed_form_checks.md section 1).
    #[test]
    fn freeze_out_times() {
        for (mass, t, n_h, years) in [
            (28.0, 10.0, 1e4, 6.2213e5),
            (28.0, 10.0, 1e6, 6.2213e3),
            (28.0, 20.0, 1e8, 4.3991e1),
            (18.0, 20.0, 1e8, 3.5271e1),
        ] {
            let rate = accretion(1.0, mass, REFERENCE_DUST_AREA, n_h, t);
            close(1.0 / rate / crate::units::YEAR, years, 1e-4);
        }
    }

    /// Fails if charge, temperature or the image term enters wrongly. tau(0.1 um, 20 K) = 0.120
    /// from disk_relations.md (evaluated there); J by hand from Draine & Sutin 1987.
    #[test]
    fn charging_factors() {
        let tau = reduced_temperature(1e-5, 20.0);
        close(tau, 0.120, 3e-3);
        close(focusing(tau, 0.0), 1.0 + (PI / (2.0 * tau)).sqrt(), 1e-14);
        // Large tau: attraction tends to the bare Coulomb factor 1 + 1/tau.
        close(focusing(1e4, -1.0), 1.0 + 1e-4, 2e-2);
        // Repulsion: theta(1) = 1/2.
        close(
            focusing(0.25, 1.0),
            (1.0 + 0.5f64).powi(2) * (-2.0f64).exp(),
            1e-14,
        );
        // Ion on a neutral grain at 20 K: pi a^2 v J.
        let k = charging(1.0, 1, 29.018, 0, 1e-5, 20.0);
        close(
            k,
            PI * 1e-10 * mean_speed(29.018, 20.0) * focusing(tau, 0.0),
            1e-14,
        );
        // Electrons are attracted by positive grains, repelled by negative ones.
        assert!(
            charging(0.6, -1, 5.4858e-4, 1, 1e-5, 20.0)
                > charging(0.6, -1, 5.4858e-4, -1, 1e-5, 20.0)
        );
    }

    /// Fails if the sticking law of H is off: values at 10, 30, 100, 300, 800 K with 20 K grains,
    /// Hollenbach & McKee 1979 as evaluated in disk_relations.md.
    #[test]
    fn hydrogen_sticking_values() {
        for (t, s) in [
            (10.0, 0.807),
            (30.0, 0.741),
            (100.0, 0.582),
            (300.0, 0.329),
            (800.0, 0.113),
        ] {
            assert!((hydrogen_sticking(t, 20.0) - s).abs() < 6e-4, "at {t} K");
        }
    }
}
