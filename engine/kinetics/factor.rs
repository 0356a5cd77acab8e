//! Owns the state-dependent factors of fluxes: collider density, falloff, layers of ice; each with
//! its exact derivative.
//!
//! It never knows which step a factor belongs to.

use super::mechanism::{Coefficients, Factor, Falloff};

/// A factor and its derivative with respect to its variable (M, or the ice total).
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct FactorValue {
    pub value: f64,
    pub slope: f64,
}

/// M = sum of weights times abundances, or the fixed value; never below 0, where its slope is 0.
pub fn colliders(
    coefficients: &Coefficients,
    colliders: &[(usize, f64)],
    y: &[f64],
) -> FactorValue {
    if let Some(fixed) = coefficients.fixed_colliders {
        return FactorValue {
            value: fixed,
            slope: 0.0,
        };
    }
    let sum: f64 = colliders
        .iter()
        .map(|&(species, weight)| weight * y[species])
        .sum();
    if sum > 0.0 {
        FactorValue {
            value: sum,
            slope: 1.0,
        }
    } else {
        FactorValue::default()
    }
}

/// The falloff coefficient at M, with its derivative with respect to M.
///
/// P = low M/high, k = high P/(1 + P) F, log10 F = log_centre/(1 + (log10 P/N)^2),
/// N = 0.75 - 1.27 log_centre, capped at high (Troe 1979, J. Phys. Chem. 83, 114; the form with
/// the width N of Gilbert, Luther & Troe 1983, Ber. Bunsenges. Phys. Chem. 87, 169).
pub fn falloff(falloff: &Falloff, colliders: FactorValue) -> FactorValue {
    let Falloff {
        low,
        high,
        log_centre,
    } = *falloff;
    let m = colliders.value;
    if m <= 0.0 || low <= 0.0 || high <= 0.0 {
        return FactorValue::default();
    }
    let pressure = low * m / high;
    let width = 0.75 - 1.27 * log_centre;
    let u = pressure.log10() / width;
    let bell = 1.0 + u * u;
    let log_f = log_centre / bell;
    // Written so that a pressure that overflows gives the high-pressure limit.
    let value = high / (1.0 + 1.0 / pressure) * 10f64.powf(log_f);
    if value >= high {
        return FactorValue {
            value: high,
            slope: 0.0,
        };
    }
    // d ln k/d ln P; the factor ln 10 of log10 F cancels against that of log10 P.
    let logarithmic = 1.0 / (1.0 + pressure) - 2.0 * log_centre * u / (width * bell * bell);
    FactorValue {
        value,
        slope: colliders.slope * value * logarithmic / m,
    }
}

/// The number of layers, L = max(total, 0)/sites.
fn layers(total: f64, sites: f64) -> f64 {
    if total > 0.0 { total / sites } else { 0.0 }
}

/// min(1, n/L).
pub fn top_layers(n: f64, total: f64, sites: f64) -> FactorValue {
    let depth = layers(total, sites);
    if depth <= n {
        FactorValue {
            value: 1.0,
            slope: 0.0,
        }
    } else if depth.is_infinite() {
        FactorValue::default()
    } else {
        FactorValue {
            value: n / depth,
            slope: -n / (depth * total),
        }
    }
}

/// min(1, n/L)^2 / clamp(L, 1, n), with n >= 1.
pub fn encounters(n: f64, total: f64, sites: f64) -> FactorValue {
    let depth = layers(total, sites);
    if depth <= 1.0 {
        FactorValue {
            value: 1.0,
            slope: 0.0,
        }
    } else if depth <= n {
        FactorValue {
            value: 1.0 / depth,
            slope: -1.0 / (depth * total),
        }
    } else if depth.is_infinite() {
        FactorValue::default()
    } else {
        let value = n / (depth * depth);
        FactorValue {
            value,
            slope: -2.0 * value / total,
        }
    }
}

/// Every factor of `factors` at the state `y`, into `out`.
pub fn evaluate(
    factors: &[Factor],
    coefficients: &Coefficients,
    weights: &[(usize, f64)],
    ice_total: Option<usize>,
    y: &[f64],
    out: &mut [FactorValue],
) {
    if factors.is_empty() {
        return;
    }
    let m = colliders(coefficients, weights, y);
    let total = ice_total.map_or(0.0, |species| y[species]);
    for (factor, out) in factors.iter().zip(out) {
        *out = match *factor {
            Factor::One => FactorValue {
                value: 1.0,
                slope: 0.0,
            },
            Factor::Colliders => m,
            Factor::Falloff(number) => falloff(&coefficients.falloff[number], m),
            Factor::TopLayers(n) => top_layers(n, total, coefficients.sites),
            Factor::Encounters(n) => encounters(n, total, coefficients.sites),
        };
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const ONE: fn(f64) -> FactorValue = |value| FactorValue { value, slope: 1.0 };

    #[test]
    fn falloff_has_its_two_limits_its_centre_and_its_cap() {
        // A wrong P, width or cap would show in one of the four.
        let simple = Falloff {
            low: 2.0,
            high: 3.0,
            log_centre: 0.6f64.log10(),
        };
        let thin = falloff(&simple, ONE(1e-30));
        assert!(
            (thin.value / 2e-30 - 1.0).abs() < 0.01,
            "F tends to 1: {thin:?}"
        );
        let dense = falloff(&simple, ONE(1e30));
        assert!((dense.value / 3.0 - 1.0).abs() < 0.01 && dense.value <= 3.0);
        // At P = 1 the coefficient is high/2 times the centre.
        assert!((falloff(&simple, ONE(1.5)).value - 0.9).abs() < 1e-14);
        // A centre above 1 would lift the coefficient above the high-pressure limit.
        let lifted = Falloff {
            low: 2.0,
            high: 3.0,
            log_centre: 0.3,
        };
        assert_eq!(
            falloff(&lifted, ONE(3.0)),
            FactorValue {
                value: 3.0,
                slope: 0.0
            }
        );
        for m in [0.0, -1.0] {
            assert_eq!(falloff(&simple, ONE(m)), FactorValue::default());
        }
    }

    #[test]
    fn layer_factors_are_continuous_and_follow_their_definition() {
        let sites = 1e-6;
        for n in [1.0, 2.0, 4.5] {
            for depth in [-1.0, 0.0, 0.5, 0.999, 1.001, 1.7, 2.001, 4.4, 4.6, 300.0] {
                let l = f64::max(depth, 0.0);
                let top = top_layers(n, depth * sites, sites).value;
                assert!((top - f64::min(1.0, n / l)).abs() < 1e-14);
                let pairs = encounters(n, depth * sites, sites).value;
                let expected = f64::min(1.0, n / l).powi(2) / l.clamp(1.0, n);
                assert!(
                    (pairs - expected).abs() < 1e-14,
                    "{n} {depth}: {pairs} {expected}"
                );
            }
        }
        // Ice where there is no surface: nothing lies in the top layers, and nothing is NaN.
        assert_eq!(top_layers(2.0, 1e-9, 0.0), FactorValue::default());
        assert_eq!(encounters(2.0, 0.0, 0.0).value, 1.0);
    }
}
