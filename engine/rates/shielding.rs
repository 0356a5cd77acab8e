//! Owns line and continuum shielding factors as functions of columns (cm^-2).
//!
//! It never knows where columns come from.

use crate::network::layout::ShieldingLaw;
use crate::network::model::Shielding;
use crate::units::{ATOMIC_MASS, BOLTZMANN};

/// Doppler width b of H2 lines, cm s^-1: thermal and turbulent in quadrature,
/// b^2 = 2 k_B T/m(H2) + turbulence^2. T in K, turbulence in cm s^-1.
pub fn h2_doppler_width(t_gas: f64, turbulence: f64) -> f64 {
    (2.0 * BOLTZMANN * t_gas / (2.016 * ATOMIC_MASS) + turbulence * turbulence).sqrt()
}

/// H2 self-shielding (Draine & Bertoldi 1996, ApJ 468, 269, eq. 37).
/// `n_h2` column in cm^-2, `b` Doppler width in cm s^-1.
pub fn draine_bertoldi(n_h2: f64, b: f64) -> f64 {
    let x = n_h2 / 5e14;
    let b5 = b / 1e5;
    let root = (1.0 + x).sqrt();
    0.965 / (1.0 + x / b5).powi(2) + 0.035 / root * (-8.5e-4 * root).exp()
}

/// Continuum shielding of atomic carbon by itself and by H2 (Tielens & Hollenbach 1985,
/// ApJ 291, 722; Kamp & Bertoldi 2000, A&A 353, 276). Columns in cm^-2.
pub fn carbon(n_c: f64, n_h2: f64) -> f64 {
    let r = 2.8e-22 * n_h2;
    (-1.6e-17 * n_c).exp() * (-r).exp() / (1.0 + r)
}

/// log10 of a column as table axes count it: 0 stands for none.
fn log_column(n: f64) -> f64 {
    if n > 1.0 { n.log10() } else { 0.0 }
}

/// Lower index and weight of the upper neighbour on an ascending axis, clamped at its ends.
fn bracket(axis: &[f64], x: f64) -> (usize, f64) {
    let last = axis.len() - 1;
    if last == 0 || x <= axis[0] {
        return (0, 0.0);
    }
    if x >= axis[last] {
        return (last - 1, 1.0);
    }
    let i = axis.partition_point(|a| *a <= x) - 1;
    (i, (x - axis[i]) / (axis[i + 1] - axis[i]))
}

/// Factor from a table in two log columns: bilinear in log10 of the factor, clamped at the edges
/// (the rule of Visser, van Dishoeck & Black 2009, A&A 503, 323, Table 5).
/// The second value tells whether a column lay beyond the table.
pub fn table(shielding: &Shielding, column: f64, h2: f64) -> (f64, bool) {
    let (x, y) = (log_column(column), log_column(h2));
    let outside = |axis: &[f64], v: f64| axis.last().is_none_or(|top| v > *top);
    let (j, u) = bracket(&shielding.log_column, x);
    let (i, v) = bracket(&shielding.log_h2, y);
    let at = |i: usize, j: usize| -> f64 {
        let row = &shielding.log_factor[i.min(shielding.log_factor.len() - 1)];
        row[j.min(row.len() - 1)]
    };
    let low = at(i, j) * (1.0 - u) + at(i, j + 1) * u;
    let high = at(i + 1, j) * (1.0 - u) + at(i + 1, j + 1) * u;
    let factor = 10f64.powf(low * (1.0 - v) + high * v);
    (
        factor,
        outside(&shielding.log_column, x) || outside(&shielding.log_h2, y),
    )
}

