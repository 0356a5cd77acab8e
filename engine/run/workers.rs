//! Owns the threads: which cell runs where and when, and how records reach their one writer.
//!
//! It never looks at chemistry and never writes. A cell's result depends on nothing but its number,
//! so neither the number of threads nor their order can change it.

use std::any::Any;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::Path;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::mpsc::{SyncSender, sync_channel};
use std::thread;

use super::record::{CellRecord, CellStatus};
use super::signals::StopFlag;
use crate::errors::Failure;

/// Computes the cells of `todo` on `threads` threads and hands each record to `sink`, on the
/// calling thread, as it arrives.
///
/// A panic in a cell becomes a failed record and the grid goes on. Once `stop` is raised no cell is
/// started; those under way may watch the flag and return a record of status
/// [`CellStatus::Missing`], which is dropped. A failing `sink` raises the flag itself.
/// Ends with [`Failure::Stopped`] if a signal raised the flag, with the failure of the sink if that
/// failed, else Ok.
pub fn run_cells(
    todo: &[usize],
    threads: usize,
    compute: &(dyn Fn(usize) -> CellRecord + Sync),
    sink: &mut dyn FnMut(CellRecord) -> Result<(), Failure>,
    stop: &StopFlag,
) -> Result<(), Failure> {
    let next = AtomicUsize::new(0);
    let threads = threads.clamp(1, todo.len().max(1));
    // Bounded: a slow disk holds the workers back instead of filling the memory.
    let (sender, receiver) = sync_channel(2 * threads);
    thread::scope(|scope| {
        // Owned here, so that it goes when this closure ends, before the threads are waited for:
        // a worker that waits for room in the channel must not wait for ever.
        let receiver = receiver;
        let mut started = 0;
        for number in 0..threads {
            let (sender, next) = (sender.clone(), &next);
            let spawned = thread::Builder::new()
                .name(format!("cells-{number}"))
                .spawn_scoped(scope, move || work(todo, next, compute, &sender, stop));
            match spawned {
                Ok(_) => started += 1,
                // Fewer threads give the same run, only later; none at all give no run.
                Err(cause) if started == 0 => {
                    return Err(Failure::machine("starting threads", Path::new(""), cause));
                }
                Err(cause) => log::warn!("runs on {started} threads, not {threads}: {cause}"),
            }
        }
        drop(sender);
        for record in &receiver {
            if record.status != CellStatus::Missing
                && let Err(failure) = sink(record)
            {
                stop.cancel();
                return Err(failure);
            }
        }
        Ok(())
    })?;
    match stop.signal() {
        Some(signal) => Err(Failure::Stopped(signal)),
        None => Ok(()),
    }
}

/// One thread: takes the next cell until there is none, or a wish to stop.
fn work(
    todo: &[usize],
    next: &AtomicUsize,
    compute: &(dyn Fn(usize) -> CellRecord + Sync),
    sender: &SyncSender<CellRecord>,
    stop: &StopFlag,
) {
    while !stop.is_raised() {
        let Some(&cell) = todo.get(next.fetch_add(1, Ordering::Relaxed)) else {
            break;
        };
        let record = catch_unwind(AssertUnwindSafe(|| compute(cell))).unwrap_or_else(|panic| {
            let reason = format!("a defect of the engine: {}", panic_text(panic.as_ref()));
            CellRecord::failed(cell, reason, f64::NAN)
        });
        if sender.send(record).is_err() {
            break;
        }
    }
}

fn panic_text(panic: &(dyn Any + Send)) -> &str {
    if let Some(text) = panic.downcast_ref::<&str>() {
        text
    } else if let Some(text) = panic.downcast_ref::<String>() {
        text
    } else {
        "a panic without words"
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn done(cell: usize) -> CellRecord {
        CellRecord {
            status: CellStatus::Done,
            abundances: vec![(cell as f64).sqrt()],
            ..CellRecord::missing(cell)
        }
    }

    fn collect(
        todo: &[usize],
        threads: usize,
        compute: &(dyn Fn(usize) -> CellRecord + Sync),
    ) -> Vec<CellRecord> {
        let mut records = Vec::new();
        let mut sink = |record| {
            records.push(record);
            Ok(())
        };
        run_cells(todo, threads, compute, &mut sink, &StopFlag::new()).expect("nothing stops it");
        records.sort_by_key(|record| record.cell);
        records
    }

    /// If it failed, one bad cell would cost the whole grid.
    #[test]
    fn a_panicking_cell_is_recorded_and_the_grid_goes_on() {
        let todo: Vec<usize> = (0..20).collect();
        let records = collect(&todo, 3, &|cell| {
            assert!(cell != 11, "cell {cell} is cursed");
            done(cell)
        });
        assert_eq!(records.len(), 20);
        for record in records {
            let cursed = record.cell == 11;
            assert_eq!(record.status == CellStatus::Failed, cursed);
            assert_eq!(record.reason.contains("cell 11 is cursed"), cursed);
        }
    }

    /// If it failed, cells would be lost or run twice, depending on threads and order.
    #[test]
    fn every_cell_runs_once_whatever_the_threads_and_the_order() {
        let forward: Vec<usize> = (3..60).collect();
        let backward: Vec<usize> = (3..60).rev().collect();
        let encode = |records: Vec<CellRecord>| -> Vec<Vec<u8>> {
            records.iter().map(CellRecord::encode).collect()
        };
        let alone = encode(collect(&forward, 1, &done));
        assert_eq!(alone.len(), 57);
        assert_eq!(alone, encode(collect(&forward, 4, &done)));
        assert_eq!(alone, encode(collect(&backward, 3, &done)));
        assert!(collect(&[], 4, &done).is_empty());
    }

    /// If it failed, Ctrl-C would run on, keep half a cell, or lose a whole one.
    #[test]
    fn a_raised_flag_starts_no_cell_and_drops_the_unfinished() {
        let todo: Vec<usize> = (0..1000).collect();
        let stop = StopFlag::new();
        let mut kept = Vec::new();
        let mut sink = |record: CellRecord| {
            kept.push(record.cell);
            Ok(())
        };
        let compute = |cell: usize| {
            if cell == 5 {
                stop.raise(15);
                return CellRecord::missing(cell);
            }
            done(cell)
        };
        let outcome = run_cells(&todo, 2, &compute, &mut sink, &stop);
        assert!(matches!(outcome, Err(Failure::Stopped(15))), "{outcome:?}");
        assert!(!kept.contains(&5));
        assert!(
            (0..5).all(|cell| kept.contains(&cell)),
            "lost a finished cell: {kept:?}"
        );
        assert!(kept.len() < 1000, "ran on to the end");
    }

    /// If it failed, a full disk would hang the run or compute on for nothing.
    #[test]
    fn a_failing_sink_ends_the_run_with_its_failure() {
        let todo: Vec<usize> = (0..1000).collect();
        let stop = StopFlag::new();
        let mut taken = 0;
        let mut sink = |_: CellRecord| {
            taken += 1;
            if taken == 3 {
                return Err(Failure::machine(
                    "appending",
                    Path::new("x"),
                    "no space left",
                ));
            }
            Ok(())
        };
        let outcome = run_cells(&todo, 4, &done, &mut sink, &stop);
        assert!(
            matches!(outcome, Err(Failure::Machine { .. })),
            "{outcome:?}"
        );
        assert_eq!(taken, 3);
        assert!(stop.is_raised());
    }
}
