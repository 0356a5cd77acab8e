//! The verbs of the command on a small case: run, look, history, at; what they print and write is
//! what the file holds; failing cells, starting again, starting over.

mod support;

use frostclock::answers::interpolate;
use frostclock::run::record::CellStatus;
use frostclock::run::{Prepared, journal::Journal};
use frostclock::store::{self, RunFile};
use std::collections::BTreeMap;
use std::fs;
use std::io::{BufRead, BufReader};
use std::path::Path;
use std::process::Stdio;
use support::{
    Ended, assert_same_run, command, edit, frostclock, names, send, shell_status, succeeds,
    three_places,
};
use tempfile::TempDir;

fn finished() -> (TempDir, RunFile) {
    let folder = three_places();
    succeeds(folder.path(), &["run", "three.yaml"]);
    let run = store::open(&folder.path().join("three.h5")).expect("a run file");
    (folder, run)
}

/// A CSV: heads, and rows by the text of their first cell.
fn csv(path: &Path) -> (Vec<String>, BTreeMap<String, Vec<String>>) {
    let mut reader = csv::Reader::from_path(path).expect("a CSV");
    let heads = reader
        .headers()
        .expect("heads")
        .iter()
        .map(String::from)
        .collect();
    let row =
        |record: csv::StringRecord| -> Vec<String> { record.iter().map(String::from).collect() };
    let rows = reader
        .records()
        .map(|r| row(r.expect("a row")))
        .map(|r| (r[0].clone(), r))
        .collect();
    (heads, rows)
}

fn bits(text: &str) -> u64 {
    text.parse::<f64>()
        .unwrap_or_else(|_| panic!("`{text}` is no number"))
        .to_bits()
}

/// If it failed, a case would not come out as a run file that says what was run.
#[test]
fn a_run_is_written_and_summarised() {
    let (folder, run) = finished();
    assert_eq!(
        names(folder.path()),
        ["mini.yaml", "three.csv", "three.h5", "three.yaml"]
    );
    assert!(
        run.statuses()
            .iter()
            .all(|status| *status == CellStatus::Done)
    );
    let look = succeeds(folder.path(), &["look", "three.h5"]);
    for said in [
        "Three places in a thimble",
        "3 (3 done, 0 failed, 0 not run)",
        "10 gas, 4 adsorbed, 3 grain charges",
        "8: 0, 1 yr ... 1e3 yr",
        "T_gas        1.5000e1 ... 2.0000e2 K",
    ] {
        assert!(look.out.contains(said), "no `{said}` in\n{}", look.out);
    }
    assert_eq!(look.err, "");
    let species = succeeds(folder.path(), &["look", "three.h5", "--species"]).out;
    let listed: Vec<&str> = species.lines().collect();
    let stored: Vec<&str> = run
        .header()
        .species
        .iter()
        .map(|s| s.name.as_str())
        .collect();
    assert_eq!(listed, stored);
    // What it prints as the case is a case: the same run comes out of it.
    let case = succeeds(folder.path(), &["look", "three.h5", "--case"]).out;
    fs::write(folder.path().join("again.yaml"), case).expect("written");
    succeeds(
        folder.path(),
        &["run", "again.yaml", "--output", "again.h5"],
    );
    let datasets = |name: &str| support::datasets(&folder.path().join(name));
    assert_eq!(
        datasets("three.h5")["/abundance"],
        datasets("again.h5")["/abundance"]
    );
    let network = succeeds(folder.path(), &["look", "three.h5", "--network"]).out;
    assert_eq!(
        network,
        fs::read_to_string(folder.path().join("mini.yaml")).expect("read")
    );
}

/// If it failed, a preview would describe another disk than the one that is run, or leave files.
#[test]
fn a_preview_shows_the_cells_and_runs_nothing() {
    let folder = three_places();
    let preview = succeeds(
        folder.path(),
        &["preview", "three.yaml", "--csv", "cells.csv"],
    );
    assert!(
        preview
            .out
            .contains("3 cells, 8 snapshots; 10 gas species, 4 ices"),
        "{}",
        preview.out
    );
    assert_eq!(
        names(folder.path()),
        ["cells.csv", "mini.yaml", "three.csv", "three.yaml"]
    );
    // The cells it wrote are a table that gives the same run.
    succeeds(folder.path(), &["run", "three.yaml"]);
    edit(
        &folder.path().join("three.yaml"),
        "table: three.csv",
        "table: cells.csv",
    );
    succeeds(
        folder.path(),
        &["run", "three.yaml", "--output", "again.h5"],
    );
    let datasets = |name: &str| support::datasets(&folder.path().join(name));
    assert_eq!(
        datasets("three.h5")["/abundance"],
        datasets("again.h5")["/abundance"]
    );
}

