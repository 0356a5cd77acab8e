//! Every way in which a network file can be wrong, one alteration each.

use super::altered;
use crate::network::read;
use std::path::Path;

/// (text replaced, replacement, entry, part of found, part of expected).
type Case = (
    &'static str,
    &'static str,
    &'static str,
    &'static str,
    &'static str,
);

const H3_CO: &str = "H3+ + CO -> HCO+ + H2";
const OH_H2: &str = "OH + H2 -> H2O + H";

#[rustfmt::skip]
const CASES: &[Case] = &[
    // Form.
    ("layout: 1", "layout: 2", "layout", "`2`", "1"),
    ("slope: -0.14,", "slpoe: -0.14,", "H3+ + CO -> HCO+ + H2 (gas[0].slpoe)", "unknown key", "`slope`"),
    ("slope: -0.14,", "slope: steep,", "H3+ + CO -> HCO+ + H2 (gas[0].slope)", "`steep`", "a number"),
    ("slope: -0.14,", "slope: .nan,", "gas[0].slope", ".nan", "finite"),
    ("below: hold", "below: freeze", "OH + H2 -> H2O + H (gas[2].below)", "`freeze`", "`hold`"),
    ("name: HCO, ", "name: HCO, name: HCO, ", "species[8].name", "second `name`", "once"),
    // Names and species.
    ("name: He,", "name: Xe,", "species Xe", "element `Xe`", "He"),
    ("name: He,", "name: H02,", "species H02", "count `02`", "leading zeros"),
    ("name: He,", "name: CO(ads),", "species CO(ads)", "`CO(ads)`", "gas species"),
    ("name: He,", "name: dust-,", "species dust-", "`dust-`", "generated"),
    ("name: HCO+,", "name: HCO,", "species HCO", "second time", "once"),
    (H3_CO, "H3+ + CO -> HCO+ + Hz", "H3+ + CO -> HCO+ + Hz", "element `Hz`", "elements"),
    (H3_CO, "H3+ + CO -> HOC+ + H2", "H3+ + CO -> HOC+ + H2", "`HOC+`", "`species` lists"),
    (H3_CO, "H3+ + CO > HCO+ + H2", "H3+ + CO > HCO+ + H2", "`H3+ + CO > HCO+ + H2`", "`->`"),
    (H3_CO, "H3+ + CO -> HCO+ +H2", "H3+ + CO -> HCO+ +H2", "`HCO+ +H2`", "space on both sides"),
    (H3_CO, "H3+ + CO(ads) -> HCO+ + H2", "H3+ + CO(ads) -> HCO+ + H2", "adsorbed species `CO(ads)`", "gas species in `gas`"),
    (H3_CO, "H3+ + dust- -> H2 + H + dust", "H3+ + dust- -> H2 + H + dust", "`dust-`", "generated"),
    // Balance.
    (H3_CO, "H3+ + CO -> HCO+ + H", "H3+ + CO -> HCO+ + H", "1 H too few on the right", "same atoms and charge"),
    (H3_CO, "H3+ + CO -> HCO + H2", "H3+ + CO -> HCO + H2", "charge 1 too low on the right", "same atoms and charge"),
    (H3_CO, "H3+ + C -> HCO + H2+", "H3+ + C -> HCO + H2+", "1 O too many on the right", "same atoms and charge"),
    ("change: CO -> C + O", "change: CO -> C + C", "CO -> C + C", "1 C too many, 1 O too few", "same atoms"),
    // Number of reactants.
    (OH_H2, "H2 + H2 + O -> H2O + H2", "H2 + H2 + O -> H2O + H2", "3 reactants", "2 in `gas`"),
    ("H + H + H -> H2 + H", "H + H -> H2", "H + H -> H2", "2 reactants", "3 in `three_body`"),
    ("change: HCO -> H + CO", "change: HCO + He -> H + CO + He", "HCO + He -> H + CO + He", "2 reactants", "M is not written"),
    ("change: CO -> C + O", "change: CO + H -> C + OH", "CO + H -> C + OH", "2 reactants", "1 in `light`"),
    // Duplicates: the order of species does not matter, light and cosmic rays are other causes.
    ("HCO+ + e- -> CO + H", "CO + H3+ -> H2 + HCO+", "CO + H3+ -> H2 + HCO+", "line 26", "`adds: true`"),
    ("H + CO -> HCO", "H2 + OH -> H + H2O", "H2 + OH -> H + H2O", "line 28", "`adds: true`"),
    ("change: CO -> C + O", "change: H2O -> H + OH", "H2O -> OH + H", "line 38", "one entry"),
    // Coefficients.
    ("at_300K: 1.36e-9, ", "", H3_CO, "no `at_300K`", "`pieces`"),
    ("at_300K: 1.36e-9, slope: -0.14, barrier: -3.4, valid: [10, 400], ", "", H3_CO, "no coefficients", "`pieces`"),
    ("pieces: [{at_300K: 1.0e-12, slope: 0.0", "at_300K: 1.0, pieces: [{at_300K: 1.0e-12, slope: 0.0", OH_H2, "and `pieces`", "either"),
    ("at_300K: 1.36e-9", "at_300K: -1.36e-9", H3_CO, "at_300K -1.36e-9", "not negative"),
    ("langevin: 1.0e-10", "langevin: -1.0e-10", "H2+ + H2O -> H3+ + OH", "langevin", "not negative"),
    ("low: {at_300K: 1.4e-34", "low: {at_300K: 0.0", "H + CO -> HCO", "at_300K 0", "above 0"),
    ("centre: 0.6", "centre: 1.6", "H + CO -> HCO", "centre 1.6", "at most 1"),
    ("within: 1.25", "within: 0.8", H3_CO, "within 8e-1", "at least 1"),
    ("rate: 2.4e-10", "rate: -2.4e-10", "CO -> C + O", "rate -2.4e-10", "not negative"),
    ("black_body_4000K: 1.0e-10", "black_body_4000K: -1.0e-10", "H2O -> OH + H", "black_body_4000K -1e-10", "not negative"),
    ("direct: 0.923", "direct: -0.923", "H2 -> H2+ + e-", "direct -9.23e-1", "not negative"),
    ("direct: 0.923", "direct: 0.923, secondary: 3.0", "H2 -> H2+ + e-", "`direct` and `secondary`", "exactly one"),
    ("direct: 0.923, ", "", "H2 -> H2+ + e-", "neither", "exactly one"),
    // Ranges.
    ("valid: [10, 400]", "valid: [400, 10]", H3_CO, "[400, 10]", "low < high"),
    ("[10, 400], below: extend", "[10, 400]", H3_CO, "starts at 10 K", "`hold`"),
    ("valid: [300, 2500], below: extend", "valid: [300, 2500]", "HCO -> H + CO", "starts at 300 K", "`below"),
    ("valid: [200, 2500]", "valid: [150, 2500]", OH_H2, "overlap from 150 to 200 K", "ascend"),
    ("valid: [200, 2500]", "valid: [210, 2500]", OH_H2, "gap between pieces from 200 to 210 K", "ascend"),
    ("valid: [200, 2500]", "valid: [10, 50]", OH_H2, "descend", "ascend"),
    // Keys that must exist.
    ("within: 1.25, standing: evaluated, source: s", "standing: evaluated, source: nobody", H3_CO, "`nobody`", "`sources` explains"),
    ("yield: 2.7e-3, source: s", "yield: 2.7e-3, source: x", "ice CO", "source `x`", "`sources` explains"),
    ("shield: CO", "shield: N2", "CO -> C + O", "shield `N2`", "`shielding`"),
    ("{black_body_4000K: 1.0e-10}", "{sun: 1.0e-10}", "H2O -> OH + H", "spectrum `sun`", "`spectra` explains"),
    ("{black_body_4000K: 1.0e-10}", "{draine: 1.0e-10}", "H2O -> OH + H", "spectrum `draine`", "`rate`"),
    ("spectra: {black_body_4000K: a cool star}", "spectra: {draine: mine, black_body_4000K: x}", "spectra", "`draine`", "built in"),
    // Shielding and compositions.
    ("column: H2, source", "column: N2, source", "shielding H2", "`N2`", "`species` lists"),
    ("log_column: [0, 15]", "log_column: [15, 0]", "shielding CO", "0 after 15", "ascending"),
    ("log_h2: [0, 20]", "log_h2: [0, 20, 21]", "shielding CO", "2 rows", "3"),
    ("[0.5, 0.01]", "[0.5, 0.01, 0.1]", "shielding CO", "3 factors in row 2", "2"),
    ("[0.5, 0.01]", "[0.5, 0.0]", "shielding CO", "factor 0", "above 0"),
    ("column: H2, source", "column: H2, log_h2: [0, 1], source", "shielding H2", "table", "law"),
    ("name: CO, law", "name: H2, law", "shielding H2", "second time", "once"),
    ("O: 1.0e-4", "N2: 1.0e-4", "composition atoms", "`N2`", "species of this network"),
    ("O: 1.0e-4", "O(ads): 1.0e-4", "composition atoms", "`O(ads)`", "`ices`"),
    ("O: 1.0e-4", "O: -1.0e-4", "composition atoms", "O -1e-4", "not negative"),
    // Ices and what happens on them.
    ("species: HCO, energy", "species: N2, energy", "ice N2", "`N2`", "listed in `species`"),
    ("species: HCO, energy", "species: HCO+, energy", "ice HCO+", "charge", "neutral"),
    ("species: HCO, energy", "species: CO, energy", "ice CO", "`CO(ads)` a second time", "once"),
    ("energy: 1390.0", "energy: 0.0", "ice CO", "energy 0", "above 0"),
    ("prefactor: 9.1e14", "prefactor: -9.1e14", "ice CO", "prefactor", "above 0"),
    ("yield: 2.7e-3", "yield: -2.7e-3", "ice CO", "yield", "not negative"),
    ("products: OH + H,", "products: OH + O,", "H2O(ads) -> OH + O", "1 H too few, 1 O too many", "atoms of the ice"),
    ("products: OH + H,", "products: H2O(ads),", "H2O(ads) -> H2O(ads)", "adsorbed", "gas products"),
    ("H(ads) + H(ads) -> H2", "H(ads) + H -> H2", "H(ads) + H -> H2", "gas species `H`", "adsorbed reactants"),
    ("H(ads) + H(ads) -> H2", "O(ads) + H(ads) -> OH", "O(ads) + H(ads) -> OH", "`O(ads)` without a line", "`ices` lists"),
    ("H(ads) + H(ads) -> H2", "H(ads) + H(ads) -> H2(ads)", "H(ads) + H(ads) -> H2(ads)", "`H2(ads)` without a line", "`ices` lists"),
    ("width: 1.5, ", "", "H(ads) + CO(ads) -> HCO(ads)", "without `width`", "`width`"),
    ("share: 0.8", "share: 1.8", "H(ads) + CO(ads) -> HCO(ads)", "share 1.8", "0 to 1"),
    ("barrier: 2500.0", "barrier: -2500.0", "H(ads) + CO(ads) -> HCO(ads)", "barrier -2.5e3", "not negative"),
    ("H(ads) + H(ads) -> H2, leaves: 0.5", "HCO(ads) + H(ads) -> CO + H2, share: 0.5", "H(ads) + HCO(ads) -> CO(ads) + H2", "sum to 1.1", "at most 1"),
    // Dust.
    ("ion_sticking: 0.9", "ion_sticking: 1.9", "charge of dust", "ion_sticking 1.9", "0 to 1"),
    ("becomes: H2 + H, share: 0.4", "becomes: H2 + H, share: 0.3", "H3+ on dust", "sum to 0.9", "1"),
    ("ion: HCO+, becomes: CO + H", "ion: HCO, becomes: CO + H", "HCO -> CO + H (on dust)", "charge 0", "+1"),
    ("becomes: CO + H,", "becomes: C + OH + H,", "HCO+ -> C + OH + H (on dust)", "1 H too many", "atoms of the ion"),
    ("becomes: CO + H,", "becomes: H + CO(ads),", "HCO+ -> H + CO(ads) (on dust)", "`CO(ads)`", "neutral gas"),
];

