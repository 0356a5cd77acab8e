//! A run file opens in the readers that people have: xarray and h5py in Python, `ncdump` and
//! `h5dump` of Debian. Run by `sh tools/test`, which installs them.

mod support;

use std::path::Path;
use std::process::Command;
use support::{edit, frostclock, python, three_places};
use tempfile::TempDir;

/// A run with two fields, a shielding factor given outright, a failed cell and every default.
fn a_run() -> TempDir {
    let folder = three_places();
    let field = "- {name: sky, spectrum: draine}";
    let star = "- {name: star, spectrum: black_body_4000K, attenuated: true}";
    edit(
        &folder.path().join("three.yaml"),
        field,
        &format!("{field}\n    {star}"),
    );
    let table = folder.path().join("three.csv");
    edit(
        &table,
        "zeta_cosmic [s^-1]",
        "zeta_cosmic [s^-1],UV_star [Draine],AV_star [mag],shield_H2_star [1]",
    );
    edit(
        &table,
        "15.0,15.0,0.5,30.0,1.3e-17",
        "1.0e-3,15.0,0.5,30.0,1.3e-17,1.0e-9,60.0,",
    );
    edit(&table, "3.0,1.3e-17", "3.0,1.3e-17,10.0,6.0,1.0e-3");
    edit(&table, "0.2,1.3e-17", "0.2,1.3e-17,300.0,0.5,0.5");
    let ended = frostclock(folder.path(), &["run", "three.yaml"]);
    assert_eq!(ended.status, 1, "one cell is meant to fail: {}", ended.err);
    folder
}

/// What another program says of the run file; it must be content.
fn read_by(program: &Path, arguments: &[&str], folder: &Path) -> String {
    let name = program.display();
    let read = Command::new(program)
        .args(arguments)
        .current_dir(folder)
        .output();
    let read =
        read.unwrap_or_else(|cause| panic!("{name}: {cause} (it comes with `sh tools/test`)"));
    let said = String::from_utf8_lossy(&read.stderr);
    assert!(
        read.status.success() && said.is_empty(),
        "{name} {arguments:?}: {said}"
    );
    String::from_utf8(read.stdout).expect("UTF-8")
}

/// If it failed, a user of Python would meet nameless axes, missing units or other values.
#[test]
fn python_reads_dimensions_units_and_every_bit() {
    let folder = a_run();
    let script = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/support/xarray_reads.py");
    let said = read_by(
        &python(),
        &[&script.display().to_string(), "three.h5"],
        folder.path(),
    );
    assert!(
        said.starts_with("3 cells x 8 times x 18 species by h5netcdf"),
        "{said}"
    );
}

/// If it failed, the netCDF world (ncview, CDO, IDL, Julia ...) could not open a run.
#[test]
fn ncdump_shows_dimensions_and_units() {
    let folder = a_run();
    let said = read_by(Path::new("ncdump"), &["-h", "three.h5"], folder.path());
    for line in [
        "cell = 3 ;",
        "time = 8 ;",
        "species = 18 ;",
        "double abundance(cell, time, species) ;",
        "string species(species) ;",
        "time:units = \"yr\" ;",
        "abundance:units = \"1\" ;",
        "double n_H(cell) ;",
        "n_H:units = \"cm-3\" ;",
        "T_gas:units = \"K\" ;",
        "double UV_star(cell) ;",
        "byte status(cell) ;",
        "status:flag_meanings = \"done failed not_run\" ;",
        "group: work {",
        "group: checks {",
        "group: provenance {",
    ] {
        assert!(said.contains(line), "no `{line}` in\n{said}");
    }
    // The values too, not only the header: the failed cell, and what it failed of.
    let said = read_by(
        Path::new("ncdump"),
        &["-v", "status,checks/reason", "three.h5"],
        folder.path(),
    );
    assert!(said.contains("status = 1, 0, 0 ;"), "{said}");
}

/// If it failed, the file would rest on something that plain HDF5 tools do not know.
#[test]
fn h5dump_shows_the_same() {
    let folder = a_run();
    let said = read_by(Path::new("h5dump"), &["-H", "three.h5"], folder.path());
    for line in [
        "DATASET \"abundance\"",
        "( 3, 8, 18 )",
        "GROUP \"provenance\"",
        "ATTRIBUTE \"DIMENSION_LIST\"",
    ] {
        assert!(said.contains(line), "no `{line}` in\n{said}");
    }
    let dump = ["-d", "/time", "three.h5"];
    let said = read_by(Path::new("h5dump"), &dump, folder.path());
    assert!(said.contains("(0): 0, 1, 3.16228, 10,"), "{said}");
}
