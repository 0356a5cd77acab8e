//! Owns the journal: the append-only file that makes a run restartable.
//!
//! Layout: magic, format version, then frames `kind | length | crc32 | body`; the first frame is the
//! run's header, every other the record of one cell. The checksum covers kind, length and body. What
//! a kill or a power cut leaves behind is at worst a torn last frame, which the next scan cuts off.
//! It never computes, never decides which cells to run, and overwrites nothing it did not write.

use std::collections::BTreeMap;
use std::fs::{File, OpenOptions};
use std::io::{self, BufReader, Read, Seek, SeekFrom, Write};
use std::path::{Path, PathBuf};

use fs4::fs_std::FileExt;

use super::frame::{FRAME, fill, push_frame, read_frame};
use super::record::{CellRecord, CellStatus};
use super::same_run::differences;
use crate::errors::{Failure, InputError};
use crate::store::durable::{not_created, sync_directory_of};
use crate::store::header::RunHeader;

/// The first bytes of a journal.
pub const MAGIC: &[u8; 8] = b"frstjrnl";
/// Raised whenever the meaning of any byte changes.
const FORMAT: u32 = 2;
const PREAMBLE: usize = MAGIC.len() + 4;
const KIND_HEADER: u8 = 1;
const KIND_CELL: u8 = 2;

/// Where the record of a cell stands.
#[derive(Debug, Clone, Copy)]
struct Place {
    offset: u64,
    status: CellStatus,
}

/// The readable side of a journal: its header and where each cell's record stands. Records are
/// read one by one, so that a journal larger than the memory can be gathered.
#[derive(Debug)]
pub struct Records {
    path: PathBuf,
    file: File,
    header: RunHeader,
    places: BTreeMap<usize, Place>,
}

impl Records {
    pub fn header(&self) -> &RunHeader {
        &self.header
    }

    /// The cells with a record and how they ended, ascending.
    pub fn finished(&self) -> impl Iterator<Item = (usize, CellStatus)> + '_ {
        self.places
            .iter()
            .map(|(cell, place)| (*cell, place.status))
    }

    /// The record of a cell, if there is one.
    pub fn record(&mut self, cell: usize) -> Result<Option<CellRecord>, Failure> {
        let Some(place) = self.places.get(&cell) else {
            return Ok(None);
        };
        let failed = |cause: &dyn std::fmt::Display| {
            Failure::machine(format!("reading cell {cell} back"), &self.path, cause)
        };
        let mut file = &self.file;
        file.seek(SeekFrom::Start(place.offset))
            .map_err(|cause| failed(&cause))?;
        match read_frame(&mut file, u64::MAX).map_err(|cause| failed(&cause))? {
            Some((KIND_CELL, body)) => CellRecord::decode(&body)
                .map(Some)
                .map_err(|cause| failed(&cause)),
            _ => Err(failed(&"its checksum no longer holds")),
        }
    }
}

/// A journal open for appending, under an exclusive lock.
#[derive(Debug)]
pub struct Journal {
    records: Records,
    /// Where the next frame goes.
    end: u64,
    /// After a failed write nothing more is appended: what reached the disk is unknown.
    broken: bool,
}

