//! The verb `network import`.

use crate::command::print::{self, Table, counted};
use crate::command::{Outcome, wrong};
use crate::errors::{Failure, InputError, in_words};
use crate::import::{self, Import, Rejected};
use std::fs;
use std::io::{self, ErrorKind};
use std::path::{Path, PathBuf};

#[derive(Debug, clap::Args)]
pub struct Arguments {
    /// The rate table
    table: PathBuf,
    /// What its columns and labels mean
    #[arg(long, value_name = "MAPPING.yaml")]
    map: PathBuf,
    /// The network file to write
    #[arg(long, value_name = "NEW.yaml")]
    output: PathBuf,
    /// Write the rows that are not mapped here rather than to stdout
    #[arg(long, value_name = "FILE.csv")]
    rejected: Option<PathBuf>,
    /// Replace files that exist
    #[arg(long)]
    force: bool,
    /// Write nothing and exit with 2 if a row cannot be mapped (rows the mapping leaves out may)
    #[arg(long)]
    strict: bool,
}

pub fn import(arguments: &Arguments) -> Result<Outcome, Failure> {
    check_outputs(arguments)?;
    let mapping = read(&arguments.map, "a mapping file")?;
    let mapping = String::from_utf8(mapping).map_err(|error| {
        let before = &error.as_bytes()[..error.utf8_error().valid_up_to()];
        let line = 1 + before.iter().filter(|byte| **byte == b'\n').count();
        let expected = "UTF-8";
        InputError::new(
            &arguments.map,
            Some(line),
            "text of the mapping",
            "bytes that are no UTF-8",
            expected,
        )
    })?;
    let table = read(&arguments.table, "a rate table")?;
    let made = import::import(&arguments.map, &mapping, &arguments.table, &table)
        .map_err(Failure::Input)?;
    list(&made.rejected, arguments.rejected.as_deref())?;
    let unwanted = made.rejected.iter().filter(|row| !row.wanted).count();
    if made.text.is_empty() {
        let found = format!("none of {} that could be mapped", counted(made.rows, "row"));
        return Err(refused(
            arguments,
            found,
            "rows that fit the mapping (each is listed with its reason)",
        ));
    }
    if arguments.strict && unwanted > 0 {
        let found = format!("{} that cannot be mapped", counted(unwanted, "row"));
        return Err(refused(arguments, found, "none, with --strict"));
    }
    write(&arguments.output, &made.text)?;
    summarise(&made, arguments);
    Ok(Outcome::Done)
}

fn refused(arguments: &Arguments, found: String, expected: &str) -> Failure {
    InputError::new(&arguments.table, None, "rows of the table", found, expected).into()
}

/// Nothing that exists is replaced unless told, and never what is read.
fn check_outputs(arguments: &Arguments) -> Result<(), Failure> {
    let named = arguments
        .output
        .extension()
        .is_some_and(|end| end == "yaml");
    if !named {
        let found = format!("`{}`", arguments.output.display());
        return Err(wrong("--output", found, "a name ending in .yaml"));
    }
    // A pipe or terminal (`/dev/stdout`) needs no name.
    let unfit = |path: &&PathBuf| {
        path.extension().is_none_or(|end| end != "csv")
            && !fs::metadata(path).is_ok_and(|data| !data.is_file() && !data.is_dir())
    };
    if let Some(path) = arguments.rejected.as_ref().filter(unfit) {
        let found = format!("`{}`", path.display());
        return Err(wrong("--rejected", found, "a name ending in .csv"));
    }
    let outputs = [
        ("--output", Some(&arguments.output)),
        ("--rejected", arguments.rejected.as_ref()),
    ];
    for (option, path) in outputs {
        let Some(path) = path else { continue };
        for input in [&arguments.table, &arguments.map] {
            let same = path == input
                || matches!((fs::canonicalize(path), fs::canonicalize(input)), (Ok(a), Ok(b)) if a == b);
            if same {
                let found = format!("`{}`, which is read", path.display());
                return Err(wrong(option, found, "another file"));
            }
        }
        let holds = fs::metadata(path).is_ok_and(|data| data.is_file() || data.is_dir());
        if holds && !arguments.force {
            let found = format!("`{}`, which exists", path.display());
            return Err(wrong(
                option,
                found,
                "a new file (or --force to replace it)",
            ));
        }
    }
    Ok(())
}

fn read(path: &Path, what: &str) -> Result<Vec<u8>, Failure> {
    fs::read(path).map_err(|cause| match cause.kind() {
        ErrorKind::NotFound
        | ErrorKind::IsADirectory
        | ErrorKind::NotADirectory
        | ErrorKind::PermissionDenied => {
            let found = in_words(&cause).to_lowercase();
            InputError::new(Path::new(""), None, path.display().to_string(), found, what).into()
        }
        _ => Failure::machine(format!("reading {what}"), path, cause),
    })
}

/// Writes beside the target first: a full disk must not leave half a network under its name.
fn write(path: &Path, text: &str) -> Result<(), Failure> {
    let mut part = path.as_os_str().to_os_string();
    part.push(".part");
    let part = PathBuf::from(part);
    let done = fs::write(&part, text).and_then(|()| fs::rename(&part, path));
    done.map_err(|cause: io::Error| {
        let _ = fs::remove_file(&part);
        match cause.kind() {
            ErrorKind::StorageFull => Failure::machine("writing it", path, cause),
            _ => {
                let found = format!("`{}` ({})", path.display(), in_words(&cause).to_lowercase());
                wrong("--output", found, "a file that can be written")
            }
        }
    })
}

/// The rows that are not in the network: to a CSV file, else to stdout.
fn list(rejected: &[Rejected], file: Option<&Path>) -> Result<(), Failure> {
    if let Some(path) = file {
        let mut table = Table::new(["line", "text", "reason"]);
        table.rows = (rejected.iter())
            .map(|row| vec![row.line.to_string(), row.text.clone(), row.reason.clone()])
            .collect();
        return table.csv(path);
    }
    if rejected.is_empty() {
        return Ok(());
    }
    let lines: Vec<String> = (rejected.iter())
        .map(|row| {
            format!(
                "line {}: {}\n    {}",
                row.line,
                row.reason,
                shown(&row.text)
            )
        })
        .collect();
    print::out(&lines.join("\n"))
}

/// A row without what could disturb a terminal.
fn shown(text: &str) -> String {
    let sign = |c: char| if c.is_control() { ' ' } else { c };
    text.trim().chars().map(sign).collect()
}

fn summarise(made: &Import, arguments: &Arguments) {
    let groups: Vec<String> = made
        .entries
        .iter()
        .map(|(group, count)| format!("{} {count}", group.key()))
        .collect();
    let entries: usize = made.entries.iter().map(|(_, count)| count).sum();
    log::info!(
        "{} read, {} mapped to {entries} {} of {} species: {}",
        counted(made.rows, "row"),
        made.mapped,
        if entries == 1 { "entry" } else { "entries" },
        made.species,
        groups.join(", ")
    );
    if !made.rejected.is_empty() {
        let wanted = made.rejected.iter().filter(|row| row.wanted).count();
        let place = match &arguments.rejected {
            Some(path) => path.display().to_string(),
            None => "stdout".to_string(),
        };
        let of_these = if wanted > 0 {
            format!(" ({wanted} as the mapping says)")
        } else {
            String::new()
        };
        log::info!(
            "{} not mapped{of_these}, listed in {place}",
            counted(made.rejected.len(), "row")
        );
    }
    if made.remarks > 0 {
        log::info!("{} on the network", counted(made.remarks, "remark"));
    }
    log::info!("wrote {}", arguments.output.display());
}
