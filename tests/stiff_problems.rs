//! The published stiff problems of chemical kinetics and closed forms, through the engine's own
//! integration.
//!
//! Sources of problems and reference solutions: Hairer & Wanner 1996, Solving Ordinary Differential
//! Equations II (Springer); Mazzia & Magherini 2008, Test Set for Initial Value Problem Solvers
//! (Univ. Bari). "Own" references were integrated once more with an implicit Runge-Kutta method of
//! order 5 at relative tolerances of 3e-13 to 1e-10, since the literature prints one time only.

use frostclock::kinetics::{
    Coefficients, Factor, Mechanism, Outcome, Status, Step, Tolerance, integrate,
};

/// A system under construction: terms of a rate law, each with its coefficient.
struct System {
    species: usize,
    steps: Vec<Step>,
    k: Vec<f64>,
}

impl System {
    fn new(species: usize) -> System {
        System {
            species,
            steps: Vec::new(),
            k: Vec::new(),
        }
    }

    /// One step: coefficient, species of the rate law, net changes.
    fn step(&mut self, k: f64, order: &[usize], change: &[(usize, i32)]) {
        self.k.push(k);
        self.steps.push(Step {
            order: order.to_vec(),
            change: change.to_vec(),
            factor: Factor::One,
        });
    }

    /// A term of one equation, dy_row/dt += k times the product: how an equation whose
    /// coefficients are no stoichiometry is written as steps.
    fn term(&mut self, row: usize, k: f64, order: &[usize]) {
        self.step(k.abs(), order, &[(row, if k < 0.0 { -1 } else { 1 })]);
    }

    fn run(self, start: &[f64], times: &[f64], relative: f64, smallest: f64) -> Outcome {
        let coefficients = Coefficients {
            k: self.k,
            falloff: Vec::new(),
            sites: 1.0,
            fixed_colliders: None,
        };
        let mechanism = Mechanism::new(self.species, self.steps, Vec::new(), None).unwrap();
        let tolerance = Tolerance { relative, smallest };
        let outcome = integrate(&mechanism, &coefficients, start, times, &tolerance);
        assert_eq!(outcome.status, Status::Finished);
        assert_eq!(outcome.snapshots.len(), times.len());
        outcome
    }
}

/// The largest relative difference from the reference.
fn worst(found: &[f64], reference: &[f64]) -> f64 {
    assert_eq!(found.len(), reference.len());
    let differences = found
        .iter()
        .zip(reference)
        .map(|(f, r)| (f - r).abs() / r.abs());
    differences.fold(0.0, f64::max)
}

fn robertson() -> System {
    let mut system = System::new(3);
    system.step(0.04, &[0], &[(0, -1), (1, 1)]);
    system.step(3e7, &[1, 1], &[(1, -1), (2, 1)]);
    system.step(1e4, &[1, 2], &[(1, -1), (0, 1)]);
    system
}

