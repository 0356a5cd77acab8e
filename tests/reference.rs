//! The engine against the independent Python implementation in tests/reference, which reads the
//! same network and case files and was written from the formulas.
//!
//! Needs the tests' Python environment: `sh tools/test` sets it up and names it in
//! FROSTCLOCK_PYTHON.

use frostclock::case;
use frostclock::kinetics::Falloff;
use frostclock::network::model::Cause;
use frostclock::rates::cell_rates;
use frostclock::run::{self, Options, Prepared, signals::StopFlag};
use std::path::{Path, PathBuf};
use std::process::Command;

fn top() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

fn prepared(case_file: &str) -> Prepared {
    let case = case::open(&top().join("tests/reference").join(case_file));
    Prepared::new(&case.unwrap_or_else(|e| panic!("{e}"))).unwrap_or_else(|e| panic!("{e}"))
}

/// Runs `python -m reference.check ARGUMENTS`; fails unless it agrees.
fn check(arguments: &[&str]) {
    python(&[&["-m", "reference.check"], arguments].concat());
}

/// Runs the tests' Python in tests/ and prints its report; fails unless it ends with 0.
fn python(arguments: &[&str]) {
    let python = std::env::var_os("FROSTCLOCK_PYTHON")
        .expect("FROSTCLOCK_PYTHON names no Python: run `sh tools/test`, which sets it up");
    let output = Command::new(python)
        .args(arguments)
        .current_dir(top().join("tests"))
        .output()
        .expect("Python starts");
    let report = String::from_utf8_lossy(&output.stdout);
    let errors = String::from_utf8_lossy(&output.stderr);
    assert!(
        output.status.success(),
        "the reference disagrees:\n{report}\n{errors}"
    );
    println!("{report}");
}

/// Every coefficient of every cell with its stoichiometry, as the reference expects it.
fn dump(run: &Prepared, path: &Path) {
    let mut out = csv::Writer::from_path(path).unwrap();
    let heads = [
        "cell",
        "reaction",
        "change",
        "consumed",
        "products",
        "coefficient",
        "low",
        "high",
        "log_centre",
    ];
    out.write_record(heads).unwrap();
    for (cell, conditions) in run.disk.cells.iter().enumerate() {
        let rates = cell_rates(&run.chemistry, &run.disk.fields, conditions, &run.setting);
        let mut falloffs = rates.coefficients.falloff.iter();
        for (r, reaction) in run.chemistry.reactions.iter().enumerate() {
            let side = |ids: &[usize]| {
                let names = ids
                    .iter()
                    .map(|id| run.chemistry.species[*id].name.as_str());
                names.collect::<Vec<_>>().join(" + ")
            };
            let collision = match &reaction.cause {
                Cause::Reverse { forward, .. } => forward,
                other => other,
            };
            let is_falloff = matches!(collision, Cause::Falloff { .. });
            let limits = is_falloff.then(|| falloffs.next().unwrap());
            let number = |pick: fn(&Falloff) -> f64| {
                limits.map_or(String::new(), |f| format!("{:e}", pick(f)))
            };
            out.write_record([
                cell.to_string(),
                r.to_string(),
                reaction.change.clone(),
                side(&reaction.consumed),
                side(&reaction.products),
                format!("{:e}", rates.coefficients.k[r]),
                number(|f| f.low),
                number(|f| f.high),
                number(|f| f.log_centre),
            ])
            .unwrap();
        }
    }
    out.flush().unwrap();
}

fn text(path: &Path) -> String {
    path.display().to_string()
}

/// Integrates a case and gives its run file in `folder`.
fn integrated(run: &Prepared, folder: &Path) -> PathBuf {
    let output = folder.join("run.h5");
    let options = Options {
        threads: 2,
        fresh: true,
        retry: false,
    };
    let bars = indicatif::MultiProgress::with_draw_target(indicatif::ProgressDrawTarget::hidden());
    let summary = run::run(run, &output, &options, &bars, &StopFlag::new()).unwrap();
    assert_eq!(summary.failed, 0);
    output
}

/// Fails if any rate law, unit, mass, product or the expansion differs between the two
/// implementations: 1e-10 relative for each reaction in three very different cells.
#[test]
fn coefficients_agree_in_three_very_different_cells() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("coefficients.csv");
    dump(&prepared("three_cells.yaml"), &file);
    let case = text(&top().join("tests/reference/three_cells.yaml"));
    check(&["coefficients", &case, "--rust", &text(&file)]);
    // The comparison is worth something only if it sees errors: 49 planted ones, each found.
    python(&["-m", "reference.planted", &case, "--rust", &text(&file)]);
}

/// Fails if the integration is off: better than 1 % at five times for neutrals above 1e-12 and
/// charged species above 1e-15, against SciPy.
#[test]
fn abundances_agree_in_three_very_different_cells() {
    let folder = tempfile::tempdir().unwrap();
    let output = integrated(&prepared("three_cells.yaml"), folder.path());
    let case = text(&top().join("tests/reference/three_cells.yaml"));
    check(&["abundances", &case, &text(&output)]);
}

/// The same for the whole standard network in the four cells of a shipped case.
#[test]
fn coefficients_of_the_standard_network_agree() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("coefficients.csv");
    let case = top().join("cases/four-places.yaml");
    let run = Prepared::new(&case::open(&case).unwrap()).unwrap_or_else(|e| panic!("{e}"));
    dump(&run, &file);
    check(&["coefficients", &text(&case), "--rust", &text(&file)]);
}

/// Fails if the reader understands the standard network other than its tables mean it: the
/// gas-phase boxes of closed_form_checks.md section 9 (an integration of the same tables by other
/// code; table in tests/reference/section9_table.csv), within 1 %.
#[test]
fn gas_phase_boxes_of_section_9() {
    let folder = tempfile::tempdir().unwrap();
    let network = folder.path().join("section9_network.yaml");
    let standard = text(&top().join("networks/standard.yaml"));
    python(&[
        "-m",
        "reference.section9",
        "strip",
        &standard,
        &text(&network),
    ]);
    for file in ["section9.yaml", "section9.csv"] {
        std::fs::copy(
            top().join("tests/reference").join(file),
            folder.path().join(file),
        )
        .unwrap();
    }
    let case = case::open(&folder.path().join("section9.yaml")).unwrap_or_else(|e| panic!("{e}"));
    let run = Prepared::new(&case).unwrap_or_else(|e| panic!("{e}"));
    let output = integrated(&run, folder.path());
    python(&["-m", "reference.section9", "run", &text(&output)]);
}
