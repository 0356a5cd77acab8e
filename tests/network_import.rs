//! Rate tables of other people's layouts: three made-up tables with numbers of the fact tables are
//! imported by the command, read back, and their coefficients compared with hand values; planted
//! mistakes are listed with their lines; wrong mappings are named and harm nothing.

#[path = "network_import/example.rs"]
mod example;
#[path = "network_import/mistakes.rs"]
mod mistakes;
mod support;

use frostclock::network::model::{Cause, Reaction};
use frostclock::network::{self, Network, expand};
use frostclock::rates::two_body;
use std::collections::BTreeMap;
use std::fmt::Write;
use std::fs;
use std::path::Path;
use support::{Ended, csv, folder_with, frostclock, names, succeeds};
use tempfile::TempDir;

/// A table imported, with the rows that were not mapped by line.
struct Imported {
    folder: TempDir,
    ended: Ended,
    network: Network,
    reactions: Vec<Reaction>,
    rejected: BTreeMap<String, Vec<String>>,
}

fn imported(table: &str, mapping: &str) -> Imported {
    let data = |name: &str| format!("tests/data/import/{name}");
    let folder = folder_with(&[&data(table), &data(mapping)]);
    imported_in(folder, table, mapping)
}

fn imported_in(folder: TempDir, table: &str, mapping: &str) -> Imported {
    let arguments = ["network", "import", table, "--map", mapping];
    let more = ["--output", "new.yaml", "--rejected", "left.csv"];
    let ended = succeeds(folder.path(), &[&arguments[..], &more[..]].concat());
    let text = fs::read_to_string(folder.path().join("new.yaml")).expect("written");
    let network = network::read(Path::new("new.yaml"), &text)
        .unwrap_or_else(|errors| panic!("{errors:?}\n{text}"));
    let reactions = expand(&network, &Default::default())
        .expect("expanded")
        .reactions;
    let (heads, rejected) = csv(&folder.path().join("left.csv"));
    assert_eq!(heads, ["line", "text", "reason"]);
    Imported {
        folder,
        ended,
        network,
        reactions,
        rejected,
    }
}

impl Imported {
    /// Sum of the coefficients of a change at T (K), by the laws that a run uses.
    fn k(&self, change: &str, t: f64) -> f64 {
        let same: Vec<_> = self
            .reactions
            .iter()
            .filter(|r| r.change == change)
            .collect();
        assert!(!same.is_empty(), "no {change}");
        same.iter()
            .map(|r| match &r.cause {
                Cause::PowerLaw { pieces, below } | Cause::ThirdBody { pieces, below } => {
                    two_body::pieces(pieces, *below, t).0
                }
                Cause::Capture {
                    langevin, x_300k, ..
                } => two_body::capture(*langevin, *x_300k, t),
                other => panic!("{change}: {other:?}"),
            })
            .sum()
    }

    fn assert_k(&self, change: &str, t: f64, expected: f64, tolerance: f64) {
        let k = self.k(change, t);
        assert!(
            (k / expected - 1.0).abs() < tolerance,
            "{change} at {t} K: {k:e}, not {expected:e}"
        );
    }

    /// The cause of the only reaction with this change and this kind of cause.
    fn cause(&self, change: &str, kind: fn(&Cause) -> bool) -> &Cause {
        let same: Vec<_> = self
            .reactions
            .iter()
            .filter(|r| r.change == change && kind(&r.cause))
            .collect();
        assert_eq!(same.len(), 1, "{change}");
        &same[0].cause
    }

    /// Every planted row and no other is listed: line, its text, what the reason says.
    fn assert_rejected(&self, planted: &[(usize, &str)], table: &str) {
        let listed: Vec<usize> = self
            .rejected
            .keys()
            .map(|line| line.parse().expect("a line"))
            .collect();
        let mut expected: Vec<usize> = planted.iter().map(|(line, _)| *line).collect();
        expected.sort_by_key(usize::to_string);
        assert_eq!(listed, expected);
        let text = fs::read_to_string(self.folder.path().join(table)).expect("read");
        let lines: Vec<&str> = text.lines().collect();
        for (line, said) in planted {
            let row = &self.rejected[&line.to_string()];
            assert_eq!(row[1], lines[line - 1], "line {line}");
            assert!(
                row[2].contains(said),
                "line {line}: {} instead of {said}",
                row[2]
            );
        }
    }
}

