//! Reactions between adsorbed species.

use super::*;

const H_AND_CO: &str = "\
species:
  - {name: H, source: s}
  - {name: H2, source: s}
  - {name: CO, source: s}
  - {name: HCO, source: s}
ices:
  - {species: H, energy: 650, prefactor: 4.04e+12, photodesorption: [], standing: recalled, source: s}
  - {species: CO, energy: 1390, prefactor: 9.14e+14, hop_energy: 1300, photodesorption: [], standing: recalled, source: s}
  - {species: HCO, energy: 2400, prefactor: 1.0e+13, photodesorption: [], standing: recalled, source: s}
surface:
  - {change: H(ads) + CO(ads) -> HCO(ads), barrier: BARRIER, width: 1.0, leaves: 0.0, standing: recalled, source: s}
  - {change: H(ads) + H(ads) -> H2, standing: recalled, source: s}
";

/// Vibration of an adsorbed molecule in its well, s^-1 (Hasegawa, Herbst & Leung 1992, ApJS 82, 167).
fn vibration(energy: f64, mass: f64) -> f64 {
    (2.0 * SITE_DENSITY * K_B * energy / (PI * PI * mass * AMU)).sqrt()
}

/// Fails if hops, tunnelling, their competition, the layers or the pairs are wrong. A trace of H
/// on much CO at 10 K and 12 K decays with kappa (hops of H and of CO) x(CO)/sites.
///
/// By hand at 10 K (Hasegawa, Herbst & Leung 1992): H vibrates 4.039e12 times and hops
/// 4.039e12 exp(-227.5/10) = 532 times a second; it crosses the barrier of 2500 K and 1 A in one of
/// exp(20.03) = 5e8 attempts, 8.1e3 times a second: so kappa = 0.938 (Garrod & Pauly 2011, ApJ
/// 735, 15). Without a barrier hops alone limit (kappa = 1); behind one of 6000 K hops do not
/// matter: the rate is that of crossing for as long as the two share a site.
#[test]
fn hydrogen_adds_to_co_on_ice_as_fast_as_it_hops_and_tunnels() {
    let (h, co) = (vibration(650.0, 1.008), vibration(1300.0, 28.010));
    close(h, 4.039e12, 1e-3, "vibration of H");
    let reduced = 1.008 * 28.010 / 29.018;
    let crossing =
        |barrier: f64| h * f64::exp(-2e-8 / HBAR * f64::sqrt(2.0 * reduced * AMU * K_B * barrier));
    close(crossing(2500.0), 8.1e3, 1e-2, "crossing by hand");
    let hops = |t: f64| h * f64::exp(-0.35 * 650.0 / t) + co * f64::exp(-0.5 * 1300.0 / t);
    close(hops(10.0), 532.0, 2e-3, "hops by hand");
    // Barrier, temperature, kappa times hops.
    let rows = [
        (0.0, 10.0, hops(10.0)),
        (2500.0, 10.0, 0.938 * 532.0),
        (
            2500.0,
            10.0,
            hops(10.0) / (1.0 + hops(10.0) / crossing(2500.0)),
        ),
        (6000.0, 12.0, crossing(6000.0)),
    ];
    for (row, (barrier, t, rate)) in rows.into_iter().enumerate() {
        let text = H_AND_CO.replace("BARRIER", &format!("{barrier:.1}"));
        let setup = Setup::new(&text, &GrainOptions::default());
        // Under a layer, between one and the two active ones, and thick: of the thick ice both
        // partners must lie in the top two layers, where a hop meets one site in two layers' worth.
        for (carbon_monoxide, factor) in [(1e-7, 1.0), (1.5 * SITES, 1.0 / 1.5), (1e-4, 0.0)] {
            let layers: f64 = carbon_monoxide / SITES;
            let factor = if factor > 0.0 {
                factor
            } else {
                (2.0 / layers).powi(2) / 2.0
            };
            let decay = rate * factor * layers;
            let start = [("H(ads)", 1e-22), ("CO(ads)", carbon_monoxide)];
            let times = [0.5 / decay, 2.0 / decay];
            let x = setup.run(&dark(1e-6, t), &start, &times, ["H(ads)", "HCO(ads)"]);
            // Hand numbers have three digits; the limit behind a high barrier is one of kappa << 1.
            let relative = [1e-5, 5e-3, 1e-5, 1e-4][row];
            for ([h, hco], t) in x.into_iter().zip(times) {
                let left = 1e-22 * (-decay * t).exp();
                let what = format!("barrier {barrier} K, {layers:.2} layers");
                close(h, left, 2.0 * relative, &what);
                close(hco, 1e-22 - left, 2.0 * relative, &what);
            }
        }
    }
}

/// Fails if pairs of one species are counted twice or not at all: x = x0/(1 + 2 k x0 t) with
/// k = hops/sites, each meeting taking two (Hasegawa, Herbst & Leung 1992).
#[test]
fn hydrogen_atoms_meet_each_other_on_ice() {
    let setup = Setup::new(
        &H_AND_CO.replace("BARRIER", "2500.0"),
        &GrainOptions::default(),
    );
    let k = vibration(650.0, 1.008) * f64::exp(-0.35 * 650.0 / 10.0) / SITES;
    let start = 1e-10;
    let times = [0.3, 1.0, 10.0].map(|share| share / (2.0 * k * start));
    let x = setup.run(
        &dark(1e-6, 10.0),
        &[("H(ads)", start)],
        &times,
        ["H(ads)", "H2"],
    );
    for ([h, h2], t) in x.into_iter().zip(times) {
        let left = start / (1.0 + 2.0 * k * start * t);
        close(h, left, 1e-5, "H(ads)");
        close(2.0 * h2, start - left, 1e-5, "H2");
    }
}
