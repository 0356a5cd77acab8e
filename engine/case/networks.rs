//! Owns which network a case runs with: built in by name, or a file.
//!
//! It never reads the network's content, but for the polynomials it names.

use super::checker::Checker;
use super::{Files, beside, file_text};
use crate::errors::Failure;
use crate::network::thermo;
use std::path::{Path, PathBuf};

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
    /// Of the polynomials it names; empty if it names none.
    pub(super) thermo: String,
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
        let thermo = polynomials(check, Path::new(&name), text, files)?;
        return Ok(thermo.map(|thermo| Choice {
            name,
            path: None,
            text: text.to_string(),
            thermo,
        }));
    }
    if !name.ends_with(".yaml") {
        let known: Vec<&str> = BUILT_IN.iter().map(|(known, _)| *known).collect();
        let expected = format!("{}, or a path ending in .yaml", known.join(", "));
        check.error("network", format!("`{name}`"), expected);
        return Ok(None);
    }
    let path = beside(check.file, &name);
    let Some(text) = file_text(check, "network", &path, files)? else {
        return Ok(None);
    };
    let thermo = polynomials(check, &path, &text, files)?;
    Ok(thermo.map(|thermo| Choice {
        name,
        path: Some(path),
        text,
        thermo,
    }))
}

/// The text of the polynomials that the network names; empty if it names none, None after an
/// error of the user.
fn polynomials(
    check: &mut Checker,
    network: &Path,
    text: &str,
    files: Files,
) -> Result<Option<String>, Failure> {
    let Some(name) = thermo::named(network, text) else {
        return Ok(Some(String::new()));
    };
    if let Some(text) = thermo::built_in(&name) {
        return Ok(Some(text.to_string()));
    }
    // A name that cannot be one is an error of the network, which its reader reports.
    match thermo::known(&name) {
        Err(_) => Ok(Some(String::new())),
        Ok(()) => file_text(check, "network", &thermo::place(network, &name), files),
    }
}
