//! Owns the list of a network's reactions with their coefficients in conditions somebody asks for,
//! in the units people know them by.
//!
//! It never evaluates a law of its own: it asks `rates`, as a run does.

use crate::disk::columns::{ASSUMED, hydrogen_column};
use crate::disk::conditions::{Conditions, FieldKind, Light, REFERENCE_DUST_AREA};
use crate::errors::InputError;
use crate::kinetics::factor::{self, FactorValue};
use crate::network::layout::Below;
use crate::network::model::{Cause, Chemistry, Range, Reaction, SpeciesId};
use crate::network::names::alike;
use crate::rates::{self, Setting, two_body};
use std::path::Path;

/// The conditions asked for; the default is a dark, cold place.
#[derive(Debug, Clone, PartialEq)]
pub struct Asked {
    /// K.
    pub t_gas: f64,
    pub t_dust: f64,
    /// cm^-3.
    pub n_h: f64,
    /// Strength of the one radiation field before extinction, Draine units.
    pub uv: f64,
    pub spectrum: String,
    /// mag. Columns that shield follow from it with the mean abundances a case assumes too.
    pub extinction: f64,
    /// Ionisation rate of H2 by cosmic rays, s^-1.
    pub zeta: f64,
    /// cm^2 per hydrogen nucleus.
    pub dust_area: f64,
    /// cm.
    pub grain_radius: f64,
    /// `[M]/n_H` of falloff reactions.
    pub colliders: f64,
}

impl Default for Asked {
    fn default() -> Self {
        Asked {
            t_gas: 10.0,
            t_dust: 10.0,
            n_h: 1e6,
            uv: 1.0,
            spectrum: "draine".to_string(),
            extinction: 10.0,
            zeta: 1.3e-17,
            dust_area: REFERENCE_DUST_AREA,
            grain_radius: 1e-5,
            // H2 and He in molecular gas: 0.5 + 0.09, rounded.
            colliders: 0.6,
        }
    }
}

impl Asked {
    /// As a cell of a disk whose columns are in the order `chemistry` has them.
    pub(super) fn conditions(&self, chemistry: &Chemistry) -> Conditions {
        let hydrogen = hydrogen_column(self.extinction, self.dust_area);
        let assumed = |name: &String| ASSUMED.iter().find(|(known, _)| known == name);
        let column = |name| assumed(name).map_or(0.0, |(_, share)| share * hydrogen);
        Conditions {
            radius: 0.0,
            height: 0.0,
            n_h: self.n_h,
            t_gas: self.t_gas,
            t_dust: self.t_dust,
            light: vec![Light {
                strength: self.uv,
                extinction: self.extinction,
                columns: chemistry.column_species.iter().map(column).collect(),
                shields: vec![None; chemistry.column_species.len()],
            }],
            zeta_cosmic: self.zeta,
            zeta_xray: 0.0,
            zeta_nuclides: 0.0,
            dust_area: self.dust_area,
            grain_radius: self.grain_radius,
        }
    }
}

/// Which reactions are wanted; an empty list asks for nothing.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Filter {
    /// Reactions with any of these on either side.
    pub with: Vec<SpeciesId>,
    /// Reactions that end with more of any of these than they began.
    pub forms: Vec<SpeciesId>,
    /// Reactions that end with less.
    pub destroys: Vec<SpeciesId>,
}

impl Filter {
    fn takes(&self, chemistry: &Chemistry, reaction: &Reaction) -> bool {
        let sides = || reaction.consumed.iter().chain(&reaction.products);
        let net = reaction.net_change(None, &chemistry.species);
        let any = |wanted: &[SpeciesId], fits: &dyn Fn(&SpeciesId) -> bool| {
            wanted.is_empty() || wanted.iter().any(fits)
        };
        let changed = |s: &SpeciesId, sign: i32| net.iter().any(|(id, n)| id == s && n * sign > 0);
        any(&self.with, &|s| sides().any(|other| other == s))
            && any(&self.forms, &|s| changed(s, 1))
            && any(&self.destroys, &|s| changed(s, -1))
    }
}

