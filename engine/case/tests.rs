//! Whole case files: what is read, what is refused and how the errors point.

use super::*;
use crate::disk::{table, write_table};
use std::collections::HashMap;

mod refusals;

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

/// A column towards one field must win over the one for all fields, and that over the assumed one:
/// the other way round the shielding of a field would be that of another.
#[test]
fn the_closest_column_counts() {
    let heads = "radius [au],height [au],n_H [cm^-3],T_gas [K],UV_sky [Draine],AV_sky [mag],zeta_cosmic [s^-1]";
    let column = |more: &str, values: &str, species: &str| {
        let table = format!("{heads},{more}\n1,0,1e9,20,1,2,1e-17,{values}\n");
        let case = read_case(SMALL, &[("dir/cells.csv", &table)]).unwrap();
        let place = case.disk.column_species.iter().position(|s| s == species);
        case.disk.cells[0].light[0].columns[place.unwrap()]
    };
    let both = "N_CO [cm^-2],N_CO_sky [cm^-2]";
    assert_eq!(column(both, "1e15,1e16", "CO"), 1e16);
    assert_eq!(column("N_CO [cm^-2]", "1e15", "CO"), 1e15);
    let assumed = 5.0e-5 * 1.87e21 * 2.0;
    assert!((column("N_CO_sky [cm^-2]", "1e16", "N2") / (assumed / 5.0) - 1.0).abs() < 1e-12);
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
        assert!(
            !again.notes.iter().any(|note| note.contains("by default")),
            "{:?}",
            again.notes
        );
    }
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

/// The built-in network must fit what cases may say of it: every composition starts neutral, with
/// one hydrogen nucleus per hydrogen nucleus, and Tirune's columns and spectra are known.
#[test]
fn the_built_in_network_fits_the_cases() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("cases");
    let case = open(&folder.join("tirune.yaml")).unwrap();
    let path = Path::new("standard");
    let network = crate::network::read::read(path, &case.network_text).unwrap();
    let chemistry = crate::network::expand::expand(&network, &case.grains).unwrap();
    let disk = case.disk_for(&chemistry).unwrap();
    let first = &disk.cells[0].light[0];
    assert_eq!(first.columns.len(), chemistry.column_species.len());
    assert!(
        first.columns[0] > 1.0e25,
        "H2 first: {:e}",
        first.columns[0]
    );

    let all = compositions(&network.file);
    assert!(!all.is_empty());
    for (name, _) in &all {
        let kind = StartKind::Composition(name.clone());
        let choice = StartChoice {
            kind,
            ..case.start.clone()
        };
        let dust = disk.cells[0].dust_abundance();
        let state = start_state(&choice, &all, &chemistry, dust).unwrap();
        // One line of totals, and nothing odd about them.
        assert_eq!(start_notes(&chemistry, &state).len(), 1, "{name}");
        let charge: f64 = chemistry
            .species
            .iter()
            .zip(&state)
            .map(|(s, x)| f64::from(s.charge) * x)
            .sum();
        assert!(charge.abs() < 1e-18, "{name}: charge {charge:e}");
    }

    let mut odd = case.clone();
    odd.disk.fields[2].spectrum = "candle".to_string();
    let error = odd.disk_for(&chemistry).unwrap_err();
    assert!(
        error
            .to_string()
            .contains("`candle`, which the network does not know"),
        "{error}"
    );
}

/// Fails if the polynomials a network names are looked for elsewhere than beside the network, or
/// are not kept. That they count as input: tests of the journal and of thermochemistry.
#[test]
fn polynomials_come_with_the_network_that_names_them() {
    let network = ("dir/tiny.yaml", "network: tiny\nthermo: mine.yaml\n");
    let with = |text| read_case(SMALL, &[network, ("dir/mine.yaml", text)]).unwrap();
    let case = with("thermo: mine\n");
    assert_eq!(case.thermo_text, "thermo: mine\n");
    let missing = &errors(SMALL, &[network])[0];
    assert!(missing.found.contains("dir/mine.yaml"), "{missing}");
    let built_in = ("dir/tiny.yaml", "network: tiny\nthermo: standard\n");
    let case = read_case(SMALL, &[built_in]).unwrap();
    assert!(case.thermo_text.contains("polynomials:"));
    assert_eq!(read_case(SMALL, &[]).unwrap().thermo_text, "");
}
