//! Runs of a small case by the command: what is written, starting again, starting over, failing cells.

mod support;

use frostclock::run::record::CellStatus;
use frostclock::run::{Prepared, journal::Journal};
use frostclock::store::{self, RunFile};
use std::fs;
use std::io::{BufRead, BufReader};
use std::process::Stdio;
use support::{
    Ended, assert_same_run, command, csv, edit, finished, frostclock, names, send, succeeds,
    three_places,
};
use tempfile::TempDir;

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
    assert!(at.err.contains("warn: this cell failed: "), "{}", at.err);
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
        retry
            .err
            .contains("2 of 3 cells are finished: going on from there"),
        "{}",
        retry.err
    );
    assert!(retry.err.contains("warn: cell 0 failed: "), "{}", retry.err);
    said(&retry);
    assert_same_run(&path, &folder.path().join("first.h5"));
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
