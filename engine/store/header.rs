//! Owns the header of a run: everything that all cells share, from the resolved inputs to the
//! meaning of every axis; its binary form in the journal and the hash of the inputs.
//!
//! It never reads or writes a file, and never interprets the case or network text.

use sha2::{Digest, Sha256};

use super::bytes::{Decoder, Encoder, Malformed};
use crate::disk::conditions::{Conditions, Disk, FieldKind, Light};
use crate::network::model::{Phase, Species};

/// What readers of a run need to know of a species.
#[derive(Debug, Clone, PartialEq)]
pub struct SpeciesInfo {
    pub name: String,
    pub phase: Phase,
    /// Charge in units of e.
    pub charge: i32,
    /// amu.
    pub mass: f64,
    /// Atoms by element symbol, none of them zero.
    pub atoms: Vec<(String, u32)>,
}

impl From<&Species> for SpeciesInfo {
    fn from(species: &Species) -> Self {
        SpeciesInfo {
            name: species.name.clone(),
            phase: species.phase,
            charge: species.charge,
            mass: species.mass,
            atoms: species.atoms.clone(),
        }
    }
}

/// The phases in the order of the numbers they are stored as, with their words.
pub const PHASES: [(Phase, &str); 4] = [
    (Phase::Gas, "gas"),
    (Phase::Ice, "adsorbed"),
    (Phase::Dust, "dust"),
    (Phase::IceTotal, "sum_of_adsorbed"),
];

/// The number a phase is stored as.
pub fn phase_number(phase: Phase) -> u8 {
    match phase {
        Phase::Gas => 0,
        Phase::Ice => 1,
        Phase::Dust => 2,
        Phase::IceTotal => 3,
    }
}

/// The accuracy asked of the integration.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Tolerances {
    pub relative: f64,
    /// The abundance below which nothing is resolved.
    pub smallest: f64,
}

/// Everything the cells of a run share.
#[derive(Debug, Clone, PartialEq)]
pub struct RunHeader {
    pub title: String,
    pub engine_version: String,
    /// Name of the numerical kernel chosen for this processor.
    pub kernel: String,
    /// The case with its defaults filled in.
    pub case_text: String,
    pub network_text: String,
    /// The polynomials of reversible reactions; empty if the network names none.
    pub thermo_text: String,
    pub species: Vec<SpeciesInfo>,
    /// Snapshot times, yr.
    pub times_yr: Vec<f64>,
    pub tolerances: Tolerances,
    /// What [`crate::run::record::CellRecord::cautions`] count.
    pub caution_names: Vec<String>,
    /// Remarks made while reading the inputs (defaults taken, warnings).
    pub notes: Vec<String>,
    pub disk: Disk,
}

impl RunHeader {
    /// SHA-256, in hexadecimal, of the resolved inputs: case, network, polynomials, and every condition of every
    /// cell (a table may change while the case that names it does not).
    pub fn input_hash(&self) -> String {
        let mut inputs = Encoder::default();
        inputs.text(&self.case_text);
        inputs.text(&self.network_text);
        encode_disk(&mut inputs, &self.disk);
        inputs.text(&self.thermo_text);
        Sha256::digest(inputs.finish())
            .iter()
            .map(|byte| format!("{byte:02x}"))
            .collect()
    }

    /// The place of a species by name.
    pub fn find(&self, species: &str) -> Option<usize> {
        self.species.iter().position(|info| info.name == species)
    }

    /// Elements in the order in which the species first name them.
    pub fn elements(&self) -> Vec<String> {
        let mut elements: Vec<String> = Vec::new();
        for (element, _) in self.species.iter().flat_map(|species| &species.atoms) {
            if !elements.contains(element) {
                elements.push(element.clone());
            }
        }
        elements
    }

    /// The exact binary form, little-endian.
    pub fn encode(&self) -> Vec<u8> {
        let mut out = Encoder::default();
        out.text(&self.title);
        out.text(&self.engine_version);
        out.text(&self.kernel);
        out.text(&self.case_text);
        out.text(&self.network_text);
        out.text(&self.thermo_text);
        out.count(self.species.len());
        for species in &self.species {
            out.text(&species.name);
            out.byte(phase_number(species.phase));
            out.i32(species.charge);
            out.f64(species.mass);
            out.count(species.atoms.len());
            for (element, atoms) in &species.atoms {
                out.text(element);
                out.u32(*atoms);
            }
        }
        out.f64s(&self.times_yr);
        out.f64(self.tolerances.relative);
        out.f64(self.tolerances.smallest);
        out.texts(&self.caution_names);
        out.texts(&self.notes);
        encode_disk(&mut out, &self.disk);
        out.finish()
    }

    /// The inverse of [`RunHeader::encode`], bit for bit.
    pub fn decode(bytes: &[u8]) -> Result<Self, Malformed> {
        let mut from = Decoder::new(bytes);
        let header = RunHeader {
            title: from.text("the title")?,
            engine_version: from.text("the engine version")?,
            kernel: from.text("the kernel")?,
            case_text: from.text("the case")?,
            network_text: from.text("the network")?,
            thermo_text: from.text("the polynomials")?,
            species: decode_species(&mut from)?,
            times_yr: from.f64s("the snapshot times")?,
            tolerances: Tolerances {
                relative: from.f64("the relative tolerance")?,
                smallest: from.f64("the smallest abundance")?,
            },
            caution_names: from.texts("the names of cautions")?,
            notes: from.texts("the notes")?,
            disk: decode_disk(&mut from)?,
        };
        from.end("the end of the header")?;
        Ok(header)
    }
}

