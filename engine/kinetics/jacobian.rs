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

    /// The number of partial derivatives held at once.
    pub fn slots(&self) -> usize {
        self.slots
    }
}

impl Mechanism {
    /// The pattern in compressed columns: `row_idx[col_ptr[j]..col_ptr[j + 1]]` are the rows of
    /// column j, ascending. The diagonal is always full.
    pub fn pattern(&self) -> (&[usize], &[usize]) {
        (&self.jacobian_plan.col_ptr, &self.jacobian_plan.row_idx)
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

#[cfg(test)]
mod tests {
    use super::super::mechanism::{Coefficients, Factor, Falloff, Mechanism, Step};
    use std::ops::{Add, Div, Mul, Neg, Sub};

    /// A number with its derivative: an independent way to exact derivatives.
    #[derive(Debug, Clone, Copy, PartialEq)]
    struct Dual(f64, f64);

    impl Add for Dual {
        type Output = Dual;
        fn add(self, b: Dual) -> Dual {
            Dual(self.0 + b.0, self.1 + b.1)
        }
    }
    impl Neg for Dual {
        type Output = Dual;
        fn neg(self) -> Dual {
            Dual(-self.0, -self.1)
        }
    }
    impl Sub for Dual {
        type Output = Dual;
        fn sub(self, b: Dual) -> Dual {
            self + -b
        }
    }
    impl Mul for Dual {
        type Output = Dual;
        fn mul(self, b: Dual) -> Dual {
            Dual(self.0 * b.0, self.0 * b.1 + self.1 * b.0)
        }
    }
    impl Div for Dual {
        type Output = Dual;
        fn div(self, b: Dual) -> Dual {
            Dual(self.0 / b.0, (self.1 * b.0 - self.0 * b.1) / (b.0 * b.0))
        }
    }
    impl Dual {
        fn log10(self) -> Dual {
            Dual(self.0.log10(), self.1 / (self.0 * std::f64::consts::LN_10))
        }
        fn power_of_ten(self) -> Dual {
            let value = 10f64.powf(self.0);
            Dual(value, value * std::f64::consts::LN_10 * self.1)
        }
        fn smaller(self, b: Dual) -> Dual {
            if self.0 <= b.0 { self } else { b }
        }
        fn larger(self, b: Dual) -> Dual {
            if self.0 >= b.0 { self } else { b }
        }
    }

    const ZERO: Dual = Dual(0.0, 0.0);
    const ONE: Dual = Dual(1.0, 0.0);
    const SPECIES: usize = 9;
    const TOTAL: usize = 8;
    const COLLIDERS: [(usize, f64); 3] = [(0, 1.0), (1, 0.5), (2, 2.0)];

    /// The definition, step by step, as the documentation of the types states it.
    fn definition(steps: &[Step], c: &Coefficients, y: &[Dual]) -> Vec<Dual> {
        let constant = |value: f64| Dual(value, 0.0);
        let m = match c.fixed_colliders {
            Some(fixed) => constant(fixed),
            None => COLLIDERS
                .iter()
                .fold(ZERO, |sum, &(i, w)| sum + constant(w) * y[i])
                .larger(ZERO),
        };
        let layers = y[TOTAL].larger(ZERO) / constant(c.sites);
        let mut dy = vec![ZERO; SPECIES];
        for (step, &k) in steps.iter().zip(&c.k) {
            let factor = match step.factor {
                Factor::One => ONE,
                Factor::Colliders => m,
                Factor::Falloff(_) if m.0 <= 0.0 => ZERO,
                Factor::Falloff(i) => {
                    let Falloff {
                        low,
                        high,
                        log_centre,
                    } = c.falloff[i];
                    let p = constant(low) * m / constant(high);
                    let scaled = p.log10() / constant(0.75 - 1.27 * log_centre);
                    let f = (constant(log_centre) / (ONE + scaled * scaled)).power_of_ten();
                    (constant(high) * p / (ONE + p) * f).smaller(constant(high))
                }
                Factor::TopLayers(n) => ONE.smaller(constant(n) / layers),
                Factor::Encounters(n) => {
                    let share = ONE.smaller(constant(n) / layers);
                    share * share / layers.larger(ONE).smaller(constant(n))
                }
            };
            let negative = step.order.iter().filter(|&&i| y[i].0 < 0.0).count();
            let product = step
                .order
                .iter()
                .fold(constant(k), |product, &i| product * y[i]);
            let flux = if negative >= 2 {
                ZERO
            } else {
                product * factor
            };
            for &(species, change) in &step.change {
                dy[species] = dy[species] + constant(f64::from(change)) * flux;
            }
        }
        dy
    }

    fn random_step(random: &mut fastrand::Rng, number: usize) -> Step {
        let mut order: Vec<usize> = (0..number % 4).map(|_| random.usize(0..SPECIES)).collect();
        if number.is_multiple_of(5) && order.len() > 1 {
            order[1] = order[0];
        }
        let mut change: Vec<(usize, i32)> = Vec::new();
        for _ in 0..random.usize(1..5) {
            let species = random.usize(0..SPECIES);
            if change.iter().all(|&(known, _)| known != species) {
                change.push((species, [-2, -1, -1, 1, 1, 3][random.usize(0..6)]));
            }
        }
        let factor = match random.usize(0..8) {
            0 => Factor::Colliders,
            1 => Factor::Falloff(0),
            2 => Factor::Falloff(1),
            3 => Factor::TopLayers(2.0),
            4 => Factor::Encounters(3.0),
            5 => Factor::Encounters(1.0),
            _ => Factor::One,
        };
        Step {
            order,
            change,
            factor,
        }
    }

    /// Right-hand side and Jacobian against the definition in dual numbers: every order, repeats,
    /// opposing and parallel steps, all factors on both sides of their kinks, negative abundances.
    /// A missing derivative, a wrong sign of a merged step or a wrong place in the pattern shows.
    #[test]
    fn right_hand_side_and_jacobian_are_exact() {
        let mut random = fastrand::Rng::with_seed(7);
        let mut kinks = [0usize; 7];
        for round in 0..400 {
            let mut steps: Vec<Step> = (0..60).map(|i| random_step(&mut random, i)).collect();
            for i in 0..30 {
                // Opposite and parallel partners, as freeze-out and three kinds of desorption.
                let sign = if i % 2 == 0 { -1 } else { 1 };
                let mut change: Vec<_> = steps[i]
                    .change
                    .iter()
                    .map(|&(s, c)| (s, sign * c))
                    .collect();
                change.reverse();
                steps.push(Step {
                    change,
                    ..random_step(&mut random, i + 1)
                });
            }
            let c = Coefficients {
                k: steps
                    .iter()
                    .map(|_| 10f64.powf(random.f64() * 4.0 - 2.0))
                    .collect(),
                falloff: vec![
                    Falloff {
                        low: 3.0,
                        high: 0.5,
                        log_centre: 0.6f64.log10(),
                    },
                    Falloff {
                        low: 1.0,
                        high: 0.2,
                        log_centre: 0.3,
                    },
                ],
                sites: 0.3,
                fixed_colliders: (round % 7 == 0).then_some(0.6),
            };
            let y: Vec<f64> = (0..SPECIES)
                .map(|i| match i {
                    TOTAL => random.f64() * 2.4 - 0.3,
                    _ => {
                        10f64.powf(random.f64() * 2.0 - 2.0)
                            * if random.f64() < 0.25 { -1.0 } else { 1.0 }
                    }
                })
                .collect();
            let layers = y[TOTAL] / c.sites;
            let side = [0.0, 1.0, 2.0, 3.0]
                .iter()
                .filter(|&&kink| layers > kink)
                .count();
            kinks[side] += 1;
            let m: f64 = COLLIDERS.iter().map(|&(i, w)| w * y[i]).sum();
            kinks[5] += usize::from(m < 0.0);
            // The second falloff is capped between P of about 1.05 and 2.1.
            kinks[6] += usize::from(c.fixed_colliders.is_none() && m > 0.22 && m < 0.4);

            let mechanism =
                Mechanism::new(SPECIES, steps.clone(), COLLIDERS.to_vec(), Some(TOTAL)).unwrap();
            mechanism.check(&c).unwrap();
            let mut scratch = mechanism.scratch();
            let mut dy = vec![f64::NAN; SPECIES];
            mechanism.rhs(&c, &y, &mut dy, &mut scratch);
            let (col_ptr, row_idx) = mechanism.pattern();
            let mut values = vec![f64::NAN; row_idx.len()];
            mechanism.jacobian(&c, &y, &mut values, &mut scratch);

            for column in 0..SPECIES {
                let dual: Vec<Dual> = (0..SPECIES)
                    .map(|i| Dual(y[i], if i == column { 1.0 } else { 0.0 }))
                    .collect();
                let expected = definition(&steps, &c, &dual);
                let scale = expected.iter().fold(1.0, |s, d| f64::max(s, d.1.abs()));
                let size = expected.iter().fold(1.0, |s, d| f64::max(s, d.0.abs()));
                let rows = &row_idx[col_ptr[column]..col_ptr[column + 1]];
                assert!(rows.is_sorted() && rows.contains(&column));
                let mut found = [0.0; SPECIES];
                for (row, value) in rows.iter().zip(&values[col_ptr[column]..]) {
                    found[*row] = *value;
                }
                for row in 0..SPECIES {
                    assert!(
                        (dy[row] - expected[row].0).abs() < 1e-13 * size,
                        "round {round}, d{row}"
                    );
                    let difference = (found[row] - expected[row].1).abs();
                    assert!(
                        difference < 1e-12 * scale,
                        "round {round}: d{row}/d{column} {difference}"
                    );
                }
            }
        }
        assert!(
            kinks.iter().all(|&count| count > 5),
            "every side was visited: {kinks:?}"
        );
    }

    /// Sums that every step keeps are kept by right-hand side and Jacobian to round-off of the
    /// net fluxes, not of the opposing ones: 1e10 times larger here.
    #[test]
    fn opposing_fluxes_cancel_before_they_are_summed() {
        let exchange = |from, to| Step {
            order: vec![from],
            change: vec![(from, -1), (to, 1)],
            factor: Factor::One,
        };
        let steps = vec![
            exchange(0, 1),
            exchange(1, 2),
            exchange(1, 0),
            exchange(2, 1),
        ];
        let mechanism = Mechanism::new(3, steps, Vec::new(), None).unwrap();
        let c = Coefficients {
            k: vec![1e10 / 3.0, 0.1, 1e10 / 7.0, 0.3],
            falloff: Vec::new(),
            sites: 1.0,
            fixed_colliders: None,
        };
        let y = [0.3, 0.7, 0.11];
        let mut dy = [0.0; 3];
        mechanism.rhs(&c, &y, &mut dy, &mut mechanism.scratch());
        let net = c.k[0] * y[0] - c.k[2] * y[1];
        assert!(net.abs() < 1e-6, "the test is about a balance: {net}");
        assert!((dy[0] + dy[1] + dy[2]).abs() < 1e-16, "{dy:?}");
    }

    /// Mistakes in the building of a system are named, never an index out of bounds later.
    #[test]
    fn impossible_systems_are_refused() {
        use super::super::mechanism::MechanismError as E;
        let step = |order: &[usize], change: &[(usize, i32)], factor| Step {
            order: order.to_vec(),
            change: change.to_vec(),
            factor,
        };
        let build = |s: Step| Mechanism::new(2, vec![s], Vec::new(), None).unwrap_err();
        let one = Factor::One;
        assert!(matches!(
            build(step(&[2], &[], one)),
            E::NoSuchSpecies { species: 2, .. }
        ));
        assert!(matches!(
            build(step(&[], &[(3, 1)], one)),
            E::NoSuchSpecies { species: 3, .. }
        ));
        assert!(matches!(
            build(step(&[0, 0, 1, 1], &[], one)),
            E::OrderTooHigh { order: 4, .. }
        ));
        assert!(matches!(
            build(step(&[], &[(0, 1), (0, 1)], one)),
            E::RepeatedChange { .. }
        ));
        assert!(matches!(
            build(step(&[], &[(0, 0)], one)),
            E::ZeroChange { .. }
        ));
        assert!(matches!(
            build(step(&[], &[], Factor::TopLayers(1.0))),
            E::NoIceTotal { .. }
        ));
        assert!(matches!(
            build(step(&[], &[], Factor::Encounters(0.5))),
            E::BadLayers { .. }
        ));
        let falloff = step(&[0], &[(1, 1)], Factor::Falloff(1));
        let mechanism = Mechanism::new(2, vec![falloff], vec![(0, 1.0)], None).unwrap();
        let mut c = Coefficients {
            k: vec![1.0],
            falloff: Vec::new(),
            sites: 0.0,
            fixed_colliders: None,
        };
        assert!(matches!(
            mechanism.check(&c),
            Err(E::NoSuchFalloff {
                number: 1,
                count: 0
            })
        ));
        c.k.clear();
        assert!(matches!(
            mechanism.check(&c),
            Err(E::WrongCount {
                found: 0,
                expected: 1
            })
        ));
        assert!(Mechanism::new(2, Vec::new(), vec![(2, 1.0)], None).is_err());
        assert!(Mechanism::new(2, Vec::new(), Vec::new(), Some(2)).is_err());
    }
}
