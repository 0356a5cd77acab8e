//! Owns what a network is after reading and expansion: species with composition, and every
//! reaction with its cause.
//!
//! It never reads text and never evaluates a rate: `read` and `expand` make it, `rates` uses it.

use super::layout::{Below, ShieldingLaw, Standing};
use std::collections::BTreeMap;

/// Index of a species in [`Chemistry::species`], which is also its place in a state vector.
pub type SpeciesId = usize;

/// Where a species lives.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Phase {
    Gas,
    /// Adsorbed: `X(ads)`.
    Ice,
    /// Dust grains in one charge state.
    Dust,
    /// Not a species: the sum of all adsorbed abundances, carried as a state variable.
    IceTotal,
}

/// One species (or the ice total) of the expanded network.
#[derive(Debug, Clone, PartialEq)]
pub struct Species {
    pub name: String,
    pub phase: Phase,
    /// Charge in units of e.
    pub charge: i32,
    /// Mass in amu: sum of standard atomic weights; electrons 5.4858e-4; 0 for dust and the total.
    pub mass: f64,
    /// Atoms by element symbol; dust grains count as the element `dust`.
    pub atoms: Vec<(String, u32)>,
}

/// k = at_300k (T/300)^slope exp(-barrier/T) on `valid` (K).
#[derive(Debug, Clone, PartialEq)]
pub struct Piece {
    pub at_300k: f64,
    pub slope: f64,
    pub barrier: f64,
    pub valid: [f64; 2],
}

/// Nine coefficients of Cp, H and S on `valid` (K), of a species or summed over a reaction; see
/// `equilibrium`.
#[derive(Debug, Clone, PartialEq)]
pub struct Polynomial {
    pub valid: [f64; 2],
    /// a1 to a7.
    pub a: [f64; 7],
    /// b1 (K) and b2.
    pub b: [f64; 2],
}

/// A validity range in T_gas and the rule below it (above it the value is held).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Range {
    pub valid: [f64; 2],
    pub below: Below,
}

/// What the rate laws need to know of an adsorbed species.
#[derive(Debug, Clone, PartialEq)]
pub struct Binding {
    /// Desorption energy, K, and prefactor, s^-1, as chosen by the case (water or pure).
    pub energy: f64,
    pub prefactor: f64,
    /// Energy, K, from which the harmonic hopping frequency follows.
    pub hop_energy: f64,
    /// Hopping barrier, K.
    pub hop_barrier: f64,
    /// amu.
    pub mass: f64,
}

/// The cause of a reaction with every number its rate law needs.
#[derive(Debug, Clone, PartialEq)]
pub enum Cause {
    /// Power law; two-body (cm^3 s^-1) or three-body (cm^6 s^-1) by the number of reactants.
    /// Pieces ascend in temperature and abut.
    PowerLaw {
        pieces: Vec<Piece>,
        below: Below,
    },
    /// As `PowerLaw`, times `[M]` = n(H2) + n(H) + n(He).
    ThirdBody {
        pieces: Vec<Piece>,
        below: Below,
    },
    /// Su & Chesnavich 1982.
    Capture {
        langevin: f64,
        x_300k: f64,
        range: Range,
    },
    /// Troe-type falloff. `low` and `high` carry (at_300k, slope, barrier).
    Falloff {
        low: [f64; 3],
        high: [f64; 3],
        centre: f64,
        range: Range,
    },
    /// The reverse of a collision: its coefficient over the equilibrium constant, with the same
    /// third bodies.
    Reverse {
        /// `PowerLaw`, `ThirdBody` or `Falloff`.
        forward: Box<Cause>,
        /// How many particles the forward reaction gains.
        gained: i32,
        /// The forward reaction's products less its reactants.
        polynomials: Vec<Polynomial>,
    },
    /// Photoprocess. `rates`: one per [`Chemistry::spectra`], None where the file gives none.
    Light {
        rates: Vec<Option<f64>>,
        extinction: f64,
        shield: Option<usize>,
    },
    /// value x (zeta_cosmic + zeta_xray + zeta_nuclides).
    Ionisation {
        value: f64,
    },
    /// value x (zeta_cosmic + zeta_xray) x (reference dust area / dust area).
    SecondaryLight {
        value: f64,
    },
    /// H2 on grains, first order in H.
    HydrogenFormation {
        at_100k: f64,
        slope: f64,
    },
    /// Charged gas particle (charge, mass in amu) sticking to a grain of charge `grain`.
    Charging {
        sticking: f64,
        charge: i32,
        mass: f64,
        grain: i32,
        share: f64,
    },
    /// Gas species sticking to grains. `hydrogen`: sticking of H, less the share that forms H2.
    Accretion {
        mass: f64,
        hydrogen: bool,
    },
    ThermalDesorption {
        binding: Binding,
    },
    CosmicDesorption {
        binding: Binding,
    },
    Photodesorption {
        yields: f64,
    },
    /// Langmuir-Hinshelwood. `share` includes the branching and the leaving (or staying) share.
    Surface {
        first: Binding,
        second: Binding,
        /// Whether both reactants are the same species.
        same: bool,
        share: f64,
        own: Barrier,
        /// The different barriers that channels of this pair cross, `own` among them.
        barriers: Vec<Barrier>,
    },
}

