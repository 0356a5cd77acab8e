//! What the standard network must hold, and planted defects that the audits must find. A test that
//! fails here means a flaw in `networks/standard.yaml`, or an audit that went blind.

use frostclock::inquiry::audit::{Audit, audit};
use frostclock::network::audit::Finding;
use frostclock::network::{Severity, WarningKind as Kind};
use std::fs;
use std::sync::OnceLock;

// ---- the standard network ----

/// Insists that the standard network has no finding of these kinds.
fn standard_is_free_of(kinds: &[Kind], wrong: &str) {
    static AUDIT: OnceLock<Audit> = OnceLock::new();
    let audit = AUDIT.get_or_init(|| audit("standard").expect("it can be read"));
    assert!(audit.network.is_some(), "{:?}", audit.findings);
    let found: Vec<String> = (audit.findings.iter())
        .filter(|f| f.kind.is_some_and(|kind| kinds.contains(&kind)))
        .map(Finding::to_string)
        .collect();
    assert!(found.is_empty(), "{wrong}:\n{}", found.join("\n"));
}

#[test]
fn every_heavy_neutral_is_formed_and_destroyed_in_the_gas_and_has_an_ice() {
    standard_is_free_of(
        &[
            Kind::NeverFormed,
            Kind::NeverDestroyed,
            Kind::NeverFormedInGas,
            Kind::NeverDestroyedInGas,
            Kind::NeverUsed,
        ],
        "neutrals would only ever be what the start gives, or pile up",
    );
    standard_is_free_of(&[Kind::NoIce], "these would never freeze out");
}

#[test]
fn every_ion_is_destroyed_by_electrons_or_grains() {
    standard_is_free_of(
        &[Kind::NeverRecombines, Kind::NeverNeutralised],
        "these would hold the charge of dense gas",
    );
}

#[test]
fn no_barrierless_reaction_needs_heat() {
    standard_is_free_of(
        &[Kind::Endothermic],
        "cold gas would do what only hot gas can",
    );
    // The audit must have had all enthalpies, or it was silent about what it did not see.
    standard_is_free_of(
        &[Kind::NotAudited],
        "these reactions were not audited at all",
    );
}

#[test]
fn no_coefficient_is_above_its_collision_limit() {
    standard_is_free_of(
        &[Kind::AboveCollisionLimit],
        "these react more often than they can meet",
    );
}

#[test]
fn every_coefficient_is_a_sensible_number_from_5_to_4000_k() {
    standard_is_free_of(
        &[Kind::NoNumber, Kind::Runaway],
        "the coldest or hottest cells would get nonsense",
    );
}

#[test]
fn pieces_meet_where_they_abut() {
    standard_is_free_of(
        &[Kind::Jump],
        "abundances would jump from cell to cell at that temperature",
    );
}

// ---- planted defects ----

const AUDITED: &str = include_str!("data/audited.yaml");

/// The findings of the flawless network with some texts replaced.
fn findings(edits: &[(&str, &str)]) -> Vec<Finding> {
    let mut text = AUDITED.to_string();
    for (from, to) in edits {
        assert_eq!(text.matches(from).count(), 1, "`{from}` marks one place");
        text = text.replacen(from, to, 1);
    }
    audited(&text)
}

/// The findings of a network of this text.
fn audited(text: &str) -> Vec<Finding> {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("planted.yaml");
    fs::write(&path, text).expect("written");
    let path = path.to_str().expect("UTF-8");
    audit(path).expect("it can be read").findings
}

/// The line of the flawless network that contains `text`.
fn line_of(text: &str) -> usize {
    let place = AUDITED.find(text).expect("it is there");
    AUDITED[..place].matches('\n').count() + 1
}

// Without this every audit might find its defect anywhere.
#[test]
fn the_flawless_network_raises_nothing() {
    assert_eq!(findings(&[]), []);
}

/// What must be found: its kind, words of it, its line; and the edits that plant it.
type Planted<'a> = (Kind, &'a str, usize, &'a [(&'a str, &'a str)]);

