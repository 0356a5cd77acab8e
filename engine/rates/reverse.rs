//! Owns the coefficients of reverse reactions: those of the forward reaction over its equilibrium
//! constant, in units of the state.
//!
//! It never evaluates polynomials: `network::equilibrium` does.

use super::two_body::{evaluation_temperature, log_pieces, log_power_law};
use crate::kinetics::Falloff;
use crate::network::model::{Cause, Range};

/// Coefficients end here (e^690 is 1e299), so that no impossible reverse becomes infinite.
const LARGEST_LOG: f64 = 690.0;

/// What turns a forward into a reverse coefficient in one cell.
pub(super) struct Reverse {
    /// ln K_c, in cm^-3 to the power of the particles gained.
    pub(super) log_constant: f64,
    /// How many particles the reverse takes, third bodies left out.
    pub(super) order: usize,
    /// K.
    pub(super) t: f64,
    /// cm^-3.
    pub(super) n_h: f64,
}

impl Reverse {
    /// k_forward/K_c times the powers of n_H; falloff limits go to `falloff`. In logarithms: at
    /// 10 K both can be far outside what a number holds, and their ratio not.
    pub(super) fn coefficient(&self, forward: &Cause, falloff: &mut Vec<Falloff>) -> f64 {
        match forward {
            Cause::PowerLaw { pieces, below } => self.value(log_pieces(pieces, *below, self.t), 0),
            Cause::ThirdBody { pieces, below } => self.value(log_pieces(pieces, *below, self.t), 1),
            Cause::Falloff {
                low,
                high,
                centre,
                range,
            } => {
                // Both limits over K_c: the reduced pressure, and with it the shape, stay.
                falloff.push(Falloff {
                    low: self.value(self.limit(*low, *range), 1),
                    high: self.value(self.limit(*high, *range), 0),
                    log_centre: centre.log10(),
                });
                1.0
            }
            // Nothing else can be declared reversible; a cell that fails shows it.
            _ => f64::NAN,
        }
    }

    fn limit(&self, [a, b, barrier]: [f64; 3], range: Range) -> f64 {
        let (at, _) = evaluation_temperature(range, self.t);
        at.map_or(f64::NEG_INFINITY, |at| log_power_law(a, b, barrier, at))
    }

    /// From the logarithm of a forward coefficient with so many unwritten third bodies.
    fn value(&self, log_forward: f64, third_bodies: i32) -> f64 {
        let powers = self.order as f64 - 1.0 + f64::from(third_bodies);
        let log = log_forward - self.log_constant + powers * self.n_h.ln();
        log.min(LARGEST_LOG).exp()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::network::layout::Below;
    use crate::network::model::Piece;

    fn power(barrier: f64) -> Cause {
        Cause::PowerLaw {
            pieces: vec![Piece {
                at_300k: 1e-10,
                slope: 0.0,
                barrier,
                valid: [5.0, 4000.0],
            }],
            below: Below::Extend,
        }
    }

    /// Fails if a reverse is computed from numbers that a cold cell makes 0 or infinite.
    #[test]
    fn cold_reverses_neither_overflow_nor_lose_their_value() {
        let cell = |log_constant| Reverse {
            log_constant,
            order: 2,
            t: 10.0,
            n_h: 1e6,
        };
        let k = |log_constant, barrier| {
            cell(log_constant).coefficient(&power(barrier), &mut Vec::new())
        };
        // Strongly exothermic forward: no reverse.
        assert_eq!(k(3e4, 0.0), 0.0);
        // Forward and constant both vanish at 10 K, their ratio does not: exp(-1000)/exp(-990).
        assert!((k(-990.0, 1e4) / (1e-10 * 1e6 * f64::exp(-10.0)) - 1.0).abs() < 1e-9);
        // Impossible, but a number.
        assert!(k(-1e5, 0.0).is_finite());
        // No forward, no reverse.
        let none = Cause::PowerLaw {
            pieces: Vec::new(),
            below: Below::Zero,
        };
        assert_eq!(cell(-1e5).coefficient(&none, &mut Vec::new()), 0.0);
    }

    /// Fails if the third body or a power of n_H goes astray: k_f = 1, K_c = e.
    #[test]
    fn powers_of_density_follow_what_the_reverse_takes() {
        let one = |order| Reverse {
            log_constant: 1.0,
            order,
            t: 300.0,
            n_h: 10.0,
        };
        let pieces = vec![Piece {
            at_300k: 1.0,
            slope: 0.0,
            barrier: 0.0,
            valid: [5.0, 400.0],
        }];
        let below = Below::Extend;
        let third = Cause::ThirdBody { pieces, below };
        let near = |found: f64, power: i32| {
            let expected = 10f64.powi(power) / std::f64::consts::E;
            assert!((found / expected - 1.0).abs() < 1e-12, "{found}, {power}");
        };
        near(one(2).coefficient(&third, &mut Vec::new()), 2);
        let falloff = Cause::Falloff {
            low: [1.0, 0.0, 0.0],
            high: [1.0, 0.0, 0.0],
            centre: 0.1,
            range: Range {
                valid: [5.0, 400.0],
                below,
            },
        };
        let mut limits = Vec::new();
        assert_eq!(one(1).coefficient(&falloff, &mut limits), 1.0);
        near(limits[0].low, 1);
        near(limits[0].high, 0);
        assert_eq!(limits[0].log_centre, -1.0);
    }
}
