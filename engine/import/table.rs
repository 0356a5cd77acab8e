//! Owns the way from the bytes of a table to rows of cells, each with its line.
//!
//! It never knows what a column means, and it never drops a line that holds something: a line it
//! cannot split becomes a row with a fault.

use super::mapping::{Cells, Encoding, TableForm};
use crate::errors::InputError;
use std::path::Path;

/// A table split into cells.
#[derive(Debug, Clone)]
pub struct Table {
    /// Names of the columns, from the header or the mapping.
    pub columns: Vec<String>,
    /// Line of the header, where there is one.
    pub header: Option<usize>,
    pub rows: Vec<Row>,
}

/// One line.
#[derive(Debug, Clone)]
pub struct Row {
    /// 1-based.
    pub line: usize,
    pub text: String,
    /// One cell per column, blanks at the ends removed; or why there are none.
    pub cells: Result<Vec<String>, String>,
}

/// How lines are split, checked.
#[derive(Debug, Clone)]
pub enum Splitter {
    Blanks,
    At {
        delimiter: char,
        quote: Option<char>,
    },
    /// Name, first and last place from 0, ascending.
    Places(Vec<(String, usize, usize)>),
}

/// Splits the table; `splitter` must belong to `form`.
pub fn read(
    path: &Path,
    bytes: &[u8],
    form: &TableForm,
    splitter: &Splitter,
) -> Result<Table, InputError> {
    let text = decode(path, bytes, form.encoding)?;
    let comment = form.comment.as_deref().unwrap_or("");
    let mut lines = text
        .strip_prefix('\u{feff}')
        .unwrap_or(&text)
        .lines()
        .enumerate()
        .map(|(i, line)| (i + 1, line))
        .skip(form.skip_lines)
        .filter(|(_, line)| !line.trim().is_empty())
        .filter(|(_, line)| comment.is_empty() || !line.trim_start().starts_with(comment));
    let (mut columns, mut header) = (form.columns.clone(), None);
    if let Splitter::Places(places) = splitter {
        columns = places.iter().map(|(name, ..)| name.clone()).collect();
    }
    if form.header {
        let Some((line, first)) = lines.next() else {
            return Err(wrong(
                path,
                None,
                "header",
                "no line",
                "a line that names the columns",
            ));
        };
        header = Some(line);
        if form.cells == Cells::Delimited {
            columns = split(first, splitter)
                .map_err(|fault| wrong(path, header, "header", &fault, "names of columns"))?;
            unique(path, line, &columns)?;
        }
    }
    let count = columns.len();
    let rows = lines
        .map(|(line, text)| Row {
            line,
            text: text.to_string(),
            cells: split(text, splitter).and_then(|cells| as_many(cells, count, splitter)),
        })
        .collect();
    Ok(Table {
        columns,
        header,
        rows,
    })
}

fn wrong(path: &Path, line: Option<usize>, entry: &str, found: &str, expected: &str) -> InputError {
    InputError::new(path, line, entry, found, expected)
}

fn decode(path: &Path, bytes: &[u8], encoding: Encoding) -> Result<String, InputError> {
    if encoding == Encoding::Latin1 {
        return Ok(bytes.iter().map(|byte| char::from(*byte)).collect());
    }
    std::str::from_utf8(bytes)
        .map(str::to_string)
        .map_err(|error| {
            let before = &bytes[..error.valid_up_to()];
            let line = 1 + before.iter().filter(|byte| **byte == b'\n').count();
            let found = format!("the byte {:#04x}, which is no UTF-8", bytes[before.len()]);
            let expected = "UTF-8, or `encoding: latin1` under `table` in the mapping";
            wrong(path, Some(line), "text of the table", &found, expected)
        })
}

/// Every named column once; columns without a name are nobody's.
fn unique(path: &Path, line: usize, columns: &[String]) -> Result<(), InputError> {
    for (i, name) in columns.iter().enumerate() {
        if !name.is_empty() && columns[..i].contains(name) {
            let found = format!("the column `{name}` twice");
            let expected = "every name once (`skip_lines` and `columns` can replace the header)";
            return Err(wrong(path, Some(line), "header", &found, expected));
        }
    }
    Ok(())
}

/// Lines must have one cell per column. Trailing empty cells are what spreadsheets leave.
fn as_many(
    mut cells: Vec<String>,
    count: usize,
    splitter: &Splitter,
) -> Result<Vec<String>, String> {
    if matches!(splitter, Splitter::Blanks | Splitter::At { .. }) {
        while cells.len() > count && cells.last().is_some_and(String::is_empty) {
            cells.pop();
        }
    }
    if cells.len() == count {
        return Ok(cells);
    }
    let many = if cells.len() == 1 { "" } else { "s" };
    Err(format!(
        "found {} cell{many}, expected {count}",
        cells.len()
    ))
}

