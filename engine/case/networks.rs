//! Owns which network a case runs with: built in by name, or a file.
//!
//! It never reads the network's content.

use super::checker::Checker;
use super::{Files, beside, file_text};
use crate::errors::Failure;
use std::path::PathBuf;

/// The networks inside the program.
const BUILT_IN: [(&str, &str); 1] = [("standard", include_str!("../../networks/standard.yaml"))];

/// The text of a built-in network.
pub fn built_in_network(name: &str) -> Option<&'static str> {
    BUILT_IN
        .iter()
        .find(|(known, _)| *known == name)
        .map(|(_, text)| *text)
}

pub(super) struct Choice {
    pub(super) name: String,
    pub(super) path: Option<PathBuf>,
    pub(super) text: String,
}

pub(super) fn read(
    check: &mut Checker,
    given: Option<&str>,
    files: Files,
) -> Result<Option<Choice>, Failure> {
    let name = given.unwrap_or("standard").to_string();
    if given.is_none() {
        check.default_taken("network", name.clone());
    }
    if let Some(text) = built_in_network(&name) {
        return Ok(Some(Choice {
            name,
            path: None,
            text: text.to_string(),
        }));
    }
    if !name.ends_with(".yaml") {
        let known: Vec<&str> = BUILT_IN.iter().map(|(known, _)| *known).collect();
        let expected = format!("{}, or a path ending in .yaml", known.join(", "));
        check.error("network", format!("`{name}`"), expected);
        return Ok(None);
    }
    let path = beside(check.file, &name);
    let text = file_text(check, "network", &path, files)?;
    Ok(text.map(|text| Choice {
        name,
        path: Some(path),
        text,
    }))
}
