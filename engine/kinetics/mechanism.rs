//! Owns the abstract kinetic system: which species each step changes, in what order, and which
//! state-dependent factor multiplies it; and the checks that make the evaluations (`fluxes`, `jacobian`) safe.
//!
//! It never knows chemistry: any species, any integer coefficients, zeroth to third order.

use super::factor::FactorValue;
use super::fluxes::FluxPlan;
use super::jacobian::JacobianPlan;
use super::lu::Pattern;
use std::sync::Arc;

/// A state-dependent factor of a flux.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Factor {
    /// 1.
    One,
    /// M = sum of weights times colliders (or a fixed value given with the coefficients).
    Colliders,
    /// The falloff coefficient number `usize` of [`Coefficients::falloff`] at M.
    Falloff(usize),
    /// min(1, n/L), L = ice total / sites: the share of the ice that lies in its top n layers.
    TopLayers(f64),
    /// min(1, n/L)^2 / clamp(L, 1, n): encounters within the n active layers.
    Encounters(f64),
}

/// One step: flux = k * factor(y) * product of y over `order`; dy/dt += change * flux.
#[derive(Debug, Clone, PartialEq)]
pub struct Step {
    /// Species in the rate law with repeats, at most three; empty for a source.
    pub order: Vec<usize>,
    /// Net change per event: (species, coefficient), each species once, none zero.
    pub change: Vec<(usize, i32)>,
    pub factor: Factor,
}

/// Troe-type falloff with both limits already in units of the state (multiplied by n_H, n_H^2).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Falloff {
    /// Low-pressure limit per collider abundance.
    pub low: f64,
    /// High-pressure limit.
    pub high: f64,
    /// log10 of the centre broadening factor.
    pub log_centre: f64,
}

/// The numbers of one cell.
#[derive(Debug, Clone, PartialEq)]
pub struct Coefficients {
    /// One per step, s^-1 in units of the state.
    pub k: Vec<f64>,
    pub falloff: Vec<Falloff>,
    /// Adsorption sites per hydrogen nucleus: one layer holds this abundance.
    pub sites: f64,
    /// M given outright instead of from the state.
    pub fixed_colliders: Option<f64>,
}

/// Why a kinetic system cannot be built, or does not fit its coefficients.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum MechanismError {
    #[error("step {step} names species {species}, but there are only {count}")]
    NoSuchSpecies {
        step: usize,
        species: usize,
        count: usize,
    },
    #[error("step {step} is of order {order}; at most three are possible")]
    OrderTooHigh { step: usize, order: usize },
    #[error("step {step} lists species {species} twice among its changes")]
    RepeatedChange { step: usize, species: usize },
    #[error("step {step} lists no change of species {species}")]
    ZeroChange { step: usize, species: usize },
    #[error("step {step} depends on the layers of ice, but no ice total is given")]
    NoIceTotal { step: usize },
    #[error("step {step}: {layers} layers; {least}")]
    BadLayers {
        step: usize,
        layers: f64,
        least: &'static str,
    },
    #[error(
        "collider {species} (weight {weight}) is not one of the {count} species or is not finite"
    )]
    BadCollider {
        species: usize,
        weight: f64,
        count: usize,
    },
    #[error("the ice total is species {species}, but there are only {count}")]
    BadIceTotal { species: usize, count: usize },
    #[error("{found} coefficients for {expected} steps")]
    WrongCount { found: usize, expected: usize },
    #[error("falloff coefficient {number} is used, but there are only {count}")]
    NoSuchFalloff { number: usize, count: usize },
    #[error("{what} {number} is {value}")]
    NotFinite {
        what: &'static str,
        number: usize,
        value: f64,
    },
}

/// Work space of one evaluation; made by [`Mechanism::scratch`], one per thread.
#[derive(Debug, Clone)]
pub struct Scratch {
    pub(super) factors: Vec<FactorValue>,
    pub(super) fluxes: Vec<f64>,
    pub(super) partials: Vec<f64>,
}

/// A kinetic system in the form it is evaluated in: flat arrays, nothing allocated per call.
#[derive(Debug, Clone)]
pub struct Mechanism {
    species: usize,
    steps: Vec<Step>,
    pub(super) colliders: Vec<(usize, f64)>,
    pub(super) ice_total: Option<usize>,
    /// Distinct factors other than One.
    pub(super) factors: Vec<Factor>,
    pub(super) flux_plan: FluxPlan,
    pub(super) jacobian_plan: JacobianPlan,
    /// The order and pattern of the LU of I - c J, shared by all threads.
    elimination: Arc<Pattern>,
}

