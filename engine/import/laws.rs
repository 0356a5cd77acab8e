//! Owns the way from a row of the table to a line of our layout.
//!
//! It never compares rows: `join` does; and it never judges a line: the reader of networks does.

use super::mapping::NameForm;
use super::numbers::{self, Cells};
use super::plan::{ChangePlan, LawPlan, Pick, Plan, PowerPlan, RulePlan, Value};
use super::sources::Sources;
use super::translate::{self, Side};
use crate::network::groups::Group;
use crate::network::layout::{Below, Standing};
use crate::network::limits;
use crate::network::model::Piece;
use crate::network::names;
use crate::units::BOLTZMANN;

/// What a line says about its coefficient.
#[derive(Debug, Clone)]
pub enum Coefficient {
    /// Ascending pieces; one if it comes from one row.
    Power(Vec<Piece>),
    Capture {
        langevin: f64,
        x_300k: f64,
        valid: [f64; 2],
    },
    /// Each limit as [at_300K, slope, barrier].
    Falloff {
        low: [f64; 3],
        high: [f64; 3],
        centre: f64,
        valid: [f64; 2],
    },
    Light {
        rate: f64,
        extinction: f64,
        spectra: Vec<(String, f64)>,
    },
    Direct(f64),
    Secondary(f64),
}

/// A line of our layout.
#[derive(Debug, Clone)]
pub struct Line {
    /// Lines of the table it comes from.
    pub rows: Vec<usize>,
    pub group: Group,
    pub reactants: Vec<String>,
    pub products: Vec<String>,
    pub coefficient: Coefficient,
    pub below: Option<Below>,
    /// Whether it may add to another entry for the same change.
    pub may_add: bool,
    /// Whether it does.
    pub adds: bool,
    pub within: Option<f64>,
    pub standing: Standing,
    /// Key of the source.
    pub source: String,
    pub note: Vec<String>,
}

impl Line {
    pub fn change(&self) -> String {
        format!(
            "{} -> {}",
            self.reactants.join(" + "),
            self.products.join(" + ")
        )
    }
}

/// What became of a row.
pub enum Mapped {
    Line(Line),
    /// The mapping says so; its reason.
    LeftOut(String),
}

/// Maps one row. `Err` is the reason why that is not possible.
pub fn line(
    row: usize,
    cells: Cells,
    plan: &Plan,
    names: (&NameForm, Option<&str>),
    sources: &mut Sources,
) -> Result<Mapped, String> {
    // The rule first: rows that are left out need not make sense otherwise.
    let sides = sides(cells, plan, names);
    let markers = sides.as_ref().map_or(&[][..], |(left, _)| &left.markers);
    let rule = match rule(cells, plan, markers) {
        Ok(rule) => rule,
        Err(reason) => return Err(sides.err().unwrap_or(reason)),
    };
    if let LawPlan::LeaveOut(reason) = &rule.law {
        return Ok(Mapped::LeftOut(reason.clone()));
    }
    let (left, right) = sides?;
    if left.species.is_empty() || right.species.is_empty() {
        let side = if left.species.is_empty() {
            "reactant"
        } else {
            "product"
        };
        return Err(format!("found no {side}, expected at least one"));
    }
    let (group, coefficient) = coefficient(cells, rule, &left.species)?;
    let note = (plan.note.iter())
        .map(|column| cells.text(*column).to_string())
        .filter(|text| !text.is_empty())
        .collect();
    Ok(Mapped::Line(Line {
        rows: vec![row],
        group,
        reactants: left.species,
        products: right.species,
        below: match (&rule.below, group) {
            (None, _) | (_, Group::Light | Group::Cosmic) => None,
            (Some(pick), _) => Some(cells.pick(pick)?),
        },
        coefficient,
        may_add: rule.adds,
        adds: false,
        within: plan
            .within
            .as_ref()
            .map(|value| cells.value(value))
            .transpose()?,
        standing: cells.pick(&plan.standing)?,
        source: source(cells, &plan.source, sources)?,
        note,
    }))
}

