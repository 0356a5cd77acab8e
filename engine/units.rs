//! Owns the physical constants and the reading of quantities with units.
//!
//! It never knows what a quantity is used for: callers say which [`Dimension`] they need and get
//! the value in the engine's working unit (cgs; seconds, centimetres, kelvin, magnitudes).

use crate::errors::InputError;
use serde::Deserialize;
use serde::de::{self, Deserializer, Visitor};
use std::fmt;
use std::path::Path;

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

/// Hydrogen column per visual magnitude of the reference dust, cm^-2 mag^-1
/// (Bohlin, Savage & Drake 1978 ApJ 224 132).
pub const COLUMN_PER_MAGNITUDE: f64 = 1.87e21;
/// The Draine (1978) field in units of the Habing field (common practice).
pub const HABING_PER_DRAINE: f64 = 1.7;

/// What kind of quantity is meant; fixes which units fit and what the value is given in.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Dimension {
    /// A plain number (working unit 1).
    Number,
    /// s.
    Time,
    /// cm.
    Length,
    /// K.
    Temperature,
    /// cm^-3.
    NumberDensity,
    /// cm^-2: particles, or sites, per area.
    Column,
    /// cm^2.
    Area,
    /// s^-1.
    Rate,
    /// g.
    Mass,
    /// erg s^-1.
    Luminosity,
    /// cm s^-1.
    Velocity,
    /// g cm^-2.
    SurfaceDensity,
    /// Draine (1978) fields.
    FieldStrength,
    /// Visual magnitudes.
    Extinction,
}

impl Dimension {
    /// The kind in words, with article.
    pub fn words(self) -> &'static str {
        match self {
            Dimension::Number => "a plain number",
            Dimension::Time => "a time",
            Dimension::Length => "a length",
            Dimension::Temperature => "a temperature",
            Dimension::NumberDensity => "a number density",
            Dimension::Column => "a number per area",
            Dimension::Area => "an area",
            Dimension::Rate => "a rate",
            Dimension::Mass => "a mass",
            Dimension::Luminosity => "a luminosity",
            Dimension::Velocity => "a velocity",
            Dimension::SurfaceDensity => "a surface density",
            Dimension::FieldStrength => "a radiation field strength",
            Dimension::Extinction => "an extinction",
        }
    }

    /// What is asked for, with the units that fit: `a time in s, min, ...`.
    pub fn request(self) -> String {
        let units: Vec<&str> = UNITS
            .iter()
            .filter(|unit| unit.dimension == self)
            .map(|unit| unit.name)
            .collect();
        match self {
            Dimension::Number => "a plain number (no unit, or 1)".to_string(),
            _ => format!("{} in {}", self.words(), units.join(", ")),
        }
    }
}

struct Unit {
    name: &'static str,
    dimension: Dimension,
    /// Working units per unit.
    factor: f64,
}

const fn unit(name: &'static str, dimension: Dimension, factor: f64) -> Unit {
    Unit {
        name,
        dimension,
        factor,
    }
}

/// Every unit the engine reads. One spelling each; case matters (`Myr`, `mag`, `M`...).
static UNITS: &[Unit] = &[
    unit("1", Dimension::Number, 1.0),
    unit("s", Dimension::Time, 1.0),
    unit("min", Dimension::Time, 60.0),
    unit("h", Dimension::Time, 3600.0),
    unit("d", Dimension::Time, 86_400.0),
    unit("yr", Dimension::Time, YEAR),
    unit("kyr", Dimension::Time, 1.0e3 * YEAR),
    unit("Myr", Dimension::Time, 1.0e6 * YEAR),
    unit("Gyr", Dimension::Time, 1.0e9 * YEAR),
    unit("nm", Dimension::Length, 1.0e-7),
    unit("um", Dimension::Length, 1.0e-4),
    unit("cm", Dimension::Length, 1.0),
    unit("m", Dimension::Length, 1.0e2),
    unit("km", Dimension::Length, 1.0e5),
    unit("au", Dimension::Length, AU),
    // 648000/pi au (IAU 2015 B2).
    unit(
        "pc",
        Dimension::Length,
        AU * 648_000.0 / std::f64::consts::PI,
    ),
    unit("K", Dimension::Temperature, 1.0),
    unit("cm^-3", Dimension::NumberDensity, 1.0),
    unit("m^-3", Dimension::NumberDensity, 1.0e-6),
    unit("cm^-2", Dimension::Column, 1.0),
    unit("m^-2", Dimension::Column, 1.0e-4),
    unit("cm^2", Dimension::Area, 1.0),
    unit("s^-1", Dimension::Rate, 1.0),
    unit("g", Dimension::Mass, 1.0),
    unit("kg", Dimension::Mass, 1.0e3),
    unit("Msun", Dimension::Mass, SOLAR_MASS),
    unit("erg/s", Dimension::Luminosity, 1.0),
    unit("Lsun", Dimension::Luminosity, SOLAR_LUMINOSITY),
    unit("cm/s", Dimension::Velocity, 1.0),
    unit("km/s", Dimension::Velocity, 1.0e5),
    unit("g/cm^2", Dimension::SurfaceDensity, 1.0),
    unit("Draine", Dimension::FieldStrength, 1.0),
    unit("Habing", Dimension::FieldStrength, 1.0 / HABING_PER_DRAINE),
    unit("mag", Dimension::Extinction, 1.0),
];

