//! Whole case files: what is read, what is refused and how the errors point.

use super::*;
use crate::disk::table;
use std::collections::HashMap;

const NETWORK: &str = "network: tiny\n";
const TABLE: &str = "\
# three places
radius [au],height [au],n_H [cm^-3],T_gas [K],UV_sky [Habing],AV_sky [mag],zeta_cosmic [s^-1],grain_radius [um],dust_area [cm^2],N_CO_sky [cm^-2],shield_N2_sky [1]
1,0.5,1e9,20,1.7,2,1.3e-17,0.2,2.92875e-22,1e15,0.25
2,0.0,1e10,30,3.4,4,1.0e-17,0.2,2.92875e-22,2e15,
";

fn file_set(extra: &[(&str, &str)]) -> HashMap<PathBuf, String> {
    [("dir/tiny.yaml", NETWORK), ("dir/cells.csv", TABLE)]
        .iter()
        .chain(extra)
        .map(|(path, text)| (PathBuf::from(path), text.to_string()))
        .collect()
}

fn read_case(text: &str, extra: &[(&str, &str)]) -> Result<Case, Failure> {
    let files = file_set(extra);
    read(Path::new("dir/x.yaml"), text, &|path| {
        files
            .get(path)
            .cloned()
            .ok_or_else(|| io::Error::from(io::ErrorKind::NotFound))
    })
}

fn errors(text: &str, extra: &[(&str, &str)]) -> Vec<InputError> {
    match read_case(text, extra) {
        Err(Failure::Input(errors)) => errors,
        other => panic!("{text}\nshould be wrong input, not {other:?}"),
    }
}

const SMALL: &str = "\
title: t
network: tiny.yaml
disk: {table: cells.csv}
start: {composition: atoms}
clock: {until: 1 Myr, first: 1 yr, per_decade: 10}
";

const RECIPE: &str = "\
title: 'with \"quotes\", a \\ and: colons'
network: tiny.yaml
disk:
  recipe:
    star: {mass: 1 Msun}
    gas: {mass: 0.02 Msun, cutoff_radius: 80 au}
    temperature: {midplane: 20 K, surface: 60 K}
    radii: {from: 1 au, to: 100 au, count: 3}
    heights: {up_to: 6, count: 4}
    light: {star: {strength: 300 Habing, spectrum: black_body_4000K}}
    ionisation: {xrays: {luminosity: 1.0e30 erg/s, hardness: 5 keV}}
  assumed_columns: {CO: 1.0e-4, HD: 1.5e-5}
