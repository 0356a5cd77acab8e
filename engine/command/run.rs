//! The verb `run`.

use super::{Outcome, wrong};
use crate::case;
use crate::errors::Failure;
use crate::run::signals::StopFlag;
use crate::run::{self, Options, Prepared};
use indicatif::MultiProgress;
use std::path::PathBuf;

#[derive(Debug, clap::Args)]
pub struct Arguments {
    /// The case file (YAML; see cases/README.md)
    case: PathBuf,
    /// Threads to use [default: all processors]
    #[arg(long)]
    threads: Option<usize>,
    /// Where to write the run file, instead of the case's `output`
    #[arg(long)]
    output: Option<PathBuf>,
    /// Start over: drop the finished cells of an earlier run and replace its file
    #[arg(long)]
    fresh: bool,
    /// Run the failed cells of an earlier run again
    #[arg(long, conflicts_with = "fresh")]
    retry: bool,
}

pub fn run(arguments: &Arguments, bars: &MultiProgress) -> Result<Outcome, Failure> {
    let case = case::open(&arguments.case)?;
    let prepared = Prepared::new(&case)?;
    for warning in &prepared.warnings {
        log::debug!("network: {warning}");
    }
    if !prepared.warnings.is_empty() {
        log::info!(
            "{} remarks on the network (`preview --remarks` shows them)",
            prepared.warnings.len()
        );
    }
    for note in &prepared.header.notes {
        log::info!("{note}");
    }
    let threads = match arguments.threads {
        Some(0) => return Err(wrong("--threads", "0", "at least 1")),
        Some(n) => n,
        None => std::thread::available_parallelism().map_or(1, usize::from),
    };
    let output = arguments
        .output
        .clone()
        .unwrap_or_else(|| case.output.clone());
    if output.extension().is_none_or(|e| e != "h5") {
        return Err(wrong(
            "--output",
            format!("`{}`", output.display()),
            "a name ending in .h5",
        ));
    }
    let stop = StopFlag::new();
    stop.listen()
        .map_err(|e| Failure::machine("listening for signals", &output, e))?;
    let options = Options {
        threads,
        fresh: arguments.fresh,
        retry: arguments.retry,
    };
    let ended = run::run(&prepared, &output, &options, bars, &stop);
    if matches!(ended, Err(Failure::Stopped(_))) {
        log::info!("stopped; the same command goes on from the finished cells");
    }
    let summary = ended?;
    if summary.failed > 0 {
        log::warn!(
            "{} of {} cells failed: `look {}` says where and why; `run --retry` tries them again",
            summary.failed,
            summary.cells,
            output.display()
        );
        return Ok(Outcome::SomeCellsFailed);
    }
    log::info!("{} cells in {}", summary.cells, output.display());
    Ok(Outcome::Done)
}
