//! Small networks whose course is known in closed form, through the real pipeline: text of a
//! network (or of a whole case) -> read -> expand -> rates -> integrate.
//!
//! Every integration also asserts the linear invariants: elements, charge, grains, the ice total.
//! Expected numbers are those of published formulas with constants written out here, not calls of
//! the engine's own rate laws; the tables quoted were evaluated beforehand from the same formulas
//! by other code.

use frostclock::case::{self, GivenAbundance, StartChoice, StartKind, start_state};
use frostclock::disk::conditions::REFERENCE_DUST_AREA;
use frostclock::disk::{Conditions, FieldKind, Light};
use frostclock::kinetics::{Mechanism, Status, Tolerance, integrate};
use frostclock::network::model::{Chemistry, GrainOptions};
use frostclock::network::{self, names};
use frostclock::rates::{self, Setting, cell_rates};
use frostclock::run::balance::Invariants;
use frostclock::run::record::{Balance, CellStatus};
use frostclock::run::{Prepared, cell};
use std::collections::HashMap;
use std::f64::consts::{LN_2, PI};
use std::io;
use std::path::{Path, PathBuf};

// CODATA 2018, cgs.
const K_B: f64 = 1.380649e-16;
const AMU: f64 = 1.66053906660e-24;
const HBAR: f64 = 1.054571817e-27;
const CHARGE: f64 = 4.80320471e-10;
const YEAR: f64 = 3.15576e7;

/// Sites per area, cm^-2, and per hydrogen nucleus for the reference dust (closed_form_checks.md
/// section 1).
const SITE_DENSITY: f64 = 1.5e15;
const SITES: f64 = 3.5145e-6;

/// Relative tolerance of the integrations, well below every tolerance of a check.
const RELATIVE: f64 = 1e-9;

fn close(value: f64, expected: f64, relative: f64, what: &str) {
    let off = (value / expected - 1.0).abs();
    assert!(
        off < relative,
        "{what}: {value:e} instead of {expected:e}, off by {off:.1e}"
    );
}

/// What has to hold at every snapshot of every integration.
fn assert_balanced(balance: &Balance, t_gas: f64, what: &str) {
    let elements = if t_gas < 100.0 { 1e-9 } else { 1e-6 };
    assert!(balance.elements <= elements, "{what}: {balance:?}");
    assert!(balance.charge <= 1e-4, "{what}: {balance:?}");
    assert!(balance.dust <= 1e-9, "{what}: {balance:?}");
    assert!(balance.ice <= 1e-6, "{what}: {balance:?}");
}

/// A network with what all cells of a test share.
struct Setup {
    chemistry: Chemistry,
    mechanism: Mechanism,
    invariants: Invariants,
}

impl Setup {
    /// Reads and expands `text`, which lacks only the head that all networks here share.
    fn new(text: &str, grains: &GrainOptions) -> Setup {
        let text = network_file(text);
        let network = network::read(Path::new("closed.yaml"), &text)
            .unwrap_or_else(|errors| panic!("{errors:?}\n{text}"));
        let chemistry = network::expand(&network, grains).expect("the network expands");
        Setup {
            mechanism: rates::mechanism(&chemistry).expect("the mechanism is sound"),
            invariants: Invariants::new(&chemistry),
            chemistry,
        }
    }

    /// Abundances of `names` at `times` (s), from the abundances `start`.
    fn run<const N: usize>(
        &self,
        place: &Conditions,
        start: &[(&str, f64)],
        times: &[f64],
        names: [&str; N],
    ) -> Vec<[f64; N]> {
        let given = start.iter().map(|(species, value)| GivenAbundance {
            species: species.to_string(),
            value: *value,
            line: None,
        });
        let choice = StartChoice {
            file: PathBuf::from("closed.yaml"),
            line: None,
            kind: StartKind::Abundances(given.collect()),
        };
        let start = start_state(&choice, &[], &self.chemistry, place.dust_abundance())
            .expect("the start is sound");
        let setting = Setting {
            turbulence: 2e4,
            colliders: None,
        };
        let rates = cell_rates(&self.chemistry, &sky(place), place, &setting);
        let tolerance = Tolerance {
            relative: RELATIVE,
            smallest: 1e-28,
        };
        let outcome = integrate(
            &self.mechanism,
            &rates.coefficients,
            &start,
            times,
            &tolerance,
        );
        assert_eq!(outcome.status, Status::Finished);
        let place_of = names.map(|name| self.chemistry.find(name).expect(name));
        let snapshots = outcome.snapshots.iter().zip(times);
        let columns = snapshots.map(|(state, time)| {
            let balance = self.invariants.drift(&start, state);
            assert_balanced(&balance, place.t_gas, &format!("at {time:e} s"));
            place_of.map(|id| state[id])
        });
        columns.collect()
    }
}

