//! Owns what the tests of the command share: a folder with a case in it, the command run there, and
//! every bit of a run file.
//!
//! It never judges: the tests do.

// Each test program uses its own part of this.
#![allow(dead_code)]

use frostclock::store::{self, RunFile};
use hdf5::types::{FloatSize, IntSize, TypeDescriptor, VarLenUnicode};
use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, ExitStatus, Output, Stdio};
use tempfile::TempDir;

/// The command, to be run in `folder`. No variable of the environment changes what it says.
pub fn command(folder: &Path, arguments: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_frostclock"));
    command
        .current_dir(folder)
        .args(arguments)
        .env_remove("RUST_LOG")
        .stdin(Stdio::null());
    command
}

/// How a command ended and what it said.
#[derive(Debug)]
pub struct Ended {
    /// The exit status as a shell reports it: 128 + n after signal n.
    pub status: i32,
    pub out: String,
    pub err: String,
}

/// Runs the command to its end.
pub fn frostclock(folder: &Path, arguments: &[&str]) -> Ended {
    ended(
        command(folder, arguments)
            .output()
            .expect("the command starts"),
    )
}

fn ended(output: Output) -> Ended {
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("what it says is UTF-8");
    Ended {
        status: shell_status(output.status),
        out: text(output.stdout),
        err: text(output.stderr),
    }
}

pub fn shell_status(status: ExitStatus) -> i32 {
    use std::os::unix::process::ExitStatusExt;
    status
        .code()
        .or(status.signal().map(|signal| 128 + signal))
        .expect("it ended")
}

/// Runs the command to its end and insists on success.
pub fn succeeds(folder: &Path, arguments: &[&str]) -> Ended {
    let ended = frostclock(folder, arguments);
    assert_eq!(ended.status, 0, "{arguments:?} said:\n{}", ended.err);
    ended
}

/// Sends a signal (`INT`, `TERM`, `KILL`) to a child that has not been waited for.
pub fn send(signal: &str, child: &Child) {
    let sent = Command::new("kill")
        .args(["-s", signal, &child.id().to_string()])
        .status();
    assert!(
        sent.expect("kill runs").success(),
        "no {signal} for {}",
        child.id()
    );
}

/// A folder holding the case `three.yaml`: three cells, the smallest network, milliseconds.
pub fn three_places() -> TempDir {
    folder_with(&[
        "tests/data/three.yaml",
        "tests/data/three.csv",
        "tests/data/mini.yaml",
    ])
}

/// That case, run.
pub fn finished() -> (TempDir, RunFile) {
    let folder = three_places();
    succeeds(folder.path(), &["run", "three.yaml"]);
    let run = store::open(&folder.path().join("three.h5")).expect("a run file");
    (folder, run)
}

/// A folder with copies of files of the repository.
pub fn folder_with(files: &[&str]) -> TempDir {
    let folder = tempfile::tempdir().expect("a folder");
    for file in files {
        let from = Path::new(env!("CARGO_MANIFEST_DIR")).join(file);
        let to = folder.path().join(from.file_name().expect("a name"));
        fs::copy(&from, to).unwrap_or_else(|cause| panic!("{file}: {cause}"));
    }
    folder
}

/// Replaces the one place where `old` stands in a file; the whole content if `old` is empty.
pub fn edit(file: &Path, old: &str, new: &str) {
    if old.is_empty() {
        return fs::write(file, new).expect("written");
    }
    let text = fs::read_to_string(file).expect("read");
    assert_eq!(
        text.matches(old).count(),
        1,
        "`{old}` in {}",
        file.display()
    );
    fs::write(file, text.replace(old, new)).expect("written");
}

/// Everything below a folder: bytes of files by path, None for folders.
pub fn contents(folder: &Path) -> BTreeMap<PathBuf, Option<Vec<u8>>> {
    let mut all = BTreeMap::new();
    for entry in fs::read_dir(folder).expect("a folder") {
        let path = entry.expect("an entry").path();
        if path.is_dir() {
            all.extend(contents(&path));
            all.insert(path, None);
        } else {
            let bytes = fs::read(&path).expect("read");
            all.insert(path, Some(bytes));
        }
    }
    all
}