/// Robertson 1966. Twelve decades of time: a wrong step-size control loses the slow phase, and a
/// wrong second-order derivative stalls the fast one.
#[test]
fn robertson_to_1e11() {
    // Own references, except t = 1e11 as printed (Mazzia & Magherini 2008).
    #[rustfmt::skip]
    let reference: [(f64, [f64; 3]); 12] = [
        (0.4, [9.851721138610e-01, 3.386395378975e-05, 1.479402218522e-02]),
        (4.0, [9.055186785843e-01, 2.240475687560e-05, 9.445891665887e-02]),
        (40.0, [7.158270687194e-01, 9.185534764558e-06, 2.841637457458e-01]),
        (400.0, [4.505186684711e-01, 3.222901441675e-06, 5.494781086275e-01]),
        (4e3, [1.832022577767e-01, 8.942371252776e-07, 8.167968479862e-01]),
        (4e4, [3.898337708548e-02, 1.621768315910e-07, 9.610164607377e-01]),
        (4e5, [4.938274520981e-03, 1.984994087955e-08, 9.950617056291e-01]),
        (4e6, [5.168096014924e-04, 2.068294491224e-09, 9.994831883302e-01]),
        (4e7, [5.203071844124e-05, 2.081335731894e-10, 9.999479690734e-01]),
        (4e9, [5.208276611315e-07, 2.083311716556e-12, 9.999994791703e-01]),
        (4e10, [5.208345176587e-08, 2.083338177841e-13, 9.999999479163e-01]),
        (1e11, [0.2083340149701255e-7, 0.8333360770334713e-13, 0.999999979166505]),
    ];
    let times: Vec<f64> = reference.iter().map(|(t, _)| *t).collect();
    let outcome = robertson().run(&[1.0, 0.0, 0.0], &times, 1e-8, 1e-22);
    for ((time, values), found) in reference.iter().zip(&outcome.snapshots) {
        let error = worst(found, values);
        println!("Robertson t {time:e}: {error:.1e}");
        assert!(error < 1e-5, "t = {time}: {found:?}");
        let sum: f64 = found.iter().sum();
        assert!((sum - 1.0).abs() < 2e-11, "t = {time}: the sum is {sum}");
    }
}

/// High irradiance response of plant morphogenesis, Schaefer 1975: 8 species, a sharp late drop.
#[test]
fn high_irradiance_response() {
    let mut s = System::new(8);
    s.term(0, 0.0007, &[]);
    #[rustfmt::skip]
    let terms = [
        (0, 0, -1.71), (0, 1, 0.43), (0, 2, 8.32), (1, 0, 1.71), (1, 1, -8.75), (2, 2, -10.03),
        (2, 3, 0.43), (2, 4, 0.035), (3, 1, 8.32), (3, 2, 1.71), (3, 3, -1.12), (4, 4, -1.745),
        (4, 5, 0.43), (4, 6, 0.43), (5, 3, 0.69), (5, 4, 1.71), (5, 5, -0.43), (5, 6, 0.69),
    ];
    for (row, column, k) in terms {
        s.term(row, k, &[column]);
    }
    s.step(280.0, &[5, 7], &[(5, -1), (6, 1), (7, -1)]);
    s.step(1.81, &[6], &[(6, -1), (7, 1)]);
    let start = [1.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0057];
    let outcome = s.run(&start, &[321.8122, 421.8122], 1e-9, 1e-13);
    // As printed (Hairer & Wanner 1996; Mazzia & Magherini 2008).
    #[rustfmt::skip]
    let at_321 = [
        0.7371312573325668e-3, 0.1442485726316185e-3, 0.5888729740967575e-4,
        0.1175651343283149e-2, 0.2386356198831331e-2, 0.6238968252742796e-2,
        0.2849998395185769e-2, 0.2850001604814231e-2,
    ];
    // Own reference.
    #[rustfmt::skip]
    let at_421 = [
        6.703055035819e-04, 1.309968469863e-04, 4.686223159773e-05, 1.044668020552e-03,
        5.948838309515e-04, 1.399628833943e-03, 1.014492757718e-03, 4.685507242282e-03,
    ];
    println!(
        "HIRES {:.1e} {:.1e}",
        worst(&outcome.snapshots[0], &at_321),
        worst(&outcome.snapshots[1], &at_421)
    );
    assert!(worst(&outcome.snapshots[0], &at_321) < 1e-5);
    assert!(worst(&outcome.snapshots[1], &at_421) < 1e-5);
}

