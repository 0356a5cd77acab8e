//! The verbs `network check` and `show`, and the library under them: what they say, how they
//! end, and that the numbers they print are those of the laws.

mod support;

use frostclock::inquiry::{self, listing};
use frostclock::network::model::GrainOptions;
use frostclock::network::{Severity, expand};
use frostclock::rates::dust::accretion;
use support::{edit, folder_with, frostclock, rows, succeeds};
use tempfile::TempDir;

const AUDITED: &str = include_str!("data/audited.yaml");

/// The line of the flawless network that contains `text`.
fn line_of(text: &str) -> usize {
    let place = AUDITED.find(text).expect("it is there");
    AUDITED[..place].matches('\n').count() + 1
}

fn folder() -> TempDir {
    folder_with(&["tests/data/audited.yaml"])
}

// Scripts go by the exit status, people by the words.
#[test]
fn check_says_what_is_wrong_and_ends_by_severity() {
    let folder = folder();
    let file = folder.path().join("audited.yaml");
    let run = |arguments: &[&str]| frostclock(folder.path(), arguments);
    let clean = run(&["network", "check", "audited.yaml", "--strict"]);
    assert_eq!((clean.status, clean.err.as_str()), (0, ""));
    let last = |out: &str| out.lines().last().unwrap_or_default().to_string();
    assert_eq!(
        last(&clean.out),
        "audited.yaml: 0 errors, 0 warnings, 0 remarks"
    );
    assert!(
        clean.out.contains("20 lines: 5 evaluated (25 %), 2 measured (10 %), 11 recalled (55 %), 2 estimated (10 %)"),
        "{}",
        clean.out
    );
    edit(&file, "at_300K: 1.6e-9", "at_300K: 2.2e-9");
    let line = line_of("  - {change: O+ + H2");
    let doubtful = run(&["network", "check", "audited.yaml", "--csv", "found.csv"]);
    assert_eq!(doubtful.status, 0, "{}", doubtful.err);
    let said = format!("warnings:\naudited.yaml:{line}: O+ + H2 -> OH+ + H: 2.20e-9 cm^3 s^-1 at");
    assert!(doubtful.out.starts_with(&said), "{}", doubtful.out);
    assert!(
        doubtful
            .out
            .contains("; they react more often than they can meet\n")
    );
    let table = rows(&folder.path().join("found.csv"));
    assert_eq!(table.len(), 2);
    assert_eq!(
        table[0],
        ["severity", "file", "line", "entry", "what", "why"]
    );
    assert_eq!(
        table[1][..4],
        [
            "warning",
            "audited.yaml",
            &line.to_string(),
            "O+ + H2 -> OH+ + H"
        ]
    );
    assert_eq!(
        run(&["network", "check", "audited.yaml", "--strict"]).status,
        2
    );
    edit(&file, "OH+ + e- -> O + H,", "OH+ + e- -> O + H + H,");
    let wrong = run(&["network", "check", "audited.yaml"]);
    assert_eq!((wrong.status, wrong.err.as_str()), (2, ""));
    let said = "errors:\naudited.yaml:25: OH+ + e- -> O + H + H: found 1 H too many on the right";
    assert!(wrong.out.starts_with(said), "{}", wrong.out);
    let missing = run(&["network", "check", "nowhere.yaml"]);
    assert_eq!((missing.status, missing.out.as_str()), (2, ""));
    let said = "frostclock: nowhere.yaml: found no such file, expected a network file";
    assert!(missing.err.starts_with(said), "{}", missing.err);
    // The built-in one passes, whatever is remarked.
    let standard = succeeds(folder.path(), &["network", "check", "standard"]);
    assert!(last(&standard.out).starts_with("networks/standard.yaml: 0 errors, "));
}

