//! Owns the written form of a network file (layout 1): plain serde structs, one per kind of line.
//!
//! It never checks meaning: `read` does that, with positions. Documented in networks/README.md.
//! All temperatures in K, two-body coefficients in cm^3 s^-1, three-body in cm^6 s^-1.

use serde::Deserialize;
use std::collections::BTreeMap;

/// A whole network file.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct NetworkFile {
    pub network: String,
    pub layout: u32,
    #[serde(default)]
    pub about: String,
    /// Polynomials for reversible reactions: a built-in name or a path beside this file.
    pub thermo: Option<String>,
    /// Citation by key.
    pub sources: BTreeMap<String, String>,
    /// Meaning of each radiation spectrum by name; `draine` is always known.
    #[serde(default)]
    pub spectra: BTreeMap<String, String>,
    pub species: Vec<SpeciesLine>,
    #[serde(default)]
    pub compositions: Vec<CompositionLine>,
    #[serde(default)]
    pub shielding: Vec<ShieldingLine>,
    #[serde(default)]
    pub gas: Vec<GasLine>,
    #[serde(default)]
    pub capture: Vec<CaptureLine>,
    #[serde(default)]
    pub falloff: Vec<FalloffLine>,
    #[serde(default)]
    pub three_body: Vec<GasLine>,
    #[serde(default)]
    pub third_body: Vec<GasLine>,
    #[serde(default)]
    pub light: Vec<LightLine>,
    #[serde(default)]
    pub cosmic: Vec<CosmicLine>,
    #[serde(default)]
    pub ices: Vec<IceLine>,
    #[serde(default)]
    pub surface: Vec<SurfaceLine>,
    pub dust: Option<DustBlock>,
}

/// One gas species. Composition and charge follow from the name.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SpeciesLine {
    pub name: String,
    /// Enthalpy of formation at 298.15 K, kJ/mol, ion convention (e- = 0).
    pub enthalpy: Option<f64>,
    /// Mean polarisability, A^3.
    pub polarisability: Option<f64>,
    /// Permanent dipole moment, Debye.
    pub dipole: Option<f64>,
    /// Which isomer or state is meant, where the formula leaves it open.
    #[serde(default)]
    pub meaning: String,
    #[serde(default)]
    pub source: String,
}

/// A named start composition: abundances per hydrogen nucleus.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CompositionLine {
    pub name: String,
    pub source: String,
    #[serde(default)]
    pub note: String,
    /// n(X)/n_H. Electrons left out are set to balance the charge.
    pub abundances: BTreeMap<String, f64>,
}

/// Which law a shielding line uses.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum ShieldingLaw {
    /// Draine & Bertoldi 1996, eq. 37, from the column of `column`.
    DraineBertoldi,
    /// A table in log N(column) and log N(H2).
    Table,
    /// Continuum absorption by atomic carbon with H2 lines (Kamp & Bertoldi 2000).
    Carbon,
}

/// One way in which lines or continua shield a photoprocess.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ShieldingLine {
    pub name: String,
    pub law: ShieldingLaw,
    /// The species whose column shields.
    pub column: String,
    /// `law: table`: log10 of the column of `column` (cm^-2), ascending; 0 stands for none.
    #[serde(default)]
    pub log_column: Vec<f64>,
    /// `law: table`: log10 of the column of H2 (cm^-2), ascending; 0 stands for none.
    #[serde(default)]
    pub log_h2: Vec<f64>,
    /// `law: table`: one row per `log_h2`, one factor per `log_column`.
    #[serde(default)]
    pub factor: Vec<Vec<f64>>,
    pub source: String,
    #[serde(default)]
    pub note: String,
}

/// What to do below the lowest valid temperature.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Below {
    /// Use the expression as it stands.
    Extend,
    /// Use the value at the lower end.
    Hold,
    /// No reaction.
    Zero,
}

/// How well a number is founded.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Standing {
    Evaluated,
    Measured,
    Recalled,
    Estimated,
}

/// One temperature piece of a coefficient.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct PieceLine {
    #[serde(rename = "at_300K")]
    pub at_300k: f64,
    #[serde(default)]
    pub slope: f64,
    #[serde(default)]
    pub barrier: f64,
    pub valid: [f64; 2],
}

/// k = at_300K (T/300)^slope exp(-barrier/T); groups `gas`, `three_body`, `third_body`.
/// Either the coefficients with `valid`, or `pieces`.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct GasLine {
    pub change: String,
    #[serde(rename = "at_300K")]
    pub at_300k: Option<f64>,
    pub slope: Option<f64>,
    pub barrier: Option<f64>,
    pub valid: Option<[f64; 2]>,
    #[serde(default)]
    pub pieces: Vec<PieceLine>,
    pub below: Option<Below>,
    #[serde(default)]
    pub adds: bool,
    /// Why the reaction may be endothermic and still need no barrier.
    #[serde(default)]
    pub endothermic: String,
    /// Whether the reverse runs too, by the equilibrium constant.
    #[serde(default)]
    pub reversible: bool,
    pub within: Option<f64>,
    pub standing: Standing,
    pub source: String,
    #[serde(default)]
    pub note: String,
}

