//! Owns the layout of a run file: which datasets stand where, on which axes, with which units.
//!
//! It never opens, closes or renames the file.

use std::path::Path;

use hdf5::{Dataset, File, Group};
use ndarray::ArrayView3;

use super::collected::PerCell;
use super::durable::require_space;
use super::header::{CELL_NUMBERS, PHASES, RunHeader, cell_numbers, phase_number};
use super::put::{
    Kept, Label, Putter, describe, fingerprint, flags, list_attribute, number_attribute,
    text_attribute,
};
use super::{CHUNK, LAYOUT_ATTRIBUTE, LAYOUT_VERSION, RecordSource};
use crate::disk::conditions::Light;
use crate::errors::Failure;
use crate::run::record::{COUNTER_NAMES, CellRecord, CellStatus};

/// Writes one run into a new file.
pub(super) struct Writer<'a> {
    putter: Putter,
    header: &'a RunHeader,
    /// Cells, times, species.
    shape: [usize; 3],
    /// Fingerprints of the blocks of `abundance`.
    blocks: Vec<u32>,
}

/// The dimension scales of the root group.
struct Axes {
    cell: Dataset,
    time: Dataset,
    species: Dataset,
    element: Dataset,
}

impl<'a> Writer<'a> {
    /// A writer into `file` of a run of `shape` (cells, times, species).
    pub(super) fn new(file: File, header: &'a RunHeader, shape: [usize; 3]) -> Self {
        Writer {
            putter: Putter::new(file),
            header,
            shape,
            blocks: Vec::new(),
        }
    }

    /// The written file, what it must hold, and the fingerprints of the blocks of abundances.
    pub(super) fn finish(self) -> (File, Vec<Kept>, Vec<u32>) {
        let (file, kept) = self.putter.finish();
        (file, kept, self.blocks)
    }

    /// Writes everything and hands it to the system; `path` is for the messages.
    pub(super) fn write(&mut self, path: &Path, source: &mut RecordSource) -> Result<(), Failure> {
        let failed = |cause: hdf5::Error| Failure::machine("writing the run file", path, cause);
        let root = self.putter.file.as_group().map_err(failed)?;
        let axes = self.describe_run(&root).map_err(failed)?;
        let abundance = self.create_abundance(&root, &axes).map_err(failed)?;
        let per_cell = self.write_blocks(path, &abundance, source)?;
        self.write_cells(&root, &axes, &per_cell).map_err(failed)?;
        self.write_species(&root, &axes).map_err(failed)?;
        self.write_work(&axes, &per_cell).map_err(failed)?;
        self.write_checks(&axes, &per_cell).map_err(failed)?;
        self.write_provenance(&axes, &per_cell).map_err(failed)?;
        self.putter.file.flush().map_err(failed)
    }

    fn describe_run(&mut self, root: &Group) -> hdf5::Result<Axes> {
        let header = self.header;
        text_attribute(root, "Conventions", "CF-1.8")?;
        text_attribute(root, "title", &header.title)?;
        text_attribute(
            root,
            "source",
            &format!("frostclock {}", header.engine_version),
        )?;
        number_attribute(root, LAYOUT_ATTRIBUTE, LAYOUT_VERSION)?;
        let cells: Vec<u64> = (0..self.shape[0] as u64).collect();
        let cell = label("cell", "1", "place of the cell in the disk, from 0");
        let time = label("time", "yr", "time of the snapshot (Julian years)");
        let species = label("species", "", "name of the species");
        let element = label("element", "", "symbol of the element (`dust`: a grain)");
        let names: Vec<&str> = header
            .species
            .iter()
            .map(|info| info.name.as_str())
            .collect();
        Ok(Axes {
            cell: self.putter.number_scale(root, cell, &cells)?,
            time: self.putter.number_scale(root, time, &header.times_yr)?,
            species: self.putter.text_scale(root, species, &names)?,
            element: self.putter.text_scale(root, element, &header.elements())?,
        })
    }

