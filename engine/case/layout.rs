//! Owns the written form of a case file: plain serde structs, one per block.
//!
//! It never checks meaning and holds no defaults: the readers of the blocks do both, with
//! positions. Documented in cases/README.md.

use crate::units::Quantity;
use serde::Deserialize;
use std::collections::BTreeMap;

/// A whole case file.
#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct CaseFile {
    pub(super) title: String,
    pub(super) network: Option<String>,
    pub(super) disk: DiskBlock,
    pub(super) start: StartBlock,
    pub(super) clock: ClockBlock,
    #[serde(default)]
    pub(super) accuracy: AccuracyBlock,
    #[serde(default)]
    pub(super) grains: GrainsBlock,
    #[serde(default)]
    pub(super) gas: GasBlock,
    pub(super) output: Option<String>,
}

/// Exactly one of `table`, `recipe`.
#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct DiskBlock {
    pub(super) table: Option<String>,
    pub(super) recipe: Option<RecipeBlock>,
    /// Only with a table: a recipe has its own.
    pub(super) fields: Option<Vec<FieldLine>>,
    #[serde(default)]
    pub(super) assumed_columns: BTreeMap<String, Quantity>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct FieldLine {
    pub(super) name: String,
    pub(super) spectrum: String,
    #[serde(default)]
    pub(super) attenuated: bool,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RecipeBlock {
    pub(super) star: StarBlock,
    pub(super) gas: DiskGasBlock,
    pub(super) temperature: TemperatureBlock,
    pub(super) radii: RadiiBlock,
    pub(super) heights: HeightsBlock,
    #[serde(default)]
    pub(super) light: LightBlock,
    #[serde(default)]
    pub(super) ionisation: IonisationBlock,
    #[serde(default)]
    pub(super) dust: DustBlock,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct StarBlock {
    pub(super) mass: Quantity,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct DiskGasBlock {
    pub(super) mass: Quantity,
    pub(super) cutoff_radius: Quantity,
    pub(super) slope: Option<Quantity>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct TemperatureBlock {
    pub(super) midplane: Quantity,
    pub(super) surface: Quantity,
    pub(super) reference: Option<Quantity>,
    pub(super) midplane_slope: Option<Quantity>,
    pub(super) surface_slope: Option<Quantity>,
    pub(super) surface_from: Option<Quantity>,
    pub(super) steepness: Option<Quantity>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RadiiBlock {
    pub(super) from: Quantity,
    pub(super) to: Quantity,
    pub(super) count: Quantity,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct HeightsBlock {
    pub(super) up_to: Quantity,
    pub(super) count: Quantity,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct LightBlock {
    pub(super) sky: Option<Quantity>,
    pub(super) star: Option<StarLightBlock>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct StarLightBlock {
    /// At 100 au.
    pub(super) strength: Quantity,
    pub(super) spectrum: String,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct IonisationBlock {
    pub(super) cosmic: Option<Quantity>,
    pub(super) xrays: Option<XraysBlock>,
    pub(super) nuclides: Option<Quantity>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct XraysBlock {
    pub(super) luminosity: Quantity,
    pub(super) hardness: HardnessName,
}

/// The plasma temperatures for which the fit has coefficients.
#[derive(Debug, Clone, Copy, Deserialize)]
pub(super) enum HardnessName {
    #[serde(rename = "3 keV")]
    ThreeKev,
    #[serde(rename = "5 keV")]
    FiveKev,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct DustBlock {
    pub(super) area: Option<Quantity>,
    pub(super) grain_radius: Option<Quantity>,
}

/// Exactly one of `composition`, `abundances`.
#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct StartBlock {
    pub(super) composition: Option<String>,
    pub(super) abundances: Option<BTreeMap<String, Quantity>>,
}

/// `until` with `first` and `per_decade`, or `at`.
#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct ClockBlock {
    pub(super) until: Option<Quantity>,
    pub(super) first: Option<Quantity>,
    pub(super) per_decade: Option<Quantity>,
    pub(super) at: Option<Vec<Quantity>>,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct AccuracyBlock {
    pub(super) relative: Option<Quantity>,
    pub(super) smallest: Option<Quantity>,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct GrainsBlock {
    pub(super) active_layers: Option<Quantity>,
    pub(super) desorbing_layers: Option<Quantity>,
    pub(super) lit_layers: Option<Quantity>,
    #[serde(default)]
    pub(super) hop_ratio: HopRatioBlock,
    pub(super) leaving_share: Option<Quantity>,
    pub(super) site_density: Option<Quantity>,
    pub(super) charge_states: Option<Quantity>,
    pub(super) binding: Option<BindingName>,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct HopRatioBlock {
    pub(super) atoms: Option<Quantity>,
    pub(super) molecules: Option<Quantity>,
}

#[derive(Debug, Clone, Copy, Deserialize)]
#[serde(rename_all = "snake_case")]
pub(super) enum BindingName {
    /// Every molecule bound as on water ice.
    Water,
    /// As in its own ice, where the network knows that.
    Pure,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct GasBlock {
    pub(super) colliders: Option<Quantity>,
    pub(super) turbulence: Option<Quantity>,
}