// A coefficient in the wrong unit or conditions would be copied into a paper.
#[test]
fn shown_coefficients_are_those_of_the_laws() {
    let folder = folder();
    let asked = [
        "network",
        "show",
        "audited.yaml",
        "--T-gas",
        "40",
        "--T-dust",
        "20 K",
        "--n_H",
        "1e8",
        "--UV",
        "3",
        "--AV",
        "2",
        "--zeta",
        "5e-17",
        "--csv",
        "list.csv",
    ];
    succeeds(folder.path(), &asked);
    let table = rows(&folder.path().join("list.csv"));
    let column = |name: &str| {
        table[0]
            .iter()
            .position(|head| head == name)
            .expect("a column")
    };
    let value = |change: &str, cause: &str, unit: &str| -> [f64; 2] {
        let fits =
            |row: &&Vec<String>| row[column("reaction")] == change && row[column("cause")] == cause;
        let row = table
            .iter()
            .find(fits)
            .unwrap_or_else(|| panic!("no {change} by {cause}"));
        assert_eq!(row[column("unit")], unit, "{change}");
        ["coefficient", "in the state [s^-1]"]
            .map(|name| row[column(name)].parse().expect("a number"))
    };
    let close = |found: f64, expected: f64| {
        assert!(
            (found / expected - 1.0).abs() < 1e-9,
            "{found:e} instead of {expected:e}"
        );
    };
    // Power law, and the state per hydrogen nucleus.
    let [k, state] = value("OH+ + e- -> O + H", "two-body", "cm^3 s^-1");
    close(k, 6.3e-9 * (40.0f64 / 300.0).powf(-0.5));
    close(state, k * 1e8);
    // Troe with [M] = 0.6 n_H (Troe 1979; Gilbert, Luther & Troe 1983).
    let (low, high) = (4.4e-32 * 300.0 / 40.0, 1e-10);
    let p: f64 = low * 0.6e8 / high;
    let log_fc = 0.6f64.log10();
    let f = 10f64.powf(log_fc / (1.0 + (p.log10() / (0.75 - 1.27 * log_fc)).powi(2)));
    close(
        value("H + O -> OH", "falloff", "cm^3 s^-1")[0],
        high * p / (1.0 + p) * f,
    );
    // Light without shielding, cosmic rays, secondary light.
    close(
        value("OH -> O + H", "light", "s^-1")[0],
        3.0 * 3.9e-10 * (-4.4f64).exp(),
    );
    close(
        value("H -> H+ + e-", "ionising particles", "s^-1")[0],
        0.46 * 5e-17,
    );
    close(
        value("OH -> O + H", "secondary light", "s^-1")[0],
        500.0 * 5e-17,
    );
    // H2 formation without density; freeze-out with it, at the temperature of the gas.
    close(
        value("H + H -> H2 (on dust)", "H2 formation", "cm^3 s^-1")[0],
        3e-17 * 0.4f64.sqrt(),
    );
    close(
        value("O -> O(ads)", "freeze-out", "s^-1")[0],
        accretion(1.0, 15.999, 5.8575e-22, 1e8, 40.0),
    );
    // The dust is at 20 K.
    close(
        value("O(ads) -> O", "thermal desorption", "s^-1")[0],
        1e12 * (-80.0f64).exp(),
    );
    // Hopping (0.35 of the energy for atoms) of both partners over a covered layer; a quarter leaves.
    let hop = |energy: f64, mass: f64| {
        let nu = (2.0 * 1.5e15 * 1.380649e-16 * energy
            / (std::f64::consts::PI.powi(2) * mass * 1.66053906660e-24))
            .sqrt();
        nu * (-0.35 * energy / 20.0).exp()
    };
    let both = hop(400.0, 1.008) + hop(1600.0, 15.999);
    let [k, state] = value(
        "H(ads) + O(ads) -> OH(ads)",
        "ice surface",
        "s^-1 per layer",
    );
    close(k, 0.75 * both);
    close(state, k / (4.0 * 5.8575e-22 * 1.5e15));
    // All reactions, the largest first, one unit after the other.
    assert_eq!(table.len(), 1 + 42);
    for pair in table[1..].windows(2) {
        let number = |row: &Vec<String>| row[column("coefficient")].parse::<f64>().expect("one");
        if pair[0][column("unit")] == pair[1][column("unit")] {
            assert!(number(&pair[0]) >= number(&pair[1]), "{pair:?}");
        }
    }
}