/// Puts the head that all networks here share before `text`.
fn network_file(text: &str) -> String {
    format!("network: closed\nlayout: 1\nsources: {{s: \"closed forms\"}}\n{text}")
}

/// One field of the Draine spectrum for as many fields as `place` has.
fn sky(place: &Conditions) -> Vec<FieldKind> {
    let kind = FieldKind {
        name: "sky".into(),
        spectrum: "draine".into(),
        attenuated: false,
    };
    place.light.iter().map(|_| kind.clone()).collect()
}

/// A dark place without any ionisation, with the reference dust.
fn dark(n_h: f64, t: f64) -> Conditions {
    Conditions {
        radius: 1.0,
        height: 0.0,
        n_h,
        t_gas: t,
        t_dust: t,
        light: Vec::new(),
        zeta_cosmic: 0.0,
        zeta_xray: 0.0,
        zeta_nuclides: 0.0,
        dust_area: REFERENCE_DUST_AREA,
        grain_radius: 1e-5,
    }
}

/// A case that integrates `times` (s) from `start` in the cells of `table`.
fn case(
    network: &str,
    disk: &str,
    start: &str,
    times: &[f64],
    rest: &str,
    table: &str,
) -> Prepared {
    let times: Vec<String> = times.iter().map(|t| format!("{t:e} s")).collect();
    let text = format!(
        "title: closed forms\nnetwork: closed.yaml\ndisk: {{table: cells.csv, {disk}}}\n\
         start: {{abundances: {{{start}}}}}\nclock: {{at: [{}]}}\n\
         accuracy: {{relative: {RELATIVE:e}, smallest: 1.0e-28}}\n{rest}",
        times.join(", ")
    );
    let files: HashMap<PathBuf, String> = [
        ("dir/closed.yaml".into(), network_file(network)),
        ("dir/cells.csv".into(), table.to_string()),
    ]
    .into();
    let read = |path: &Path| {
        files
            .get(path)
            .cloned()
            .ok_or_else(|| io::Error::from(io::ErrorKind::NotFound))
    };
    let case = case::read(Path::new("dir/case.yaml"), &text, &read)
        .unwrap_or_else(|failure| panic!("{failure}\n{text}"));
    Prepared::new(&case).unwrap_or_else(|failure| panic!("{failure}"))
}

/// The history of `species` in one cell of a case, without the start.
fn history(run: &Prepared, cell: usize, species: &str) -> Vec<f64> {
    let record = cell::compute(run, cell);
    assert_eq!(
        record.status,
        CellStatus::Done,
        "cell {cell}: {}",
        record.reason
    );
    for (balance, time) in record.balance.iter().zip(&run.times) {
        let what = format!("cell {cell} at {time:e} s");
        assert_balanced(balance, run.disk.cells[cell].t_gas, &what);
    }
    let id = run.chemistry.find(species).expect(species);
    record
        .abundances
        .chunks(run.chemistry.species.len())
        .skip(1)
        .map(|state| state[id])
        .collect()
}

/// Mean thermal speed, cm s^-1.
fn mean_speed(mass: f64, t: f64) -> f64 {
    (8.0 * K_B * t / (PI * mass * AMU)).sqrt()
}

const ICES: &str = "\
species:
  - {name: CO, source: s}
  - {name: H2O, source: s}
  - {name: CO2, source: s}
