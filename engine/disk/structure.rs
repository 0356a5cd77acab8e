//! Owns where the gas of a recipe disk is and how warm it is: surface density, temperature,
//! hydrostatic balance.
//!
//! It never knows of light, ionisation or cells. All in cgs.

use crate::units::{BOLTZMANN, GRAVITATION, HYDROGEN_MASS};
use std::f64::consts::PI;

/// Mean mass per gas particle in hydrogen masses: H2 and He of solar share.
pub const MEAN_PARTICLE_MASS: f64 = 2.37;
/// Gas mass per hydrogen nucleus in hydrogen masses.
pub const MASS_PER_HYDROGEN: f64 = 1.4;

/// Surface density (g cm^-2) at `radius` of a disk of gas mass `mass` with a power law of index
/// `slope` tapered beyond `cutoff` (all cgs; slope < 2):
/// Sigma = Sigma_c (r/R_c)^-g exp[-(r/R_c)^(2-g)], Sigma_c = (2-g) M / (2 pi R_c^2).
/// Lynden-Bell & Pringle 1974 MNRAS 168 603; Hartmann et al. 1998 ApJ 495 385.
pub fn surface_density(radius: f64, mass: f64, cutoff: f64, slope: f64) -> f64 {
    let at_cutoff = (2.0 - slope) * mass / (2.0 * PI * cutoff * cutoff);
    let x = radius / cutoff;
    at_cutoff * x.powf(-slope) * (-x.powf(2.0 - slope)).exp()
}

/// Temperature (K) at `radius` of a power law with value `at_reference` at `reference`.
pub fn power_law_temperature(radius: f64, reference: f64, at_reference: f64, slope: f64) -> f64 {
    at_reference * (radius / reference).powf(slope)
}

/// Temperature (K) at `height` between a midplane at `midplane` K and a surface at `surface` K
/// reached at `surface_height` and kept above it:
/// T = T_mid + (T_atm - T_mid) sin(pi z / 2 z_q)^(2 delta).
/// Dartois, Dutrey & Guilloteau 2003 A&A 399 773.
pub fn two_layer_temperature(
    height: f64,
    surface_height: f64,
    midplane: f64,
    surface: f64,
    steepness: f64,
) -> f64 {
    let share = (height.abs() / surface_height).min(1.0);
    midplane + (surface - midplane) * (0.5 * PI * share).sin().powf(2.0 * steepness)
}

/// Isothermal sound speed squared, k_B T/(mu m_H), cm^2 s^-2.
pub fn sound_speed_squared(temperature: f64) -> f64 {
    BOLTZMANN * temperature / (MEAN_PARTICLE_MASS * HYDROGEN_MASS)
}

/// Keplerian frequency squared, G M / r^3, s^-2.
pub fn orbital_frequency_squared(star_mass: f64, radius: f64) -> f64 {
    GRAVITATION * star_mass / radius.powi(3)
}

/// Pressure scale height c_s/Omega, cm.
pub fn scale_height(temperature: f64, orbital_frequency_squared: f64) -> f64 {
    (sound_speed_squared(temperature) / orbital_frequency_squared).sqrt()
}

/// The gas at one height.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Layer {
    /// g cm^-3.
    pub density: f64,
    /// Surface density of the gas above, g cm^-2.
    pub above: f64,
}

/// Steps per midplane scale height of the vertical integration.
const STEPS_PER_SCALE_HEIGHT: f64 = 50.0;
/// The integration ends where the density has fallen to this share of that at the last height.
const NEGLIGIBLE: f64 = 1.0e-14;
/// Longest way up beyond the last height, in tens of steps: ends any climb.
const LONGEST_CLIMB: usize = 10_000;

