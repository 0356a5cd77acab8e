//! Owns one cell's way from conditions to record: rates, integration, checks.
//!
//! It never looks at other cells: the same cell gives the same bits wherever and whenever it runs.

use super::prepare::Prepared;
use super::record::{CellRecord, CellStatus, Work};
use crate::kinetics::{self, Status};
use crate::rates::cell_rates;
use std::time::Instant;

/// Integrates cell number `cell` of `run`.
pub fn compute(run: &Prepared, cell: usize) -> CellRecord {
    let clock = Instant::now();
    let conditions = &run.disk.cells[cell];
    let rates = cell_rates(&run.chemistry, &run.disk.fields, conditions, &run.setting);
    let start = &run.starts[cell];
    let outcome = kinetics::integrate(
        &run.mechanism,
        &rates.coefficients,
        start,
        &run.times,
        &run.tolerance,
    );
    let (status, reason, failed_at) = match outcome.status {
        Status::Finished => (CellStatus::Done, String::new(), f64::NAN),
        Status::Failed { time_s, reason } => (CellStatus::Failed, reason, time_s),
    };
    let drift = |state: &Vec<f64>| run.invariants.drift(start, state);
    CellRecord {
        cell,
        status,
        reason,
        failed_at,
        balance: outcome.snapshots.iter().map(drift).collect(),
        abundances: outcome.snapshots.concat(),
        work: work(&outcome.work, clock.elapsed().as_secs_f64()),
        cautions: rates.cautions.to_vec(),
    }
}

fn work(work: &kinetics::Work, seconds: f64) -> Work {
    Work {
        steps: work.steps as u64,
        error_test_failures: work.error_test_failures as u64,
        newton_iterations: work.newton_iterations as u64,
        rhs: work.rhs as u64,
        jacobians: work.jacobians as u64,
        factorisations: work.factorisations as u64,
        restarts: (work.restarts + work.tightenings) as u64,
        seconds,
    }
}
