//! Owns the header of a cell table: what each column means, in which unit, and which columns a
//! table must have.
//!
//! It never reads the cells themselves.

use super::USUAL_GRAIN_RADIUS;
use crate::disk::conditions::{FieldKind, REFERENCE_DUST_AREA};
use crate::errors::InputError;
use crate::units::{self, Dimension, number_text};
use std::path::Path;

/// What a column says.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Meaning {
    Radius,
    Height,
    HydrogenDensity,
    GasTemperature,
    DustTemperature,
    Strength {
        field: usize,
    },
    Extinction {
        field: usize,
    },
    /// Of one field, or of all.
    Column {
        species: usize,
        field: Option<usize>,
    },
    Shield {
        species: usize,
        field: usize,
    },
    Cosmic,
    Xray,
    Nuclides,
    DustArea,
    GrainRadius,
}

/// Columns whose name does not depend on fields or species: name, meaning, required.
const PLAIN: [(&str, Meaning, bool); 10] = [
    ("radius", Meaning::Radius, true),
    ("height", Meaning::Height, true),
    ("n_H", Meaning::HydrogenDensity, true),
    ("T_gas", Meaning::GasTemperature, true),
    ("T_dust", Meaning::DustTemperature, false),
    ("zeta_cosmic", Meaning::Cosmic, true),
    ("zeta_xray", Meaning::Xray, false),
    ("zeta_nuclides", Meaning::Nuclides, false),
    ("dust_area", Meaning::DustArea, false),
    ("grain_radius", Meaning::GrainRadius, false),
];

impl Meaning {
    /// The dimension and the unit the engine works in.
    fn working_unit(self) -> (Dimension, &'static str) {
        match self {
            Meaning::Radius | Meaning::Height => (Dimension::Length, "au"),
            Meaning::GrainRadius => (Dimension::Length, "cm"),
            Meaning::HydrogenDensity => (Dimension::NumberDensity, "cm^-3"),
            Meaning::GasTemperature | Meaning::DustTemperature => (Dimension::Temperature, "K"),
            Meaning::Strength { .. } => (Dimension::FieldStrength, "Draine"),
            Meaning::Extinction { .. } => (Dimension::Extinction, "mag"),
            Meaning::Column { .. } => (Dimension::Column, "cm^-2"),
            Meaning::Shield { .. } => (Dimension::Number, "1"),
            Meaning::Cosmic | Meaning::Xray | Meaning::Nuclides => (Dimension::Rate, "s^-1"),
            Meaning::DustArea => (Dimension::Area, "cm^2"),
        }
    }

    /// Whether a finite value can be.
    pub(super) fn allows(self, value: f64) -> bool {
        match self {
            Meaning::Height => true,
            Meaning::Shield { .. } => (0.0..=1.0).contains(&value),
            Meaning::Radius
            | Meaning::HydrogenDensity
            | Meaning::GasTemperature
            | Meaning::DustTemperature
            | Meaning::DustArea
            | Meaning::GrainRadius => value > 0.0,
            _ => value >= 0.0,
        }
    }

    /// What [`Meaning::allows`] in words.
    pub(super) fn expected(self) -> &'static str {
        match self {
            Meaning::Height => "a finite number",
            Meaning::Shield { .. } => "a factor from 0 to 1, or nothing",
            Meaning::Radius
            | Meaning::HydrogenDensity
            | Meaning::GasTemperature
            | Meaning::DustTemperature
            | Meaning::DustArea
            | Meaning::GrainRadius => "a finite number above 0",
            _ => "a finite number of 0 or more",
        }
    }
}

/// One column of the table.
#[derive(Debug, Clone)]
pub(super) struct Column {
    pub(super) name: String,
    pub(super) meaning: Meaning,
    /// Working units per unit of the table.
    pub(super) factor: f64,
}

/// The header.
pub(super) struct Header {
    pub(super) columns: Vec<Column>,
}

impl Header {
    pub(super) fn read(
        path: &Path,
        line: usize,
        cells: &[String],
        fields: &[FieldKind],
        assumed: &[(String, f64)],
    ) -> Result<Header, Vec<InputError>> {
        let mut columns: Vec<Column> = Vec::new();
        let mut errors = Vec::new();
        for cell in cells {
            match read_column(cell, fields, assumed) {
                Ok(column) if columns.iter().any(|c| c.meaning == column.meaning) => {
                    let (entry, found) = (format!("column {}", column.name), "it twice");
                    errors.push(InputError::new(
                        path,
                        Some(line),
                        entry,
                        found,
                        "every column once",
                    ));
                }
                Ok(column) => columns.push(column),
                Err((found, expected)) => {
                    let entry = format!("column {cell}");
                    errors.push(InputError::new(path, Some(line), entry, found, expected));
                }
            }
        }
        // A misspelt column would be reported a second time as missing.
        if errors.is_empty() {
            let header = Header { columns };
            for (name, meaning) in required(fields) {
                if !header.has(meaning) {
                    let (_, unit) = meaning.working_unit();
                    let expected = format!("a column `{name} [{unit}]`");
                    let entry = format!("column {name}");
                    errors.push(InputError::new(
                        path,
                        Some(line),
                        entry,
                        "no such column",
                        expected,
                    ));
                }
            }
            if errors.is_empty() {
                return Ok(header);
            }
        }
        Err(errors)
    }

    fn has(&self, meaning: Meaning) -> bool {
        self.columns.iter().any(|column| column.meaning == meaning)
    }

