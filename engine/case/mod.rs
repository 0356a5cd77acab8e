//! Owns the case file: reads it, checks everything in it, fills in the defaults.
//!
//! It never expands a network or computes a rate. Once [`read`] has returned, nothing a user
//! wrote in the case or its table can still be wrong but for what only the network knows: species
//! and spectra, which [`Case::disk_for`] and [`start_state`] check.

mod checker;
mod clock;
mod disk;
mod layout;
mod networks;
mod options;
mod start;

pub use networks::built_in_network;
pub use start::{
    GivenAbundance, StartChoice, StartKind, compositions, element_totals, start_notes, start_state,
};

use crate::disk::Disk;
use crate::errors::{Failure, InputError};
use crate::network::model::{Chemistry, GrainOptions};
use crate::yaml;
use checker::{Checker, quoted};
use std::io;
use std::path::{Path, PathBuf};

/// A case, resolved: every default filled in, every entry checked.
#[derive(Debug, Clone, PartialEq)]
pub struct Case {
    pub title: String,
    /// The case file.
    pub path: PathBuf,
    /// As written: a built-in name or a path.
    pub network_name: String,
    /// Where the network file lies, unless built in.
    pub network_path: Option<PathBuf>,
    pub network_text: String,
    /// Of the polynomials the network names; empty if it names none.
    pub thermo_text: String,
    pub grains: GrainOptions,
    /// Turbulent line width, cm s^-1.
    pub turbulence: f64,
    /// `[M]/n_H` of falloff reactions, if fixed.
    pub colliders: Option<f64>,
    /// With the columns of every species a case may name; see [`Case::disk_for`].
    pub disk: Disk,
    /// Where each field of the disk is given, 1-based, for errors.
    pub field_lines: Vec<Option<usize>>,
    /// The cell table as read, if the disk is one.
    pub table_text: Option<String>,
    pub start: StartChoice,
    /// s, ascending, 0 first.
    pub snapshots: Vec<f64>,
    /// Relative tolerance.
    pub relative: f64,
    /// Absolute tolerance, as an abundance.
    pub smallest: f64,
    pub output: PathBuf,
    /// Defaults taken, in words.
    pub notes: Vec<String>,
    /// The case with its defaults as a case file of one canonical layout.
    pub resolved: String,
}

/// Reads the content of a file named in a case.
pub type Files<'a> = &'a dyn Fn(&Path) -> io::Result<String>;

/// Reads the case file at `path`.
pub fn open(path: &Path) -> Result<Case, Failure> {
    let files: Files = &|path| std::fs::read_to_string(path);
    let text = files(path).map_err(|error| match unreadable(&error) {
        Some(found) => InputError::new(
            Path::new(""),
            None,
            path.display().to_string(),
            found,
            "a case file",
        )
        .into(),
        None => Failure::machine("reading the case", path, error),
    })?;
    read(path, &text, files)
}

