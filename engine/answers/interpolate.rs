//! Owns abundances between snapshots: monotone cubic interpolation in log t and log x.
//!
//! It never integrates: values between snapshots are read off the stored curve and do not close
//! element sums exactly.

/// Where a time lies among the snapshots.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Place {
    /// On snapshot `usize` exactly.
    Snapshot(usize),
    /// Between this snapshot and the next.
    After(usize),
}

/// Finds `t` among ascending `times` (same unit); None outside the first and last.
/// A time within one part in 1e12 of a snapshot is that snapshot.
pub fn place(times: &[f64], t: f64) -> Option<Place> {
    let near = |s: f64| (t - s).abs() <= 1e-12 * s.abs();
    if let Some(i) = times.iter().position(|s| near(*s)) {
        return Some(Place::Snapshot(i));
    }
    if t.is_nan() || t < *times.first()? || t > *times.last()? {
        return None;
    }
    Some(Place::After(times.partition_point(|s| *s <= t) - 1))
}

/// Slopes of the monotone cubic through (x, y) (Fritsch & Butland 1984, SIAM J. Sci. Stat. Comput.
/// 5, 300: weighted harmonic means; one-sided three-point ends kept monotone).
fn slopes(x: &[f64], y: &[f64]) -> Vec<f64> {
    let n = x.len();
    let h: Vec<f64> = x.windows(2).map(|w| w[1] - w[0]).collect();
    let d: Vec<f64> = (0..n - 1).map(|i| (y[i + 1] - y[i]) / h[i]).collect();
    if n == 2 {
        return vec![d[0]; 2];
    }
    let end = |h0: f64, h1: f64, d0: f64, d1: f64| {
        let m = ((2.0 * h0 + h1) * d0 - h0 * d1) / (h0 + h1);
        if m * d0 <= 0.0 {
            0.0
        } else if d0 * d1 <= 0.0 && m.abs() > 3.0 * d0.abs() {
            3.0 * d0
        } else {
            m
        }
    };
    let mut m = vec![0.0; n];
    m[0] = end(h[0], h[1], d[0], d[1]);
    m[n - 1] = end(h[n - 2], h[n - 3], d[n - 2], d[n - 3]);
    for i in 1..n - 1 {
        if d[i - 1] * d[i] > 0.0 {
            let w1 = 2.0 * h[i] + h[i - 1];
            let w2 = h[i] + 2.0 * h[i - 1];
            m[i] = (w1 + w2) / (w1 / d[i - 1] + w2 / d[i]);
        }
    }
    m
}

/// One species at time `t` from its `values` at `times` (s or yr, ascending; the first may be 0).
///
/// Monotone cubic in (log t, log x) over the four snapshots around `t`. Where log is not to be had
/// (the interval from t = 0, or a neighbour at or below `floor`) the value is linear: in t from
/// t = 0, in log t otherwise. None outside the snapshots or where a neighbour is missing (NaN).
pub fn at(times: &[f64], values: &[f64], floor: f64, t: f64) -> Option<f64> {
    let i = match place(times, t)? {
        Place::Snapshot(i) => return values.get(i).copied().filter(|v| !v.is_nan()),
        Place::After(i) => i,
    };
    let (t0, t1) = (times[i], times[i + 1]);
    let (x0, x1) = (*values.get(i)?, *values.get(i + 1)?);
    if x0.is_nan() || x1.is_nan() {
        return None;
    }
    if t0 <= 0.0 {
        return Some(x0 + (x1 - x0) * (t - t0) / (t1 - t0));
    }
    let usable = |j: usize| times[j] > 0.0 && values.get(j).is_some_and(|v| *v > floor);
    if !(usable(i) && usable(i + 1)) {
        return Some(x0 + (x1 - x0) * (t / t0).ln() / (t1 / t0).ln());
    }
    let first = if i > 0 && usable(i - 1) { i - 1 } else { i };
    let last = if i + 2 < times.len() && usable(i + 2) {
        i + 2
    } else {
        i + 1
    };
    let x: Vec<f64> = times[first..=last].iter().map(|t| t.ln()).collect();
    let y: Vec<f64> = values[first..=last].iter().map(|v| v.ln()).collect();
    let m = slopes(&x, &y);
    let a = i - first;
    let h = x[a + 1] - x[a];
    let s = (t.ln() - x[a]) / h;
    let (s2, s3) = (s * s, s * s * s);
    let cubic = (2.0 * s3 - 3.0 * s2 + 1.0) * y[a]
        + (s3 - 2.0 * s2 + s) * h * m[a]
        + (3.0 * s2 - 2.0 * s3) * y[a + 1]
        + (s3 - s2) * h * m[a + 1];
    Some(cubic.exp())
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Fails if the curve is not taken in logs: a power law must come back to rounding.
    #[test]
    fn a_power_law_is_reproduced() {
        let times: Vec<f64> = (0..20).map(|i| 10f64.powf(i as f64 / 4.0)).collect();
        let values: Vec<f64> = times.iter().map(|t| 1e-12 * t.powf(1.7)).collect();
        for t in [1.3, 17.0, 4321.0, 5e4] {
            let x = at(&times, &values, 1e-25, t).unwrap();
            assert!((x / (1e-12 * t.powf(1.7)) - 1.0).abs() < 1e-12);
        }
    }

    /// Fails if interpolation overshoots its neighbours (negative or spurious peaks).
    #[test]
    fn never_leaves_the_range_of_its_neighbours() {
        let times = [0.0, 1.0, 2.0, 4.0, 8.0, 16.0];
        let values = [1e-4, 1e-4, 1e-4, 1e-12, 1e-12, 1e-5];
        for k in 0..1600 {
            let t = k as f64 / 100.0;
            let x = at(&times, &values, 1e-25, t).unwrap();
            let Some(Place::After(i)) = place(&times, t) else {
                continue;
            };
            let (low, high) = (values[i].min(values[i + 1]), values[i].max(values[i + 1]));
            assert!(
                x >= low * (1.0 - 1e-12) && x <= high * (1.0 + 1e-12),
                "{x} at {t}"
            );
        }
    }

    /// Fails if the weights of the harmonic mean are swapped between the two sides: by hand, widths
    /// 1 and 2 with slopes 1 and 1/2 give (5 + 4)/(5/1 + 4/(1/2)) in the middle.
    #[test]
    fn the_nearer_side_weighs_as_published() {
        let m = slopes(&[0.0, 1.0, 3.0], &[0.0, 1.0, 2.0]);
        assert!((m[1] - 9.0 / 13.0).abs() < 1e-15, "{}", m[1]);
    }

    /// Fails if t = 0, values at the floor, missing values or times outside are mishandled.
    #[test]
    fn zero_time_floor_missing_and_outside() {
        let times = [0.0, 1.0, 10.0];
        assert_eq!(at(&times, &[0.0, 4.0, 4.0], 1e-25, 0.25), Some(1.0));
        assert_eq!(
            at(&times, &[0.0, -1e-30, 1.0], 1e-25, 10f64.sqrt()),
            Some(0.5 - 0.5e-30)
        );
        assert_eq!(at(&times, &[1.0, 1.0, f64::NAN], 1e-25, 5.0), None);
        assert_eq!(at(&times, &[1.0, 1.0, 1.0], 1e-25, 10.1), None);
        assert_eq!(at(&times, &[1.0, 2.0, 3.0], 1e-25, 10.0), Some(3.0));
    }
}
