//! Owns the checks of the run file: what goes in comes out, and never half of it.

use std::fs;
use std::path::Path;

use super::samples::{header, record};
use super::*;
use crate::errors::Failure;
use crate::run::journal::{Journal, read_only};
use crate::run::record::{CellRecord, CellStatus};

const CELLS: usize = 37;

/// A run of 37 cells (three blocks), of which the records of `have` exist.
fn assembled(path: &Path, have: &dyn Fn(usize) -> bool) -> RunFile {
    let mut source = |cell: usize| Ok(have(cell).then(|| record(cell)));
    assemble(path, &header(CELLS), &mut source).expect("assembles");
    open(path).expect("opens")
}

fn bits(values: &[f64]) -> Vec<u64> {
    values.iter().map(|value| value.to_bits()).collect()
}

/// What a record becomes in the file: snapshots not reached are NaN.
fn padded(record: &CellRecord) -> Vec<f64> {
    let mut values = record.abundances.clone();
    values.resize(15, f64::NAN);
    values
}

/// If it failed, results would change between the integration and the reader, if only in the last
/// bit, or stand under another cell, time or species.
#[test]
fn a_run_comes_back_bit_for_bit() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("run.h5");
    let run = assembled(&path, &|_| true);

    let mut expected = header(CELLS);
    assert_eq!(run.input_hash(), expected.input_hash());
    // The atoms of a species come back in the order of the run's elements, here the same.
    expected
        .species
        .iter_mut()
        .for_each(|species| species.atoms.shrink_to_fit());
    assert_eq!(run.header().encode(), expected.encode());

    let all = run.all().expect("reads");
    let (work, balance) = (run.work().expect("reads"), run.balance().expect("reads"));
    let cautions = run.cautions().expect("reads");
    for cell in 0..CELLS {
        let record = record(cell);
        let values = padded(&record);
        assert_eq!(
            bits(&all[15 * cell..15 * (cell + 1)]),
            bits(&values),
            "cell {cell}"
        );
        assert_eq!(
            bits(&run.cell(cell).expect("reads").concat()),
            bits(&values)
        );
        assert_eq!(
            bits(&run.state(cell, 1).expect("reads")),
            bits(&values[5..10])
        );
        let history = run.history(cell, 3).expect("reads");
        assert_eq!(bits(&history), bits(&[values[3], values[8], values[13]]));
        assert_eq!(run.statuses()[cell], record.status);
        assert_eq!(run.reasons()[cell], record.reason);
        assert_eq!(run.failed_at()[cell].to_bits(), record.failed_at.to_bits());
        assert_eq!(work[cell], record.work);
        assert_eq!(cautions[cell], record.cautions);
        for (time, expected) in record.balance.iter().enumerate() {
            assert_eq!(
                bits(&balance[cell][time].numbers()),
                bits(&expected.numbers())
            );
        }
        assert_eq!(
            balance[cell][2].dust.is_nan(),
            record.status == CellStatus::Failed
        );
    }
    let snapshot = run.snapshot(2, 4).expect("reads");
    let everywhere = run.species(4).expect("reads");
    for cell in 0..CELLS {
        let expected = padded(&record(cell))[14].to_bits();
        assert_eq!(
            (snapshot[cell].to_bits(), everywhere[cell][2].to_bits()),
            (expected, expected)
        );
    }
    assert!(run.history(CELLS, 0).is_err() && run.snapshot(0, 5).is_err());
}

/// If it failed, "the same inputs give the same file" would be untrue: a time stamp or memory
/// garbage would be in it.
#[test]
fn assembling_twice_gives_the_same_bytes() {
    let folder = tempfile::tempdir().expect("a folder");
    let (a, b) = (folder.path().join("a.h5"), folder.path().join("b.h5"));
    assembled(&a, &|_| true);
    std::thread::sleep(std::time::Duration::from_millis(1100));
    assembled(&b, &|_| true);
    assert!(fs::read(a).expect("there") == fs::read(b).expect("there"));
}

/// If it failed, nobody could look into a run under way, or cells not run would look computed.
#[test]
fn a_partial_journal_gathers_with_its_gaps_marked() {
    let folder = tempfile::tempdir().expect("a folder");
    let journal_path = folder.path().join("run.journal");
    let path = folder.path().join("run.h5");
    let mut journal = Journal::open_or_create(&journal_path, &header(CELLS), false).expect("new");
    for cell in [30, 2, 17] {
        journal.append(&[record(cell)]).expect("appends");
    }
    let mut records = read_only(&journal_path).expect("reads beside the writer");
    let header = records.header().clone();
    assemble(&path, &header, &mut |cell| records.record(cell)).expect("assembles");
    let run = open(&path).expect("opens");
    for cell in 0..CELLS {
        let values = run.cell(cell).expect("reads").concat();
        if [2, 17, 30].contains(&cell) {
            assert_eq!(run.statuses()[cell], record(cell).status);
            assert_eq!(bits(&values), bits(&padded(&record(cell))));
        } else {
            assert_eq!(run.statuses()[cell], CellStatus::Missing);
            assert!(values.iter().all(|value| value.is_nan()), "cell {cell}");
        }
    }
    // Again over the run that is there, while it is open: the new one takes its place.
    journal.append(&[record(3)]).expect("appends");
    let mut records = read_only(&journal_path).expect("reads");
    assemble(&path, &header, &mut |cell| records.record(cell)).expect("assembles");
    assert_eq!(open(&path).expect("opens").statuses()[3], CellStatus::Done);
    assert_eq!(run.statuses()[3], CellStatus::Missing);
}