ices:
  - {species: CO, energy: 1390, prefactor: 9.14e+14, photodesorption: [], standing: recalled, source: s}
  - {species: H2O, energy: 5705, prefactor: 4.96e+15, photodesorption: [], standing: recalled, source: s}
  - {species: CO2, energy: 3196, prefactor: 6.81e+16, photodesorption: [], standing: recalled, source: s}
";

/// Fails if dust, sticking, thermal speed or density enters freeze-out wrongly anywhere between
/// the table of a case and the last snapshot. E-folding times with sticking 1: closed_form_checks.md
/// section 1 (kinetic theory; masses there 28 and 18, here those of the formulas).
#[test]
fn molecules_freeze_out_exponentially() {
    let table = "radius [au],height [au],n_H [cm^-3],T_gas [K],zeta_cosmic [s^-1]\n\
                 1,0,1.0e4,10,0\n1,0,1.0e6,10,0\n1,0,1.0e8,20,0\n1,0,1.0e8,20,0\n";
    let rows = [
        ("CO", 28.010 / 28.0, 6.2213e5),
        ("CO", 28.010 / 28.0, 6.2213e3),
        ("CO", 28.010 / 28.0, 4.3991e1),
        ("H2O", 18.015 / 18.0, 3.5271e1),
    ];
    for (cell, (species, heavier, years)) in rows.into_iter().enumerate() {
        let tau = years * YEAR * f64::sqrt(heavier);
        let times = [0.3 * tau, tau, 4.0 * tau];
        let run = case(
            ICES,
            "fields: []",
            "CO: 1.0e-4, H2O: 1.0e-4",
            &times,
            "",
            table,
        );
        for (x, t) in history(&run, cell, species).into_iter().zip(times) {
            // The last digit of the table, thrice over at 4 tau.
            close(
                x,
                1e-4 * (-t / tau).exp(),
                1e-4,
                &format!("{species} after {t:e} s"),
            );
        }
    }
}

/// Fails if thermal desorption is not first order below one layer, with the half-life
/// ln 2/(nu exp(-E/T)) (Polanyi & Wigner 1925).
#[test]
fn thin_ice_desorbs_with_its_half_life() {
    let setup = Setup::new(ICES, &GrainOptions::default());
    for (species, energy, nu, t) in [
        ("CO", 1390.0, 9.14e14, 25.0),
        ("H2O", 5705.0, 4.96e15, 100.0),
        ("CO2", 3196.0, 6.81e16, 55.0),
    ] {
        let half = LN_2 / (nu * f64::exp(-energy / t));
        let ice = names::adsorbed_name(species);
        // So thin a gas that nothing comes back.
        let x = setup.run(
            &dark(1e-3, t),
            &[(&ice, 1e-6)],
            &[0.5 * half, half, 2.0 * half, 10.0 * half],
            [ice.as_str(), species],
        );
        for ([ice, gas], halves) in x.into_iter().zip([0.5, 1.0, 2.0, 10.0]) {
            let left = 1e-6 * f64::powf(0.5, halves);
            close(ice, left, 1e-6, species);
            close(gas, 1e-6 - left, 1e-6, species);
        }
    }
}

/// Fails if thick ice loses more than its top layers: linear decrease with slope
/// k * sites * layers down to the last desorbing layer, then exponential (zeroth- and first-order
/// desorption, e.g. Collings et al. 2004, MNRAS 354, 1133).
#[test]
fn thick_ice_desorbs_layer_by_layer() {
    for layers in [1.0, 3.0] {
        let grains = GrainOptions {
            desorbing_layers: layers,
            ..Default::default()
        };
        let setup = Setup::new(ICES, &grains);
        let k = 9.14e14 * f64::exp(-1390.0 / 25.0);
        let (start, last) = (1e-4, layers * SITES);
        let bare = (start - last) / (k * last);
        let times = [
            0.2 * bare,
            0.6 * bare,
            0.99 * bare,
            bare + 1.0 / k,
            bare + 3.0 / k,
        ];
        let x = setup.run(
            &dark(1e-3, 25.0),
            &[("CO(ads)", start)],
            &times,
            ["CO(ads)"],
        );
        for ([x], t) in x.into_iter().zip(times) {
            let expected = if t < bare {
                start - k * last * t
            } else {
                last * (-k * (t - bare)).exp()
            };
            close(
                x,
                expected,
                1e-5,
                &format!("{layers} layers at {:.2} of the way", t / bare),
            );
        }
    }
}

