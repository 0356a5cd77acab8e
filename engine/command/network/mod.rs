//! Owns the verb `network` and its own verbs.
//!
//! It never computes: each verb's file makes one library call and prints its result.

mod check;
mod compare;
mod show;

use super::Outcome;
use crate::errors::Failure;
use clap::Subcommand;

#[derive(Debug, Subcommand)]
pub enum Verb {
    /// Audit a network: what is wrong, doubtful or missing, and why it matters
    Check(check::Arguments),
    /// List all reactions with their coefficients in given conditions
    Show(Box<show::Arguments>),
    /// Say what differs between two networks
    Compare(compare::Arguments),
}

pub fn network(verb: &Verb) -> Result<Outcome, Failure> {
    match verb {
        Verb::Check(a) => check::check(a),
        Verb::Show(a) => show::show(a),
        Verb::Compare(a) => compare::compare(a),
    }
}

/// A line of a file, or nothing.
fn line(line: Option<usize>) -> String {
    line.map_or(String::new(), |line| line.to_string())
}
