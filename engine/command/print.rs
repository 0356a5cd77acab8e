//! Owns the look of printed tables, abundances and CSV files.
//!
//! It never chooses what to show.

use super::wrong;
use crate::errors::Failure;
use std::io::{self, Write};
use std::path::Path;

/// A table: heads, and rows of as many cells.
#[derive(Debug, Default)]
pub struct Table {
    pub heads: Vec<String>,
    pub rows: Vec<Vec<String>>,
}

impl Table {
    pub fn new<S: Into<String>>(heads: impl IntoIterator<Item = S>) -> Self {
        Table {
            heads: heads.into_iter().map(Into::into).collect(),
            rows: Vec::new(),
        }
    }

    /// Writes the table to stdout, columns aligned to the right. A reader that went away (`| head`)
    /// is no error.
    pub fn print(&self) -> Result<(), Failure> {
        let all = || std::iter::once(&self.heads).chain(&self.rows);
        let mut widths = vec![0; self.heads.len()];
        for row in all() {
            for (width, cell) in widths.iter_mut().zip(row) {
                *width = (*width).max(cell.chars().count());
            }
        }
        let lines: Vec<String> = all()
            .map(|row| {
                let cells = row
                    .iter()
                    .zip(&widths)
                    .map(|(cell, width)| format!("{cell:>width$}"));
                cells.collect::<Vec<_>>().join("  ")
            })
            .collect();
        out(&lines.join("\n"))
    }

    /// Writes the table as CSV to `path`.
    pub fn csv(&self, path: &Path) -> Result<(), Failure> {
        let file = create(path, "--csv")?;
        let failed = |e: csv::Error| Failure::machine("writing the CSV", path, e);
        let mut writer = csv::Writer::from_writer(file);
        writer.write_record(&self.heads).map_err(failed)?;
        for row in &self.rows {
            writer.write_record(row).map_err(failed)?;
        }
        writer
            .flush()
            .map_err(|e| Failure::machine("writing the CSV", path, e))?;
        log::info!("wrote {}", path.display());
        Ok(())
    }
}

/// Creates a result file the user named with `option`; a folder that is not there is their mistake.
pub fn create(path: &Path, option: &str) -> Result<std::fs::File, Failure> {
    std::fs::File::create(path).map_err(|cause| match cause.kind() {
        io::ErrorKind::StorageFull => Failure::machine("creating it", path, cause),
        _ => wrong(
            option,
            format!("{} ({cause})", path.display()),
            "a file that can be written",
        ),
    })
}

/// One text to stdout with a line end.
pub fn out(text: &str) -> Result<(), Failure> {
    match writeln!(io::stdout().lock(), "{text}") {
        Err(cause) if cause.kind() != io::ErrorKind::BrokenPipe => {
            Err(Failure::machine("printing", Path::new("stdout"), cause))
        }
        _ => Ok(()),
    }
}

/// An abundance for people: `< floor` at or below the smallest that was resolved, `-` where none.
pub fn abundance(value: Option<f64>, floor: f64) -> String {
    match value {
        None => "-".to_string(),
        Some(x) if x <= floor => format!("< {floor:.0e}"),
        Some(x) => format!("{x:.3e}"),
    }
}

/// A number for CSV: shortest digits that read back to the same bits; empty where there is none.
pub fn exact(value: Option<f64>) -> String {
    value.map_or(String::new(), |x| format!("{x:e}"))
}