/// The factor of one shielding law for light that passed `columns` (cm^-2, one per column
/// species); `given` factors replace it. The second value: a column beyond its table.
pub fn factor(
    shielding: &Shielding,
    columns: &[f64],
    given: &[Option<f64>],
    h2_width: f64,
) -> (f64, bool) {
    if let Some(Some(factor)) = given.get(shielding.column) {
        return (*factor, false);
    }
    let column = columns[shielding.column];
    let h2 = columns[shielding.h2];
    match shielding.law {
        ShieldingLaw::DraineBertoldi => (draine_bertoldi(column, h2_width), false),
        ShieldingLaw::Carbon => (carbon(column, h2), false),
        ShieldingLaw::Table => table(shielding, column, h2),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Fails on any wrong constant, exponent or missing square root.
    /// Draine & Bertoldi 1996 eq. 37 as tabulated in the shared facts (h2_shielding.md).
    #[test]
    fn draine_bertoldi_table() {
        for (n, at_1, at_3) in [
            (1e13, 9.621533e-1, 9.868863e-1),
            (1e14, 7.020596e-1, 8.800653e-1),
            (1e15, 1.273998e-1, 3.675775e-1),
            (1e16, 9.796143e-3, 2.402570e-2),
            (1e17, 2.463024e-3, 2.649893e-3),
            (1e18, 7.534777e-4, 7.554014e-4),
            (1e20, 5.351342e-5, 5.351361e-5),
            (1e22, 1.748488e-7, 1.748488e-7),
        ] {
            assert!(
                (draine_bertoldi(n, 1e5) / at_1 - 1.0).abs() < 1e-6,
                "N = {n:e}"
            );
            assert!(
                (draine_bertoldi(n, 3e5) / at_3 - 1.0).abs() < 1e-6,
                "N = {n:e}"
            );
        }
    }

    fn visser() -> Shielding {
        // Rows of Visser, van Dishoeck & Black 2009, A&A 503, 323, Table 5 (12CO; b(CO) = 0.3 km/s,
        // T_ex = 5 K): log N(H2) = 0, 21, 22; log N(CO) = none, 15, 16, 19.
        let rows = [
            [1.0, 0.2434, 0.05467, 0.000524],
            [0.326, 0.08726, 0.01907, 0.0001941],
            [0.01108, 0.004441, 0.001102, 1.437e-5],
        ];
        Shielding {
            name: "CO".into(),
            law: ShieldingLaw::Table,
            column: 1,
            h2: 0,
            log_column: vec![0.0, 15.0, 16.0, 19.0],
            log_h2: vec![0.0, 21.0, 22.0],
            log_factor: rows
                .iter()
                .map(|r| r.iter().map(|f: &f64| f.log10()).collect())
                .collect(),
        }
    }

    /// Fails if axes are swapped or values off the printed grid points.
    #[test]
    fn table_returns_printed_values_at_its_grid_points() {
        let t = visser();
        for (co, h2, printed) in [
            (0.0, 0.0, 1.0),
            (1e15, 0.0, 0.2434),
            (1e16, 1e21, 0.01907),
            (1e19, 1e22, 1.437e-5),
            (0.0, 1e22, 0.01108),
        ] {
            let (f, outside) = table(&t, co, h2);
            assert!(
                (f / printed - 1.0).abs() < 1e-12 && !outside,
                "{f} for N(CO) = {co:e}"
            );
        }
    }

    /// Fails if interpolation is not in log factor over log columns, or the edges extrapolate
    /// instead of clamping, or leave no trace of it.
    #[test]
    fn table_interpolates_in_logs_and_clamps_beyond_its_edges() {
        let t = visser();
        let half = table(&t, 10f64.powf(15.5), 0.0).0;
        assert!((half / (0.2434f64 * 0.05467).sqrt() - 1.0).abs() < 1e-12);
        let (f, outside) = table(&t, 1e21, 1e24);
        assert!((f / 1.437e-5 - 1.0).abs() < 1e-12 && outside);
    }

    /// Fails if a factor given outright is ignored, or the carbon law loses a term:
    /// hand value at N(C) = 1e17, N(H2) = 1e21: exp(-1.6) exp(-0.28)/1.28.
    #[test]
    fn given_factors_replace_the_law_and_carbon_matches_hand_value() {
        let t = visser();
        assert_eq!(
            factor(&t, &[1e22, 1e19], &[None, Some(0.5)], 1e5),
            (0.5, false)
        );
        assert!((carbon(1e17, 1e21) - (-1.88f64).exp() / 1.28).abs() < 1e-12);
    }
}
