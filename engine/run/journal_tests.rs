//! Owns the checks of the journal: what survives, what is cut, what is refused.

use std::fs;

use super::*;
use crate::store::samples::{header, record};

fn text_of(failure: Failure) -> String {
    assert!(
        matches!(failure, Failure::Input(_)),
        "not an input error: {failure:?}"
    );
    failure.to_string()
}

/// A journal of `cells` records and the length of the file before the last of them.
fn written(path: &Path, cells: usize) -> u64 {
    let mut journal = Journal::open_or_create(path, &header(8), false).expect("creates");
    let mut before_last = 0;
    for cell in 0..cells {
        before_last = fs::metadata(path).expect("exists").len();
        journal.append(&[record(cell)]).expect("appends");
    }
    before_last
}

fn cells_of(journal: &Journal) -> Vec<usize> {
    journal.finished().map(|(cell, _)| cell).collect()
}

/// If it failed, a resumed run would lose cells, recompute them, or change their bits.
#[test]
fn a_run_continues_with_every_record_bit_for_bit() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("a.journal");
    written(&path, 4);
    let mut journal = Journal::open_or_create(&path, &header(8), false).expect("continues");
    assert_eq!(cells_of(&journal), [0, 1, 2, 3]);
    journal.append(&[record(6), record(5)]).expect("appends");
    for cell in [0, 1, 2, 3, 5, 6] {
        let back = journal
            .records()
            .record(cell)
            .expect("readable")
            .expect("there");
        assert_eq!(back.encode(), record(cell).encode(), "cell {cell}");
    }
    assert!(journal.records().record(4).expect("readable").is_none());
    drop(journal);
    // And a later record of a cell takes the place of the first.
    let mut journal = Journal::open_or_create(&path, &header(8), false).expect("continues");
    let second = CellRecord {
        reason: "again".to_string(),
        ..record(5)
    };
    journal
        .append(std::slice::from_ref(&second))
        .expect("appends");
    let mut reader = read_only(&path).expect("readable while it is written");
    assert_eq!(reader.header().encode(), header(8).encode());
    let back = reader.record(5).expect("readable").expect("there");
    assert_eq!(back.encode(), second.encode());
    journal.remove().expect("removes");
    assert!(!path.exists());
}

/// If it failed, a kill or a power cut at the wrong byte would cost more than the cell under way,
/// or make the journal unreadable.
#[test]
fn a_tear_at_any_byte_of_the_last_record_loses_only_that_record() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("a.journal");
    let before_last = written(&path, 4) as usize;
    let bytes = fs::read(&path).expect("readable");
    for length in before_last..bytes.len() {
        fs::write(&path, &bytes[..length]).expect("writes");
        let seen: Vec<usize> = read_only(&path)
            .expect("reads")
            .finished()
            .map(|f| f.0)
            .collect();
        assert_eq!(seen, [0, 1, 2], "torn at {length}");
        assert_eq!(
            fs::metadata(&path).expect("there").len() as usize,
            length,
            "reader wrote"
        );
        // Each writer syncs, which is slow: it sees the same scan at some of the tears.
        if length % 29 != 0 && length + 1 != bytes.len() {
            continue;
        }
        let mut journal = Journal::open_or_create(&path, &header(8), false).expect("continues");
        assert_eq!(cells_of(&journal), [0, 1, 2], "torn at {length}");
        journal.append(&[record(3)]).expect("appends");
        drop(journal);
        assert_eq!(
            fs::read(&path).expect("readable"),
            bytes,
            "torn at {length}"
        );
    }
}

/// If it failed, a flipped bit would be integrated into results, ask for absurd memory, or pass
/// for a header that never was.
#[test]
fn a_flipped_bit_at_any_byte_is_noticed() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("a.journal");
    written(&path, 3);
    let bytes = fs::read(&path).expect("readable");
    let opening = preamble_and_header(&header(8)).len();
    let frame = FRAME + record(0).encode().len();
    for position in 0..bytes.len() {
        let mut damaged = bytes.clone();
        damaged[position] ^= 0x10;
        fs::write(&path, &damaged).expect("writes");
        if position >= opening {
            let kept = ((position - opening) / frame).min(2);
            let records = read_only(&path).expect("reads what is whole");
            let cells: Vec<usize> = records.finished().map(|finished| finished.0).collect();
            assert_eq!(cells, (0..kept).collect::<Vec<_>>(), "at {position}");
        } else {
            let failure = Journal::open_or_create(&path, &header(8), false).expect_err("refused");
            text_of(failure);
            assert_eq!(
                fs::read(&path).expect("there"),
                damaged,
                "overwrote at {position}"
            );
        }
    }
}