/// If it failed, a failure half-way would leave half a file, or take away the one that was there.
#[test]
fn a_failure_leaves_the_folder_as_it_was() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("run.h5");
    let names = || -> Vec<_> {
        let entries = fs::read_dir(folder.path()).expect("a folder");
        entries
            .map(|entry| entry.expect("an entry").file_name())
            .collect()
    };
    let mut breaks_late = |cell: usize| {
        if cell == 33 {
            return Err(Failure::machine("reading", Path::new("j"), "checksum"));
        }
        Ok(Some(record(cell)))
    };
    let failure = assemble(&path, &header(CELLS), &mut breaks_late).expect_err("fails");
    assert!(matches!(failure, Failure::Machine { .. }), "{failure:?}");
    assert!(names().is_empty(), "left behind: {:?}", names());

    assembled(&path, &|_| true);
    let before = fs::read(&path).expect("there");
    assemble(&path, &header(CELLS), &mut breaks_late).expect_err("fails");
    // A record of other dimensions is a defect that must not become a file.
    let mut too_long = |cell: usize| {
        let mut record = record(cell);
        record.abundances.push(1.0);
        Ok(Some(record))
    };
    let failure = assemble(&path, &header(CELLS), &mut too_long).expect_err("fails");
    assert!(failure.to_string().contains("does not fit"), "{failure}");
    assert_eq!(fs::read(&path).expect("there"), before);
    assert_eq!(names().len(), 1, "left behind: {:?}", names());

    let nowhere = folder.path().join("absent").join("run.h5");
    let failure = assemble(&nowhere, &header(CELLS), &mut |_| Ok(None)).expect_err("fails");
    assert!(matches!(failure, Failure::Machine { .. }), "{failure:?}");
}

/// If it failed, a mistyped output would destroy a file of the user.
#[test]
fn only_a_run_may_be_replaced() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("notes.h5");
    fs::write(&path, "not a run").expect("writes");
    let failure = assemble(&path, &header(CELLS), &mut |_| Ok(None)).expect_err("refused");
    assert!(matches!(failure, Failure::Input(_)), "{failure:?}");
    assert_eq!(fs::read_to_string(&path).expect("there"), "not a run");
}

/// If it failed, a wrong file would be read as a run, or the message would not say what it is.
#[test]
fn what_is_no_run_is_refused_with_what_it_is() {
    let folder = tempfile::tempdir().expect("a folder");
    let refused = |name: &str, expected: &str| {
        let failure = open(&folder.path().join(name)).expect_err("refused");
        assert!(matches!(failure, Failure::Input(_)), "{failure:?}");
        let text = failure.to_string();
        assert!(text.contains(expected), "`{expected}` is not in: {text}");
    };
    refused("absent.h5", "no such file");
    fs::write(folder.path().join("a.txt"), "hello").expect("writes");
    refused("a.txt", "a file that is not HDF5");
    let journal = folder.path().join("a.journal");
    Journal::open_or_create(&journal, &header(2), false).expect("creates");
    refused("a.journal", "`gather`");
    let other = hdf5::File::create(folder.path().join("other.h5")).expect("creates");
    other.close().expect("closes");
    refused("other.h5", "an HDF5 file of something else");
    let path = folder.path().join("run.h5");
    assembled(&path, &|_| true);
    let bytes = fs::read(&path).expect("there");
    fs::write(folder.path().join("torn.h5"), &bytes[..bytes.len() / 2]).expect("writes");
    refused("torn.h5", "does not open");
}

/// If it failed, verification would wave through a file that lost a chunk to a full disk.
#[test]
fn verification_notices_a_changed_value() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("run.h5");
    assembled(&path, &|_| true);
    let all = open(&path).and_then(|run| run.all()).expect("reads");
    let block = |first: usize, count: usize| put::fingerprint(&all[15 * first..][..15 * count]);
    let blocks = [block(0, 16), block(16, 16), block(32, 5)];
    let shape = [CELLS, 3, 5];
    assemble::verify(&path, &[], &blocks, shape).expect("intact");
    let opened = hdf5::File::with_options()
        .with_fapl(|plist| plist.file_locking(false))
        .open_rw(&path);
    let file = opened.expect("opens");
    let zero = ndarray::arr1(&[0.0]);
    let abundance = file.dataset("abundance").expect("there");
    abundance
        .write_slice(&zero, (20..21, 1, 2))
        .expect("writes");
    file.close().expect("closes");
    let cause = assemble::verify(&path, &[], &blocks, shape).expect_err("noticed");
    assert!(cause.to_string().contains("16..32"), "{cause}");
}
