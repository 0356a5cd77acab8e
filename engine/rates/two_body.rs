//! Owns the temperature dependence of collisional gas-phase coefficients: power law with pieces
//! and validity rules, ion-dipole capture, and the limits of falloff coefficients.
//!
//! It never multiplies by densities: `rates::cell` does.

use crate::network::layout::Below;
use crate::network::model::{Piece, Range};

/// Where a temperature lies with respect to a validity range.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Place {
    Inside,
    Below,
    Above,
}

/// Modified Arrhenius (Kooij) law: a (T/300 K)^b exp(-c/T), in the unit of `a`; T and c in K.
pub fn power_law(a: f64, b: f64, c: f64, t: f64) -> f64 {
    a * (t / 300.0).powf(b) * (-c / t).exp()
}

/// ln of [`power_law`], minus infinity where `a` is 0.
pub fn log_power_law(a: f64, b: f64, c: f64, t: f64) -> f64 {
    a.ln() + b * (t / 300.0).ln() - c / t
}

/// The temperature at which a law valid on `range` is evaluated for gas at `t` (K), or None where
/// the rule says the reaction does not happen; with the place of `t` relative to the range.
/// Above the range the value is held.
pub fn evaluation_temperature(range: Range, t: f64) -> (Option<f64>, Place) {
    let [low, high] = range.valid;
    if t > high {
        (Some(high), Place::Above)
    } else if t < low {
        let at = match range.below {
            Below::Extend => Some(t),
            Below::Hold => Some(low),
            Below::Zero => None,
        };
        (at, Place::Below)
    } else {
        (Some(t), Place::Inside)
    }
}

/// A power law in pieces that ascend and abut: the first piece whose upper end is not below `t`
/// counts; `below` belongs to the lowest, above the highest the value is held.
pub fn pieces(pieces: &[Piece], below: Below, t: f64) -> (f64, Place) {
    let (chosen, place) = choose(pieces, below, t);
    let k = chosen.map_or(0.0, |(p, at)| power_law(p.at_300k, p.slope, p.barrier, at));
    (k, place)
}

/// The natural logarithm of [`pieces`], minus infinity for 0.
pub fn log_pieces(pieces: &[Piece], below: Below, t: f64) -> f64 {
    let (chosen, _) = choose(pieces, below, t);
    chosen.map_or(f64::NEG_INFINITY, |(p, at)| {
        log_power_law(p.at_300k, p.slope, p.barrier, at)
    })
}

/// The piece that counts and the temperature at which it does.
fn choose(pieces: &[Piece], below: Below, t: f64) -> (Option<(&Piece, f64)>, Place) {
    let Some(last) = pieces.last() else {
        return (None, Place::Inside);
    };
    let piece = pieces.iter().find(|p| t <= p.valid[1]).unwrap_or(last);
    // Only the lowest piece can have `t` below its range: the others abut.
    let (at, place) = evaluation_temperature(
        Range {
            valid: piece.valid,
            below,
        },
        t,
    );
    (at.map(|at| (piece, at)), place)
}

/// Ion-dipole capture coefficient (Su & Chesnavich 1982, J. Chem. Phys. 76, 5183), in the unit of
/// `langevin`: langevin g(x) with x = mu_D / sqrt(2 alpha k_B T) = x_300k sqrt(300 K/T);
/// g = 0.4767 x + 0.6200 for x >= 2, (x + 0.5090)^2/10.526 + 0.9754 below.
pub fn capture(langevin: f64, x_300k: f64, t: f64) -> f64 {
    let x = x_300k * (300.0 / t).sqrt();
    let g = if x >= 2.0 {
        0.4767 * x + 0.62
    } else {
        (x + 0.509).powi(2) / 10.526 + 0.9754
    };
    langevin * g
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Fails if the branch, the constants or the temperature dependence of the capture law are off.
    /// Values: shared facts, closed_form_checks.md section 2, computed from Su & Chesnavich 1982
    /// with kL = 2.342e-9 sqrt(alpha/mu), alpha and mu_D of handbooks.
    #[test]
    fn capture_reproduces_tabulated_pairs_at_10_and_300_k() {
        // (alpha A^3, dipole D, reduced mass amu, k at 10 K, k at 300 K)
        let h3 = 3.024;
        let reduced = |m: f64| h3 * m / (h3 + m);
        let cases: [(f64, f64, f64, f64, f64); 4] = [
            (1.45, 1.855, reduced(18.015), 2.5579e-8, 5.5582e-9), // H3+ + H2O
            (2.59, 2.985, reduced(27.026), 3.9873e-8, 8.4380e-9), // H3+ + HCN
            (
                2.16,
                1.472,
                29.018 * 17.031 / (29.018 + 17.031),
                1.0198e-8,
                2.3943e-9,
            ), // HCO+ + NH3
            (
                1.45,
                1.855,
                12.011 * 18.015 / (12.011 + 18.015),
                1.5333e-8,
                3.3317e-9,
            ), // C+ + H2O
        ];
        for (alpha, dipole, mu, at_10, at_300) in cases {
            let langevin = 2.342e-9 * (alpha / mu).sqrt();
            let x =
                dipole * 1e-18 / (2.0 * alpha * 1e-24 * crate::units::BOLTZMANN * 300.0f64).sqrt();
            for (t, expected) in [(10.0, at_10), (300.0, at_300)] {
                let k = capture(langevin, x, t);
                assert!(
                    (k / expected - 1.0).abs() < 2e-3,
                    "{k:e} instead of {expected:e} at {t} K"
                );
            }
        }
    }

    /// Fails if one branch is shifted: both give 1.573 times Langevin at x = 2 (same source).
    #[test]
    fn both_capture_branches_meet_at_x_equal_two() {
        let above = capture(1.0, 2.0, 300.0);
        let below = capture(1.0, 2.0 - 1e-12, 300.0);
        assert!((above - 1.573).abs() < 5e-4 && (below - 1.573).abs() < 5e-4);
    }

    /// Fails if a rule below or above the range is swapped or ignored.
    #[test]
    fn validity_rules_hold_extend_and_zero() {
        let law = |below, t| {
            let p = [Piece {
                at_300k: 2.0,
                slope: 1.0,
                barrier: 0.0,
                valid: [150.0, 600.0],
            }];
            pieces(&p, below, t)
        };
        assert_eq!(law(Below::Extend, 75.0), (0.5, Place::Below));
        assert_eq!(law(Below::Hold, 75.0), (1.0, Place::Below));
        assert_eq!(law(Below::Zero, 75.0), (0.0, Place::Below));
        assert_eq!(law(Below::Hold, 300.0), (2.0, Place::Inside));
        assert_eq!(law(Below::Extend, 5000.0), (4.0, Place::Above));
    }

    /// Fails if a joint uses the wrong piece or the rule of the lowest leaks upwards.
    #[test]
    fn pieces_are_used_each_in_its_own_range() {
        let p = [
            Piece {
                at_300k: 1.0,
                slope: 0.0,
                barrier: 0.0,
                valid: [50.0, 200.0],
            },
            Piece {
                at_300k: 3.0,
                slope: 0.0,
                barrier: 0.0,
                valid: [200.0, 400.0],
            },
        ];
        let k = |t| pieces(&p, Below::Zero, t).0;
        assert_eq!(
            [k(10.0), k(50.0), k(200.0), k(200.1), k(900.0)],
            [0.0, 1.0, 1.0, 3.0, 3.0]
        );
    }
}
