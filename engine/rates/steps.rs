//! Owns the translation of an expanded network into the abstract steps of the kinetics core.
//!
//! It never evaluates a coefficient: the same steps serve every cell.

use crate::kinetics::{Factor, Mechanism, MechanismError, Step};
use crate::network::model::{Cause, Chemistry, Phase};

/// The mechanism of a network: one step per reaction, in order.
///
/// # Errors
/// If a reaction names a species out of bounds or has an order above three.
pub fn mechanism(chemistry: &Chemistry) -> Result<Mechanism, MechanismError> {
    let ice_total = chemistry
        .species
        .iter()
        .position(|s| s.phase == Phase::IceTotal);
    let options = &chemistry.options;
    let mut falloffs = 0;
    let mut factor_of_collision = |cause: &Cause| match cause {
        Cause::ThirdBody { .. } => Factor::Colliders,
        Cause::Falloff { .. } => {
            falloffs += 1;
            Factor::Falloff(falloffs - 1)
        }
        _ => Factor::One,
    };
    let steps = chemistry
        .reactions
        .iter()
        .map(|reaction| {
            let factor = match &reaction.cause {
                Cause::Reverse { forward, .. } => factor_of_collision(forward),
                Cause::ThermalDesorption { .. } | Cause::CosmicDesorption { .. } => {
                    Factor::TopLayers(options.desorbing_layers)
                }
                Cause::Photodesorption { .. } => Factor::TopLayers(options.lit_layers),
                Cause::Surface { .. } => Factor::Encounters(options.active_layers),
                other => factor_of_collision(other),
            };
            Step {
                order: reaction.reactants.clone(),
                change: reaction.net_change(ice_total, &chemistry.species),
                factor,
            }
        })
        .collect();
    // [M] = n(H2) + n(H) + n(He): the colliders of the network's falloff and third-body data.
    let colliders = ["H2", "H", "He"]
        .iter()
        .filter_map(|n| chemistry.find(n))
        .map(|s| (s, 1.0));
    Mechanism::new(
        chemistry.species.len(),
        steps,
        colliders.collect(),
        ice_total,
    )
}