impl Journal {
    /// Opens the journal at `path` to continue the run of `header`, or creates it. A torn tail is
    /// cut. A journal of other inputs, another engine version or another kernel is refused with
    /// what differs; `fresh` empties it instead. A file that is no journal is never touched.
    pub fn open_or_create(path: &Path, header: &RunHeader, fresh: bool) -> Result<Self, Failure> {
        let file = open_locked(path)?;
        let opening = preamble_and_header(header);
        let length = file
            .metadata()
            .map_err(|c| Failure::machine("reading it", path, c))?
            .len();
        let mut start = vec![
            0;
            opening
                .len()
                .min(usize::try_from(length).unwrap_or(usize::MAX))
        ];
        (&file)
            .read_exact(&mut start)
            .map_err(|c| Failure::machine("reading it", path, c))?;
        // Empty, or this very opening cut short: a creation that was interrupted.
        let torn_creation = start.len() < opening.len() && opening.starts_with(&start);
        if torn_creation || (fresh && start.starts_with(MAGIC)) {
            write_opening(&file, &opening)
                .and_then(|()| file.sync_all())
                .map_err(|c| Failure::machine("creating the journal", path, c))?;
            sync_directory_of(path)?;
            let records = Records {
                path: path.to_path_buf(),
                file,
                header: header.clone(),
                places: BTreeMap::new(),
            };
            return Ok(Journal {
                records,
                end: opening.len() as u64,
                broken: false,
            });
        }
        let (records, end) = scan(path, file)?;
        let differences = differences(path, &records.header, header);
        if !differences.is_empty() {
            return Err(Failure::Input(differences));
        }
        if end < length {
            log::warn!(
                "{}: cut {} bytes after the last whole record ({} cells kept)",
                path.display(),
                length - end,
                records.places.len()
            );
            records
                .file
                .set_len(end)
                .and_then(|()| records.file.sync_all())
                .map_err(|c| Failure::machine("cutting the torn tail of the journal", path, c))?;
        }
        Ok(Journal {
            records,
            end,
            broken: false,
        })
    }

    /// What has been recorded so far.
    pub fn records(&mut self) -> &mut Records {
        &mut self.records
    }

    /// The cells with a record and how they ended, ascending.
    pub fn finished(&self) -> impl Iterator<Item = (usize, CellStatus)> + '_ {
        self.records.finished()
    }

    /// Appends records and syncs once: when this returns Ok they survive a kill and a power cut.
    /// A second record of a cell takes the place of its first; a missing cell is none to record.
    pub fn append(&mut self, records: &[CellRecord]) -> Result<(), Failure> {
        let path = &self.records.path;
        if self.broken {
            return Err(Failure::machine(
                "appending to it",
                path,
                "an earlier write failed",
            ));
        }
        let mut frames = Vec::new();
        let mut places = Vec::with_capacity(records.len());
        let recorded = records
            .iter()
            .filter(|record| record.status != CellStatus::Missing);
        for record in recorded {
            let offset = self.end + frames.len() as u64;
            places.push((
                record.cell,
                Place {
                    offset,
                    status: record.status,
                },
            ));
            push_frame(&mut frames, KIND_CELL, &record.encode());
        }
        let mut file = &self.records.file;
        let written = file
            .seek(SeekFrom::Start(self.end))
            .and_then(|_| file.write_all(&frames))
            .and_then(|()| file.sync_data());
        if let Err(cause) = written {
            self.broken = true;
            // Only tidiness: the next scan would cut the torn frame as well.
            if let Err(also) = file.set_len(self.end) {
                log::warn!("{}: the torn end stays for now: {also}", path.display());
            }
            return Err(Failure::machine("appending to the journal", path, cause));
        }
        self.end += frames.len() as u64;
        self.records.places.extend(places);
        Ok(())
    }

    /// Removes the journal: only once the run file has been assembled and verified.
    pub fn remove(self) -> Result<(), Failure> {
        let path = &self.records.path;
        std::fs::remove_file(path)
            .map_err(|c| Failure::machine("removing the journal", path, c))?;
        sync_directory_of(path)
    }
}

/// Reads a journal, also while a run is appending to it: takes no lock, changes nothing, and leaves
/// a torn tail out.
pub fn read_only(path: &Path) -> Result<Records, Failure> {
    let file = File::open(path).map_err(|cause| {
        if cause.kind() == io::ErrorKind::NotFound {
            Failure::from(InputError::new(
                path,
                None,
                "journal",
                "no such file",
                "a journal",
            ))
        } else {
            Failure::machine("opening the journal", path, cause)
        }
    })?;
    scan(path, file).map(|(records, _)| records)
}

