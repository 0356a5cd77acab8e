//! Owns YAML: turns a text into typed values together with the line of every entry.
//!
//! The only module that knows serde_yaml and saphyr-parser. A first pass over the text notes
//! where everything stands and refuses what YAML would silently bend (duplicate keys, `~`,
//! `.nan`, `010`, numbers that fall to 0); the second pass fills the types. It never knows what
//! an entry means.

mod plain_words;

use crate::errors::InputError;
use saphyr_parser::{Event, Parser, ScalarStyle, Span};
use serde::de::DeserializeOwned;
use std::collections::HashMap;
use std::path::Path;

/// Deepest nesting accepted; our files need six.
const DEEPEST: usize = 32;

/// Where every entry of a YAML text stands, by key path: `accuracy.relative`, `gas[3].change`.
///
/// The line of a map entry is that of its key, the line of a list item that of its first sign.
#[derive(Debug, Clone, Default)]
pub struct Positions {
    nodes: HashMap<String, Node>,
}

#[derive(Debug, Clone)]
struct Node {
    line: usize,
    /// The text of a scalar.
    text: Option<String>,
}

impl Positions {
    /// The 1-based line of the entry with this key path.
    pub fn line(&self, path: &str) -> Option<usize> {
        self.nodes.get(path).map(|node| node.line)
    }

    /// The text of the scalar at this key path, without quotes.
    pub fn text(&self, path: &str) -> Option<&str> {
        self.nodes.get(path)?.text.as_deref()
    }

    /// The line of the nearest enclosing entry that is known: `gas[3].slope`, else `gas[3]`, else `gas`.
    pub fn nearest_line(&self, path: &str) -> Option<usize> {
        let mut rest = path;
        loop {
            if let Some(line) = self.line(rest) {
                return Some(line);
            }
            rest = &rest[..rest.rfind(['.', '['])?];
        }
    }
}

/// Reads one YAML document of type `T` from `text`, the content of the file `path`.
pub fn read<T: DeserializeOwned>(path: &Path, text: &str) -> Result<(T, Positions), InputError> {
    let positions = positions(path, text)?;
    let value = fill(path, text, &positions)?;
    Ok((value, positions))
}

/// The first pass alone: where everything stands, for a text whose type is not known yet.
pub fn positions(path: &Path, text: &str) -> Result<Positions, InputError> {
    Walk::over(path, text)
}

/// The second pass alone.
pub fn fill<T: DeserializeOwned>(
    path: &Path,
    text: &str,
    positions: &Positions,
) -> Result<T, InputError> {
    serde_yaml::from_str(text).map_err(|error| plain_words::explain(path, &error, positions))
}

/// A map or list the first pass is inside of.
enum Open {
    Map { path: String, key: Option<String> },
    List { path: String, next: usize },
}

/// The first pass.
struct Walk<'a> {
    file: &'a Path,
    positions: Positions,
    open: Vec<Open>,
}

impl<'a> Walk<'a> {
    fn over(file: &'a Path, text: &str) -> Result<Positions, InputError> {
        let mut walk = Walk {
            file,
            positions: Positions::default(),
            open: Vec::new(),
        };
        let mut documents = 0;
        for event in Parser::new_from_str(text) {
            let (event, span) = event.map_err(|error| {
                // An unfinished list is noticed behind the last line.
                let line = error.marker().line().min(text.lines().count().max(1));
                InputError::new(
                    file,
                    Some(line),
                    "layout of the text",
                    error.info(),
                    "valid YAML",
                )
            })?;
            if let Event::DocumentStart(_) = event {
                documents += 1;
                if documents > 1 {
                    let line = Some(span.start.line());
                    return Err(InputError::new(
                        file,
                        line,
                        "whole file",
                        "a second document",
                        "one YAML document (no further `---`)",
                    ));
                }
            }
            walk.take(event, span)?;
        }
        if walk.positions.nodes.is_empty() {
            return Err(InputError::new(
                file,
                None,
                "whole file",
                "no entries",
                "keys with values (is the file empty?)",
            ));
        }
        Ok(walk.positions)
    }

    fn take(&mut self, event: Event, span: Span) -> Result<(), InputError> {
        let line = span.start.line();
        match event {
            Event::Scalar(text, style, anchor, tag) => {
                self.refuse_anchor_or_tag(anchor, tag.is_some(), line)?;
                self.scalar(&text, style, line)
            }
            Event::MappingStart(anchor, tag) => {
                self.refuse_anchor_or_tag(anchor, tag.is_some(), line)?;
                let path = self.place(line, None)?;
                self.enter(Open::Map { path, key: None }, line)
            }
            Event::SequenceStart(anchor, tag) => {
                self.refuse_anchor_or_tag(anchor, tag.is_some(), line)?;
                let path = self.place(line, None)?;
                self.enter(Open::List { path, next: 0 }, line)
            }
            Event::MappingEnd | Event::SequenceEnd => {
                self.open.pop();
                Ok(())
            }
            Event::Alias(_) => {
                Err(self.error(line, "an alias (`*name`)", "the value itself, written out"))
            }
            _ => Ok(()),
        }
    }

    fn enter(&mut self, open: Open, line: usize) -> Result<(), InputError> {
        if self.open.len() >= DEEPEST {
            return Err(self.error(line, "too many levels of nesting", "the documented layout"));
        }
        self.open.push(open);
        Ok(())
    }

