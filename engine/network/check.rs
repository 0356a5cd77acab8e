//! Owns the rules that a network file must obey; each is one small function.
//!
//! It never stops at the first error, and it never warns: `warn` does.

mod lists;
mod numbers;
mod reversible;
mod solids;

pub(super) use lists::STANDARD_SPECTRUM;
pub(super) use reversible::{improbable_reverses, reversible};

use super::findings::Findings;
use super::groups::{self, Group, Head};
use super::layout::NetworkFile;
use super::model::Species;
use super::read::Entry;
use super::roster::Roster;
use std::collections::{BTreeMap, HashMap};

/// Checks everything that does not already fail while species are looked up.
pub(super) fn all(file: &NetworkFile, roster: &Roster, entries: &[Entry], findings: &mut Findings) {
    for entry in entries {
        reactant_count(entry, findings);
        phases(entry, roster, findings);
        balance(entry, roster, findings);
    }
    duplicates(file, entries, findings);
    for head in groups::heads(file) {
        numbers::uncertainty(&head, findings);
    }
    numbers::all(file, findings);
    lists::all(file, roster, findings);
    solids::all(file, roster, entries, findings);
}

/// Every group has its own number of reactants.
fn reactant_count(entry: &Entry, findings: &mut Findings) {
    let (found, expected) = (entry.reactants.len(), entry.group.reactants());
    if found != expected {
        let found = format!(
            "{found} {}",
            if found == 1 { "reactant" } else { "reactants" }
        );
        let expected = match entry.group {
            Group::ThirdBody => {
                "1 reactant in `third_body` (the partner M is not written)".to_string()
            }
            group => format!("{expected} in `{}`", group.key()),
        };
        findings.add(&entry.place("change"), &entry.change, found, expected);
    }
}

/// Surface reactions take adsorbed species only; all others know gas only.
fn phases(entry: &Entry, roster: &Roster, findings: &mut Findings) {
    let surface = entry.group == Group::Surface;
    let place = entry.place("change");
    if let Some(gas) = entry
        .reactants
        .iter()
        .find(|s| surface && !roster.is_ice(**s))
    {
        let found = format!(
            "the gas species `{}` as reactant",
            roster.species[*gas].name
        );
        findings.add(&place, &entry.change, found, "adsorbed reactants, `X(ads)`");
    }
    let both = entry.reactants.iter().chain(&entry.products);
    if let Some(ice) = both.into_iter().find(|s| !surface && roster.is_ice(**s)) {
        let found = format!("the adsorbed species `{}`", roster.species[*ice].name);
        let expected = format!("gas species in `{}`", entry.group.key());
        findings.add(&place, &entry.change, found, expected);
    }
}

/// Atoms and charge must be the same on both sides.
fn balance(entry: &Entry, roster: &Roster, findings: &mut Findings) {
    let of = |places: &[usize]| {
        places
            .iter()
            .map(|s| roster.species[*s].clone())
            .collect::<Vec<_>>()
    };
    let (left, right) = (of(&entry.reactants), of(&entry.products));
    let place = entry.place("change");
    if let Some(found) = imbalance(&left, &right) {
        findings.add(
            &place,
            &entry.change,
            found,
            "the same atoms and charge on both sides",
        );
    }
}

/// What the right side has too much or too little of: `1 H too many, charge 1 too low on the right`.
pub(super) fn imbalance(left: &[Species], right: &[Species]) -> Option<String> {
    let mut excess: BTreeMap<&str, i64> = BTreeMap::new();
    let mut charge = 0;
    for (side, sign) in [(left, -1), (right, 1)] {
        for species in side {
            charge += sign * i64::from(species.charge);
            for (element, count) in &species.atoms {
                *excess.entry(element).or_insert(0) += sign * i64::from(*count);
            }
        }
    }
    let mut faults: Vec<String> = excess
        .into_iter()
        .filter(|(_, n)| *n != 0)
        .map(|(element, n)| {
            format!(
                "{} {element} too {}",
                n.abs(),
                if n > 0 { "many" } else { "few" }
            )
        })
        .collect();
    if charge != 0 {
        let direction = if charge > 0 { "high" } else { "low" };
        faults.push(format!("charge {} too {direction}", charge.abs()));
    }
    (!faults.is_empty()).then(|| format!("{} on the right", faults.join(", ")))
}

/// Entries with the same change, driven by the same kind of cause, must say that they add.
fn duplicates(file: &NetworkFile, entries: &[Entry], findings: &mut Findings) {
    let heads: HashMap<(Group, usize), Head> = groups::heads(file)
        .into_iter()
        .map(|head| ((head.group, head.index), head))
        .collect();
    let mut seen: HashMap<(&str, Vec<usize>, Vec<usize>), usize> = HashMap::new();
    for entry in entries {
        let key = (
            drive(file, entry),
            entry.reactant_set(),
            entry.product_set(),
        );
        let Some(first) = seen.get(&key) else {
            seen.insert(key, entry.line);
            continue;
        };
        let adds = heads
            .get(&(entry.group, entry.index))
            .is_some_and(|head| head.adds);
        if !adds {
            let found = format!("the same change as line {first}");
            let expected = match entry.group {
                Group::Light | Group::Cosmic | Group::Surface => "one entry",
                _ => {
                    "one entry (with `pieces` for several ranges), or `adds: true` here if both add up"
                }
            };
            findings.add(&entry.place("change"), &entry.change, found, expected);
        }
    }
}

/// What drives an entry, as far as duplicates go: gas-phase encounters are one kind.
fn drive(file: &NetworkFile, entry: &Entry) -> &'static str {
    match entry.group {
        Group::Gas | Group::Capture | Group::Falloff | Group::ThreeBody => "encounters",
        Group::Cosmic if file.cosmic[entry.index].secondary.is_some() => "secondary",
        group => group.key(),
    }
}

/// Photodesorption: gas products with the atoms of the adsorbed species.
pub(super) fn desorbed(
    products: &[usize],
    from: usize,
    roster: &Roster,
    place: &str,
    entry: &str,
    findings: &mut Findings,
) {
    let right: Vec<Species> = products
        .iter()
        .map(|s| roster.species[*s].clone())
        .collect();
    if let Some(ice) = products.iter().find(|s| roster.is_ice(**s)) {
        let found = format!("the adsorbed species `{}`", roster.species[*ice].name);
        findings.add(place, entry, found, "gas products");
    }
    if let Some(found) = imbalance(&roster.species[from..=from], &right) {
        findings.add(place, entry, found, "the atoms of the ice, and no charge");
    }
}

/// Neutralisation on grains: a singly charged cation becomes neutral gas with its atoms.
pub(super) fn neutralised(
    ion: usize,
    becomes: &[usize],
    roster: &Roster,
    place: &str,
    entry: &str,
    findings: &mut Findings,
) {
    let species = &roster.species[ion];
    if species.charge != 1 {
        let found = format!("`{}` of charge {}", species.name, species.charge);
        findings.add(place, entry, found, "an ion of charge +1");
        return;
    }
    let neutral = Species {
        charge: 0,
        ..species.clone()
    };
    let right: Vec<Species> = becomes.iter().map(|s| roster.species[*s].clone()).collect();
    if let Some(wrong) = right
        .iter()
        .zip(becomes)
        .find(|(s, p)| s.charge != 0 || roster.is_ice(**p))
    {
        findings.add(
            place,
            entry,
            format!("`{}`", wrong.0.name),
            "neutral gas products",
        );
    } else if let Some(found) = imbalance(&[neutral], &right) {
        findings.add(place, entry, found, "the atoms of the ion, and no charge");
    }
}