fn sides(
    cells: Cells,
    plan: &Plan,
    (form, separator): (&NameForm, Option<&str>),
) -> Result<(Side, Side), String> {
    let texts = |columns: &[usize]| columns.iter().map(|c| cells.text(*c)).collect::<Vec<_>>();
    match &plan.change {
        ChangePlan::Sides {
            reactants,
            products,
        } => Ok((
            translate::side(&texts(reactants), separator, form)?,
            translate::side(&texts(products), separator, form)?,
        )),
        ChangePlan::Equation { column, arrow } => {
            let text = cells.text(*column);
            let Some((left, right)) = text.split_once(arrow.as_str()) else {
                return Err(format!(
                    "found `{text}`, expected `{arrow}` between two sides"
                ));
            };
            let separator = separator.or(Some(" + "));
            Ok((
                translate::side(&[left], separator, form)?,
                translate::side(&[right], separator, form)?,
            ))
        }
    }
}

/// The first rule that fits the label and the markers of a row.
fn rule<'p>(cells: Cells, plan: &'p Plan, markers: &[String]) -> Result<&'p RulePlan, String> {
    let label = plan.label.map(|column| cells.text(column));
    let fits = |rule: &&RulePlan| {
        let by_label = rule.labels.is_empty()
            || label.is_some_and(|label| rule.labels.iter().any(|known| known == label));
        // A marker nobody asked for may change the meaning of a coefficient (a third body).
        let by_marker = match &rule.marker {
            Some(marker) => !markers.is_empty() && markers.iter().all(|other| other == marker),
            None => markers.is_empty() || matches!(rule.law, LawPlan::LeaveOut(_)),
        };
        by_label && by_marker
    };
    plan.rules.iter().find(fits).ok_or_else(|| {
        let mut what: Vec<String> = label
            .map(|label| format!("the label `{label}`"))
            .into_iter()
            .collect();
        what.extend(
            markers
                .iter()
                .map(|marker| format!("the marker `{marker}`")),
        );
        let found = if what.is_empty() {
            "no marker".to_string()
        } else {
            what.join(" and ")
        };
        format!("found {found}, expected what `laws` in the mapping name")
    })
}

fn coefficient(
    cells: Cells,
    rule: &RulePlan,
    reactants: &[String],
) -> Result<(Group, Coefficient), String> {
    let valid = || match &rule.valid {
        Some(range) => cells.range(range),
        None => Err("found no range of temperatures, expected `valid` in the mapping".to_string()),
    };
    let share = |share: &Option<Value>| cells.optional(share, 1.0);
    Ok(match &rule.law {
        LawPlan::Power(group, plan) => {
            let [at_300k, slope, barrier] = power(cells, plan)?;
            let piece = Piece {
                at_300k,
                slope,
                barrier,
                valid: valid()?,
            };
            (*group, Coefficient::Power(vec![piece]))
        }
        LawPlan::Capture {
            langevin,
            x_300k,
            share: part,
        } => {
            let langevin = cells.value(langevin)? * share(part)?;
            let x_300k = cells.value(x_300k)?;
            (
                Group::Capture,
                Coefficient::Capture {
                    langevin,
                    x_300k,
                    valid: valid()?,
                },
            )
        }
        LawPlan::Molecule {
            polarisability,
            dipole,
            share: part,
        } => {
            let (alpha, dipole) = (cells.value(polarisability)?, cells.value(dipole)?);
            let (langevin, x_300k) = capture_numbers(alpha, dipole, reactants)?;
            let langevin = langevin * share(part)?;
            (
                Group::Capture,
                Coefficient::Capture {
                    langevin,
                    x_300k,
                    valid: valid()?,
                },
            )
        }
        LawPlan::Falloff(limits, centre) => {
            let (low, high) = (power(cells, &limits.0)?, power(cells, &limits.1)?);
            let centre = cells.value(centre)?;
            (
                Group::Falloff,
                Coefficient::Falloff {
                    low,
                    high,
                    centre,
                    valid: valid()?,
                },
            )
        }
        LawPlan::Light {
            rate,
            extinction,
            spectra,
        } => {
            let (rate, extinction) = (cells.value(rate)?, cells.value(extinction)?);
            let spectra = (spectra.iter())
                .map(|(name, value)| Ok((name.clone(), cells.value(value)?)))
                .collect::<Result<_, String>>()?;
            (
                Group::Light,
                Coefficient::Light {
                    rate,
                    extinction,
                    spectra,
                },
            )
        }
        LawPlan::Direct(value) => (Group::Cosmic, Coefficient::Direct(cells.value(value)?)),
        LawPlan::Secondary(value) => (Group::Cosmic, Coefficient::Secondary(cells.value(value)?)),
        LawPlan::LeaveOut(reason) => return Err(reason.clone()),
    })
}