/// Ion-dipole capture: k = langevin g(x), x = x_300K sqrt(300/T) (Su & Chesnavich 1982).
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CaptureLine {
    pub change: String,
    /// Branching times efficiency times the Langevin coefficient, cm^3 s^-1.
    pub langevin: f64,
    /// Reduced dipole parameter at 300 K.
    #[serde(rename = "x_300K")]
    pub x_300k: f64,
    pub valid: [f64; 2],
    pub below: Option<Below>,
    #[serde(default)]
    pub adds: bool,
    /// Why the reaction may be endothermic and still need no barrier.
    #[serde(default)]
    pub endothermic: String,
    pub within: Option<f64>,
    pub standing: Standing,
    pub source: String,
    #[serde(default)]
    pub note: String,
}

/// One limit of a falloff coefficient.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct LimitLine {
    #[serde(rename = "at_300K")]
    pub at_300k: f64,
    #[serde(default)]
    pub slope: f64,
    #[serde(default)]
    pub barrier: f64,
}

/// Falloff between the low- (cm^6 s^-1) and high-pressure (cm^3 s^-1) limits.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct FalloffLine {
    pub change: String,
    pub low: LimitLine,
    pub high: LimitLine,
    /// Centre broadening factor Fc.
    pub centre: f64,
    pub valid: [f64; 2],
    pub below: Option<Below>,
    #[serde(default)]
    pub adds: bool,
    /// Why the reaction may be endothermic and still need no barrier.
    #[serde(default)]
    pub endothermic: String,
    /// Whether the reverse runs too, by the equilibrium constant.
    #[serde(default)]
    pub reversible: bool,
    pub within: Option<f64>,
    pub standing: Standing,
    pub source: String,
    #[serde(default)]
    pub note: String,
}

/// Photodissociation or photoionisation.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct LightLine {
    pub change: String,
    /// Unshielded rate in the Draine field, s^-1.
    pub rate: f64,
    /// Exponent of extinction: rate falls as exp(-extinction A_V).
    pub extinction: f64,
    /// Name of a `shielding` line.
    pub shield: Option<String>,
    /// Unshielded rate (s^-1) in other spectra of unit strength, by name.
    #[serde(default)]
    pub spectra: BTreeMap<String, f64>,
    pub within: Option<f64>,
    pub standing: Standing,
    pub source: String,
    #[serde(default)]
    pub note: String,
}

/// Ionisation or dissociation by energetic particles: exactly one of `direct`, `secondary`.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CosmicLine {
    pub change: String,
    /// Rate per total ionisation rate of H2 (cosmic rays, X-rays, nuclides).
    pub direct: Option<f64>,
    /// Rate by the secondary UV field per ionisation rate of H2 (cosmic rays, X-rays).
    pub secondary: Option<f64>,
    pub within: Option<f64>,
    pub standing: Standing,
    pub source: String,
    #[serde(default)]
    pub note: String,
}

/// Binding of the pure ice.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct PureLine {
    pub energy: f64,
    pub prefactor: f64,
    pub source: String,
}

/// One channel of photodesorption.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct YieldLine {
    /// Gas products, for example `OH + H`.
    pub products: String,
    /// Molecules per incident photon from a thick ice.
    #[serde(rename = "yield")]
    pub yields: f64,
    pub source: String,
}

/// A species that freezes out.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct IceLine {
    pub species: String,
    /// Desorption energy on water ice, K.
    pub energy: f64,
    /// Its prefactor, s^-1.
    pub prefactor: f64,
    pub pure: Option<PureLine>,
    /// Binding energy from which hopping is derived, K; `energy` if left out.
    pub hop_energy: Option<f64>,
    /// Measured hopping barrier, K; else a ratio of `hop_energy` set in the case.
    pub hop_barrier: Option<f64>,
    pub photodesorption: Vec<YieldLine>,
    pub within: Option<f64>,
    pub standing: Standing,
    pub source: String,
    #[serde(default)]
    pub note: String,
}

/// A reaction between adsorbed species.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SurfaceLine {
    pub change: String,
    /// Activation barrier, K.
    #[serde(default)]
    pub barrier: f64,
    /// Width of the rectangular barrier, A.
    pub width: Option<f64>,
    /// Share of the encounters of this pair that take this channel.
    pub share: Option<f64>,
    /// Share of the events whose products all leave; the case's default if left out.
    pub leaves: Option<f64>,
    /// Mass that tunnels, amu; the reduced mass if left out.
    pub tunnelling_mass: Option<f64>,
    pub within: Option<f64>,
    pub standing: Standing,
    pub source: String,
    #[serde(default)]
    pub note: String,
}

/// H2 formation on grains: R = at_100K (T_gas/100)^slope (dust_area/5.8575e-22 cm^2), cm^3 s^-1.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct HydrogenFormationLine {
    #[serde(rename = "at_100K")]
    pub at_100k: f64,
    pub slope: f64,
    pub source: String,
}

/// What an ion becomes when a grain neutralises it (gas products).
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct NeutralisationLine {
    pub ion: String,
    pub becomes: String,
    pub share: f64,
    pub source: String,
}

/// Processes of the grains as a whole.
#[derive(Debug, Clone, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct DustBlock {
    pub hydrogen_formation: Option<HydrogenFormationLine>,
    /// Sticking probability of electrons (default 0.6) and ions (default 1).
    pub electron_sticking: Option<f64>,
    pub ion_sticking: Option<f64>,
    #[serde(default)]
    pub neutralisation: Vec<NeutralisationLine>,
}
