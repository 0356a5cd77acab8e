//! Owns the making of a disk from a recipe: a tapered power law in hydrostatic balance with a warm
//! surface, lit from outside and by its star.
//!
//! It never reads text (the case does) and holds no formula of its own: those stand in
//! `structure`, `light` and `ionisation`.

use super::conditions::{Conditions, Disk};
use super::ionisation::{Hardness, cosmic_rays, xrays};
use super::light::Sources;
use super::structure::{
    Layer, MASS_PER_HYDROGEN, hydrostatic, orbital_frequency_squared, power_law_temperature,
    scale_height, surface_density, two_layer_temperature,
};
use crate::units::{AU, HYDROGEN_MASS};

/// Temperatures of a recipe, gas and dust alike.
#[derive(Debug, Clone, PartialEq)]
pub struct Warmth {
    /// K at `reference`.
    pub midplane: f64,
    pub surface: f64,
    /// cm.
    pub reference: f64,
    pub midplane_slope: f64,
    pub surface_slope: f64,
    /// Height at which the surface temperature is reached, in pressure scale heights.
    pub surface_from: f64,
    /// delta of Dartois et al. 2003.
    pub steepness: f64,
}

/// Everything a recipe says, defaults filled in. cgs but where said.
#[derive(Debug, Clone, PartialEq)]
pub struct Recipe {
    pub star_mass: f64,
    /// Gas mass of the disk.
    pub gas_mass: f64,
    pub cutoff_radius: f64,
    pub slope: f64,
    pub warmth: Warmth,
    /// First and last radius, and how many, spaced evenly in the logarithm.
    pub radii: (f64, f64, usize),
    /// Last height in pressure scale heights of the midplane, and how many from the midplane up.
    pub heights: (f64, usize),
    pub sources: Sources,
    /// Per H2, s^-1, outside of the disk.
    pub cosmic: f64,
    /// Luminosity and hardness.
    pub xrays: Option<(f64, Hardness)>,
    pub nuclides: f64,
    pub dust_area: f64,
    pub grain_radius: f64,
}

impl Recipe {
    /// The radii of the columns, cm.
    pub fn radii(&self) -> Vec<f64> {
        let (from, to, count) = self.radii;
        let last = count.saturating_sub(1).max(1) as f64;
        (0..count)
            .map(|i| {
                if i + 1 == count && count > 1 {
                    to
                } else {
                    from * (to / from).powf(i as f64 / last)
                }
            })
            .collect()
    }

    /// The disk, column after column from the inside out, each from the midplane up.
    /// `assumed` are the mean abundances of the shielding species.
    pub fn build(&self, assumed: &[(String, f64)]) -> Disk {
        Disk {
            fields: self.sources.fields(),
            column_species: assumed.iter().map(|(name, _)| name.clone()).collect(),
            cells: self
                .radii()
                .iter()
                .flat_map(|&radius| self.column(radius, assumed))
                .collect(),
        }
    }

    fn column(&self, radius: f64, assumed: &[(String, f64)]) -> Vec<Conditions> {
        let warmth = &self.warmth;
        let at = |value, slope| power_law_temperature(radius, warmth.reference, value, slope);
        let midplane = at(warmth.midplane, warmth.midplane_slope);
        let surface = at(warmth.surface, warmth.surface_slope);
        let omega2 = orbital_frequency_squared(self.star_mass, radius);
        let h = scale_height(midplane, omega2);
        let temperature = |z: f64| {
            two_layer_temperature(
                z,
                warmth.surface_from * h,
                midplane,
                surface,
                warmth.steepness,
            )
        };
        let sigma = surface_density(radius, self.gas_mass, self.cutoff_radius, self.slope);
        let (up_to, count) = self.heights;
        let last = count.saturating_sub(1).max(1) as f64;
        let heights: Vec<f64> = (0..count).map(|i| up_to * h * i as f64 / last).collect();
        hydrostatic(temperature, omega2, sigma, &heights)
            .iter()
            .zip(&heights)
            .map(|(layer, &z)| self.cell(radius, z, temperature(z), sigma, layer, assumed))
            .collect()
    }