    fn create_abundance(&self, root: &Group, axes: &Axes) -> hdf5::Result<Dataset> {
        let chunk = [0, 1, 2].map(|axis| CHUNK[axis].min(self.shape[axis]).max(1));
        let dataset = root
            .new_dataset::<f64>()
            .obj_track_times(false)
            .fill_value(f64::NAN)
            .chunk(chunk)
            .shuffle()
            .deflate(1)
            .shape(self.shape)
            .create("abundance")?;
        let scales = [&axes.cell, &axes.time, &axes.species];
        describe(
            &dataset,
            label("abundance", "1", "abundance n(X)/n_H"),
            &scales,
        )?;
        text_attribute(&dataset, "coordinates", "radius height")?;
        list_attribute(&dataset, "_FillValue", &[f64::NAN])?;
        Ok(dataset)
    }

    /// Writes the abundances by whole chunks of cells, and collects the rest of the records.
    fn write_blocks(
        &mut self,
        path: &Path,
        abundance: &Dataset,
        source: &mut RecordSource,
    ) -> Result<PerCell, Failure> {
        let failed = |cause: hdf5::Error| Failure::machine("writing the abundances", path, cause);
        let [cells, times, species] = self.shape;
        let row = times * species;
        let mut per_cell = PerCell::default();
        let mut block = vec![f64::NAN; CHUNK[0] * row];
        for first in (0..cells).step_by(CHUNK[0]) {
            let count = CHUNK[0].min(cells - first);
            let block = &mut block[..count * row];
            block.fill(f64::NAN);
            // HDF5 may take writes that never reach a full disk: look before each block.
            require_space(path, 2 * size_of_val(&*block) as u64)?;
            for cell in first..first + count {
                let record = source(cell)?.unwrap_or_else(|| CellRecord::missing(cell));
                self.check_record(path, cell, &record)?;
                let start = (cell - first) * row;
                block[start..start + record.abundances.len()].copy_from_slice(&record.abundances);
                per_cell.take(record, times, self.header.caution_names.len());
            }
            let shape = (count, times, species);
            let view = ArrayView3::from_shape(shape, &*block)
                .map_err(|cause| Failure::machine("writing the abundances", path, cause))?;
            abundance
                .write_slice(view, (first..first + count, .., ..))
                .map_err(failed)?;
            self.blocks.push(fingerprint(block));
        }
        Ok(per_cell)
    }

    /// A record that does not fit the header is a defect of the engine; better none than nonsense.
    fn check_record(&self, path: &Path, cell: usize, record: &CellRecord) -> Result<(), Failure> {
        let [_, times, species] = self.shape;
        let reached = record.abundances.len() / species.max(1);
        let cautions = record.cautions.len();
        let fits = record.cell == cell
            && reached * species == record.abundances.len()
            && reached <= times
            && record.balance.len() <= times
            && (cautions == 0 || cautions == self.header.caution_names.len());
        if fits {
            return Ok(());
        }
        let cause = format!(
            "the record of cell {cell} (numbered {}, {} abundances, {} balances, {cautions} \
             cautions) does not fit {times} times x {species} species",
            record.cell,
            record.abundances.len(),
            record.balance.len(),
        );
        Err(Failure::machine("writing the abundances", path, cause))
    }

    fn write_cells(&mut self, root: &Group, axes: &Axes, of: &PerCell) -> hdf5::Result<()> {
        let cells = &self.header.disk.cells;
        for (column, (name, units, long_name)) in CELL_NUMBERS.into_iter().enumerate() {
            let values: Vec<f64> = cells
                .iter()
                .map(|cell| cell_numbers(cell)[column])
                .collect();
            let dataset =
                self.putter
                    .numbers(root, label(name, units, long_name), &[&axes.cell], &values)?;
            if name != "radius" && name != "height" {
                text_attribute(&dataset, "coordinates", "radius height")?;
            }
        }
        self.write_light(root, axes)?;
        let status = label("status", "", "how the cell ended");
        let dataset = self
            .putter
            .numbers(root, status, &[&axes.cell], &of.status)?;
        flags(&dataset, &CellStatus::ALL.map(CellStatus::word))?;
        text_attribute(&dataset, "coordinates", "radius height")?;
        Ok(())
    }

