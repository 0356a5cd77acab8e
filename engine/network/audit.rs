//! Owns the audits of a network as a whole: the reader's warnings, and what a network that is to be
//! trusted should also have.
//!
//! It never refuses a network and never evaluates a rate: `inquiry::audit` adds what needs rates.

use super::collisions;
use super::findings::{Severity, Warning, WarningKind};
use super::groups::{self, Group};
use super::layout::Standing;
use super::read::{Entry, Network};
use super::warn;
use crate::errors::InputError;
use std::collections::{BTreeSet, HashSet};
use std::path::{Path, PathBuf};

/// Mass (amu) of H2: what is heavier should take part in all of gas and ice chemistry.
const HYDROGEN: f64 = 2.016;
/// Heat (kJ/mol) that a barrier may leave open: enthalpies at 298 K and fitted barriers differ by
/// less. Own choice.
const HEAT_MARGIN: f64 = 20.0;
/// Gas constant, kJ mol^-1 K^-1 (CODATA 2018).
const GAS_CONSTANT: f64 = 8.314_462_618e-3;
/// Closed-shell atoms bound to ice so weakly that they never stay on it.
const NEVER_FREEZE: [&str; 1] = ["He"];

/// Something a person should look at.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Finding {
    pub severity: Severity,
    pub file: PathBuf,
    pub line: Option<usize>,
    /// The change, species or key path.
    pub entry: String,
    pub what: String,
    pub why: String,
    /// None for what the reader refuses.
    pub kind: Option<WarningKind>,
}

impl Finding {
    /// A warning of the network in `file`.
    pub fn warning(file: &Path, warning: Warning) -> Self {
        Finding {
            severity: warning.kind.severity(),
            file: file.to_path_buf(),
            line: Some(warning.line),
            entry: warning.entry,
            what: warning.text,
            why: warning.kind.why().to_string(),
            kind: Some(warning.kind),
        }
    }
}

impl From<&InputError> for Finding {
    fn from(error: &InputError) -> Self {
        Finding {
            severity: Severity::Error,
            file: error.file.clone(),
            line: error.line,
            entry: error.entry.clone(),
            what: format!("found {}, expected {}", error.found, error.expected),
            why: "no case can run with it".to_string(),
            kind: None,
        }
    }
}

impl std::fmt::Display for Finding {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}:", self.file.display())?;
        if let Some(line) = self.line {
            write!(f, "{line}:")?;
        }
        write!(f, " {}: {}; {}", self.entry, self.what, self.why)
    }
}

impl Network {
    /// All findings that follow from the file alone: errors cannot be among them.
    pub fn audit(&self) -> Vec<Finding> {
        let mut warnings = Vec::new();
        let unused = never_used(self, &mut warnings);
        // What takes part in nothing need not be told its single lacks.
        let useful = |w: &&Warning| !unused.contains(w.entry.trim_start_matches("species "));
        warnings.extend(self.warnings.iter().filter(useful).cloned());
        gas_routes(self, &unused, &mut warnings);
        ice_partners(self, &unused, &mut warnings);
        recombination(self, &unused, &mut warnings);
        low_barriers(self, &mut warnings);
        unused_names(self, &mut warnings);
        not_audited(self, &mut warnings);
        let of = |warning| Finding::warning(&self.path, warning);
        warnings.into_iter().map(of).collect()
    }

    /// How many lines have each standing: evaluated, measured, recalled, estimated.
    pub fn standings(&self) -> [(&'static str, usize); 4] {
        let mut all: Vec<Standing> = groups::heads(&self.file)
            .iter()
            .map(|head| head.standing)
            .collect();
        all.extend(self.file.ices.iter().map(|ice| ice.standing));
        let count = |standing| all.iter().filter(|s| **s == standing).count();
        [
            ("evaluated", count(Standing::Evaluated)),
            ("measured", count(Standing::Measured)),
            ("recalled", count(Standing::Recalled)),
            ("estimated", count(Standing::Estimated)),
        ]
    }

    fn species_warning(&self, place: usize, kind: WarningKind, text: String) -> Warning {
        Warning {
            line: self.line(&format!("species[{place}]")),
            entry: format!("species {}", self.roster.species[place].name),
            text,
            kind,
        }
    }
}

/// Names of the gas species that stand in no line but their own.
fn never_used(network: &Network, warnings: &mut Vec<Warning>) -> HashSet<String> {
    let roster = &network.roster;
    let mut used: HashSet<usize> = HashSet::new();
    for entry in &network.entries {
        used.extend(&entry.reactants);
        used.extend(&entry.products);
    }
    used.extend(network.photodesorption.iter().flatten().flatten());
    for (ion, becomes) in &network.neutralisation {
        used.insert(*ion);
        used.extend(becomes);
    }
    if network.file.dust.is_some() {
        used.extend(
            ["H", "H2", "e-"]
                .iter()
                .filter_map(|name| roster.find(name)),
        );
    }
    // An ice that reacts is a use of its gas form.
    let used: HashSet<usize> = used.iter().map(|place| roster.gas_form(*place)).collect();
    let mut names = HashSet::new();
    for place in (0..roster.gas).filter(|place| !used.contains(place)) {
        let text = "no reaction contains it".to_string();
        warnings.push(network.species_warning(place, WarningKind::NeverUsed, text));
        names.insert(roster.species[place].name.clone());
    }
    names
}

/// The neutral gas species heavier than H2 that take part in anything.
fn heavy_neutrals<'a>(
    network: &'a Network,
    unused: &'a HashSet<String>,
) -> impl Iterator<Item = usize> + 'a {
    (0..network.roster.gas).filter(move |place| {
        let species = &network.roster.species[*place];
        species.charge == 0 && species.mass > 1.001 * HYDROGEN && !unused.contains(&species.name)
    })
}