fn split(line: &str, splitter: &Splitter) -> Result<Vec<String>, String> {
    match splitter {
        Splitter::Blanks => Ok(line.split_whitespace().map(str::to_string).collect()),
        Splitter::At { delimiter, quote } => delimited(line, *delimiter, *quote),
        Splitter::Places(places) => fixed(line, places),
    }
}

fn delimited(line: &str, delimiter: char, quote: Option<char>) -> Result<Vec<String>, String> {
    let mut cells = Vec::new();
    let mut rest = line;
    loop {
        let start = rest.trim_start_matches([' ', '\t'].as_slice());
        // A tab may itself be the delimiter, and then blank cells count.
        let start = if delimiter == '\t' {
            rest.trim_start_matches(' ')
        } else {
            start
        };
        let quoted = quote.filter(|quote| start.starts_with(*quote));
        let (cell, after) = match quoted {
            None => match rest.split_once(delimiter) {
                Some((cell, after)) => (cell.trim().to_string(), Some(after)),
                None => (rest.trim().to_string(), None),
            },
            Some(quote) => {
                let (cell, after) = quoted_cell(&start[quote.len_utf8()..], quote)?;
                let blank = after.split(delimiter).next().unwrap_or("");
                if !blank.trim().is_empty() {
                    return Err(format!(
                        "found `{}` behind a quoted cell, expected the delimiter",
                        blank.trim()
                    ));
                }
                (
                    cell.trim().to_string(),
                    after.split_once(delimiter).map(|(_, after)| after),
                )
            }
        };
        cells.push(cell);
        match after {
            Some(after) => rest = after,
            None => return Ok(cells),
        }
    }
}

/// The text up to the closing quote, and what follows it.
fn quoted_cell(text: &str, quote: char) -> Result<(String, &str), String> {
    let (mut cell, mut rest) = (String::new(), text);
    loop {
        let Some((part, after)) = rest.split_once(quote) else {
            return Err(format!(
                "found a quote {quote} that is not closed, expected it closed on the line"
            ));
        };
        cell.push_str(part);
        match after.strip_prefix(quote) {
            Some(more) => {
                cell.push(quote);
                rest = more;
            }
            None => return Ok((cell, after)),
        }
    }
}

fn fixed(line: &str, places: &[(String, usize, usize)]) -> Result<Vec<String>, String> {
    if line.contains('\t') {
        return Err("found a tab, whose width nobody knows, expected blanks".to_string());
    }
    let signs: Vec<char> = line.chars().collect();
    let blank = |at: Option<usize>| {
        at.and_then(|at| signs.get(at))
            .is_none_or(|c| c.is_whitespace())
    };
    let owned = |at: usize| {
        places
            .iter()
            .any(|(_, first, last)| (*first..=*last).contains(&at))
    };
    let mut cells = Vec::new();
    for (name, first, last) in places {
        // A word that goes on in a place no column owns was cut by wrong places.
        let before = first.checked_sub(1).filter(|at| !owned(*at));
        let after = Some(last + 1).filter(|at| !owned(*at));
        let cut_front = !blank(before) && !blank(Some(*first));
        let cut_end = !blank(after) && !blank(Some(*last));
        if cut_front || cut_end {
            return Err(format!(
                "found a text that goes on beyond the places {} to {} of `{name}`, expected it inside",
                first + 1,
                last + 1
            ));
        }
        let end = signs.len().min(last + 1);
        let cell: String = signs[(*first).min(end)..end].iter().collect();
        cells.push(cell.trim().to_string());
    }
    Ok(cells)
}

#[cfg(test)]
mod tests {
    use super::*;

    // Wrong splitting would shift numbers into other columns without anybody noticing.
    #[test]
    fn lines_split_into_cells() {
        let at = |delimiter, quote| Splitter::At { delimiter, quote };
        let cells = |line: &str, splitter: &Splitter| split(line, splitter).expect("cells");
        assert_eq!(cells("a, b ,,c", &at(',', None)), ["a", "b", "", "c"]);
        assert_eq!(
            cells(r#""a;b"; 'c ;"say ""no""";"#, &at(';', Some('"'))),
            ["a;b", "'c", r#"say "no""#, ""]
        );
        assert_eq!(cells("a\t\t b\t", &at('\t', None)), ["a", "", "b", ""]);
        assert_eq!(cells("  a   b\tc ", &Splitter::Blanks), ["a", "b", "c"]);
        for line in [r#""a;b"#, r#""a"b;c"#] {
            assert!(split(line, &at(';', Some('"'))).is_err(), "{line}");
        }
        let places = Splitter::Places(vec![("x".into(), 0, 2), ("y".into(), 4, 6)]);
        assert_eq!(cells("abc def", &places), ["abc", "def"]);
        assert_eq!(cells("é", &places), ["é", ""]);
        for line in ["abcd", "abc defg", "  xxabc"] {
            assert!(split(line, &places).is_err(), "{line}");
        }
    }
}
