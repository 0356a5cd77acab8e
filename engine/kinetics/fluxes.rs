//! Owns the right-hand side: the flux of every step and its sum into the change of every species.
//!
//! Steps that make the same change, or exactly the opposite one (freeze-out and desorption), are
//! summed before they reach the species, and the sums carry their rounding errors along. Both are
//! for the linear invariants: each row's round-off must be that of its net change, or the rows of,
//! say, the charge states of dust, where gross fluxes are 1e13 times the net one, do not add up to
//! zero; over a step of 1e13 s that was a drift of the dust number of 6e-3 in the demo, and noise
//! that failed Newton's iteration (17,000 steps for 2,200). It never keeps anything between calls.

use std::collections::HashMap;

use super::factor;
use super::mechanism::{Coefficients, Factor, Mechanism, Scratch, Step};
use super::sums::SignedSums;

/// A first-order step.
#[derive(Debug, Clone, Copy)]
pub(super) struct First {
    pub step: u32,
    pub a: u32,
}

/// A second-order step.
#[derive(Debug, Clone, Copy)]
pub(super) struct Second {
    pub step: u32,
    pub a: u32,
    pub b: u32,
}

/// A third-order step.
#[derive(Debug, Clone, Copy)]
pub(super) struct Third {
    pub step: u32,
    pub a: u32,
    pub b: u32,
    pub c: u32,
}

/// A step with a factor, by its number among the distinct factors.
#[derive(Debug, Clone, Copy)]
pub(super) struct Factored {
    pub step: u32,
    pub factor: u32,
}

/// Adds `sign` times one element of an array to another.
#[derive(Debug, Clone, Copy)]
pub(super) struct Merge {
    pub into: u32,
    pub from: u32,
    pub sign: f64,
}

/// The arrays of the right-hand side.
#[derive(Debug, Clone)]
pub(super) struct FluxPlan {
    zeroth: Vec<u32>,
    pub first: Vec<First>,
    pub second: Vec<Second>,
    pub third: Vec<Third>,
    pub factored: Vec<Factored>,
    merges: Vec<Merge>,
    sums: SignedSums,
    /// For every step the first step of the same or opposite change, and whether it is opposite.
    pub channel: Vec<(usize, bool)>,
}

impl FluxPlan {
    pub fn new(species: usize, steps: &[Step], factors: &[Factor]) -> FluxPlan {
        let mut plan = FluxPlan {
            zeroth: Vec::new(),
            first: Vec::new(),
            second: Vec::new(),
            third: Vec::new(),
            factored: Vec::new(),
            merges: Vec::new(),
            sums: SignedSums::new(0, &[]),
            channel: Vec::with_capacity(steps.len()),
        };
        let mut known: HashMap<Vec<(usize, i32)>, (usize, bool)> = HashMap::new();
        let mut entries = Vec::new();
        for (number, step) in steps.iter().enumerate() {
            let index = number as u32;
            match *step.order.as_slice() {
                [] => plan.zeroth.push(index),
                [a] => plan.first.push(First {
                    step: index,
                    a: a as u32,
                }),
                [a, b] => plan.second.push(Second {
                    step: index,
                    a: a as u32,
                    b: b as u32,
                }),
                [a, b, c, ..] => plan.third.push(Third {
                    step: index,
                    a: a as u32,
                    b: b as u32,
                    c: c as u32,
                }),
            }
            if let Some(factor) = factors.iter().position(|f| *f == step.factor) {
                plan.factored.push(Factored {
                    step: index,
                    factor: factor as u32,
                });
            }
            // The change up to its sign: the first coefficient is made positive.
            let mut change = step.change.clone();
            change.sort_unstable();
            let flipped = change
                .first()
                .is_some_and(|&(_, coefficient)| coefficient < 0);
            if flipped {
                change
                    .iter_mut()
                    .for_each(|(_, coefficient)| *coefficient = coefficient.wrapping_neg());
            }
            let &mut (leader, leader_flipped) = known.entry(change).or_insert((number, flipped));
            let opposite = flipped != leader_flipped;
            plan.channel.push((leader, opposite));
            if leader == number {
                entries.extend(
                    step.change
                        .iter()
                        .map(|&(row, weight)| (row, number, weight)),
                );
            } else {
                let sign = if opposite { -1.0 } else { 1.0 };
                plan.merges.push(Merge {
                    into: leader as u32,
                    from: index,
                    sign,
                });
            }
        }
        plan.sums = SignedSums::new(species, &entries);
        plan
    }
}

/// a b, but zero when both are negative: destruction may not grow a negative abundance.
#[inline]
pub(super) fn product_of_two(a: f64, b: f64) -> f64 {
    if a < 0.0 && b < 0.0 { 0.0 } else { a * b }
}

/// a b c, but zero when two or more are negative.
#[inline]
pub(super) fn product_of_three(a: f64, b: f64, c: f64) -> f64 {
    if two_negative(a, b, c) {
        0.0
    } else {
        a * b * c
    }
}

/// Whether two or more of the three are negative.
#[inline]
pub(super) fn two_negative(a: f64, b: f64, c: f64) -> bool {
    u8::from(a < 0.0) + u8::from(b < 0.0) + u8::from(c < 0.0) >= 2
}

impl Mechanism {
    /// The flux of every step, events per second in units of the state. A flux in which two or
    /// more reactants are negative is zero.
    pub fn fluxes(
        &self,
        coefficients: &Coefficients,
        y: &[f64],
        out: &mut [f64],
        scratch: &mut Scratch,
    ) {
        factor::evaluate(
            &self.factors,
            coefficients,
            &self.colliders,
            self.ice_total,
            y,
            &mut scratch.factors,
        );
        let (plan, k) = (&self.flux_plan, coefficients.k.as_slice());
        for &step in &plan.zeroth {
            out[step as usize] = k[step as usize];
        }
        for &First { step, a } in &plan.first {
            out[step as usize] = k[step as usize] * y[a as usize];
        }
        for &Second { step, a, b } in &plan.second {
            out[step as usize] = k[step as usize] * product_of_two(y[a as usize], y[b as usize]);
        }
        for &Third { step, a, b, c } in &plan.third {
            let product = product_of_three(y[a as usize], y[b as usize], y[c as usize]);
            out[step as usize] = k[step as usize] * product;
        }
        for &Factored { step, factor } in &plan.factored {
            out[step as usize] *= scratch.factors[factor as usize].value;
        }
    }

    /// The change of every species per second.
    pub fn rhs(
        &self,
        coefficients: &Coefficients,
        y: &[f64],
        dy: &mut [f64],
        scratch: &mut Scratch,
    ) {
        let mut fluxes = std::mem::take(&mut scratch.fluxes);
        self.fluxes(coefficients, y, &mut fluxes, scratch);
        for &Merge { into, from, sign } in &self.flux_plan.merges {
            fluxes[into as usize] += sign * fluxes[from as usize];
        }
        self.flux_plan.sums.evaluate_exactly(&fluxes, dy);
        scratch.fluxes = fluxes;
    }
}