/// If it failed, a comma-separated table would give other rates than it holds.
#[test]
fn a_table_of_commas_with_a_header() {
    let all = imported("comma.csv", "comma.yaml");
    // By hand from the rows: langevin (0.4767 x + 0.62) with x = 5.768 sqrt(300/30).
    all.assert_k("C+ + OH -> H+ + CO", 30.0, 2.1284e-9, 1e-4);
    // 2.38459 kJ/mol are 286.8 K.
    all.assert_k("C2H + NO -> CN + HCO", 500.0, 1.3101e-11, 1e-4);
    // Two rows in the wrong order are the pieces of one entry.
    all.assert_k("OH + H2 -> H2O + H", 100.0, 1.1484e-16, 1e-4);
    all.assert_k("OH + H2 -> H2O + H", 1000.0, 2.2752e-12, 1e-4);
    let light = all.cause("H2O -> O + H + H", |c| matches!(c, Cause::Light { .. }));
    assert!(
        matches!(light, Cause::Light { rates, extinction, .. } if rates[0] == Some(6.17e-11) && *extinction == 2.65)
    );
    // 6.5e-18 s^-1 at 1.3e-17; 398.15 over 1 - albedo = 0.5.
    let direct = all.cause("He -> He+ + e-", |c| matches!(c, Cause::Ionisation { .. }));
    assert!(matches!(direct, Cause::Ionisation { value } if *value == 0.5));
    let glow = all.cause("H2O -> OH + H", |c| {
        matches!(c, Cause::SecondaryLight { .. })
    });
    assert!(matches!(glow, Cause::SecondaryLight { value } if *value == 796.3));
    let line = &all.network.file.gas[4];
    assert_eq!(
        (line.change.as_str(), line.within),
        ("C2H + NO -> CN + HCO", Some(2.0))
    );
    let citation = &all.network.file.sources[&line.source];
    assert!(
        citation.starts_with("Glarborg, Miller, Ruscic & Klippenstein 2018"),
        "{citation}"
    );
    assert_eq!(line.note, "comma.csv:11; 9");
    all.assert_rejected(
        &[
            (43, "1 H too many on the right"),
            (44, "unknown element `Xq`"),
            (45, "found the label `odd`"),
            (46, "found `1.2e-1O` in `coefficient`, expected a number"),
            (47, "found 8 cells, expected 14"),
            (48, "quote \" that is not closed"),
            (49, "the same change as line 20 in an overlapping range"),
            (50, "the same change as line 29, expected one row"),
            (51, "900 to 1200 K apart from that of line 7"),
            (52, "at_300K -1e-10"),
            (53, "formed on grains, which the dust block does"),
            (54, "valid [800, 10]"),
            (55, "`CO(ads)` (called `ice:CO` in the table)"),
            (56, "found no reactant"),
            (57, "found the label `two` and the marker `ray`"),
        ],
        "comma.csv",
    );
    for said in [
        "54 rows read, 39 mapped to 37 entries of 48 species: gas 13, capture 4, light 8, cosmic 12",
        "15 rows not mapped (1 as the mapping says), listed in left.csv",
        "wrote new.yaml",
    ] {
        assert!(
            all.ended.err.contains(said),
            "no `{said}` in\n{}",
            all.ended.err
        );
    }
    assert_eq!(all.ended.out, "");
}

/// If it failed, cells would be cut in the wrong places or markers taken for species.
#[test]
fn a_table_of_fixed_places_without_header() {
    let all = imported("fixed.txt", "fixed.yaml");
    all.assert_k("CN+ + e- -> N + C", 300.0, 3.4e-7, 1e-9);
    all.assert_k("H2O+ + Mg -> Mg+ + H2O", 77.0, 1.185e-9, 1e-9);
    // Held below 300 K: 4.182e-11 exp(155/300).
    all.assert_k("NH + OH -> HNO + H", 100.0, 7.0108e-11, 1e-4);
    let light = all.cause("O3 -> O2 + O", |c| matches!(c, Cause::Light { .. }));
    assert!(
        matches!(light, Cause::Light { rates, extinction, .. } if rates[0] == Some(1.87e-9) && *extinction == 2.23)
    );
    let direct = all.cause("C -> C+ + e-", |c| matches!(c, Cause::Ionisation { .. }));
    assert!(matches!(direct, Cause::Ionisation { value } if *value == 1.77));
    all.assert_rejected(
        &[
            (30, "`dust` (called `GRAIN` in the table)"),
            (31, "found nothing in `t1`"),
            (32, "found `x` in `class`, expected one of a, b, c, d"),
            (33, "goes on beyond the places 100 to 105 of `t2`"),
            (34, "found 1 reactant, expected 2"),
            (35, "1 H too few, 1 He too many"),
            (36, "found a tab"),
        ],
        "fixed.txt",
    );
}

