//! Owns the abstract kinetic system: which species each step changes, in what order, and which
//! state-dependent factor multiplies it; its right-hand side and exact sparse Jacobian.
//!
//! It never knows chemistry: any species, any integer coefficients, zeroth to third order.

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
