//! The verb `network compare`: that it tells every difference, and nothing that is none.

mod support;

use frostclock::inquiry;
use frostclock::network::compare::compare;
use std::fs;
use support::{edit, folder_with, rows, succeeds};
use tempfile::TempDir;

fn folder() -> TempDir {
    folder_with(&["tests/data/audited.yaml"])
}

// A difference that is not told is a result nobody can explain.
#[test]
fn compare_tells_every_difference() {
    let folder = folder();
    let run = |one: &str, other: &str| {
        let arguments = ["network", "compare", one, other, "--csv", "differences.csv"];
        succeeds(folder.path(), &arguments).out
    };
    let same = run("audited.yaml", "audited.yaml");
    assert!(
        same.ends_with("0 differences: 0 only in A, 0 only in B, 0 different\n"),
        "{same}"
    );
    fs::copy(
        folder.path().join("audited.yaml"),
        folder.path().join("b.yaml"),
    )
    .expect("copied");
    let b = folder.path().join("b.yaml");
    let mut expected = Vec::new();
    for (from, to, said) in [
        // No differences: order of sides, form of numbers, keys at their defaults, comments.
        (
            "H+ + O -> O+ + H, at_300K: 3.75e-10",
            "O + H+ -> H + O+, at_300K: 0.375e-9, slope: 0",
            "",
        ),
        (
            "valid: [10, 300], below: extend, within: 1.2",
            "within: 1.2, below: extend, valid: [10.0, 300.0]",
            "",
        ),
        ("# Hydrogen", "# Something", ""),
        // Differences.
        (
            "O+ + e- -> O, at_300K: 3.2e-12, slope: -0.6",
            "O+ + e- -> O, at_300K: 3.2e-12, slope: -0.7",
            "O+ + e- -> O: slope -0.6 -> -0.7; B/A 1.405 at 10 K, 1.116 at 100 K, 1.000 at 300 K",
        ),
        ("  - {change: He+ + e-", "  #", "He+ + e- -> He"),
        (
            "light:",
            "light:\n  - {change: OH -> OH+ + e-, rate: 1.0e-12, extinction: 3.0, standing: estimated, source: made_up}",
            "OH -> OH+ + e-",
        ),
        (
            "energy: 1600.0",
            "energy: 1320.0",
            "O: energy 1600.0 -> 1320.0",
        ),
        ("dipole: 1.66", "dipole: 1.67", "OH: dipole 1.66 -> 1.67"),
        (
            "\"4000 K black body\"",
            "\"a cool star\"",
            "black_body_4000K: text 4000 K black body -> a cool star",
        ),
        ("OH+, becomes: O + H,", "OH+, becomes: H + O,", ""),
        ("\ndust:", "\ndust:\n  ion_sticking: 0.9", "ion_sticking"),
        (
            "at_100K: 3.0e-17",
            "at_100K: 4.0e-17",
            "hydrogen_formation: at_100K 3.0e-17 -> 4.0e-17",
        ),
        (
            "[{products: OH, yield: 1.0e-3",
            "[{products: OH, yield: 2.0e-3",
            "OH: photodesorption [{products: OH, source: made_up, yield: 0.001}] -> [{products: OH, source: made_up, yield: 0.002}]",
        ),
        (
            "network: audited",
            "network: other",
            "network: network audited -> other",
        ),
    ] {
        edit(&b, from, to);
        if !said.is_empty() {
            expected.push(said);
        }
    }
    let said = run("audited.yaml", "b.yaml");
    for text in &expected {
        assert!(
            said.contains(&format!(": {text}\n")),
            "no `{text}` in\n{said}"
        );
    }
    let count = "10 differences: 1 only in A, 2 only in B, 7 different";
    assert!(said.trim_end().ends_with(count), "{said}");
    assert!(
        said.contains("\n\nlight, only in B:\nb.yaml:36: OH -> OH+ + e-\n"),
        "{said}"
    );
    let table = rows(&folder.path().join("differences.csv"));
    assert_eq!(table.len(), 1 + 10);
    let slope = table.iter().find(|row| row[4] == "slope").expect("a row");
    assert_eq!(
        slope[..7],
        ["gas", "O+ + e- -> O", "26", "26", "slope", "-0.6", "-0.7"]
    );
    let ratio: f64 = slope[7].parse().expect("a number");
    assert!((ratio - 30f64.powf(0.1)).abs() < 1e-12, "{ratio}");
    // The other way round says the same of the other.
    let back = run("b.yaml", "audited.yaml");
    assert!(
        back.contains("10 differences: 2 only in A, 1 only in B, 7 different"),
        "{back}"
    );
    assert!(
        back.contains("O+ + e- -> O: slope -0.7 -> -0.6; B/A 0.712 at 10 K"),
        "{back}"
    );
}

// The same reaction in another group, or split over lines that add up, is still the same reaction.
#[test]
fn compare_follows_reactions_across_groups_and_lines() {
    let folder = folder();
    let read = |name: &str| {
        let path = folder.path().join(name);
        inquiry::open(path.to_str().expect("UTF-8")).expect("a network")
    };
    fs::copy(
        folder.path().join("audited.yaml"),
        folder.path().join("b.yaml"),
    )
    .expect("copied");
    edit(
        &folder.path().join("b.yaml"),
        "capture:\n  - {change: H+ + OH -> OH+ + H, langevin: 2.4e-9, x_300K: 4.16,",
        "  - {change: H+ + OH -> OH+ + H, at_300K: 2.4e-9,",
    );
    edit(
        &folder.path().join("b.yaml"),
        "falloff:",
        "  - {change: O + H -> OH, at_300K: 1.0e-10, valid: [5, 300], standing: estimated, source: made_up}\nfalloff:",
    );
    edit(
        &folder.path().join("b.yaml"),
        "centre: 0.6,",
        "centre: 0.6, adds: true,",
    );
    let (one, other) = (read("audited.yaml"), read("b.yaml"));
    let all = compare(&one, &other);
    let moved = all
        .iter()
        .find(|d| d.entry == "H+ + OH -> OH+ + H")
        .expect("told");
    assert_eq!(moved.keys[0].values, ["capture", "gas"]);
    // Su & Chesnavich at 300 K: x = 4.16 gives 0.4767 x + 0.62.
    let expected = 1.0 / (0.4767 * 4.16 + 0.62);
    assert!((moved.ratio.expect("a ratio")[2] - expected).abs() < 1e-12);
    let doubled: Vec<_> = all
        .iter()
        .filter(|d| {
            d.entry.contains("OH") && d.entry.starts_with(['O', 'H']) && d.entry != moved.entry
        })
        .collect();
    assert!(doubled.iter().any(|d| d.lines[0].is_none()), "{doubled:#?}");
    let ratio = doubled.iter().find_map(|d| d.ratio).expect("a ratio");
    assert!((ratio[1] - 2.0).abs() < 1e-12, "{ratio:?}");
}
