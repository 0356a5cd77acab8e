//! Reversible reactions: their polynomials, equilibrium constants, expansion, and the mistakes one
//! can make.

use crate::network::equilibrium::{Reach, enthalpy, entropy, log_constant, sum};
use crate::network::model::{Cause, GrainOptions, Polynomial};
use crate::network::{expand, names, read, read_with, thermo};
use crate::units::BOLTZMANN;
use std::path::Path;

fn standard() -> thermo::Thermo {
    thermo::read(
        Path::new("thermo.yaml"),
        thermo::built_in("standard").unwrap(),
    )
    .unwrap_or_else(|errors| panic!("{errors:?}"))
}

/// ln K_c of a change by the built-in polynomials.
fn log_k(change: &str, t: f64) -> f64 {
    let thermo = standard();
    let change = names::change(change).unwrap();
    let terms: Vec<(i32, &[Polynomial])> = [(-1, &change.reactants), (1, &change.products)]
        .into_iter()
        .flat_map(|(sign, side)| side.iter().map(move |name| (sign, name)))
        .map(|(sign, name)| (sign, thermo.species[name].as_slice()))
        .collect();
    let gained = change.products.len() as i32 - change.reactants.len() as i32;
    log_constant(&sum(&terms), gained, t).0
}

// Fails if a polynomial, the standard pressure or the number of particles is wrong.
#[test]
fn equilibrium_constants_agree_with_tables() {
    // closed_form_checks.md section 5, computed from the same polynomials by other code.
    for (change, t, expected) in [
        ("OH + H2 -> H2O + H", 1000.0, 362.0),
        ("H2 -> H + H", 2000.0, 9.61e12),
    ] {
        let k = log_k(change, t).exp();
        assert!(
            (k / expected - 1.0).abs() < 2e-3,
            "{change}: {k:e}, not {expected:e}"
        );
    }
    // log10 K_p (1 bar). First: sums of log10 K_f of Chase 1998, NIST-JANAF tables 4th ed.
    // (recalled): H2O 10.062 at 1000 K, 3.540 at 2000 K; CO 10.459, 7.469; CO2 20.680, 10.353;
    // CH4 -1.011 at 1000 K. Then, from NO on (whose enthalpy in these tables is 0.8 kJ/mol below
    // that of today): formation enthalpies and entropies at 298 K with TRC heat capacities, by the
    // Python package `chemicals` 1.5.2.
    for (change, t, expected) in [
        ("CO + H2O -> CO2 + H2", 1000.0, 20.680 - 10.459 - 10.062),
        ("CO + H2O -> CO2 + H2", 2000.0, 10.353 - 7.469 - 3.540),
        (
            "CH4 + H2O -> CO + H2 + H2 + H2",
            1000.0,
            10.459 + 1.011 - 10.062,
        ),
        ("H2 + H2 + O2 -> H2O + H2O", 2000.0, 2.0 * 3.540),
        ("N2 + O2 -> NO + NO", 1500.0, -5.028),
        ("N2 + H2 + H2 + H2 -> NH3 + NH3", 1000.0, -6.504),
        ("CH4 + NH3 -> HCN + H2 + H2 + H2", 1000.0, -0.706),
        ("CH4 + CH4 -> C2H2 + H2 + H2 + H2", 1000.0, -6.891),
        ("CO + H2 -> H2CO", 1500.0, -6.330),
    ] {
        let sides = names::change(change).unwrap();
        let gained = sides.products.len() as f64 - sides.reactants.len() as f64;
        let log_kp = log_k(change, t) - gained * (1e6 / (BOLTZMANN * t)).ln();
        let log_kp = log_kp / std::f64::consts::LN_10;
        assert!(
            (log_kp - expected).abs() < 0.02,
            "{change} at {t} K: {log_kp}, not {expected}"
        );
    }
}

