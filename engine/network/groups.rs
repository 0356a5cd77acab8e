//! Owns the uniform view on the reaction lines of all groups of a network file.
//!
//! It never checks them: `check` does.

use super::layout::{GasLine, NetworkFile, Standing};
use super::model::Piece;

/// The groups of lines that carry a `change`, in the order of expansion.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Group {
    Gas,
    Capture,
    Falloff,
    ThreeBody,
    ThirdBody,
    Light,
    Cosmic,
    Surface,
}

impl Group {
    /// The key of the group in the file.
    pub fn key(self) -> &'static str {
        match self {
            Group::Gas => "gas",
            Group::Capture => "capture",
            Group::Falloff => "falloff",
            Group::ThreeBody => "three_body",
            Group::ThirdBody => "third_body",
            Group::Light => "light",
            Group::Cosmic => "cosmic",
            Group::Surface => "surface",
        }
    }

    /// How many reactants a line of this group writes.
    pub fn reactants(self) -> usize {
        match self {
            Group::Gas | Group::Capture | Group::Falloff | Group::Surface => 2,
            Group::ThreeBody => 3,
            Group::ThirdBody | Group::Light | Group::Cosmic => 1,
        }
    }
}

/// What every reaction line has.
#[derive(Debug, Clone, Copy)]
pub struct Head<'a> {
    pub group: Group,
    /// Place in its group, from 0.
    pub index: usize,
    pub change: &'a str,
    /// Whether the line may add to an earlier one with the same change.
    pub adds: bool,
    pub within: Option<f64>,
    pub standing: Standing,
    pub source: &'a str,
}

/// The heads of all reaction lines in the order of expansion.
pub fn heads(file: &NetworkFile) -> Vec<Head<'_>> {
    let mut heads = Vec::new();
    // The line types share these fields but no trait; the macro keeps the eight groups in one table.
    macro_rules! take {
        ($group:expr, $lines:expr, $line:ident => $adds:expr) => {
            for (index, $line) in $lines.iter().enumerate() {
                heads.push(Head {
                    group: $group,
                    index,
                    change: &$line.change,
                    adds: $adds,
                    within: $line.within,
                    standing: $line.standing,
                    source: &$line.source,
                });
            }
        };
    }
    take!(Group::Gas, file.gas, line => line.adds);
    take!(Group::Capture, file.capture, line => line.adds);
    take!(Group::Falloff, file.falloff, line => line.adds);
    take!(Group::ThreeBody, file.three_body, line => line.adds);
    take!(Group::ThirdBody, file.third_body, line => line.adds);
    take!(Group::Light, file.light, line => false);
    take!(Group::Cosmic, file.cosmic, line => false);
    take!(Group::Surface, file.surface, line => false);
    heads
}

/// The power-law lines with their group.
pub fn power_laws(file: &NetworkFile) -> impl Iterator<Item = (Group, usize, &GasLine)> {
    let groups = [
        (Group::Gas, &file.gas),
        (Group::ThreeBody, &file.three_body),
        (Group::ThirdBody, &file.third_body),
    ];
    groups.into_iter().flat_map(|(group, lines)| {
        lines
            .iter()
            .enumerate()
            .map(move |(index, line)| (group, index, line))
    })
}

/// Whether a line declares that its reverse runs too.
pub fn reversible(file: &NetworkFile, group: Group, index: usize) -> bool {
    let of = |lines: &[GasLine]| lines.get(index).is_some_and(|line| line.reversible);
    match group {
        Group::Gas => of(&file.gas),
        Group::ThreeBody => of(&file.three_body),
        Group::ThirdBody => of(&file.third_body),
        Group::Falloff => file.falloff.get(index).is_some_and(|line| line.reversible),
        Group::Capture | Group::Light | Group::Cosmic | Group::Surface => false,
    }
}

/// The temperature pieces of a power-law line; a line without `pieces` is one piece.
/// Empty where the line has neither form.
pub fn pieces(line: &GasLine) -> Vec<Piece> {
    if let (true, Some(at_300k), Some(valid)) = (line.pieces.is_empty(), line.at_300k, line.valid) {
        let (slope, barrier) = (line.slope.unwrap_or(0.0), line.barrier.unwrap_or(0.0));
        return vec![Piece {
            at_300k,
            slope,
            barrier,
            valid,
        }];
    }
    let piece = |p: &super::layout::PieceLine| Piece {
        at_300k: p.at_300k,
        slope: p.slope,
        barrier: p.barrier,
        valid: p.valid,
    };
    line.pieces.iter().map(piece).collect()
}