/// Why a text is not the quantity asked for. Callers add the file and the entry.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Misread {
    pub found: String,
    pub expected: String,
}

impl Misread {
    /// The same as an error of `entry` in `file`.
    pub fn at(self, file: &Path, line: Option<usize>, entry: impl Into<String>) -> InputError {
        InputError::new(file, line, entry, self.found, self.expected)
    }
}

/// Working units of `dimension` per `unit` (`au` -> 1.495978707e13 for a length).
pub fn factor(name: &str, dimension: Dimension) -> Result<f64, Misread> {
    let misread = |found: String| Misread {
        found,
        expected: dimension.request(),
    };
    match UNITS.iter().find(|unit| unit.name == name) {
        Some(unit) if unit.dimension == dimension => Ok(unit.factor),
        Some(unit) => Err(misread(format!(
            "the unit `{name}` of {}",
            unit.dimension.words()
        ))),
        None => Err(misread(format!("the unknown unit `{name}`"))),
    }
}

/// `from` units expressed in `to` units; exactly 1 for a unit in itself, so that a table written
/// in its working units is read back bit for bit.
pub fn conversion(from: &str, to: &str, dimension: Dimension) -> Result<f64, Misread> {
    let ratio = factor(from, dimension)? / factor(to, dimension)?;
    Ok(if from == to { 1.0 } else { ratio })
}

/// Reads `3 Myr` as a quantity of `dimension`, in its working unit.
pub fn parse(text: &str, dimension: Dimension) -> Result<f64, Misread> {
    let text = text.trim();
    let misread = |found: String| Misread {
        found,
        expected: dimension.request(),
    };
    let (digits, name) = text.split_at(number_length(text));
    let name = name.trim();
    let Ok(number) = digits.parse::<f64>() else {
        return Err(misread(format!(
            "`{text}`, which does not begin with a number"
        )));
    };
    if name.is_empty() && dimension != Dimension::Number {
        return Err(misread(format!("`{text}` without a unit")));
    }
    let factor = factor(if name.is_empty() { "1" } else { name }, dimension)
        .map_err(|m| misread(format!("`{text}` with {}", m.found)))?;
    let value = number * factor;
    if !value.is_finite() {
        return Err(misread(format!("`{text}`, which is not finite")));
    }
    Ok(value)
}

/// Bytes of `text` that make up a leading decimal number (0 if there is none).
fn number_length(text: &str) -> usize {
    let bytes = text.as_bytes();
    let digits_from = |start: usize| {
        bytes[start..]
            .iter()
            .take_while(|b| b.is_ascii_digit())
            .count()
    };
    let sign = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    let whole = digits_from(sign);
    let mut end = sign + whole;
    let mut fraction = 0;
    if bytes.get(end) == Some(&b'.') {
        fraction = digits_from(end + 1);
        end += 1 + fraction;
    }
    if whole + fraction == 0 {
        return 0;
    }
    // An `e` belongs to the number only if digits follow: `3 erg/s` may be written `3erg/s`.
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        let exponent = digits_from((end + 1 + sign).min(bytes.len()));
        if exponent > 0 {
            end += 1 + sign + exponent;
        }
    }
    end
}

/// A number as text that YAML 1.2 and CSV readers take for a float and that reads back the same
/// bits: `1.0e-17`, `0.5`, `3.0`.
pub fn number_text(value: f64) -> String {
    // Plain digits where a person can count them.
    let plain = value == 0.0 || (1.0e-4..1.0e6).contains(&value.abs());
    let text = if plain {
        format!("{value:?}")
    } else {
        format!("{value:e}")
    };
    match text.split_once('e') {
        Some((mantissa, exponent)) if !mantissa.contains('.') => format!("{mantissa}.0e{exponent}"),
        _ => text,
    }
}

