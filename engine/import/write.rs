//! Owns the text of a network in our layout, one entry per line.
//!
//! It never decides what is written.

use super::laws::{Coefficient, Line};
use super::sources::Sources;
use crate::network::groups::Group;
use crate::network::layout::{Below, Standing};
use crate::network::model::Piece;
use crate::units;
use std::collections::{BTreeMap, BTreeSet, HashSet};
use std::fmt::Write;

/// The groups an import fills, in the order of expansion.
pub const GROUPS: [Group; 7] = [
    Group::Gas,
    Group::Capture,
    Group::Falloff,
    Group::ThreeBody,
    Group::ThirdBody,
    Group::Light,
    Group::Cosmic,
];

/// What stands at the head of the file.
#[derive(Debug, Clone, Copy)]
pub struct Heading<'a> {
    /// Comment lines, without `#`.
    pub comments: &'a [String],
    pub name: &'a str,
    pub about: &'a str,
    /// Meaning of spectra by name.
    pub spectra: &'a BTreeMap<String, String>,
    /// File name of the table, for notes.
    pub table: &'a str,
}

/// The text, and the place in `lines` of every line of text that is an entry (by line from 1).
pub fn network(
    heading: Heading,
    lines: &[&Line],
    sources: &Sources,
) -> (String, BTreeMap<usize, usize>) {
    let mut text = String::new();
    for comment in heading.comments {
        let _ = writeln!(text, "# {}", one_line(comment));
    }
    let _ = writeln!(text, "network: {}", scalar(heading.name));
    let _ = writeln!(text, "layout: 1");
    if !heading.about.is_empty() {
        let _ = writeln!(text, "about: {}", quoted(heading.about));
    }
    let keys: BTreeSet<&str> = lines.iter().map(|line| line.source.as_str()).collect();
    block(
        &mut text,
        "sources",
        keys.iter()
            .map(|key| format!("{}: {}", scalar(key), quoted(sources.citation(key)))),
    );
    let used: BTreeSet<&String> = lines.iter().flat_map(|line| spectra(line)).collect();
    if !used.is_empty() {
        block(
            &mut text,
            "spectra",
            used.iter().map(|name| {
                let meaning = heading.spectra.get(*name).map_or("", String::as_str);
                format!("{}: {}", scalar(name), quoted(meaning))
            }),
        );
    }
    block(
        &mut text,
        "species",
        species(lines)
            .iter()
            .map(|name| format!("- {{name: {}}}", scalar(name))),
    );
    let mut places = BTreeMap::new();
    for group in GROUPS {
        let own = lines
            .iter()
            .enumerate()
            .filter(|(_, line)| line.group == group);
        let mut next = None;
        for (place, line) in own {
            let at = *next.get_or_insert_with(|| {
                let _ = writeln!(text, "\n{}:", group.key());
                text.matches('\n').count() + 1
            });
            places.insert(at, place);
            next = Some(at + 1);
            let _ = writeln!(text, "  - {}", entry(line, heading.table));
        }
    }
    (text, places)
}

fn block(text: &mut String, key: &str, items: impl Iterator<Item = String>) {
    let items: Vec<String> = items.collect();
    if items.is_empty() {
        let empty = if key == "species" { "[]" } else { "{}" };
        let _ = writeln!(text, "\n{key}: {empty}");
        return;
    }
    let _ = writeln!(text, "\n{key}:");
    for item in items {
        let _ = writeln!(text, "  {item}");
    }
}

fn spectra(line: &Line) -> impl Iterator<Item = &String> {
    let spectra = match &line.coefficient {
        Coefficient::Light { spectra, .. } => &spectra[..],
        _ => &[],
    };
    spectra.iter().map(|(name, _)| name)
}

/// Every species once, in the order of first use.
fn species<'a>(lines: &[&'a Line]) -> Vec<&'a str> {
    let mut seen = HashSet::new();
    lines
        .iter()
        .flat_map(|line| line.reactants.iter().chain(&line.products))
        .map(String::as_str)
        .filter(|name| seen.insert(*name))
        .collect()
}