start:
  abundances: {H2: 0.5, \"NO\": 1.0e-9}
clock: {at: [10 yr, 1 kyr]}
grains: {charge_states: 2, binding: pure, hop_ratio: {atoms: 0.55}, site_density: 1.0e15 cm^-2}
gas: {colliders: 0.6}
";

/// The values a run is made of, and the defaults stated where the case is silent.
#[test]
fn a_small_case_gets_its_defaults_and_says_so() {
    let case = read_case(SMALL, &[]).unwrap();
    assert_eq!(case.network_text, NETWORK);
    assert_eq!(case.output, PathBuf::from("dir/x.h5"));
    assert_eq!((case.relative, case.smallest), (1.0e-5, 1.0e-25));
    assert_eq!((case.turbulence, case.colliders), (2.0e4, None));
    assert_eq!(case.grains, GrainOptions::default());
    assert_eq!(case.snapshots.len(), 62);
    assert_eq!(case.snapshots[1], 3.15576e7);
    assert!((case.snapshots[61] / 3.15576e13 - 1.0).abs() < 1e-15);
    let notes = case.notes.join("\n");
    for stated in [
        "accuracy: taken by default: relative 1.0e-5, smallest 1.0e-25",
        "output: taken by default: x.h5",
        "no T_dust, taken as T_gas",
        "no zeta_xray, taken as 0",
        "no column of H2 for sky, taken as 0.5 N_H",
        "gas: taken by default: turbulence 0.2 km/s",
    ] {
        assert!(notes.contains(stated), "`{stated}` is not in\n{notes}");
    }
    assert!(!notes.contains("no column of CO"), "{notes}");
}

/// Units, defaults and the columns that follow from A_V.
#[test]
fn the_cells_of_a_table_are_in_working_units() {
    let disk = read_case(SMALL, &[]).unwrap().disk;
    let cell = &disk.cells[0];
    let light = &cell.light[0];
    assert!((light.strength - 1.0).abs() < 1e-15);
    assert!((cell.grain_radius - 2.0e-5).abs() < 1e-20);
    assert_eq!(
        (cell.t_dust, cell.zeta_xray, cell.zeta_nuclides),
        (20.0, 0.0, 0.0)
    );
    // Half of the dust: the same A_V stands for twice the gas, half of its nuclei in each H2.
    assert!((light.columns[0] / (0.5 * 1.87e21 * 2.0 * 2.0) - 1.0).abs() < 1e-12);
    assert_eq!(
        (disk.column_species[1].as_str(), light.columns[1]),
        ("CO", 1.0e15)
    );
    assert_eq!(light.shields, [None, None, Some(0.25), None]);
    assert_eq!(disk.cells[1].light[0].shields, [None; 4]);
}

/// What a run stores must give the same run again: bit for bit, from either kind of disk.
#[test]
fn a_resolved_case_reads_as_itself() {
    for text in [SMALL, RECIPE] {
        let case = read_case(text, &[]).unwrap();
        let again = read_case(&case.resolved, &[]).unwrap();
        assert_eq!(again.resolved, case.resolved);
        assert_eq!(again.disk, case.disk);
        assert_eq!(again.snapshots, case.snapshots);
        assert_eq!(again.grains, case.grains);
        assert_eq!(
            (again.colliders, again.turbulence),
            (case.colliders, case.turbulence)
        );
        assert_eq!(again.title, case.title);
        assert_eq!(again.fingerprint(), case.fingerprint());
        assert!(
            !again.notes.iter().any(|note| note.contains("by default")),
            "{:?}",
            again.notes
        );
    }
    // The same words on a disk of other cells are another run.
    let changed = TABLE.replace("1e9", "2e9");
    let other = read_case(SMALL, &[("dir/cells.csv", &changed)]).unwrap();
    assert_ne!(
        other.fingerprint(),
        read_case(SMALL, &[]).unwrap().fingerprint()
    );
}

/// A recipe's disk handed on as a table (to Python, to users) must be the same disk.
#[test]
fn tables_are_written_and_read_bit_for_bit() {
    for text in [SMALL, RECIPE] {
        let disk = read_case(text, &[]).unwrap().disk;
        let mut written = Vec::new();
        write_table(&disk, &mut written).unwrap();
        let written = String::from_utf8(written).unwrap();
        let assumed: Vec<(String, f64)> = disk
            .column_species
            .iter()
            .map(|name| (name.clone(), 0.0))
            .collect();
        let (again, notes) =
            table::read(Path::new("again.csv"), &written, &disk.fields, &assumed).unwrap();
        assert_eq!(again, disk);
        assert!(notes.is_empty(), "{notes:?}");
    }
}

/// Everything a user can mistype in a case, with the line it must be reported on.
#[test]
fn wrong_cases_are_refused_where_they_are_wrong() {
    let replaced = |old: &str, new: &str| {
        let base = if SMALL.contains(old) { SMALL } else { RECIPE };
        assert!(base.contains(old), "{old}");
        base.replace(old, new)
    };
    for (old, new, line, entry, says) in [
        ("1 Myr", "1", 5, "clock.until", "without a unit"),
        (
            "1 Myr",
            "1 au",
            5,
            "clock.until",
            "the unit `au` of a length",
        ),
        (
            "until: 1 Myr, first: 1 yr",
            "until: 1 yr, first: 1 yr",
            5,
            "clock.first",
            "before `1 yr`",
        ),
        (
            "until: 1 Myr",
            "until: 1 Myr, at: [1 yr]",
            5,
            "clock",
            "both",
        ),
        ("first: 1 yr", "first: -1 yr", 5, "clock.first", "above 0"),
        (
            "per_decade: 10",
            "per_decade: 0",
            5,
            "clock.per_decade",
            "from 1 to 1000",
        ),
        (
            "per_decade: 10",
            "per_decade: 2.5",
            5,
            "clock.per_decade",
            "`2.5`",
        ),
        (
            "first: 1 yr, per_decade: 10",
            "first: 1.0e-9 s, per_decade: 1000",
            5,
            "clock",
            "snapshots",
        ),
        (
            "10 yr, 1 kyr",
            "1 kyr, 10 yr",
            15,
            "clock.at[1]",
            "after the one before",
        ),
        (
            "network: tiny.yaml",
            "network: tiny",
            2,
            "network",
            "standard, or a path ending in .yaml",
        ),
        (
            "network: tiny.yaml",
            "network: none.yaml",
            2,
            "network",
            "no such file at dir/none.yaml",
        ),
        ("cells.csv", "none.csv", 3, "disk.table", "no such file"),
        (
            "{table: cells.csv}",
            "{assumed_columns: {CO: 1.0e-5}}",
            3,
            "disk",
            "neither",
        ),
        (
            "table: cells.csv",
            "table: cells.csv, fields: [{name: a b, spectrum: draine}]",
            3,
            "disk.fields[0].name",
            "`a b`",
        ),
        (
            "composition: atoms",
            "composition: atoms, abundances: {H2: 0.5}",
            4,
            "start",
            "both",
        ),
        (
            "H2: 0.5",
            "H2: -0.5",
            14,
            "start.abundances.H2",
            "0 or more",
        ),
        ("title: t", "title: ' '", 1, "title", "empty"),
        (
            "title: t",
            "title: t\naccuracy: {relative: 0.5}",
            2,
            "accuracy.relative",
            "from 1e-12 to 0.1",
        ),
        (
            "title: t",
            "title: t\naccuracy: {smallest: 0}",
            2,
            "accuracy.smallest",
            "above 0",
        ),
        ("title: t", "title: t\noutput: run.txt", 2, "output", ".h5"),
        (
            "charge_states: 2",
            "charge_states: 1.5",
            16,
            "grains.charge_states",
            "whole number",
        ),
        (
            "1.0e15 cm^-2",
            "1.0e15 cm^-3",
            16,
            "grains.site_density",
            "cm^-3",
        ),
        (
            "atoms: 0.55",
            "atoms: 1.5",
            16,
            "grains.hop_ratio.atoms",
            "at most 1",
        ),
        (
            "colliders: 0.6",
            "colliders: 0",
            17,
            "gas.colliders",
            "above 0",
        ),
        (
            "to: 100 au",
            "to: 0.5 au",
            8,
            "disk.recipe.radii.to",
            "beyond `1 au`",
        ),
        (
            "midplane: 20 K",
            "midplane: 0 K",
            7,
            "disk.recipe.temperature.midplane",
            "above 0",
        ),
        (
            "CO: 1.0e-4",
            "CO: 2.0",
            12,
            "disk.assumed_columns.CO",
            "from 0 to 1",
        ),
        (
            "5 keV",
            "4 keV",
            11,
            "disk.recipe.ionisation.xrays.hardness",
            "3 keV",
        ),
        (
            "up_to: 6",
            "upto: 6",
            9,
            "disk.recipe.heights.upto",
            "unknown key",
        ),
    ] {
        let text = replaced(old, new);
        let found = errors(&text, &[]);
        let error = &found[0];
        assert_eq!(
            (error.line, error.entry.as_str()),
            (Some(line), entry),
            "{new}: {error}"
        );
        assert!(error.to_string().contains(says), "{new}: {error}");
        assert_eq!(error.file, PathBuf::from("dir/x.yaml"), "{new}: {error}");
    }
    // All of the errors at once, not one per attempt.
    let both = SMALL.replace("1 Myr", "1").replace("tiny.yaml", "tiny");
    assert_eq!(errors(&both, &[]).len(), 2);
}

/// Everything that can be wrong with a table, with line and column.
#[test]
fn wrong_tables_are_refused_where_they_are_wrong() {
    let usual = |text: &str| text.to_string();
    let replaced = |old: &str, new: &str| {
        assert!(TABLE.contains(old), "{old}");
        TABLE.replacen(old, new, 1)
    };
    for (text, line, entry, says) in [
        (usual("# nothing\n\n"), None, "table", "found nothing"),
        (
            TABLE.lines().take(2).collect::<Vec<_>>().join("\n"),
            Some(2),
            "table",
            "only a header",
        ),
        (
            replaced("T_gas [K]", "T_gaz [K]"),
            Some(2),
            "column T_gaz [K]",
            "the unknown column `T_gaz`",
        ),
        (
            replaced("T_gas [K]", "T_gas"),
            Some(2),
            "column T_gas",
            "no unit",
        ),
        (
            replaced("T_gas [K]", "T_gas [K"),
            Some(2),
            "column T_gas [K",
            "closing",
        ),
        (
            replaced("T_gas [K]", "T_gas [au]"),
            Some(2),
            "column T_gas [au]",
            "`au` of a length",
        ),
        (
            replaced("T_gas [K]", "T_gas [C]"),
            Some(2),
            "column T_gas [C]",
            "unknown unit `C`",
        ),
        (
            replaced("T_gas [K]", "n_H [cm^-3]"),
            Some(2),
            "column n_H",
            "it twice",
        ),
        (
            replaced("T_gas [K]", "T_dust [K]"),
            Some(2),
            "column T_gas",
            "no such column",
        ),
        (
            replaced("AV_sky [mag]", "zeta_xray [s^-1]"),
            Some(2),
            "column AV_sky",
            "no such column",
        ),
        (
            replaced("UV_sky", "UV_moon"),
            Some(2),
            "column UV_moon [Habing]",
            "unknown field `moon`",
        ),
        (
            replaced("N_CO_sky", "N_CQ_sky"),
            Some(2),
            "column N_CQ_sky [cm^-2]",
            "species `CQ`",
        ),
        (
            replaced("N_CO_sky", "N_CO_moon"),
            Some(2),
            "column N_CO_moon [cm^-2]",
            "unknown field `moon`",
        ),
        (replaced("1e9", "many"), Some(3), "column n_H", "`many`"),
        (replaced("1e9", "NaN"), Some(3), "column n_H", "`NaN`"),
        (replaced("1e9", "inf"), Some(3), "column n_H", "`inf`"),
        (replaced("1e9", "-1e9"), Some(3), "column n_H", "above 0"),
        (replaced("1e9", ""), Some(3), "column n_H", "found nothing"),
        (
            replaced("1e10,30", "1e10,0"),
            Some(4),
            "column T_gas",
            "above 0",
        ),
        (
            replaced("3.4,4", "-3.4,4"),
            Some(4),
            "column UV_sky",
            "0 or more",
        ),
        (
            replaced("0.25", "1.25"),
            Some(3),
            "column shield_N2_sky",
            "from 0 to 1",
        ),
        (replaced("1e9,20", "1e9"), Some(3), "table", "10 values"),
        (
            replaced("1e9,20", "1e9,20,20"),
            Some(3),
            "table",
            "12 values",
        ),
    ] {
        let found = errors(SMALL, &[("dir/cells.csv", &text)]);
        let error = &found[0];
        assert_eq!((error.line, error.entry.as_str()), (line, entry), "{error}");
        assert!(error.to_string().contains(says), "{says}: {error}");
        assert_eq!(error.file, PathBuf::from("dir/cells.csv"), "{error}");
    }
}

/// The cases in `cases/` are what a newcomer runs first.
#[test]
fn the_cases_of_the_repository_are_sound() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("cases");
    let small = open(&folder.join("four-places.yaml")).unwrap();
    assert_eq!(
        (
            small.disk.cells.len(),
            small.disk.fields.len(),
            small.snapshots.len()
        ),
        (4, 2, 5)
    );

    let tirune = open(&folder.join("tirune.yaml")).unwrap();
    let cells = &tirune.disk.cells;
    assert!(cells.len() >= 150);
    let midplane = |cell: &&crate::disk::Conditions| cell.height == 0.0;
    let first = cells.iter().find(midplane).unwrap();
    let last = cells.iter().rfind(midplane).unwrap();
    // From inside the water snow line to outside that of CO, from the dark to full light.
    assert!(first.t_dust >= 160.0 && (10.0..=15.0).contains(&last.t_dust));
    assert!(first.light[0].extinction > 1000.0);
    for column in cells.chunk_by(|a, b| a.radius == b.radius) {
        let top = &column[column.len() - 1];
        assert!(
            top.light[0].extinction < 0.1,
            "{} au: {}",
            top.radius,
            top.light[0].extinction
        );
    }
}
