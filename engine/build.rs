//! Owns the identity of a build: a short hash of the engine's sources and locked dependencies.
//!
//! A journal may only be continued by the very code that began it, and two builds of one version
//! number need not be the same code.

use sha2::{Digest, Sha256};
use std::path::{Path, PathBuf};
use std::{env, fs, io};

fn main() -> io::Result<()> {
    let top = PathBuf::from(env::var_os("CARGO_MANIFEST_DIR").unwrap_or_default());
    let mut files = vec![top.join("Cargo.lock"), top.join("Cargo.toml")];
    collect(&top.join("engine"), &mut files)?;
    files.sort();
    let mut hash = Sha256::new();
    for file in &files {
        // The name too, so that moving code counts; relative, so that the folder does not.
        hash.update(
            file.strip_prefix(&top)
                .unwrap_or(file)
                .to_string_lossy()
                .as_bytes(),
        );
        hash.update(fs::read(file)?);
    }
    let short: String = hash
        .finalize()
        .iter()
        .take(4)
        .map(|b| format!("{b:02x}"))
        .collect();
    println!("cargo:rustc-env=FROSTCLOCK_BUILD={short}");
    for watched in ["engine", "Cargo.lock", "Cargo.toml"] {
        println!("cargo:rerun-if-changed={watched}");
    }
    Ok(())
}

/// Every Rust source below `folder`.
fn collect(folder: &Path, files: &mut Vec<PathBuf>) -> io::Result<()> {
    for entry in fs::read_dir(folder)? {
        let path = entry?.path();
        if path.is_dir() {
            collect(&path, files)?;
        } else if path.extension().is_some_and(|e| e == "rs") {
            files.push(path);
        }
    }
    Ok(())
}