/// The energy barrier of one channel of a surface encounter.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Barrier {
    /// K; 0 for none.
    pub height: f64,
    /// A.
    pub width: f64,
    /// Mass that tunnels, amu.
    pub mass: f64,
}

/// One expanded reaction.
#[derive(Debug, Clone, PartialEq)]
pub struct Reaction {
    /// As written in the file, or as generated: `CO -> CO(ads)`.
    pub change: String,
    /// Species in the rate law (order of the reaction), with repeats.
    pub reactants: Vec<SpeciesId>,
    /// All species consumed and formed, with repeats. Consumed may differ from `reactants`
    /// (H2 formation is first order in H but takes two).
    pub consumed: Vec<SpeciesId>,
    pub products: Vec<SpeciesId>,
    pub cause: Cause,
    /// Line of the network file it comes from (1-based).
    pub line: usize,
    /// Reactions of one group share one uncertainty (channels of a reactant pair, pieces, the
    /// reverse of a reversible reaction).
    pub group: usize,
    /// Multiplicative 1-sigma uncertainty.
    pub within: f64,
    pub standing: Standing,
    /// Key into the file's sources; empty for what follows from kinetic theory alone.
    pub source: String,
}

impl Reaction {
    /// Net change of every species that changes, in order of places, with that of the ice total
    /// (at `ice_total`): how many adsorbed molecules are gained less how many are lost.
    pub fn net_change(
        &self,
        ice_total: Option<SpeciesId>,
        species: &[Species],
    ) -> Vec<(SpeciesId, i32)> {
        let mut net: BTreeMap<SpeciesId, i32> = BTreeMap::new();
        for (side, sign) in [(&self.consumed, -1), (&self.products, 1)] {
            for id in side {
                *net.entry(*id).or_insert(0) += sign;
                if let (Some(total), Phase::Ice) = (ice_total, species[*id].phase) {
                    *net.entry(total).or_insert(0) += sign;
                }
            }
        }
        net.into_iter().filter(|(_, change)| *change != 0).collect()
    }
}

/// A shielding law with its data.
#[derive(Debug, Clone, PartialEq)]
pub struct Shielding {
    pub name: String,
    pub law: ShieldingLaw,
    /// Index into [`Chemistry::column_species`].
    pub column: usize,
    /// Index of H2 in `column_species`.
    pub h2: usize,
    pub log_column: Vec<f64>,
    pub log_h2: Vec<f64>,
    /// log10 of the factor, row per `log_h2`.
    pub log_factor: Vec<Vec<f64>>,
}

/// How grains and ices are treated: the `grains` block of a case with its defaults.
#[derive(Debug, Clone, PartialEq)]
pub struct GrainOptions {
    /// Layers whose molecules react (default 2).
    pub active_layers: f64,
    /// Layers that desorb thermally: first order below, zeroth order above (default 1).
    pub desorbing_layers: f64,
    /// Layers from which light desorbs (default 2).
    pub lit_layers: f64,
    /// Hopping barrier over hop energy, for atoms (default 0.35) and molecules (default 0.5).
    pub hop_ratio_atoms: f64,
    pub hop_ratio_molecules: f64,
    /// Share of surface reactions whose products leave (default 0.01).
    pub leaving_share: f64,
    /// Adsorption sites per area, cm^-2 (default 1.5e15).
    pub site_density: f64,
    /// Grain charges run from -n to +n (default 1).
    pub charge_states: i32,
    /// Whether ices use their pure-ice energies where the network has them (default: on water).
    pub pure_ice: bool,
}

impl Default for GrainOptions {
    fn default() -> Self {
        GrainOptions {
            active_layers: 2.0,
            desorbing_layers: 1.0,
            lit_layers: 2.0,
            hop_ratio_atoms: 0.35,
            hop_ratio_molecules: 0.5,
            leaving_share: 0.01,
            site_density: 1.5e15,
            charge_states: 1,
            pure_ice: false,
        }
    }
}

/// The expanded network: what rates, kinetics and store work with.
#[derive(Debug, Clone, PartialEq)]
pub struct Chemistry {
    pub name: String,
    /// Gas species in file order, then dust from the most negative charge up, then ices in file
    /// order, then (if there are ices) one [`Phase::IceTotal`] called `ices(total)`.
    pub species: Vec<Species>,
    pub reactions: Vec<Reaction>,
    /// `draine` first.
    pub spectra: Vec<String>,
    /// Species whose columns shield, H2 first.
    pub column_species: Vec<String>,
    pub shielding: Vec<Shielding>,
    pub options: GrainOptions,
}

impl Chemistry {
    /// The place of a species by name.
    pub fn find(&self, name: &str) -> Option<SpeciesId> {
        self.species.iter().position(|s| s.name == name)
    }

    /// The place of the ice total, if there are ices.
    pub fn ice_total(&self) -> Option<SpeciesId> {
        self.species.iter().position(|s| s.phase == Phase::IceTotal)
    }
}
