//! Owns the block `disk` of a case: hands a table or a recipe, checked and with its defaults, to
//! `crate::disk`.
//!
//! It holds no formula of the disk.

use super::checker::{Bounds, Checker, NOT_NEGATIVE, POSITIVE, quoted};
use super::layout::{DiskBlock, FieldLine, HardnessName, IonisationBlock, LightBlock, RecipeBlock};
use super::{Files, beside, file_text};
use crate::disk::columns::assumed_with;
use crate::disk::conditions::REFERENCE_DUST_AREA;
use crate::disk::ionisation::{Hardness, SOLAR_NUCLIDES};
use crate::disk::light::{Sources, Star};
use crate::disk::recipe::{Recipe, Warmth};
use crate::disk::{Conditions, Disk, FieldKind, table};
use crate::errors::Failure;
use crate::units::{Dimension, number_text};

/// Mean abundances of the shielding species.
const ASSUMED: Bounds = Bounds {
    allows: |x| (0.0..=1.0).contains(&x),
    words: "from 0 to 1",
};
/// Above 12 scale heights nothing is left of a Gaussian.
const SCALE_HEIGHTS: Bounds = Bounds {
    allows: |x| x > 0.0 && x <= 12.0,
    words: "above 0, at most 12",
};
const SLOPE: Bounds = Bounds {
    allows: |x| (0.0..2.0).contains(&x),
    words: "from 0 to below 2",
};
const TEMPERATURE_SLOPE: Bounds = Bounds {
    allows: |x| (-2.0..=0.0).contains(&x),
    words: "from -2 to 0",
};
const STEEPNESS: Bounds = Bounds {
    allows: |x| x > 0.0 && x <= 10.0,
    words: "above 0, at most 10",
};
/// More cells than any machine holds the results of.
const MOST_CELLS: u32 = 1_000_000;

pub(super) struct Reading {
    pub(super) disk: Disk,
    pub(super) table_text: Option<String>,
    pub(super) notes: Vec<String>,
    pub(super) resolved: String,
}

pub(super) fn read(
    check: &mut Checker,
    block: &DiskBlock,
    files: Files,
) -> Result<Option<Reading>, Failure> {
    let (assumed, assumed_text) = assumed_columns(check, block);
    match (&block.table, &block.recipe) {
        (Some(name), None) => {
            let (fields, fields_text) = fields(check, block.fields.as_deref());
            let path = beside(check.file, name);
            let Some(text) = file_text(check, "disk.table", &path, files)? else {
                return Ok(None);
            };
            match table::read(&path, &text, &fields, &assumed) {
                Ok((disk, notes)) => Ok(Some(Reading {
                    disk,
                    table_text: Some(text),
                    notes,
                    resolved: format!(
                        "disk:\n  table: {}\n{fields_text}{assumed_text}",
                        quoted(name)
                    ),
                })),
                Err(errors) => {
                    check.errors.extend(errors);
                    Ok(None)
                }
            }
        }
        (None, Some(recipe)) => {
            if block.fields.is_some() {
                check.error(
                    "disk.fields",
                    "`fields` with `recipe`",
                    "`fields` with a table only",
                );
            }
            let before = check.errors.len();
            let (recipe, recipe_text) = read_recipe(check, recipe);
            if check.errors.len() > before {
                return Ok(None);
            }
            let notes = vec![
                "disk: the recipe gives gas and dust one temperature".to_string(),
                "disk: columns of shielding species are the assumed mean abundances times N_H"
                    .to_string(),
            ];
            let disk = recipe.build(&assumed);
            if let Some(cell) = disk.cells.iter().find(|cell| !has_gas(cell)) {
                let place = format!("{:.4} au, height {:.4} au", cell.radius, cell.height);
                let found = format!("a density of {:e} cm^-3 at {place}", cell.n_h);
                check.error("disk.recipe", found, "radii and heights where there is gas");
                return Ok(None);
            }
            let resolved = format!("disk:\n{recipe_text}{assumed_text}");
            Ok(Some(Reading {
                disk,
                table_text: None,
                notes,
                resolved,
            }))
        }
        (table, _) => {
            let found = if table.is_some() {
                "both `table` and `recipe`"
            } else {
                "neither"
            };
            check.error("disk", found, "either `table` or `recipe`");
            Ok(None)
        }
    }
}

/// Whether a recipe's cell can be computed: far beyond the cutoff nothing is left.
fn has_gas(cell: &Conditions) -> bool {
    let values = [cell.n_h, cell.t_gas, cell.zeta_cosmic, cell.zeta_xray];
    cell.n_h > 0.0 && values.iter().all(|value| value.is_finite())
}

