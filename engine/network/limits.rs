//! Owns what a two-body coefficient can be at most, and its value as far as checks need it.
//!
//! Pure functions for the reader's checks; the rates of a run come from `rates`.

use super::layout::Below;
use super::model::Piece;
use crate::units::{ATOMIC_MASS, BOLTZMANN, ELEMENTARY_CHARGE};
use std::f64::consts::PI;

/// Debye in esu cm.
const DEBYE: f64 = 1e-18;
/// Cubic angstrom in cm^3.
const CUBIC_ANGSTROM: f64 = 1e-24;

/// Capture coefficient (cm^3 s^-1) of a singly charged ion and a neutral of polarisability
/// (A^3) and dipole (Debye) with reduced mass (amu) at T (K): Su & Chesnavich 1982, J. Chem.
/// Phys. 76, 5183.
pub fn capture(polarisability: f64, dipole: f64, reduced_mass: f64, temperature: f64) -> f64 {
    let alpha = polarisability * CUBIC_ANGSTROM;
    let langevin = 2.0 * PI * ELEMENTARY_CHARGE * (alpha / (reduced_mass * ATOMIC_MASS)).sqrt();
    let x = dipole * DEBYE / (2.0 * alpha * BOLTZMANN * temperature).sqrt();
    langevin * dipole_factor(x)
}

/// Capture over Langevin coefficient for the reduced dipole parameter x (Su & Chesnavich 1982).
pub fn dipole_factor(x: f64) -> f64 {
    if x >= 2.0 {
        0.4767 * x + 0.62
    } else {
        (x + 0.509).powi(2) / 10.526 + 0.9754
    }
}

/// a (T/300)^b exp(-c/T).
pub fn power_law(a: f64, b: f64, c: f64, temperature: f64) -> f64 {
    a * (temperature / 300.0).powf(b) * (-c / temperature).exp()
}

/// Value of a piece at T (K).
pub fn piece(piece: &Piece, temperature: f64) -> f64 {
    power_law(piece.at_300k, piece.slope, piece.barrier, temperature)
}

/// Temperature at which a coefficient valid on `valid` is evaluated; None where it is zero.
pub fn evaluated_at(valid: [f64; 2], below: Below, temperature: f64) -> Option<f64> {
    match below {
        _ if temperature >= valid[0] => Some(temperature.min(valid[1])),
        Below::Extend => Some(temperature),
        Below::Hold => Some(valid[0]),
        Below::Zero => None,
    }
}

/// Value of ascending pieces at T (K): the lower piece includes its upper end.
pub fn pieces(all: &[Piece], below: Below, temperature: f64) -> f64 {
    let Some(lowest) = all.first() else {
        return 0.0;
    };
    let here = all
        .iter()
        .find(|piece| temperature <= piece.valid[1])
        .or(all.last());
    let here = here.unwrap_or(lowest);
    let below = if std::ptr::eq(here, lowest) {
        below
    } else {
        Below::Extend
    };
    evaluated_at(here.valid, below, temperature).map_or(0.0, |at| piece(here, at))
}

#[cfg(test)]
mod tests {
    use super::*;

    // A limit that is off would either hide impossible coefficients or cry wolf.
    #[test]
    fn capture_matches_published_values() {
        // Values of the collected facts (closed_form_checks.md, section 2), computed there from
        // Su & Chesnavich 1982 apart from this code: (polarisability, dipole, masses, 10 K, 300 K).
        for (alpha, dipole, ion, neutral, cold, warm) in [
            (1.45, 1.855, 3.024, 18.015, 2.5579e-8, 5.5582e-9),
            (1.95, 0.11, 3.024, 28.010, 2.6892e-9, 2.0461e-9),
            (1.74, 0.0, 3.024, 28.014, 1.8699e-9, 1.8699e-9),
            (2.16, 1.472, 29.018, 17.031, 1.0198e-8, 2.3943e-9),
        ] {
            let mass = ion * neutral / (ion + neutral);
            for (t, expected) in [(10.0, cold), (300.0, warm)] {
                let value = capture(alpha, dipole, mass, t);
                assert!(
                    (value / expected - 1.0).abs() < 1e-3,
                    "{neutral} {t}: {value:e}"
                );
            }
        }
        assert!((dipole_factor(2.0 - 1e-12) / dipole_factor(2.0) - 1.0).abs() < 5e-3);
    }

    #[test]
    fn pieces_follow_their_ranges() {
        let piece = |at_300k, slope, low, high| Piece {
            at_300k,
            slope,
            barrier: 0.0,
            valid: [low, high],
        };
        let all = [
            piece(1.0, 1.0, 30.0, 100.0),
            piece(2.0, 0.0, 100.0, 300.0),
            piece(5.0, 1.0, 300.0, 600.0),
        ];
        assert_eq!(pieces(&all, Below::Extend, 15.0), 0.05);
        assert_eq!(pieces(&all, Below::Hold, 15.0), 0.1);
        assert_eq!(pieces(&all, Below::Zero, 15.0), 0.0);
        assert_eq!(pieces(&all, Below::Zero, 100.0), 1.0 / 3.0);
        assert_eq!(pieces(&all, Below::Zero, 100.1), 2.0);
        assert_eq!(pieces(&all, Below::Zero, 900.0), 10.0);
    }
}
