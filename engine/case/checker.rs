//! Owns the checking of single entries of a case file: quantities, counts, names. Collects every
//! error and every default taken, so that a user sees all of them at once.
//!
//! It never knows which entries there are.

use crate::errors::InputError;
use crate::units::{Dimension, Quantity, number_text};
use crate::yaml::Positions;
use std::path::Path;

/// A checked quantity: its value in working units, and its text as the resolved case keeps it.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Given {
    pub(super) value: f64,
    pub(super) text: String,
}

/// Which values an entry may have.
#[derive(Clone, Copy)]
pub(super) struct Bounds {
    pub(super) allows: fn(f64) -> bool,
    pub(super) words: &'static str,
}

pub(super) const POSITIVE: Bounds = Bounds {
    allows: |x| x > 0.0,
    words: "above 0",
};
pub(super) const NOT_NEGATIVE: Bounds = Bounds {
    allows: |x| x >= 0.0,
    words: "0 or more",
};
pub(super) const SHARE: Bounds = Bounds {
    allows: |x| (0.0..=1.0).contains(&x),
    words: "from 0 to 1",
};
pub(super) const RATIO: Bounds = Bounds {
    allows: |x| x > 0.0 && x <= 1.0,
    words: "above 0, at most 1",
};

/// The case file under check.
pub(super) struct Checker<'a> {
    pub(super) file: &'a Path,
    positions: &'a Positions,
    pub(super) errors: Vec<InputError>,
    /// Key and text of every default taken.
    defaults: Vec<(String, String)>,
}

impl<'a> Checker<'a> {
    pub(super) fn new(file: &'a Path, positions: &'a Positions) -> Self {
        Checker {
            file,
            positions,
            errors: Vec::new(),
            defaults: Vec::new(),
        }
    }

    /// The line of the entry `key`, or of what encloses it.
    pub(super) fn line(&self, key: &str) -> Option<usize> {
        self.positions.nearest_line(key)
    }

    pub(super) fn error(
        &mut self,
        key: &str,
        found: impl Into<String>,
        expected: impl Into<String>,
    ) {
        let error = InputError::new(self.file, self.line(key), key, found, expected);
        self.errors.push(error);
    }

    /// States that `key` was left out and taken as `text`.
    pub(super) fn default_taken(&mut self, key: &str, text: impl Into<String>) {
        self.defaults.push((key.to_string(), text.into()));
    }

    /// A quantity that must be there. After an error the value is NaN and never used.
    pub(super) fn required(
        &mut self,
        key: &str,
        given: &Quantity,
        dimension: Dimension,
        bounds: Bounds,
    ) -> Given {
        match given.value(dimension) {
            Ok(value) if (bounds.allows)(value) => {
                let text = match dimension {
                    Dimension::Number => number_text(value),
                    _ => given.text.clone(),
                };
                return Given { value, text };
            }
            Ok(_) => {
                let expected = format!("{} {}", dimension.words(), bounds.words);
                self.error(key, format!("`{}`", given.text), expected);
            }
            Err(misread) => {
                let error = misread.at(self.file, self.line(key), key);
                self.errors.push(error);
            }
        }
        Given {
            value: f64::NAN,
            text: given.text.clone(),
        }
    }

    /// A quantity that may be left out.
    pub(super) fn quantity(
        &mut self,
        key: &str,
        given: Option<&Quantity>,
        default: &str,
        dimension: Dimension,
        bounds: Bounds,
    ) -> Given {
        if given.is_none() {
            self.default_taken(key, default);
        }
        let default = Quantity {
            text: default.to_string(),
        };
        self.required(key, given.unwrap_or(&default), dimension, bounds)
    }

    /// A plain number that may be left out.
    pub(super) fn number(
        &mut self,
        key: &str,
        given: Option<&Quantity>,
        default: f64,
        bounds: Bounds,
    ) -> Given {
        self.quantity(key, given, &number_text(default), Dimension::Number, bounds)
    }

    /// A whole number from `low` to `high`. After an error it is `low`.
    pub(super) fn count(&mut self, key: &str, given: &Quantity, low: u32, high: u32) -> u32 {
        match given.text.parse::<u32>() {
            Ok(count) if (low..=high).contains(&count) => count,
            _ => {
                let expected = format!("a whole number from {low} to {high}");
                self.error(key, format!("`{}`", given.text), expected);
                low
            }
        }
    }

    /// Whether `name` may stand in column names; an error else.
    pub(super) fn name(&mut self, key: &str, name: &str) {
        let fits = !name.is_empty() && name.chars().all(|c| c.is_ascii_alphanumeric() || c == '_');
        if !fits {
            self.error(
                key,
                format!("`{name}`"),
                "a name of letters, digits and `_`",
            );
        }
    }

    /// The defaults taken, one sentence per block of the file.
    pub(super) fn notes(&self) -> Vec<String> {
        let mut blocks: Vec<(&str, Vec<String>)> = Vec::new();
        for (key, text) in &self.defaults {
            let (block, rest) = key.split_once('.').unwrap_or((key, ""));
            let item = if rest.is_empty() {
                text.clone()
            } else {
                format!("{rest} {text}")
            };
            match blocks.iter_mut().find(|(known, _)| *known == block) {
                Some((_, items)) => items.push(item),
                None => blocks.push((block, vec![item])),
            }
        }
        let sentence = |(block, items): (&str, Vec<String>)| {
            format!("{block}: taken by default: {}", items.join(", "))
        };
        blocks.into_iter().map(sentence).collect()
    }
}

/// `text` as a YAML scalar in double quotes.
pub(super) fn quoted(text: &str) -> String {
    let mut out = String::from("\"");
    for c in text.chars() {
        match c {
            '"' => out.push_str("\\\""),
            '\\' => out.push_str("\\\\"),
            '\n' => out.push_str("\\n"),
            '\t' => out.push_str("\\t"),
            // Control characters and the line separators YAML treats as breaks.
            c if c.is_control() || matches!(c, '\u{2028}' | '\u{2029}' | '\u{feff}') => {
                out.push_str(&format!("\\u{:04X}", c as u32));
            }
            c => out.push(c),
        }
    }
    out.push('"');
    out
}
