//! Owns the rules for ices, reactions on them, and dust.
//!
//! It never looks up species: that is done when this runs.

use super::numbers::{Must, factor, number};
use crate::network::findings::Findings;
use crate::network::groups::Group;
use crate::network::layout::{IceLine, NetworkFile, SurfaceLine};
use crate::network::read::Entry;
use crate::network::roster::Roster;
use std::collections::BTreeMap;

/// How far shares may be off their sum.
const SHARES: f64 = 1e-6;

pub(super) fn all(file: &NetworkFile, roster: &Roster, entries: &[Entry], findings: &mut Findings) {
    for (i, line) in file.ices.iter().enumerate() {
        ice(line, &format!("ices[{i}]"), findings);
    }
    for (i, line) in file.surface.iter().enumerate() {
        surface(line, &format!("surface[{i}]"), findings);
    }
    pair_shares(file, entries, findings);
    dust(file, roster, findings);
    ion_shares(file, findings);
}

fn ice(line: &IceLine, place: &str, findings: &mut Findings) {
    let entry = format!("ice {}", line.species);
    let mut positive = |value, field| {
        number(value, Must::BePositive, field, place, &entry, findings);
    };
    positive(line.energy, "energy");
    positive(line.prefactor, "prefactor");
    if let Some(value) = line.hop_energy {
        positive(value, "hop_energy");
    }
    if let Some(value) = line.hop_barrier {
        number(
            value,
            Must::NotBeNegative,
            "hop_barrier",
            place,
            &entry,
            findings,
        );
    }
    if let Some(pure) = &line.pure {
        let place = format!("{place}.pure");
        number(
            pure.energy,
            Must::BePositive,
            "energy",
            &place,
            &entry,
            findings,
        );
        number(
            pure.prefactor,
            Must::BePositive,
            "prefactor",
            &place,
            &entry,
            findings,
        );
    }
    for (j, channel) in line.photodesorption.iter().enumerate() {
        let place = format!("{place}.photodesorption[{j}]");
        number(
            channel.yields,
            Must::NotBeNegative,
            "yield",
            &place,
            &entry,
            findings,
        );
    }
    if let Some(within) = line.within {
        factor(within, place, &entry, findings);
    }
}

fn surface(line: &SurfaceLine, place: &str, findings: &mut Findings) {
    let change = &line.change;
    number(
        line.barrier,
        Must::NotBeNegative,
        "barrier",
        place,
        change,
        findings,
    );
    let fields = [
        (line.width, Must::BePositive, "width"),
        (line.share, Must::BeShare, "share"),
        (line.leaves, Must::BeShare, "leaves"),
        (line.tunnelling_mass, Must::BePositive, "tunnelling_mass"),
    ];
    for (value, must, field) in fields {
        if let Some(value) = value {
            number(value, must, field, place, change, findings);
        }
    }
    if line.barrier > 0.0 && line.width.is_none() {
        let expected = "the `width` (in A) of the barrier beside its height";
        findings.add(place, change, "a barrier without `width`", expected);
    }
}

/// The channels of one pair that share a barrier cannot take more than every attempt. (Channels of
/// different barriers compete by how often they cross them.)
fn pair_shares(file: &NetworkFile, entries: &[Entry], findings: &mut Findings) {
    // By reactants and height of the barrier: sum of the shares, and the lines that make it.
    type Channels<'a> = (f64, Vec<&'a Entry>);
    let mut pairs: BTreeMap<(Vec<usize>, u64), Channels> = BTreeMap::new();
    for entry in entries.iter().filter(|entry| entry.group == Group::Surface) {
        let line = &file.surface[entry.index];
        let key = (entry.reactant_set(), line.barrier.to_bits());
        let (sum, channels) = pairs.entry(key).or_default();
        *sum += line.share.unwrap_or(1.0);
        channels.push(entry);
    }
    for (sum, channels) in pairs.values().filter(|(sum, _)| *sum > 1.0 + SHARES) {
        let Some(last) = channels.last() else {
            continue;
        };
        let lines: Vec<String> = channels
            .iter()
            .map(|entry| entry.line.to_string())
            .collect();
        let found = format!(
            "shares of this pair and barrier that sum to {} (lines {})",
            rounded(*sum),
            lines.join(", ")
        );
        let expected = "at most 1 (a share left out is 1)";
        findings.add(&last.place("share"), &last.change, found, expected);
    }
}

fn dust(file: &NetworkFile, roster: &Roster, findings: &mut Findings) {
    let Some(dust) = &file.dust else { return };
    if let Some(line) = &dust.hydrogen_formation {
        let (place, entry) = ("dust.hydrogen_formation", "H2 formation on dust");
        number(
            line.at_100k,
            Must::NotBeNegative,
            "at_100K",
            place,
            entry,
            findings,
        );
        number(line.slope, Must::BeFinite, "slope", place, entry, findings);
        for name in ["H", "H2"]
            .iter()
            .filter(|name| roster.find(name).is_none())
        {
            findings.add(
                place,
                entry,
                format!("no `{name}` in `species`"),
                "H and H2",
            );
        }
    }
    if roster.find("e-").is_none() {
        findings.add(
            "dust",
            "charge of dust",
            "no `e-` in `species`",
            "electrons, which charge dust",
        );
    }
    for (value, field) in [
        (dust.electron_sticking, "electron_sticking"),
        (dust.ion_sticking, "ion_sticking"),
    ] {
        if let Some(value) = value {
            number(
                value,
                Must::BeShare,
                field,
                "dust",
                "charge of dust",
                findings,
            );
        }
    }
    for (i, line) in dust.neutralisation.iter().enumerate() {
        let entry = format!("{} -> {} (on dust)", line.ion, line.becomes);
        let place = format!("dust.neutralisation[{i}]");
        number(line.share, Must::BeShare, "share", &place, &entry, findings);
    }
}

/// What becomes of one ion on grains adds up to 1.
fn ion_shares(file: &NetworkFile, findings: &mut Findings) {
    let Some(dust) = &file.dust else { return };
    let mut ions: BTreeMap<&str, (f64, usize)> = BTreeMap::new();
    for (i, line) in dust.neutralisation.iter().enumerate() {
        let (sum, last) = ions.entry(&line.ion).or_default();
        *sum += line.share;
        *last = i;
    }
    for (ion, (sum, last)) in ions {
        if (sum - 1.0).abs() > SHARES {
            let found = format!("shares that sum to {}", rounded(sum));
            let entry = format!("{ion} on dust");
            findings.add(
                &format!("dust.neutralisation[{last}].share"),
                entry,
                found,
                "1",
            );
        }
    }
}

/// A sum as the reader would write it, without the noise of binary fractions.
fn rounded(sum: f64) -> f64 {
    (sum * 1e6).round() / 1e6
}
