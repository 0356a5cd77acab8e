//! Owns what it takes for a change of a directory to survive a power cut, and the part file that
//! becomes a finished file in one step or not at all.
//!
//! It never looks into the files.

use std::ffi::OsString;
use std::fs::{File, OpenOptions};
use std::io;
use std::path::{Path, PathBuf};

use crate::errors::Failure;

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
            name.push(format!(".part-{}-{number}", std::process::id()));
            let part = PathBuf::from(name);
            match OpenOptions::new().write(true).create_new(true).open(&part) {
                Ok(handle) => {
                    let target = target.to_path_buf();
                    return Ok(PartFile {
                        part,
                        target,
                        handle,
                        published: false,
                    });
                }
                Err(cause) if cause.kind() == io::ErrorKind::AlreadyExists => number += 1,
                Err(cause) => return Err(Failure::machine("creating it", &part, cause)),
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
