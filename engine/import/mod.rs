//! Owns the way from somebody's rate table to a network file in our layout, as a mapping file of
//! theirs says.
//!
//! It never drops a row in silence: every row becomes an entry, part of one, or is listed with the
//! reason why not. The reader of networks judges each row, so that what is written can be read.

mod checker;
mod form;
mod join;
mod laws;
pub mod mapping;
mod numbers;
mod plan;
mod sources;
mod table;
mod translate;
mod write;

use crate::errors::InputError;
use crate::network::{self, groups::Group};
use crate::yaml;
use checker::Checker;
use laws::{Line, Mapped};
use mapping::MappingFile;
use numbers::Cells;
use sources::Sources;
use std::collections::{BTreeMap, HashMap};
use std::path::Path;
use write::Heading;

/// Most rounds of reading the finished text; one is enough unless rows clash in ways not foreseen.
const MOST_ROUNDS: usize = 20;

/// A row that is not in the network.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Rejected {
    /// Line of the table.
    pub line: usize,
    pub text: String,
    pub reason: String,
    /// Whether the mapping asked for it (`law: leave_out`).
    pub wanted: bool,
}

/// What came of a table.
#[derive(Debug, Clone)]
pub struct Import {
    /// The network file; empty if no row could be mapped.
    pub text: String,
    /// Rows with content, without comments and header.
    pub rows: usize,
    /// Rows that are in the network.
    pub mapped: usize,
    /// How many entries each group has, those with none left out.
    pub entries: Vec<(Group, usize)>,
    pub species: usize,
    /// How many remarks the reader makes on the network.
    pub remarks: usize,
    /// By line.
    pub rejected: Vec<Rejected>,
}

/// Turns the table (`bytes` of the file `table`) into a network as the mapping says. Errors are
/// those of the mapping, or of a table that does not fit it at all.
pub fn import(
    mapping_path: &Path,
    mapping_text: &str,
    table_path: &Path,
    bytes: &[u8],
) -> Result<Import, Vec<InputError>> {
    let (mapping, positions): (MappingFile, _) =
        yaml::read(mapping_path, mapping_text).map_err(|error| vec![error])?;
    let mut check = Checker::new(mapping_path, &positions);
    let splitter = form::check(&mapping, &mut check);
    // Columns cannot be looked up before the look of the table is clear.
    check.finish()?;
    let table = table::read(table_path, bytes, &mapping.table, &splitter).map_err(|e| vec![e])?;
    let mut check = Checker::new(mapping_path, &positions);
    let named = match (table.header, mapping.table.places.is_empty()) {
        (Some(line), true) => format!("{}:{line}", table_path.display()),
        (_, true) => "`table.columns`".to_string(),
        (_, false) => "`table.places`".to_string(),
    };
    check.know(&table.columns, named);
    let plan = plan::plan(&mapping, &mut check);
    check.finish()?;
    if table.rows.is_empty() {
        let expected = "at least one row that is no comment";
        return Err(vec![InputError::new(
            table_path,
            None,
            "whole table",
            "no rows",
            expected,
        )]);
    }

    let file_name = |path: &Path| {
        path.file_name()
            .map_or(String::new(), |name| name.to_string_lossy().into_owned())
    };
    let table_name = file_name(table_path);
    let mut work = Work {
        heading: Heading {
            comments: &[],
            name: &mapping.network,
            about: &mapping.about,
            spectra: &mapping.spectra,
            table: &table_name,
        },
        sources: Sources::new(mapping.sources.clone()),
        reasons: HashMap::new(),
    };
    let names = (&mapping.names, mapping.change.separator.as_deref());
    let mut lines = Vec::new();
    for row in &table.rows {
        let mapped = row.cells.as_ref().map_err(String::clone).and_then(|cells| {
            let cells = Cells {
                columns: &table.columns,
                cells,
                comma: plan.comma,
            };
            laws::line(row.line, cells, &plan, names, &mut work.sources)
        });
        match mapped {
            Ok(Mapped::Line(line)) => match work.judge(&line) {
                None => lines.push(line),
                Some(reason) => work.reject(row.line, reason, false),
            },
            Ok(Mapped::LeftOut(reason)) => work.reject(row.line, reason, true),
            Err(reason) => work.reject(row.line, reason, false),
        }
    }
    let (lines, refused) = join::join(lines, plan.meet_within, &mut work.sources);
    for (row, reason) in refused {
        work.reject(row, reason, false);
    }
    let comment = format!(
        "Made by `frostclock network import` from {table_name} with {}.",
        file_name(mapping_path)
    );
    let (finished, lines) = work.finish(lines, &[comment])?;
    let (text, species, remarks) = finished.unwrap_or_default();
    let rejected: Vec<Rejected> = (table.rows.iter())
        .filter_map(|row| {
            let (reason, wanted) = work.reasons.remove(&row.line)?;
            Some(Rejected {
                line: row.line,
                text: row.text.clone(),
                reason,
                wanted,
            })
        })
        .collect();
    let count = |group| {
        (
            group,
            lines.iter().filter(|line| line.group == group).count(),
        )
    };
    Ok(Import {
        text,
        rows: table.rows.len(),
        mapped: table.rows.len() - rejected.len(),
        entries: write::GROUPS
            .map(count)
            .into_iter()
            .filter(|(_, n)| *n > 0)
            .collect(),
        species,
        remarks,
        rejected,
    })
}

