//! Owns cell tables: CSV text to cells and back, bit for bit.
//!
//! It never guesses: a column it does not know, a unit that does not fit or a value that cannot
//! be is an error with file, line and column; what it fills in is stated in the notes.

mod header;

use super::columns::hydrogen_column;
use super::conditions::{Conditions, Disk, FieldKind, Light, REFERENCE_DUST_AREA};
use crate::errors::InputError;
use crate::units::number_text;
use header::{Column, Header, Meaning};
use std::io::{self, Write};
use std::path::Path;

/// Grain radius of cells that do not say, cm.
pub const USUAL_GRAIN_RADIUS: f64 = 1.0e-5;

/// Errors reported of one table; a table wrong throughout would else flood the screen.
const MOST_ERRORS: usize = 20;

/// A table's cells and what it left to defaults.
type Reading = (Disk, Vec<String>);

/// Reads the cells of a table with the content `text`. `fields` are the radiation fields of the
/// case; `assumed` the mean abundances that stand in for columns not given (its species are those
/// whose columns a table may give).
pub fn read(
    path: &Path,
    text: &str,
    fields: &[FieldKind],
    assumed: &[(String, f64)],
) -> Result<Reading, Vec<InputError>> {
    let text = text.strip_prefix('\u{feff}').unwrap_or(text);
    let mut lines = text
        .lines()
        .enumerate()
        .map(|(i, line)| (i + 1, line))
        .filter(|(_, line)| !line.trim().is_empty() && !line.trim_start().starts_with('#'));
    let Some((header_line, first)) = lines.next() else {
        let expected = "a header line `name [unit],...` and one line per cell";
        return Err(vec![InputError::new(
            path, None, "table", "nothing", expected,
        )]);
    };
    let header = Header::read(path, header_line, &split(first), fields, assumed)?;

    let mut errors = Vec::new();
    let mut cells = Vec::new();
    for (line, content) in lines {
        match read_cell(path, line, &split(content), &header, fields, assumed) {
            Ok(cell) => cells.push(cell),
            Err(found) => errors.extend(found),
        }
        if errors.len() >= MOST_ERRORS {
            break;
        }
    }
    if !errors.is_empty() {
        errors.truncate(MOST_ERRORS);
        return Err(errors);
    }
    if cells.is_empty() {
        let expected = "at least one line with a cell";
        let error = InputError::new(path, Some(header_line), "table", "only a header", expected);
        return Err(vec![error]);
    }
    let column_species = assumed.iter().map(|(name, _)| name.clone()).collect();
    let notes = header.notes(path, fields, assumed);
    Ok((
        Disk {
            fields: fields.to_vec(),
            column_species,
            cells,
        },
        notes,
    ))
}

/// The cells of one line. Quotes are honoured: spreadsheets write them around header cells.
fn split(line: &str) -> Vec<String> {
    let mut reader = csv::ReaderBuilder::new()
        .has_headers(false)
        .trim(csv::Trim::All)
        .from_reader(line.as_bytes());
    match reader.records().next() {
        Some(Ok(record)) => record.iter().map(str::to_string).collect(),
        // Text in memory cannot fail to be read; a line of nothing has no cells.
        _ => Vec::new(),
    }
}

fn read_cell(
    path: &Path,
    line: usize,
    values: &[String],
    header: &Header,
    fields: &[FieldKind],
    assumed: &[(String, f64)],
) -> Result<Conditions, Vec<InputError>> {
    if values.len() != header.columns.len() {
        let found = format!("{} values", values.len());
        let expected = format!("{}, one per column of the header", header.columns.len());
        return Err(vec![InputError::new(
            path,
            Some(line),
            "table",
            found,
            expected,
        )]);
    }
    let mut cell = Draft::new(fields.len(), assumed.len());
    let mut errors = Vec::new();
    for (column, text) in header.columns.iter().zip(values) {
        match read_value(column, text) {
            Ok(value) => cell.set(column.meaning, value),
            Err((found, expected)) => {
                let entry = format!("column {}", column.name);
                errors.push(InputError::new(path, Some(line), entry, found, expected));
            }
        }
    }
    if errors.is_empty() {
        Ok(cell.finish(assumed))
    } else {
        Err(errors)
    }
}

/// A value in working units; None only for a shielding factor left blank.
fn read_value(column: &Column, text: &str) -> Result<Option<f64>, (String, String)> {
    if text.is_empty() {
        return match column.meaning {
            Meaning::Shield { .. } => Ok(None),
            _ => Err(("nothing".to_string(), column.meaning.expected().to_string())),
        };
    }
    let wrong = || (format!("`{text}`"), column.meaning.expected().to_string());
    let value = text.parse::<f64>().map_err(|_| wrong())? * column.factor;
    if value.is_finite() && column.meaning.allows(value) {
        Ok(Some(value))
    } else {
        Err(wrong())
    }
}

/// A cell under way: what its line gave so far.
struct Draft {
    cell: Conditions,
    t_dust: Option<f64>,
    /// By field, then by species.
    columns: Vec<Vec<Option<f64>>>,
    /// By species, for all fields.
    shared_columns: Vec<Option<f64>>,
}

