//! Owns the rules for the lists beside the reactions: sources, spectra, shielding, compositions.
//!
//! It never looks at reactions beyond the keys they use.

use super::numbers::{Must, number};
use crate::network::findings::Findings;
use crate::network::groups;
use crate::network::layout::{NetworkFile, ShieldingLaw, ShieldingLine};
use crate::network::names;
use crate::network::roster::Roster;

/// The spectrum that every network knows.
pub(in crate::network) const STANDARD_SPECTRUM: &str = "draine";

pub(super) fn all(file: &NetworkFile, roster: &Roster, findings: &mut Findings) {
    sources(file, findings);
    spectra(file, findings);
    shields(file, findings);
    species_numbers(file, findings);
    for (i, line) in file.shielding.iter().enumerate() {
        shielding(line, i, file, roster, findings);
    }
    compositions(file, roster, findings);
}

/// Every `source` is a key of `sources`.
fn sources(file: &NetworkFile, findings: &mut Findings) {
    let mut used: Vec<(String, String, &str)> = Vec::new();
    for head in groups::heads(file) {
        let place = format!("{}[{}]", head.group.key(), head.index);
        used.push((place, head.change.to_string(), head.source));
    }
    for (i, line) in file
        .species
        .iter()
        .enumerate()
        .filter(|(_, line)| !line.source.is_empty())
    {
        used.push((
            format!("species[{i}]"),
            format!("species {}", line.name),
            &line.source,
        ));
    }
    for (i, line) in file.compositions.iter().enumerate() {
        used.push((
            format!("compositions[{i}]"),
            format!("composition {}", line.name),
            &line.source,
        ));
    }
    for (i, line) in file.shielding.iter().enumerate() {
        used.push((
            format!("shielding[{i}]"),
            format!("shielding {}", line.name),
            &line.source,
        ));
    }
    for (i, line) in file.ices.iter().enumerate() {
        let entry = format!("ice {}", line.species);
        used.push((format!("ices[{i}]"), entry.clone(), &line.source));
        if let Some(pure) = &line.pure {
            used.push((format!("ices[{i}].pure"), entry.clone(), &pure.source));
        }
        for (j, channel) in line.photodesorption.iter().enumerate() {
            used.push((
                format!("ices[{i}].photodesorption[{j}]"),
                entry.clone(),
                &channel.source,
            ));
        }
    }
    if let Some(dust) = &file.dust {
        if let Some(line) = &dust.hydrogen_formation {
            let place = "dust.hydrogen_formation".to_string();
            used.push((place, "H2 formation on dust".to_string(), &line.source));
        }
        for (i, line) in dust.neutralisation.iter().enumerate() {
            let entry = format!("{} -> {} (on dust)", line.ion, line.becomes);
            used.push((format!("dust.neutralisation[{i}]"), entry, &line.source));
        }
    }
    for (place, entry, source) in used {
        if !file.sources.contains_key(source) {
            let found = format!("source `{source}`");
            findings.add(
                &format!("{place}.source"),
                entry,
                found,
                "a key that `sources` explains",
            );
        }
    }
}

/// Spectra that light lines use are declared, and none takes the place of the standard one.
fn spectra(file: &NetworkFile, findings: &mut Findings) {
    if file.spectra.contains_key(STANDARD_SPECTRUM) {
        let found = format!("`{STANDARD_SPECTRUM}`");
        let place = format!("spectra.{STANDARD_SPECTRUM}");
        findings.add(
            &place,
            "spectra",
            found,
            "other names; this spectrum is built in",
        );
    }
    for (i, line) in file.light.iter().enumerate() {
        for name in line
            .spectra
            .keys()
            .filter(|name| !file.spectra.contains_key(*name))
        {
            let expected = match name.as_str() {
                STANDARD_SPECTRUM => "`rate`, which is the rate in this spectrum".to_string(),
                _ => "a key that `spectra` explains".to_string(),
            };
            let place = format!("light[{i}].spectra.{name}");
            findings.add(&place, &line.change, format!("spectrum `{name}`"), expected);
        }
    }
}

/// The shields that light lines name exist.
fn shields(file: &NetworkFile, findings: &mut Findings) {
    for (i, line) in file.light.iter().enumerate() {
        let Some(shield) = &line.shield else { continue };
        if !file.shielding.iter().any(|known| known.name == *shield) {
            let place = format!("light[{i}].shield");
            findings.add(
                &place,
                &line.change,
                format!("shield `{shield}`"),
                "a name from `shielding`",
            );
        }
    }
}

