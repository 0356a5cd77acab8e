//! The verb `look`.

use super::{Outcome, print};
use crate::answers::overview;
use crate::errors::Failure;
use crate::store;
use std::path::PathBuf;

#[derive(Debug, clap::Args)]
pub struct Arguments {
    /// A run file
    file: PathBuf,
    /// Print the case with all defaults filled in, as a case file
    #[arg(long)]
    case: bool,
    /// Print the network the run used
    #[arg(long)]
    network: bool,
    /// List the species
    #[arg(long)]
    species: bool,
}

/// How many failed cells are listed.
const FAILED_SHOWN: usize = 20;

pub fn look(arguments: &Arguments) -> Result<Outcome, Failure> {
    let run = store::open(&arguments.file)?;
    let header = run.header();
    if arguments.case {
        print::out(header.case_text.trim_end())?;
    }
    if arguments.network {
        print::out(header.network_text.trim_end())?;
    }
    if arguments.species {
        let names: Vec<&str> = header.species.iter().map(|s| s.name.as_str()).collect();
        print::out(&names.join("\n"))?;
    }
    if arguments.case || arguments.network || arguments.species {
        return Ok(Outcome::Done);
    }
    let lines: Vec<String> = overview::overview(&run)?
        .into_iter()
        .map(|(label, text)| format!("{label:<12} {text}").trim_end().to_string())
        .collect();
    print::out(&lines.join("\n"))?;
    for note in &header.notes {
        print::out(&format!("{:<12} {note}", "note"))?;
    }
    let failed = overview::failed(&run);
    for (cell, when, why) in failed.iter().take(FAILED_SHOWN) {
        let years = when / crate::units::YEAR;
        print::out(&format!(
            "{:<12} cell {cell} at {years:.3e} yr: {why}",
            "failed"
        ))?;
    }
    if failed.len() > FAILED_SHOWN {
        print::out(&format!(
            "{:<12} and {} more",
            "failed",
            failed.len() - FAILED_SHOWN
        ))?;
    }
    Ok(Outcome::Done)
}
