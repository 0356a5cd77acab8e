//! Owns the Jacobian of the right-hand side: its static sparsity pattern and its exact values.
//!
//! It never drops or approximates an entry: Newton's iteration keeps sums of elements and charge
//! only with the exact matrix.

use std::collections::{BTreeSet, HashMap};

use super::factor;
use super::fluxes::{Factored, First, FluxPlan, Merge, Second, Third, two_negative};
use super::mechanism::{Coefficients, Factor, Mechanism, Scratch, Step};
use super::sums::SignedSums;

/// A step with a factor: where its partial derivatives stand.
#[derive(Debug, Clone, Copy)]
struct FactoredPartials {
    step: u32,
    factor: u32,
    reactants: [u32; 3],
    order: u8,
    /// First of the `order` partial derivatives with respect to the reactants.
    own: u32,
    /// First of the partial derivatives with respect to the variables of the factor.
    extra: u32,
    /// Whether the factor depends on the colliders (else on the ice total).
    on_colliders: bool,
}

/// The arrays of the Jacobian.
#[derive(Debug, Clone)]
pub(super) struct JacobianPlan {
    slots: usize,
    factored: Vec<FactoredPartials>,
    merges: Vec<Merge>,
    sums: SignedSums,
    col_ptr: Vec<usize>,
    row_idx: Vec<usize>,
}

impl JacobianPlan {
    pub fn new(
        species: usize,
        steps: &[Step],
        factors: &[Factor],
        colliders: &[(usize, f64)],
        ice_total: Option<usize>,
        fluxes: &FluxPlan,
    ) -> JacobianPlan {
        // A slot is one partial derivative (step, species), in the order the evaluation writes them.
        let mut slots: Vec<(usize, usize)> = Vec::new();
        let mut own = vec![0u32; steps.len()];
        let numbers = fluxes.first.iter().map(|s| s.step);
        let numbers = numbers.chain(fluxes.second.iter().map(|s| s.step));
        for number in numbers.chain(fluxes.third.iter().map(|s| s.step)) {
            let number = number as usize;
            own[number] = slots.len() as u32;
            slots.extend(
                steps[number]
                    .order
                    .iter()
                    .map(|&reactant| (number, reactant)),
            );
        }
        let mut factored = Vec::new();
        for &Factored { step, factor } in &fluxes.factored {
            let number = step as usize;
            let on_colliders = matches!(
                factors[factor as usize],
                Factor::Colliders | Factor::Falloff(_)
            );
            let extra = slots.len() as u32;
            if on_colliders {
                slots.extend(colliders.iter().map(|&(collider, _)| (number, collider)));
            } else {
                slots.extend(ice_total.map(|total| (number, total)));
            }
            let order = &steps[number].order;
            let mut reactants = [0u32; 3];
            for (place, &reactant) in reactants.iter_mut().zip(order) {
                *place = reactant as u32;
            }
            factored.push(FactoredPartials {
                step,
                factor,
                reactants,
                order: order.len() as u8,
                own: own[number],
                extra,
                on_colliders,
            });
        }

        // Slots of the same change and species are added up first, as the fluxes are.
        let mut known: HashMap<(usize, usize), (usize, bool)> = HashMap::new();
        let mut merges = Vec::new();
        let mut leaders = Vec::new();
        for (slot, &(step, with)) in slots.iter().enumerate() {
            let (channel, opposite) = fluxes.channel[step];
            let &mut (leader, leader_opposite) =
                known.entry((channel, with)).or_insert((slot, opposite));
            if leader == slot {
                leaders.push(slot);
            } else {
                let sign = if opposite == leader_opposite {
                    1.0
                } else {
                    -1.0
                };
                merges.push(Merge {
                    into: leader as u32,
                    from: slot as u32,
                    sign,
                });
            }
        }

        let mut pattern: BTreeSet<(usize, usize)> = (0..species).map(|i| (i, i)).collect();
        for &slot in &leaders {
            let (step, column) = slots[slot];
            pattern.extend(steps[step].change.iter().map(|&(row, _)| (column, row)));
        }
        let mut col_ptr = vec![0; species + 1];
        let mut row_idx = Vec::with_capacity(pattern.len());
        let mut place = HashMap::with_capacity(pattern.len());
        for (index, &(column, row)) in pattern.iter().enumerate() {
            col_ptr[column + 1] = index + 1;
            row_idx.push(row);
            place.insert((column, row), index);
        }
        let mut entries = Vec::new();
        for &slot in &leaders {
            let (step, column) = slots[slot];
            for &(row, weight) in &steps[step].change {
                entries.push((place[&(column, row)], slot, weight));
            }
        }
        let sums = SignedSums::new(row_idx.len(), &entries);
        JacobianPlan {
            slots: slots.len(),
            factored,
            merges,
            sums,
            col_ptr,
            row_idx,
        }
    }