/// Field & Noyes 1974: a limit cycle with changes by orders of magnitude within a second.
#[test]
fn oregonator() {
    let mut s = System::new(3);
    let fast = 77.27;
    s.term(0, fast, &[1]);
    s.term(0, fast, &[0]);
    s.term(0, -fast * 8.375e-6, &[0, 0]);
    s.term(0, -fast, &[0, 1]);
    s.term(1, 1.0 / fast, &[2]);
    s.term(1, -1.0 / fast, &[1]);
    s.term(1, -1.0 / fast, &[0, 1]);
    s.term(2, 0.161, &[0]);
    s.term(2, -0.161, &[2]);
    let outcome = s.run(&[1.0, 2.0, 3.0], &[360.0], 1e-9, 1e-9);
    // As printed (Mazzia & Magherini 2008).
    let reference = [
        0.1000814870318523e1,
        0.1228178521549917e4,
        0.1320554942846706e3,
    ];
    println!(
        "Oregonator {:.1e}",
        worst(&outcome.snapshots[0], &reference)
    );
    assert!(worst(&outcome.snapshots[0], &reference) < 1e-5);
}

/// Chemical pyrolysis of four species: abundances down to 1e-26 that must not turn negative or
/// drift off the invariant y2 = y3 + y4. The printed reference at 1e13 violates that invariant in
/// its third digit, so own references with the invariant imposed are used, to 1e9.
#[test]
fn pyrolysis_keeps_tiny_abundances() {
    let (a, b, c, m) = (7.89e-10, 1.1e7, 1.13e3, 1e6);
    let mut s = System::new(4);
    s.step(a, &[0], &[(0, -1), (1, 1), (2, 1)]);
    s.step(b, &[0, 2], &[(0, -1), (2, -1), (3, 1)]);
    s.step(m * c, &[1, 2], &[(1, -1), (2, -1)]);
    s.step(c, &[3], &[(3, -1), (2, 1)]);
    #[rustfmt::skip]
    let reference: [(f64, [f64; 4]); 5] = [
        (1e1, [1.7599259498e-03, 1.3846281519e-11, 7.6370038530e-13, 1.3082581134e-11]),
        (1e3, [1.6180769999e-03, 1.3822370305e-10, 8.2515735007e-12, 1.2997212955e-10]),
        (1e5, [7.4813208224e-06, 2.3734781561e-12, 2.2123586690e-12, 1.6111948716e-13]),
        (1e7, [4.7150333630e-10, 1.8188895861e-14, 1.8188812377e-14, 8.3484020295e-20]),
        (1e9, [3.1317148329e-14, 1.4840957953e-16, 1.4840957948e-16, 4.5243728280e-26]),
    ];
    let times: Vec<f64> = reference.iter().map(|(t, _)| *t).collect();
    let outcome = s.run(&[1.76e-3, 0.0, 0.0, 0.0], &times, 1e-9, 1e-34);
    for ((time, values), found) in reference.iter().zip(&outcome.snapshots) {
        let error = worst(found, values);
        let drift = (found[1] - found[2] - found[3]).abs() / found[1];
        println!("pyrolysis t {time:e}: {error:.1e}, invariant {drift:.1e}");
        // y2 and y3 fall by six orders below what they were, and round-off of then (1e-20 absolute,
        // whatever the tolerance) is amplified by changes of the step: four digits are left at 1e9.
        let limit = if *time < 1e8 { 1e-5 } else { 1e-4 };
        assert!(error < limit && drift < limit, "t = {time}: {found:?}");
        assert!(found.iter().all(|&y| y > 0.0));
    }
}