// A filter that lost a reaction, or a mark that is missing, would mislead without a trace.
#[test]
fn show_filters_and_marks() {
    let folder = folder();
    let changes = |arguments: &[&str]| -> Vec<String> {
        let mut all = vec!["network", "show", "audited.yaml", "--csv", "list.csv"];
        all.extend(arguments);
        succeeds(folder.path(), &all);
        let table = rows(&folder.path().join("list.csv"));
        table[1..].iter().map(|row| row[1].clone()).collect()
    };
    // In the order of the file.
    assert_eq!(
        changes(&["--forms", "OH", "--sort", "file"]),
        [
            "O + H2 -> OH + H",
            "H + O -> OH",
            "OH(ads) -> OH",
            "OH(ads) -> OH",
            "OH(ads) -> OH",
            "H(ads) + O(ads) -> OH"
        ]
    );
    assert_eq!(
        changes(&["--destroys", "O+, He+", "--species", "e-", "--sort", "file"]),
        ["O+ + e- -> O", "He+ + e- -> He"]
    );
    // H2 on grains takes H though its rate law has it once; a catalyst is not destroyed.
    assert!(changes(&["--destroys", "H"]).contains(&"H + H -> H2 (on dust)".to_string()));
    assert_eq!(
        changes(&["--species", "OH+", "--destroys", "H2"]),
        ["O+ + H2 -> OH+ + H"]
    );
    let said = |arguments: &[&str]| {
        let mut all = vec!["network", "show", "audited.yaml"];
        all.extend(arguments);
        succeeds(folder.path(), &all).out
    };
    let cold = said(&["--T", "100"]);
    for mark in [
        "below 200 K: held",
        "below 300 K: zero",
        "42 reactions of 42, 2 outside",
    ] {
        assert!(cold.contains(mark), "no `{mark}` in\n{cold}");
    }
    let hot = said(&["--T", "3000", "--spectrum", "black_body_4000K"]);
    for mark in [
        "above 300 K: held",
        "above 2000 K: held",
        "no rate in this spectrum: Draine",
    ] {
        assert!(hot.contains(mark), "no `{mark}` in\n{hot}");
    }
    let pure = said(&["--binding", "pure", "--species", "O(ads)", "--T", "20"]);
    assert!(pure.starts_with("audited: T_gas 20 K, T_dust 20 K, n_H 1e6 cm^-3, draine UV 1"));
}

// Wrong conditions must stop, not become others.
#[test]
fn show_refuses_wrong_conditions() {
    let folder = folder();
    for (arguments, said) in [
        (
            ["--T", "20 pc"],
            "--T: found `20 pc`, expected a temperature in K; a plain number is in K",
        ),
        (
            ["--T", "0"],
            "--T: found `0`, expected a temperature above 0",
        ),
        (
            ["--T-dust", "nan"],
            "--T-dust: found `nan`, expected a temperature",
        ),
        (
            ["--n-H", "-1"],
            "--n-H: found `-1`, expected a number density above 0",
        ),
        (
            ["--UV", "-0.1"],
            "--UV: found `-0.1`, expected a radiation field strength not below 0",
        ),
        (
            ["--zeta", "1e999"],
            "--zeta: found `1e999`, expected a rate",
        ),
        (
            ["--spectrum", "sun"],
            "--spectrum: found `sun`, expected one of draine, black_body_4000K",
        ),
        (
            ["--species", "oh"],
            "--species: found `oh`, expected a species of the network audited, such as OH, OH(ads), OH+",
        ),
        (
            ["--forms", ","],
            "--forms: found an empty list, expected names separated by commas",
        ),
    ] {
        let mut all = vec!["network", "show", "audited.yaml"];
        all.extend(arguments);
        let ended = frostclock(folder.path(), &all);
        assert_eq!((ended.status, ended.out.as_str()), (2, ""), "{arguments:?}");
        let said = format!("frostclock: {said}");
        assert!(ended.err.starts_with(&said), "{}", ended.err);
    }
}

// What the listing is asked without the command: the same conditions, the same filter.
#[test]
fn the_library_lists_what_the_command_shows() {
    let network = inquiry::open("standard").expect("built in");
    let chemistry = expand(&network, &GrainOptions::default()).expect("expands");
    let wanted = listing::species(&chemistry, "--species", "N2H+").expect("known");
    let filter = listing::Filter {
        destroys: wanted,
        ..listing::Filter::default()
    };
    let rows = listing::list(
        &chemistry,
        &listing::Asked::default(),
        &filter,
        listing::Order::Coefficient,
    )
    .expect("a list");
    assert!(rows.len() > 5);
    for row in &rows {
        let reaction = &chemistry.reactions[row.reaction];
        assert!(reaction.change.starts_with("N2H+ + ") || reaction.change.contains(" + N2H+ ->"));
        assert!(row.value.is_finite() && row.value >= 0.0);
    }
    assert!(
        network
            .audit()
            .iter()
            .all(|f| f.severity != Severity::Error)
    );
}