// Fails if ions and electrons follow different conventions: the Saha equation knows none.
#[test]
fn ionisation_of_hydrogen_follows_saha() {
    // n(H+) n(e-)/n(H) = (2 pi m_e k T/h^2)^1.5 exp(-I/kT); statistical weights 1 x 2 / 2;
    // I/k = 157 803 K (13.598434 eV), (2 pi m_e k/h^2)^1.5 = 2.4147e15 cm^-3 K^-1.5.
    for t in [500.0, 2000.0, 5000.0] {
        let saha = 2.4147e15f64.ln() + 1.5 * f64::ln(t) - 157_803.0 / t;
        let found = log_k("H -> H+ + e-", t);
        // 0.05 kJ/mol of the tables are 0.012 at 500 K.
        assert!((found - saha).abs() < 0.013, "{t} K: {found}, not {saha}");
    }
}

// Fails if the two intervals of a species do not meet, or if barriers audited with `enthalpy` of
// the network and reverses would rest on different heats.
#[test]
fn polynomials_meet_and_carry_the_enthalpies_of_the_network() {
    const R: f64 = 8.314510e-3;
    let text = crate::case::built_in_network("standard").unwrap();
    let network = read(Path::new("standard.yaml"), text).unwrap();
    let mut compared = 0;
    for (name, intervals) in &standard().species {
        for pair in intervals.windows(2) {
            let t = pair[0].valid[1];
            let heat = R * (enthalpy(&pair[1], t) - enthalpy(&pair[0], t));
            let order = entropy(&pair[1], t) - entropy(&pair[0], t);
            assert!(
                heat.abs() < 0.02 && order.abs() < 1e-3,
                "{name} at {t} K: {heat} kJ/mol, {order}"
            );
        }
        let line = network.file.species.iter().find(|line| line.name == *name);
        if let Some(listed) = line.and_then(|line| line.enthalpy) {
            // e- itself: 0 in both, its heat capacity is counted at the ions.
            let charge = f64::from(names::species(name).unwrap().charge.max(0));
            let found = R * enthalpy(&intervals[0], 298.15) - 6.197 * charge;
            assert!(
                (found - listed).abs() < 0.02,
                "{name}: {found}, not {listed}"
            );
            compared += 1;
        }
    }
    assert!(compared > 100, "{compared} species in both");
}

// Fails if what lies beyond the polynomials is not the van 't Hoff law, or not told.
#[test]
fn beyond_the_polynomials_heat_and_entropy_are_held() {
    let thermo = standard();
    let terms: Vec<(i32, &[Polynomial])> = [(-1, "OH"), (-1, "H2"), (1, "H2O"), (1, "H")]
        .map(|(sign, name)| (sign, thermo.species[name].as_slice()))
        .to_vec();
    let reaction = sum(&terms);
    assert_eq!(reaction.first().map(|p| p.valid[0]), Some(200.0));
    let at = |t| log_constant(&reaction, 0, t);
    let (edge, reach) = at(200.0);
    assert_eq!(reach, Reach::Inside);
    let heat = enthalpy(&reaction[0], 200.0);
    assert!((-8000.0..-7000.0).contains(&heat), "{heat} K");
    let (cold, reach) = at(10.0);
    assert_eq!(reach, Reach::Below);
    assert!((cold - edge + heat * (1.0 / 10.0 - 1.0 / 200.0)).abs() < 1e-9);
    assert_eq!(at(6001.0).1, Reach::Above);
}

const NETWORK: &str = r#"network: two ways
layout: 1
thermo: standard
sources: {s: "Somebody 1999"}
species: [{name: H}, {name: H2}, {name: O}, {name: OH}, {name: H2O}, {name: CH3}, {name: CH4}, {name: HCO}, {name: CO}, {name: C3H2+}, {name: C3H3+}]
gas:
  - {change: OH + H2 -> H2O + H, at_300K: 1.0e-12, valid: [5, 500], reversible: true, within: 1.7, standing: measured, source: s}
  - {change: OH + O -> H + O + O, at_300K: 1.0e-15, valid: [5, 500], standing: measured, source: s}
