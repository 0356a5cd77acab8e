//! Owns the physical constants and the reading of quantities with units.
//!
//! It never knows what a quantity is used for: callers say which [`Dimension`] they need and get
//! the value in the engine's working unit (cgs; seconds, centimetres, kelvin, magnitudes).

/// Boltzmann constant, erg K^-1 (CODATA 2018, exact).
pub const BOLTZMANN: f64 = 1.380_649e-16;
/// Planck constant, erg s (CODATA 2018, exact).
pub const PLANCK: f64 = 6.626_070_15e-27;
/// Reduced Planck constant, erg s.
pub const PLANCK_REDUCED: f64 = PLANCK / (2.0 * std::f64::consts::PI);
/// Atomic mass constant, g (CODATA 2018).
pub const ATOMIC_MASS: f64 = 1.660_539_066_60e-24;
/// Electron mass in atomic mass units (CODATA 2018).
pub const ELECTRON_MASS_AMU: f64 = 5.485_799_090_65e-4;
/// Elementary charge, esu (CODATA 2018: 1.602176634e-19 C times c/10).
pub const ELEMENTARY_CHARGE: f64 = 4.803_204_712_570_263e-10;
/// Mass of a hydrogen atom, g (1.00782503223 u).
pub const HYDROGEN_MASS: f64 = 1.007_825_032_23 * ATOMIC_MASS;
/// Newtonian constant of gravitation, cm^3 g^-1 s^-2 (CODATA 2018).
pub const GRAVITATION: f64 = 6.674_30e-8;
/// Stefan-Boltzmann constant, erg cm^-2 s^-1 K^-4 (CODATA 2018).
pub const STEFAN_BOLTZMANN: f64 = 5.670_374_419e-5;
/// Julian year, s (IAU).
pub const YEAR: f64 = 3.155_76e7;
/// Astronomical unit, cm (IAU 2012 B2).
pub const AU: f64 = 1.495_978_707e13;
/// Nominal solar mass parameter over G, g (IAU 2015 B3 with CODATA 2018 G).
pub const SOLAR_MASS: f64 = 1.988_41e33;
/// Nominal solar luminosity, erg s^-1 (IAU 2015 B3).
pub const SOLAR_LUMINOSITY: f64 = 3.828e33;
