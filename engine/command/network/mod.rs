//! The verb `network`: what is done with a network file itself.

mod import;

use super::Outcome;
use crate::errors::Failure;

#[derive(Debug, clap::Args)]
pub struct Arguments {
    #[command(subcommand)]
    verb: NetworkVerb,
}

#[derive(Debug, clap::Subcommand)]
enum NetworkVerb {
    /// Turn a rate table into a network file, as a mapping file says
    Import(import::Arguments),
}

pub fn network(arguments: &Arguments) -> Result<Outcome, Failure> {
    match &arguments.verb {
        NetworkVerb::Import(a) => import::import(a),
    }
}
