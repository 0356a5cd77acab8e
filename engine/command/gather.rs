//! The verb `gather`.

use super::{Outcome, check_name, wrong};
use crate::errors::Failure;
use crate::run;
use std::path::PathBuf;

#[derive(Debug, clap::Args)]
pub struct Arguments {
    /// The journal of the run (beside its output, ending in .journal)
    journal: PathBuf,
    /// The run file to write [default: NAME.partial.h5 beside the journal]
    #[arg(long, value_name = "FILE")]
    output: Option<PathBuf>,
}

pub fn gather(arguments: &Arguments) -> Result<Outcome, Failure> {
    let output = arguments
        .output
        .clone()
        .unwrap_or_else(|| arguments.journal.with_extension("partial.h5"));
    if output == arguments.journal {
        return Err(wrong("--output", "the journal itself", "another file"));
    }
    check_name(&output)?;
    let (finished, cells) = run::gather(&arguments.journal, &output)?;
    log::info!("{finished} of {cells} cells in {}", output.display());
    Ok(Outcome::Done)
}
