//! Owns the look of printed tables, abundances and CSV files.
//!
//! It never chooses what to show.

use super::wrong;
use crate::errors::{Failure, in_words};
use std::io::{self, Write};
use std::path::Path;

/// A table: heads, and rows of as many cells.
#[derive(Debug, Default)]
pub struct Table {
    pub heads: Vec<String>,
    pub rows: Vec<Vec<String>>,
    /// Columns of words, which are aligned to the left.
    pub words: Vec<usize>,
}

impl Table {
    pub fn new<S: Into<String>>(heads: impl IntoIterator<Item = S>) -> Self {
        Table {
            heads: heads.into_iter().map(Into::into).collect(),
            rows: Vec::new(),
            words: Vec::new(),
        }
    }

    /// Writes the table to stdout, columns of numbers aligned to the right. A reader that went away (`| head`)
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
                let cells =
                    row.iter()
                        .zip(&widths)
                        .enumerate()
                        .map(|(i, (cell, width))| match self.words.contains(&i) {
                            true => format!("{cell:<width$}"),
                            false => format!("{cell:>width$}"),
                        });
                let line = cells.collect::<Vec<_>>().join("  ");
                line.trim_end().to_string()
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
/// Whatever is there is replaced, so that a slip must not name a run, a case or a table of cells.
pub fn create(path: &Path, option: &str) -> Result<std::fs::File, Failure> {
    let named = path.extension().is_some_and(|end| end == "csv");
    // Pipes and terminals (`/dev/stdout`) hold nothing to lose.
    let special = std::fs::metadata(path).is_ok_and(|data| !data.is_file() && !data.is_dir());
    if !named && !special {
        let found = format!("`{}`", path.display());
        return Err(wrong(option, found, "a name ending in .csv"));
    }
    std::fs::File::create(path).map_err(|cause| match cause.kind() {
        io::ErrorKind::StorageFull => Failure::machine("creating it", path, cause),
        _ => wrong(
            option,
            format!("`{}` ({})", path.display(), in_words(&cause)),
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

/// A number of things, `s` added where it takes one.
pub fn counted(count: usize, thing: &str) -> String {
    let many = if count == 1 { "" } else { "s" };
    format!("{count} {thing}{many}")
}

/// A time for people, to five digits.
pub fn years(time: f64) -> String {
    let rounded: f64 = format!("{time:.4e}").parse().unwrap_or(time);
    if rounded == 0.0 || (1.0e-3..1.0e6).contains(&rounded.abs()) {
        format!("{rounded} yr")
    } else {
        format!("{rounded:e} yr")
    }
}

/// A number for CSV: shortest digits that read back to the same bits; empty where there is none.
pub fn exact(value: Option<f64>) -> String {
    value.map_or(String::new(), |x| format!("{x:e}"))
}
