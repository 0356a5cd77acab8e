//! Owns an invented system of the size and shape of a gas-grain network, on which invariants are
//! tested and times measured: `cargo test --release timing -- --ignored --nocapture`.
//!
//! It never stands for real chemistry: rates and partners are random.

use std::hint::black_box;
use std::time::Instant;

use super::{Coefficients, Factor, Falloff, Mechanism, Status, Step, Tolerance, integrate};

const GAS: usize = 190;
const ICES: usize = 80;
/// The last state is the ice total.
const SPECIES: usize = GAS + ICES + 1;

struct Network {
    mechanism: Mechanism,
    k: Vec<f64>,
    start: Vec<f64>,
}

/// Random two-body reactions with hubs (the first species take part in most), photoreactions,
/// freeze-out and three kinds of desorption, surface reactions; n_H = 1e8, desorption as of
/// `warm` (rates up to 1e10 s^-1) or cold ices.
fn network(warm: bool) -> Network {
    let mut random = fastrand::Rng::with_seed(20);
    let (mut steps, mut k) = (Vec::new(), Vec::new());
    let total = SPECIES - 1;
    let mut add = |order: Vec<usize>, products: Vec<usize>, factor: Factor, coefficient: f64| {
        let mut net = vec![0i32; SPECIES];
        order.iter().for_each(|&i| net[i] -= 1);
        products.iter().for_each(|&i| net[i] += 1);
        net[total] = net[GAS..total].iter().sum();
        let change: Vec<_> = net
            .iter()
            .copied()
            .enumerate()
            .filter(|&(_, c)| c != 0)
            .collect();
        steps.push(Step {
            order,
            change,
            factor,
        });
        k.push(coefficient);
    };
    let mut random_gas = || {
        let r = random.f64();
        (r * r * GAS as f64) as usize
    };
    for i in 0..2400 {
        let order = vec![random_gas(), random_gas()];
        let products = vec![random_gas(), random_gas()];
        let factor = match i {
            0..20 => Factor::Falloff(i % 12),
            _ => Factor::One,
        };
        add(
            order,
            products,
            factor,
            10f64.powf(-2.0 - (i % 23) as f64 * 0.2),
        );
    }
    for i in 0..500 {
        // One for one, so that the number of molecules is an invariant to watch.
        let products = vec![random_gas()];
        add(
            vec![random_gas()],
            products,
            Factor::One,
            10f64.powf(-14.0 + (i % 17) as f64 * 0.25),
        );
    }
    for i in 0..ICES {
        let ice = GAS + i;
        let gas = 2 * i;
        let desorption = if warm {
            1e10 * 10f64.powi(-(i as i32) / 3)
        } else {
            1e-8 * 10f64.powi(-(i as i32) / 4)
        };
        add(vec![gas], vec![ice], Factor::One, 3e-8);
        add(vec![ice], vec![gas], Factor::TopLayers(1.0), desorption);
        add(vec![ice], vec![gas], Factor::TopLayers(1.0), 1e-16);
        add(vec![ice], vec![gas], Factor::TopLayers(2.0), 1e-14);
    }
    for i in 0..280 {
        let order = vec![GAS + i % 17, GAS + (i * 7) % ICES];
        let products = vec![GAS + (i * 13) % ICES, GAS + (i * 29 + 3) % ICES];
        add(
            order,
            products,
            Factor::Encounters(2.0),
            10f64.powf(-6.0 - (i % 11) as f64),
        );
    }
    let mut start = vec![0.0; SPECIES];
    for (i, value) in start.iter_mut().enumerate().take(20) {
        *value = 0.5 * 10f64.powf(-0.4 * i as f64);
    }
    let colliders = vec![(0, 1.0), (1, 1.0), (2, 1.0)];
    Network {
        mechanism: Mechanism::new(SPECIES, steps, colliders, Some(total)).unwrap(),
        k,
        start,
    }
}

