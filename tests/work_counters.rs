//! Owns the pins of what cells of the demo cost and keep: steps and factorisations, so that a
//! slow-down shows as a failed test, and the linear invariants at their required limits.
//!
//! It never judges accuracy: an invariant kept says nothing about it.

use std::path::Path;

use frostclock::run::{Prepared, cell};

fn demo() -> Prepared {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("cases/tirune.yaml");
    let case = frostclock::case::open(&path).expect("the demo case");
    Prepared::new(&case).expect("the demo case")
}

/// Steps and factorisations of five cells, as measured; processors may differ in the last bits,
/// hence the margin. Cells 9 and 28 took 17,486 and 5,977 steps when round-off of opposing charging
/// fluxes stood in the change of dust.
#[test]
fn work_is_what_was_measured() {
    let run = demo();
    let measured: [(usize, u64, u64); 5] = [
        (0, 1474, 345),
        (9, 2227, 498),
        (28, 2134, 470),
        (100, 894, 268),
        (173, 741, 173),
    ];
    for (number, steps, factorisations) in measured {
        let work = cell::compute(&run, number).work;
        println!("({number}, {}, {}),", work.steps, work.factorisations);
        for (what, found, expected) in [
            ("steps", work.steps, steps),
            ("factorisations", work.factorisations, factorisations),
        ] {
            let most = expected + expected / 12;
            let least = expected - expected / 12;
            assert!(
                (least..=most).contains(&found),
                "cell {number}: {found} {what}, {expected} when measured"
            );
        }
        assert_eq!(work.restarts, 0, "cell {number}");
    }
}

/// Elements and dust to 1e-9 below 100 K and 1e-6 above, charge to 1e-4 of the charges: in the
/// cells that once were worst (dust off by 6e-3, charge by 2e-5) and some ordinary ones.
#[test]
fn invariants_are_kept() {
    let run = demo();
    for number in [1, 2, 8, 9, 28, 34, 48, 119, 137, 173] {
        let limit = if run.disk.cells[number].t_gas < 100.0 {
            1e-9
        } else {
            1e-6
        };
        let record = cell::compute(&run, number);
        assert_eq!(record.balance.len(), run.times.len(), "{}", record.reason);
        for (at, balance) in record.balance.iter().enumerate() {
            assert!(
                balance.elements < limit && balance.dust < limit && balance.charge < 1e-4,
                "cell {number}, snapshot {at}: {balance:?}"
            );
        }
    }
}
