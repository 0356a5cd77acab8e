//! Owns a run from start to end: journal, all cells, run file; and picking it up again.
//!
//! It never reads a case: `Prepared` comes checked.

use super::cell;
use super::journal::{self, Journal};
use super::prepare::Prepared;
use super::progress::Progress;
use super::record::{Balance, CellRecord, CellStatus};
use super::signals::StopFlag;
use super::workers::run_cells;
use crate::errors::{Failure, InputError, in_words};
use crate::store::durable::directory_of;
use crate::store::{self, RunHeader};
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
    store::check_target(output)?;
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
        log::info!("{before} of {cells} cells are finished: going on from there");
    }
    let mut progress = Progress::start(bars, cells, before);
    let mut sink = |record: CellRecord| {
        let status = record.status;
        if status == CellStatus::Failed {
            log::warn!("cell {} failed: {}", record.cell, record.reason);
        }
        if let Some(complaint) = record.balance.iter().find_map(Balance::complaint) {
            log::warn!("cell {}: {complaint}", record.cell);
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
    store::check_target(output)?;
    let mut records = journal::read_only(journal)?;
    let finished = records.finished().count();
    let header = records.header().clone();
    check_gathered(output, &header, finished)?;
    store::assemble(output, &header, &mut |cell| records.record(cell))?;
    Ok((finished, header.disk.cells.len()))
}

/// A gathered file may replace an earlier one of the same run, but never what holds more than it.
fn check_gathered(output: &Path, header: &RunHeader, finished: usize) -> Result<(), Failure> {
    if !output.exists() {
        return Ok(());
    }
    let there = store::open(output)?;
    let wrong = |found: String| {
        let expected = "another --output, or no file (it is left as it is)";
        Err(InputError::new(output, None, "output", found, expected).into())
    };
    if there.input_hash() != header.input_hash() {
        return wrong(format!(
            "a run of other inputs (`{}`)",
            there.header().title
        ));
    }
    let run = there
        .statuses()
        .iter()
        .filter(|s| **s != CellStatus::Missing)
        .count();
    if run > finished {
        return wrong(format!(
            "{run} cells of this run, and {finished} in the journal"
        ));
    }
    Ok(())
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
    let cells = there.statuses().len();
    if count(CellStatus::Missing) > 0 || (options.retry && failed > 0) {
        return Ok(None);
    }
    // A journal stays for the failed cells only. Any other was left by a kill: between the writing of
    // the file and the removal of the journal, or after a `--fresh` that did not come to its end.
    if journal.exists() && (failed == 0 || journal::read_only(journal)?.finished().count() < cells)
    {
        return Ok(None);
    }
    let by = &there.header().engine_version;
    let other = if *by == run.header.engine_version {
        String::new()
    } else {
        format!(" (computed by version {by}; --fresh computes it with this one)")
    };
    log::info!(
        "{} holds this run already: nothing to do{other}",
        output.display()
    );
    Ok(Some(Summary {
        cells,
        failed,
        before: cells,
    }))
}

/// A folder that is missing is said before hours of work, not after. Whether it can be written to
/// shows when the journal is opened.
fn check_folder(output: &Path) -> Result<(), Failure> {
    let folder = directory_of(output);
    let found = match std::fs::metadata(folder) {
        Ok(data) if data.is_dir() => return Ok(()),
        Ok(_) => format!("the file `{}` in the place of its folder", folder.display()),
        Err(cause) if cause.kind() == std::io::ErrorKind::NotFound => {
            format!("no folder `{}`", folder.display())
        }
        Err(cause) => format!("`{}` ({})", folder.display(), in_words(&cause)),
    };
    Err(InputError::new(output, None, "output", found, "a folder that exists").into())
}