/// The species and reactions of the air pollution problem (Verwer 1994), in ppm and minutes.
fn pollution() -> (System, [f64; 20]) {
    let mut s = System::new(20);
    #[rustfmt::skip]
    let k = [
        0.35, 26.6, 1.23e4, 8.6e-4, 8.2e-4, 1.5e4, 1.3e-4, 2.4e4, 1.65e4, 9.0e3, 2.2e-2, 1.2e4,
        1.88, 1.63e4, 4.8e6, 3.5e-4, 1.75e-2, 1.0e8, 4.44e11, 1.24e3, 2.1, 5.78, 4.74e-2, 1.78e3,
        3.12,
    ];
    // Reactants (which are the rate law) and products; species numbered from 1 as printed.
    #[rustfmt::skip]
    let reactions: [(&[usize], &[usize]); 25] = [
        (&[1], &[2, 3]), (&[2, 4], &[1]), (&[5, 2], &[1, 6]),
        (&[7], &[5, 5, 8]), (&[7], &[8]), (&[7, 6], &[5, 8]),
        (&[9], &[10, 5, 8]), (&[9, 6], &[11]), (&[11, 2], &[1, 10, 12]),
        (&[11, 1], &[13]), (&[13], &[11, 1]), (&[10, 2], &[14, 1]),
        (&[14], &[7, 5]), (&[1, 6], &[15]), (&[3], &[4]),
        (&[4], &[16]), (&[4], &[3]), (&[16], &[6, 6]), (&[16], &[3]),
        (&[17, 6], &[18, 5]), (&[19], &[2]), (&[19], &[1, 3]),
        (&[1, 4], &[19]), (&[19, 1], &[20]), (&[20], &[19, 1]),
    ];
    for (k, (order, gains)) in k.iter().zip(reactions) {
        let mut net = [0i32; 20];
        order.iter().for_each(|&i| net[i - 1] -= 1);
        gains.iter().for_each(|&i| net[i - 1] += 1);
        let change: Vec<(usize, i32)> = net
            .iter()
            .copied()
            .enumerate()
            .filter(|&(_, change)| change != 0)
            .collect();
        let order: Vec<usize> = order.iter().map(|i| i - 1).collect();
        s.step(*k, &order, &change);
    }
    let mut start = [0.0; 20];
    for (species, value) in [
        (2, 0.2),
        (4, 0.04),
        (7, 0.1),
        (8, 0.3),
        (9, 0.01),
        (17, 0.007),
    ] {
        start[species - 1] = value;
    }
    (s, start)
}

/// At 60 min, as printed (Mazzia & Magherini 2008).
#[rustfmt::skip]
const POLLUTION_AT_60: [f64; 20] = [
    0.5646255480022769e-1, 0.1342484130422339, 0.4139734331099427e-8, 0.5523140207484359e-2,
    0.2018977262302196e-6, 0.1464541863493966e-6, 0.7784249118997964e-1, 0.3245075353396018,
    0.7494013383880406e-2, 0.1622293157301561e-7, 0.1135863833257075e-7, 0.2230505975721359e-2,
    0.208716288279863e-3, 0.1396921016840158e-4, 0.8964884856898295e-2, 0.4352846369330103e-17,
    0.6899219696263405e-2, 0.1007803037365946e-3, 0.1772146513969984e-5, 0.5682943292316392e-4,
];

/// A real network's mixture of time scales, 1e-12 to 1e3 min, and stoichiometry of two.
#[test]
fn air_pollution() {
    let (system, start) = pollution();
    let outcome = system.run(&start, &[0.0, 60.0], 1e-8, 1e-22);
    assert_eq!(
        outcome.snapshots[0], start,
        "a first time of 0 is the start itself"
    );
    println!(
        "POLLU {:.1e}",
        worst(&outcome.snapshots[1], &POLLUTION_AT_60)
    );
    assert!(worst(&outcome.snapshots[1], &POLLUTION_AT_60) < 1e-5);
    // Sulphur, S in SO2 and SO4, is a linear invariant.
    let sulphur = outcome.snapshots[1][16] + outcome.snapshots[1][17];
    assert!((sulphur / 0.007 - 1.0).abs() < 1e-13, "{sulphur}");
    // So is nitrogen, NO2 NO PAN HNO3 NO3 2 N2O5.
    let y = &outcome.snapshots[1];
    let nitrogen = y[0] + y[1] + y[12] + y[14] + y[18] + 2.0 * y[19];
    assert!((nitrogen / 0.2 - 1.0).abs() < 1e-12, "{nitrogen}");
}

