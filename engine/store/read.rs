//! Owns reading a run file back: its header in full, and abundances by cell, by species or by time.
//!
//! It never writes and never computes; abundances are read from the file when asked for.

use std::fs;
use std::io::{self, Read};
use std::path::{Path, PathBuf};

use hdf5::types::VarLenUnicode;
use hdf5::{Dataset, File, Group, H5Type, Location, Selection};

use super::header::{CELL_NUMBERS, PHASES, RunHeader, SpeciesInfo, Tolerances, cell_from};
use super::layout::BALANCE_LABELS;
use super::{LAYOUT_ATTRIBUTE, LAYOUT_VERSION};
use crate::disk::conditions::{Disk, FieldKind, Light};
use crate::errors::{Failure, InputError};
use crate::run::journal;
use crate::run::record::{Balance, COUNTER_NAMES, CellStatus, Work};

/// Cache for chunks of abundances. HDF5's default of 1 MB holds four: reading the histories of
/// neighbouring cells one after the other would inflate each chunk again and again.
const CACHE_BYTES: usize = 32 << 20;
/// A prime, well above the number of chunks that fit.
const CACHE_SLOTS: usize = 4099;

/// A run, opened for reading.
#[derive(Debug)]
pub struct RunFile {
    path: PathBuf,
    file: File,
    abundance: Dataset,
    header: RunHeader,
    input_hash: String,
    statuses: Vec<CellStatus>,
    reasons: Vec<String>,
    failed_at: Vec<f64>,
}

/// Opens a run file. A file that is none is an input error that says so.
pub fn open(path: &Path) -> Result<RunFile, Failure> {
    let file = open_run(path)?;
    let read = || -> hdf5::Result<RunFile> {
        let checks = file.group("checks")?;
        let provenance = file.group("provenance")?;
        let statuses = numbers::<i8>(&file, "status")?
            .into_iter()
            .map(|number| CellStatus::from_number(number).ok_or("an unknown status"))
            .collect::<Result<Vec<_>, _>>()?;
        Ok(RunFile {
            path: path.to_path_buf(),
            abundance: file.dataset("abundance")?,
            header: read_header(&file, &provenance)?,
            input_hash: text_attribute(&provenance, "input_hash")?,
            statuses,
            reasons: texts(&checks, "reason")?,
            failed_at: numbers(&checks, "failed_at")?,
            file: file.clone(),
        })
    };
    read().map_err(|cause| {
        let found = format!("a damaged one ({cause})");
        InputError::new(path, None, "run file", found, "a whole run file").into()
    })
}

/// Whether the file at `path` is a run of ours; why not, if not.
pub(super) fn is_run(path: &Path) -> Result<(), Failure> {
    open_run(path).map(|_| ())
}

fn open_run(path: &Path) -> Result<File, Failure> {
    let wrong = |found: &str, expected: &str| -> Failure {
        InputError::new(path, None, "run file", found, expected).into()
    };
    let mut start = [0; 8];
    match fs::File::open(path).and_then(|mut file| file.read_exact(&mut start)) {
        Ok(()) => {}
        Err(cause) if cause.kind() == io::ErrorKind::NotFound => {
            return Err(wrong("no such file", "a run file of frostclock"));
        }
        Err(cause) if cause.kind() == io::ErrorKind::UnexpectedEof => {}
        Err(cause) if cause.kind() == io::ErrorKind::IsADirectory => {
            return Err(wrong("a folder", "a run file of frostclock"));
        }
        Err(cause) => return Err(Failure::machine("opening the run file", path, cause)),
    }
    if &start == journal::MAGIC {
        return Err(wrong(
            "the journal of a run",
            "a run file (make one with `gather`)",
        ));
    }
    if &start != b"\x89HDF\r\n\x1a\n" {
        return Err(wrong("a file that is not HDF5", "a run file of frostclock"));
    }
    // Without HDF5's own lock: a run file is never written to once it has its name, and on many
    // network file systems locking fails.
    let opened = File::with_options()
        .with_fapl(|plist| {
            plist
                .chunk_cache(CACHE_SLOTS, CACHE_BYTES, 0.75)
                .file_locking(false)
        })
        .open(path);
    let file = opened.map_err(|cause| {
        wrong(
            &format!("an HDF5 file that does not open ({cause})"),
            "a whole one",
        )
    })?;
    let layout = file
        .attr(LAYOUT_ATTRIBUTE)
        .and_then(|attribute| attribute.read_scalar::<i32>());
    match layout {
        Ok(LAYOUT_VERSION) => Ok(file),
        Ok(other) => Err(wrong(
            &format!("layout {other} of a run file"),
            &format!("layout {LAYOUT_VERSION}, which this engine reads"),
        )),
        Err(_) => Err(wrong(
            "an HDF5 file of something else",
            "a run file of frostclock",
        )),
    }
}

impl RunFile {
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// Everything the cells share: texts, species, times, conditions. Atoms of a species stand in
    /// the order of the run's elements.
    pub fn header(&self) -> &RunHeader {
        &self.header
    }