/// If it failed, a figure drawn from the CSV would not show what was computed.
#[test]
fn a_history_gives_the_stored_bits() {
    let (folder, run) = finished();
    let place = [
        "--near",
        "100,19",
        "--species",
        "CO,H3+,H2O(ads)",
        "--csv",
        "h.csv",
    ];
    let ended = succeeds(
        folder.path(),
        &[&["history", "three.h5"], &place[..]].concat(),
    );
    assert!(
        ended
            .err
            .contains("cell 1 at R = 100.0000 au, z = 20.0000 au"),
        "{}",
        ended.err
    );
    let (heads, rows) = csv(&folder.path().join("h.csv"));
    assert_eq!(heads, ["time [yr]", "CO", "H3+", "H2O(ads)"]);
    assert_eq!(rows.len(), run.header().times_yr.len());
    assert_eq!(ended.out.lines().count(), rows.len() + 1);
    for row in rows.values() {
        let time = run
            .header()
            .times_yr
            .iter()
            .position(|t| t.to_bits() == bits(&row[0]));
        let state = run.state(1, time.expect("a stored time")).expect("read");
        for (name, value) in heads.iter().zip(row).skip(1) {
            let stored = state[run.header().find(name).expect("a species")];
            assert_eq!(bits(value), stored.to_bits(), "{name} at {} yr", row[0]);
        }
    }
}

/// If it failed, values at a time would be those of another time, cell or species.
#[test]
fn a_time_gives_the_stored_bits_or_the_interpolation() {
    let (folder, run) = finished();
    let header = run.header();
    let csv_path = folder.path().join("at.csv");
    // On snapshots (the first, one in between in another unit, the last) and between them.
    for (text, years) in [
        ("0 yr", 0.0),
        ("0.1 kyr", 100.0),
        ("1 kyr", 1000.0),
        ("55 yr", 55.0),
        ("0.3 yr", 0.3),
    ] {
        let expected = |cell: usize, name: &str| {
            let history = run
                .history(cell, header.find(name).expect("a species"))
                .expect("read");
            interpolate::at(
                &header.times_yr,
                &history,
                header.tolerances.smallest,
                years,
            )
            .expect("within")
        };
        let all = succeeds(
            folder.path(),
            &["at", "three.h5", "--time", text, "--csv", "at.csv"],
        );
        let on_snapshot = header.times_yr.contains(&years);
        let start = if on_snapshot {
            "snapshot "
        } else {
            "interpolated between"
        };
        assert!(all.err.starts_with(start), "{}", all.err);
        let (heads, rows) = csv(&csv_path);
        assert_eq!((heads.len(), rows.len()), (4 + header.species.len(), 3));
        for (cell, row) in rows.values().enumerate() {
            for (name, value) in heads.iter().zip(row).skip(4) {
                assert_eq!(
                    bits(value),
                    expected(cell, name).to_bits(),
                    "{name} in {cell} at {text}"
                );
            }
        }
        let place = [
            "--near",
            "100,40",
            "--species",
            "HCO+,CO",
            "--csv",
            "at.csv",
        ];
        let one = succeeds(
            folder.path(),
            &[&["at", "three.h5", "--time", text], &place[..]].concat(),
        );
        assert_eq!(one.out.lines().count(), 3, "{}", one.out);
        let (_, rows) = csv(&csv_path);
        assert_eq!(rows.keys().collect::<Vec<_>>(), ["CO", "HCO+"]);
        for (name, row) in &rows {
            assert_eq!(
                bits(&row[1]),
                expected(2, name).to_bits(),
                "{name} at {text}"
            );
        }
    }
    // On a snapshot that is the stored state itself, whatever the interpolation does.
    let state = run.state(0, header.times_yr.len() - 1).expect("read");
    succeeds(
        folder.path(),
        &[
            "at", "three.h5", "--time", "1 kyr", "--near", "100,0", "--csv", "at.csv",
        ],
    );
    let (_, rows) = csv(&csv_path);
    for (info, stored) in header.species.iter().zip(state) {
        assert_eq!(
            bits(&rows[&info.name][1]),
            stored.to_bits(),
            "{}",
            info.name
        );
    }
}