/// Counters of one problem at the default tolerances, pinned with a small margin: a change of the
/// settings or of the library that costs time shows here.
#[test]
fn work_is_what_was_measured() {
    let (system, start) = pollution();
    let outcome = system.run(&start, &[60.0], 1e-5, 1e-25);
    let work = outcome.work;
    println!(
        "{work:?}, error {:.1e}",
        worst(&outcome.snapshots[0], &POLLUTION_AT_60)
    );
    assert!(worst(&outcome.snapshots[0], &POLLUTION_AT_60) < 5e-5);
    for (what, found, measured) in [
        ("steps", work.steps, 414),
        ("Newton iterations", work.newton_iterations, 518),
        ("right-hand sides", work.rhs, 520),
        ("Jacobians", work.jacobians, 42),
        ("factorisations", work.factorisations, 112),
    ] {
        assert!(
            found <= measured + measured / 10 + 3,
            "{what}: {found} against {measured}"
        );
        assert!(found > 0, "{what} are not counted");
    }
    assert_eq!((work.restarts, work.tightenings), (0, 0));
}

/// The same bits on every run and on any thread.
#[test]
fn deterministic() {
    let run = || {
        let (system, start) = pollution();
        let snapshots = system.run(&start, &[1.0, 60.0], 1e-5, 1e-25).snapshots;
        snapshots
            .iter()
            .flatten()
            .map(|y| y.to_bits())
            .collect::<Vec<_>>()
    };
    let here = run();
    let threads: Vec<_> = (0..3).map(|_| std::thread::spawn(run)).collect();
    for thread in threads {
        assert_eq!(thread.join().unwrap(), here);
    }
}

/// A -> B -> C: y_B = k1/(k2 - k1) (exp(-k1 t) - exp(-k2 t)), and k1 t exp(-k1 t) where k1 = k2.
#[test]
fn closed_form_chain() {
    let times = [0.1, 1.0, 3.0, 10.0];
    for (k1, k2) in [(1.0, 3.0), (2.0, 0.01), (0.7, 0.7)] {
        let mut s = System::new(3);
        s.step(k1, &[0], &[(0, -1), (1, 1)]);
        s.step(k2, &[1], &[(1, -1), (2, 1)]);
        let outcome = s.run(&[1.0, 0.0, 0.0], &times, 1e-8, 1e-14);
        for (t, y) in times.iter().zip(&outcome.snapshots) {
            let a = (-k1 * t).exp();
            let b = if k1 == k2 {
                k1 * t * a
            } else {
                k1 / (k2 - k1) * (a - (-k2 * t).exp())
            };
            assert!(
                worst(y, &[a, b, 1.0 - a - b]) < 3e-5,
                "{k1} {k2} {t}: {y:?}"
            );
        }
    }
}

/// A <-> B: y_A = y_eq + (y_0 - y_eq) exp(-(k1 + k2) t). The steps are exact opposites, so this
/// also runs through the paired difference of their fluxes.
#[test]
fn closed_form_reversible() {
    let (k1, k2) = (3.0, 0.5);
    let mut s = System::new(2);
    s.step(k1, &[0], &[(0, -1), (1, 1)]);
    s.step(k2, &[1], &[(1, -1), (0, 1)]);
    let times = [0.01, 0.1, 1.0, 10.0];
    let outcome = s.run(&[2.0, 0.0], &times, 1e-8, 1e-14);
    let equilibrium = 2.0 * k2 / (k1 + k2);
    for (t, y) in times.iter().zip(&outcome.snapshots) {
        let a = equilibrium + (2.0 - equilibrium) * (-(k1 + k2) * t).exp();
        assert!(worst(y, &[a, 2.0 - a]) < 1e-6, "{t}: {y:?}");
    }
}