/// If it failed, a kill during the very first write would block the case for ever.
#[test]
fn an_interrupted_creation_starts_over() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("a.journal");
    let opening = preamble_and_header(&header(8));
    for length in [
        0,
        1,
        PREAMBLE - 1,
        PREAMBLE,
        PREAMBLE + FRAME + 5,
        opening.len() - 1,
    ] {
        fs::write(&path, &opening[..length]).expect("writes");
        assert!(read_only(&path).is_err(), "read a header of {length} bytes");
        let journal = Journal::open_or_create(&path, &header(8), false).expect("creates");
        assert!(cells_of(&journal).is_empty());
        drop(journal);
        assert_eq!(fs::read(&path).expect("there"), opening);
    }
}

/// If it failed, a mistyped output name would destroy a file of the user.
#[test]
fn a_foreign_file_is_refused_and_left_alone_even_when_starting_over() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("thesis.txt");
    for contents in [
        "x",
        "Chapter 1. It was a dark and stormy disk.",
        "frstjrn?        ",
    ] {
        fs::write(&path, contents).expect("writes");
        for fresh in [false, true] {
            let failure = Journal::open_or_create(&path, &header(8), fresh).expect_err("refused");
            assert!(text_of(failure).contains("no journal of frostclock"));
            assert_eq!(fs::read_to_string(&path).expect("there"), contents);
        }
        assert!(read_only(&path).is_err());
    }
    let absent = read_only(&folder.path().join("absent.journal")).expect_err("refused");
    assert!(text_of(absent).contains("no such file"));
}

/// If it failed, cells of two different runs would stand in one file.
#[test]
fn other_inputs_are_refused_with_what_differs_and_starting_over_takes_them() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("a.journal");
    written(&path, 2);
    let bytes = fs::read(&path).expect("readable");
    let other = |change: &dyn Fn(&mut RunHeader)| {
        let mut header = header(8);
        change(&mut header);
        header
    };
    let cases: [(&str, RunHeader); 8] = [
        (
            "line 3: found `clock: {until: 3 Myr}`, expected `clock: {until: 2 Myr}`",
            { other(&|h| h.case_text = h.case_text.replace("3 Myr", "2 Myr")) },
        ),
        (
            "resolved case, line 5: found ``",
            other(&|h| h.case_text.push_str("more: 1\n")),
        ),
        (
            "network text, line 2",
            other(&|h| h.network_text = h.network_text.replace("layout: 1", "layout: 1 #")),
        ),
        (
            "polynomials, line 1",
            other(&|h| h.thermo_text = h.thermo_text.replace("small", "large")),
        ),
        (
            "engine version: found `0.1.0`",
            other(&|h| h.engine_version = "0.2.0".to_string()),
        ),
        (
            "numerical kernel",
            other(&|h| h.kernel = "avx2".to_string()),
        ),
        (
            "conditions of cell 3",
            other(&|h| h.disk.cells[3].light[1].columns[0] = 1.0),
        ),
        (
            "cells of the disk: found `8 cells`",
            other(&|h| h.disk.cells.truncate(7)),
        ),
    ];
    for (expected, header) in &cases {
        let failure = Journal::open_or_create(&path, header, false).expect_err("refused");
        let text = text_of(failure);
        assert!(text.contains(expected), "`{expected}` is not in: {text}");
        assert_eq!(fs::read(&path).expect("there"), bytes);
    }
    let fresh = Journal::open_or_create(&path, &cases[0].1, true).expect("starts over");
    assert!(cells_of(&fresh).is_empty());
    drop(fresh);
    assert_eq!(
        read_only(&path).expect("reads").header().case_text,
        cases[0].1.case_text
    );
}

/// If it failed, two runs of one case would interleave their records.
#[test]
fn a_second_writer_is_refused_while_the_first_lives() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("a.journal");
    let first = Journal::open_or_create(&path, &header(8), false).expect("creates");
    let failure = Journal::open_or_create(&path, &header(8), true).expect_err("refused");
    assert!(text_of(failure).contains("another run"));
    drop(first);
    Journal::open_or_create(&path, &header(8), false).expect("free again");
}