    fn write_light(&mut self, root: &Group, axes: &Axes) -> hdf5::Result<()> {
        let disk = &self.header.disk;
        for (index, field) in disk.fields.iter().enumerate() {
            let name = &field.name;
            let before = if field.attenuated { "after" } else { "before" };
            let meaning = format!(
                "strength of the field `{name}` {before} extinction, in units of the Draine field"
            );
            self.put_light(root, axes, index, ("UV", "1", &meaning), |light| {
                light.strength
            })?;
            let meaning = format!("visual extinction towards the source of the field `{name}`");
            self.put_light(root, axes, index, ("AV", "mag", &meaning), |light| {
                light.extinction
            })?;
            for (column, species) in disk.column_species.iter().enumerate() {
                let meaning = format!("column of {species} towards the source of `{name}`");
                let stem = format!("N_{species}");
                let value = |light: &Light| light.columns.get(column).copied().unwrap_or(f64::NAN);
                self.put_light(root, axes, index, (&stem, "cm-2", &meaning), value)?;
                let shield = |light: &Light| light.shields.get(column).copied().flatten();
                let mut lights = disk.cells.iter().filter_map(|cell| cell.light.get(index));
                if lights.any(|light| shield(light).is_some()) {
                    let meaning =
                        format!("shielding factor of {species} in `{name}`, where given outright");
                    let stem = format!("shield_{species}");
                    let value = |light: &Light| shield(light).unwrap_or(f64::NAN);
                    self.put_light(root, axes, index, (&stem, "1", &meaning), value)?;
                }
            }
        }
        Ok(())
    }

    /// One number of one field, for all cells; NaN where a cell lacks it.
    fn put_light(
        &mut self,
        root: &Group,
        axes: &Axes,
        field: usize,
        (stem, units, long_name): (&str, &str, &str),
        value: impl Fn(&Light) -> f64,
    ) -> hdf5::Result<()> {
        let disk = &self.header.disk;
        let name = format!("{stem}_{}", disk.fields[field].name);
        let values: Vec<f64> = disk
            .cells
            .iter()
            .map(|cell| cell.light.get(field).map_or(f64::NAN, &value))
            .collect();
        let dataset =
            self.putter
                .numbers(root, label(&name, units, long_name), &[&axes.cell], &values)?;
        text_attribute(&dataset, "coordinates", "radius height")?;
        Ok(())
    }

    fn write_species(&mut self, root: &Group, axes: &Axes) -> hdf5::Result<()> {
        let species = &self.header.species;
        let charges: Vec<i32> = species.iter().map(|info| info.charge).collect();
        let masses: Vec<f64> = species.iter().map(|info| info.mass).collect();
        let phases: Vec<i8> = species
            .iter()
            .map(|info| phase_number(info.phase) as i8)
            .collect();
        let on = [&axes.species];
        let charge = label(
            "species_charge",
            "1",
            "charge in units of the elementary charge",
        );
        self.putter.numbers(root, charge, &on, &charges)?;
        let mass = label(
            "species_mass",
            "u",
            "mass of one particle (0 for dust and sums)",
        );
        self.putter.numbers(root, mass, &on, &masses)?;
        let phase = label("species_phase", "", "where the species lives");
        let dataset = self.putter.numbers(root, phase, &on, &phases)?;
        flags(&dataset, &PHASES.map(|(_, word)| word))?;
        let elements = self.header.elements();
        let mut atoms = vec![0i32; species.len() * elements.len()];
        for (row, info) in species.iter().enumerate() {
            for (symbol, count) in &info.atoms {
                if let Some(column) = elements.iter().position(|element| element == symbol) {
                    atoms[row * elements.len() + column] += *count as i32;
                }
            }
        }
        let composition = label("atoms", "1", "atoms of each element in one particle");
        self.putter
            .numbers(root, composition, &[&axes.species, &axes.element], &atoms)?;
        Ok(())
    }

    fn write_work(&mut self, axes: &Axes, of: &PerCell) -> hdf5::Result<()> {
        let group = self.putter.group("work")?;
        for (name, counts) in COUNTER_NAMES.into_iter().zip(&of.counters) {
            let long_name = format!("{} of the integration", name.replace('_', " "));
            self.putter
                .numbers(&group, label(name, "1", &long_name), &[&axes.cell], counts)?;
        }
        let seconds = label("seconds", "s", "wall-clock time of the integration");
        let dataset = self
            .putter
            .numbers(&group, seconds, &[&axes.cell], &of.seconds)?;
        text_attribute(
            &dataset,
            "comment",
            "not reproducible: differs between identical runs",
        )?;
        Ok(())
    }

