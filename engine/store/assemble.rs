//! Owns the writing of a run file: part file, free space, datasets in blocks of cells, verification
//! of the reopened file, and only then the rename into place.
//!
//! It never reads a journal itself and never replaces a file that is not a run of ours.

use std::path::Path;

use hdf5::File;
use hdf5::file::LibraryVersion;

use super::durable::{PartFile, remove_leftovers, require_space};
use super::header::{CELL_NUMBERS, RunHeader};
use super::layout::Writer;
use super::put::{Kept, fingerprint};
use super::{CHUNK, RecordSource, read};
use crate::errors::{Failure, InputError};

/// Room kept free beyond the size of the file itself, bytes.
const MARGIN: u64 = 4 << 20;

/// Writes the run file at `path` from `header` and the records that `source` gives. At most 16 cells
/// are held in memory at a time. On any failure no file appears, and one that is there stays.
pub fn assemble(path: &Path, header: &RunHeader, source: &mut RecordSource) -> Result<(), Failure> {
    check_names(path, header)?;
    check_target(path)?;
    let shape = [
        header.disk.cells.len(),
        header.times_yr.len(),
        header.species.len(),
    ];
    require_space(path, expected_size(header, shape) + MARGIN)?;
    let part = PartFile::beside(path)?;
    let failed = |cause: hdf5::Error| Failure::machine("writing the run file", path, cause);
    let file = File::with_options()
        .with_fapl(|plist| {
            plist
                .libver_bounds(LibraryVersion::V110, LibraryVersion::V110)
                // `PartFile` holds the lock.
                .file_locking(false)
        })
        .with_fcpl(|plist| {
            plist
                .link_creation_order(hdf5::plist::file_create::LinkCreationOrder::Indexed)
                .obj_track_times(false)
        })
        .create(part.path())
        .map_err(failed)?;
    let mut writer = Writer::new(file, header, shape);
    if let Err(failure) = writer.write(path, source) {
        // HDF5 2.x crashes on closing a file that met a full disk: there, rather leak it.
        if hdf5::library_version().0 >= 2 {
            std::mem::forget(writer);
        }
        return Err(failure);
    }
    let (file, kept, blocks) = writer.finish();
    file.close().map_err(failed)?;
    verify(part.path(), &kept, &blocks, shape).map_err(|cause| {
        Failure::machine("checking the finished run file (disk full?)", path, cause)
    })?;
    part.publish()?;
    remove_leftovers(path);
    Ok(())
}

/// Upper bound of the size, bytes: nothing compressed, every per-cell number counted.
fn expected_size(header: &RunHeader, [cells, times, species]: [usize; 3]) -> u64 {
    let fields = header.disk.fields.len() * (2 + 2 * header.disk.column_species.len());
    let per_cell = 8 * (times * (species + 4) + CELL_NUMBERS.len() + fields + 16)
        + 4 * header.caution_names.len();
    let texts = header.case_text.len()
        + header.network_text.len()
        + header.thermo_text.len()
        + 256 * species;
    (cells * per_cell + texts) as u64
}

/// A name becomes part of a dataset's name: `/` would make groups of it.
fn check_names(path: &Path, header: &RunHeader) -> Result<(), Failure> {
    let fields = header.disk.fields.iter().map(|field| &field.name);
    let bad = fields
        .chain(&header.disk.column_species)
        .find(|name| name.contains('/'));
    match bad {
        None => Ok(()),
        Some(name) => {
            Err(InputError::new(path, None, "name of a field", name.clone(), "no `/` in it").into())
        }
    }
}

/// Only a run of ours may be replaced. Asked again when the file is written: for callers that want
/// to know before hours of work.
pub fn check_target(path: &Path) -> Result<(), Failure> {
    match read::is_run(path) {
        Ok(()) => Ok(()),
        Err(_) if !path.exists() => Ok(()),
        Err(Failure::Input(_)) => {
            let found = if path.is_dir() {
                "a folder"
            } else {
                "a file that is no run of frostclock"
            };
            let expected = "a run to replace, or no file (it is left as it is)";
            Err(InputError::new(path, None, "output", found, expected).into())
        }
        Err(failure) => Err(failure),
    }
}

/// Reopens the file and compares every dataset, bit for bit, with what was put there: HDF5 may say
/// Ok to writes, and to the closing, that never reached a full disk.
pub(super) fn verify(
    part: &Path,
    kept: &[Kept],
    blocks: &[u32],
    [cells, _, _]: [usize; 3],
) -> hdf5::Result<()> {
    // Without HDF5's own lock, as written: the name of the part file is ours alone.
    let file = File::with_options()
        .with_fapl(|plist| plist.file_locking(false))
        .open(part)?;
    for dataset in kept {
        dataset.check(&file)?;
    }
    let abundance = file.dataset("abundance")?;
    for (block, first) in (0..cells).step_by(CHUNK[0]).enumerate() {
        let rows = first..cells.min(first + CHUNK[0]);
        let values = abundance.read_slice::<f64, _, ndarray::Ix3>((rows.clone(), .., ..))?;
        let same = values.as_slice().map(fingerprint) == blocks.get(block).copied();
        if !same {
            return Err(
                format!("abundance of cells {rows:?} does not hold what was written").into(),
            );
        }
    }
    file.close()
}