// Each of these would go into a paper unnoticed.
#[test]
fn planted_defects_are_found() {
    const OH: &str = "  - {name: OH, enthalpy";
    const O_H2: &str = "  - {change: O + H2 -> OH + H,";
    const H_O: &str = "  - {change: H + O -> OH,";
    const H_OH: &str = "  - {change: H + OH -> O + H2,";
    const O_ION: &str = "  - {name: O+,";
    let cases: &[Planted] = &[
        (
            Kind::NeverUsed,
            "no reaction contains it",
            line_of(OH),
            &[(
                OH,
                "  - {name: C, enthalpy: 716.9, source: made_up}\n  - {name: OH, enthalpy",
            )],
        ),
        (
            Kind::NeverFormedInGas,
            "no reaction of the gas forms it",
            line_of(OH),
            &[
                (O_H2, "  #"),
                (H_O, "  #"),
                ("\nfalloff:", "\nfalloff: []\n#"),
            ],
        ),
        (
            Kind::NeverDestroyedInGas,
            "no reaction of the gas destroys it",
            line_of(OH),
            &[
                (H_OH, "  #"),
                ("  - {change: H+ + OH", "  #"),
                ("\ncapture:", "\ncapture: []\n#"),
                ("  - {change: OH -> O + H, rate", "  #"),
                ("  - {change: OH -> O + H, secondary", "  #"),
            ],
        ),
        (
            Kind::NeverRecombines,
            "neither electrons nor grains destroy it",
            line_of(O_ION),
            &[
                ("  - {change: O+ + e-", "  #"),
                ("    - {ion: O+,", "    #"),
            ],
        ),
        (
            Kind::NeverNeutralised,
            "says what grains make of it",
            line_of(O_ION),
            &[("    - {ion: O+,", "    #")],
        ),
        (
            Kind::Endothermic,
            "endothermic by 429.9 kJ/mol",
            line_of(O_H2),
            &[(
                O_H2,
                "  - {change: OH + H -> O + H + H, at_300K: 1.0e-12, valid: [5, 300], standing: estimated, source: made_up}\n  - {change: O + H2 -> OH + H,",
            )],
        ),
        (
            Kind::LowBarrier,
            "endothermic by 429.9 kJ/mol, with an activation energy of 83.1",
            line_of(O_H2),
            &[(
                O_H2,
                "  - {change: OH + H -> O + H + H, at_300K: 1.0e-10, barrier: 10000.0, valid: [5, 300], standing: estimated, source: made_up}\n  - {change: O + H2 -> OH + H,",
            )],
        ),
        (
            Kind::AboveCollisionLimit,
            "2.20e-9 cm^3 s^-1",
            line_of("  - {change: O+ + H2"),
            &[("at_300K: 1.6e-9", "at_300K: 2.2e-9")],
        ),
        (
            // Above the limit at 50 K only, where two pieces meet.
            Kind::AboveCollisionLimit,
            "1.10e-9 cm^3 s^-1 at 50 K",
            line_of(H_OH),
            &[(
                "at_300K: 7.0e-14, slope: 2.8, barrier: 1950.0, valid: [300, 2500]",
                "pieces: [{at_300K: 5.13216e-5, slope: 6.0, valid: [10, 50]}, {at_300K: 2.3577e-14, slope: -6.0, valid: [50, 2500]}]",
            )],
        ),
        (
            Kind::Jump,
            "jumps by a factor 1.100 at 500 K",
            line_of(O_H2),
            &[(
                "{at_300K: 3.0e-13, slope: 2.7, barrier: 3150.0, valid: [500",
                "{at_300K: 3.3e-13, slope: 2.7, barrier: 3150.0, valid: [500",
            )],
        ),
        (
            Kind::NoNumber,
            "inf at 5 K",
            line_of("  - {change: O+ + e-"),
            &[("slope: -0.6, valid", "slope: -0.6, barrier: -9000.0, valid")],
        ),
        (
            Kind::Runaway,
            "cm^3 s^-1 at 5 K",
            line_of("  - {change: O+ + e-"),
            &[("slope: -0.6, valid", "slope: -0.6, barrier: -100.0, valid")],
        ),
        (
            Kind::ChangesNothing,
            "both sides",
            line_of(H_OH),
            &[(H_OH, "  - {change: H + OH -> OH + H,")],
        ),
        (
            Kind::Unused,
            "no line has it as its `source`",
            line_of("spectra:"),
            &[("\nspectra:", "\n  nobody: \"Nobody 1900\"\nspectra:")],
        ),
        (
            Kind::Unused,
            "no line of `light` has it as its `shield`",
            line_of("  - {name: H2, law"),
            &[("shield: H2, ", "")],
        ),
        (
            Kind::Unused,
            "no line of `light` has a rate in it",
            line_of("  black_body_4000K:"),
            &[("spectra: {black_body_4000K: 1.6e-16}, ", "")],
        ),
        (
            Kind::NotAudited,
            "no `enthalpy` of O+:",
            line_of(O_ION),
            &[("enthalpy: 1563.1, ", "")],
        ),
        (
            Kind::NotAudited,
            "no `polarisability` of OH:",
            line_of(OH),
            &[("polarisability: 1.0, ", "")],
        ),
    ];
    for (kind, what, line, edits) in cases {
        let found = findings(edits);
        let fits = |f: &&Finding| f.kind == Some(*kind) && f.what.contains(what);
        let finding = (found.iter().find(fits)).unwrap_or_else(|| panic!("{edits:?}: {found:#?}"));
        assert_eq!(finding.line, Some(*line), "{finding}");
        assert_eq!(finding.severity, kind.severity(), "{finding}");
        assert!(!finding.why.is_empty());
    }
}

