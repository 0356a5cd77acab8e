//! Ionisation, atomic hydrogen and photodissociation.

use super::*;

/// Fails if ionisation, recombination or their densities are off: one ion recombining with
/// electrons, n_e = sqrt(zeta n(H2)/k) tanh(t sqrt(zeta n(H2) k)), and the steady values and times
/// of closed_form_checks.md section 4.
#[test]
fn electrons_follow_the_ionisation_balance() {
    let setup = Setup::new(
        "species:\n  - {name: H2, source: s}\n  - {name: H2+, source: s}\n  - {name: e-, source: s}\n\
         gas:\n  - {change: H2+ + e- -> H2, at_300K: 2.4e-7, slope: -0.69, valid: [5, 1000], standing: recalled, source: s}\n\
         cosmic:\n  - {change: H2 -> H2+ + e-, direct: 1.0, standing: recalled, source: s}\n",
        &GrainOptions::default(),
    );
    let rows = [
        (1e4, 10.0, 1.3e-17, 1.60970e-4, 7.8474e1),
        (1e6, 20.0, 1.3e-17, 2.04456e-3, 9.9674e0),
        (1e8, 20.0, 1.0e-17, 1.79320e-2, 1.1365e0),
        (1e10, 50.0, 1.0e-18, 7.77888e-2, 4.9300e-1),
    ];
    for (n_h, t, zeta, steady, years) in rows {
        // All three causes of ionisation count.
        let place = Conditions {
            zeta_cosmic: 0.7 * zeta,
            zeta_xray: 0.2 * zeta,
            zeta_nuclides: 0.1 * zeta,
            ..dark(n_h, t)
        };
        let shares = [0.1, 0.5, 1.0, 2.0, 5.0, 30.0];
        let times = shares.map(|share| share * years * YEAR);
        let x = setup.run(&place, &[("H2", 0.5)], &times, ["e-", "H2+"]);
        for ([electrons, ions], share) in x.into_iter().zip(shares) {
            let what = format!("n_H = {n_h:e} at {share} of the time scale");
            close(electrons * n_h, steady * share.tanh(), 5e-5, &what);
            close(ions, electrons, 1e-9, &what);
        }
    }
}

const HYDROGEN: &str = "\
species:
  - {name: H, source: s}
  - {name: H2, source: s}
  - {name: e-, source: s}
cosmic:
  - {change: H2 -> H + H, direct: 0.65, standing: recalled, source: s}
dust:
  hydrogen_formation: {at_100K: 3.0e-17, slope: 0.5, source: s}
";

/// Fails if an H atom is counted once where two are taken, or formation does not scale with the
/// dust: n(H) = zeta_d n(H2)/(R n_H) (1 - exp(-2 R n_H t)), R = 3e-17 (T/100)^0.5
/// (closed_form_checks.md section 4; Jura 1975, ApJ 197, 575).
#[test]
fn atomic_hydrogen_in_molecular_gas() {
    let setup = Setup::new(HYDROGEN, &GrainOptions::default());
    for (n_h, t, dust) in [(1e4, 10.0, 1.0), (1e6, 40.0, 0.1)] {
        let place = Conditions {
            zeta_cosmic: 1.3e-17,
            dust_area: dust * REFERENCE_DUST_AREA,
            ..dark(n_h, t)
        };
        let r = 3e-17 * f64::sqrt(t / 100.0) * dust;
        let steady = 0.65 * 1.3e-17 * (0.5 * n_h) / (r * n_h);
        let times = [0.2, 1.0, 20.0].map(|share| share / (2.0 * r * n_h));
        let x = setup.run(&place, &[("H2", 0.5)], &times, ["H"]);
        for ([x], time) in x.into_iter().zip(times) {
            let expected = steady * -f64::exp_m1(-2.0 * r * n_h * time);
            // The atoms are missing from H2: a few times x(H).
            close(x * n_h, expected, 5e-4, &format!("n(H) at n_H = {n_h:e}"));
        }
    }
}

/// Fails if H that forms H2 by the formula freezes out as well: all that sticks is lost once, at
/// the rate S sigma_H n_H v with S of Hollenbach & McKee 1979, of which 2 R n_H makes H2.
#[test]
fn hydrogen_atoms_stick_once() {
    let text = format!(
        "{HYDROGEN}ices:\n  - {{species: H, energy: 650, prefactor: 4.04e+12, photodesorption: [], standing: recalled, source: s}}\n"
    );
    let setup = Setup::new(&text, &GrainOptions::default());
    // Dust so cold that no atom comes back.
    let (n_h, t, t_dust) = (1e4, 30.0, 5.0);
    let place = Conditions {
        t_dust,
        ..dark(n_h, t)
    };
    let sticking = 1.0 / (1.0 + 0.04 * f64::sqrt(t + t_dust) + 2e-3 * t + 8e-6 * t * t);
    let all = sticking * REFERENCE_DUST_AREA * n_h * mean_speed(1.008, t);
    let formation = 2.0 * 3e-17 * f64::sqrt(0.3) * n_h;
    let x = setup.run(
        &place,
        &[("H", 1e-6)],
        &[1.0 / all, 3.0 / all],
        ["H", "H2", "H(ads)"],
    );
    for ([h, h2, ice], times) in x.into_iter().zip([1.0, 3.0]) {
        let left = 1e-6 * f64::exp(-times);
        close(h, left, 1e-6, "H");
        close(2.0 * h2, (1e-6 - left) * formation / all, 1e-6, "H2");
        close(ice, (1e-6 - left) * (1.0 - formation / all), 1e-6, "H(ads)");
    }
}

