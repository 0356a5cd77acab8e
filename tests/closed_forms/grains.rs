//! Grain charge against a direct solution of its balance equations.

use super::*;

/// A plasma of one metal ion, electrons and grains.
const PLASMA: &str = "\
species:
  - {name: Mg, source: s}
  - {name: Mg+, source: s}
  - {name: e-, source: s}
gas:
  - {change: Mg+ + e- -> Mg, at_300K: 2.78e-12, slope: -0.68, valid: [5, 1000], standing: recalled, source: s}
cosmic:
  - {change: Mg -> Mg+ + e-, direct: 1.0, standing: recalled, source: s}
dust:
  neutralisation:
    - {ion: Mg+, becomes: Mg, share: 1.0, source: s}
";

/// The steady state of `PLASMA`: ionisation balance, charge balance and the ladder of grain charges.
struct Plasma {
    ladder: i32,
    /// Coefficients of electrons and ions on a grain of charge z, cm^3 s^-1.
    electron: Box<dyn Fn(i32) -> f64>,
    ion: Box<dyn Fn(i32) -> f64>,
    recombination: f64,
    zeta: f64,
    /// cm^-3.
    metal: f64,
    dust: f64,
}

impl Plasma {
    fn new(place: &Conditions, metal: f64, ladder: i32) -> Plasma {
        let (t, a) = (place.t_gas, place.grain_radius);
        let tau = a * K_B * t / (CHARGE * CHARGE);
        // Draine & Sutin 1987, ApJ 320, 803, eqs. 3.3-3.5; nu = Z e/q.
        let focusing = move |nu: f64| {
            if nu == 0.0 {
                1.0 + (PI / (2.0 * tau)).sqrt()
            } else if nu < 0.0 {
                (1.0 - nu / tau) * (1.0 + (2.0 / (tau - 2.0 * nu)).sqrt())
            } else {
                let theta = nu / (1.0 + nu.powf(-0.5));
                (1.0 + (4.0 * tau + 3.0 * nu).powf(-0.5)).powi(2) * (-theta / tau).exp()
            }
        };
        let area = PI * a * a;
        let (electrons, ions) = (mean_speed(5.48579909e-4, t), mean_speed(24.305, t));
        Plasma {
            ladder,
            electron: Box::new(move |z| 0.6 * area * electrons * focusing(-f64::from(z))),
            ion: Box::new(move |z| area * ions * focusing(f64::from(z))),
            recombination: 2.78e-12 * (t / 300.0).powf(-0.68),
            zeta: place.zeta_cosmic,
            metal,
            dust: place.n_h * place.dust_area / area,
        }
    }

    /// Shares of the grain charges: as many grains go up a rung as go down.
    fn shares(&self, electrons: f64, ions: f64) -> Vec<(i32, f64)> {
        let mut shares = vec![(-self.ladder, 1.0)];
        for z in -self.ladder..self.ladder {
            let up = (self.ion)(z) * ions;
            let down = (self.electron)(z + 1) * electrons;
            let below = shares.last().map_or(1.0, |s| s.1);
            shares.push((z + 1, below * up / down));
        }
        let sum: f64 = shares.iter().map(|s| s.1).sum();
        shares
            .into_iter()
            .map(|(z, share)| (z, share / sum))
            .collect()
    }

    fn mean_charge(&self, electrons: f64, ions: f64) -> f64 {
        self.shares(electrons, ions)
            .iter()
            .map(|(z, share)| f64::from(*z) * share)
            .sum()
    }

    /// The electrons that make `ions` and grains neutral together.
    fn electrons(&self, ions: f64) -> f64 {
        root(|e| ions - e + self.dust * self.mean_charge(e, ions))
    }

    /// Ions at which ionisation equals recombination with electrons and on grains.
    fn ions(&self) -> f64 {
        root(|ions| {
            let electrons = self.electrons(ions);
            let on_grains: f64 = self
                .shares(electrons, ions)
                .iter()
                .filter(|(z, _)| *z < self.ladder)
                .map(|(z, share)| (self.ion)(*z) * share * self.dust)
                .sum();
            self.zeta * (self.metal - ions) - ions * (self.recombination * electrons + on_grains)
        })
    }
}

/// Where a function that falls from above zero to below it crosses, by halving the logarithm.
fn root(falling: impl Fn(f64) -> f64) -> f64 {
    let (mut low, mut high) = (1e-30f64, 1e10f64);
    for _ in 0..200 {
        let middle = (low * high).sqrt();
        if falling(middle) > 0.0 {
            low = middle
        } else {
            high = middle
        }
    }
    (low * high).sqrt()
}

/// Fails if a rung of the ladder, a focusing factor or a sticking probability is wrong, or charge
/// leaks: steady electrons, ions and mean grain charge against a direct solution of the balance
/// equations (Draine & Sutin 1987, ApJ 320, 803), where electrons outnumber grains and where grains
/// take nearly all of them, with ladders of three and of five states.
#[test]
fn grains_charge_as_the_balance_equations_say() {
    let mut means = Vec::new();
    for (n_h, t, metal, ladder) in [
        (1e5, 20.0, 1e-6, 1),
        (1e12, 50.0, 1e-8, 1),
        (1e5, 20.0, 1e-6, 2),
        (1e9, 300.0, 1e-9, 2),
    ] {
        let grains = GrainOptions {
            charge_states: ladder,
            ..Default::default()
        };
        let setup = Setup::new(PLASMA, &grains);
        let place = Conditions {
            zeta_cosmic: 1e-15,
            ..dark(n_h, t)
        };
        let plasma = Plasma::new(&place, metal * n_h, ladder);
        let ions = plasma.ions();
        let electrons = plasma.electrons(ions);
        let names = ["e-", "Mg+", "dust-", "dust", "dust+"];
        let what = format!("n_H = {n_h:e}, {t} K, up to {ladder} charges");
        let end = setup.run(&place, &[("Mg", metal)], &[1e9 * YEAR], names)[0];
        close(end[0] * n_h, electrons, 1e-5, &format!("electrons, {what}"));
        close(end[1] * n_h, ions, 1e-5, &format!("ions, {what}"));
        let shares = plasma.shares(electrons, ions);
        for (name, z, x) in [
            ("dust-", -1, end[2]),
            ("dust", 0, end[3]),
            ("dust+", 1, end[4]),
        ] {
            let share = shares.iter().find(|s| s.0 == z).map_or(0.0, |s| s.1);
            close(
                x / place.dust_abundance(),
                share,
                1e-5,
                &format!("{name}, {what}"),
            );
        }
        means.push((plasma.mean_charge(electrons, ions), electrons / plasma.dust));
    }
    // The rows are what the test says: negative grains under many electrons, and hardly charged
    // ones that hold most of what there is.
    assert!(means[0].0 < -0.3 && means[0].1 > 10.0, "{means:?}");
    assert!(means[1].0.abs() < 0.1 && means[1].1 < 1.0, "{means:?}");
}
