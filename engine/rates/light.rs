//! Owns the rates of photodissociation and photoionisation in a cell's radiation fields, and the
//! photon flux that reaches the ice.
//!
//! It never integrates cross-sections: the network carries rates in unit fields.

use crate::disk::conditions::{FieldKind, Light, REFERENCE_DUST_AREA};

/// Photons per cm^2 and second in a Draine field of unit strength, 4 pi J over 7-13.6 eV, as used
/// with photodesorption yields (shared facts, disk_relations.md; 1.92e8 over 5-13.6 eV).
pub const DRAINE_PHOTON_FLUX: f64 = 1e8;
/// Secondary UV photons (cm^-2 s^-1) per ionisation rate of H2 for interstellar dust: the flux
/// that reproduces the secondary-photon rates of the network (shared facts, cosmic.csv).
pub const SECONDARY_PHOTONS_PER_ZETA: f64 = 1.4e20;
/// Exponent of extinction of the photodesorbing flux (disk_relations.md).
pub const PHOTODESORPTION_EXTINCTION: f64 = 2.0;

/// Attenuation exp(-gamma A_V) of one field, 1 if its strength already includes extinction.
pub fn attenuation(kind: &FieldKind, light: &Light, gamma: f64) -> f64 {
    if kind.attenuated {
        1.0
    } else {
        (-gamma * light.extinction).exp()
    }
}

/// Photon flux on the ice, cm^-2 s^-1 (4 pi J): the fields after extinction, and the secondary UV
/// field of cosmic rays and X-rays, which scales inversely with the dust's UV cross-section.
pub fn flux_on_ice(
    kinds: &[FieldKind],
    lights: &[Light],
    zeta_cosmic_and_xray: f64,
    dust_area: f64,
) -> f64 {
    let fields: f64 = kinds
        .iter()
        .zip(lights)
        .map(|(kind, light)| light.strength * attenuation(kind, light, PHOTODESORPTION_EXTINCTION))
        .sum();
    DRAINE_PHOTON_FLUX * fields
        + SECONDARY_PHOTONS_PER_ZETA * zeta_cosmic_and_xray * secondary_dust_scale(dust_area)
}

/// How the secondary UV field scales with grown dust: inversely with its cross-section.
pub fn secondary_dust_scale(dust_area: f64) -> f64 {
    REFERENCE_DUST_AREA / dust_area
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Fails if extinction is applied to an attenuated field, or not to another, or the secondary
    /// field does not grow when dust is removed. Hand values.
    #[test]
    fn flux_on_ice_adds_fields_after_extinction_and_scaled_secondary_photons() {
        let kind = |attenuated| FieldKind {
            name: "sky".into(),
            spectrum: "draine".into(),
            attenuated,
        };
        let light = |strength, extinction| Light {
            strength,
            extinction,
            columns: vec![],
            shields: vec![],
        };
        let flux = flux_on_ice(
            &[kind(false), kind(true)],
            &[light(2.0, 1.5), light(3.0, 1.5)],
            1.3e-17,
            0.1 * REFERENCE_DUST_AREA,
        );
        let expected = 1e8 * (2.0 * (-3.0f64).exp() + 3.0) + 10.0 * 1820.0;
        assert!((flux / expected - 1.0).abs() < 1e-12);
    }
}