/// [at_300K, slope, barrier] of a (T/T0)^b exp(-c/T).
fn power(cells: Cells, plan: &PowerPlan) -> Result<[f64; 3], String> {
    let slope = cells.optional(&plan.slope, 0.0)?;
    // (T/T0)^b = (300/T0)^b (T/300)^b
    let to_300k = if plan.reference == 300.0 {
        1.0
    } else {
        (300.0 / plan.reference).powf(slope)
    };
    let at_300k = numbers::rounded(cells.value(&plan.at_300k)? * to_300k, to_300k != 1.0);
    if !at_300k.is_finite() {
        return Err(
            "found a coefficient that overflows at 300 K, expected a finite one".to_string(),
        );
    }
    Ok([at_300k, slope, cells.optional(&plan.barrier, 0.0)?])
}

/// Langevin coefficient (cm^3 s^-1) and reduced dipole parameter at 300 K (Su & Chesnavich 1982)
/// from the polarisability (A^3) and dipole (Debye) of the neutral.
fn capture_numbers(alpha: f64, dipole: f64, reactants: &[String]) -> Result<(f64, f64), String> {
    if !(alpha > 0.0 && dipole >= 0.0) {
        let expected = "a polarisability above 0 and a dipole not negative";
        return Err(format!(
            "found {alpha} A^3 and {dipole} Debye, expected {expected}"
        ));
    }
    let [one, other] = reactants else {
        return Err(format!(
            "found {} reactants, expected an ion and a neutral",
            reactants.len()
        ));
    };
    let species = |name: &String| {
        names::species(name)
            .map_err(|error| format!("found {}, expected {}", error.found, error.expected))
    };
    let (one, other) = (species(one)?, species(other)?);
    let charges = (one.charge.abs(), other.charge.abs());
    if !matches!(charges, (1, 0) | (0, 1)) {
        return Err("found other charges, expected a singly charged ion and a neutral".to_string());
    }
    let reduced = one.mass * other.mass / (one.mass + other.mass);
    let langevin = limits::capture(alpha, 0.0, reduced, 300.0) / limits::dipole_factor(0.0);
    let x_300k = dipole * 1.0e-18 / (2.0 * alpha * 1.0e-24 * BOLTZMANN * 300.0).sqrt();
    Ok((langevin, x_300k))
}

fn source(cells: Cells, pick: &Pick<String>, sources: &mut Sources) -> Result<String, String> {
    match pick {
        Pick::Always(key) => Ok(sources.key(key)),
        Pick::Column {
            column,
            words,
            otherwise,
        } => {
            let text = cells.text(*column);
            match (words.get(text), otherwise) {
                (Some(key), _) => Ok(sources.key(key)),
                (None, _) if !text.is_empty() => Ok(sources.cited(text)),
                (None, Some(key)) => Ok(sources.key(key)),
                (None, None) => Err("found no source, expected a text (`otherwise` in the mapping says what nothing means)".to_string()),
            }
        }
    }
}