/// Fails if adsorption and desorption do not balance where they should: gas equals ice within the
/// rounding of the tabulated half-depletion temperatures at n_H = 1e8 (closed_form_checks.md
/// section 1). Light and cosmic rays are off.
#[test]
fn half_of_a_molecule_is_gas_at_its_half_depletion_temperature() {
    let setup = Setup::new(ICES, &GrainOptions::default());
    for (species, t) in [("CO", 25.10), ("H2O", 101.59), ("CO2", 53.68)] {
        let ice = names::adsorbed_name(species);
        let ratio = |t| {
            let x = setup.run(
                &dark(1e8, t),
                &[(species, 1e-6)],
                &[1e4 * YEAR],
                [species, &ice],
            );
            let [gas, ice] = x[0];
            gas / ice
        };
        let (colder, warmer) = (ratio(t - 0.012), ratio(t + 0.012));
        assert!(
            colder < 1.0 && warmer > 1.0,
            "{species}: {colder} and {warmer}"
        );
    }
}

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

/// Loss of ice per hydrogen nucleus and second, from the change of the ice within `time` (s) that
/// is short against its life.
fn loss(setup: &Setup, place: &Conditions, ice: f64, time: f64) -> f64 {
    let x = setup.run(place, &[("CO(ads)", ice)], &[time], ["CO"]);
    x[0][0] / time
}

const ONE_ICE: &str = "\
species:
  - {name: CO, source: s}
ices:
  - {species: CO, energy: 1150, prefactor: 1.0e+12, photodesorption: [CHANNELS], standing: recalled, source: s}
";

/// Fails if the duty cycle of hot grains or the share of the top layer is off: for CO (1150 K,
/// 1e12 s^-1) by hand 3.16e-19 * 1e12 exp(-1150/70) = 2.3166e-14 s^-1 per molecule at
/// zeta = 1.3e-17 s^-1 (Hasegawa & Herbst 1993, MNRAS 261, 83), from the top layer only.
#[test]
fn cosmic_rays_desorb_the_top_layer() {
    let setup = Setup::new(&ONE_ICE.replace("CHANNELS", ""), &GrainOptions::default());
    // X-rays and nuclides do not heat grains.
    let place = Conditions {
        zeta_cosmic: 1.3e-17,
        zeta_xray: 1e-15,
        zeta_nuclides: 1e-15,
        ..dark(1e-6, 8.0)
    };
    let thin = loss(&setup, &place, 1e-7, 1e9);
    close(thin / 1e-7, 2.3166e-14, 1e-4, "thin ice");
    // 2.3166e-14 s^-1 times 3.5145e-6 sites per H, whatever the thickness.
    for ice in [2e-5, 1e-4] {
        close(
            loss(&setup, &place, ice, 1e9),
            8.1416e-20,
            1e-4,
            "thick ice",
        );
    }
}