    /// The hash of the resolved inputs, as stored.
    pub fn input_hash(&self) -> &str {
        &self.input_hash
    }

    /// How each cell ended.
    pub fn statuses(&self) -> &[CellStatus] {
        &self.statuses
    }

    /// Why each failed cell failed; empty for the others.
    pub fn reasons(&self) -> &[String] {
        &self.reasons
    }

    /// When each failed cell failed, s; NaN for the others.
    pub fn failed_at(&self) -> &[f64] {
        &self.failed_at
    }

    /// One species in one cell at every time.
    pub fn history(&self, cell: usize, species: usize) -> Result<Vec<f64>, Failure> {
        self.select("a history", (cell, .., species))
    }

    /// One species at one time in every cell.
    pub fn snapshot(&self, time: usize, species: usize) -> Result<Vec<f64>, Failure> {
        self.select("a snapshot", (.., time, species))
    }

    /// All species of one cell at one time.
    pub fn state(&self, cell: usize, time: usize) -> Result<Vec<f64>, Failure> {
        self.select("a state", (cell, time, ..))
    }

    /// One cell: `[time][species]`.
    pub fn cell(&self, cell: usize) -> Result<Vec<Vec<f64>>, Failure> {
        let flat = self.select("a cell", (cell, .., ..))?;
        Ok(rows(&flat, self.header.species.len()))
    }

    /// One species everywhere: `[cell][time]`.
    pub fn species(&self, species: usize) -> Result<Vec<Vec<f64>>, Failure> {
        let flat = self.select("a species", (.., .., species))?;
        Ok(rows(&flat, self.header.times_yr.len()))
    }

    /// Everything: cells x times x species, the last running fastest.
    pub fn all(&self) -> Result<Vec<f64>, Failure> {
        self.abundance
            .read_raw()
            .map_err(|cause| Failure::machine("reading all abundances", &self.path, cause))
    }

    fn select(&self, what: &str, selection: impl Into<Selection>) -> Result<Vec<f64>, Failure> {
        self.abundance
            .read_slice::<f64, _, ndarray::IxDyn>(selection.into())
            .map(|array| array.iter().copied().collect())
            .map_err(|cause| Failure::machine(format!("reading {what}"), &self.path, cause))
    }

    /// What each cell cost.
    pub fn work(&self) -> Result<Vec<Work>, Failure> {
        let read = || -> hdf5::Result<Vec<Work>> {
            let group = self.file.group("work")?;
            let mut work = vec![[0; 7]; self.statuses.len()];
            for (column, name) in COUNTER_NAMES.into_iter().enumerate() {
                for (counters, count) in work.iter_mut().zip(numbers::<u64>(&group, name)?) {
                    counters[column] = count;
                }
            }
            let seconds = numbers(&group, "seconds")?;
            Ok(work
                .into_iter()
                .zip(seconds)
                .map(|(c, s)| Work::from_counters(c, s))
                .collect())
        };
        read().map_err(|cause| Failure::machine("reading the work", &self.path, cause))
    }

    /// Drifts of the invariants: `[cell][time]`; NaN where a snapshot was not reached.
    pub fn balance(&self) -> Result<Vec<Vec<Balance>>, Failure> {
        let read = || -> hdf5::Result<Vec<Vec<Balance>>> {
            let group = self.file.group("checks")?;
            let mut flat = vec![[f64::NAN; 4]; self.statuses.len() * self.header.times_yr.len()];
            for (column, (name, _)) in BALANCE_LABELS.into_iter().enumerate() {
                for (balance, number) in flat.iter_mut().zip(numbers::<f64>(&group, name)?) {
                    balance[column] = number;
                }
            }
            let balances: Vec<Balance> = flat.into_iter().map(Balance::from_numbers).collect();
            Ok(rows(&balances, self.header.times_yr.len()))
        };
        read().map_err(|cause| Failure::machine("reading the checks", &self.path, cause))
    }

    /// How often each caution applied: `[cell][caution]`.
    pub fn cautions(&self) -> Result<Vec<Vec<u32>>, Failure> {
        let count = self.header.caution_names.len();
        if count == 0 {
            return Ok(vec![Vec::new(); self.statuses.len()]);
        }
        self.file
            .group("checks")
            .and_then(|group| numbers::<u32>(&group, "cautions"))
            .map(|flat| rows(&flat, count))
            .map_err(|cause| Failure::machine("reading the cautions", &self.path, cause))
    }
}

fn rows<T: Copy>(flat: &[T], length: usize) -> Vec<Vec<T>> {
    flat.chunks(length.max(1)).map(<[T]>::to_vec).collect()
}

fn numbers<T: H5Type>(group: &Group, name: &str) -> hdf5::Result<Vec<T>> {
    group.dataset(name)?.read_raw()
}

fn texts(group: &Group, name: &str) -> hdf5::Result<Vec<String>> {
    let values = group.dataset(name)?.read_raw::<VarLenUnicode>()?;
    Ok(values
        .iter()
        .map(|value| value.as_str().to_string())
        .collect())
}