impl Draft {
    fn new(fields: usize, species: usize) -> Self {
        let light = Light {
            strength: 0.0,
            extinction: 0.0,
            columns: Vec::new(),
            shields: vec![None; species],
        };
        Draft {
            // Required values are overwritten: the header was checked to have them.
            cell: Conditions {
                radius: 0.0,
                height: 0.0,
                n_h: 0.0,
                t_gas: 0.0,
                t_dust: 0.0,
                light: vec![light; fields],
                zeta_cosmic: 0.0,
                zeta_xray: 0.0,
                zeta_nuclides: 0.0,
                dust_area: REFERENCE_DUST_AREA,
                grain_radius: USUAL_GRAIN_RADIUS,
            },
            t_dust: None,
            columns: vec![vec![None; species]; fields],
            shared_columns: vec![None; species],
        }
    }

    fn set(&mut self, meaning: Meaning, value: Option<f64>) {
        if let Meaning::Shield { species, field } = meaning {
            self.cell.light[field].shields[species] = value;
        }
        let Some(value) = value else { return };
        let cell = &mut self.cell;
        match meaning {
            Meaning::Radius => cell.radius = value,
            Meaning::Height => cell.height = value,
            Meaning::HydrogenDensity => cell.n_h = value,
            Meaning::GasTemperature => cell.t_gas = value,
            Meaning::DustTemperature => self.t_dust = Some(value),
            Meaning::Strength { field } => cell.light[field].strength = value,
            Meaning::Extinction { field } => cell.light[field].extinction = value,
            Meaning::Column {
                species,
                field: Some(field),
            } => {
                self.columns[field][species] = Some(value);
            }
            Meaning::Column {
                species,
                field: None,
            } => self.shared_columns[species] = Some(value),
            Meaning::Shield { .. } => {}
            Meaning::Cosmic => cell.zeta_cosmic = value,
            Meaning::Xray => cell.zeta_xray = value,
            Meaning::Nuclides => cell.zeta_nuclides = value,
            Meaning::DustArea => cell.dust_area = value,
            Meaning::GrainRadius => cell.grain_radius = value,
        }
    }

    fn finish(self, assumed: &[(String, f64)]) -> Conditions {
        let mut cell = self.cell;
        cell.t_dust = self.t_dust.unwrap_or(cell.t_gas);
        for (light, given) in cell.light.iter_mut().zip(&self.columns) {
            let hydrogen = hydrogen_column(light.extinction, cell.dust_area);
            light.columns = (assumed.iter().zip(given).zip(&self.shared_columns))
                .map(|(((_, share), own), shared)| own.or(*shared).unwrap_or(share * hydrogen))
                .collect();
        }
        cell
    }
}

/// Writes `disk` as a cell table that [`read`] turns into the same disk, bit for bit (given the
/// same fields and column species, which the comment lines name).
pub fn write_table(disk: &Disk, mut out: impl Write) -> io::Result<()> {
    for field in &disk.fields {
        let state = if field.attenuated {
            "attenuated"
        } else {
            "not attenuated"
        };
        writeln!(
            out,
            "# field {}: spectrum {}, {state}",
            field.name, field.spectrum
        )?;
    }
    let mut head: Vec<String> = [
        "radius [au]",
        "height [au]",
        "n_H [cm^-3]",
        "T_gas [K]",
        "T_dust [K]",
    ]
    .map(String::from)
    .to_vec();
    // Shielding factors only where some cell has one.
    let given = |f: usize, s: usize| disk.cells.iter().any(|c| c.light[f].shields[s].is_some());
    for (f, field) in disk.fields.iter().enumerate() {
        let name = &field.name;
        head.push(format!("UV_{name} [Draine]"));
        head.push(format!("AV_{name} [mag]"));
        head.extend(
            disk.column_species
                .iter()
                .map(|species| format!("N_{species}_{name} [cm^-2]")),
        );
        let shields = disk
            .column_species
            .iter()
            .enumerate()
            .filter(|&(s, _)| given(f, s));
        head.extend(shields.map(|(_, species)| format!("shield_{species}_{name} [1]")));
    }
    head.extend(
        [
            "zeta_cosmic [s^-1]",
            "zeta_xray [s^-1]",
            "zeta_nuclides [s^-1]",
        ]
        .map(String::from),
    );
    head.extend(["dust_area [cm^2]", "grain_radius [cm]"].map(String::from));
    writeln!(out, "{}", head.join(","))?;

    for cell in &disk.cells {
        let mut row: Vec<String> = [cell.radius, cell.height, cell.n_h, cell.t_gas, cell.t_dust]
            .map(number_text)
            .to_vec();
        for (f, light) in cell.light.iter().enumerate() {
            row.push(number_text(light.strength));
            row.push(number_text(light.extinction));
            row.extend(light.columns.iter().map(|&column| number_text(column)));
            let shields = light
                .shields
                .iter()
                .enumerate()
                .filter(|&(s, _)| given(f, s));
            row.extend(shields.map(|(_, shield)| shield.map_or(String::new(), number_text)));
        }
        let zetas = [cell.zeta_cosmic, cell.zeta_xray, cell.zeta_nuclides];
        row.extend(zetas.map(number_text));
        row.extend([cell.dust_area, cell.grain_radius].map(number_text));
        writeln!(out, "{}", row.join(","))?;
    }
    Ok(())
}
