//! Owns the times at which a case keeps abundances.
//!
//! It never knows how the integrator steps between them.

use super::Block;
use super::checker::{Bounds, Checker, POSITIVE};
use super::layout::ClockBlock;
use crate::units::{Dimension, Quantity};

/// More snapshots than anybody reads; a mistyped `first` would else fill the disk.
const MOST_SNAPSHOTS: usize = 10_000;

/// Snapshot times in s, 0 first.
pub(super) fn read(check: &mut Checker, block: &ClockBlock) -> Block<Vec<f64>> {
    match (&block.until, &block.at) {
        (Some(until), None) => spaced(check, block, until),
        (None, Some(at)) => {
            for (name, given) in [("first", &block.first), ("per_decade", &block.per_decade)] {
                if given.is_some() {
                    check.error(
                        &format!("clock.{name}"),
                        format!("`{name}` with `at`"),
                        "only one way",
                    );
                }
            }
            listed(check, at)
        }
        (until, _) => {
            let found = if until.is_some() {
                "both `until` and `at`"
            } else {
                "neither"
            };
            check.error("clock", found, "either `until` or `at`");
            Block {
                value: Vec::new(),
                resolved: String::new(),
            }
        }
    }
}

fn spaced(check: &mut Checker, block: &ClockBlock, until: &Quantity) -> Block<Vec<f64>> {
    let until = check.required("clock.until", until, Dimension::Time, POSITIVE);
    let first = check.quantity(
        "clock.first",
        block.first.as_ref(),
        "1 yr",
        Dimension::Time,
        POSITIVE,
    );
    if block.per_decade.is_none() {
        check.default_taken("clock.per_decade", "10");
    }
    let ten = Quantity {
        text: "10".to_string(),
    };
    let per_decade = check.count(
        "clock.per_decade",
        block.per_decade.as_ref().unwrap_or(&ten),
        1,
        1000,
    );
    if first.value >= until.value {
        check.error(
            "clock.first",
            format!("`{}`", first.text),
            format!("a time before `{}`", until.text),
        );
    }
    let expected_count = (until.value / first.value).log10() * f64::from(per_decade);
    let mut times = vec![0.0];
    if expected_count > MOST_SNAPSHOTS as f64 {
        let expected = format!("at most {MOST_SNAPSHOTS} snapshots");
        check.error("clock", format!("{expected_count:.0} snapshots"), expected);
    } else if expected_count.is_finite() {
        times.extend(log_times(first.value, until.value, per_decade));
    }
    let resolved = format!(
        "clock: {{until: {}, first: {}, per_decade: {per_decade}}}\n",
        until.text, first.text
    );
    Block {
        value: times,
        resolved,
    }
}

/// first 10^(k/per_decade) for k = 0, 1, ... short of `until`, then `until`.
fn log_times(first: f64, until: f64, per_decade: u32) -> Vec<f64> {
    let mut times: Vec<f64> = (0..)
        .map(|k| first * 10_f64.powf(f64::from(k) / f64::from(per_decade)))
        .take_while(|&time| time < until * (1.0 - 1.0e-9))
        .collect();
    times.push(until);
    times
}

fn listed(check: &mut Checker, at: &[Quantity]) -> Block<Vec<f64>> {
    let mut times = vec![0.0];
    let mut texts = Vec::new();
    if at.is_empty() || at.len() > MOST_SNAPSHOTS {
        let expected = format!("1 to {MOST_SNAPSHOTS} times");
        check.error("clock.at", format!("{} times", at.len()), expected);
    }
    const NOT_ZERO: Bounds = Bounds {
        allows: |t| t > 0.0,
        words: "above 0 (0 is always kept)",
    };
    for (i, given) in at.iter().enumerate() {
        let key = format!("clock.at[{i}]");
        let time = check.required(&key, given, Dimension::Time, NOT_ZERO);
        if times.last().is_some_and(|&last| time.value <= last) {
            check.error(
                &key,
                format!("`{}`", time.text),
                "a time after the one before",
            );
        }
        times.push(time.value);
        texts.push(time.text);
    }
    Block {
        value: times,
        resolved: format!("clock: {{at: [{}]}}\n", texts.join(", ")),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A snapshot doubled next to the end, or one missing, would show in every figure.
    #[test]
    fn times_are_evenly_spaced_and_end_on_the_mark() {
        let times = log_times(1.0, 1000.0, 2);
        assert_eq!(times.len(), 7);
        assert!((times[1] / 10_f64.sqrt() - 1.0).abs() < 1e-12);
        assert_eq!(times.last(), Some(&1000.0));
        // 10^(k/3) reaches 100 only to round-off: no second snapshot there.
        assert_eq!(log_times(1.0, 100.0, 3).len(), 7);
        assert_eq!(log_times(1.0, 50.0, 1), [1.0, 10.0, 50.0]);
    }
}
