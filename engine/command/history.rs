//! The verb `history`.

use super::print::{Table, abundance, exact};
use super::{Outcome, find_cell};
use crate::answers::select;
use crate::errors::Failure;
use crate::store;
use std::path::PathBuf;

#[derive(Debug, clap::Args)]
pub struct Arguments {
    /// A run file
    file: PathBuf,
    /// The cell nearest to this radius and height, au
    #[arg(long, value_name = "R,Z", allow_hyphen_values = true)]
    near: String,
    /// Species separated by commas, such as CO,CO(ads)
    #[arg(long)]
    species: String,
    /// Write all digits as CSV
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
}

pub fn history(arguments: &Arguments) -> Result<Outcome, Failure> {
    let run = store::open(&arguments.file)?;
    let species = select::species(run.header(), &arguments.species)?;
    let cell = find_cell(&run, &arguments.near)?;
    let header = run.header();
    let mut columns = Vec::new();
    for id in &species {
        columns.push(run.history(cell, *id)?);
    }
    let names = species.iter().map(|id| header.species[*id].name.clone());
    let heads: Vec<String> = std::iter::once("time [yr]".to_string())
        .chain(names)
        .collect();
    let (mut shown, mut full) = (Table::new(heads.clone()), Table::new(heads));
    for (i, time) in header.times_yr.iter().enumerate() {
        // NaN is how the file says "not reached".
        let value = |c: &Vec<f64>| Some(c[i]).filter(|x| !x.is_nan());
        let floor = header.tolerances.smallest;
        let row = |first: String, form: &dyn Fn(Option<f64>) -> String| {
            std::iter::once(first)
                .chain(columns.iter().map(|c| form(value(c))))
                .collect()
        };
        shown
            .rows
            .push(row(format!("{time:.4e}"), &|x| abundance(x, floor)));
        full.rows.push(row(format!("{time:e}"), &exact));
    }
    shown.print()?;
    if let Some(path) = &arguments.csv {
        full.csv(path)?;
    }
    Ok(Outcome::Done)
}
