//! Owns the checks of a mapping that need no table: its look, its names, its keys.
//!
//! It never looks up a column: `plan` does.

use super::checker::Checker;
use super::mapping::{Cells, MappingFile, TableForm};
use super::table::Splitter;
use crate::network::names;

/// The layout of mappings that is read.
const LAYOUT: u32 = 1;

/// Checks the form; the splitter is only to be used if nothing was found.
pub fn check(mapping: &MappingFile, check: &mut Checker) -> Splitter {
    if mapping.mapping != LAYOUT {
        let expected = format!("{LAYOUT}, the layout of mappings this version reads");
        check.error("mapping", mapping.mapping.to_string(), expected);
    }
    if mapping.network.trim().is_empty() {
        check.error(
            "network",
            "an empty name",
            "a name for the network that is made",
        );
    }
    if mapping.laws.is_empty() {
        check.error("laws", "an empty list", "at least one law");
    }
    names_form(mapping, check);
    change_form(mapping, check);
    table_form(&mapping.table, check)
}

fn names_form(mapping: &MappingFile, check: &mut Checker) {
    for (theirs, ours) in &mapping.names.rename {
        if let Err(error) = names::species(ours) {
            check.error(
                &format!("names.rename.{theirs}"),
                error.found,
                error.expected,
            );
        }
    }
    let fixes = [
        ("ice_prefix", &mapping.names.ice_prefix),
        ("ice_suffix", &mapping.names.ice_suffix),
    ];
    for (key, text) in fixes {
        if text.as_ref().is_some_and(String::is_empty) {
            check.error(
                &format!("names.{key}"),
                "an empty text",
                "at least one sign",
            );
        }
    }
    let maps = [
        ("endings", &mapping.names.endings),
        ("elements", &mapping.names.elements),
    ];
    for (key, map) in maps {
        if map.contains_key("") {
            check.error(
                &format!("names.{key}"),
                "an empty text",
                "at least one sign",
            );
        }
    }
}

fn change_form(mapping: &MappingFile, check: &mut Checker) {
    let form = &mapping.change;
    let sides = !form.reactants.is_empty() || !form.products.is_empty();
    let either = "either `equation` with `arrow`, or `reactants` and `products`";
    match (&form.equation, sides) {
        (Some(_), true) => check.error("change", "`equation` and columns of sides", either),
        (Some(_), false)
            if form
                .arrow
                .as_ref()
                .is_none_or(|arrow| arrow.trim().is_empty()) =>
        {
            check.error("change", "`equation` without `arrow`", either);
        }
        (None, _) if form.reactants.is_empty() || form.products.is_empty() => {
            check.error("change", "only one side or none", either);
        }
        (None, _) if form.arrow.is_some() => {
            check.error("change.arrow", "`arrow` without `equation`", either);
        }
        _ => {}
    }
    if form.separator.as_ref().is_some_and(String::is_empty) {
        let expected = "the text between two species, such as \" + \", or `spaces`";
        check.error("change.separator", "an empty text", expected);
    }
}

fn table_form(form: &TableForm, check: &mut Checker) -> Splitter {
    let decimal = form.decimal.as_deref().unwrap_or(".");
    if !matches!(decimal, "." | ",") {
        check.error("table.decimal", format!("`{decimal}`"), "`.` or `,`");
    }
    if form.comment.as_ref().is_some_and(String::is_empty) {
        check.error(
            "table.comment",
            "an empty text",
            "the start of lines to pass over",
        );
    }
    match form.cells {
        Cells::Delimited => delimited(form, decimal, check),
        Cells::Fixed => fixed(form, check),
    }
}

fn delimited(form: &TableForm, decimal: &str, check: &mut Checker) -> Splitter {
    if !form.places.is_empty() {
        check.error(
            "table.places",
            "`places` of delimited cells",
            "`places` with `cells: fixed` only",
        );
    }
    match (form.header, form.columns.is_empty()) {
        (true, false) => check.error(
            "table.columns",
            "`columns` beside a header",
            "one of the two; `skip_lines` passes over a header",
        ),
        (false, true) => check.error(
            "table",
            "neither `header: true` nor `columns`",
            "names of the columns",
        ),
        _ => {}
    }
    for (i, name) in form.columns.iter().enumerate() {
        if !name.is_empty() && form.columns[..i].contains(name) {
            check.error(
                &format!("table.columns[{i}]"),
                format!("`{name}` twice"),
                "every name once",
            );
        }
    }
    let quote = form
        .quote
        .as_deref()
        .and_then(|text| one_sign(text, "table.quote", check));
    let delimiter = match form.delimiter.as_deref() {
        Some("spaces") => {
            if quote.is_some() {
                check.error(
                    "table.quote",
                    "quotes between `spaces`",
                    "no `quote` with `delimiter: spaces`",
                );
            }
            return Splitter::Blanks;
        }
        Some("tab") => Some('\t'),
        Some(text) => one_sign(text, "table.delimiter", check),
        None => {
            check.error("table", "no `delimiter`", "one sign, `tab` or `spaces`");
            None
        }
    };
    let delimiter = delimiter.unwrap_or(',');
    if quote == Some(delimiter) {
        check.error(
            "table.quote",
            format!("`{delimiter}`, the delimiter"),
            "another sign",
        );
    }
    if decimal == "," && delimiter == ',' && quote.is_none() {
        check.error(
            "table.decimal",
            "`,`, the delimiter",
            "another sign, or cells in quotes",
        );
    }
    Splitter::At { delimiter, quote }
}

fn one_sign(text: &str, place: &str, check: &mut Checker) -> Option<char> {
    let mut signs = text.chars();
    match (signs.next(), signs.next()) {
        (Some(sign), None) => Some(sign),
        _ => {
            check.error(place, format!("`{text}`"), "one sign");
            None
        }
    }
}

fn fixed(form: &TableForm, check: &mut Checker) -> Splitter {
    let strangers = [
        ("delimiter", form.delimiter.is_some()),
        ("quote", form.quote.is_some()),
        ("columns", !form.columns.is_empty()),
    ];
    for (key, given) in strangers {
        if given {
            let expected = "only `places` with `cells: fixed`";
            check.error(&format!("table.{key}"), format!("`{key}`"), expected);
        }
    }
    if form.places.is_empty() {
        check.error(
            "table",
            "no `places`",
            "`places: {NAME: [first, last], ...}`, counted from 1",
        );
    }
    let mut places = Vec::new();
    for (name, [first, last]) in &form.places {
        if *first == 0 || last < first {
            let expected = "[first, last], counted from 1, both included";
            check.error(
                &format!("table.places.{name}"),
                format!("[{first}, {last}]"),
                expected,
            );
            continue;
        }
        places.push((name.clone(), first - 1, last - 1));
    }
    places.sort_by_key(|(_, first, _)| *first);
    for pair in places.windows(2) {
        if pair[1].1 <= pair[0].2 {
            let place = format!("table.places.{}", pair[1].0);
            let found = format!(
                "[{}, {}], which overlaps `{}`",
                pair[1].1 + 1,
                pair[1].2 + 1,
                pair[0].0
            );
            check.error(&place, found, "places of its own for every column");
        }
    }
    Splitter::Places(places)
}