impl Mechanism {
    /// A system of `species` species and `steps`; `colliders` are (species, weight) of M, and
    /// `ice_total` is the species that carries the total of the ice, needed by layer factors.
    pub fn new(
        species: usize,
        steps: Vec<Step>,
        colliders: Vec<(usize, f64)>,
        ice_total: Option<usize>,
    ) -> Result<Mechanism, MechanismError> {
        if let Some(total) = ice_total.filter(|&total| total >= species) {
            return Err(MechanismError::BadIceTotal {
                species: total,
                count: species,
            });
        }
        for &(collider, weight) in &colliders {
            if collider >= species || !weight.is_finite() {
                return Err(MechanismError::BadCollider {
                    species: collider,
                    weight,
                    count: species,
                });
            }
        }
        for (number, step) in steps.iter().enumerate() {
            check_step(number, step, species, ice_total)?;
        }
        // Repeated colliders would meet twice in one column of the Jacobian; add their weights.
        let mut weights: Vec<(usize, f64)> = Vec::new();
        for (collider, weight) in colliders {
            match weights.iter_mut().find(|(known, _)| *known == collider) {
                Some((_, sum)) => *sum += weight,
                None => weights.push((collider, weight)),
            }
        }
        let mut factors: Vec<Factor> = Vec::new();
        for step in &steps {
            if step.factor != Factor::One && !factors.contains(&step.factor) {
                factors.push(step.factor);
            }
        }
        let flux_plan = FluxPlan::new(species, &steps, &factors);
        let jacobian_plan =
            JacobianPlan::new(species, &steps, &factors, &weights, ice_total, &flux_plan);
        let (col_ptr, row_idx) = jacobian_plan.pattern();
        let elimination = Arc::new(Pattern::new(col_ptr, row_idx));
        Ok(Mechanism {
            species,
            steps,
            colliders: weights,
            ice_total,
            factors,
            flux_plan,
            jacobian_plan,
            elimination,
        })
    }

    /// The number of species, which is the length of the state.
    pub fn species(&self) -> usize {
        self.species
    }

    /// The steps as given.
    pub fn steps(&self) -> &[Step] {
        &self.steps
    }

    /// The plan of the factorisation of I - c J.
    pub fn elimination(&self) -> &Arc<Pattern> {
        &self.elimination
    }

    /// Work space for one thread.
    pub fn scratch(&self) -> Scratch {
        Scratch {
            factors: vec![FactorValue::default(); self.factors.len()],
            fluxes: vec![0.0; self.steps.len()],
            partials: vec![0.0; self.jacobian_plan.slots()],
        }
    }

    /// Whether `coefficients` belong to this system and are all finite: the evaluations rely on it.
    pub fn check(&self, coefficients: &Coefficients) -> Result<(), MechanismError> {
        let Coefficients {
            k,
            falloff,
            sites,
            fixed_colliders,
        } = coefficients;
        if k.len() != self.steps.len() {
            return Err(MechanismError::WrongCount {
                found: k.len(),
                expected: self.steps.len(),
            });
        }
        for factor in &self.factors {
            if let Factor::Falloff(number) = *factor
                && number >= falloff.len()
            {
                return Err(MechanismError::NoSuchFalloff {
                    number,
                    count: falloff.len(),
                });
            }
        }
        let finite = |what, number, value: f64| {
            if value.is_finite() {
                Ok(())
            } else {
                Err(MechanismError::NotFinite {
                    what,
                    number,
                    value,
                })
            }
        };
        for (number, &value) in k.iter().enumerate() {
            finite("the coefficient of step", number, value)?;
        }
        for (number, f) in falloff.iter().enumerate() {
            finite("the low-pressure limit of falloff", number, f.low)?;
            finite("the high-pressure limit of falloff", number, f.high)?;
            finite("the centre of falloff", number, f.log_centre)?;
        }
        finite("the number of sites, constant", 0, *sites)?;
        finite(
            "the density of colliders, constant",
            0,
            fixed_colliders.unwrap_or(0.0),
        )
    }
}

/// Checks the indices and numbers of one step.
fn check_step(
    number: usize,
    step: &Step,
    count: usize,
    ice_total: Option<usize>,
) -> Result<(), MechanismError> {
    if step.order.len() > 3 {
        return Err(MechanismError::OrderTooHigh {
            step: number,
            order: step.order.len(),
        });
    }
    let named = step
        .order
        .iter()
        .copied()
        .chain(step.change.iter().map(|&(species, _)| species));
    for species in named {
        if species >= count {
            return Err(MechanismError::NoSuchSpecies {
                step: number,
                species,
                count,
            });
        }
    }
    for (i, &(species, change)) in step.change.iter().enumerate() {
        if change == 0 {
            return Err(MechanismError::ZeroChange {
                step: number,
                species,
            });
        }
        if step.change[..i]
            .iter()
            .any(|&(earlier, _)| earlier == species)
        {
            return Err(MechanismError::RepeatedChange {
                step: number,
                species,
            });
        }
    }
    let (layers, least) = match step.factor {
        Factor::TopLayers(n) if !(n > 0.0 && n.is_finite()) => (n, "a positive number is needed"),
        Factor::Encounters(n) if !(n >= 1.0 && n.is_finite()) => (n, "at least one is needed"),
        Factor::TopLayers(_) | Factor::Encounters(_) if ice_total.is_none() => {
            return Err(MechanismError::NoIceTotal { step: number });
        }
        _ => return Ok(()),
    };
    Err(MechanismError::BadLayers {
        step: number,
        layers,
        least,
    })
}
