//! Owns the command line: arguments in, library call, printed result, exit status.
//!
//! It never computes: each verb's file turns arguments into one library call and its result into
//! text. Messages go to stderr, results to stdout.

mod at;
mod gather;
mod history;
mod look;
mod network;
mod preview;
mod print;
mod run;

use crate::errors::{Failure, InputError};
use crate::run::record::CellStatus;
use clap::{Parser, Subcommand};
use indicatif::MultiProgress;
use std::io::Write;
use std::path::Path;

/// Gas and ice of planet-forming disks at the age you ask for.
#[derive(Debug, Parser)]
#[command(name = "frostclock", version, about, after_help = EXIT_STATUS)]
struct Arguments {
    #[command(subcommand)]
    verb: Verb,
    /// Only warnings and errors on stderr
    #[arg(long, short, global = true)]
    quiet: bool,
}

const EXIT_STATUS: &str = "Exit status: 0 done, 1 finished but some cells failed, 2 the input is \
wrong, 3 the machine failed (disk full, file unreadable), 130 or 143 stopped by a signal.";

#[derive(Debug, Subcommand)]
enum Verb {
    /// Show a case's cells, start and cautions before anything runs
    Preview(preview::Arguments),
    /// Integrate every cell of a case; started again, go on from the finished cells
    Run(run::Arguments),
    /// Make a readable run file from the journal of a run under way
    Gather(gather::Arguments),
    /// Summarise a run file
    Look(look::Arguments),
    /// Abundances of chosen species in one cell over time
    History(history::Arguments),
    /// Abundances at any time, in one cell or in all
    At(at::Arguments),
    /// Look at a reaction network: check it, list its coefficients, compare it with another
    #[command(subcommand)]
    Network(network::Verb),
}

/// Runs the command with the process's arguments; the exit status is decided here and nowhere else.
pub fn main() -> u8 {
    let arguments = match Arguments::try_parse() {
        Ok(arguments) => arguments,
        Err(error) => {
            // Help and version come this way too, with exit code 0.
            let _ = error.print();
            return if error.exit_code() == 0 { 0 } else { 2 };
        }
    };
    let bars = start_log(arguments.quiet);
    let done = match arguments.verb {
        Verb::Preview(a) => preview::preview(&a),
        Verb::Run(a) => run::run(&a, &bars),
        Verb::Gather(a) => gather::gather(&a),
        Verb::Look(a) => look::look(&a),
        Verb::History(a) => history::history(&a),
        Verb::At(a) => at::at(&a),
        Verb::Network(a) => network::network(&a),
    };
    match done {
        Ok(Outcome::Done) => 0,
        Ok(Outcome::SomeCellsFailed) => 1,
        Ok(Outcome::InputWrong) => 2,
        Err(failure) => {
            // Nobody may be reading: no reason to panic as `eprintln!` would.
            let _ = writeln!(std::io::stderr(), "frostclock: {failure}");
            failure.exit_code()
        }
    }
}

/// How a command that did its work ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Outcome {
    Done,
    SomeCellsFailed,
    /// The input is wrong, and what it is has been printed as the result.
    InputWrong,
}

/// Log lines to stderr, level by `RUST_LOG` or `--quiet`, without tearing a progress bar.
fn start_log(quiet: bool) -> MultiProgress {
    let level = if quiet { "warn" } else { "info" };
    let mut builder = env_logger::Builder::from_env(
        env_logger::Env::default().default_filter_or(format!("{level},diffsol=warn")),
    );
    let logger = builder
        .format(|out, record| match record.level() {
            log::Level::Info => writeln!(out, "{}", record.args()),
            level => writeln!(out, "{}: {}", level.as_str().to_lowercase(), record.args()),
        })
        .build();
    let level = logger.filter();
    let bars = MultiProgress::new();
    let bridge = indicatif_log_bridge::LogWrapper::new(bars.clone(), logger);
    // A second logger can only be there when the library's user set one: theirs stays.
    if bridge.try_init().is_ok() {
        log::set_max_level(level);
    }
    bars
}

/// A wrong command-line argument.
fn wrong(option: &str, found: impl Into<String>, expected: impl Into<String>) -> Failure {
    InputError::new(Path::new(""), None, option, found, expected).into()
}

/// Refuses a run file whose name would not say what it is.
fn check_name(output: &Path) -> Result<(), Failure> {
    if output.extension().is_some_and(|end| end == "h5") {
        return Ok(());
    }
    Err(wrong(
        "--output",
        format!("`{}`", output.display()),
        "a name ending in .h5",
    ))
}

/// `R,Z` in au.
fn parse_near(text: &str) -> Result<(f64, f64), Failure> {
    let numbers: Option<Vec<f64>> = text.split(',').map(|t| t.trim().parse().ok()).collect();
    match numbers.as_deref() {
        Some(&[r, z]) if r.is_finite() && z.is_finite() => Ok((r, z)),
        _ => Err(wrong(
            "--near",
            format!("`{text}`"),
            "radius and height in au, such as 30,2.5",
        )),
    }
}

/// The cell nearest to `near`, said on stderr so that nobody takes it for another.
fn find_cell(run: &crate::store::RunFile, near: &str) -> Result<usize, Failure> {
    let (r, z) = parse_near(near)?;
    let cells = &run.header().disk.cells;
    let cell = crate::answers::select::nearest(cells, r, z)
        .ok_or_else(|| wrong("--near", "a run without cells", "a run with cells"))?;
    let c = &cells[cell];
    log::info!(
        "cell {cell} at R = {:.4} au, z = {:.4} au: n_H = {:.3e} cm^-3, T_gas = {:.1} K, T_dust = {:.1} K",
        c.radius,
        c.height,
        c.n_h,
        c.t_gas,
        c.t_dust
    );
    let status = run.statuses()[cell];
    match status {
        CellStatus::Done => {}
        CellStatus::Failed => log::warn!("this cell failed: {}", run.reasons()[cell]),
        CellStatus::Missing => log::warn!("this cell has not been run"),
    }
    Ok(cell)
}
