//! The verb `run`.

use super::print::counted;
use super::{Outcome, check_name, wrong};
use crate::case;
use crate::errors::Failure;
use crate::run::signals::StopFlag;
use crate::run::{self, Options, Prepared};
use indicatif::MultiProgress;
use std::path::PathBuf;
use std::time::Duration;

#[derive(Debug, clap::Args)]
pub struct Arguments {
    /// The case file (YAML; see cases/README.md)
    case: PathBuf,
    /// Threads to use [default: all processors]
    #[arg(long, value_name = "N", allow_hyphen_values = true)]
    threads: Option<String>,
    /// Where to write the run file, instead of the case's `output`
    #[arg(long, value_name = "FILE")]
    output: Option<PathBuf>,
    /// Start over: drop the finished cells of an earlier run and replace its file
    #[arg(long)]
    fresh: bool,
    /// Run the failed cells of an earlier run again
    #[arg(long, conflicts_with = "fresh")]
    retry: bool,
}

pub fn run(arguments: &Arguments, bars: &MultiProgress) -> Result<Outcome, Failure> {
    let threads = threads(arguments.threads.as_deref())?;
    if let Some(output) = &arguments.output {
        check_name(output)?;
    }
    let case = case::open(&arguments.case)?;
    let output = arguments
        .output
        .clone()
        .unwrap_or_else(|| case.output.clone());
    let prepared = Prepared::new(&case)?;
    for warning in &prepared.warnings {
        log::debug!("network: {warning}");
    }
    if !prepared.warnings.is_empty() {
        let remarks = counted(prepared.warnings.len(), "remark");
        log::info!("{remarks} on the network (`preview --remarks` shows them)");
    }
    for note in &prepared.header.notes {
        log::info!("{note}");
    }
    let stop = StopFlag::new();
    stop.listen()
        .map_err(|e| Failure::machine("listening for signals", &output, e))?;
    say_when_stopping(&stop);
    let options = Options {
        threads,
        fresh: arguments.fresh,
        retry: arguments.retry,
    };
    let ended = run::run(&prepared, &output, &options, bars, &stop);
    if matches!(ended, Err(Failure::Stopped(_))) {
        let how = if arguments.fresh {
            "without --fresh it"
        } else {
            "the same command"
        };
        log::info!("stopped; {how} goes on from the finished cells");
    }
    let summary = ended?;
    if summary.failed > 0 {
        log::warn!(
            "{} of {} failed: `look {}` says where and why; `run --retry` tries them again",
            summary.failed,
            counted(summary.cells, "cell"),
            output.display()
        );
        return Ok(Outcome::SomeCellsFailed);
    }
    log::info!("{} in {}", counted(summary.cells, "cell"), output.display());
    Ok(Outcome::Done)
}

/// A cell under way may take a while to end: say that the signal was heard.
fn say_when_stopping(stop: &StopFlag) {
    let stop = stop.clone();
    // Never joined: it ends with the process.
    std::thread::spawn(move || {
        while stop.signal().is_none() {
            std::thread::sleep(Duration::from_millis(100));
        }
        log::info!("stopping after the cells under way; a second signal ends it at once");
    });
}

fn threads(given: Option<&str>) -> Result<usize, Failure> {
    let Some(text) = given else {
        return Ok(std::thread::available_parallelism().map_or(1, usize::from));
    };
    match text.parse() {
        Ok(count) if count > 0 => Ok(count),
        _ => Err(wrong(
            "--threads",
            format!("`{text}`"),
            "a whole number, 1 or more",
        )),
    }
}