fn decode_species(from: &mut Decoder) -> Result<Vec<SpeciesInfo>, Malformed> {
    let count = from.count(29, "the species")?;
    let mut species = Vec::with_capacity(count);
    for _ in 0..count {
        let name = from.text("the name of a species")?;
        let number = from.byte("the phase of a species")?;
        let (phase, _) = *PHASES.get(usize::from(number)).ok_or(Malformed {
            reading: "the phase of a species",
        })?;
        let charge = from.i32("the charge of a species")?;
        let mass = from.f64("the mass of a species")?;
        let kinds = from.count(12, "the atoms of a species")?;
        let mut atoms = Vec::with_capacity(kinds);
        for _ in 0..kinds {
            atoms.push((from.text("an element")?, from.u32("a number of atoms")?));
        }
        species.push(SpeciesInfo {
            name,
            phase,
            charge,
            mass,
            atoms,
        });
    }
    Ok(species)
}

fn encode_disk(out: &mut Encoder, disk: &Disk) {
    out.count(disk.fields.len());
    for field in &disk.fields {
        out.text(&field.name);
        out.text(&field.spectrum);
        out.byte(u8::from(field.attenuated));
    }
    out.texts(&disk.column_species);
    out.count(disk.cells.len());
    for cell in &disk.cells {
        for number in cell_numbers(cell) {
            out.f64(number);
        }
        out.count(cell.light.len());
        for light in &cell.light {
            out.f64(light.strength);
            out.f64(light.extinction);
            out.f64s(&light.columns);
            out.count(light.shields.len());
            for shield in &light.shields {
                out.byte(u8::from(shield.is_some()));
                out.f64(shield.unwrap_or(0.0));
            }
        }
    }
}

fn decode_disk(from: &mut Decoder) -> Result<Disk, Malformed> {
    let count = from.count(17, "the fields")?;
    let mut fields = Vec::with_capacity(count);
    for _ in 0..count {
        fields.push(FieldKind {
            name: from.text("the name of a field")?,
            spectrum: from.text("the spectrum of a field")?,
            attenuated: from.byte("whether a field is attenuated")? != 0,
        });
    }
    let column_species = from.texts("the species with columns")?;
    let count = from.count(88, "the cells")?;
    let mut cells = Vec::with_capacity(count);
    for _ in 0..count {
        let mut numbers = [0.0; 10];
        for number in &mut numbers {
            *number = from.f64("the conditions of a cell")?;
        }
        let lights = from.count(32, "the light of a cell")?;
        let mut light = Vec::with_capacity(lights);
        for _ in 0..lights {
            light.push(decode_light(from)?);
        }
        cells.push(cell_from(numbers, light));
    }
    Ok(Disk {
        fields,
        column_species,
        cells,
    })
}

fn decode_light(from: &mut Decoder) -> Result<Light, Malformed> {
    let strength = from.f64("the strength of a field")?;
    let extinction = from.f64("the extinction of a field")?;
    let columns = from.f64s("the columns of a cell")?;
    let count = from.count(9, "the shielding factors of a cell")?;
    let mut shields = Vec::with_capacity(count);
    for _ in 0..count {
        let given = from.byte("a shielding factor")? != 0;
        let factor = from.f64("a shielding factor")?;
        shields.push(given.then_some(factor));
    }
    Ok(Light {
        strength,
        extinction,
        columns,
        shields,
    })
}

/// The conditions that are one number per cell, with the name, unit and meaning they are stored
/// under, in the order of [`cell_numbers`].
pub const CELL_NUMBERS: [(&str, &str, &str); 10] = [
    ("radius", "au", "cylindrical radius"),
    ("height", "au", "height above the midplane"),
    ("n_H", "cm-3", "number density of hydrogen nuclei"),
    ("T_gas", "K", "gas temperature"),
    ("T_dust", "K", "dust temperature"),
    ("zeta_cosmic", "s-1", "ionisation rate of H2 by cosmic rays"),
    ("zeta_xray", "s-1", "ionisation rate of H2 by X-rays"),
    (
        "zeta_nuclides",
        "s-1",
        "ionisation rate of H2 by decaying nuclides",
    ),
    (
        "dust_area",
        "cm2",
        "projected dust cross-section per hydrogen nucleus",
    ),
    ("grain_radius", "cm", "grain radius"),
];

/// The numbers of [`CELL_NUMBERS`].
pub fn cell_numbers(cell: &Conditions) -> [f64; 10] {
    [
        cell.radius,
        cell.height,
        cell.n_h,
        cell.t_gas,
        cell.t_dust,
        cell.zeta_cosmic,
        cell.zeta_xray,
        cell.zeta_nuclides,
        cell.dust_area,
        cell.grain_radius,
    ]
}

/// The inverse of [`cell_numbers`].
pub fn cell_from(numbers: [f64; 10], light: Vec<Light>) -> Conditions {
    let [
        radius,
        height,
        n_h,
        t_gas,
        t_dust,
        zeta_cosmic,
        zeta_xray,
        zeta_nuclides,
        dust_area,
        grain_radius,
    ] = numbers;
    Conditions {
        radius,
        height,
        n_h,
        t_gas,
        t_dust,
        light,
        zeta_cosmic,
        zeta_xray,
        zeta_nuclides,
        dust_area,
        grain_radius,
    }
}