    fn scalar(&mut self, text: &str, style: ScalarStyle, line: usize) -> Result<(), InputError> {
        let plain = style == ScalarStyle::Plain;
        if let Some(Open::Map {
            path,
            key: key @ None,
        }) = self.open.last_mut()
        {
            let full = if path.is_empty() {
                text.to_string()
            } else {
                format!("{path}.{text}")
            };
            *key = Some(text.to_string());
            if plain && is_null(text) {
                return Err(self.error(
                    line,
                    "a key without a name",
                    "a name; quote it if `~` is meant",
                ));
            }
            if let Some(first) = self.positions.line(&full) {
                let found = format!("a second `{text}` (the first is on line {first})");
                return Err(InputError::new(
                    self.file,
                    Some(line),
                    full,
                    found,
                    "every key once",
                ));
            }
            self.positions.nodes.insert(full, Node { line, text: None });
            return Ok(());
        }
        if plain && let Some((found, expected)) = bent_scalar(text) {
            return Err(self.error(line, found, expected));
        }
        self.place(line, Some(text)).map(|_| ())
    }

    /// Notes a value at the place that is next, and gives its path.
    fn place(&mut self, line: usize, text: Option<&str>) -> Result<String, InputError> {
        let path = match self.open.last_mut() {
            None => return Ok(self.note_root(line, text)),
            Some(Open::Map { key: None, .. }) => {
                return Err(self.error(line, "a map or list as a key", "a plain key"));
            }
            Some(Open::Map {
                path,
                key: key @ Some(_),
            }) => {
                let key = key.take().unwrap_or_default();
                if path.is_empty() {
                    key
                } else {
                    format!("{path}.{key}")
                }
            }
            Some(Open::List { path, next }) => {
                *next += 1;
                format!("{path}[{}]", *next - 1)
            }
        };
        // Map entries are already noted at their key; a list item is noted here.
        let node = self
            .positions
            .nodes
            .entry(path.clone())
            .or_insert(Node { line, text: None });
        node.text = text.map(str::to_string);
        Ok(path)
    }

    fn note_root(&mut self, line: usize, text: Option<&str>) -> String {
        // A map or list at the root has the empty path; only a lone scalar counts as an entry.
        if let Some(text) = text {
            let node = Node {
                line,
                text: Some(text.to_string()),
            };
            self.positions.nodes.insert(String::new(), node);
        }
        String::new()
    }

    fn refuse_anchor_or_tag(
        &self,
        anchor: usize,
        tag: bool,
        line: usize,
    ) -> Result<(), InputError> {
        if anchor != 0 {
            return Err(self.error(line, "an anchor (`&name`)", "the value itself, written out"));
        }
        if tag {
            return Err(self.error(
                line,
                "a tag (`!name`)",
                "the value itself; quote text that starts with `!`",
            ));
        }
        Ok(())
    }

    /// An error of the entry that is being read.
    fn error(
        &self,
        line: usize,
        found: impl Into<String>,
        expected: impl Into<String>,
    ) -> InputError {
        let entry = match self.open.last() {
            None => "whole file".to_string(),
            Some(Open::List { path, next }) => format!("{path}[{next}]"),
            Some(Open::Map { path, key: None }) if path.is_empty() => "whole file".to_string(),
            Some(Open::Map { path, key: None }) => path.clone(),
            Some(Open::Map {
                path,
                key: Some(key),
            }) if path.is_empty() => key.clone(),
            Some(Open::Map {
                path,
                key: Some(key),
            }) => format!("{path}.{key}"),
        };
        InputError::new(self.file, Some(line), entry, found, expected)
    }
}

/// How an unquoted scalar would silently become something else than it looks: (found, expected).
fn bent_scalar(text: &str) -> Option<(String, String)> {
    if is_null(text) {
        let expected = "a value; leave the key out for the default, quote text such as `~` or `#x`";
        return Some(("no value".to_string(), expected.to_string()));
    }
    let unsigned = text.strip_prefix(['-', '+']).unwrap_or(text);
    if matches!(
        unsigned,
        ".inf" | ".Inf" | ".INF" | ".nan" | ".NaN" | ".NAN"
    ) {
        return Some((format!("`{text}`"), "a finite number".to_string()));
    }
    if !looks_numeric(unsigned) {
        return None;
    }
    let quote = "quote it if it is text";
    if unsigned.len() > 1 && unsigned.starts_with('0') && unsigned.as_bytes()[1].is_ascii_digit() {
        let expected = format!("a number without leading zeros ({quote})");
        return Some((format!("`{text}`"), expected));
    }
    let value: f64 = unsigned.parse().ok()?;
    if !value.is_finite() {
        return Some((
            format!("`{text}`, too large to hold"),
            "a number below 1e308".to_string(),
        ));
    }
    let mantissa = unsigned.split(['e', 'E']).next().unwrap_or(unsigned);
    if value == 0.0 && mantissa.contains(|c: char| ('1'..='9').contains(&c)) {
        let expected = "0 or a number above 1e-308".to_string();
        return Some((
            format!("`{text}`, which is too small to hold and becomes 0"),
            expected,
        ));
    }
    None
}

/// Whether text is digits with a point or an exponent, so that a reader takes it for a number.
fn looks_numeric(text: &str) -> bool {
    let first = text.strip_prefix('.').unwrap_or(text).chars().next();
    first.is_some_and(|c| c.is_ascii_digit())
        && text
            .chars()
            .all(|c| c.is_ascii_digit() || matches!(c, '.' | 'e' | 'E' | '+' | '-'))
        && text.parse::<f64>().is_ok()
}

fn is_null(text: &str) -> bool {
    matches!(text, "" | "~" | "null" | "Null" | "NULL")
}

#[cfg(test)]
mod tests;