falloff:
  - {change: CH3 + H -> CH4, low: {at_300K: 1.0e-29}, high: {at_300K: 1.0e-10}, centre: 0.6, valid: [5, 500], reversible: true, standing: measured, source: s}
three_body:
  - {change: H + H + H -> H2 + H, at_300K: 1.0e-32, valid: [5, 500], reversible: true, standing: measured, source: s}
third_body:
  - {change: HCO -> H + CO, at_300K: 1.0e-10, barrier: 8000.0, valid: [5, 500], reversible: true, standing: measured, source: s}
"#;

// Fails if a reverse stands elsewhere than documented (a run stores budgets by place), if it has an
// uncertainty of its own, or if a third body is lost.
#[test]
fn the_reverse_follows_its_forward_and_shares_its_uncertainty() {
    let network = read(Path::new("x.yaml"), NETWORK).unwrap_or_else(|e| panic!("{e:?}"));
    let chemistry = expand(&network, &GrainOptions::default()).unwrap();
    let changes: Vec<&str> = chemistry.reactions.iter().map(|r| &r.change[..]).collect();
    assert_eq!(
        changes,
        [
            "OH + H2 -> H2O + H",
            "H2O + H -> OH + H2",
            "OH + O -> H + O + O",
            "CH3 + H -> CH4",
            "CH4 -> CH3 + H",
            "H + H + H -> H2 + H",
            "H2 + H -> H + H + H",
            "HCO -> H + CO",
            "H + CO -> HCO",
        ]
    );
    for (place, gained) in [(0, 0), (3, -1), (5, -1), (7, 1)] {
        let [forward, reverse] = [&chemistry.reactions[place], &chemistry.reactions[place + 1]];
        assert_eq!(
            (
                reverse.group,
                reverse.within,
                reverse.line,
                reverse.standing
            ),
            (
                forward.group,
                forward.within,
                forward.line,
                forward.standing
            )
        );
        assert_eq!(
            (&reverse.reactants, &reverse.consumed, &reverse.products),
            (&forward.products, &forward.products, &forward.consumed)
        );
        let Cause::Reverse {
            forward: cause,
            gained: found,
            polynomials,
        } = &reverse.cause
        else {
            panic!("{:?}", reverse.cause);
        };
        assert_eq!((&**cause, *found), (&forward.cause, gained));
        assert_eq!(polynomials.len(), 2);
    }
    assert_ne!(chemistry.reactions[0].group, chemistry.reactions[3].group);
}

// Fails if a mistake passes, or is told without its line.
#[test]
fn mistakes_in_reversible_lines_are_told() {
    let plain = "at_300K: 1.0e-12, valid: [5, 500], reversible: true";
    for (from, to, line, found, expected) in [
        (
            "thermo: standard\n",
            "about: x\n",
            7,
            "without polynomials",
            "thermo: standard",
        ),
        (
            "thermo: standard",
            "thermo: other",
            3,
            "`other`",
            "standard, or a path",
        ),
        (
            "thermo: standard",
            "thermo: no/such.yaml",
            3,
            "no/such.yaml",
            "readable file",
        ),
        (
            "OH + H2 -> H2O + H, at",
            "C3H2+ + H2 -> C3H3+ + H, at",
            7,
            "`C3H2+`, which has no",
            "the polynomials `standard` list",
        ),
        (
            "OH + H2 -> H2O + H, at",
            "CH3 + H -> CH4, adds: true, at",
            7,
            "light",
            "`falloff`",
        ),
        (
            "OH + O -> H + O + O",
            "H + H2O -> H2 + OH",
            7,
            "the reverse on line 8 too",
            "not both",
        ),
        (
            "HCO -> H + CO",
            "CH4 -> CH3 + H",
            10,
            "the reverse on line 14 too",
            "not both",
        ),
        (
            "OH + O -> H + O + O, at_300K: 1.0e-15, valid: [5, 500]",
            &format!("CH4 + H2 -> CH3 + H + H + H, {plain}"),
            8,
            "4 products",
            "at most 3",
        ),
    ] {
        let text = NETWORK.replacen(from, to, 1);
        assert_ne!(text, NETWORK, "{from}");
        let errors = read(Path::new("x.yaml"), &text).expect_err(to);
        let told = errors.iter().any(|e| {
            e.line == Some(line) && e.found.contains(found) && e.expected.contains(expected)
        });
        assert!(told, "{to}: {errors:?}");
    }
    // A light-driven break-up is another process than the reverse of a falloff.
    let text = format!(
        "{NETWORK}light:\n  - {{change: CH4 -> CH3 + H, rate: 1.0e-9, extinction: 2.0, standing: measured, source: s}}\n"
    );
    assert!(read(Path::new("x.yaml"), &text).is_ok());
}