fn species_numbers(file: &NetworkFile, findings: &mut Findings) {
    for (i, line) in file.species.iter().enumerate() {
        let (place, entry) = (format!("species[{i}]"), format!("species {}", line.name));
        let fields = [
            (line.enthalpy, Must::BeFinite, "enthalpy"),
            (line.polarisability, Must::NotBeNegative, "polarisability"),
            (line.dipole, Must::NotBeNegative, "dipole"),
        ];
        for (value, must, field) in fields {
            if let Some(value) = value {
                number(value, must, field, &place, &entry, findings);
            }
        }
    }
}

fn shielding(
    line: &ShieldingLine,
    index: usize,
    file: &NetworkFile,
    roster: &Roster,
    findings: &mut Findings,
) {
    let (place, entry) = (
        format!("shielding[{index}]"),
        format!("shielding {}", line.name),
    );
    if file.shielding[..index]
        .iter()
        .any(|earlier| earlier.name == line.name)
    {
        findings.add(
            &place,
            &entry,
            format!("`{}` a second time", line.name),
            "every name once",
        );
    }
    match roster.resolve(&line.column) {
        Err(error) => findings.add(
            &format!("{place}.column"),
            &entry,
            error.found,
            error.expected,
        ),
        Ok(species) if roster.is_ice(species) => {
            findings.add(
                &format!("{place}.column"),
                &entry,
                "an adsorbed species",
                "a gas species",
            );
        }
        Ok(_) => {}
    }
    if line.law == ShieldingLaw::Table {
        axis(&line.log_column, "log_column", &place, &entry, findings);
        axis(&line.log_h2, "log_h2", &place, &entry, findings);
        table(line, &place, &entry, findings);
    } else if !(line.log_column.is_empty() && line.log_h2.is_empty() && line.factor.is_empty()) {
        findings.add(
            &place,
            &entry,
            "a table beside another law",
            "`law: table`, or no table",
        );
    }
}

/// An axis of a table: at least two finite values that ascend.
fn axis(values: &[f64], field: &str, place: &str, entry: &str, findings: &mut Findings) {
    let place = format!("{place}.{field}");
    if values.len() < 2 {
        let found = format!("{} values in `{field}`", values.len());
        findings.add(&place, entry, found, "at least 2");
    } else if let Some(pair) = values.windows(2).find(|pair| !pair[0].lt(&pair[1])) {
        let found = format!("{} after {} in `{field}`", pair[1], pair[0]);
        findings.add(&place, entry, found, "ascending values");
    }
}

/// One row per `log_h2`, one positive factor per `log_column`.
fn table(line: &ShieldingLine, place: &str, entry: &str, findings: &mut Findings) {
    let (rows, columns) = (line.log_h2.len(), line.log_column.len());
    if line.factor.len() != rows {
        let found = format!("{} rows in `factor`", line.factor.len());
        let expected = format!("{rows}, one per value of `log_h2`");
        findings.add(&format!("{place}.factor"), entry, found, expected);
    }
    for (i, row) in line.factor.iter().enumerate() {
        let place = format!("{place}.factor[{i}]");
        if row.len() != columns {
            let found = format!("{} factors in row {}", row.len(), i + 1);
            let expected = format!("{columns}, one per value of `log_column`");
            findings.add(&place, entry, found, expected);
        }
        if let Some(wrong) = row
            .iter()
            .find(|factor| !(**factor > 0.0 && factor.is_finite()))
        {
            let found = format!("factor {wrong:e} in row {}", i + 1);
            findings.add(&place, entry, found, "factors above 0");
        }
    }
}

/// Compositions name known species with abundances that are not negative.
fn compositions(file: &NetworkFile, roster: &Roster, findings: &mut Findings) {
    for (i, line) in file.compositions.iter().enumerate() {
        let (place, entry) = (
            format!("compositions[{i}]"),
            format!("composition {}", line.name),
        );
        if file.compositions[..i]
            .iter()
            .any(|earlier| earlier.name == line.name)
        {
            findings.add(
                &place,
                &entry,
                format!("`{}` a second time", line.name),
                "every name once",
            );
        }
        for (name, abundance) in &line.abundances {
            let place = format!("{place}.abundances");
            if let Err(error) = roster.resolve(name) {
                let expected = match names::gas_name(name) {
                    Some(_) => error.expected,
                    None => "a species of this network".to_string(),
                };
                findings.add(&format!("{place}.{name}"), &entry, error.found, expected);
            }
            number(
                *abundance,
                Must::NotBeNegative,
                name,
                &place,
                &entry,
                findings,
            );
        }
    }
}