/// Unshielded rates: Heays et al. 2017 (H2), Visser, van Dishoeck & Black 2009 (CO); black body
/// rates invented. Shielding of CO: rows of Visser et al. 2009, A&A 503, 323, Table 5.
const PHOTODISSOCIATION: &str = "\
spectra: {black_body_4000K: hot light}
species:
  - {name: H, source: s}
  - {name: H2, source: s}
  - {name: C, source: s}
  - {name: O, source: s}
  - {name: CO, source: s}
shielding:
  - {name: H2, law: draine_bertoldi, column: H2, source: s}
  - {name: CO, law: table, column: CO, log_column: [0, 15, 16, 19], log_h2: [0, 21, 22], factor: [[1.0, 0.2434, 0.05467, 5.24e-4], [0.326, 0.08726, 0.01907, 1.941e-4], [0.01108, 0.004441, 0.001102, 1.437e-5]], source: s}
light:
  - {change: H2 -> H + H, rate: 5.7e-11, extinction: 4.18, shield: H2, spectra: {black_body_4000K: 2.0e-13}, standing: recalled, source: s}
  - {change: CO -> C + O, rate: 2.59e-10, extinction: 3.88, shield: CO, spectra: {black_body_4000K: 1.0e-12}, standing: recalled, source: s}
";

/// Fails if a column, a factor, an exponent or a field is mixed up on the way from the table of
/// cells to the rate: exponential decay with k = sum over fields of chi k0 f exp(-gamma A_V).
/// f(H2) at b = 1 km/s: Draine & Bertoldi 1996, eq. 37, as evaluated in h2_shielding.md; f(CO):
/// Visser et al. 2009, Table 5.
#[test]
fn shielded_light_breaks_molecules_at_the_published_rates() {
    // Three cells: sky alone; other columns; sky and a star whose strength is attenuated already
    // and whose CO factor is given.
    let table = "\
radius [au],height [au],n_H [cm^-3],T_gas [K],zeta_cosmic [s^-1],UV_sky [Draine],AV_sky [mag],N_H2_sky [cm^-2],N_CO_sky [cm^-2],UV_star [Draine],AV_star [mag],N_H2_star [cm^-2],N_CO_star [cm^-2],shield_CO_star [1]
1,0,1e3,20,0,1.5,0.4,1e16,1e15,0,9,1e21,1e19,
1,0,1e3,20,0,2.0,0.7,1e21,1e16,0,9,1e21,1e19,
1,0,1e3,20,0,0.5,1.0,1e22,1e19,40,9,1e18,1e16,0.25
";
    let fields = "fields: [{name: sky, spectrum: draine}, {name: star, spectrum: black_body_4000K, attenuated: true}]";
    // Total width 1 km/s: the thermal part of H2 at 20 K and the rest as turbulence.
    let thermal = 2.0 * K_B * 20.0 / (2.016 * AMU);
    let turbulence = (1e10 - thermal).sqrt() / 1e5;
    let gas = format!("gas: {{turbulence: {turbulence} km/s}}\n");
    let h2 = [
        1.5 * 5.7e-11 * 9.796143e-3 * f64::exp(-4.18 * 0.4),
        2.0 * 5.7e-11 * 7.438673e-6 * f64::exp(-4.18 * 0.7),
        0.5 * 5.7e-11 * 1.748488e-7 * f64::exp(-4.18) + 40.0 * 2.0e-13 * 7.534777e-4,
    ];
    let co = [
        // N(H2) = 1e16 lies between the rows: 16/21 of the way in log f.
        1.5 * 2.59e-10 * 0.2434 * f64::powf(0.08726 / 0.2434, 16.0 / 21.0) * f64::exp(-3.88 * 0.4),
        2.0 * 2.59e-10 * 0.01907 * f64::exp(-3.88 * 0.7),
        0.5 * 2.59e-10 * 1.437e-5 * f64::exp(-3.88) + 40.0 * 1.0e-12 * 0.25,
    ];
    for (species, start, rates) in [("H2", 0.5, h2), ("CO", 1e-4, co)] {
        for (cell, k) in rates.into_iter().enumerate() {
            let times = [0.5 / k, 2.0 / k];
            let run = case(
                PHOTODISSOCIATION,
                fields,
                "H2: 0.5, CO: 1.0e-4",
                &times,
                &gas,
                table,
            );
            for (x, t) in history(&run, cell, species).into_iter().zip(times) {
                // Seven digits of the published factors.
                close(
                    x,
                    start * (-k * t).exp(),
                    1e-6,
                    &format!("{species} in cell {cell}"),
                );
            }
        }
    }
}