/// If it failed, hours of work would be done twice, or thrown away.
#[test]
fn a_finished_run_is_left_alone_unless_told() {
    let (folder, _) = finished();
    let file = folder.path().join("three.h5");
    let before = fs::read(&file).expect("read");
    let modified = || {
        fs::metadata(&file)
            .and_then(|data| data.modified())
            .expect("a time")
    };
    let then = modified();
    let again = succeeds(folder.path(), &["run", "three.yaml"]);
    assert!(
        again.err.contains("holds this run already: nothing to do"),
        "{}",
        again.err
    );
    assert_eq!((fs::read(&file).expect("read"), modified()), (before, then));
    // --fresh computes it again, to the same bits, and may replace the run of another case.
    fs::copy(&file, folder.path().join("first.h5")).expect("copied");
    let fresh = succeeds(folder.path(), &["run", "three.yaml", "--fresh"]);
    assert!(
        fresh.err.contains("3 of 3 cells") && modified() > then,
        "{}",
        fresh.err
    );
    assert_same_run(&file, &folder.path().join("first.h5"));
    edit(&folder.path().join("three.yaml"), "1 kyr", "2 kyr");
    succeeds(folder.path(), &["run", "three.yaml", "--fresh"]);
    assert_eq!(
        store::open(&file).expect("a run").header().times_yr.last(),
        Some(&2000.0)
    );
    assert_eq!(
        names(folder.path()),
        [
            "first.h5",
            "mini.yaml",
            "three.csv",
            "three.h5",
            "three.yaml"
        ]
    );
}

/// If it failed, a kill between the writing of the file and the removal of the journal would leave
/// the journal for ever.
#[test]
fn a_journal_left_beside_a_finished_run_is_cleared_away() {
    let (folder, _) = finished();
    let file = folder.path().join("three.h5");
    fs::copy(&file, folder.path().join("first.h5")).expect("copied");
    let case = frostclock::case::open(&folder.path().join("three.yaml")).expect("a case");
    let header = Prepared::new(&case).expect("a network").header;
    Journal::open_or_create(&folder.path().join("three.journal"), &header, false).expect("created");
    succeeds(folder.path(), &["run", "three.yaml"]);
    assert_eq!(
        names(folder.path()),
        [
            "first.h5",
            "mini.yaml",
            "three.csv",
            "three.h5",
            "three.yaml"
        ]
    );
    assert_same_run(&file, &folder.path().join("first.h5"));
}

/// The coldest of the three cells far below the range of a coefficient that grows without bound.
fn with_a_failing_cell() -> TempDir {
    let folder = three_places();
    edit(
        &folder.path().join("three.csv"),
        "1.0e9,15.0,15.0",
        "1.0e9,1.0e-3,15.0",
    );
    folder
}

/// If it failed, one bad cell would cost the grid, or hide in it.
#[test]
fn a_failing_cell_is_reported_and_the_others_are_kept() {
    let folder = with_a_failing_cell();
    let ended = frostclock(folder.path(), &["run", "three.yaml"]);
    assert_eq!(ended.status, 1, "{}", ended.err);
    let said = |ended: &Ended| {
        assert!(
            ended.err.contains("warn: 1 of 3 cells failed"),
            "{}",
            ended.err
        );
        assert!(
            ended.err.contains("look three.h5") && ended.err.contains("run --retry"),
            "{}",
            ended.err
        );
    };
    said(&ended);
    assert!(ended.err.contains("warn: cell 0 failed: "), "{}", ended.err);

    let path = folder.path().join("three.h5");
    let run = store::open(&path).expect("a run file");
    let words: Vec<&str> = run.statuses().iter().map(|status| status.word()).collect();
    assert_eq!(words, ["failed", "done", "done"]);
    assert!(!run.reasons()[0].is_empty() && run.reasons()[1].is_empty());
    assert!(run.failed_at()[0] >= 0.0 && run.failed_at()[1].is_nan());
    let last = run.header().times_yr.len() - 1;
    assert!(run.state(0, last).expect("read").iter().all(|x| x.is_nan()));
    // The others are those of a run without the bad cell, in every bit.
    let (_good_folder, good) = finished();
    for cell in 1..3 {
        let bits = |run: &RunFile| {
            run.cell(cell)
                .expect("read")
                .concat()
                .iter()
                .map(|x| x.to_bits())
                .collect::<Vec<_>>()
        };
        assert_eq!(bits(&run), bits(&good));
    }
    let look = succeeds(folder.path(), &["look", "three.h5"]).out;
    assert!(look.contains("3 (2 done, 1 failed, 0 not run)"), "{look}");
    let line = look
        .lines()
        .find(|line| line.starts_with("failed"))
        .expect("the failed cell");
    assert!(
        line.contains("cell 0 at ") && line.contains(&run.reasons()[0]),
        "{line}"
    );

    // Asked about, it says that it failed and shows no number.
    let place = ["--near", "100,0", "--species", "CO"];
    let at = succeeds(
        folder.path(),
        &[&["at", "three.h5", "--time", "1 kyr"], &place[..]].concat(),
    );
    assert!(at.err.contains("warn: this cell is failed: "), "{}", at.err);
    assert_eq!(
        at.out
            .lines()
            .last()
            .expect("a row")
            .split_whitespace()
            .collect::<Vec<_>>(),
        ["CO", "-", "-"]
    );
    succeeds(
        folder.path(),
        &["at", "three.h5", "--time", "1 kyr", "--csv", "at.csv"],
    );
    let (heads, rows) = csv(&folder.path().join("at.csv"));
    let row = &rows["0"];
    assert!(
        row[3] == "failed" && row[4..].iter().all(String::is_empty) && heads[3] == "status",
        "{row:?}"
    );

    // Again: nothing is computed, and the exit status still says that a cell failed.
    let again = frostclock(folder.path(), &["run", "three.yaml"]);
    assert_eq!(again.status, 1);
    assert!(again.err.contains("nothing to do"), "{}", again.err);
    said(&again);
    // --retry: that cell only.
    fs::copy(&path, folder.path().join("first.h5")).expect("copied");
    let retry = frostclock(folder.path(), &["run", "three.yaml", "--retry"]);
    assert_eq!(retry.status, 1);
    assert!(
        retry.err.contains("going on from 2 finished cells of 3"),
        "{}",
        retry.err
    );
    assert!(retry.err.contains("warn: cell 0 failed: "), "{}", retry.err);
    said(&retry);
    assert_same_run(&path, &folder.path().join("first.h5"));
}

