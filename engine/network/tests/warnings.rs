//! Every doubt a network can raise, one alteration each.

use super::{altered, small};
use crate::network::{WarningKind, read};
use std::path::Path;

/// Warnings (line, kind, text) of the small network altered.
fn warnings(from: &str, to: &str) -> (Vec<(usize, WarningKind, String)>, usize) {
    let (text, line) = altered(from, to);
    let network = read(Path::new("x"), &text).unwrap();
    let of = |w: &crate::network::Warning| (w.line, w.kind, format!("{}: {}", w.entry, w.text));
    (network.warnings.iter().map(of).collect(), line)
}

// Doubts must be few, or nobody reads them: only what truly lacks a source or sink here.
#[test]
fn the_small_network_raises_the_expected_doubts() {
    use WarningKind::{NeverDestroyed, NeverFormed, NeverNeutralised};
    let found: Vec<(String, WarningKind)> = small()
        .warnings
        .iter()
        .map(|w| (w.entry.clone(), w.kind))
        .collect();
    let expected = [
        ("species He", NeverFormed),
        ("species He", NeverDestroyed),
        ("species C", NeverDestroyed),
        ("species O", NeverDestroyed),
        ("species H2+", NeverNeutralised),
    ];
    let expected: Vec<(String, WarningKind)> = expected
        .iter()
        .map(|(entry, kind)| (entry.to_string(), *kind))
        .collect();
    assert_eq!(found, expected);
}

// Each of these would pass as valid and give a wrong rate.
#[test]
fn doubtful_values_are_noticed() {
    use WarningKind::{AboveCollisionLimit, ChangesNothing, Endothermic, Jump};
    for (from, to, kind, text) in [
        // H3+ + CO at 10 K: 1.6e-9 becomes 3.6e-9, 1.3 times capture is 3.5e-9.
        (
            "at_300K: 1.36e-9",
            "at_300K: 1.6e-9",
            AboveCollisionLimit,
            "H3+ + CO",
        ),
        // Neutrals: 2e-9 without barrier.
        (
            "high: {at_300K: 2.0e-10, barrier: 1370.0}",
            "high: {at_300K: 2.0e-9}",
            AboveCollisionLimit,
            "H + CO",
        ),
        // CO + H -> C + OH: 716.87 + 37.5 + 110.53 - 218.
        (
            "HCO+ + e- -> CO + H",
            "CO + H -> C + OH",
            Endothermic,
            "646.9 kJ/mol",
        ),
        (
            "{at_300K: 1.0e-12, barrier: 200.0",
            "{at_300K: 1.2e-12, barrier: 200.0",
            Jump,
            "1.200 at 200 K",
        ),
        (
            "HCO+ + e- -> CO + H",
            "HCO+ + H2 -> H2 + HCO+",
            ChangesNothing,
            "both sides",
        ),
    ] {
        let (warnings, line) = warnings(from, to);
        let fits = |w: &&(usize, WarningKind, String)| w.1 == kind && w.2.contains(text);
        let found = warnings
            .iter()
            .find(fits)
            .unwrap_or_else(|| panic!("{to}: {warnings:?}"));
        assert_eq!(found.0, line, "{to}");
    }
}

// Limits must leave room for the uncertainty of what they are computed from.
#[test]
fn values_within_the_margins_pass() {
    use WarningKind::{AboveCollisionLimit, Endothermic, Jump};
    for (from, to, kind) in [
        // H3+ + CO at 10 K: 1.5e-9 becomes 3.4e-9.
        ("at_300K: 1.36e-9", "at_300K: 1.5e-9", AboveCollisionLimit),
        // O + H2 -> OH + H needs 6.3 kJ/mol, less than enthalpies must be trusted.
        ("HCO+ + e- -> CO + H", "O + H2 -> OH + H", Endothermic),
        (
            "{at_300K: 1.0e-12, barrier: 200.0",
            "{at_300K: 1.04e-12, barrier: 200.0",
            Jump,
        ),
        // Recombination has no such limit: 2.4e-7 stands in the file.
        ("2.4e-7", "9.4e-7", AboveCollisionLimit),
    ] {
        let (warnings, _) = warnings(from, to);
        assert!(warnings.iter().all(|w| w.1 != kind), "{to}: {warnings:?}");
    }
}
