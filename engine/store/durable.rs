//! Owns what it takes for a change of a directory to survive a power cut, and the part file that
//! becomes a finished file in one step or not at all.
//!
//! It never looks into the files.

use std::ffi::OsString;
use std::fs::{File, OpenOptions};
use std::io;
use std::path::{Path, PathBuf};

use fs4::fs_std::FileExt;

use crate::errors::{Failure, InputError, in_words};

/// The directory a file stands in (`.` for a bare name).
pub fn directory_of(path: &Path) -> &Path {
    match path.parent() {
        Some(parent) if !parent.as_os_str().is_empty() => parent,
        _ => Path::new("."),
    }
}

/// Makes a creation, rename or removal at `path` durable: syncing the file itself does not.
pub fn sync_directory_of(path: &Path) -> Result<(), Failure> {
    File::open(directory_of(path))
        .and_then(|directory| directory.sync_all())
        .map_err(|cause| Failure::machine("syncing its directory", path, cause))
}

/// Refuses when the file system that holds `path` has less than `needed` bytes left.
pub fn require_space(path: &Path, needed: u64) -> Result<(), Failure> {
    let free = fs4::available_space(directory_of(path))
        .map_err(|cause| Failure::machine("asking for the free space beside it", path, cause))?;
    if free < needed {
        let (needed, free) = (needed as f64 / 1.0e6, free as f64 / 1.0e6);
        return Err(Failure::machine(
            "making room for it",
            path,
            format!("needs up to {needed:.1} MB, but only {free:.1} MB are free"),
        ));
    }
    Ok(())
}

/// The failure of a creation at `path`, which `entry` of the input names: a place where nothing may
/// be written is the user's mistake, anything else the machine's.
pub fn not_created(path: &Path, entry: &str, doing: &str, cause: io::Error) -> Failure {
    use io::ErrorKind::{
        IsADirectory, NotADirectory, NotFound, PermissionDenied, ReadOnlyFilesystem,
    };
    let expected = "a place that can be written to";
    match cause.kind() {
        IsADirectory => {
            let expected = format!("a {entry}, or no file");
            InputError::new(path, None, entry, "a folder", expected).into()
        }
        NotFound | NotADirectory | PermissionDenied | ReadOnlyFilesystem => {
            let folder = directory_of(path).display();
            let found = format!("`{folder}` ({})", in_words(&cause));
            InputError::new(path, None, entry, found, expected).into()
        }
        _ => Failure::machine(doing, path, cause),
    }
}

/// What follows the target's name in that of its part files.
const PART: &str = ".part-";

/// Removes the part files that killed processes left beside `target`. Never one in use: HDF5 locks
/// what it has open, and whoever loses its file otherwise can only say so, for `target` is written.
pub fn remove_leftovers(target: &Path) {
    let Some(name) = target.file_name() else {
        return;
    };
    let start = format!("{}{PART}", name.to_string_lossy());
    let Ok(entries) = std::fs::read_dir(directory_of(target)) else {
        return;
    };
    for entry in entries.flatten() {
        let rest = entry
            .file_name()
            .to_string_lossy()
            .strip_prefix(&start)
            .map(str::to_string);
        // `<process>-<number>` and nothing else.
        let ours = rest
            .as_deref()
            .and_then(|rest| rest.split_once('-'))
            .is_some_and(|(process, number)| {
                process.parse::<u32>().is_ok() && number.parse::<u32>().is_ok()
            });
        let part = entry.path();
        let idle = || {
            let locked = File::open(&part).map(|file| file.try_lock_exclusive());
            matches!(locked, Ok(Ok(true)))
        };
        if ours && idle() {
            match std::fs::remove_file(&part) {
                Ok(()) => log::info!("removed {}, left by a run that was killed", part.display()),
                Err(cause) => log::warn!("{}: could not be removed: {cause}", part.display()),
            }
        }
    }
}

/// A temporary file beside its target. Dropped before [`PartFile::publish`], it is removed.
#[derive(Debug)]
pub struct PartFile {
    part: PathBuf,
    target: PathBuf,
    /// Opened before anything is written through HDF5, so that a write-back error of any writer
    /// is reported to the sync of this handle.
    handle: File,
    published: bool,
}

impl PartFile {
    /// Creates `<target>.part-<process>-<number>`. The number steps over what killed processes left:
    /// in a container every process has the same few identifiers.
    pub fn beside(target: &Path) -> Result<Self, Failure> {
        let mut number = 0;
        loop {
            let mut name = OsString::from(target.as_os_str());
            name.push(format!("{PART}{}-{number}", std::process::id()));
            let part = PathBuf::from(name);
            match OpenOptions::new().write(true).create_new(true).open(&part) {
                Ok(handle) => {
                    // The sign that somebody is at work on it, for `remove_leftovers`. Ours and not
                    // HDF5's, whose handles child processes inherit together with their locks.
                    let locked = handle.try_lock_exclusive();
                    if !matches!(locked, Ok(true)) {
                        log::debug!("{} could not be locked", part.display());
                    }
                    let target = target.to_path_buf();
                    return Ok(PartFile {
                        part,
                        target,
                        handle,
                        published: false,
                    });
                }
                Err(cause) if cause.kind() == io::ErrorKind::AlreadyExists => number += 1,
                Err(cause) => return Err(not_created(target, "output", "creating it", cause)),
            }
        }
    }

    /// Where to write.
    pub fn path(&self) -> &Path {
        &self.part
    }

    /// Syncs the contents, puts the file in the place of its target and syncs the directory.
    pub fn publish(mut self) -> Result<(), Failure> {
        self.handle
            .sync_all()
            .map_err(|cause| Failure::machine("syncing it", &self.part, cause))?;
        std::fs::rename(&self.part, &self.target)
            .map_err(|cause| Failure::machine("putting it in place", &self.target, cause))?;
        self.published = true;
        sync_directory_of(&self.target)
    }
}

impl Drop for PartFile {
    fn drop(&mut self) {
        if self.published {
            return;
        }
        // Emptied first: a handle that HDF5 still holds would keep the blocks of a removed file.
        let emptied = self.handle.set_len(0);
        if let Err(cause) = emptied.and_then(|()| std::fs::remove_file(&self.part)) {
            log::warn!("{}: could not be removed: {cause}", self.part.display());
        }
    }
}
