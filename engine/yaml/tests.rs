//! Owns the tests of reading YAML.

use super::*;
use serde::Deserialize;
use std::collections::BTreeMap;

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct Line {
    name: String,
    #[serde(default)]
    value: f64,
    range: Option<[f64; 2]>,
    mood: Option<Mood>,
    count: Option<u32>,
}

#[derive(Debug, PartialEq, Deserialize)]
#[serde(rename_all = "snake_case")]
enum Mood {
    Good,
    Bad,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    title: String,
    #[serde(default)]
    lines: Vec<Line>,
    #[serde(default)]
    table: BTreeMap<String, f64>,
}

fn read_file(text: &str) -> Result<(File, Positions), InputError> {
    read(Path::new("x.yaml"), text)
}

// Every later message about a file points at the lines noted here.
#[test]
fn lines_are_those_of_keys_and_items() {
    let text = "# head\ntitle: t\nlines:\n  - {name: \"NO\", value: 1.0e-10}\n  - name: b\n    \
                value: 2\ntable:\n  CO: 1\n  H2O: 2.5\n";
    let (file, positions) = read_file(text).unwrap();
    assert_eq!(file.lines[0].name, "NO");
    assert_eq!(file.lines[0].value, 1e-10);
    assert_eq!(file.table["H2O"], 2.5);
    assert_eq!((file.title.as_str(), file.lines[1].value), ("t", 2.0));
    for (path, line) in [
        ("title", 2),
        ("lines", 3),
        ("lines[0]", 4),
        ("lines[0].value", 4),
        ("lines[1]", 5),
        ("lines[1].value", 6),
        ("table", 7),
        ("table.H2O", 9),
    ] {
        assert_eq!(positions.line(path), Some(line), "{path}");
    }
    assert_eq!(positions.line("lines[2]"), None);
    assert_eq!(
        positions.nearest_line("lines[1].nothing.at[3].all"),
        Some(5)
    );
    assert_eq!(positions.text("lines[0].name"), Some("NO"));
}

// Each of these either is silently misread by the YAML reader alone or ends in its jargon.
#[test]
fn wrong_texts_are_named_with_line_entry_found_and_expected() {
    #[rustfmt::skip]
    let cases: &[(&str, Option<usize>, &str, &str, &str)] = &[
        ("", None, "whole file", "no entries", "empty"),
        ("# only a comment\n", None, "whole file", "no entries", "empty"),
        ("title: a\ntitle: b", Some(2), "title", "first is on line 1", "once"),
        ("title: a\ntable:\n  CO: 1\n  \"CO\": 2", Some(4), "table.CO", "line 3", "once"),
        ("title: a\n---\ntitle: b", Some(2), "whole file", "second document", "one"),
        ("title: a\ntable: {CO: .nan}", Some(2), "table.CO", ".nan", "finite"),
        ("title: a\ntable: {CO: -.inf}", Some(2), "table.CO", "-.inf", "finite"),
        ("title: a\ntable: {CO: 1e-400}", Some(2), "table.CO", "becomes 0", "308"),
        ("title: a\ntable: {CO: 1e400}", Some(2), "table.CO", "too large", "308"),
        ("title: a\ntable: {CO: 010}", Some(2), "table.CO", "010", "leading zeros"),
        ("title: ~", Some(1), "title", "no value", "quote"),
        ("title: a\nlines:\n- name: #x", Some(3), "lines[0].name", "no value", "quote"),
        ("title: &a b", Some(1), "title", "anchor", "written out"),
        ("title: !b a", Some(1), "title", "tag", "quote"),
        ("title: a\ntable: {[1]: 2}", Some(2), "table", "as a key", "plain key"),
        ("title: [a", Some(1), "layout of the text", "", "valid YAML"),
        ("title: a\nfoo: 1", Some(2), "foo", "unknown key `foo`", "`title`, `lines`, `table`"),
        ("lines: []", Some(1), "whole file", "no `title`", "`title`"),
        ("title: a\nlines:\n- value: 1", Some(3), "lines[0]", "no `name`", "`name`"),
        ("title: a\nlines:\n- name: b\n  vlaue: 1", Some(4), "lines[0].vlaue", "unknown key", "`value`"),
        ("title: a\nlines:\n- name: b\n  value: \"1\"", Some(4), "lines[0].value", "`1`", "a number"),
        ("title: a\nlines:\n- name: b\n  value: many", Some(4), "lines[0].value", "`many`", "a number"),
        ("title: a\nlines:\n- {name: b, range: [1]}", Some(3), "lines[0].range", "1 value", "2"),
        ("title: a\nlines:\n- {name: b, range: [1, 2, 3]}", Some(3), "lines[0].range", "3 values", "2"),
        ("title: a\nlines:\n- {name: b, mood: so}", Some(3), "lines[0].mood", "`so`", "`good` or `bad`"),
        ("title: a\nlines:\n- {name: b, count: -1}", Some(3), "lines[0].count", "`-1`", "whole number"),
        ("title: a\nlines: {name: b}", Some(2), "lines", "keys with values", "a list"),
        ("title: [1]", Some(1), "title", "a list", "text"),
        ("just words", Some(1), "whole file", "`just words`", "keys with values"),
    ];
    for (text, line, entry, found, expected) in cases {
        let error = read_file(text)
            .err()
            .unwrap_or_else(|| panic!("accepted: {text}"));
        assert_eq!(
            (error.line, error.entry.as_str()),
            (*line, *entry),
            "{text}: {error}"
        );
        assert!(error.found.contains(found), "{text}: {error}");
        assert!(error.expected.contains(expected), "{text}: {error}");
    }
}

// Quoting must be enough to write any name, and 0 must stay a number.
#[test]
fn quoted_scalars_and_zeros_pass() {
    let text = "title: \"~\"\ntable: {a: 0, b: 0.0, c: 0.0e-5, d: -0.5}\nlines: [{name: \"010\", range: [0, 1], mood: bad, count: 2}, {name: 'null'}]";
    let (file, _) = read_file(text).unwrap();
    assert_eq!(file.title, "~");
    let line = &file.lines[0];
    assert_eq!(
        (line.name.as_str(), line.range, line.count),
        ("010", Some([0.0, 1.0]), Some(2))
    );
    assert_eq!(line.mood, Some(Mood::Bad));
    assert_eq!(file.table["a"], 0.0);
}

// A hostile file must end in a message, not in a stack overflow.
#[test]
fn deep_nesting_is_refused() {
    let text = format!("title: {}", "[".repeat(5000));
    assert!(read_file(&text).is_err());
}