fn assumed_columns(check: &mut Checker, block: &DiskBlock) -> (Vec<(String, f64)>, String) {
    let mut given = Vec::new();
    for (species, quantity) in &block.assumed_columns {
        let key = format!("disk.assumed_columns.{species}");
        if species.is_empty() || species.contains('_') {
            check.error(&key, format!("`{species}`"), "the name of a gas species");
        }
        let share = check.required(&key, quantity, Dimension::Number, ASSUMED);
        given.push((species.clone(), share.value));
    }
    let all = assumed_with(&given);
    for (species, share) in &all {
        if !block.assumed_columns.contains_key(species) {
            check.default_taken(
                &format!("disk.assumed_columns.{species}"),
                number_text(*share),
            );
        }
    }
    let items: Vec<String> = all
        .iter()
        .map(|(name, share)| format!("{}: {}", quoted(name), number_text(*share)))
        .collect();
    (
        all,
        format!("  assumed_columns: {{{}}}\n", items.join(", ")),
    )
}

fn fields(check: &mut Checker, given: Option<&[FieldLine]>) -> (Vec<FieldKind>, String) {
    let usual = [FieldLine {
        name: "sky".to_string(),
        spectrum: "draine".to_string(),
        attenuated: false,
    }];
    if given.is_none() {
        check.default_taken("disk.fields", "sky (draine, not attenuated)");
    }
    let mut kinds: Vec<FieldKind> = Vec::new();
    let mut text = String::from("  fields:\n");
    for (i, line) in given.unwrap_or(&usual).iter().enumerate() {
        check.name(&format!("disk.fields[{i}].name"), &line.name);
        if kinds.iter().any(|kind| kind.name == line.name) {
            let found = format!("`{}` twice", line.name);
            check.error(&format!("disk.fields[{i}].name"), found, "every field once");
        }
        text += &format!(
            "    - {{name: {}, spectrum: {}, attenuated: {}}}\n",
            quoted(&line.name),
            quoted(&line.spectrum),
            line.attenuated
        );
        kinds.push(FieldKind {
            name: line.name.clone(),
            spectrum: line.spectrum.clone(),
            attenuated: line.attenuated,
        });
    }
    if kinds.is_empty() {
        // `fields: []` is a disk in the dark, said outright.
        text = "  fields: []\n".to_string();
    }
    (kinds, text)
}

fn read_recipe(check: &mut Checker, block: &RecipeBlock) -> (Recipe, String) {
    use Dimension::{Area, Length, Mass, Number, Temperature};
    let key = |name: &str| format!("disk.recipe.{name}");
    let star = check.required(&key("star.mass"), &block.star.mass, Mass, POSITIVE);
    let gas = check.required(&key("gas.mass"), &block.gas.mass, Mass, POSITIVE);
    let cutoff = &block.gas.cutoff_radius;
    let cutoff = check.required(&key("gas.cutoff_radius"), cutoff, Length, POSITIVE);
    let slope = check.number(&key("gas.slope"), block.gas.slope.as_ref(), 1.0, SLOPE);

    let warm = &block.temperature;
    let midplane = check.required(
        &key("temperature.midplane"),
        &warm.midplane,
        Temperature,
        POSITIVE,
    );
    let surface = check.required(
        &key("temperature.surface"),
        &warm.surface,
        Temperature,
        POSITIVE,
    );
    let reference = warm.reference.as_ref();
    let reference = check.quantity(
        &key("temperature.reference"),
        reference,
        "100 au",
        Length,
        POSITIVE,
    );
    let mut number = |name: &str, given: &Option<_>, default, bounds| {
        check.number(
            &key(&format!("temperature.{name}")),
            given.as_ref(),
            default,
            bounds,
        )
    };
    let midplane_slope = number(
        "midplane_slope",
        &warm.midplane_slope,
        -0.5,
        TEMPERATURE_SLOPE,
    );
    let surface_slope = number(
        "surface_slope",
        &warm.surface_slope,
        -0.5,
        TEMPERATURE_SLOPE,
    );
    let surface_from = number("surface_from", &warm.surface_from, 4.0, SCALE_HEIGHTS);
    let steepness = number("steepness", &warm.steepness, 2.0, STEEPNESS);

    let from = check.required(&key("radii.from"), &block.radii.from, Length, POSITIVE);
    let to = check.required(&key("radii.to"), &block.radii.to, Length, POSITIVE);
    let radii = check.count(&key("radii.count"), &block.radii.count, 1, MOST_CELLS);
    if radii > 1 && to.value <= from.value {
        let expected = format!("a radius beyond `{}`", from.text);
        check.error(&key("radii.to"), format!("`{}`", to.text), expected);
    }
    let up_to = check.required(
        &key("heights.up_to"),
        &block.heights.up_to,
        Number,
        SCALE_HEIGHTS,
    );
    let heights = check.count(&key("heights.count"), &block.heights.count, 1, MOST_CELLS);
    let cells = u64::from(radii) * u64::from(heights);
    if cells > u64::from(MOST_CELLS) {
        let expected = format!("at most {MOST_CELLS} cells");
        check.error("disk.recipe", format!("{cells} cells"), expected);
    }

    let (sources, light_text) = light(check, &block.light);
    let (ionisation, ionisation_text) = ionisation(check, &block.ionisation);
    let area = format!("{} cm^2", number_text(REFERENCE_DUST_AREA));
    let area = check.quantity(
        &key("dust.area"),
        block.dust.area.as_ref(),
        &area,
        Area,
        POSITIVE,
    );
    let grain = block.dust.grain_radius.as_ref();
    let grain = check.quantity(&key("dust.grain_radius"), grain, "0.1 um", Length, POSITIVE);

    let text = format!(
        "  recipe:\n    star: {{mass: {}}}\n    gas: {{mass: {}, cutoff_radius: {}, slope: {}}}\n    \
         temperature:\n      midplane: {}\n      surface: {}\n      reference: {}\n      \
         midplane_slope: {}\n      surface_slope: {}\n      surface_from: {}\n      steepness: {}\n    \
         radii: {{from: {}, to: {}, count: {radii}}}\n    heights: {{up_to: {}, count: {heights}}}\n\
         {light_text}{ionisation_text}    dust: {{area: {}, grain_radius: {}}}\n",
        star.text,
        gas.text,
        cutoff.text,
        slope.text,
        midplane.text,
        surface.text,
        reference.text,
        midplane_slope.text,
        surface_slope.text,
        surface_from.text,
        steepness.text,
        from.text,
        to.text,
        up_to.text,
        area.text,
        grain.text
    );
    let recipe = Recipe {
        star_mass: star.value,
        gas_mass: gas.value,
        cutoff_radius: cutoff.value,
        slope: slope.value,
        warmth: Warmth {
            midplane: midplane.value,
            surface: surface.value,
            reference: reference.value,
            midplane_slope: midplane_slope.value,
            surface_slope: surface_slope.value,
            surface_from: surface_from.value,
            steepness: steepness.value,
        },
        radii: (from.value, to.value, radii as usize),
        heights: (up_to.value, heights as usize),
        sources,
        cosmic: ionisation.0,
        xrays: ionisation.1,
        nuclides: ionisation.2,
        dust_area: area.value,
        grain_radius: grain.value,
    };
    (recipe, text)
}

