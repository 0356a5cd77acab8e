//! The verb `at`.

use super::print::{Table, abundance, exact};
use super::{Outcome, find_cell, wrong};
use crate::answers::interpolate::{self, Place};
use crate::answers::select;
use crate::errors::Failure;
use crate::network::model::Phase;
use crate::store::{self, RunFile};
use crate::units::{Dimension, YEAR, parse};
use std::path::PathBuf;

#[derive(Debug, clap::Args)]
pub struct Arguments {
    /// A run file
    file: PathBuf,
    /// When, such as "1 Myr"
    #[arg(long)]
    time: String,
    /// One cell: the nearest to this radius and height, au [default: all cells]
    #[arg(long, value_name = "R,Z", allow_hyphen_values = true)]
    near: Option<String>,
    /// Species separated by commas [default: all in one cell, the main carriers in all cells]
    #[arg(long)]
    species: Option<String>,
    /// Write all digits as CSV; without --species all species
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
}

/// How many species the table of one cell and of all cells show unless told.
const SHOWN_IN_ONE: usize = 40;
const SHOWN_IN_ALL: usize = 8;

pub fn at(arguments: &Arguments) -> Result<Outcome, Failure> {
    let run = store::open(&arguments.file)?;
    let time = parse_time(&arguments.time)?;
    let times = &run.header().times_yr;
    let place = interpolate::place(times, time).ok_or_else(|| {
        let (first, last) = (times.first().copied(), times.last().copied());
        let expected = format!(
            "a time within the run, {} yr to {:e} yr",
            first.unwrap_or(0.0),
            last.unwrap_or(0.0)
        );
        wrong("--time", format!("`{}`", arguments.time), expected)
    })?;
    match place {
        Place::Snapshot(i) => log::info!("snapshot {i} at {:e} yr", times[i]),
        Place::After(i) => log::info!(
            "interpolated between the snapshots at {:e} and {:e} yr; such values need not close \
             element sums",
            times[i],
            times[i + 1]
        ),
    }
    let wanted = arguments
        .species
        .as_deref()
        .map(|l| select::species(run.header(), l))
        .transpose()?;
    match &arguments.near {
        Some(near) => one_cell(&run, find_cell(&run, near)?, time, wanted, arguments)?,
        None => all_cells(&run, time, wanted, arguments)?,
    }
    Ok(Outcome::Done)
}

fn parse_time(text: &str) -> Result<f64, Failure> {
    let seconds = parse(text, Dimension::Time)
        .map_err(|e| wrong("--time", e.found.clone(), e.expected.clone()))?;
    Ok(seconds / YEAR)
}

/// Abundance of every species of a cell at `time`; None where the cell did not get there.
fn composition(run: &RunFile, cell: usize, time: f64) -> Result<Vec<Option<f64>>, Failure> {
    let states = run.cell(cell)?;
    let header = run.header();
    let of = |id: usize| {
        let values: Vec<f64> = states.iter().map(|s| s[id]).collect();
        interpolate::at(&header.times_yr, &values, header.tolerances.smallest, time)
    };
    Ok((0..header.species.len()).map(of).collect())
}

fn one_cell(
    run: &RunFile,
    cell: usize,
    time: f64,
    wanted: Option<Vec<usize>>,
    arguments: &Arguments,
) -> Result<(), Failure> {
    let header = run.header();
    let x = composition(run, cell, time)?;
    let mut full = Table::new(["species", "abundance per H"]);
    let listed = wanted.clone().unwrap_or_else(|| (0..x.len()).collect());
    for id in &listed {
        full.rows
            .push(vec![header.species[*id].name.clone(), exact(x[*id])]);
    }
    let shown = wanted.unwrap_or_else(|| {
        let mut order = listed;
        order.sort_by(|a, b| x[*b].unwrap_or(-1.0).total_cmp(&x[*a].unwrap_or(-1.0)));
        order.truncate(SHOWN_IN_ONE);
        order
    });
    let mut table = Table::new(["species", "abundance per H", "density [cm^-3]"]);
    let (n_h, floor) = (header.disk.cells[cell].n_h, header.tolerances.smallest);
    for id in shown {
        let density = x[id]
            .filter(|v| *v > floor)
            .map_or("-".into(), |v| format!("{:.3e}", v * n_h));
        table.rows.push(vec![
            header.species[id].name.clone(),
            abundance(x[id], floor),
            density,
        ]);
    }
    table.print()?;
    arguments.csv.as_ref().map_or(Ok(()), |path| full.csv(path))
}

fn all_cells(
    run: &RunFile,
    time: f64,
    wanted: Option<Vec<usize>>,
    arguments: &Arguments,
) -> Result<(), Failure> {
    let header = run.header();
    let cells = &header.disk.cells;
    let mut states = Vec::with_capacity(cells.len());
    for cell in 0..cells.len() {
        states.push(composition(run, cell, time)?);
    }
    let shown = wanted
        .clone()
        .unwrap_or_else(|| main_carriers(run, &states));
    let listed = wanted.unwrap_or_else(|| (0..header.species.len()).collect());
    let heads = |ids: &[usize]| {
        let names = ids.iter().map(|id| header.species[*id].name.clone());
        let fixed = ["cell", "radius [au]", "height [au]", "status"].map(String::from);
        fixed.into_iter().chain(names).collect::<Vec<_>>()
    };
    let (mut table, mut full) = (Table::new(heads(&shown)), Table::new(heads(&listed)));
    for (cell, (c, x)) in cells.iter().zip(&states).enumerate() {
        let status = run.statuses()[cell].word().to_string();
        let short = [
            cell.to_string(),
            format!("{:.3}", c.radius),
            format!("{:.3}", c.height),
        ];
        let long = [
            cell.to_string(),
            format!("{:e}", c.radius),
            format!("{:e}", c.height),
        ];
        let floor = header.tolerances.smallest;
        let row = |first: [String; 3], rest: Vec<String>| {
            first
                .into_iter()
                .chain([status.clone()])
                .chain(rest)
                .collect()
        };
        table.rows.push(row(
            short,
            shown.iter().map(|id| abundance(x[*id], floor)).collect(),
        ));
        full.rows
            .push(row(long, listed.iter().map(|id| exact(x[*id])).collect()));
    }
    table.print()?;
    arguments.csv.as_ref().map_or(Ok(()), |path| full.csv(path))
}

/// The species with the largest sums over all cells, without H, H2, He, grains and the ice total.
fn main_carriers(run: &RunFile, states: &[Vec<Option<f64>>]) -> Vec<usize> {
    let species = &run.header().species;
    let total = |id: usize| states.iter().filter_map(|x| x[id]).sum::<f64>();
    let carries = |id: &usize| {
        let s = &species[*id];
        matches!(s.phase, Phase::Gas | Phase::Ice)
            && s.atoms
                .iter()
                .any(|(element, _)| element != "H" && element != "He")
    };
    let mut ids: Vec<usize> = (0..species.len()).filter(carries).collect();
    ids.sort_by(|a, b| total(*b).total_cmp(&total(*a)));
    ids.truncate(SHOWN_IN_ALL);
    ids
}
