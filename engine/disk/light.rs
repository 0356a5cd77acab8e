//! Owns the radiation fields of a recipe disk: what shines on a cell and through how much dust.
//!
//! It never computes a photorate: `rates` does.

use super::columns::extinction;
use super::conditions::{FieldKind, Light};

/// Interstellar field on a cell from the upper or the lower half of the sky: each half carries
/// half of the strength, so that a cell without dust on either side sees all of it and an opaque
/// midplane halves it.
pub fn half_sky(strength: f64) -> f64 {
    0.5 * strength
}

/// Strength of starlight at (`radius`, `height`) au before extinction, from its value at 100 au.
pub fn starlight(at_100_au: f64, radius: f64, height: f64) -> f64 {
    at_100_au * 1.0e4 / (radius * radius + height * height)
}

/// The light of the star in a recipe.
#[derive(Debug, Clone, PartialEq)]
pub struct Star {
    /// Draine units at 100 au, before extinction.
    pub strength: f64,
    /// Spectrum of the network.
    pub spectrum: String,
}

/// The radiation of a recipe.
#[derive(Debug, Clone, PartialEq)]
pub struct Sources {
    /// Interstellar field, Draine units from all of the sky.
    pub sky: f64,
    pub star: Option<Star>,
}

impl Sources {
    /// The fields of the disk: `sky` from above, `back` from below through the midplane, `star`.
    ///
    /// Starlight is given the extinction of the vertical column above. Light on the straight way
    /// from the star grazes the flared surface and is gone within a thin layer; what reaches the
    /// cells below was scattered downwards there, and crosses the vertical column. Taking all of
    /// it with the vertical extinction overstates the field below the layer (by the share that is
    /// absorbed or scattered outwards there, a factor of several) and is right above it: a user
    /// who wants the deep layers right gives the scattered share as the strength.
    pub fn fields(&self) -> Vec<FieldKind> {
        let field = |name: &str, spectrum: &str| FieldKind {
            name: name.to_string(),
            spectrum: spectrum.to_string(),
            attenuated: false,
        };
        let mut fields = vec![field("sky", "draine"), field("back", "draine")];
        if let Some(star) = &self.star {
            fields.push(field("star", &star.spectrum));
        }
        fields
    }

    /// The light at (`radius`, `height`) au, in the order of [`Sources::fields`], with the
    /// hydrogen columns `above` and `below` (cm^-2), dust of projected cross-section `dust_area`
    /// and mean abundances of the shielding species `assumed`.
    pub fn at(
        &self,
        (radius, height): (f64, f64),
        (above, below): (f64, f64),
        dust_area: f64,
        assumed: &[(String, f64)],
    ) -> Vec<Light> {
        let light = |strength: f64, column: f64| Light {
            strength,
            extinction: extinction(column, dust_area),
            columns: assumed.iter().map(|(_, share)| share * column).collect(),
            shields: vec![None; assumed.len()],
        };
        let mut all = vec![
            light(half_sky(self.sky), above),
            light(half_sky(self.sky), below),
        ];
        if let Some(star) = &self.star {
            all.push(light(starlight(star.strength, radius, height), above));
        }
        all
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Twice the field, or the wrong side's extinction, would move every photodissociation layer.
    #[test]
    fn every_source_gets_its_own_column() {
        let star = Star {
            strength: 300.0,
            spectrum: "black_body_10000K".to_string(),
        };
        let sources = Sources {
            sky: 1.0,
            star: Some(star),
        };
        let assumed = [("H2".to_string(), 0.5)];
        let light = sources.at((60.0, 80.0), (1.87e21, 3.74e21), 5.8575e-22, &assumed);
        assert_eq!(light.len(), sources.fields().len());
        assert_eq!((light[0].strength, light[1].strength), (0.5, 0.5));
        assert!(
            (light[0].extinction - 1.0).abs() < 1e-12 && (light[1].extinction - 2.0).abs() < 1e-12
        );
        // 60-80-100 triangle: exactly 100 au from the star.
        assert!(
            (light[2].strength - 300.0).abs() < 1e-9 && light[2].extinction == light[0].extinction
        );
        assert!((light[1].columns[0] / 1.87e21 - 1.0).abs() < 1e-12);
        // Half the dust, half the extinction of the same gas.
        let thin = sources.at((60.0, 80.0), (1.87e21, 3.74e21), 0.5 * 5.8575e-22, &assumed);
        assert!((thin[0].extinction - 0.5).abs() < 1e-12);
    }
}