fn text(group: &Group, name: &str) -> hdf5::Result<String> {
    texts(group, name).map(|values| values.into_iter().next().unwrap_or_default())
}

fn text_attribute(at: &Location, name: &str) -> hdf5::Result<String> {
    Ok(at
        .attr(name)?
        .read_scalar::<VarLenUnicode>()?
        .as_str()
        .to_string())
}

fn number_attribute(at: &Location, name: &str) -> hdf5::Result<f64> {
    at.attr(name)?.read_scalar()
}

fn read_header(file: &File, provenance: &Group) -> hdf5::Result<RunHeader> {
    Ok(RunHeader {
        title: text_attribute(file, "title")?,
        engine_version: text_attribute(provenance, "engine_version")?,
        kernel: text_attribute(provenance, "kernel")?,
        case_text: text(provenance, "case")?,
        network_text: text(provenance, "network")?,
        thermo_text: match provenance.link_exists("thermo") {
            true => text(provenance, "thermo")?,
            false => String::new(),
        },
        species: read_species(file)?,
        times_yr: numbers(file, "time")?,
        tolerances: Tolerances {
            relative: number_attribute(provenance, "relative_tolerance")?,
            smallest: number_attribute(provenance, "smallest_abundance")?,
        },
        caution_names: texts(&file.group("checks")?, "caution")?,
        notes: texts(provenance, "note")?,
        disk: read_disk(file, provenance)?,
    })
}

fn read_species(file: &File) -> hdf5::Result<Vec<SpeciesInfo>> {
    let elements = texts(file, "element")?;
    let atoms = numbers::<i32>(file, "atoms")?;
    let charges = numbers::<i32>(file, "species_charge")?;
    let masses = numbers::<f64>(file, "species_mass")?;
    let phases = numbers::<i8>(file, "species_phase")?;
    let mut species = Vec::new();
    for (row, name) in texts(file, "species")?.into_iter().enumerate() {
        let number = usize::try_from(phases[row]).unwrap_or(usize::MAX);
        let (phase, _) = *PHASES.get(number).ok_or("an unknown phase")?;
        let counts = atoms
            .get(row * elements.len()..(row + 1) * elements.len())
            .unwrap_or(&[]);
        let atoms = elements
            .iter()
            .zip(counts)
            .filter_map(|(element, count)| {
                let count = u32::try_from(*count).ok().filter(|count| *count > 0)?;
                Some((element.clone(), count))
            })
            .collect();
        species.push(SpeciesInfo {
            name,
            phase,
            charge: charges[row],
            mass: masses[row],
            atoms,
        });
    }
    Ok(species)
}

fn read_disk(file: &File, provenance: &Group) -> hdf5::Result<Disk> {
    let column_species = texts(provenance, "column_species")?;
    let spectra = texts(provenance, "field_spectrum")?;
    let attenuated = numbers::<i8>(provenance, "field_attenuated")?;
    let fields: Vec<FieldKind> = texts(provenance, "field")?
        .into_iter()
        .zip(spectra)
        .zip(attenuated)
        .map(|((name, spectrum), flag)| FieldKind {
            name,
            spectrum,
            attenuated: flag != 0,
        })
        .collect();
    let mut columns = Vec::new();
    for (name, _, _) in CELL_NUMBERS {
        columns.push(numbers::<f64>(file, name)?);
    }
    let cells = columns[0].len();
    let mut light = vec![Vec::new(); cells];
    for field in &fields {
        let of_field = read_field(file, &field.name, &column_species, cells)?;
        for (lights, one) in light.iter_mut().zip(of_field) {
            lights.push(one);
        }
    }
    let cells = light
        .into_iter()
        .enumerate()
        .map(|(cell, light)| cell_from(std::array::from_fn(|n| columns[n][cell]), light))
        .collect();
    Ok(Disk {
        fields,
        column_species,
        cells,
    })
}

/// One field as every cell sees it.
fn read_field(
    file: &File,
    field: &str,
    column_species: &[String],
    cells: usize,
) -> hdf5::Result<Vec<Light>> {
    let strengths = numbers::<f64>(file, &format!("UV_{field}"))?;
    let extinctions = numbers::<f64>(file, &format!("AV_{field}"))?;
    let mut light: Vec<Light> = strengths
        .into_iter()
        .zip(extinctions)
        .map(|(strength, extinction)| Light {
            strength,
            extinction,
            columns: Vec::with_capacity(column_species.len()),
            shields: Vec::with_capacity(column_species.len()),
        })
        .collect();
    for species in column_species {
        let columns = numbers::<f64>(file, &format!("N_{species}_{field}"))?;
        let name = format!("shield_{species}_{field}");
        // Left out of the file where no cell has one.
        let shields = if file.link_exists(&name) {
            numbers(file, &name)?
        } else {
            vec![f64::NAN; cells]
        };
        for ((light, column), shield) in light.iter_mut().zip(columns).zip(shields) {
            light.columns.push(column);
            light
                .shields
                .push(Some(shield).filter(|factor: &f64| !factor.is_nan()));
        }
    }
    Ok(light)
}
