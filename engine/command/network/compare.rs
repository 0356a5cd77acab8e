//! The verb `network compare`.

use super::line;
use crate::command::Outcome;
use crate::command::print::{Table, counted, exact, out};
use crate::errors::Failure;
use crate::inquiry;
use crate::network::compare::{COMPARED_AT, Difference, compare as differences};
use std::path::{Path, PathBuf};

#[derive(Debug, clap::Args)]
#[command(
    after_help = "Ratios are B over A, all lines of the change summed, falloff in its \
high-pressure limit."
)]
pub struct Arguments {
    /// A network file, or `standard`
    #[arg(value_name = "A")]
    one: String,
    /// Another
    #[arg(value_name = "B")]
    other: String,
    /// Write one row per different key as CSV
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
}

pub fn compare(arguments: &Arguments) -> Result<Outcome, Failure> {
    let one = inquiry::open(&arguments.one)?;
    let other = inquiry::open(&arguments.other)?;
    let all = differences(&one, &other);
    if let Some(path) = &arguments.csv {
        csv_table(&all).csv(path)?;
    }
    let paths = [one.path.as_path(), other.path.as_path()];
    out(&format!(
        "A: {}\nB: {}",
        paths[0].display(),
        paths[1].display()
    ))?;
    let mut heading = String::new();
    let mut counts = [0; 3];
    for difference in &all {
        let (which, words) = match difference.lines {
            [Some(_), None] => (0, "only in A"),
            [None, Some(_)] => (1, "only in B"),
            _ => (2, "different"),
        };
        counts[which] += 1;
        let now = format!("\n{}, {words}:", difference.part);
        if now != heading {
            out(&now)?;
            heading = now;
        }
        out(&said(difference, paths))?;
    }
    let [only_a, only_b, different] = counts;
    let space = if all.is_empty() { "" } else { "\n" };
    out(&format!(
        "{space}{}: {only_a} only in A, {only_b} only in B, {different} different",
        counted(all.len(), "difference")
    ))?;
    Ok(Outcome::Done)
}

/// `A.yaml:12, B.yaml:13: H + O -> OH: slope 0.0 -> 0.5; B/A 0.18 at 10 K, ...`
fn said(difference: &Difference, paths: [&Path; 2]) -> String {
    let places: Vec<String> = (difference.lines.iter().zip(paths))
        .filter_map(|(line, path)| Some(format!("{}:{}", path.display(), (*line)?)))
        .collect();
    let mut text = format!("{}: {}", places.join(", "), difference.entry);
    let keys: Vec<String> = (difference.keys.iter())
        .map(|change| {
            format!(
                "{} {} -> {}",
                change.key, change.values[0], change.values[1]
            )
        })
        .collect();
    if !keys.is_empty() {
        text = format!("{text}: {}", keys.join("; "));
    }
    if let Some(ratio) = difference.ratio {
        let ratios: Vec<String> = (ratio.iter().zip(COMPARED_AT))
            .map(|(ratio, t)| format!("{ratio:.3} at {t} K"))
            .collect();
        text = format!("{text}; B/A {}", ratios.join(", "));
    }
    text
}

fn csv_table(all: &[Difference]) -> Table {
    let heads = ["part", "entry", "line in A", "line in B", "key", "A", "B"];
    let ratios = COMPARED_AT.map(|t| format!("B/A at {t} K"));
    let mut table = Table::new(heads.map(String::from).into_iter().chain(ratios));
    for difference in all {
        let mut row = |key: &str, values: [&str; 2]| {
            let mut row = vec![
                difference.part.clone(),
                difference.entry.clone(),
                line(difference.lines[0]),
                line(difference.lines[1]),
                key.to_string(),
                values[0].to_string(),
                values[1].to_string(),
            ];
            row.extend((0..COMPARED_AT.len()).map(|i| exact(difference.ratio.map(|r| r[i]))));
            table.rows.push(row);
        };
        if difference.keys.is_empty() {
            row("", ["", ""]);
        }
        for change in &difference.keys {
            row(&change.key, [&change.values[0], &change.values[1]]);
        }
    }
    table
}