fn light(check: &mut Checker, block: &LightBlock) -> (Sources, String) {
    const KEY: &str = "disk.recipe.light";
    let sky = block.sky.as_ref();
    let strength = Dimension::FieldStrength;
    let sky = check.quantity(
        &format!("{KEY}.sky"),
        sky,
        "1 Draine",
        strength,
        NOT_NEGATIVE,
    );
    let mut text = format!("    light:\n      sky: {}\n", sky.text);
    let star = match &block.star {
        None => {
            check.default_taken(&format!("{KEY}.star"), "none");
            None
        }
        Some(star) => {
            let key = format!("{KEY}.star.strength");
            let given = check.required(&key, &star.strength, strength, NOT_NEGATIVE);
            let spectrum = quoted(&star.spectrum);
            text += &format!(
                "      star: {{strength: {}, spectrum: {spectrum}}}\n",
                given.text
            );
            Some(Star {
                strength: given.value,
                spectrum: star.spectrum.clone(),
            })
        }
    };
    (
        Sources {
            sky: sky.value,
            star,
        },
        text,
    )
}

/// Cosmic-ray rate, X-rays (luminosity, hardness), rate by nuclides.
type Ionisation = (f64, Option<(f64, Hardness)>, f64);

fn ionisation(check: &mut Checker, block: &IonisationBlock) -> (Ionisation, String) {
    const KEY: &str = "disk.recipe.ionisation";
    let rate = Dimension::Rate;
    let cosmic = block.cosmic.as_ref();
    let cosmic = check.quantity(
        &format!("{KEY}.cosmic"),
        cosmic,
        "1.3e-17 s^-1",
        rate,
        NOT_NEGATIVE,
    );
    let nuclides = block.nuclides.as_ref();
    let usual = format!("{} s^-1", number_text(SOLAR_NUCLIDES));
    let nuclides = check.quantity(
        &format!("{KEY}.nuclides"),
        nuclides,
        &usual,
        rate,
        NOT_NEGATIVE,
    );
    let mut text = format!(
        "    ionisation:\n      cosmic: {}\n      nuclides: {}\n",
        cosmic.text, nuclides.text
    );
    let xrays = match &block.xrays {
        None => {
            check.default_taken(&format!("{KEY}.xrays"), "none");
            None
        }
        Some(xrays) => {
            let key = format!("{KEY}.xrays.luminosity");
            let luminosity =
                check.required(&key, &xrays.luminosity, Dimension::Luminosity, NOT_NEGATIVE);
            let (hardness, name) = match xrays.hardness {
                HardnessName::ThreeKev => (Hardness::ThreeKev, "3 keV"),
                HardnessName::FiveKev => (Hardness::FiveKev, "5 keV"),
            };
            text += &format!(
                "      xrays: {{luminosity: {}, hardness: {name}}}\n",
                luminosity.text
            );
            Some((luminosity.value, hardness))
        }
    };
    ((cosmic.value, xrays, nuclides.value), text)
}