/// If it failed, decimal commas, logarithms, equations or several rows of a change were misread.
#[test]
fn a_table_of_semicolons_with_quoted_equations() {
    let all = imported("semicolon.csv", "semicolon.yaml");
    // Logarithms of the table have five digits: 5e-5 of the coefficient.
    let methanol = "OH + CH3OH -> CH3O + H2O";
    all.assert_k(methanol, 30.0, 6.0513e-11, 2e-4);
    all.assert_k(methanol, 150.0, 1.6179e-12, 2e-4);
    all.assert_k(methanol, 600.0, 1.0268e-12, 2e-4);
    // The upper row starts at 301 K in the table; between the ranges nothing may be missing.
    all.assert_k("CO + OH -> CO2 + H", 600.0, 1.9033e-13, 2e-4);
    all.assert_k("CO + OH -> CO2 + H", 300.5, 1.3e-13, 2e-3);
    all.assert_k("H + H + H2 -> H2 + H2", 100.0, 1.7399e-32, 2e-4);
    assert_eq!(all.k("HCO -> H + CO", 200.0), 0.0);
    all.assert_k("HCO -> H + CO", 600.0, 1.4429e-16, 2e-4);
    // The row that says it adds: 5.72e-19 exp(-51/300) + 10^-18.5.
    all.assert_k("C + N -> CN", 300.0, 7.9880e-19, 2e-4);
    let adds: Vec<bool> = all.network.file.gas.iter().map(|line| line.adds).collect();
    assert_eq!(adds.iter().filter(|adds| **adds).count(), 1);
    all.assert_rejected(
        &[
            (26, "the same change as line 18 in an overlapping range"),
            (27, "expected `=` between two sides"),
            (28, "found `10..800` in `Bereich`"),
            (29, "found `-10.5` in `lg A`"),
            (30, "found no source"),
            (31, "found `twice` behind a quoted cell"),
            (32, "within 5e-1"),
        ],
        "semicolon.csv",
    );
}

const MOLECULES: &str = r#"
mapping: 1
network: small
table: {cells: delimited, delimiter: spaces, columns: [change, kind, a, b, c, d, e, share, ref]}
names: {markers: [hv]}
change: {equation: change, arrow: "=>", separator: "&"}
label: kind
laws:
  - {label: [dip], law: capture, polarisability: a, dipole: b, share: share}
  - {label: [pressure], law: falloff, low: {at_300K: a, slope: b}, high: {at_300K: c, slope: d, barrier: e}, centre: 0.6, adds: true}
  - {label: [arr], law: power_law, at_300K: {column: a, unit: cm^3 mol^-1 s^-1, times_columns: [share]}, slope: b, barrier: {column: c, unit: kcal/mol}, reference_temperature: 1}
  - {label: [sun], marker: hv, law: light, rate: a, extinction: b, spectra: {hot: {column: c, blank: 0}}}
valid: {low: 10, high: 1000}
below: hold
standing: estimated
source: {column: ref}
spectra: {hot: "a hot star"}
"#;

/// If it failed, the laws that the three tables lack (numbers of molecules, falloff, other spectra,
/// molar units, T^n without reference) would be written wrongly.
#[test]
fn the_other_laws_and_units() {
    let folder = tempfile::tempdir().expect("a folder");
    let table = "H3+&H2O=>H3O++H2 dip 1.45 1.855 0 0 0 1 x\n\
                 H3+&H2O=>H3O+&H2 dip 1.45 1.855 0 0 0 0.5 x\n\
                 OH&CH4=>H2O&CH3 arr 1.0e6 2.0 2.5 0 0 0.9 y\n\
                 O3&hv=>O2&O sun 1.87e-9 2.2 3.0e-10 0 0 1 y\n\
                 H&CH3=>CH4 arr 6.0e7 0 0 0 0 1 y\n\
                 H&CH3=>CH4 pressure 8.9e-29 -1.8 3.2e-10 0.133 2.54 1 z\n";
    fs::write(folder.path().join("t.txt"), table).expect("written");
    fs::write(folder.path().join("m.yaml"), MOLECULES).expect("written");
    let all = imported_in(folder, "t.txt", "m.yaml");
    // Half of the capture coefficient of the facts (closed_form_checks.md, section 2).
    all.assert_k("H3+ + H2O -> H3O+ + H2", 10.0, 0.5 * 2.5579e-8, 1e-3);
    all.assert_k("H3+ + H2O -> H3O+ + H2", 300.0, 0.5 * 5.5582e-9, 1e-3);
    // 0.9e6 T^2 exp(-2.5 kcal/mol / RT) cm^3 mol^-1 s^-1 at 400 K, R = 1.987204 cal/mol/K.
    let expected =
        0.9e6 * 400.0_f64.powi(2) * (-2500.0_f64 / (1.987_204 * 400.0)).exp() / 6.022_140_76e23;
    all.assert_k("OH + CH4 -> H2O + CH3", 400.0, expected, 1e-5);
    let light = all.cause("O3 -> O2 + O", |c| matches!(c, Cause::Light { .. }));
    assert!(
        matches!(light, Cause::Light { rates, .. } if rates[..] == [Some(1.87e-9), Some(3.0e-10)])
    );
    let falloff = all.cause("H + CH3 -> CH4", |c| matches!(c, Cause::Falloff { .. }));
    assert!(matches!(
        falloff,
        Cause::Falloff {
            low: [8.9e-29, -1.8, 0.0],
            high: [3.2e-10, 0.133, 2.54],
            centre: 0.6,
            ..
        }
    ));
    assert!(all.network.file.falloff[0].adds && !all.network.file.gas[0].adds);
    assert!(
        all.rejected["1"][2].contains("`H3O++H2`"),
        "{:?}",
        all.rejected["1"]
    );
    assert_eq!(all.rejected.len(), 1);
}

