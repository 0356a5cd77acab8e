//! Owns the errors of a mapping file while it is checked, with their lines.
//!
//! It never stops at the first.

use crate::errors::InputError;
use crate::yaml::Positions;
use std::path::Path;

/// Gathers errors of one mapping file; knows the columns of the table once it is read.
pub struct Checker<'a> {
    pub file: &'a Path,
    pub positions: &'a Positions,
    pub errors: Vec<InputError>,
    columns: &'a [String],
    /// Where the columns are named, in words.
    named: String,
}

impl<'a> Checker<'a> {
    pub fn new(file: &'a Path, positions: &'a Positions) -> Self {
        let (errors, columns, named) = (Vec::new(), &[][..], String::new());
        Checker {
            file,
            positions,
            errors,
            columns,
            named,
        }
    }

    /// From now on columns can be looked up; `named` says where they are named.
    pub fn know(&mut self, columns: &'a [String], named: String) {
        self.columns = columns;
        self.named = named;
    }

    /// Notes an error at a key path.
    pub fn error(&mut self, place: &str, found: impl Into<String>, expected: impl Into<String>) {
        let line = self.positions.nearest_line(place);
        self.errors
            .push(InputError::new(self.file, line, place, found, expected));
    }

    /// The place of a column by name. 0, with an error noted, where there is none.
    pub fn column(&mut self, name: &str, place: &str) -> usize {
        if let Some(at) = self
            .columns
            .iter()
            .position(|known| known == name && !name.is_empty())
        {
            return at;
        }
        let known: Vec<&str> = self
            .columns
            .iter()
            .map(String::as_str)
            .filter(|name| !name.is_empty())
            .collect();
        let expected = format!("a column of {}: {}", self.named, known.join(", "));
        self.error(place, format!("the column `{name}`"), expected);
        0
    }

    pub fn columns(&mut self, names: &[String], place: &str) -> Vec<usize> {
        let at = |(i, name): (usize, &String)| self.column(name, &format!("{place}[{i}]"));
        names.iter().enumerate().map(at).collect()
    }

    /// Notes an error unless the number is finite and above 0.
    pub fn positive(&mut self, value: f64, place: &str) {
        if !(value > 0.0 && value.is_finite()) {
            self.error(place, value.to_string(), "a finite number above 0");
        }
    }

    /// One error per mistake, by line; Ok where there is none.
    pub fn finish(mut self) -> Result<(), Vec<InputError>> {
        self.errors.sort_by_key(|error| error.line);
        if self.errors.is_empty() {
            Ok(())
        } else {
            Err(self.errors)
        }
    }
}