fn coefficients(k: Vec<f64>) -> Coefficients {
    Coefficients {
        k,
        falloff: (0..12)
            .map(|i| Falloff {
                low: 1e-14,
                high: 1e-12 * f64::from(1 + i),
                log_centre: -0.3,
            })
            .collect(),
        sites: 3.5e-6,
        fixed_colliders: None,
    }
}

/// The number of molecules (every step keeps it, gas and ice together) through twelve decades of
/// time, with desorption far slower and far faster than freeze-out. Newton's iteration with an
/// exact matrix keeps it, unless the matrix is not exact, or the steps grow so fast that round-off
/// in the solver's history is amplified; the ice total must stay the sum of its parts.
#[test]
fn linear_invariants_are_kept_to_round_off() {
    for warm in [false, true] {
        let Network {
            mechanism,
            k,
            start,
        } = network(warm);
        let times: Vec<f64> = (0..5).map(|i| 3e7 * 10f64.powi(i)).collect();
        let tolerance = Tolerance {
            relative: 1e-4,
            smallest: 1e-25,
        };
        let outcome = integrate(&mechanism, &coefficients(k), &start, &times, &tolerance);
        assert_eq!(outcome.status, Status::Finished);
        for y in &outcome.snapshots {
            let drift = molecules(y) / molecules(&start) - 1.0;
            assert!(
                drift.abs() < 2e-11,
                "warm {warm}: molecules off by {drift:e}"
            );
            let ices: f64 = y[GAS..SPECIES - 1].iter().sum();
            let excess = y[SPECIES - 1] / ices - 1.0;
            assert!(
                excess.abs() < 1e-12,
                "warm {warm}: ice total off by {excess:e}"
            );
        }
    }
}

/// The sum of all species but the ice total.
fn molecules(y: &[f64]) -> f64 {
    y[..SPECIES - 1].iter().sum()
}

#[test]
#[ignore = "timing, run by hand"]
fn timing() {
    for warm in [false, true] {
        let Network {
            mechanism,
            k,
            start,
        } = network(warm);
        let c = coefficients(k);
        let mut scratch = mechanism.scratch();
        let (_, rows) = mechanism.pattern();
        let y: Vec<f64> = start.iter().map(|y| y + 1e-9).collect();
        let mut dy = vec![0.0; SPECIES];
        let mut values = vec![0.0; rows.len()];
        let best = |work: &mut dyn FnMut()| {
            let mut best = f64::INFINITY;
            for _ in 0..20 {
                let clock = Instant::now();
                (0..500).for_each(|_| work());
                best = best.min(clock.elapsed().as_secs_f64() / 500.0 * 1e6);
            }
            best
        };
        let rhs = best(&mut || mechanism.rhs(black_box(&c), black_box(&y), &mut dy, &mut scratch));
        let mut scratch = mechanism.scratch();
        let jacobian = best(&mut || {
            mechanism.jacobian(black_box(&c), black_box(&y), &mut values, &mut scratch)
        });
        println!(
            "{SPECIES} species, {} steps, {} non-zeros: rhs {rhs:.1} us, Jacobian {jacobian:.1} us",
            mechanism.steps().len(),
            rows.len()
        );
        for relative in [1e-4, 1e-5, 1e-6] {
            let times: Vec<f64> = (0..31)
                .map(|i| 3e7 * 10f64.powf(f64::from(i) * 0.2))
                .collect();
            let tolerance = Tolerance {
                relative,
                smallest: 1e-25,
            };
            let clock = Instant::now();
            let outcome = integrate(&mechanism, &c, &start, &times, &tolerance);
            let seconds = clock.elapsed().as_secs_f64();
            let end = &outcome.snapshots[outcome.snapshots.len() - 1];
            let ices = end[GAS..SPECIES - 1].iter().sum::<f64>();
            println!(
                "warm {warm} rtol {relative:e}: {:.0} ms, {:?}, ice total off by {:.1e}, sum by {:.1e}\n  {:?}",
                seconds * 1e3,
                outcome.status,
                (end[SPECIES - 1] - ices) / ices,
                molecules(end) / molecules(&start) - 1.0,
                outcome.work
            );
            assert_eq!(outcome.status, Status::Finished);
        }
    }
}
