//! Owns the record of one cell: how it ended, its abundances, the work it took and the checks
//! made on the way; and its exact binary form.
//!
//! It never touches a file and never judges the numbers it carries.

use crate::store::bytes::{Decoder, Encoder, Malformed};

/// How a cell ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[repr(i8)]
pub enum CellStatus {
    /// All snapshots reached.
    Done = 0,
    /// The integration gave up; the snapshots before that are kept.
    Failed = 1,
    /// Not run, or not to its end.
    Missing = 2,
}

impl CellStatus {
    /// The three of them in the order of their numbers.
    pub const ALL: [CellStatus; 3] = [CellStatus::Done, CellStatus::Failed, CellStatus::Missing];

    /// The status with this number.
    pub fn from_number(number: i8) -> Option<Self> {
        CellStatus::ALL
            .into_iter()
            .find(|status| *status as i8 == number)
    }

    /// One word for readers of a run file.
    pub fn word(self) -> &'static str {
        match self {
            CellStatus::Done => "done",
            CellStatus::Failed => "failed",
            CellStatus::Missing => "not_run",
        }
    }
}

/// What a cell cost.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Work {
    pub steps: u64,
    pub error_test_failures: u64,
    pub newton_iterations: u64,
    pub rhs: u64,
    pub jacobians: u64,
    pub factorisations: u64,
    /// Rungs of the retry ladder taken.
    pub restarts: u64,
    /// Wall-clock time, s. The one number here that differs between identical runs.
    pub seconds: f64,
}

/// Names of the reproducible counters, in the order of [`Work::counters`].
pub const COUNTER_NAMES: [&str; 7] = [
    "steps",
    "error_test_failures",
    "newton_iterations",
    "rhs",
    "jacobians",
    "factorisations",
    "restarts",
];

impl Work {
    /// The reproducible counters, in the order of [`COUNTER_NAMES`].
    pub fn counters(&self) -> [u64; 7] {
        [
            self.steps,
            self.error_test_failures,
            self.newton_iterations,
            self.rhs,
            self.jacobians,
            self.factorisations,
            self.restarts,
        ]
    }

    /// The inverse of [`Work::counters`].
    pub fn from_counters(counters: [u64; 7], seconds: f64) -> Self {
        let [
            steps,
            error_test_failures,
            newton_iterations,
            rhs,
            jacobians,
            factorisations,
            restarts,
        ] = counters;
        Work {
            steps,
            error_test_failures,
            newton_iterations,
            rhs,
            jacobians,
            factorisations,
            restarts,
            seconds,
        }
    }
}

/// How far the linear invariants had drifted at one snapshot: checks of the code, never repaired.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Balance {
    /// Worst drift of an element total, relative to that total.
    pub elements: f64,
    /// Drift of the charge, relative to the sum of |charge| x abundance.
    pub charge: f64,
    /// Drift of the number of grains, relative to it.
    pub dust: f64,
    /// Mismatch of the ice total and the sum of its parts, relative to the total.
    pub ice: f64,
}

impl Balance {
    /// A snapshot that was not reached.
    pub const NOT_REACHED: Balance = Balance {
        elements: f64::NAN,
        charge: f64::NAN,
        dust: f64::NAN,
        ice: f64::NAN,
    };

    /// What drifted by more than a sound integration lets it, in words; None if nothing did.
    /// Round-off stays far below these limits: beyond them a cell's numbers need a second look.
    pub fn complaint(&self) -> Option<String> {
        let watched = [
            ("an element", self.elements, 1e-6),
            ("charge", self.charge, 1e-4),
            ("grains", self.dust, 1e-4),
            ("the ice total", self.ice, 1e-3),
        ];
        let worst = watched.iter().find(|(_, drift, limit)| drift > limit)?;
        let (what, drift, limit) = worst;
        Some(format!(
            "{what} kept only to {drift:.1e} (limit {limit:.0e})"
        ))
    }

    /// The four numbers in the order of their declaration.
    pub fn numbers(&self) -> [f64; 4] {
        [self.elements, self.charge, self.dust, self.ice]
    }

    /// The inverse of [`Balance::numbers`].
    pub fn from_numbers([elements, charge, dust, ice]: [f64; 4]) -> Self {
        Balance {
            elements,
            charge,
            dust,
            ice,
        }
    }
}

/// All that is kept of one cell.
#[derive(Debug, Clone, PartialEq)]
pub struct CellRecord {
    /// Place of the cell in the disk.
    pub cell: usize,
    pub status: CellStatus,
    /// Why it failed; empty when done.
    pub reason: String,
    /// Time at which it failed, s; NaN when done.
    pub failed_at: f64,
    /// Snapshots reached x species, row by row.
    pub abundances: Vec<f64>,
    pub work: Work,
    /// One per snapshot reached.
    pub balance: Vec<Balance>,
    /// How often each caution of the run's header applied.
    pub cautions: Vec<u32>,
}

