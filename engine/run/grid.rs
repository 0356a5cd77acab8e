//! Owns a run from start to end: journal, all cells, run file; and picking it up again.
//!
//! It never reads a case: `Prepared` comes checked.

use super::cell;
use super::journal::{self, Journal};
use super::prepare::Prepared;
use super::progress::Progress;
use super::record::{CellRecord, CellStatus};
use super::signals::StopFlag;
use super::workers::run_cells;
use crate::errors::{Failure, InputError};
use crate::store;
use indicatif::MultiProgress;
use std::path::{Path, PathBuf};

/// How to run.
#[derive(Debug, Clone)]
pub struct Options {
    pub threads: usize,
    /// Start over, whatever an earlier run left.
    pub fresh: bool,
    /// Run the failed cells of an earlier run again.
    pub retry: bool,
}

/// How a run ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Summary {
    pub cells: usize,
    pub failed: usize,
    /// Cells that earlier runs had finished.
    pub before: usize,
}

/// The journal that belongs to a run file.
pub fn journal_path(output: &Path) -> PathBuf {
    output.with_extension("journal")
}

/// Runs all cells of `run` that have no record yet and writes the run file `output`.
///
/// Interrupted at any moment, the same call goes on from the finished cells. The journal is removed
/// when the run file is written, reopened and verified; it stays while cells have failed, so that
/// `retry` can run just those.
///
/// # Errors
/// Input errors if `output` or its journal belongs to other inputs, or `output` cannot be placed;
/// machine failures; [`Failure::Stopped`] on a signal.
pub fn run(
    run: &Prepared,
    output: &Path,
    options: &Options,
    bars: &MultiProgress,
    stop: &StopFlag,
) -> Result<Summary, Failure> {
    let cells = run.disk.cells.len();
    let journal_path = journal_path(output);
    check_folder(output)?;
    if let Some(summary) = already_done(run, output, &journal_path, options)? {
        return Ok(summary);
    }
    let mut journal = Journal::open_or_create(&journal_path, &run.header, options.fresh)?;
    let keep = |status| status == CellStatus::Done || !options.retry;
    let mut todo = vec![true; cells];
    for (cell, status) in journal.finished() {
        todo[cell] = !keep(status);
    }
    let todo: Vec<usize> = (0..cells).filter(|cell| todo[*cell]).collect();
    let before = cells - todo.len();
    if before > 0 {
        log::info!("going on from {before} finished cells of {cells}");
    }
    let mut progress = Progress::start(bars, cells, before);
    let mut sink = |record: CellRecord| {
        let status = record.status;
        if status == CellStatus::Failed {
            log::warn!("cell {} failed: {}", record.cell, record.reason);
        }
        journal.append(&[record])?;
        progress.cell(status);
        Ok(())
    };
    let compute = |cell| cell::compute(run, cell);
    let ended = run_cells(&todo, options.threads, &compute, &mut sink, stop);
    log::info!("{}", progress.finish());
    ended?;
    let failed = journal
        .finished()
        .filter(|(_, status)| *status == CellStatus::Failed)
        .count();
    let records = journal.records();
    store::assemble(output, &run.header, &mut |cell| records.record(cell))?;
    if failed == 0 {
        journal.remove()?;
    }
    Ok(Summary {
        cells,
        failed,
        before,
    })
}

/// Makes a run file from a journal, finished or under way. Returns how many of how many cells.
pub fn gather(journal: &Path, output: &Path) -> Result<(usize, usize), Failure> {
    check_folder(output)?;
    let mut records = journal::read_only(journal)?;
    let finished = records.finished().count();
    let header = records.header().clone();
    store::assemble(output, &header, &mut |cell| records.record(cell))?;
    Ok((finished, header.disk.cells.len()))
}

/// Whether `output` already holds this very run; an input error if it holds another.
fn already_done(
    run: &Prepared,
    output: &Path,
    journal: &Path,
    options: &Options,
) -> Result<Option<Summary>, Failure> {
    if options.fresh || !output.exists() {
        return Ok(None);
    }
    let there = store::open(output)?;
    if there.input_hash() != run.header.input_hash() {
        let expected = "another `output`, or --fresh to replace it";
        let found = format!("a run of other inputs (`{}`)", there.header().title);
        return Err(InputError::new(output, None, "output", found, expected).into());
    }
    let count = |wanted| there.statuses().iter().filter(|s| **s == wanted).count();
    let failed = count(CellStatus::Failed);
    let open = count(CellStatus::Missing) > 0 || (options.retry && failed > 0);
    if open || (options.retry && journal.exists()) {
        return Ok(None);
    }
    log::info!("{} holds this run already: nothing to do", output.display());
    let cells = there.statuses().len();
    Ok(Some(Summary {
        cells,
        failed,
        before: cells,
    }))
}

/// A folder that is missing or cannot be written to is said before hours of work, not after.
fn check_folder(output: &Path) -> Result<(), Failure> {
    let folder = match output.parent() {
        Some(parent) if !parent.as_os_str().is_empty() => parent,
        _ => Path::new("."),
    };
    let wrong = |found: String| {
        let entry = format!("folder of {}", output.display());
        InputError::new(
            folder,
            None,
            entry,
            found,
            "a folder that can be written to",
        )
    };
    match std::fs::metadata(folder) {
        Ok(data) if data.is_dir() => {}
        Ok(_) => return Err(wrong("a file".into()).into()),
        Err(cause) => return Err(wrong(cause.to_string()).into()),
    }
    let probe = folder.join(format!(".frostclock-probe-{}", std::process::id()));
    match std::fs::File::create(&probe).and_then(|_| std::fs::remove_file(&probe)) {
        Ok(()) => Ok(()),
        Err(cause) => Err(wrong(cause.to_string()).into()),
    }
}