    fn cell(
        &self,
        radius: f64,
        height: f64,
        temperature: f64,
        sigma: f64,
        layer: &Layer,
        assumed: &[(String, f64)],
    ) -> Conditions {
        let (radius, height) = (radius / AU, height / AU);
        let mass = MASS_PER_HYDROGEN * HYDROGEN_MASS;
        let below = sigma - layer.above;
        let nuclei = (layer.above / mass, below / mass);
        Conditions {
            radius,
            height,
            n_h: layer.density / mass,
            t_gas: temperature,
            t_dust: temperature,
            light: self
                .sources
                .at((radius, height), nuclei, self.dust_area, assumed),
            zeta_cosmic: cosmic_rays(self.cosmic, layer.above, below),
            zeta_xray: self.xrays.map_or(0.0, |(luminosity, hardness)| {
                xrays(luminosity, radius, nuclei.0, nuclei.1, hardness)
            }),
            zeta_nuclides: self.nuclides,
            dust_area: self.dust_area,
            grain_radius: self.grain_radius,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::disk::columns::assumed_with;
    use crate::units::SOLAR_MASS;

    fn recipe() -> Recipe {
        Recipe {
            star_mass: SOLAR_MASS,
            gas_mass: 0.02 * SOLAR_MASS,
            cutoff_radius: 80.0 * AU,
            slope: 1.0,
            warmth: Warmth {
                midplane: 20.0,
                surface: 60.0,
                reference: 100.0 * AU,
                midplane_slope: -0.5,
                surface_slope: -0.5,
                surface_from: 4.0,
                steepness: 2.0,
            },
            radii: (1.0 * AU, 100.0 * AU, 3),
            heights: (6.0, 4),
            sources: Sources {
                sky: 1.0,
                star: None,
            },
            cosmic: 1.3e-17,
            xrays: Some((1.0e30, Hardness::ThreeKev)),
            nuclides: 7.3e-19,
            dust_area: 5.8575e-22,
            grain_radius: 1.0e-5,
        }
    }

    /// The columns seen from both sides must add up to all of the gas, and the midplane lies in
    /// the middle: else light and cosmic rays see another disk than the gas is in.
    #[test]
    fn columns_from_both_sides_add_up() {
        let recipe = recipe();
        let disk = recipe.build(&assumed_with(&[]));
        assert_eq!(disk.cells.len(), 12);
        for (column, radius) in disk.cells.chunks(4).zip(recipe.radii()) {
            let sigma =
                surface_density(radius, recipe.gas_mass, recipe.cutoff_radius, recipe.slope);
            let all = sigma / (1.4 * HYDROGEN_MASS) / 1.87e21;
            for cell in column {
                let seen = cell.light[0].extinction + cell.light[1].extinction;
                assert!((seen / all - 1.0).abs() < 1e-12);
                assert!((cell.radius * AU / radius - 1.0).abs() < 1e-12);
            }
            let midplane = &column[0];
            assert_eq!(midplane.height, 0.0);
            assert!(
                (midplane.light[0].extinction / midplane.light[1].extinction - 1.0).abs() < 1e-9
            );
            assert!(
                column
                    .windows(2)
                    .all(|w| w[1].n_h < w[0].n_h && w[1].t_gas >= w[0].t_gas)
            );
            assert!(
                column
                    .windows(2)
                    .all(|w| w[1].light[0].extinction < w[0].light[0].extinction)
            );
            assert!(column.windows(2).all(|w| w[1].zeta_xray > w[0].zeta_xray));
        }
        let radii: Vec<f64> = disk
            .cells
            .chunks(4)
            .map(|column| column[0].radius)
            .collect();
        for (radius, expected) in radii.iter().zip([1.0, 10.0, 100.0]) {
            assert!((radius / expected - 1.0).abs() < 1e-12);
        }
    }
}
