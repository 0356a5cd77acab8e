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
    /// No gas-phase reaction forms a neutral.
    NeverFormedInGas,
    /// No gas-phase reaction destroys a neutral.
    NeverDestroyedInGas,
    /// A neutral that cannot freeze out.
    NoIce,
    /// An ion that neither its counterpart charge nor a grain destroys.
    NeverRecombines,
    /// A species in no reaction at all.
    NeverUsed,
    /// A source, spectrum or shielding line that nothing refers to.
    Unused,
    /// Reactions or pairs that lack what an audit needs.
    NotAudited,
    /// A barrier that is lower than the heat the reaction takes up.
    LowBarrier,
    /// A coefficient that is not finite, or negative.
    NoNumber,
    /// A coefficient far beyond anything that happens in a gas.
    Runaway,
}

/// How bad a finding is.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Severity {
    /// The network cannot be used.
    Error,
    /// Usable, and probably wrong.
    Warning,
    /// Worth knowing.
    Remark,
}

impl Severity {
    /// In words, one of them.
    pub fn word(self) -> &'static str {
        match self {
            Severity::Error => "error",
            Severity::Warning => "warning",
            Severity::Remark => "remark",
        }
    }
}

impl WarningKind {
    pub fn severity(self) -> Severity {
        match self {
            WarningKind::NoNumber => Severity::Error,
            WarningKind::NeverFormedInGas
            | WarningKind::NoIce
            | WarningKind::Unused
            | WarningKind::LowBarrier
            | WarningKind::NotAudited => Severity::Remark,
            _ => Severity::Warning,
        }
    }

    /// Why it matters to whoever uses the network.
    pub fn why(self) -> &'static str {
        match self {
            WarningKind::NeverFormed => "it can only be what the start gives",
            WarningKind::NeverDestroyed => "whatever becomes it stays it for ever",
            WarningKind::AboveCollisionLimit => "they react more often than they can meet",
            WarningKind::Endothermic => {
                "cold gas would get the heat for nothing; give a barrier, or the reason as `endothermic:`"
            }
            WarningKind::Jump => {
                "neighbouring cells on the two sides of that temperature differ for no reason"
            }
            WarningKind::NeverNeutralised => "in dense gas grains are what ends ions",
            WarningKind::ChangesNothing => "it costs time and does nothing",
            WarningKind::NeverFormedInGas => "where ices do not take part it is never made",
            WarningKind::NeverDestroyedInGas => "in the gas it piles up until it freezes out",
            WarningKind::NoIce => "it stays in the gas at any temperature",
            WarningKind::NeverRecombines => "it holds on to its charge and shifts the ionisation",
            WarningKind::NeverUsed => "it is carried along for nothing, or a reaction is missing",
            WarningKind::Unused => "a reference is misspelt, or this is a leftover",
            WarningKind::NotAudited => "an impossible number there would not be noticed",
            WarningKind::LowBarrier => {
                "its reverse would speed up without bound on cooling; barrier or enthalpies are off"
            }
            WarningKind::NoNumber => "every abundance would become nonsense",
            WarningKind::Runaway => {
                "the formula is used too far outside its range; limit it with `below: hold`"
            }
        }
    }
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

    /// All errors by line.
    pub fn finish(mut self) -> Vec<InputError> {
        self.errors.sort_by_key(|error| error.line);
        self.errors
    }
}

/// The first [`MOST_ERRORS`] of the errors in `file`, and a word about the others.
pub(super) fn shortened(file: &Path, mut errors: Vec<InputError>) -> Vec<InputError> {
    let further = errors.len().saturating_sub(MOST_ERRORS);
    errors.truncate(MOST_ERRORS);
    if further > 0 {
        let found = format!("{further} further errors");
        let expected = "the errors above corrected first";
        errors.push(InputError::new(file, None, "whole file", found, expected));
    }
    errors
}

impl std::fmt::Display for Warning {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "line {}: {}: {}", self.line, self.entry, self.text)
    }
}