// A mistake that is not caught becomes a wrong result; one without its place costs an evening.
#[test]
fn every_mistake_is_reported_with_line_entry_found_and_expected() {
    let mut faults = Vec::new();
    for (from, to, entry, found, expected) in CASES {
        let (text, mut line) = altered(from, to);
        match (*to, *entry) {
            // The second of two clashing lines is the one reported.
            (_, "H2O -> OH + H") if to.starts_with("change") => line += 1,
            (_, "H(ads) + HCO(ads) -> CO(ads) + H2") => line += 1,
            (_, "H3+ on dust") => line += 1,
            _ => {}
        }
        let Err(errors) = read(Path::new("small.yaml"), &text) else {
            faults.push(format!("accepted: {to}"));
            continue;
        };
        let fits = errors.iter().any(|error| {
            error.file == Path::new("small.yaml")
                && error.line == Some(line)
                && error.entry == *entry
                && error.found.contains(found)
                && error.expected.contains(expected)
        });
        if !fits {
            let errors: Vec<String> = errors.iter().map(ToString::to_string).collect();
            faults.push(format!("line {line}: {to}\n    {}", errors.join("\n    ")));
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

// One alteration must not drag others along, or the list of errors misleads.
#[test]
fn a_single_mistake_gives_a_single_error() {
    for (from, to) in [
        ("at_300K: 1.36e-9", "at_300K: -1.36e-9"),
        (H3_CO, "H3+ + CO -> HCO+ + H"),
        ("valid: [200, 2500]", "valid: [150, 2500]"),
        ("products: OH + H,", "products: OH + O,"),
        ("share: 0.4", "share: 0.3"),
        ("O: 1.0e-4", "N2: 1.0e-4"),
    ] {
        let errors = read(Path::new("x"), &altered(from, to).0).unwrap_err();
        assert_eq!(errors.len(), 1, "{to}: {errors:?}");
    }
}

// All errors come at once, in the order of lines, but not endlessly.
#[test]
fn many_mistakes_are_reported_together_up_to_a_limit() {
    let text = super::SMALL
        .replace("at_300K: 1.36e-9", "at_300K: -1.36e-9")
        .replace("rate: 2.4e-10", "rate: -2.4e-10")
        .replace("energy: 1390.0", "energy: -1.0");
    let errors = read(Path::new("x"), &text).unwrap_err();
    let lines: Vec<usize> = errors.iter().filter_map(|error| error.line).collect();
    assert_eq!(lines, [26, 38, 45]);
    let text = super::SMALL.replace("source: s", "source: nobody");
    let errors = read(Path::new("x"), &text).unwrap_err();
    assert_eq!(errors.len(), 21);
    assert!(
        errors[20].found.contains("further errors"),
        "{}",
        errors[20]
    );
}

// `adds: true` is the way to say that two lines are meant.
#[test]
fn lines_that_add_up_are_accepted() {
    let (text, _) = altered(
        "HCO+ + e- -> CO + H, at_300K",
        "CO + H3+ -> HCO+ + H2, adds: true, at_300K",
    );
    assert!(read(Path::new("x"), &text).is_ok());
}