/// Neutrals heavier than H2 without formation or destruction by a written reaction of the gas.
fn gas_routes(network: &Network, unused: &HashSet<String>, warnings: &mut Vec<Warning>) {
    let (mut formed, mut destroyed) = (HashSet::new(), HashSet::new());
    for entry in network.entries.iter().filter(|e| e.group != Group::Surface) {
        let count = |side: &[usize], s| side.iter().filter(|other| **other == s).count();
        for s in entry.reactants.iter().chain(&entry.products).copied() {
            let (before, after) = (count(&entry.reactants, s), count(&entry.products, s));
            if after > before {
                formed.insert(s);
            } else if after < before {
                destroyed.insert(s);
            }
        }
    }
    // The reader has said so already where nothing at all does.
    let entry = |place: usize| format!("species {}", network.roster.species[place].name);
    let said = |place, kind| {
        let known = |w: &Warning| w.kind == kind && w.entry == entry(place);
        network.warnings.iter().any(known)
    };
    for place in heavy_neutrals(network, unused) {
        if !formed.contains(&place) && !said(place, WarningKind::NeverFormed) {
            let text = "no reaction of the gas forms it".to_string();
            warnings.push(network.species_warning(place, WarningKind::NeverFormedInGas, text));
        }
        if !destroyed.contains(&place) && !said(place, WarningKind::NeverDestroyed) {
            let text = "no reaction of the gas destroys it".to_string();
            warnings.push(network.species_warning(place, WarningKind::NeverDestroyedInGas, text));
        }
    }
}

/// Neutrals heavier than H2 that have no line in `ices`.
fn ice_partners(network: &Network, unused: &HashSet<String>, warnings: &mut Vec<Warning>) {
    let frozen: HashSet<&str> = (network.file.ices.iter())
        .map(|ice| ice.species.as_str())
        .collect();
    for place in heavy_neutrals(network, unused) {
        let name = network.roster.species[place].name.as_str();
        if !frozen.contains(name) && !NEVER_FREEZE.contains(&name) {
            let text = "no line of `ices` freezes it out".to_string();
            warnings.push(network.species_warning(place, WarningKind::NoIce, text));
        }
    }
}

/// Cations that meet neither electrons nor grains; anions that meet no cation and
/// never lose their electron.
fn recombination(network: &Network, unused: &HashSet<String>, warnings: &mut Vec<Warning>) {
    let roster = &network.roster;
    let charge = |place: usize| roster.species[place].charge;
    let electron = roster.find("e-");
    let ends = |entry: &Entry, ion: usize| {
        let takes = |s: &usize| *s == ion;
        let gone = entry.reactants.iter().any(takes) && !entry.products.iter().any(takes);
        let met = |s: &usize| match charge(ion) {
            q if q > 0 => Some(*s) == electron,
            _ => charge(*s) > 0,
        };
        // By light or in a collision, the electron comes off.
        let detached = charge(ion) < 0 && entry.products.iter().any(|s| Some(*s) == electron);
        gone && (entry.reactants.iter().any(met) || detached)
    };
    let on_grains: HashSet<usize> = network.neutralisation.iter().map(|(ion, _)| *ion).collect();
    for place in (0..roster.gas).filter(|place| charge(*place) != 0 && Some(*place) != electron) {
        let known = unused.contains(&roster.species[place].name) || on_grains.contains(&place);
        if known || network.entries.iter().any(|entry| ends(entry, place)) {
            continue;
        }
        let text = match charge(place) {
            q if q > 0 => "neither electrons nor grains destroy it",
            _ => "no cation destroys it, and nothing detaches its electron",
        };
        warnings.push(network.species_warning(
            place,
            WarningKind::NeverRecombines,
            text.to_string(),
        ));
    }
}