/// Density and column above at ascending `heights` (cm, from the midplane up) of gas in
/// hydrostatic balance, d ln rho/dz = -Omega^2 z/c_s^2 - d ln c_s^2/dz (vertical gravity of a
/// thin disk), with `surface_density` (g cm^-2) in all, both halves counted.
pub fn hydrostatic(
    temperature: impl Fn(f64) -> f64,
    orbital_frequency_squared: f64,
    surface_density: f64,
    heights: &[f64],
) -> Vec<Layer> {
    let midplane = temperature(0.0);
    let step = scale_height(midplane, orbital_frequency_squared) / STEPS_PER_SCALE_HEIGHT;
    let mut climb = Climb {
        pull: |z: f64| orbital_frequency_squared * z / sound_speed_squared(temperature(z)),
        // rho c_s^2 falls as exp(-integral of the pull): no derivative of T is needed.
        density: |z: f64, pulled: f64| (-pulled).exp() * midplane / temperature(z),
        step,
        z: 0.0,
        pulled: 0.0,
    };
    // Densities relative to the midplane, and the mass between each height and the one below.
    let mut densities = Vec::with_capacity(heights.len());
    let mut slabs = Vec::with_capacity(heights.len());
    for &height in heights {
        slabs.push(climb.to(height));
        densities.push(climb.here());
    }
    let negligible = NEGLIGIBLE * climb.here();
    let mut beyond = Vec::new();
    for _ in 0..LONGEST_CLIMB {
        beyond.push(climb.to(climb.z + 10.0 * step));
        if climb.here() <= negligible {
            break;
        }
    }
    // Summed from the top, so that small columns keep their digits.
    let mut above: f64 = beyond.iter().rev().sum();
    let mut layers = Vec::with_capacity(heights.len());
    for (density, slab) in densities.iter().zip(&slabs).rev() {
        layers.push(Layer {
            density: *density,
            above,
        });
        above += slab;
    }
    layers.reverse();
    let scale = 0.5 * surface_density / above;
    for layer in &mut layers {
        layer.density *= scale;
        layer.above *= scale;
    }
    layers
}

/// The way up from the midplane: where it is and the integral of gravity over c_s^2 so far.
struct Climb<P, D> {
    pull: P,
    density: D,
    step: f64,
    z: f64,
    pulled: f64,
}

impl<P: Fn(f64) -> f64, D: Fn(f64, f64) -> f64> Climb<P, D> {
    fn here(&self) -> f64 {
        (self.density)(self.z, self.pulled)
    }

    /// Climbs to `height` and gives the mass per area passed (Simpson; 0 if already there).
    fn to(&mut self, height: f64) -> f64 {
        let steps = ((height - self.z) / self.step).ceil().max(0.0);
        let (from, width) = (self.z, (height - self.z) / steps.max(1.0));
        let mut passed = 0.0;
        for i in 0..steps as usize {
            let low = from + width * i as f64;
            let (middle, high) = (low + 0.5 * width, low + width);
            let at_middle = self.pulled + integral(&self.pull, low, middle);
            let at_high = at_middle + integral(&self.pull, middle, high);
            passed += width / 6.0
                * ((self.density)(low, self.pulled)
                    + 4.0 * (self.density)(middle, at_middle)
                    + (self.density)(high, at_high));
            self.pulled = at_high;
        }
        self.z = height.max(from);
        passed
    }
}