// Helium alone may stay without an ice: what else does would be gas at 5 K.
#[test]
fn a_neutral_without_an_ice_is_found() {
    let argon = AUDITED.replace("He", "Ar");
    let found = audited(&argon);
    let [only] = &found[..] else {
        panic!("{found:#?}")
    };
    assert_eq!(only.kind, Some(Kind::NoIce));
    assert_eq!(only.line, Some(line_of("  - {name: He, ")));
}

// Anions end otherwise than cations: a network with them would be full of false doubts, or of none.
#[test]
fn anions_end_by_cations_or_detachment() {
    let with = |change: &str| {
        let line = format!(
            "gas:\n  - {{change: {change}, at_300K: 1.0e-12, valid: [5, 4000], standing: estimated, source: made_up}}\n  - {{change: O + e- -> O-, at_300K: 1.0e-15, valid: [5, 4000], standing: estimated, source: made_up}}"
        );
        let species = "  - {name: O-, enthalpy: 108.0, source: made_up}\nshielding:";
        let found = findings(&[("gas:", &line), ("shielding:", species)]);
        found.iter().map(|f| f.kind).collect::<Vec<_>>()
    };
    assert_eq!(with("O- + O+ -> O + O"), []);
    assert_eq!(with("O- + H -> OH + e-"), []);
    // Given and taken by hydrogen only.
    assert!(with("OH + H -> OH + H").contains(&Some(Kind::NeverRecombines)));
}

// A count that stops at twenty would let a person think the work nearly done.
#[test]
fn check_counts_all_errors() {
    let wrong = AUDITED.replace("source: made_up", "source: nobody");
    let errors = AUDITED.matches("source: made_up").count();
    let found = audited(&wrong);
    assert!(errors > 30 && found.iter().all(|f| f.severity == Severity::Error));
    assert_eq!(found.len(), errors, "{found:#?}");
    assert!(found.windows(2).all(|pair| pair[0].line <= pair[1].line));
}

// A stated reason must silence this one doubt and no other.
#[test]
fn a_reason_lets_an_endothermic_reaction_pass() {
    let line = |reason: &str| {
        format!(
            "  - {{change: OH + H -> O + H + H, at_300K: 2.0e-9, valid: [5, 300], {reason}standing: estimated, source: made_up}}\n  - {{change: O + H2 -> OH + H,"
        )
    };
    let kinds = |reason: &str| -> Vec<Option<Kind>> {
        let planted = line(reason);
        let found = findings(&[("  - {change: O + H2 -> OH + H,", &planted)]);
        found.iter().map(|f| f.kind).collect()
    };
    let (heat, limit) = (Some(Kind::Endothermic), Some(Kind::AboveCollisionLimit));
    assert!(kinds("").contains(&heat) && kinds("").contains(&limit));
    assert_eq!(kinds("endothermic: \"excited H\", "), [limit]);
    assert!(kinds("endothermic: \" \", ").contains(&heat));
}