/// Reads a case from `text`, the content of the file `path`; `files` gives the network and the
/// table it names (from the disk, or as stored in a run).
pub fn read(path: &Path, text: &str, files: Files) -> Result<Case, Failure> {
    let (file, positions): (layout::CaseFile, _) = yaml::read(path, text)?;
    let mut check = Checker::new(path, &positions);
    if file.title.trim().is_empty() {
        check.error("title", "an empty title", "a line of text");
    }
    let network = networks::read(&mut check, file.network.as_deref(), files)?;
    let disk = disk::read(&mut check, &file.disk, files)?;
    let start = start::read(&mut check, &file.start);
    let clock = clock::read(&mut check, &file.clock);
    let accuracy = options::accuracy(&mut check, &file.accuracy);
    let grains = options::grains(&mut check, &file.grains);
    let gas = options::gas(&mut check, &file.gas);
    let output = output(&mut check, file.output.as_deref());
    let (Some(network), Some(disk), Some(start), true) =
        (network, disk, start, check.errors.is_empty())
    else {
        return Err(Failure::Input(check.errors));
    };

    let resolved = [
        format!("title: {}\n", quoted(&file.title)),
        format!("network: {}\n", quoted(&network.name)),
        disk.resolved,
        start.resolved,
        clock.resolved,
        accuracy.resolved,
        grains.resolved,
        gas.resolved,
        format!("output: {}\n", quoted(&output)),
    ]
    .concat();
    let mut notes = check.notes();
    let field_lines = (0..disk.disk.fields.len())
        .map(|i| match file.disk.recipe {
            None => check.line(&format!("disk.fields[{i}].spectrum")),
            Some(_) => check.line("disk.recipe.light.star.spectrum"),
        })
        .collect();
    notes.extend(disk.notes);
    Ok(Case {
        title: file.title,
        path: path.to_path_buf(),
        network_name: network.name,
        network_path: network.path,
        network_text: network.text,
        thermo_text: network.thermo,
        grains: grains.value,
        turbulence: gas.value.0,
        colliders: gas.value.1,
        disk: disk.disk,
        field_lines,
        table_text: disk.table_text,
        start: start.value,
        snapshots: clock.value,
        relative: accuracy.value.0,
        smallest: accuracy.value.1,
        output: beside(path, &output),
        notes,
        resolved,
    })
}

/// The checked content of a block with its part of the resolved case.
struct Block<T> {
    value: T,
    resolved: String,
}

fn output(check: &mut Checker, given: Option<&str>) -> String {
    match given {
        Some(name) if name.ends_with(".h5") && name.len() > 3 => name.to_string(),
        Some(name) => {
            check.error("output", format!("`{name}`"), "a file name ending in .h5");
            name.to_string()
        }
        None => {
            let stem = check
                .file
                .file_stem()
                .map(|stem| stem.to_string_lossy().into_owned());
            let name = format!("{}.h5", stem.unwrap_or_else(|| "run".to_string()));
            check.default_taken("output", name.clone());
            name
        }
    }
}

/// `name` as a path relative to the folder of the case file.
fn beside(case: &Path, name: &str) -> PathBuf {
    case.parent().unwrap_or(Path::new("")).join(name)
}

/// What a user did wrong if a named file cannot be read, or None if the machine failed.
pub(crate) fn unreadable(error: &io::Error) -> Option<&'static str> {
    match error.kind() {
        io::ErrorKind::NotFound => Some("no such file"),
        io::ErrorKind::IsADirectory => Some("a folder"),
        io::ErrorKind::InvalidData => Some("a file that is not UTF-8 text"),
        _ => None,
    }
}

/// Reads a file the entry `key` names; None after an error of the user.
fn file_text(
    check: &mut Checker,
    key: &str,
    path: &Path,
    files: Files,
) -> Result<Option<String>, Failure> {
    match files(path) {
        Ok(text) => Ok(Some(text)),
        Err(error) => match unreadable(&error) {
            Some(found) => {
                check.error(
                    key,
                    format!("{found} at {}", path.display()),
                    "a readable file",
                );
                Ok(None)
            }
            None => Err(Failure::machine(
                format!("reading {key} of the case"),
                path,
                error,
            )),
        },
    }
}

impl Case {
    /// The disk as `chemistry` needs it: columns in its order, every spectrum known to it.
    pub fn disk_for(&self, chemistry: &Chemistry) -> Result<Disk, InputError> {
        for (i, field) in self.disk.fields.iter().enumerate() {
            if !chemistry.spectra.contains(&field.spectrum) {
                return Err(InputError::new(
                    &self.path,
                    self.field_lines.get(i).copied().flatten(),
                    format!("spectrum of the field `{}`", field.name),
                    format!("`{}`, which the network does not know", field.spectrum),
                    format!("one of {}", chemistry.spectra.join(", ")),
                ));
            }
        }
        self.disk.for_columns(&chemistry.column_species, &self.path)
    }
}

#[cfg(test)]
mod tests;