/// If it failed, `| head -1` would end in a panic or an error.
#[test]
fn a_reader_that_goes_away_is_no_error() {
    let (folder, _) = finished();
    for arguments in [
        &["look", "three.h5", "--network"][..],
        &["look", "three.h5"],
        &["history", "three.h5", "--near", "100,0", "--species", "CO"],
        &["at", "three.h5", "--time", "1 kyr"],
        &["preview", "three.yaml"],
        &["--help"],
    ] {
        // Closed before anything is written.
        let mut child = command(folder.path(), arguments);
        let mut child = child
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .expect("starts");
        drop(child.stdout.take());
        let ended = child.wait_with_output().expect("ends");
        let err = String::from_utf8_lossy(&ended.stderr);
        assert_eq!(ended.status.code(), Some(0), "{arguments:?}: {err}");
        assert!(
            !err.contains("panic") && !err.contains("rror"),
            "{arguments:?}: {err}"
        );
    }
    // And a reader of messages that goes away costs nothing either: neither success nor failure.
    for (arguments, status) in [
        (&["run", "three.yaml", "--fresh"][..], 0),
        (&["run", "four.yaml"], 2),
    ] {
        let mut child = command(folder.path(), arguments);
        let mut child = child
            .stdout(Stdio::null())
            .stderr(Stdio::piped())
            .spawn()
            .expect("starts");
        drop(child.stderr.take());
        assert_eq!(
            shell_status(child.wait().expect("ends")),
            status,
            "{arguments:?}"
        );
    }
}

/// If it failed, two runs of one case would write into each other's journal.
#[test]
fn a_second_run_of_a_case_under_way_is_refused() {
    let folder = support::folder_with(&[
        "tests/data/grid.yaml",
        "tests/data/grid.csv",
        "tests/reference/small.yaml",
    ]);
    let mut first = command(folder.path(), &["run", "grid.yaml", "--threads", "1"]);
    let mut first = first.stderr(Stdio::piped()).spawn().expect("starts");
    // The journal is locked before the first cell, and lines come with the cells.
    let lines = BufReader::new(first.stderr.take().expect("piped"));
    assert!(
        lines
            .lines()
            .map_while(Result::ok)
            .any(|line| line.contains("of 24 cells"))
    );
    let second = frostclock(folder.path(), &["run", "grid.yaml"]);
    send("KILL", &first);
    first.wait().expect("ends");
    assert_eq!(second.status, 2, "{}", second.err);
    assert!(
        second
            .err
            .contains("grid.journal: journal: found another run writing it"),
        "{}",
        second.err
    );
}

/// If it failed, scripts that only want warnings would get chatter, or results in the wrong stream.
#[test]
fn results_go_to_stdout_and_quiet_keeps_the_rest() {
    let (folder, _) = finished();
    for arguments in [
        &["run", "three.yaml", "--fresh", "--quiet"][..],
        &["--quiet", "at", "three.h5", "--time", "7 yr"],
    ] {
        assert_eq!(succeeds(folder.path(), arguments).err, "");
    }
    assert_eq!(
        succeeds(folder.path(), &["run", "three.yaml", "--fresh"]).out,
        ""
    );
    let version = succeeds(folder.path(), &["--version"]).out;
    assert_eq!(
        version.trim(),
        concat!("frostclock ", env!("CARGO_PKG_VERSION"))
    );
}
