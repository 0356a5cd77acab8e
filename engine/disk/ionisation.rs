//! Owns the ionisation rates of H2 in a recipe disk: cosmic rays, X-rays of the star, radioactive
//! nuclides.
//!
//! It never decides what a rate does: `rates` does.

/// Ionisation rate of H2 by 26Al at the solar value, s^-1 (Umebayashi & Nakano 2009 ApJ 690 69).
pub const SOLAR_NUCLIDES: f64 = 7.3e-19;

/// Attenuation column of cosmic rays, g cm^-2 (Umebayashi & Nakano 1981 PASJ 33 617).
pub const COSMIC_RAY_RANGE: f64 = 96.0;

/// Ionisation rate per H2 (s^-1) by cosmic rays under `above` and over `below` g cm^-2, for the
/// unattenuated rate `outside`:
/// zeta_0/2 sum over both sides of exp(-S/96) [1 + (S/96)^0.75]^(-4/3).
/// Umebayashi & Nakano 1981 PASJ 33 617; 2009 ApJ 690 69.
pub fn cosmic_rays(outside: f64, above: f64, below: f64) -> f64 {
    let side = |column: f64| {
        let x = column / COSMIC_RAY_RANGE;
        (-x).exp() * (1.0 + x.powf(0.75)).powf(-4.0 / 3.0)
    };
    0.5 * outside * (side(above) + side(below))
}

/// Temperature of the X-ray plasma of the star, for which the fit has coefficients.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Hardness {
    ThreeKev,
    FiveKev,
}

/// Ionisation rate (s^-1) by X-rays of `luminosity` erg s^-1 at `radius` au under `above` and
/// over `below` hydrogen nuclei per cm^2 (vertical columns):
/// L_29 r^-2.2 {z1 [exp(-(N/N1)^a) + ...] + z2 [exp(-(N/N2)^b) + ...]}: absorption of direct
/// X-rays, and scattered ones that reach deeper.
/// Bai & Goodman 2009 ApJ 701 737 eq. 21, after Igea & Glassgold 1999 ApJ 518 848.
pub fn xrays(luminosity: f64, radius: f64, above: f64, below: f64, hardness: Hardness) -> f64 {
    let (z1, n1, a, z2, n2, b) = match hardness {
        Hardness::ThreeKev => (6.0e-12, 1.5e21, 0.4, 1.0e-15, 7.0e23, 0.65),
        Hardness::FiveKev => (4.0e-12, 3.0e21, 0.5, 2.0e-15, 1.0e24, 0.7),
    };
    let absorbed = |column: f64| (-(column / n1).powf(a)).exp();
    let scattered = |column: f64| (-(column / n2).powf(b)).exp();
    luminosity / 1.0e29
        * radius.powf(-2.2)
        * (z1 * (absorbed(above) + absorbed(below)) + z2 * (scattered(above) + scattered(below)))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The midplane of a heavy disk would be ionised too much or too little.
    #[test]
    fn cosmic_rays_meet_their_limits() {
        assert_eq!(cosmic_rays(1.3e-17, 0.0, 0.0), 1.3e-17);
        assert_eq!(cosmic_rays(1.3e-17, 0.0, 1.0e6), 0.65e-17);
        // One range from one side only: e^-1 2^(-4/3)/2 = 0.367879 * 0.396850 / 2 = 0.0729965.
        let one = cosmic_rays(1.0, 96.0, 1.0e6);
        assert!((one / 0.072_996_5 - 1.0).abs() < 1e-5, "{one}");
    }

    /// By hand for 3 keV, L_X = 1e30, r = 10 au, N_above = 1.5e21 (absorption exponent 1),
    /// N_below = 7e23 (scattering exponent 1):
    /// direct 6e-12 (e^-1 + exp(-(7e23/1.5e21)^0.4 = -11.6862)) = 6e-12 (0.367879 + 8.409e-6) = 2.207325e-12;
    /// scattered 1e-15 (exp(-(1.5e21/7e23)^0.65 = -0.0184038) + e^-1) = 1.349644e-15;
    /// times 10 * 10^-2.2 = 0.0630957: 1.393578e-13 s^-1.
    #[test]
    fn xray_rate_by_hand() {
        let rate = xrays(1.0e30, 10.0, 1.5e21, 7.0e23, Hardness::ThreeKev);
        assert!((rate / 1.393_578e-13 - 1.0).abs() < 1e-4, "{rate:e}");
        // Deep below both tables' columns only the scattered part is left.
        let deep = xrays(1.0e29, 1.0, 1.0e24, 1.0e24, Hardness::FiveKev);
        assert!(
            (deep / (2.0 * 2.0e-15 * (-1.0_f64).exp()) - 1.0).abs() < 1e-4,
            "{deep:e}"
        );
    }
}