/// Opens and locks `path`, creating it if need be. Another run may finish and remove the file
/// between the opening and the lock: then the lock is on a file without a name, and we start over.
fn open_locked(path: &Path) -> Result<File, Failure> {
    loop {
        let file = OpenOptions::new()
            .read(true)
            .write(true)
            .create(true)
            .truncate(false)
            .open(path)
            .map_err(|cause| not_created(path, "journal", "opening the journal", cause))?;
        match file.try_lock_exclusive() {
            Ok(true) => {}
            Ok(false) => {
                return Err(InputError::new(
                    path,
                    None,
                    "journal",
                    "another run writing it",
                    "one run at a time (wait for it, or choose another output)",
                )
                .into());
            }
            Err(cause) if cause.kind() == io::ErrorKind::Unsupported => {
                log::warn!("{}: this file system has no locks: {cause}", path.display());
                return Ok(file);
            }
            Err(cause) => return Err(Failure::machine("locking the journal", path, cause)),
        }
        if is_still_at(&file, path) {
            return Ok(file);
        }
    }
}

#[cfg(unix)]
fn is_still_at(file: &File, path: &Path) -> bool {
    use std::os::unix::fs::MetadataExt;
    match (file.metadata(), std::fs::metadata(path)) {
        (Ok(ours), Ok(named)) => ours.dev() == named.dev() && ours.ino() == named.ino(),
        _ => false,
    }
}

#[cfg(not(unix))]
fn is_still_at(_: &File, _: &Path) -> bool {
    true
}

fn write_opening(mut file: &File, opening: &[u8]) -> io::Result<()> {
    file.set_len(0)?;
    file.seek(SeekFrom::Start(0))?;
    file.write_all(opening)
}

fn preamble_and_header(header: &RunHeader) -> Vec<u8> {
    let mut bytes = Vec::from(MAGIC);
    bytes.extend_from_slice(&FORMAT.to_le_bytes());
    push_frame(&mut bytes, KIND_HEADER, &header.encode());
    bytes
}

/// Reads everything that is whole; gives the records and where they end.
fn scan(path: &Path, file: File) -> Result<(Records, u64), Failure> {
    let failed = |cause: io::Error| Failure::machine("reading the journal", path, cause);
    let length = file.metadata().map_err(failed)?.len();
    let mut from = BufReader::with_capacity(1 << 20, &file);
    from.seek(SeekFrom::Start(0)).map_err(failed)?;

    let mut preamble = [0; PREAMBLE];
    let whole = fill(&mut from, &mut preamble).map_err(failed)?;
    let (magic, format) = preamble.split_at(MAGIC.len());
    if !whole || magic != MAGIC {
        return Err(InputError::new(
            path,
            None,
            "journal",
            "a file that is no journal of frostclock",
            "a journal, or no file (it is left as it is)",
        )
        .into());
    }
    if format != FORMAT.to_le_bytes() {
        let found = format
            .iter()
            .rev()
            .fold(0u32, |number, byte| number << 8 | u32::from(*byte));
        return Err(InputError::new(
            path,
            None,
            "journal format",
            found.to_string(),
            format!("{FORMAT}: continue with the engine that wrote it, or start over with --fresh"),
        )
        .into());
    }
    let mut end = PREAMBLE as u64;
    let header = match read_frame(&mut from, length - end).map_err(failed)? {
        Some((KIND_HEADER, body)) => {
            end += (FRAME + body.len()) as u64;
            RunHeader::decode(&body).ok()
        }
        _ => None,
    };
    let Some(header) = header else {
        return Err(InputError::new(
            path,
            None,
            "journal",
            "a torn or damaged header",
            "a whole one (start over with --fresh)",
        )
        .into());
    };
    let mut places = BTreeMap::new();
    while let Some((KIND_CELL, body)) =
        read_frame(&mut from, length.saturating_sub(end)).map_err(failed)?
    {
        let Ok(record) = CellRecord::decode(&body) else {
            break;
        };
        places.insert(
            record.cell,
            Place {
                offset: end,
                status: record.status,
            },
        );
        end += (FRAME + body.len()) as u64;
    }
    drop(from);
    Ok((
        Records {
            path: path.to_path_buf(),
            file,
            header,
            places,
        },
        end,
    ))
}

#[cfg(test)]
#[path = "journal_tests.rs"]
mod tests;