fn entry(line: &Line, table: &str) -> String {
    let mut fields = vec![format!("change: {}", line.change())];
    match &line.coefficient {
        Coefficient::Power(pieces) => match &pieces[..] {
            [piece] => fields.push(power(piece)),
            pieces => {
                let all: Vec<String> = pieces.iter().map(|p| format!("{{{}}}", power(p))).collect();
                fields.push(format!("pieces: [{}]", all.join(", ")));
            }
        },
        Coefficient::Capture {
            langevin,
            x_300k,
            valid,
        } => {
            fields.push(format!(
                "langevin: {}, x_300K: {}",
                number(*langevin),
                number(*x_300k)
            ));
            fields.push(range(valid));
        }
        Coefficient::Falloff {
            low,
            high,
            centre,
            valid,
        } => {
            let limit = |[a, b, c]: &[f64; 3]| {
                format!(
                    "{{at_300K: {}, slope: {}, barrier: {}}}",
                    number(*a),
                    number(*b),
                    number(*c)
                )
            };
            fields.push(format!(
                "low: {}, high: {}, centre: {}",
                limit(low),
                limit(high),
                number(*centre)
            ));
            fields.push(range(valid));
        }
        Coefficient::Light {
            rate,
            extinction,
            spectra,
        } => {
            fields.push(format!(
                "rate: {}, extinction: {}",
                number(*rate),
                number(*extinction)
            ));
            if !spectra.is_empty() {
                let all: Vec<String> = spectra
                    .iter()
                    .map(|(name, rate)| format!("{}: {}", scalar(name), number(*rate)))
                    .collect();
                fields.push(format!("spectra: {{{}}}", all.join(", ")));
            }
        }
        Coefficient::Direct(value) => fields.push(format!("direct: {}", number(*value))),
        Coefficient::Secondary(value) => fields.push(format!("secondary: {}", number(*value))),
    }
    if let Some(below) = line.below {
        fields.push(format!("below: {}", below_word(below)));
    }
    if line.adds {
        fields.push("adds: true".to_string());
    }
    if let Some(within) = line.within {
        fields.push(format!("within: {}", number(within)));
    }
    fields.push(format!("standing: {}", standing_word(line.standing)));
    fields.push(format!("source: {}", scalar(&line.source)));
    let rows: Vec<String> = line.rows.iter().map(usize::to_string).collect();
    let mut note = vec![format!("{table}:{}", rows.join(","))];
    note.extend(line.note.iter().cloned());
    fields.push(format!("note: {}", quoted(&note.join("; "))));
    format!("{{{}}}", fields.join(", "))
}

fn power(piece: &Piece) -> String {
    format!(
        "at_300K: {}, slope: {}, barrier: {}, {}",
        number(piece.at_300k),
        number(piece.slope),
        number(piece.barrier),
        range(&piece.valid)
    )
}

fn range([low, high]: &[f64; 2]) -> String {
    format!("valid: [{}, {}]", number(*low), number(*high))
}

fn below_word(below: Below) -> &'static str {
    match below {
        Below::Extend => "extend",
        Below::Hold => "hold",
        Below::Zero => "zero",
    }
}

fn standing_word(standing: Standing) -> &'static str {
    match standing {
        Standing::Evaluated => "evaluated",
        Standing::Measured => "measured",
        Standing::Recalled => "recalled",
        Standing::Estimated => "estimated",
    }
}

/// A number that every YAML reader takes for one: with a dot, and a sign in the exponent.
fn number(value: f64) -> String {
    let text = units::number_text(value);
    match text.split_once('e') {
        Some((mantissa, exponent)) if !exponent.starts_with('-') => {
            format!("{mantissa}e+{exponent}")
        }
        _ => text,
    }
}

/// A word, quoted where a YAML reader might take it for something else.
fn scalar(text: &str) -> String {
    let words = ["y", "n", "yes", "no", "on", "off", "true", "false", "null"];
    let plain = text.starts_with(|c: char| c.is_ascii_alphabetic())
        && text
            .chars()
            .all(|c| c.is_ascii_alphanumeric() || matches!(c, '+' | '-' | '.' | '_'))
        && !words.contains(&text.to_ascii_lowercase().as_str());
    if plain {
        text.to_string()
    } else {
        quoted(text)
    }
}

/// Any text as a quoted scalar on one line.
fn quoted(text: &str) -> String {
    let mut quoted = String::from("\"");
    for sign in text.chars() {
        match sign {
            '"' => quoted.push_str("\\\""),
            '\\' => quoted.push_str("\\\\"),
            sign if sign.is_control()
                || matches!(sign, '\u{85}' | '\u{2028}' | '\u{2029}' | '\u{feff}') =>
            {
                quoted.push(' ');
            }
            sign => quoted.push(sign),
        }
    }
    quoted.push('"');
    quoted
}

fn one_line(text: &str) -> String {
    text.chars()
        .map(|c| if c.is_control() { ' ' } else { c })
        .collect()
}