/// How a list is ordered.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Order {
    /// The largest coefficient first, reactions of one unit together.
    Coefficient,
    /// As expanded: the order of the file.
    File,
}

/// One reaction in the conditions asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct Row {
    /// Its place in [`Chemistry::reactions`].
    pub reaction: usize,
    /// In the unit of the law.
    pub value: f64,
    pub unit: &'static str,
    /// In units of the state, s^-1: times the abundances (per hydrogen nucleus) of the reactants.
    pub in_state: f64,
    /// Why the value is less than sure: outside the range of temperatures, no rate in the spectrum.
    pub outside: Option<String>,
}

/// The reactions of `chemistry` that `filter` takes, with their coefficients.
///
/// # Errors
/// A spectrum the network does not have.
pub fn list(
    chemistry: &Chemistry,
    asked: &Asked,
    filter: &Filter,
    order: Order,
) -> Result<Vec<Row>, InputError> {
    if !chemistry.spectra.contains(&asked.spectrum) {
        let found = format!("`{}`", asked.spectrum);
        let expected = format!("one of {}", chemistry.spectra.join(", "));
        return Err(InputError::new(
            Path::new(""),
            None,
            "--spectrum",
            found,
            expected,
        ));
    }
    let conditions = asked.conditions(chemistry);
    let in_state = values(chemistry, asked, &conditions);
    let mut rows: Vec<Row> = (chemistry.reactions.iter().enumerate())
        .filter(|(_, reaction)| filter.takes(chemistry, reaction))
        .map(|(i, reaction)| {
            let (per_state, unit) = natural(chemistry, reaction, &conditions);
            Row {
                reaction: i,
                value: in_state[i] * per_state,
                unit,
                in_state: in_state[i],
                outside: outside(chemistry, &reaction.cause, asked),
            }
        })
        .collect();
    if order == Order::Coefficient {
        let place = |unit| UNITS.iter().position(|known| *known == unit);
        rows.sort_by(|a, b| {
            let units = place(a.unit).cmp(&place(b.unit));
            units.then(b.value.total_cmp(&a.value))
        });
    }
    Ok(rows)
}

/// All coefficients in units of the state, falloff at the density of colliders asked for.
pub(super) fn values(chemistry: &Chemistry, asked: &Asked, conditions: &Conditions) -> Vec<f64> {
    let fields = [FieldKind {
        name: "asked".to_string(),
        spectrum: asked.spectrum.clone(),
        attenuated: false,
    }];
    let setting = Setting {
        // The usual turbulence of a case, 0.2 km/s.
        turbulence: 2e4,
        colliders: Some(asked.colliders),
    };
    let rates = rates::cell_rates(chemistry, &fields, conditions, &setting);
    let colliders = FactorValue {
        value: asked.colliders,
        slope: 0.0,
    };
    let mut falloffs = rates.coefficients.falloff.iter();
    (chemistry.reactions.iter().zip(rates.coefficients.k))
        .map(|(reaction, k)| match law(&reaction.cause) {
            Cause::Falloff { .. } => falloffs
                .next()
                .map_or(0.0, |law| k * factor::falloff(law, colliders).value),
            _ => k,
        })
        .collect()
}

const PER_S: &str = "s^-1";
const TWO_BODY: &str = "cm^3 s^-1";
const THREE_BODY: &str = "cm^6 s^-1";
/// On ice: s^-1 per molecule and per layer that the partner covers.
const PER_LAYER: &str = "s^-1 per layer";
const UNITS: [&str; 4] = [TWO_BODY, THREE_BODY, PER_S, PER_LAYER];

/// The law that a cause follows in its density: a reverse reaction follows its forward's.
fn law(cause: &Cause) -> &Cause {
    match cause {
        Cause::Reverse { forward, .. } => forward,
        own => own,
    }
}

