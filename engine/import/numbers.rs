//! Owns the reading of numbers and words from the cells of a row, and their units.
//!
//! It never knows which law they belong to.

use super::mapping::GivenAs;
use super::plan::{Pick, RangePlan, Value};
use crate::units::{BOLTZMANN, PLANCK};
use std::collections::BTreeMap;

/// What a number of the mapping is, as far as its units go.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Quantity {
    /// Divided by the gas constant or Boltzmann's: K.
    Energy,
    /// cm^3 s^-1.
    TwoBody,
    /// cm^6 s^-1.
    ThreeBody,
    /// A factor of uncertainty.
    Factor,
    Plain,
}

/// Particles per mole (SI 2019).
const AVOGADRO: f64 = 6.022_140_76e23;
/// erg per J, thermochemical cal in J, J per eV (SI 2019), cm s^-1.
const ERG: f64 = 1.0e7;
const CALORIE: f64 = 4.184;
const ELECTRONVOLT: f64 = 1.602_176_634e-19;
const LIGHT: f64 = 2.997_924_58e10;

/// Our unit per unit, or the units that fit.
pub fn unit(name: &str, quantity: Quantity) -> Result<f64, String> {
    let per_joule = ERG / BOLTZMANN;
    let molar = per_joule / AVOGADRO;
    let known: &[(&str, f64)] = match quantity {
        Quantity::Energy => &[
            ("K", 1.0),
            ("J/mol", molar),
            ("kJ/mol", 1.0e3 * molar),
            ("cal/mol", CALORIE * molar),
            ("kcal/mol", 1.0e3 * CALORIE * molar),
            ("meV", 1.0e-3 * ELECTRONVOLT * per_joule),
            ("eV", ELECTRONVOLT * per_joule),
            ("cm^-1", PLANCK * LIGHT / BOLTZMANN),
        ],
        Quantity::TwoBody => &[
            ("cm^3 s^-1", 1.0),
            ("m^3 s^-1", 1.0e6),
            ("cm^3 mol^-1 s^-1", 1.0 / AVOGADRO),
            ("L mol^-1 s^-1", 1.0e3 / AVOGADRO),
            ("m^3 mol^-1 s^-1", 1.0e6 / AVOGADRO),
        ],
        Quantity::ThreeBody => &[
            ("cm^6 s^-1", 1.0),
            ("m^6 s^-1", 1.0e12),
            ("cm^6 mol^-2 s^-1", 1.0 / (AVOGADRO * AVOGADRO)),
            ("L^2 mol^-2 s^-1", 1.0e6 / (AVOGADRO * AVOGADRO)),
        ],
        Quantity::Factor | Quantity::Plain => &[],
    };
    match known.iter().find(|(unit, _)| *unit == name) {
        Some((_, factor)) => Ok(*factor),
        None if known.is_empty() => Err("no `unit` here; `times` converts".to_string()),
        None => {
            let names: Vec<&str> = known.iter().map(|(unit, _)| *unit).collect();
            Err(format!("one of {}", names.join(", ")))
        }
    }
}

/// The cells of a row with the names of their columns.
#[derive(Clone, Copy)]
pub struct Cells<'a> {
    pub columns: &'a [String],
    pub cells: &'a [String],
    /// Whether decimals follow a comma.
    pub comma: bool,
}