/// Fails if photons, yields, layers or sites are counted wrongly: a thick ice loses yield times
/// photons on the projected area of the grains, sigma_H F Y; a thin one (under two lit layers)
/// F Y/(4 n_s 2) per molecule. F = 1e8 chi exp(-2 A_V) + 1.4e20 zeta (disk_relations.md; yield of
/// CO 2.7e-3: Oberg et al. 2007, ApJ 662, L23).
#[test]
fn photons_desorb_from_the_lit_layers() {
    let channel = "{products: CO, yield: 2.7e-3, source: s}";
    let setup = Setup::new(
        &ONE_ICE.replace("CHANNELS", channel),
        &GrainOptions::default(),
    );
    let lit = |strength, extinction| Light {
        strength,
        extinction,
        columns: vec![0.0],
        shields: vec![None],
    };
    // X-rays make secondary photons without heating grains: 1.4e20 * 1.3e-17 = 1820 cm^-2 s^-1,
    // ten times as many where a tenth of the dust absorbs them.
    let xrays = Conditions {
        zeta_xray: 1.3e-17,
        ..dark(1e-6, 8.0)
    };
    let bare = Conditions {
        dust_area: 0.1 * REFERENCE_DUST_AREA,
        ..xrays.clone()
    };
    let sunny = Conditions {
        light: vec![lit(30.0, 2.0), lit(1.0, 0.5)],
        ..dark(1e-6, 8.0)
    };
    let rows = [
        (&xrays, 1820.0, REFERENCE_DUST_AREA),
        (&bare, 18200.0, 0.1 * REFERENCE_DUST_AREA),
        // 1e8 (30 exp(-4) + exp(-1)) = 9.1735e7.
        (&sunny, 9.1735e7, REFERENCE_DUST_AREA),
    ];
    for (place, flux, area) in rows {
        let per_molecule = flux * 2.7e-3 / (4.0 * SITE_DENSITY * 2.0);
        let time = 1e-4 / per_molecule;
        let thin = loss(&setup, place, 1e-8, time);
        // Half of the 1e-4 is gone to the course of the decay.
        close(thin / 1e-8, per_molecule * (1.0 - 0.5e-4), 2e-5, "thin ice");
        close(
            loss(&setup, place, 1e-4, time),
            flux * 2.7e-3 * area,
            2e-5,
            "thick ice",
        );
    }
}

/// A plasma of one metal ion, electrons and grains.
const PLASMA: &str = "\
species:
  - {name: Mg, source: s}
  - {name: Mg+, source: s}
  - {name: e-, source: s}
gas:
  - {change: Mg+ + e- -> Mg, at_300K: 2.78e-12, slope: -0.68, valid: [5, 1000], standing: recalled, source: s}
cosmic:
  - {change: Mg -> Mg+ + e-, direct: 1.0, standing: recalled, source: s}
dust:
  neutralisation:
    - {ion: Mg+, becomes: Mg, share: 1.0, source: s}
";

/// The steady state of `PLASMA`: ionisation balance, charge balance and the ladder of grain charges.
struct Plasma {
    ladder: i32,
    /// Coefficients of electrons and ions on a grain of charge z, cm^3 s^-1.
    electron: Box<dyn Fn(i32) -> f64>,
    ion: Box<dyn Fn(i32) -> f64>,
    recombination: f64,
    zeta: f64,
    /// cm^-3.
    metal: f64,
    dust: f64,
}

impl Plasma {
    fn new(place: &Conditions, metal: f64, ladder: i32) -> Plasma {
        let (t, a) = (place.t_gas, place.grain_radius);
        let tau = a * K_B * t / (CHARGE * CHARGE);
        // Draine & Sutin 1987, ApJ 320, 803, eqs. 3.3-3.5; nu = Z e/q.
        let focusing = move |nu: f64| {
            if nu == 0.0 {
                1.0 + (PI / (2.0 * tau)).sqrt()
            } else if nu < 0.0 {
                (1.0 - nu / tau) * (1.0 + (2.0 / (tau - 2.0 * nu)).sqrt())
            } else {
                let theta = nu / (1.0 + nu.powf(-0.5));
                (1.0 + (4.0 * tau + 3.0 * nu).powf(-0.5)).powi(2) * (-theta / tau).exp()
            }
        };
        let area = PI * a * a;
        let (electrons, ions) = (mean_speed(5.48579909e-4, t), mean_speed(24.305, t));
        Plasma {
            ladder,
            electron: Box::new(move |z| 0.6 * area * electrons * focusing(-f64::from(z))),
            ion: Box::new(move |z| area * ions * focusing(f64::from(z))),
            recombination: 2.78e-12 * (t / 300.0).powf(-0.68),
            zeta: place.zeta_cosmic,
            metal,
            dust: place.n_h * place.dust_area / area,
        }
    }