/// Two-body power laws whose activation energy at 300 K, c + b T, is less than the heat they take up.
/// Those without any barrier are the reader's to warn of.
fn low_barriers(network: &Network, warnings: &mut Vec<Warning>) {
    for entry in network.entries.iter().filter(|e| e.group == Group::Gas) {
        let line = &network.file.gas[entry.index];
        let pieces = groups::pieces(line);
        let (Some(piece), Some(heat)) = (pieces.first(), warn::heat(network, entry)) else {
            continue;
        };
        let activation = GAS_CONSTANT * (piece.barrier + 300.0 * piece.slope.max(0.0));
        let open = heat - activation > HEAT_MARGIN;
        if piece.barrier > 0.0 && open && line.endothermic.trim().is_empty() {
            warnings.push(Warning {
                line: entry.line,
                entry: entry.change.clone(),
                text: format!(
                    "endothermic by {heat:.1} kJ/mol, with an activation energy of {activation:.1}"
                ),
                kind: WarningKind::LowBarrier,
            });
        }
    }
}

/// Sources, spectra and shielding lines that no line refers to.
fn unused_names(network: &Network, warnings: &mut Vec<Warning>) {
    let file = &network.file;
    let mut cited: HashSet<&str> = HashSet::new();
    // A key of several parts, `a+b`, stands for the entries `a` and `b` too.
    for source in sources(network) {
        cited.insert(source);
        cited.extend(source.split('+'));
    }
    let mut add = |place: String, entry: String, text: &str| {
        warnings.push(Warning {
            line: network.line(&place),
            entry,
            text: text.to_string(),
            kind: WarningKind::Unused,
        });
    };
    for key in file.sources.keys().filter(|k| !cited.contains(k.as_str())) {
        let text = "no line has it as its `source`";
        add(format!("sources.{key}"), format!("source {key}"), text);
    }
    for name in file.spectra.keys() {
        if !file
            .light
            .iter()
            .any(|line| line.spectra.contains_key(name))
        {
            let text = "no line of `light` has a rate in it";
            add(format!("spectra.{name}"), format!("spectrum {name}"), text);
        }
    }
    for (i, line) in file.shielding.iter().enumerate() {
        let by = |light: &super::layout::LightLine| light.shield.as_ref() == Some(&line.name);
        if !file.light.iter().any(by) {
            let text = "no line of `light` has it as its `shield`";
            add(
                format!("shielding[{i}]"),
                format!("shielding {}", line.name),
                text,
            );
        }
    }
}

/// Every `source` of the file, with repeats.
fn sources(network: &Network) -> Vec<&str> {
    let file = &network.file;
    let mut all: Vec<&str> = Vec::new();
    all.extend(file.species.iter().map(|line| line.source.as_str()));
    all.extend(file.compositions.iter().map(|line| line.source.as_str()));
    all.extend(file.shielding.iter().map(|line| line.source.as_str()));
    all.extend(groups::heads(file).iter().map(|head| head.source));
    for ice in &file.ices {
        all.push(&ice.source);
        all.extend(ice.pure.iter().map(|pure| pure.source.as_str()));
        all.extend(ice.photodesorption.iter().map(|y| y.source.as_str()));
    }
    if let Some(dust) = &file.dust {
        all.extend(dust.hydrogen_formation.iter().map(|h| h.source.as_str()));
        all.extend(dust.neutralisation.iter().map(|line| line.source.as_str()));
    }
    all
}

/// What the file has no numbers to audit with, told once per kind.
fn not_audited(network: &Network, warnings: &mut Vec<Warning>) {
    let name = |place: usize| network.roster.species[place].name.as_str();
    let mut add = |places: Vec<usize>, what: &str, unchecked: &str| {
        if let Some(first) = places.first() {
            let names: Vec<&str> = places.iter().map(|place| name(*place)).collect();
            warnings.push(Warning {
                line: network.line(&format!("species[{first}]")),
                entry: "species".to_string(),
                text: format!("no {what} of {}: {unchecked}", names.join(", ")),
                kind: WarningKind::NotAudited,
            });
        }
    };
    let without_barrier = |entry: &&Entry| warn::barrier(network, entry).is_some_and(|b| b <= 0.0);
    let no_heat: BTreeSet<usize> = (network.entries.iter())
        .filter(without_barrier)
        .flat_map(|entry| entry.reactants.iter().chain(&entry.products))
        .filter(|place| network.file.species[**place].enthalpy.is_none())
        .copied()
        .collect();
    add(
        no_heat.into_iter().collect(),
        "`enthalpy`",
        "whether their reactions need heat is not checked",
    );
    add(
        collisions::without_limit(network),
        "`polarisability`",
        "their reactions with ions are not compared with capture",
    );
}
