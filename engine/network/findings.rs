//! Owns the list of errors and warnings that reading a network gathers, with their lines.
//!
//! It never decides what is wrong.

use crate::errors::InputError;
use crate::yaml::Positions;
use std::path::Path;

/// Most errors reported at once; more help nobody.
const MOST_ERRORS: usize = 20;

/// What a warning is about.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum WarningKind {
    /// Nothing forms the species.
    NeverFormed,
    /// Nothing destroys the species.
    NeverDestroyed,
    /// A coefficient is above what collisions allow.
    AboveCollisionLimit,
    /// No barrier, although the enthalpies say endothermic.
    Endothermic,
    /// Pieces of a coefficient do not meet.
    Jump,
    /// An ion that no line lets grains neutralise.
    NeverNeutralised,
    /// A reaction with the same species on both sides.
    ChangesNothing,
}

/// Something that is allowed but probably not meant.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Warning {
    /// 1-based line of the network file.
    pub line: usize,
    /// The change or species.
    pub entry: String,
    pub text: String,
    pub kind: WarningKind,
}

/// The errors found so far in one file.
pub(super) struct Findings<'a> {
    file: &'a Path,
    pub positions: &'a Positions,
    errors: Vec<InputError>,
}

impl<'a> Findings<'a> {
    pub fn new(file: &'a Path, positions: &'a Positions) -> Self {
        Findings {
            file,
            positions,
            errors: Vec::new(),
        }
    }

    /// Notes an error at a key path such as `gas[3].slope`.
    pub fn add(
        &mut self,
        place: &str,
        entry: impl Into<String>,
        found: impl Into<String>,
        expected: impl Into<String>,
    ) {
        let line = self.positions.nearest_line(place);
        self.errors
            .push(InputError::new(self.file, line, entry, found, expected));
    }

    pub fn none(&self) -> bool {
        self.errors.is_empty()
    }

    /// The errors by line, the first [`MOST_ERRORS`] of them and a word about the others.
    pub fn finish(mut self) -> Vec<InputError> {
        self.errors.sort_by_key(|error| error.line);
        let further = self.errors.len().saturating_sub(MOST_ERRORS);
        self.errors.truncate(MOST_ERRORS);
        if further > 0 {
            let found = format!("{further} further errors");
            let expected = "the errors above corrected first";
            self.errors.push(InputError::new(
                self.file,
                None,
                "whole file",
                found,
                expected,
            ));
        }
        self.errors
    }
}

impl std::fmt::Display for Warning {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "line {}: {}: {}", self.line, self.entry, self.text)
    }
}
