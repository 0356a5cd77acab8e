//! Hot closed boxes in which every reaction is reversible must end at the Gibbs minimum, which
//! tests/reference/gibbs.py finds from the polynomials alone.
//!
//! Needs the tests' Python environment: `sh tools/test` sets it up and names it in
//! FROSTCLOCK_PYTHON.

use frostclock::case;
use frostclock::run::{self, Options, Prepared, signals::StopFlag};
use frostclock::store;
use std::path::Path;
use std::process::Command;

/// Runs a case of tests/reference and compares its end with the Gibbs minimum.
fn reaches_the_minimum(case_file: &str) {
    let top = Path::new(env!("CARGO_MANIFEST_DIR"));
    let case = case::open(&top.join("tests/reference").join(case_file));
    let case = case.unwrap_or_else(|e| panic!("{e}"));
    let prepared = Prepared::new(&case).unwrap_or_else(|e| panic!("{e}"));
    let reactions = &prepared.chemistry.reactions;
    assert_eq!(reactions.len() % 2, 0, "every reaction and its reverse");

    let folder = tempfile::tempdir().unwrap();
    let output = folder.path().join("run.h5");
    let options = Options {
        threads: 2,
        fresh: true,
        retry: false,
    };
    let bars = indicatif::MultiProgress::with_draw_target(indicatif::ProgressDrawTarget::hidden());
    let summary = run::run(&prepared, &output, &options, &bars, &StopFlag::new()).unwrap();
    assert_eq!(summary.failed, 0);

    // A run file carries everything: the polynomials too, and they decide its hash.
    let stored = store::open(&output).unwrap();
    let header = stored.header();
    assert_eq!(header.thermo_text, case.thermo_text);
    assert!(header.thermo_text.contains("polynomials:"));
    let mut other = header.clone();
    other.thermo_text.push(' ');
    assert_ne!(other.input_hash(), header.input_hash());

    let python = std::env::var_os("FROSTCLOCK_PYTHON")
        .expect("FROSTCLOCK_PYTHON names no Python: run `sh tools/test`, which sets it up");
    let ended = Command::new(python)
        .args(["-m", "reference.gibbs"])
        .arg(&output)
        .current_dir(top.join("tests"))
        .output()
        .expect("Python starts");
    let report = String::from_utf8_lossy(&ended.stdout);
    let errors = String::from_utf8_lossy(&ended.stderr);
    assert!(
        ended.status.success(),
        "not at the Gibbs minimum:\n{report}\n{errors}"
    );
    println!("{report}");
}

/// Fails if any reverse coefficient is off, in any group, at 1500, 2000 or 2500 K and 1e14 or 1e17
/// cm^-3: then different routes want different equilibria, or all want the wrong one.
#[test]
fn a_box_rich_in_oxygen_ends_at_the_gibbs_minimum() {
    reaches_the_minimum("gibbs_oxygen.yaml");
}

/// The same with more carbon than oxygen: HCN, C2H2, CH4 and CN are main species then.
#[test]
fn a_box_rich_in_carbon_ends_at_the_gibbs_minimum() {
    reaches_the_minimum("gibbs_carbon.yaml");
}