/// The names in a folder, ascending.
pub fn names(folder: &Path) -> Vec<String> {
    let name = |path: &PathBuf| path.file_name().map(|n| n.to_string_lossy().into_owned());
    contents(folder).keys().filter_map(name).collect()
}

/// Every dataset of an HDF5 file by its path, as bytes (texts with their lengths).
pub fn datasets(path: &Path) -> BTreeMap<String, Vec<u8>> {
    let opened = hdf5::File::with_options()
        .with_fapl(|plist| plist.file_locking(false))
        .open(path);
    let file = opened.unwrap_or_else(|e| panic!("{}: {e}", path.display()));
    let mut found = BTreeMap::new();
    collect(&file, &mut found);
    assert!(
        found.len() > 20,
        "only {} datasets in {}",
        found.len(),
        path.display()
    );
    found
}

fn collect(group: &hdf5::Group, found: &mut BTreeMap<String, Vec<u8>>) {
    for dataset in group.datasets().expect("datasets") {
        found.insert(dataset.name(), bytes(&dataset));
    }
    for inner in group.groups().expect("groups") {
        collect(&inner, found);
    }
}

fn bytes(dataset: &hdf5::Dataset) -> Vec<u8> {
    let kind = dataset
        .dtype()
        .and_then(|t| t.to_descriptor())
        .expect("a known type");
    macro_rules! raw {
        ($number:ty) => {
            dataset
                .read_raw::<$number>()
                .expect("read")
                .iter()
                .flat_map(|n| n.to_le_bytes())
                .collect()
        };
    }
    match kind {
        TypeDescriptor::Float(FloatSize::U8) => raw!(f64),
        TypeDescriptor::Float(FloatSize::U4) => raw!(f32),
        TypeDescriptor::Integer(IntSize::U1) => raw!(i8),
        TypeDescriptor::Integer(IntSize::U4) => raw!(i32),
        TypeDescriptor::Integer(IntSize::U8) => raw!(i64),
        TypeDescriptor::Unsigned(IntSize::U4) => raw!(u32),
        TypeDescriptor::Unsigned(IntSize::U8) => raw!(u64),
        TypeDescriptor::VarLenUnicode => {
            let texts = dataset.read_raw::<VarLenUnicode>().expect("read");
            texts
                .iter()
                .flat_map(|t| format!("{}:{}", t.len(), t.as_str()).into_bytes())
                .collect()
        }
        other => panic!("{} holds {other:?}", dataset.name()),
    }
}

/// Says which datasets of two run files differ in any bit, but for the seconds the work took.
pub fn assert_same_run(one: &Path, other: &Path) {
    let (mut one, mut other) = (datasets(one), datasets(other));
    for all in [&mut one, &mut other] {
        assert!(all.remove("/work/seconds").is_some(), "no /work/seconds");
    }
    assert!(
        one.keys().eq(other.keys()),
        "{:?}\n{:?}",
        one.keys(),
        other.keys()
    );
    let differ: Vec<_> = one
        .iter()
        .filter(|(name, bytes)| other[*name] != **bytes)
        .map(|(n, _)| n)
        .collect();
    assert!(differ.is_empty(), "these differ: {differ:?}");
}

/// A CSV: heads, and rows by the text of their first cell.
pub fn csv(path: &Path) -> (Vec<String>, BTreeMap<String, Vec<String>>) {
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

/// All rows of a CSV file in their order, the heads first.
pub fn rows(path: &Path) -> Vec<Vec<String>> {
    let mut reader = csv::ReaderBuilder::new()
        .has_headers(false)
        .from_path(path)
        .expect("it is there");
    (reader.records())
        .map(|row| row.expect("a row").iter().map(String::from).collect())
        .collect()
}

/// The Python of `tools/test`, with what its readers need.
pub fn python() -> PathBuf {
    let python = std::env::var_os("FROSTCLOCK_PYTHON");
    PathBuf::from(
        python.expect("FROSTCLOCK_PYTHON is not set: run these tests with `sh tools/test`"),
    )
}