/// 2A -> B with dA/dt = -k A^2 (the flux is k A^2/2): A = A_0/(1 + k A_0 t); and
/// dn/dt = z - k n^2: n = sqrt(z/k) tanh(t sqrt(z k)), a source against recombination.
#[test]
fn closed_form_second_order() {
    let times = [1e-3, 1.0, 1e3, 1e6];
    let mut s = System::new(2);
    s.step(0.5 * 4.0, &[0, 0], &[(0, -2), (1, 1)]);
    let outcome = s.run(&[0.25, 0.0], &times, 1e-8, 1e-20);
    for (t, y) in times.iter().zip(&outcome.snapshots) {
        let a = 0.25 / (1.0 + 4.0 * 0.25 * t);
        assert!(worst(y, &[a, 0.5 * (0.25 - a)]) < 1e-6, "{t}: {y:?}");
    }
    let (z, k) = (1e-17, 3e-6);
    let times = [1.0, 1e9, 1e11, 1e13];
    let mut s = System::new(1);
    s.step(z, &[], &[(0, 1)]);
    s.step(k, &[0, 0], &[(0, -1)]);
    let outcome = s.run(&[0.0], &times, 1e-8, 1e-30);
    for (t, y) in times.iter().zip(&outcome.snapshots) {
        let n = f64::sqrt(z / k) * (t * f64::sqrt(z * k)).tanh();
        assert!(worst(y, &[n]) < 1e-6, "{t}: {y:?}");
    }
}

/// What goes wrong ends in `Failed` with the snapshots reached, not in a panic or an endless loop.
#[test]
fn failures_are_reported() {
    let blow_up = || {
        // dy/dt = y^2 from 1 has no solution beyond t = 1.
        let steps = vec![Step {
            order: vec![0, 0],
            change: vec![(0, 1)],
            factor: Factor::One,
        }];
        Mechanism::new(1, steps, Vec::new(), None).unwrap()
    };
    let numbers = |k: f64| Coefficients {
        k: vec![k],
        falloff: Vec::new(),
        sites: 1.0,
        fixed_colliders: None,
    };
    let tolerance = Tolerance::default();
    let outcome = integrate(
        &blow_up(),
        &numbers(1.0),
        &[1.0],
        &[0.0, 0.5, 2.0],
        &tolerance,
    );
    assert_eq!(outcome.snapshots.len(), 2, "t = 0 and 0.5 were reached");
    assert!(worst(&outcome.snapshots[1], &[2.0]) < 1e-3);
    let Status::Failed { time_s, reason } = outcome.status else {
        panic!("no failure")
    };
    println!("{time_s} {reason} {:?}", outcome.work);
    assert!(time_s > 0.9 && time_s < 1.1, "{time_s}: {reason}");
    // Every rung was tried: five restarts in each of three attempts.
    assert_eq!((outcome.work.restarts, outcome.work.tightenings), (15, 2));

    for (k, start, times) in [
        (f64::NAN, 1.0, [1.0, 2.0]),
        (1.0, f64::INFINITY, [1.0, 2.0]),
        (1.0, 1.0, [2.0, 1.0]),
        (1.0, 1.0, [1.0, f64::NAN]),
    ] {
        let outcome = integrate(&blow_up(), &numbers(k), &[start], &times, &tolerance);
        assert!(
            matches!(outcome.status, Status::Failed { .. }),
            "{k} {start} {times:?}"
        );
        assert!(outcome.snapshots.is_empty());
    }
    // Overflow inside the right-hand side at the very first step.
    let outcome = integrate(&blow_up(), &numbers(1e300), &[1e300], &[1.0], &tolerance);
    assert!(matches!(outcome.status, Status::Failed { .. }));
    // A start or coefficients that do not fit the mechanism.
    let outcome = integrate(&blow_up(), &numbers(1.0), &[1.0, 1.0], &[1.0], &tolerance);
    assert!(matches!(outcome.status, Status::Failed { .. }));
}
