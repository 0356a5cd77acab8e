//! Owns the translation of serde_yaml's messages into found / expected in plain words.
//!
//! serde_yaml gives one line of text, `path: message at line L column C`; an unforeseen message
//! is passed on whole, never lost.

use super::Positions;
use crate::errors::InputError;
use std::path::Path;

/// The input error for a failure of serde_yaml.
pub(super) fn explain(file: &Path, error: &serde_yaml::Error, positions: &Positions) -> InputError {
    let location = error.location();
    let mut message = error.to_string();
    if let Some(end) = message.rfind(" at line ") {
        message.truncate(end);
    }
    let (path, message) = split_path(&message, positions);
    let wording = reword(message);
    let entry = match (&wording.key, path) {
        (Some(key), "") => key.clone(),
        (Some(key), path) => format!("{path}.{key}"),
        (None, "") => "whole file".to_string(),
        (None, path) => path.to_string(),
    };
    let line = match positions.line(&entry) {
        Some(line) => Some(line),
        None => positions.nearest_line(path).or(location.map(|l| l.line())),
    };
    let found = match positions.text(&entry) {
        Some(text) if wording.found.is_empty() => format!("`{text}`"),
        _ if wording.found.is_empty() => "something else".to_string(),
        _ => wording.found,
    };
    InputError::new(file, line, entry, found, wording.expected)
}

/// Splits `path: message`: the path is known from the first pass, so that colons in keys or
/// messages do no harm.
fn split_path<'m>(message: &'m str, positions: &Positions) -> (&'m str, &'m str) {
    for (colon, _) in message.match_indices(": ") {
        if positions.line(&message[..colon]).is_some() {
            return (&message[..colon], &message[colon + 2..]);
        }
    }
    ("", message)
}

struct Wording {
    /// The key below the path which is at fault, where it is not the path itself.
    key: Option<String>,
    /// Empty: the text that stands there.
    found: String,
    expected: String,
}

fn reword(message: &str) -> Wording {
    let plain = |found: String, expected: String| Wording {
        key: None,
        found,
        expected,
    };
    if let Some(rest) = message.strip_prefix("unknown field ") {
        let (key, expected) = split_expected(rest);
        let key = unquoted(key);
        let found = format!("unknown key `{key}`");
        return Wording {
            key: Some(key.to_string()),
            found,
            expected: expected.to_string(),
        };
    }
    if let Some(key) = message.strip_prefix("missing field ") {
        return plain(format!("no {key}"), format!("{key} with a value"));
    }
    if let Some(rest) = message.strip_prefix("unknown variant ") {
        let (found, expected) = split_expected(rest);
        return plain(found.to_string(), expected.to_string());
    }
    if let Some(rest) = message.strip_prefix("invalid length ") {
        let (found, expected) = split_expected(rest);
        let values = if found == "1" { "value" } else { "values" };
        let expected = expected
            .strip_prefix("an array of length ")
            .or(expected.strip_prefix("sequence of "))
            .map(|n| format!("{} values", n.split(' ').next().unwrap_or(n)))
            .unwrap_or_else(|| expected.to_string());
        return plain(format!("{found} {values}"), expected);
    }
    let typed = message
        .strip_prefix("invalid type: ")
        .or(message.strip_prefix("invalid value: "));
    if let Some(rest) = typed {
        let (found, expected) = split_expected(rest);
        return plain(name_of_value(found), name_of_type(expected));
    }
    // Our own types report in the same words.
    if let Some(rest) = message.strip_prefix("found ") {
        let (found, expected) = split_expected(rest);
        return plain(found.to_string(), expected.to_string());
    }
    plain(String::new(), message.to_string())
}

fn split_expected(text: &str) -> (&str, &str) {
    match text.split_once(", expected ") {
        Some((found, expected)) => (found, expected),
        None => (
            text.split(", there are").next().unwrap_or(text),
            "no key here",
        ),
    }
}

fn unquoted(text: &str) -> &str {
    text.strip_prefix('`')
        .and_then(|t| t.strip_suffix('`'))
        .unwrap_or(text)
}

fn name_of_value(found: &str) -> String {
    if let Some(text) = found.strip_prefix("string ") {
        let text = text
            .strip_prefix('"')
            .and_then(|t| t.strip_suffix('"'))
            .unwrap_or(text);
        return format!("the text `{text}`");
    }
    for kind in ["integer ", "floating point ", "boolean "] {
        if let Some(text) = found.strip_prefix(kind) {
            return text.to_string();
        }
    }
    match found {
        "sequence" => "a list".to_string(),
        "map" => "keys with values".to_string(),
        "unit value" | "null" => "no value".to_string(),
        other => other.to_string(),
    }
}

fn name_of_type(expected: &str) -> String {
    let name = match expected {
        "f64" | "f32" => "a number",
        "u8" | "u16" | "u32" | "u64" | "usize" => "a whole number, not negative",
        "i8" | "i16" | "i32" | "i64" | "isize" => "a whole number",
        "a string" | "string" => "text",
        "a boolean" => "true or false",
        "a sequence" => "a list",
        "a map" => "keys with values",
        other if other.starts_with("struct ") => "keys with values",
        other if other.starts_with("an array of length ") => "a list of numbers",
        other => other,
    };
    name.to_string()
}