// Fails if an unphysically fast reverse passes without a word.
#[test]
fn a_reverse_faster_than_collisions_is_remarked() {
    let cold = NETWORK.replace("OH + H2 -> H2O + H, at", "H2O + H -> OH + H2, at");
    let warned = |text: &str| {
        let network = read(Path::new("x.yaml"), text).unwrap_or_else(|e| panic!("{e:?}"));
        let of = |w: &&crate::network::Warning| w.text.contains("its reverse");
        network
            .warnings
            .iter()
            .filter(of)
            .map(|w| w.line)
            .collect::<Vec<_>>()
    };
    assert_eq!(warned(NETWORK), [0usize; 0]);
    assert_eq!(warned(&cold), [7]);
}

// Fails if wrong polynomials are taken or told without their line.
#[test]
fn mistakes_in_polynomials_are_told() {
    const GOOD: &str = "thermo: mine\nlayout: 1\nsources: {s: x}\npolynomials:\n  - {species: H, valid: [200, 1000], a: [0, 0, 2.5, 0, 0, 0, 0], b: [25473.7, -0.4], source: s}\n  - {species: H, valid: [1000, 6000], a: [0, 0, 2.5, 0, 0, 0, 0], b: [25473.7, -0.4], source: s}\n";
    let path = Path::new("mine.yaml");
    assert_eq!(thermo::read(path, GOOD).unwrap().species["H"].len(), 2);
    for (from, to, line, said) in [
        ("layout: 1", "layout: 2", 2, "`2`"),
        (
            "[1000, 6000]",
            "[1100, 6000]",
            6,
            "[1100, 6000] after one that ends at 1000 K",
        ),
        (
            "[1000, 6000]",
            "[200, 1000]",
            6,
            "after one that ends at 1000 K",
        ),
        ("[1000, 6000]", "[1000, 1000]", 6, "low < high"),
        ("[200, 1000]", "[0, 1000]", 5, "0 < low"),
        ("species: H,", "species: Xx,", 5, "Xx"),
        ("species: H,", "species: H(ads),", 5, "a gas species"),
        ("source: s}\n  -", "source: t}\n  -", 5, "`t`"),
        ("[0, 0, 2.5, 0, 0, 0, 0]", "[0, 0, 2.5, 0, 0, 0]", 5, "7"),
        ("b: [25473.7", "c: 1, b: [25473.7", 5, "`c`"),
    ] {
        let text = GOOD.replacen(from, to, 1);
        let errors = thermo::read(path, &text).expect_err(to);
        let told = |e: &crate::errors::InputError| {
            e.line == Some(line) && e.to_string().contains(said) && e.file == path
        };
        assert!(errors.iter().any(told), "{to}: {errors:?}");
    }
    // And through the network that names them, with the file of the polynomials.
    let errors = read_with(Path::new("x.yaml"), NETWORK, Some("thermo: y\n")).unwrap_err();
    assert!(errors[0].file.ends_with("thermo.yaml"), "{errors:?}");
}