/// Three-point Gauss-Legendre integral of `f` from `low` to `high`.
fn integral(f: &impl Fn(f64) -> f64, low: f64, high: f64) -> f64 {
    let (centre, half) = (0.5 * (low + high), 0.5 * (high - low));
    let node = half * 0.6_f64.sqrt();
    half * (5.0 * f(centre - node) + 8.0 * f(centre) + 5.0 * f(centre + node)) / 9.0
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units::{AU, SOLAR_MASS};

    /// The disk would hold another mass than the case says.
    #[test]
    fn surface_density_integrates_to_the_disk_mass() {
        let mass = 0.02 * SOLAR_MASS;
        for slope in [0.5, 1.0, 1.5] {
            // Midpoint rule in u = ln r; the inner remainder is (r/R_c)^(2-g) of the mass.
            let (from, to, steps) = ((1.0e-14 * AU).ln(), (1.0e5 * AU).ln(), 40_000);
            let width = (to - from) / steps as f64;
            let total: f64 = (0..steps)
                .map(|i| (from + (i as f64 + 0.5) * width).exp())
                .map(|r| 2.0 * PI * r * r * surface_density(r, mass, 80.0 * AU, slope) * width)
                .sum();
            assert!(
                (total / mass - 1.0).abs() < 1e-6,
                "slope {slope}: {}",
                total / mass
            );
        }
    }

    /// Isothermal gas is a Gaussian: rho_0 = Sigma/(sqrt(2 pi) h), column above
    /// Sigma/2 erfc(z/(sqrt 2 h)). Reference values of erfc(x/sqrt 2) from Abramowitz & Stegun
    /// 1964, table 26.1 (2Q(x)), and for x = 5 from 5.7330314e-7.
    #[test]
    fn isothermal_gas_is_gaussian() {
        let omega2 = orbital_frequency_squared(SOLAR_MASS, 10.0 * AU);
        let h = scale_height(30.0, omega2);
        let heights: Vec<f64> = [0.0, 1.0, 2.0, 3.0, 5.0].iter().map(|x| x * h).collect();
        let layers = hydrostatic(|_| 30.0, omega2, 50.0, &heights);
        let twice_q = [
            1.0,
            0.317_310_507_9,
            0.045_500_263_9,
            0.002_699_796_1,
            5.733_031_4e-7,
        ];
        for ((layer, z), share) in layers.iter().zip(&heights).zip(twice_q) {
            let x = z / h;
            let density = 50.0 / ((2.0 * PI).sqrt() * h) * (-0.5 * x * x).exp();
            assert!(
                (layer.density / density - 1.0).abs() < 1e-7,
                "density at {x} h"
            );
            assert!(
                (layer.above / (25.0 * share) - 1.0).abs() < 1e-6,
                "column above {x} h"
            );
        }
    }

    /// With a warm surface the balance of pressure and gravity must still hold between close
    /// heights; a missing d ln c_s^2/dz would show as 10 % and more.
    #[test]
    fn warm_surface_is_in_balance() {
        let omega2 = orbital_frequency_squared(SOLAR_MASS, 100.0 * AU);
        let h = scale_height(20.0, omega2);
        let temperature = |z: f64| two_layer_temperature(z, 4.0 * h, 20.0, 60.0, 2.0);
        for x in [0.5, 2.0, 3.0, 5.0] {
            let heights = [(x - 1e-3) * h, x * h, (x + 1e-3) * h];
            let layers = hydrostatic(temperature, omega2, 1.0, &heights);
            let pressure =
                |i: usize| layers[i].density * sound_speed_squared(temperature(heights[i]));
            let slope = (pressure(2) - pressure(0)) / (2e-3 * h);
            let weight = -layers[1].density * omega2 * heights[1];
            assert!(
                (slope / weight - 1.0).abs() < 1e-5,
                "{x} h: {}",
                slope / weight
            );
        }
    }

    /// Limits of Dartois et al. 2003: midplane, surface, and half of the way (sin^4 45 deg = 1/4).
    #[test]
    fn two_layers_meet_their_limits() {
        assert_eq!(two_layer_temperature(0.0, 4.0, 20.0, 60.0, 2.0), 20.0);
        assert_eq!(two_layer_temperature(4.0, 4.0, 20.0, 60.0, 2.0), 60.0);
        assert_eq!(two_layer_temperature(9.0, 4.0, 20.0, 60.0, 2.0), 60.0);
        assert!((two_layer_temperature(2.0, 4.0, 20.0, 60.0, 2.0) - 30.0).abs() < 1e-12);
    }

    /// Sound speed and scale height by hand: 20 K, mu = 2.37: c_s^2 = 1.380649e-16*20/(2.37 *
    /// 1.673533e-24) = 6.96200e8 cm^2 s^-2; at 100 au of one solar mass Omega^2 = 1.32712e26 /
    /// (1.495979e15)^3 = 3.96401e-20 s^-2; h = 1.32524e14 cm = 8.859 au.
    #[test]
    fn scale_height_by_hand() {
        let omega2 = orbital_frequency_squared(SOLAR_MASS, 100.0 * AU);
        assert!((sound_speed_squared(20.0) / 6.962_0e8 - 1.0).abs() < 1e-4);
        assert!((omega2 / 3.964_01e-20 - 1.0).abs() < 1e-4);
        assert!((scale_height(20.0, omega2) / AU / 8.859 - 1.0).abs() < 1e-3);
    }
}
