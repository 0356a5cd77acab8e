//! Owns the file of thermodynamic polynomials: which one a network names, its layout, its reading
//! and checks.
//!
//! It never evaluates a polynomial: `equilibrium` does.

use super::findings::Findings;
use super::model::{Phase, Polynomial};
use super::names;
use super::read::Entry;
use super::roster::Roster;
use crate::errors::InputError;
use crate::yaml::{self, Positions};
use serde::Deserialize;
use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

/// The layout this engine reads.
const LAYOUT: u32 = 1;

/// The files inside the program.
const BUILT_IN: [(&str, &str); 1] = [("standard", include_str!("../../networks/thermo.yaml"))];

/// Intervals abut when their ends differ by less than this share.
const ABUT: f64 = 1e-9;

/// The written form of the file.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
struct ThermoFile {
    thermo: String,
    // Checked before this form is filled.
    #[serde(rename = "layout")]
    _layout: u32,
    #[serde(default, rename = "about")]
    _about: String,
    sources: BTreeMap<String, String>,
    polynomials: Vec<PolynomialLine>,
}

/// One species in one interval of temperature.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
struct PolynomialLine {
    species: String,
    /// K.
    valid: [f64; 2],
    a: [f64; 7],
    b: [f64; 2],
    /// kJ/mol beyond the published fit that `b` already contains: for the reader only.
    #[serde(default)]
    shift: f64,
    source: String,
}

/// Polynomials by species, ascending in temperature.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Thermo {
    pub name: String,
    pub species: BTreeMap<String, Vec<Polynomial>>,
}

/// The text of built-in polynomials.
pub fn built_in(name: &str) -> Option<&'static str> {
    let known = BUILT_IN.iter().find(|(known, _)| *known == name);
    known.map(|(_, text)| *text)
}

/// What the network in `text` names as its polynomials; None also if it cannot be read.
pub fn named(path: &Path, text: &str) -> Option<String> {
    // Spares the pass over a large file that cannot name any.
    if !text.contains("thermo") {
        return None;
    }
    let positions = yaml::positions(path, text).ok()?;
    positions.text("thermo").map(str::to_string)
}

/// Where the polynomials named by the network at `network` lie.
pub fn place(network: &Path, name: &str) -> PathBuf {
    match built_in(name) {
        Some(_) => Path::new("networks").join("thermo.yaml"),
        None => network.parent().unwrap_or(Path::new("")).join(name),
    }
}

/// Whether `name` can name polynomials; otherwise what is expected.
pub fn known(name: &str) -> Result<(), String> {
    if built_in(name).is_some() || name.ends_with(".yaml") {
        return Ok(());
    }
    let known: Vec<&str> = BUILT_IN.iter().map(|(known, _)| *known).collect();
    Err(format!("{}, or a path ending in .yaml", known.join(", ")))
}

/// Reads and checks the text of the file `path`; reports all errors it can find.
pub fn read(path: &Path, text: &str) -> Result<Thermo, Vec<InputError>> {
    let positions = yaml::positions(path, text).map_err(|error| vec![error])?;
    check_layout(path, &positions)?;
    let file: ThermoFile = yaml::fill(path, text, &positions).map_err(|error| vec![error])?;
    let mut findings = Findings::new(path, &positions);
    let mut thermo = Thermo {
        name: file.thermo.clone(),
        species: BTreeMap::new(),
    };
    for (i, line) in file.polynomials.iter().enumerate() {
        let place = format!("polynomials[{i}]");
        check_line(line, &place, &file, &mut findings);
        let intervals = thermo.species.entry(line.species.clone()).or_default();
        if let Some(last) = intervals.last() {
            joint(last, line, &place, &mut findings);
        }
        intervals.push(Polynomial {
            valid: line.valid,
            a: line.a,
            b: line.b,
        });
    }
    if findings.none() {
        Ok(thermo)
    } else {
        Err(findings.finish())
    }
}

/// A file of another layout would fail on its keys; say what is really the matter.
fn check_layout(path: &Path, positions: &Positions) -> Result<(), Vec<InputError>> {
    match positions.text("layout") {
        Some(layout) if layout != LAYOUT.to_string() => Err(vec![InputError::new(
            path,
            positions.line("layout"),
            "layout",
            format!("`{layout}`"),
            format!("{LAYOUT}, the layout this version reads"),
        )]),
        _ => Ok(()),
    }
}

fn check_line(line: &PolynomialLine, place: &str, file: &ThermoFile, findings: &mut Findings) {
    let mut wrong = |field: &str, found: String, expected: &str| {
        findings.add(&format!("{place}.{field}"), &line.species, found, expected);
    };
    match names::species(&line.species) {
        Err(error) => wrong("species", error.found, &error.expected),
        Ok(species) if species.phase != Phase::Gas => {
            wrong("species", format!("`{}`", line.species), "a gas species");
        }
        Ok(_) => {}
    }
    let [low, high] = line.valid;
    if !(low > 0.0 && low < high && high.is_finite()) {
        let found = format!("valid [{low}, {high}]");
        wrong("valid", found, "[low, high] in K with 0 < low < high");
    }
    for (field, values) in [("a", &line.a[..]), ("b", &line.b), ("shift", &[line.shift])] {
        if let Some(value) = values.iter().find(|value| !value.is_finite()) {
            wrong(field, format!("{field} {value}"), "finite numbers");
        }
    }
    if !file.sources.contains_key(&line.source) {
        let found = format!("source `{}`", line.source);
        wrong("source", found, "a key that `sources` explains");
    }
}

/// Intervals of a species ascend and meet.
fn joint(last: &Polynomial, line: &PolynomialLine, place: &str, findings: &mut Findings) {
    let end = last.valid[1];
    if (line.valid[0] - end).abs() > ABUT * end.abs() {
        let [low, high] = line.valid;
        findings.add(
            &format!("{place}.valid"),
            &line.species,
            format!("an interval [{low}, {high}] after one that ends at {end} K"),
            "intervals that ascend, each starting where the last ends",
        );
    }
}

impl Thermo {
    /// How many molecules of each species a reaction gains, with the polynomials of one.
    ///
    /// # Errors
    /// The first species without polynomials.
    pub(super) fn terms(
        &self,
        entry: &Entry,
        roster: &Roster,
    ) -> Result<Vec<(i32, &[Polynomial])>, String> {
        let sides = [(-1, &entry.reactants), (1, &entry.products)];
        let each = sides
            .into_iter()
            .flat_map(|(sign, side)| side.iter().map(move |place| (sign, *place)));
        each.map(|(sign, place)| {
            let name = &roster.species[place].name;
            let polynomials = self.species.get(name).ok_or_else(|| name.clone())?;
            Ok((sign, polynomials.as_slice()))
        })
        .collect()
    }
}
