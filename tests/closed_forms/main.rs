//! Small networks whose course is known in closed form, through the real pipeline: text of a
//! network (or of a whole case) -> read -> expand -> rates -> integrate.
//!
//! Every integration also asserts the linear invariants: elements, charge, grains, the ice total.
//! Expected numbers are those of published formulas with constants written out here, not calls of
//! the engine's own rate laws; the tables quoted were evaluated beforehand from the same formulas
//! by other code.

mod cautions;
mod gas;
mod grains;
mod ices;
mod surface;

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