    fn write_checks(&mut self, axes: &Axes, of: &PerCell) -> hdf5::Result<()> {
        let group = self.putter.group("checks")?;
        for ((name, long_name), drifts) in BALANCE_LABELS.into_iter().zip(&of.balance) {
            let on = [&axes.cell, &axes.time];
            let dataset = self
                .putter
                .numbers(&group, label(name, "1", long_name), &on, drifts)?;
            list_attribute(&dataset, "_FillValue", &[f64::NAN])?;
        }
        let caution = label("caution", "", "what is counted");
        let names = self
            .putter
            .text_scale(&group, caution, &self.header.caution_names)?;
        let cautions = label("cautions", "1", "how often a caution applied in the cell");
        self.putter
            .numbers(&group, cautions, &[&axes.cell, &names], &of.cautions)?;
        let failed_at = label("failed_at", "s", "time at which a failed cell gave up");
        let dataset = self
            .putter
            .numbers(&group, failed_at, &[&axes.cell], &of.failed_at)?;
        list_attribute(&dataset, "_FillValue", &[f64::NAN])?;
        let reason = label("reason", "", "why a failed cell gave up; empty otherwise");
        self.putter
            .texts(&group, reason, Some(&axes.cell), &of.reason)?;
        Ok(())
    }

    fn write_provenance(&mut self, axes: &Axes, of: &PerCell) -> hdf5::Result<()> {
        let header = self.header;
        let group = self.putter.group("provenance")?;
        text_attribute(&group, "engine_version", &header.engine_version)?;
        text_attribute(&group, "kernel", &header.kernel)?;
        text_attribute(&group, "input_hash", &header.input_hash())?;
        number_attribute(&group, "relative_tolerance", header.tolerances.relative)?;
        number_attribute(&group, "smallest_abundance", header.tolerances.smallest)?;
        let finished = of
            .status
            .iter()
            .filter(|status| **status != CellStatus::Missing as i8);
        number_attribute(&group, "cells_run", finished.count() as u64)?;
        number_attribute(&group, "cells", axes.cell.size() as u64)?;
        let case = label("case", "", "the case with its defaults filled in (YAML)");
        self.putter
            .texts(&group, case, None, &[&header.case_text])?;
        let network = label("network", "", "the network file (YAML)");
        self.putter
            .texts(&group, network, None, &[&header.network_text])?;
        if !header.thermo_text.is_empty() {
            let thermo = label(
                "thermo",
                "",
                "the polynomials of reversible reactions (YAML)",
            );
            self.putter
                .texts(&group, thermo, None, &[&header.thermo_text])?;
        }
        let note = label("note", "", "remark made while reading the inputs");
        self.putter.text_scale(&group, note, &header.notes)?;
        let fields = &header.disk.fields;
        let names: Vec<&str> = fields.iter().map(|field| field.name.as_str()).collect();
        let field = label("field", "", "name of a radiation field");
        let scale = self.putter.text_scale(&group, field, &names)?;
        let spectra: Vec<&str> = fields.iter().map(|field| field.spectrum.as_str()).collect();
        let spectrum = label("field_spectrum", "", "spectrum of the network it has");
        self.putter
            .texts(&group, spectrum, Some(&scale), &spectra)?;
        let attenuated: Vec<i8> = fields
            .iter()
            .map(|field| i8::from(field.attenuated))
            .collect();
        let meaning = label(
            "field_attenuated",
            "",
            "whether its strength includes extinction",
        );
        let dataset = self
            .putter
            .numbers(&group, meaning, &[&scale], &attenuated)?;
        flags(&dataset, &["no", "yes"])?;
        let columns = label("column_species", "", "species whose columns shield");
        self.putter
            .text_scale(&group, columns, &header.disk.column_species)?;
        Ok(())
    }
}

/// Names and meanings of [`Balance::numbers`].
pub const BALANCE_LABELS: [(&str, &str); 4] = [
    (
        "element_drift",
        "worst drift of an element total, relative to it",
    ),
    (
        "charge_drift",
        "drift of the charge, relative to the sum of |charge| x abundance",
    ),
    (
        "dust_drift",
        "drift of the number of grains, relative to it",
    ),
    (
        "ice_mismatch",
        "mismatch of the ice total and the sum of its parts, relative to it",
    ),
];

fn label<'a>(name: &'a str, units: &'a str, long_name: &'a str) -> Label<'a> {
    Label {
        name,
        units,
        long_name,
    }
}
