//! Owns the way from the names of a table to ours.
//!
//! It never knows whether a change balances: the reader of networks judges that.

use super::mapping::NameForm;
use crate::network::model::Phase;
use crate::network::names;

/// One side of a change.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Side {
    pub species: Vec<String>,
    pub markers: Vec<String>,
}

/// Most copies of one species that a number before it may stand for.
const MOST_COPIES: usize = 9;

/// Reads the cells of one side; `separator` stands between species of one cell.
pub fn side(cells: &[&str], separator: Option<&str>, form: &NameForm) -> Result<Side, String> {
    let mut side = Side::default();
    for cell in cells {
        // Before splitting: a filler may hold the separator.
        if form.filler.iter().any(|filler| filler == cell.trim()) {
            continue;
        }
        match separator {
            None => word(cell, form, &mut side)?,
            Some("spaces") => {
                for text in cell.split_whitespace() {
                    word(text, form, &mut side)?;
                }
            }
            Some(separator) => {
                for text in cell.split(separator) {
                    word(text, form, &mut side)?;
                }
            }
        }
    }
    Ok(side)
}

fn word(text: &str, form: &NameForm, side: &mut Side) -> Result<(), String> {
    let text = text.trim();
    if text.is_empty() || form.filler.iter().any(|filler| filler == text) {
        return Ok(());
    }
    if form.markers.iter().any(|marker| marker == text) {
        side.markers.push(text.to_string());
        return Ok(());
    }
    let (copies, theirs) = copies(text);
    let name = name(theirs, form);
    let called = if name == theirs {
        String::new()
    } else {
        format!(" (called `{theirs}` in the table)")
    };
    let species = names::species(&name)
        .map_err(|error| format!("found {}{called}, expected {}", error.found, error.expected))?;
    let instead = match species.phase {
        Phase::Ice => {
            "gas species; ices and what happens on them are written by hand under `ices` and `surface`"
        }
        Phase::Dust => "gas species; reactions with dust are generated from the block `dust`",
        _ => {
            side.species.extend(std::iter::repeat_n(name, copies));
            return Ok(());
        }
    };
    Err(format!("found `{name}`{called}, expected {instead}"))
}

/// `2 OH` is OH twice.
fn copies(text: &str) -> (usize, &str) {
    match text.split_once(char::is_whitespace) {
        Some((count, name)) => match count.parse() {
            Ok(count) if (1..=MOST_COPIES).contains(&count) => (count, name.trim()),
            _ => (1, text),
        },
        None => (1, text),
    }
}

/// Our name for one of theirs.
fn name(theirs: &str, form: &NameForm) -> String {
    if let Some(ours) = form.rename.get(theirs) {
        return ours.clone();
    }
    let prefix = form
        .ice_prefix
        .as_deref()
        .and_then(|prefix| theirs.strip_prefix(prefix));
    let suffix = form
        .ice_suffix
        .as_deref()
        .and_then(|suffix| theirs.strip_suffix(suffix));
    match prefix.or(suffix) {
        Some(bare) => names::adsorbed_name(&gas_name(bare, form)),
        None => gas_name(theirs, form),
    }
}

fn gas_name(theirs: &str, form: &NameForm) -> String {
    if let Some(ours) = form.rename.get(theirs) {
        return ours.clone();
    }
    // The longest ending that fits: `__` must not be taken for `_`.
    let ending = (form.endings.iter())
        .filter_map(|(ending, ours)| {
            theirs
                .strip_suffix(ending.as_str())
                .map(|body| (body, ours))
        })
        .min_by_key(|(body, _)| body.len());
    match ending {
        Some((body, ours)) => with_elements(body, form) + ours,
        None => with_elements(theirs, form),
    }
}

/// Replaces pieces of a formula from left to right, the longest that fits first.
fn with_elements(theirs: &str, form: &NameForm) -> String {
    let (mut ours, mut rest) = (String::new(), theirs);
    while let Some(sign) = rest.chars().next() {
        let piece = (form.elements.iter())
            .filter(|(piece, _)| rest.starts_with(piece.as_str()))
            .max_by_key(|(piece, _)| piece.len());
        match piece {
            Some((piece, new)) => {
                ours.push_str(new);
                rest = &rest[piece.len()..];
            }
            None => {
                ours.push(sign);
                rest = &rest[sign.len_utf8()..];
            }
        }
    }
    ours
}

#[cfg(test)]
mod tests {
    use super::*;

    // A wrong name is another species, and balance does not always notice (HCO+ and HOC+).
    #[test]
    fn names_are_translated_in_order() {
        let map = |pairs: &[(&str, &str)]| {
            pairs
                .iter()
                .map(|(a, b)| (a.to_string(), b.to_string()))
                .collect()
        };
        let form = NameForm {
            filler: vec!["-".into(), "n/a".into()],
            markers: vec!["LIGHT".into()],
            rename: map(&[("el", "e-"), ("formyl", "HCO")]),
            ice_prefix: Some("on:".into()),
            ice_suffix: None,
            endings: map(&[("_", "+"), ("__", "++")]),
            elements: map(&[("HE", "He"), ("SI", "Si")]),
        };
        let read = |cells: &[&str], separator| side(cells, separator, &form);
        let both = read(&["HE_ + SIH2", "n/a", "el", "LIGHT", "2 OH"], Some(" + ")).unwrap();
        assert_eq!(both.species, ["He+", "SiH2", "e-", "OH", "OH"]);
        assert_eq!(both.markers, ["LIGHT"]);
        assert_eq!(
            read(&["C__ formyl"], Some("spaces")).unwrap().species,
            ["C++", "HCO"]
        );
        for (cell, said) in [
            (
                "on:formyl",
                "`HCO(ads)` (called `on:formyl` in the table), expected gas species",
            ),
            ("xyz", "unreadable"),
            ("10 H", "`10 H`"),
        ] {
            let error = read(&[cell], None).expect_err(cell);
            assert!(error.contains(said), "{error}");
        }
    }
}