    /// What the table left to defaults, in words.
    pub(super) fn notes(
        &self,
        path: &Path,
        fields: &[FieldKind],
        assumed: &[(String, f64)],
    ) -> Vec<String> {
        let area = format!("{} cm^2", number_text(REFERENCE_DUST_AREA));
        let radius = format!("{} cm", number_text(USUAL_GRAIN_RADIUS));
        let defaults = [
            ("T_dust", Meaning::DustTemperature, "T_gas"),
            ("zeta_xray", Meaning::Xray, "0"),
            ("zeta_nuclides", Meaning::Nuclides, "0"),
            ("dust_area", Meaning::DustArea, area.as_str()),
            ("grain_radius", Meaning::GrainRadius, radius.as_str()),
        ];
        let mut notes: Vec<String> = (defaults.iter())
            .filter(|(_, meaning, _)| !self.has(*meaning))
            .map(|(name, _, value)| format!("{}: no {name}, taken as {value}", path.display()))
            .collect();
        for (s, (species, share)) in assumed.iter().enumerate() {
            let missing: Vec<&str> = (fields.iter().enumerate())
                .filter(|&(f, _)| {
                    !self.has(Meaning::Column {
                        species: s,
                        field: Some(f),
                    }) && !self.has(Meaning::Column {
                        species: s,
                        field: None,
                    })
                })
                .map(|(_, field)| field.name.as_str())
                .collect();
            if !missing.is_empty() {
                notes.push(format!(
                    "{}: no column of {species} for {}, taken as {} N_H with N_H from A_V",
                    path.display(),
                    missing.join(", "),
                    number_text(*share)
                ));
            }
        }
        notes
    }
}

/// The columns a table must have.
fn required(fields: &[FieldKind]) -> Vec<(String, Meaning)> {
    let plain = PLAIN.iter().filter(|(_, _, required)| *required);
    let mut all: Vec<(String, Meaning)> = plain
        .map(|(name, meaning, _)| (name.to_string(), *meaning))
        .collect();
    for (f, field) in fields.iter().enumerate() {
        all.push((format!("UV_{}", field.name), Meaning::Strength { field: f }));
        all.push((
            format!("AV_{}", field.name),
            Meaning::Extinction { field: f },
        ));
    }
    all
}

/// Reads one header cell, `name [unit]`; else (found, expected).
fn read_column(
    cell: &str,
    fields: &[FieldKind],
    assumed: &[(String, f64)],
) -> Result<Column, (String, String)> {
    let (name, unit) = match cell.split_once('[') {
        Some((name, rest)) => {
            let unit = rest.trim().strip_suffix(']').ok_or_else(|| {
                (
                    "a unit without its closing `]`".to_string(),
                    "`name [unit]`".to_string(),
                )
            })?;
            (name.trim(), Some(unit.trim()))
        }
        None => (cell.trim(), None),
    };
    let meaning = meaning_of(name, fields, assumed)?;
    let (dimension, working) = meaning.working_unit();
    let Some(unit) = unit else {
        return Err((
            "no unit".to_string(),
            format!("`{name} [unit]` with {}", dimension.request()),
        ));
    };
    let factor = units::conversion(unit, working, dimension).map_err(|m| (m.found, m.expected))?;
    Ok(Column {
        name: name.to_string(),
        meaning,
        factor,
    })
}

fn meaning_of(
    name: &str,
    fields: &[FieldKind],
    assumed: &[(String, f64)],
) -> Result<Meaning, (String, String)> {
    if let Some((_, meaning, _)) = PLAIN.iter().find(|(plain, _, _)| *plain == name) {
        return Ok(*meaning);
    }
    let field_names = || {
        fields
            .iter()
            .map(|f| f.name.as_str())
            .collect::<Vec<_>>()
            .join(", ")
    };
    let field_of = |field: &str| {
        fields.iter().position(|f| f.name == field).ok_or_else(|| {
            (
                format!("the unknown field `{field}`"),
                format!("a field of the case: {}", field_names()),
            )
        })
    };
    if let Some(field) = name.strip_prefix("UV_") {
        return Ok(Meaning::Strength {
            field: field_of(field)?,
        });
    }
    if let Some(field) = name.strip_prefix("AV_") {
        return Ok(Meaning::Extinction {
            field: field_of(field)?,
        });
    }
    let species_of = |species: &str| {
        assumed
            .iter()
            .position(|(known, _)| known == species)
            .ok_or_else(|| {
                let known: Vec<&str> = assumed.iter().map(|(known, _)| known.as_str()).collect();
                let expected = format!(
                    "{}, or a species added to disk.assumed_columns",
                    known.join(", ")
                );
                (
                    format!("the unknown shielding species `{species}`"),
                    expected,
                )
            })
    };
    // Species names hold no `_`, so that the first one ends the species.
    if let Some(rest) = name.strip_prefix("N_") {
        return Ok(match rest.split_once('_') {
            Some((species, field)) => Meaning::Column {
                species: species_of(species)?,
                field: Some(field_of(field)?),
            },
            None => Meaning::Column {
                species: species_of(rest)?,
                field: None,
            },
        });
    }
    if let Some((species, field)) = name.strip_prefix("shield_").and_then(|r| r.split_once('_')) {
        return Ok(Meaning::Shield {
            species: species_of(species)?,
            field: field_of(field)?,
        });
    }
    let plain: Vec<&str> = PLAIN.iter().map(|(plain, _, _)| *plain).collect();
    let expected = format!(
        "one of {}, or UV_F, AV_F, N_X, N_X_F, shield_X_F with a field F and a species X",
        plain.join(", ")
    );
    Err((format!("the unknown column `{name}`"), expected))
}
