//! Owns the blocks `accuracy`, `grains` and `gas` of a case with their defaults.
//!
//! It never says what the options do: the rate laws do.

use super::Block;
use super::checker::{Bounds, Checker, NOT_NEGATIVE, RATIO, SHARE};
use super::layout::{AccuracyBlock, BindingName, GasBlock, GrainsBlock};
use crate::network::model::GrainOptions;
use crate::units::{Dimension, Quantity, number_text};

const TOLERANCE: Bounds = Bounds {
    allows: |x| (1.0e-12..=0.1).contains(&x),
    words: "from 1e-12 to 0.1",
};
/// Above 1e-10 the floor hides species every user asks for; far below 1e-40 the integrator chases
/// numbers that mean nothing.
const FLOOR: Bounds = Bounds {
    allows: |x| (1.0e-40..=1.0e-10).contains(&x),
    words: "from 1e-40 to 1e-10",
};
const LAYERS: Bounds = Bounds {
    allows: |x| x > 0.0 && x <= 1000.0,
    words: "above 0, at most 1000",
};
/// Encounters are confined to whole layers and more: below one there is no pair to meet.
const ACTIVE_LAYERS: Bounds = Bounds {
    allows: |x| (1.0..=1000.0).contains(&x),
    words: "from 1 to 1000",
};
/// A site is between about 1 and 30 A apart from the next.
const SITES: Bounds = Bounds {
    allows: |x| (1.0e13..=1.0e16).contains(&x),
    words: "from 1e13 to 1e16 cm^-2",
};
const COLLIDERS: Bounds = Bounds {
    allows: |x| x > 0.0 && x <= 2.0,
    words: "above 0, at most 2",
};

/// Relative tolerance and smallest abundance.
pub(super) fn accuracy(check: &mut Checker, block: &AccuracyBlock) -> Block<(f64, f64)> {
    let relative = check.number(
        "accuracy.relative",
        block.relative.as_ref(),
        1.0e-5,
        TOLERANCE,
    );
    let smallest = check.number("accuracy.smallest", block.smallest.as_ref(), 1.0e-25, FLOOR);
    let resolved = format!(
        "accuracy: {{relative: {}, smallest: {}}}\n",
        relative.text, smallest.text
    );
    Block {
        value: (relative.value, smallest.value),
        resolved,
    }
}

pub(super) fn grains(check: &mut Checker, block: &GrainsBlock) -> Block<GrainOptions> {
    let usual = GrainOptions::default();
    let active = check.number(
        "grains.active_layers",
        block.active_layers.as_ref(),
        usual.active_layers,
        ACTIVE_LAYERS,
    );
    let mut layers = |name: &str, given: &Option<Quantity>, default: f64| {
        check.number(&format!("grains.{name}"), given.as_ref(), default, LAYERS)
    };
    let desorbing = layers(
        "desorbing_layers",
        &block.desorbing_layers,
        usual.desorbing_layers,
    );
    let lit = layers("lit_layers", &block.lit_layers, usual.lit_layers);
    let mut ratio = |name: &str, given: &Option<Quantity>, default: f64| {
        check.number(
            &format!("grains.hop_ratio.{name}"),
            given.as_ref(),
            default,
            RATIO,
        )
    };
    let atoms = ratio("atoms", &block.hop_ratio.atoms, usual.hop_ratio_atoms);
    let molecules = ratio(
        "molecules",
        &block.hop_ratio.molecules,
        usual.hop_ratio_molecules,
    );
    let leaving = block.leaving_share.as_ref();
    let leaving = check.number("grains.leaving_share", leaving, usual.leaving_share, SHARE);
    let sites = check.quantity(
        "grains.site_density",
        block.site_density.as_ref(),
        &format!("{} cm^-2", number_text(usual.site_density)),
        Dimension::Column,
        SITES,
    );
    let charge_states = match &block.charge_states {
        Some(given) => check.count("grains.charge_states", given, 0, 20) as i32,
        None => {
            check.default_taken("grains.charge_states", usual.charge_states.to_string());
            usual.charge_states
        }
    };
    if block.binding.is_none() {
        check.default_taken("grains.binding", "water");
    }
    let (pure_ice, binding) = match block.binding {
        None | Some(BindingName::Water) => (false, "water"),
        Some(BindingName::Pure) => (true, "pure"),
    };
    let resolved = format!(
        "grains:\n  active_layers: {}\n  desorbing_layers: {}\n  lit_layers: {}\n  \
         hop_ratio: {{atoms: {}, molecules: {}}}\n  leaving_share: {}\n  site_density: {}\n  \
         charge_states: {charge_states}\n  binding: {binding}\n",
        active.text, desorbing.text, lit.text, atoms.text, molecules.text, leaving.text, sites.text
    );
    let value = GrainOptions {
        active_layers: active.value,
        desorbing_layers: desorbing.value,
        lit_layers: lit.value,
        hop_ratio_atoms: atoms.value,
        hop_ratio_molecules: molecules.value,
        leaving_share: leaving.value,
        site_density: sites.value,
        charge_states,
        pure_ice,
    };
    Block { value, resolved }
}

/// Turbulence (cm s^-1) and colliders per hydrogen nucleus, if fixed.
pub(super) fn gas(check: &mut Checker, block: &GasBlock) -> Block<(f64, Option<f64>)> {
    let turbulence = block.turbulence.as_ref();
    let turbulence = check.quantity(
        "gas.turbulence",
        turbulence,
        "0.2 km/s",
        Dimension::Velocity,
        NOT_NEGATIVE,
    );
    let colliders = block
        .colliders
        .as_ref()
        .map(|given| check.required("gas.colliders", given, Dimension::Number, COLLIDERS));
    let written = colliders
        .as_ref()
        .map_or(String::new(), |c| format!(", colliders: {}", c.text));
    let resolved = format!("gas: {{turbulence: {}{written}}}\n", turbulence.text);
    Block {
        value: (turbulence.value, colliders.map(|c| c.value)),
        resolved,
    }
}