/// Text, number of species and of remarks.
type Finished = (String, usize, usize);

/// An import under way.
struct Work<'a> {
    heading: Heading<'a>,
    sources: Sources,
    /// Why a row is not taken, and whether the mapping wanted that.
    reasons: HashMap<usize, (String, bool)>,
}

impl Work<'_> {
    fn reject(&mut self, row: usize, reason: String, wanted: bool) {
        self.reasons.insert(row, (reason, wanted));
    }

    /// What the reader of networks says to a file with this one entry: the very rules that a
    /// written file meets, none of them a second time here.
    fn judge(&self, line: &Line) -> Option<String> {
        let (text, _) = write::network(self.heading, &[line], &self.sources);
        let errors = network::read(Path::new(""), &text).err()?;
        let said: Vec<String> = errors
            .iter()
            .map(|e| format!("found {}, expected {}", e.found, e.expected))
            .collect();
        Some(said.join("; "))
    }

    /// The text of all lines, read back; rows the reader still refuses are taken out.
    fn finish(
        &mut self,
        mut lines: Vec<Line>,
        comments: &[String],
    ) -> Result<(Option<Finished>, Vec<Line>), Vec<InputError>> {
        let mut errors = Vec::new();
        for _ in 0..MOST_ROUNDS {
            if lines.is_empty() {
                return Ok((None, lines));
            }
            let heading = Heading {
                comments,
                ..self.heading
            };
            let all: Vec<&Line> = lines.iter().collect();
            let (text, places) = write::network(heading, &all, &self.sources);
            match network::read(Path::new("the new network"), &text) {
                Ok(network) => {
                    let finished = (text, network.roster.gas, network.warnings.len());
                    return Ok((Some(finished), lines));
                }
                Err(found) => errors = found,
            }
            let refused = self.refused(&errors, &places, &lines);
            if refused.is_empty() {
                break;
            }
            let mut place = 0..;
            lines.retain(|_| place.next().is_none_or(|place| !refused.contains(&place)));
        }
        Err(errors)
    }

    /// Rejects the rows of the entries that errors name; their places.
    fn refused(
        &mut self,
        errors: &[InputError],
        places: &BTreeMap<usize, usize>,
        lines: &[Line],
    ) -> Vec<usize> {
        let mut refused = Vec::new();
        for error in errors {
            let Some(place) = error.line.and_then(|line| places.get(&line)) else {
                continue;
            };
            for row in &lines[*place].rows {
                self.reject(
                    *row,
                    format!("found {}, expected {}", error.found, error.expected),
                    false,
                );
            }
            refused.push(*place);
        }
        refused
    }
}
