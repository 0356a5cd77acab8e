//! Owns the reverse of a reversible line: the same change backwards, right behind it.

use super::Expansion;
use crate::network::equilibrium;
use crate::network::model::{Cause, Polynomial, Reaction};
use crate::network::read::Entry;

impl Expansion<'_> {
    /// The reverse of the reaction added last, which came from `entry`. It inherits everything
    /// about its uncertainty, its group too: forward and reverse are known equally well.
    pub(super) fn reverse(&mut self, entry: &Entry) {
        let Some(forward) = self.reactions.last().cloned() else {
            return;
        };
        let (consumed, products) = (forward.products, forward.consumed);
        let cause = Cause::Reverse {
            forward: Box::new(forward.cause),
            gained: entry.products.len() as i32 - entry.reactants.len() as i32,
            polynomials: self.network.polynomials(entry),
        };
        self.reactions.push(Reaction {
            change: self.text(&consumed, &products),
            reactants: consumed.clone(),
            consumed,
            products,
            cause,
            ..forward
        });
    }
}

impl crate::network::Network {
    /// Products less reactants of a reaction; empty where a species has no polynomials.
    fn polynomials(&self, entry: &Entry) -> Vec<Polynomial> {
        let terms = self.thermo.terms(entry, &self.roster);
        terms.map_or_else(|_| Vec::new(), |terms| equilibrium::sum(&terms))
    }
}
