//! Owns what is computed on request, apart from a run: the coefficients of a network in given
//! conditions, and audits that need them.
//!
//! It never integrates, and never reads a run file.

pub mod audit;
pub mod listing;

use crate::case::{built_in_network, unreadable};
use crate::errors::{Failure, InputError};
use crate::network::{self, Network};
use std::path::{Path, PathBuf};

/// Opens a network by its built-in name (`standard`) or the path of its file.
///
/// # Errors
/// Everything the reader refuses, a file that is not there, or one the machine cannot read.
pub fn open(name: &str) -> Result<Network, Failure> {
    let (path, text) = text(name)?;
    network::read(&path, &text).map_err(Failure::Input)
}

/// The text of a network, with the path that its findings name.
fn text(name: &str) -> Result<(PathBuf, String), Failure> {
    if let Some(text) = built_in_network(name) {
        let path = Path::new("networks").join(format!("{name}.yaml"));
        return Ok((path, text.to_string()));
    }
    let path = Path::new(name);
    match std::fs::read_to_string(path) {
        Ok(text) => Ok((path.to_path_buf(), text)),
        Err(cause) => match unreadable(&cause) {
            Some(found) => {
                let expected = "a network file, or the built-in network `standard`";
                Err(InputError::new(Path::new(""), None, name, found, expected).into())
            }
            None => Err(Failure::machine("reading the network", path, cause)),
        },
    }
}
