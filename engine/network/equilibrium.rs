//! Owns the thermodynamics of reversible reactions: enthalpy, entropy and equilibrium constant from
//! polynomials, as pure functions.
//!
//! It never reads polynomials (`thermo` does) and never makes a rate of them (`rates` does).

use super::model::Polynomial;
use crate::units::BOLTZMANN;

/// Standard pressure of the polynomials, 1 bar in dyn cm^-2.
pub const STANDARD_PRESSURE: f64 = 1e6;

/// Where a temperature lies with respect to polynomials.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Reach {
    Inside,
    Below,
    Above,
}

/// H/R in K at T: the integral of Cp = R (a1 T^-2 + a2 T^-1 + a3 + a4 T + ... + a7 T^4), with b1
/// (McBride, Zehe & Gordon 2002, NASA/TP-2002-211556).
pub fn enthalpy(p: &Polynomial, t: f64) -> f64 {
    let [a1, a2, a3, a4, a5, a6, a7] = p.a;
    let rising = a3 + t * (a4 / 2.0 + t * (a5 / 3.0 + t * (a6 / 4.0 + t * a7 / 5.0)));
    -a1 / t + a2 * t.ln() + rising * t + p.b[0]
}

/// S/R at T and 1 bar: the integral of Cp/T, with b2 (same source).
pub fn entropy(p: &Polynomial, t: f64) -> f64 {
    let [a1, a2, a3, a4, a5, a6, a7] = p.a;
    let rising = t * (a4 + t * (a5 / 2.0 + t * (a6 / 3.0 + t * a7 / 4.0)));
    -(a1 / (2.0 * t) + a2) / t + a3 * t.ln() + rising + p.b[1]
}

/// ln K_c of a reaction (cm^-3 to the power `gained`) at T (K): K_c = (p0/k_B T)^gained
/// exp(-dH/RT + dS/R). `reaction` holds products less reactants, in intervals that ascend and abut;
/// `gained` is the number of particles gained.
///
/// Outside the polynomials dH and dS keep their values at the end (van 't Hoff), so that K_c goes on
/// as exp(-dH/RT): holding K_c itself would make cold endothermic reactions run.
pub fn log_constant(reaction: &[Polynomial], gained: i32, t: f64) -> (f64, Reach) {
    let (Some(first), Some(last)) = (reaction.first(), reaction.last()) else {
        return (0.0, Reach::Inside);
    };
    let reach = if t < first.valid[0] {
        Reach::Below
    } else if t > last.valid[1] {
        Reach::Above
    } else {
        Reach::Inside
    };
    let here = reaction.iter().find(|p| t <= p.valid[1]).unwrap_or(last);
    let at = t.clamp(first.valid[0], last.valid[1]);
    let density = (STANDARD_PRESSURE / (BOLTZMANN * t)).ln();
    let log = entropy(here, at) - enthalpy(here, at) / t + f64::from(gained) * density;
    (log, reach)
}

/// The polynomials of a reaction: the sum of `terms` (how many molecules are gained, polynomials
/// of one), on the temperatures that all of them cover; empty if there are none.
pub fn sum(terms: &[(i32, &[Polynomial])]) -> Vec<Polynomial> {
    let ends = |pick: fn(&[Polynomial]) -> Option<f64>| terms.iter().filter_map(move |t| pick(t.1));
    let low = ends(|p| p.first().map(|p| p.valid[0])).fold(0.0, f64::max);
    let high = ends(|p| p.last().map(|p| p.valid[1])).fold(f64::INFINITY, f64::min);
    let mut joints: Vec<f64> = terms
        .iter()
        .flat_map(|(_, polynomials)| polynomials.iter().map(|p| p.valid[1]))
        .filter(|joint| *joint > low && *joint <= high)
        .collect();
    joints.sort_by(f64::total_cmp);
    joints.dedup();
    let mut from = low;
    let mut all = Vec::new();
    for to in joints {
        let mut whole = Polynomial {
            valid: [from, to],
            a: [0.0; 7],
            b: [0.0; 2],
        };
        for (count, polynomials) in terms {
            let Some(p) = polynomials.iter().find(|p| to <= p.valid[1]) else {
                continue;
            };
            let count = f64::from(*count);
            let numbers = whole.a.iter_mut().chain(&mut whole.b);
            for (sum, value) in numbers.zip(p.a.iter().chain(&p.b)) {
                *sum += count * value;
            }
        }
        all.push(whole);
        from = to;
    }
    all
}
