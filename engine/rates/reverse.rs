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