/// A quantity as it stands in a YAML file: a plain number or a text with a unit, kept as text
/// until somebody who knows the dimension asks for its value.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Quantity {
    pub text: String,
}

impl Quantity {
    /// The value in the working unit of `dimension`.
    pub fn value(&self, dimension: Dimension) -> Result<f64, Misread> {
        parse(&self.text, dimension)
    }
}

impl<'de> Deserialize<'de> for Quantity {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct Text;
        impl Visitor<'_> for Text {
            type Value = Quantity;
            fn expecting(&self, f: &mut fmt::Formatter) -> fmt::Result {
                f.write_str("a number, or a number with a unit such as `3 Myr`")
            }
            fn visit_str<E: de::Error>(self, text: &str) -> Result<Quantity, E> {
                Ok(Quantity {
                    text: text.split_whitespace().collect::<Vec<_>>().join(" "),
                })
            }
            fn visit_f64<E: de::Error>(self, value: f64) -> Result<Quantity, E> {
                Ok(Quantity {
                    text: number_text(value),
                })
            }
            fn visit_u64<E: de::Error>(self, value: u64) -> Result<Quantity, E> {
                Ok(Quantity {
                    text: value.to_string(),
                })
            }
            fn visit_i64<E: de::Error>(self, value: i64) -> Result<Quantity, E> {
                Ok(Quantity {
                    text: value.to_string(),
                })
            }
        }
        deserializer.deserialize_any(Text)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A wrong factor here would shift every time, length and field of every run.
    #[test]
    fn quantities_are_read_into_working_units() {
        let close = |text: &str, dimension, expected: f64| {
            let value = parse(text, dimension).unwrap();
            assert!(
                (value / expected - 1.0).abs() < 1e-12,
                "{text}: {value} not {expected}"
            );
        };
        close("3 Myr", Dimension::Time, 3.0e6 * 365.25 * 86400.0);
        close("1e2yr", Dimension::Time, 3.15576e9);
        close("40 au", Dimension::Length, 40.0 * 1.495978707e13);
        close("1 pc", Dimension::Length, 3.085_677_581_491_367e18);
        close("0.1 um", Dimension::Length, 1.0e-5);
        close("1.0e12 m^-3", Dimension::NumberDensity, 1.0e6);
        close("1.7 Habing", Dimension::FieldStrength, 1.0);
        close("3erg/s", Dimension::Luminosity, 3.0);
        close("-2.5E-3", Dimension::Number, -2.5e-3);
        close("0.2 km/s", Dimension::Velocity, 2.0e4);
    }

    /// A quantity that is silently taken in the wrong unit is the worst input error of all.
    #[test]
    fn wrong_and_missing_units_are_named_with_what_fits() {
        let error = parse("3", Dimension::Time).unwrap_err();
        assert_eq!(error.found, "`3` without a unit");
        assert!(
            error
                .expected
                .contains("a time in s, min, h, d, yr, kyr, Myr, Gyr")
        );
        let error = parse("3 K", Dimension::Time).unwrap_err();
        assert_eq!(error.found, "`3 K` with the unit `K` of a temperature");
        let error = parse("3 parsec", Dimension::Length).unwrap_err();
        assert!(
            error.found.contains("unknown unit `parsec`"),
            "{}",
            error.found
        );
        for text in [
            "",
            "Myr",
            "NaN yr",
            "inf s",
            ".",
            "-",
            "e5 s",
            "1e400 s",
            "1e308 Gyr",
            "1 2 s",
        ] {
            assert!(
                parse(text, Dimension::Time).is_err(),
                "`{text}` was accepted"
            );
        }
        assert!(parse("5 K", Dimension::Number).is_err());
    }

    /// Resolved cases and cell tables are stored as text: the bits must survive.
    #[test]
    fn numbers_survive_their_text() {
        for value in [
            1.0e-17,
            0.5,
            3.0,
            1.0 / 3.0,
            6.02e23,
            -1.25e-300,
            0.0,
            f64::MIN_POSITIVE,
        ] {
            let text = number_text(value);
            assert_eq!(
                text.parse::<f64>().unwrap().to_bits(),
                value.to_bits(),
                "{text}"
            );
            assert!(
                text.contains('.'),
                "{text} would be an integer or a string in YAML"
            );
        }
        assert_eq!(conversion("au", "au", Dimension::Length), Ok(1.0));
    }
}
