//! Owns the engine's failures and the one place where they become exit codes.
//!
//! Errors carry data (file, line, entry, found, expected); wording happens in `Display` only.

use std::fmt;
use std::path::{Path, PathBuf};

/// Something a user wrote that the engine cannot accept.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct InputError {
    /// The file it stands in; empty for a command-line argument.
    pub file: PathBuf,
    /// 1-based line, where one is known.
    pub line: Option<usize>,
    /// The entry: a key path (`accuracy.relative`), a reaction, a table column, an option.
    pub entry: String,
    /// What stands there.
    pub found: String,
    /// What should.
    pub expected: String,
}

impl InputError {
    /// An error of `entry` in `file`, at `line` if known.
    pub fn new(
        file: &Path,
        line: Option<usize>,
        entry: impl Into<String>,
        found: impl Into<String>,
        expected: impl Into<String>,
    ) -> Self {
        InputError {
            file: file.to_path_buf(),
            line,
            entry: entry.into(),
            found: found.into(),
            expected: expected.into(),
        }
    }
}

impl fmt::Display for InputError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if !self.file.as_os_str().is_empty() {
            write!(f, "{}", self.file.display())?;
            if let Some(line) = self.line {
                write!(f, ":{line}")?;
            }
            write!(f, ": ")?;
        }
        write!(
            f,
            "{}: found {}, expected {}",
            self.entry, self.found, self.expected
        )
    }
}

/// Why a command could not do its work.
#[derive(Debug)]
pub enum Failure {
    /// The input is wrong: exit status 2. Never empty.
    Input(Vec<InputError>),
    /// The machine failed us (disk full, file unreadable, HDF5 error): exit status 3.
    Machine {
        /// What was being done.
        doing: String,
        /// The file it concerned.
        path: PathBuf,
        /// What the system said.
        cause: String,
    },
    /// Stopped by a signal (2 SIGINT, 15 SIGTERM): exit status 128 + signal.
    Stopped(i32),
}

impl Failure {
    /// The exit status of the command: 2 wrong input, 3 machine, 130/143 signal.
    /// (0 is success, 1 "finished but some cells failed": those are not failures of the command.)
    pub fn exit_code(&self) -> u8 {
        match self {
            Failure::Input(_) => 2,
            Failure::Machine { .. } => 3,
            Failure::Stopped(signal) => 128u8.wrapping_add(*signal as u8),
        }
    }

    /// A machine failure while `doing` something with `path`.
    pub fn machine(doing: impl Into<String>, path: &Path, cause: impl fmt::Display) -> Self {
        Failure::Machine {
            doing: doing.into(),
            path: path.to_path_buf(),
            cause: cause.to_string(),
        }
    }
}

impl From<InputError> for Failure {
    fn from(error: InputError) -> Self {
        Failure::Input(vec![error])
    }
}

impl fmt::Display for Failure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Failure::Input(errors) => {
                for (i, error) in errors.iter().enumerate() {
                    if i > 0 {
                        writeln!(f)?;
                    }
                    write!(f, "{error}")?;
                }
                Ok(())
            }
            Failure::Machine { doing, path, cause } => {
                write!(f, "{}: failed while {doing}: {cause}", path.display())
            }
            Failure::Stopped(signal) => write!(f, "stopped by signal {signal}"),
        }
    }
}

impl std::error::Error for Failure {}
