//! Owns what a run file keeps of the records besides the abundances, column by column.
//!
//! It never touches the file.

use crate::run::record::{Balance, CellRecord};

/// What is collected of the records besides the abundances.
#[derive(Default)]
pub(super) struct PerCell {
    pub status: Vec<i8>,
    pub reason: Vec<String>,
    pub failed_at: Vec<f64>,
    pub counters: [Vec<u64>; 7],
    pub seconds: Vec<f64>,
    pub balance: [Vec<f64>; 4],
    pub cautions: Vec<u32>,
}

impl PerCell {
    /// Adds the next cell, padded to `times` snapshots and `cautions` cautions.
    pub fn take(&mut self, record: CellRecord, times: usize, cautions: usize) {
        self.status.push(record.status as i8);
        self.reason.push(record.reason);
        self.failed_at.push(record.failed_at);
        for (column, count) in self.counters.iter_mut().zip(record.work.counters()) {
            column.push(count);
        }
        self.seconds.push(record.work.seconds);
        for time in 0..times {
            let balance = record.balance.get(time).unwrap_or(&Balance::NOT_REACHED);
            for (drifts, number) in self.balance.iter_mut().zip(balance.numbers()) {
                drifts.push(number);
            }
        }
        let counted = (0..cautions).map(|n| record.cautions.get(n).copied().unwrap_or(0));
        self.cautions.extend(counted);
    }
}
