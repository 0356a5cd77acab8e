//! Owns the test of right-hand side and Jacobian against their definition in dual numbers, and of
//! the checks on building.
//!
//! It never shares code with what it tests: fluxes and factors are written out once more.

use super::mechanism::{Coefficients, Factor, Falloff, Mechanism, Step};
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
    use super::mechanism::MechanismError as E;
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