impl Cells<'_> {
    pub fn text(&self, column: usize) -> &str {
        self.cells.get(column).map_or("", String::as_str)
    }

    fn name(&self, column: usize) -> &str {
        self.columns.get(column).map_or("", String::as_str)
    }

    /// The number in a cell as it stands.
    fn plain(&self, text: &str, column: usize) -> Result<f64, String> {
        let name = self.name(column);
        if text.is_empty() {
            return Err(format!(
                "found nothing in `{name}`, expected a number (`blank` in the mapping says what nothing means)"
            ));
        }
        parse(text, self.comma)
            .ok_or_else(|| format!("found `{text}` in `{name}`, expected a number"))
    }

    /// A number of the mapping for this row.
    pub fn value(&self, value: &Value) -> Result<f64, String> {
        let Some(column) = value.column else {
            let mut number = value.constant * value.factor;
            for column in &value.times {
                number *= self.plain(self.text(*column), *column)?;
            }
            return Ok(number);
        };
        let text = self.text(column);
        if text.is_empty()
            && let Some(blank) = value.blank
        {
            return Ok(blank);
        }
        // Words and blanks are in our units already.
        if let Some(number) = value.words.get(text) {
            return Ok(*number);
        }
        if !value.words.is_empty() && parse(text, self.comma).is_none() {
            let known: Vec<&str> = value.words.keys().map(String::as_str).collect();
            let name = self.name(column);
            return Err(format!(
                "found `{text}` in `{name}`, expected a number or {}",
                known.join(", ")
            ));
        }
        let written = self.plain(text, column)?;
        let mut number = match value.given_as {
            GivenAs::Value => written,
            GivenAs::Log10 => 10f64.powf(written),
            GivenAs::Percent => 1.0 + written / 100.0,
        };
        number *= value.factor;
        for column in &value.times {
            number *= self.plain(self.text(*column), *column)?;
        }
        if !number.is_finite()
            || (number == 0.0
                && written != 0.0
                && value.given_as == GivenAs::Value
                && value.times.is_empty())
        {
            let name = self.name(column);
            return Err(format!(
                "found `{text}` in `{name}`, expected a number that a computer can hold"
            ));
        }
        let converted =
            value.factor != 1.0 || !value.times.is_empty() || value.given_as != GivenAs::Value;
        Ok(rounded(number, converted))
    }

    pub fn optional(&self, value: &Option<Value>, default: f64) -> Result<f64, String> {
        value
            .as_ref()
            .map_or(Ok(default), |value| self.value(value))
    }

    pub fn range(&self, plan: &RangePlan) -> Result<[f64; 2], String> {
        match plan {
            RangePlan::Two(low, high) => Ok([self.value(low)?, self.value(high)?]),
            RangePlan::One { column, separator } => {
                let text = self.text(*column);
                let parts = text.split_once(separator.as_str());
                let read = |text: &str| parse(text.trim(), self.comma);
                let both = parts.and_then(|(low, high)| Some([read(low)?, read(high)?]));
                both.ok_or_else(|| {
                    let name = self.name(*column);
                    format!("found `{text}` in `{name}`, expected two numbers with `{separator}` between")
                })
            }
        }
    }

    /// A word of the mapping for this row.
    pub fn pick<T: Clone>(&self, pick: &Pick<T>) -> Result<T, String> {
        match pick {
            Pick::Always(value) => Ok(value.clone()),
            Pick::Column {
                column,
                words,
                otherwise,
            } => {
                let text = self.text(*column);
                words.get(text).or(otherwise.as_ref()).cloned().ok_or_else(|| {
                    let known = list(words);
                    format!("found `{text}` in `{}`, expected {known} (or `otherwise` in the mapping)", self.name(*column))
                })
            }
        }
    }
}

fn list<T>(words: &BTreeMap<String, T>) -> String {
    if words.is_empty() {
        return "a word that the mapping knows".to_string();
    }
    let known: Vec<&str> = words.keys().map(String::as_str).collect();
    format!("one of {}", known.join(", "))
}

/// A converted number to 12 digits, which is more than tables hold: 0.923 rather than
/// 0.9230000000000002.
pub fn rounded(number: f64, converted: bool) -> f64 {
    if !converted {
        return number;
    }
    format!("{number:.11e}").parse().unwrap_or(number)
}

/// A finite number. Exponents may be marked with D, as Fortran does.
fn parse(text: &str, comma: bool) -> Option<f64> {
    let fits =
        |c: char| c.is_ascii_digit() || matches!(c, '.' | ',' | '+' | '-' | 'e' | 'E' | 'd' | 'D');
    if !text.chars().all(fits) || (comma && text.contains('.')) {
        return None;
    }
    let text = if comma {
        text.replace(',', ".")
    } else {
        text.to_string()
    };
    let number: f64 = text.replace(['d', 'D'], "e").parse().ok()?;
    let digits = text.split(['e', 'E', 'd', 'D']).next().unwrap_or("");
    let lost = number == 0.0 && digits.contains(|c: char| ('1'..='9').contains(&c));
    (number.is_finite() && !lost).then_some(number)
}

#[cfg(test)]
mod tests {
    use super::*;

    // A wrong conversion would shift every coefficient of a table.
    #[test]
    fn units_and_numbers() {
        let close = |a: f64, b: f64| (a / b - 1.0).abs() < 1e-6;
        // CODATA 2018: R = 8.314462618 J/mol/K, 1 eV = 11604.518 K, hc/k = 1.438776877 cm K.
        assert!(close(
            unit("kJ/mol", Quantity::Energy).unwrap(),
            1000.0 / 8.314462618
        ));
        assert!(close(
            unit("kcal/mol", Quantity::Energy).unwrap(),
            4184.0 / 8.314462618
        ));
        assert!(close(unit("eV", Quantity::Energy).unwrap(), 11604.518));
        assert!(close(unit("cm^-1", Quantity::Energy).unwrap(), 1.438776877));
        assert!(close(unit("m^3 s^-1", Quantity::TwoBody).unwrap(), 1e6));
        assert!(close(
            unit("cm^6 mol^-2 s^-1", Quantity::ThreeBody).unwrap(),
            2.757390e-48
        ));
        assert!(unit("K", Quantity::TwoBody).is_err() && unit("K", Quantity::Plain).is_err());
        assert_eq!(parse("1.5D-09", false), Some(1.5e-9));
        assert_eq!(parse("-1,5e3", true), Some(-1500.0));
        for bad in [
            "", "1,5", "inf", "nan", "1e999", "1e-999", "1 5", "0x1", "e5",
        ] {
            assert_eq!(parse(bad, false), None, "{bad}");
        }
        assert_eq!(parse("1.000,5", true), None);
    }
}