    /// Shares of the grain charges: as many grains go up a rung as go down.
    fn shares(&self, electrons: f64, ions: f64) -> Vec<(i32, f64)> {
        let mut shares = vec![(-self.ladder, 1.0)];
        for z in -self.ladder..self.ladder {
            let up = (self.ion)(z) * ions;
            let down = (self.electron)(z + 1) * electrons;
            let below = shares.last().map_or(1.0, |s| s.1);
            shares.push((z + 1, below * up / down));
        }
        let sum: f64 = shares.iter().map(|s| s.1).sum();
        shares
            .into_iter()
            .map(|(z, share)| (z, share / sum))
            .collect()
    }

    fn mean_charge(&self, electrons: f64, ions: f64) -> f64 {
        self.shares(electrons, ions)
            .iter()
            .map(|(z, share)| f64::from(*z) * share)
            .sum()
    }

    /// The electrons that make `ions` and grains neutral together.
    fn electrons(&self, ions: f64) -> f64 {
        root(|e| ions - e + self.dust * self.mean_charge(e, ions))
    }

    /// Ions at which ionisation equals recombination with electrons and on grains.
    fn ions(&self) -> f64 {
        root(|ions| {
            let electrons = self.electrons(ions);
            let on_grains: f64 = self
                .shares(electrons, ions)
                .iter()
                .filter(|(z, _)| *z < self.ladder)
                .map(|(z, share)| (self.ion)(*z) * share * self.dust)
                .sum();
            self.zeta * (self.metal - ions) - ions * (self.recombination * electrons + on_grains)
        })
    }
}

/// Where a function that falls from above zero to below it crosses, by halving the logarithm.
fn root(falling: impl Fn(f64) -> f64) -> f64 {
    let (mut low, mut high) = (1e-30f64, 1e10f64);
    for _ in 0..200 {
        let middle = (low * high).sqrt();
        if falling(middle) > 0.0 {
            low = middle
        } else {
            high = middle
        }
    }
    (low * high).sqrt()
}

/// Fails if a rung of the ladder, a focusing factor or a sticking probability is wrong, or charge
/// leaks: steady electrons, ions and mean grain charge against a direct solution of the balance
/// equations (Draine & Sutin 1987, ApJ 320, 803), where electrons outnumber grains and where grains
/// take nearly all of them, with ladders of three and of five states.
#[test]
fn grains_charge_as_the_balance_equations_say() {
    let mut means = Vec::new();
    for (n_h, t, metal, ladder) in [
        (1e5, 20.0, 1e-6, 1),
        (1e12, 50.0, 1e-8, 1),
        (1e5, 20.0, 1e-6, 2),
        (1e9, 300.0, 1e-9, 2),
    ] {
        let grains = GrainOptions {
            charge_states: ladder,
            ..Default::default()
        };
        let setup = Setup::new(PLASMA, &grains);
        let place = Conditions {
            zeta_cosmic: 1e-15,
            ..dark(n_h, t)
        };
        let plasma = Plasma::new(&place, metal * n_h, ladder);
        let ions = plasma.ions();
        let electrons = plasma.electrons(ions);
        let names = ["e-", "Mg+", "dust-", "dust", "dust+"];
        let what = format!("n_H = {n_h:e}, {t} K, up to {ladder} charges");
        let end = setup.run(&place, &[("Mg", metal)], &[1e9 * YEAR], names)[0];
        close(end[0] * n_h, electrons, 1e-5, &format!("electrons, {what}"));
        close(end[1] * n_h, ions, 1e-5, &format!("ions, {what}"));
        let shares = plasma.shares(electrons, ions);
        for (name, z, x) in [
            ("dust-", -1, end[2]),
            ("dust", 0, end[3]),
            ("dust+", 1, end[4]),
        ] {
            let share = shares.iter().find(|s| s.0 == z).map_or(0.0, |s| s.1);
            close(
                x / place.dust_abundance(),
                share,
                1e-5,
                &format!("{name}, {what}"),
            );
        }
        means.push((plasma.mean_charge(electrons, ions), electrons / plasma.dust));
    }
    // The rows are what the test says: negative grains under many electrons, and hardly charged
    // ones that hold most of what there is.
    assert!(means[0].0 < -0.3 && means[0].1 > 10.0, "{means:?}");
    assert!(means[1].0.abs() < 0.1 && means[1].1 < 1.0, "{means:?}");
}

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