/// What turns the coefficient of the state into the usual one, and the unit of that.
fn natural(chemistry: &Chemistry, reaction: &Reaction, c: &Conditions) -> (f64, &'static str) {
    match (law(&reaction.cause), reaction.reactants.len()) {
        // Two partners that join while M takes the energy: the reverse of a break-up.
        (Cause::ThirdBody { .. }, 2) => (1.0 / (c.n_h * c.n_h), THREE_BODY),
        (Cause::Surface { .. }, _) => (c.sites(chemistry.options.site_density), PER_LAYER),
        // The partner M, and the grain that H meets, are not in the rate law.
        (Cause::ThirdBody { .. } | Cause::HydrogenFormation { .. }, _) | (_, 2) => {
            (1.0 / c.n_h, TWO_BODY)
        }
        (_, 3) => (1.0 / (c.n_h * c.n_h), THREE_BODY),
        _ => (1.0, PER_S),
    }
}

/// The cause of a reaction in words.
pub fn cause(reaction: &Reaction) -> &'static str {
    match reaction.cause {
        Cause::PowerLaw { .. } if reaction.reactants.len() == 3 => "three-body",
        Cause::PowerLaw { .. } => "two-body",
        Cause::ThirdBody { .. } => "third body",
        Cause::Capture { .. } => "capture",
        Cause::Falloff { .. } => "falloff",
        Cause::Reverse { .. } => "reverse",
        Cause::Light { .. } => "light",
        Cause::Ionisation { .. } => "ionising particles",
        Cause::SecondaryLight { .. } => "secondary light",
        Cause::HydrogenFormation { .. } => "H2 formation",
        Cause::Charging { .. } => "grain charging",
        Cause::Accretion { .. } => "freeze-out",
        Cause::ThermalDesorption { .. } => "thermal desorption",
        Cause::CosmicDesorption { .. } => "cosmic-ray desorption",
        Cause::Photodesorption { .. } => "photodesorption",
        Cause::Surface { .. } => "ice surface",
    }
}

/// In words, if a law is used where it is not known.
fn outside(chemistry: &Chemistry, cause: &Cause, asked: &Asked) -> Option<String> {
    let (valid, below) = match cause {
        Cause::PowerLaw { pieces, below } | Cause::ThirdBody { pieces, below } => {
            let (first, last) = (pieces.first()?, pieces.last()?);
            ([first.valid[0], last.valid[1]], *below)
        }
        Cause::Capture { range, .. } | Cause::Falloff { range, .. } => (range.valid, range.below),
        Cause::Light { rates, .. } => {
            let named = |name: &String| *name == asked.spectrum;
            let own = chemistry.spectra.iter().position(named)?;
            let missing = rates.get(own).is_none_or(Option::is_none);
            return missing.then(|| "no rate in this spectrum: Draine".to_string());
        }
        _ => return None,
    };
    let [low, high] = valid;
    match two_body::evaluation_temperature(Range { valid, below }, asked.t_gas).1 {
        two_body::Place::Inside => None,
        two_body::Place::Above => Some(format!("above {high} K: held")),
        two_body::Place::Below => {
            let rule = match below {
                Below::Extend => "extended",
                Below::Hold => "held",
                Below::Zero => "zero",
            };
            Some(format!("below {low} K: {rule}"))
        }
    }
}

/// Species by names separated by commas; `option` is who asks.
///
/// # Errors
/// A name the network does not have, with the names that look like it.
pub fn species(
    chemistry: &Chemistry,
    option: &str,
    list: &str,
) -> Result<Vec<SpeciesId>, InputError> {
    let wrong =
        |found: String, expected| InputError::new(Path::new(""), None, option, found, expected);
    let names: Vec<&str> = (list.split(',').map(str::trim))
        .filter(|name| !name.is_empty())
        .collect();
    if names.is_empty() {
        let expected = "names separated by commas".to_string();
        return Err(wrong("an empty list".to_string(), expected));
    }
    let find = |name: &str| {
        chemistry.find(name).ok_or_else(|| {
            let known = chemistry.species.iter().map(|s| s.name.as_str());
            let alike = alike(known, name);
            let like = match alike.is_empty() {
                true => String::new(),
                false => format!(", such as {}", alike.join(", ")),
            };
            let expected = format!("a species of the network {}{like}", chemistry.name);
            wrong(format!("`{name}`"), expected)
        })
    };
    names.into_iter().map(find).collect()
}