/// If it failed, a table of the usual size would take long enough to look hung.
#[test]
fn five_thousand_rows_take_a_moment() {
    let folder = folder_with(&["tests/data/import/comma.yaml"]);
    let mut table = String::from(
        "nr,first,second,out 1,out 2,out 3,kind,coefficient,exponent,threshold (kJ/mol),from,to,error %,where from\n",
    );
    for i in 0..5000 {
        let (c, h) = (2 + i / 70, 2 + i % 70);
        writeln!(
            table,
            "{i},C{c}H{h}+,OH,C{c}H{h},OH+,none,two,1.0e-9,-0.5,{},10,800,50,\"Nobody, {}\"",
            i % 7,
            i % 50
        )
        .expect("written");
    }
    fs::write(folder.path().join("big.csv"), table).expect("written");
    let start = std::time::Instant::now();
    let ended = succeeds(
        folder.path(),
        &[
            "network",
            "import",
            "big.csv",
            "--map",
            "comma.yaml",
            "--output",
            "big.yaml",
        ],
    );
    let seconds = start.elapsed().as_secs_f64();
    println!("5000 rows in {seconds:.2} s");
    assert!(
        ended
            .err
            .contains("5000 rows read, 5000 mapped to 5000 entries"),
        "{}",
        ended.err
    );
    // The aim is 2 s in the release profile; this is a guard against quadratic work.
    assert!(seconds < 10.0, "{seconds} s");
    assert_eq!(names(folder.path()), ["big.csv", "big.yaml", "comma.yaml"]);
}

/// If it failed, the list would not reach the person, or --strict would let a bad table through.
#[test]
fn rows_that_are_not_mapped_are_listed_and_can_be_fatal() {
    let data = |name: &str| format!("tests/data/import/{name}");
    let folder = folder_with(&[&data("fixed.txt"), &data("fixed.yaml")]);
    let run = |more: &[&str]| {
        let arguments = [
            "network",
            "import",
            "fixed.txt",
            "--map",
            "fixed.yaml",
            "--output",
            "new.yaml",
        ];
        frostclock(folder.path(), &[&arguments[..], more].concat())
    };
    let strict = run(&["--strict"]);
    assert_eq!(strict.status, 2);
    assert!(strict.err.contains("fixed.txt: rows of the table: found 7 rows that cannot be mapped, expected none, with --strict"), "{}", strict.err);
    assert!(
        strict.out.contains("line 32: found `x` in `class`"),
        "{}",
        strict.out
    );
    assert_eq!(names(folder.path()), ["fixed.txt", "fixed.yaml"]);
    let listed = run(&[]);
    assert_eq!((listed.status, listed.out), (0, strict.out));
    // What exists is kept, unless told.
    let written = fs::read(folder.path().join("new.yaml")).expect("read");
    fs::write(folder.path().join("new.yaml"), "mine").expect("written");
    let again = run(&[]);
    assert_eq!(again.status, 2);
    assert!(
        again
            .err
            .contains("--output: found `new.yaml`, which exists, expected a new file"),
        "{}",
        again.err
    );
    assert_eq!(
        fs::read(folder.path().join("new.yaml")).expect("read"),
        b"mine"
    );
    assert_eq!(run(&["--force"]).status, 0);
    assert_eq!(
        fs::read(folder.path().join("new.yaml")).expect("read"),
        written
    );
}