    /// The pattern in compressed columns, rows ascending, with the full diagonal.
    pub fn pattern(&self) -> (&[usize], &[usize]) {
        (&self.col_ptr, &self.row_idx)
    }

    /// The number of partial derivatives held at once.
    pub fn slots(&self) -> usize {
        self.slots
    }
}

impl Mechanism {
    /// The pattern in compressed columns: `row_idx[col_ptr[j]..col_ptr[j + 1]]` are the rows of
    /// column j, ascending. The diagonal is always full.
    pub fn pattern(&self) -> (&[usize], &[usize]) {
        self.jacobian_plan.pattern()
    }

    /// The values of d(dy_i/dt)/dy_j in the order of [`Mechanism::pattern`].
    pub fn jacobian(
        &self,
        coefficients: &Coefficients,
        y: &[f64],
        values: &mut [f64],
        scratch: &mut Scratch,
    ) {
        let plan = &self.jacobian_plan;
        self.partials(coefficients, y, scratch);
        let partials = scratch.partials.as_mut_slice();
        for &Merge { into, from, sign } in &plan.merges {
            partials[into as usize] += sign * partials[from as usize];
        }
        plan.sums.evaluate(partials, values);
    }

    /// The derivative of every flux with respect to each species it depends on.
    fn partials(&self, coefficients: &Coefficients, y: &[f64], scratch: &mut Scratch) {
        factor::evaluate(
            &self.factors,
            coefficients,
            &self.colliders,
            self.ice_total,
            y,
            &mut scratch.factors,
        );
        let (fluxes, k) = (&self.flux_plan, coefficients.k.as_slice());
        let partials = scratch.partials.as_mut_slice();
        let (firsts, rest) = partials.split_at_mut(fluxes.first.len());
        let (seconds, rest) = rest.split_at_mut(2 * fluxes.second.len());
        for (&First { step, .. }, out) in fluxes.first.iter().zip(firsts) {
            *out = k[step as usize];
        }
        for (&Second { step, a, b }, out) in fluxes.second.iter().zip(seconds.chunks_exact_mut(2)) {
            let (k, a, b) = (k[step as usize], y[a as usize], y[b as usize]);
            let k = if a < 0.0 && b < 0.0 { 0.0 } else { k };
            out[0] = k * b;
            out[1] = k * a;
        }
        for (&Third { step, a, b, c }, out) in fluxes.third.iter().zip(rest.chunks_exact_mut(3)) {
            let (k, a, b, c) = (
                k[step as usize],
                y[a as usize],
                y[b as usize],
                y[c as usize],
            );
            let k = if two_negative(a, b, c) { 0.0 } else { k };
            out[0] = k * (b * c);
            out[1] = k * (a * c);
            out[2] = k * (a * b);
        }
        for step in &self.jacobian_plan.factored {
            let factor = scratch.factors[step.factor as usize];
            let order = usize::from(step.order);
            let reactants = &step.reactants[..order];
            for partial in &mut partials[step.own as usize..][..order] {
                *partial *= factor.value;
            }
            let negative = reactants.iter().filter(|&&r| y[r as usize] < 0.0).count();
            let product: f64 = reactants.iter().map(|&r| y[r as usize]).product();
            let product = if negative >= 2 { 0.0 } else { product };
            let slope = k[step.step as usize] * product * factor.slope;
            if step.on_colliders {
                let extra = &mut partials[step.extra as usize..][..self.colliders.len()];
                for (out, &(_, weight)) in extra.iter_mut().zip(&self.colliders) {
                    *out = slope * weight;
                }
            } else {
                partials[step.extra as usize] = slope;
            }
        }
    }
}