impl CellRecord {
    /// The record of a cell that came to nothing.
    pub fn failed(cell: usize, reason: impl Into<String>, failed_at: f64) -> Self {
        CellRecord {
            cell,
            status: CellStatus::Failed,
            reason: reason.into(),
            failed_at,
            abundances: Vec::new(),
            work: Work::default(),
            balance: Vec::new(),
            cautions: Vec::new(),
        }
    }

    /// The record of a cell that was not run, or was dropped before its end.
    pub fn missing(cell: usize) -> Self {
        CellRecord {
            status: CellStatus::Missing,
            ..CellRecord::failed(cell, "", f64::NAN)
        }
    }

    /// The exact binary form, little-endian.
    pub fn encode(&self) -> Vec<u8> {
        let mut out = Encoder::default();
        out.count(self.cell);
        out.byte(self.status as u8);
        out.text(&self.reason);
        out.f64(self.failed_at);
        for counter in self.work.counters() {
            out.u64(counter);
        }
        out.f64(self.work.seconds);
        out.count(self.cautions.len());
        for caution in &self.cautions {
            out.u32(*caution);
        }
        out.count(self.balance.len());
        for balance in &self.balance {
            for number in balance.numbers() {
                out.f64(number);
            }
        }
        out.f64s(&self.abundances);
        out.finish()
    }

    /// The inverse of [`CellRecord::encode`], bit for bit.
    pub fn decode(bytes: &[u8]) -> Result<Self, Malformed> {
        let mut from = Decoder::new(bytes);
        let cell = from.index("the number of a cell")?;
        let status =
            CellStatus::from_number(from.byte("the status of a cell")? as i8).ok_or(Malformed {
                reading: "the status of a cell",
            })?;
        let reason = from.text("why a cell failed")?;
        let failed_at = from.f64("when a cell failed")?;
        let mut counters = [0; 7];
        for counter in &mut counters {
            *counter = from.u64("a work counter")?;
        }
        let work = Work::from_counters(counters, from.f64("the seconds a cell took")?);
        let cautions = (0..from.count(4, "the cautions")?)
            .map(|_| from.u32("a caution"))
            .collect::<Result<_, _>>()?;
        let mut balance = Vec::with_capacity(from.count(32, "the balances")?);
        for _ in 0..balance.capacity() {
            let mut numbers = [0.0; 4];
            for number in &mut numbers {
                *number = from.f64("a balance")?;
            }
            balance.push(Balance::from_numbers(numbers));
        }
        let abundances = from.f64s("the abundances")?;
        from.end("the end of a cell's record")?;
        Ok(CellRecord {
            cell,
            status,
            reason,
            failed_at,
            abundances,
            work,
            balance,
            cautions,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn awkward() -> CellRecord {
        CellRecord {
            cell: 7,
            status: CellStatus::Failed,
            reason: "Schrittweite \u{2192} 0".to_string(),
            failed_at: 3.2e11,
            abundances: vec![
                0.5,
                -0.0,
                f64::from_bits(0x7ff8_0000_dead_beef),
                f64::MIN_POSITIVE / 8.0,
                f64::NEG_INFINITY,
                -1.0e-27,
            ],
            work: Work::from_counters([1, 2, 3, 4, 5, u64::MAX, 7], 0.25),
            balance: vec![
                Balance {
                    elements: 1.0e-15,
                    charge: -0.0,
                    dust: 0.0,
                    ice: f64::NAN,
                },
                Balance::NOT_REACHED,
            ],
            cautions: vec![0, 4, u32::MAX],
        }
    }

    /// If it failed, a resumed run would differ from an uninterrupted one in its last bits.
    #[test]
    fn decoding_gives_back_every_bit() {
        let record = awkward();
        let bytes = record.encode();
        let back = CellRecord::decode(&bytes).expect("own bytes are readable");
        // Equality of NaN is bits, so compare the encodings, and the awkward values one by one.
        assert_eq!(back.encode(), bytes);
        assert_eq!(back.abundances[1].to_bits(), (-0.0f64).to_bits());
        assert_eq!(back.abundances[2].to_bits(), 0x7ff8_0000_dead_beef);
        assert_eq!(back.abundances[3], f64::MIN_POSITIVE / 8.0);
        assert_eq!(
            (back.cell, back.status, &back.reason),
            (7, CellStatus::Failed, &record.reason)
        );
        assert_eq!(back.work, record.work);
        assert_eq!(back.cautions, record.cautions);
    }

    /// If it failed, a damaged length could ask for all memory, or a short record pass for whole.
    #[test]
    fn every_truncation_and_extension_is_refused() {
        let bytes = awkward().encode();
        for length in 0..bytes.len() {
            assert!(
                CellRecord::decode(&bytes[..length]).is_err(),
                "accepted {length} bytes"
            );
        }
        let mut longer = bytes.clone();
        longer.push(0);
        assert!(CellRecord::decode(&longer).is_err());
        let mut huge = bytes;
        huge[9..17].copy_from_slice(&u64::MAX.to_le_bytes());
        assert!(CellRecord::decode(&huge).is_err());
    }
}
