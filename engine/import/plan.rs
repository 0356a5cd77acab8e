//! Owns a mapping whose columns are found: which cell gives which number of which law.
//!
//! It never reads a row: `numbers` and `laws` do.

mod law;

use super::checker::Checker;
use super::mapping::{Choice, GivenAs, MappingFile, Number, RangeForm, Rule};
use super::numbers::{self, Quantity};
use crate::network::groups::Group;
use crate::network::layout::{Below, Standing};
use std::collections::BTreeMap;

/// Where a number comes from.
#[derive(Debug, Clone)]
pub struct Value {
    /// None: `constant` for all rows.
    pub column: Option<usize>,
    pub constant: f64,
    pub factor: f64,
    pub times: Vec<usize>,
    pub given_as: GivenAs,
    pub words: BTreeMap<String, f64>,
    pub blank: Option<f64>,
}

/// Where a word comes from.
#[derive(Debug, Clone)]
pub enum Pick<T> {
    Always(T),
    Column {
        column: usize,
        words: BTreeMap<String, T>,
        otherwise: Option<T>,
    },
}

/// Where a range comes from.
#[derive(Debug, Clone)]
pub enum RangePlan {
    Two(Value, Value),
    One { column: usize, separator: String },
}

/// The three numbers of a power law.
#[derive(Debug, Clone)]
pub struct PowerPlan {
    pub at_300k: Value,
    pub slope: Option<Value>,
    pub barrier: Option<Value>,
    pub reference: f64,
}

/// A law with the places of its numbers.
#[derive(Debug, Clone)]
pub enum LawPlan {
    Power(Group, PowerPlan),
    Capture {
        langevin: Value,
        x_300k: Value,
        share: Option<Value>,
    },
    Molecule {
        polarisability: Value,
        dipole: Value,
        share: Option<Value>,
    },
    /// Low and high limit.
    Falloff(Box<(PowerPlan, PowerPlan)>, Value),
    Light {
        rate: Value,
        extinction: Value,
        spectra: Vec<(String, Value)>,
    },
    Direct(Value),
    Secondary(Value),
    LeaveOut(String),
}

#[derive(Debug, Clone)]
pub struct RulePlan {
    pub labels: Vec<String>,
    pub marker: Option<String>,
    pub law: LawPlan,
    pub valid: Option<RangePlan>,
    pub below: Option<Pick<Below>>,
    pub adds: bool,
}

/// Where the species of a row stand.
#[derive(Debug, Clone)]
pub enum ChangePlan {
    Equation {
        column: usize,
        arrow: String,
    },
    Sides {
        reactants: Vec<usize>,
        products: Vec<usize>,
    },
}

/// A mapping ready to be used.
#[derive(Debug, Clone)]
pub struct Plan {
    pub change: ChangePlan,
    pub label: Option<usize>,
    pub rules: Vec<RulePlan>,
    pub within: Option<Value>,
    pub standing: Pick<Standing>,
    pub source: Pick<String>,
    pub note: Vec<usize>,
    pub comma: bool,
    pub meet_within: f64,
}

/// Finds the columns of everything; errors are noted in `check`, and then the plan is not to be used.
pub fn plan(mapping: &MappingFile, check: &mut Checker) -> Plan {
    let form = &mapping.change;
    let change = match &form.equation {
        Some(name) => ChangePlan::Equation {
            column: check.column(name, "change.equation"),
            arrow: form.arrow.clone().unwrap_or_default(),
        },
        None => ChangePlan::Sides {
            reactants: check.columns(&form.reactants, "change.reactants"),
            products: check.columns(&form.products, "change.products"),
        },
    };
    let label = mapping
        .label
        .as_ref()
        .map(|name| check.column(name, "label"));
    let valid = mapping
        .valid
        .as_ref()
        .map(|form| range(form, "valid", check));
    let below = mapping
        .below
        .as_ref()
        .map(|form| pick(form, "below", check));
    let rules = (mapping.laws.iter().enumerate())
        .map(|(i, rule)| {
            let place = format!("laws[{i}]");
            RulePlan {
                valid: match &rule.valid {
                    Some(form) => Some(range(form, &format!("{place}.valid"), check)),
                    None => valid.clone(),
                },
                below: match &rule.below {
                    Some(form) => Some(pick(form, &format!("{place}.below"), check)),
                    None => below.clone(),
                },
                labels: labels(rule, mapping, &place, check),
                marker: marker(rule, mapping, &place, check),
                law: law::law(rule, mapping, &place, check),
                adds: rule.adds,
            }
        })
        .collect();
    source_constant(mapping, check);
    Plan {
        change,
        label,
        rules,
        within: mapping
            .within
            .as_ref()
            .map(|form| value(form, Quantity::Factor, "within", check)),
        standing: pick(&mapping.standing, "standing", check),
        source: pick(&mapping.source, "source", check),
        note: check.columns(&mapping.note, "note"),
        comma: mapping.table.decimal.as_deref() == Some(","),
        meet_within: mapping.valid.as_ref().map_or(0.0, |form| form.meet_within),
    }
}

/// Keys that stand in the mapping itself must be explained there; cells explain themselves.
fn source_constant(mapping: &MappingFile, check: &mut Checker) {
    let mut keys: Vec<(String, &String)> = Vec::new();
    match &mapping.source {
        Choice::Always(key) => keys.push(("source".to_string(), key)),
        Choice::Column(form) => {
            keys.extend(
                form.otherwise
                    .iter()
                    .map(|key| ("source.otherwise".to_string(), key)),
            );
            let words = form.words.iter();
            keys.extend(words.map(|(word, key)| (format!("source.words.{word}"), key)));
        }
    }
    for (place, key) in keys {
        if !mapping.sources.contains_key(key) {
            check.error(
                &place,
                format!("source `{key}`"),
                "a key that `sources` explains",
            );
        }
    }
}

fn labels(rule: &Rule, mapping: &MappingFile, place: &str, check: &mut Checker) -> Vec<String> {
    if !rule.label.is_empty() && mapping.label.is_none() {
        let expected = "`label: COLUMN` at the top level, the column they stand in";
        check.error(&format!("{place}.label"), "labels", expected);
    }
    rule.label.clone()
}

fn marker(rule: &Rule, mapping: &MappingFile, place: &str, check: &mut Checker) -> Option<String> {
    let marker = rule.marker.as_ref()?;
    if !mapping.names.markers.contains(marker) {
        let expected = "a word of `names.markers`";
        check.error(&format!("{place}.marker"), format!("`{marker}`"), expected);
    }
    Some(marker.clone())
}

fn range(form: &RangeForm, place: &str, check: &mut Checker) -> RangePlan {
    if !(form.meet_within >= 0.0 && form.meet_within.is_finite()) {
        let found = form.meet_within.to_string();
        check.error(
            &format!("{place}.meet_within"),
            found,
            "a number of K, not negative",
        );
    }
    if place != "valid" && form.meet_within != 0.0 {
        let expected = "`meet_within` in the `valid` of the top level, for all laws";
        check.error(&format!("{place}.meet_within"), "`meet_within`", expected);
    }
    match (&form.low, &form.high, &form.column, &form.separator) {
        (Some(low), Some(high), None, None) => RangePlan::Two(
            value(low, Quantity::Plain, &format!("{place}.low"), check),
            value(high, Quantity::Plain, &format!("{place}.high"), check),
        ),
        (None, None, Some(column), Some(separator)) if !separator.is_empty() => RangePlan::One {
            column: check.column(column, &format!("{place}.column")),
            separator: separator.clone(),
        },
        _ => {
            let expected = "`low` and `high`, or `column` and `separator`";
            check.error(place, "another set of keys", expected);
            RangePlan::Two(Value::of(0.0), Value::of(0.0))
        }
    }
}

fn pick<T: Clone>(form: &Choice<T>, place: &str, check: &mut Checker) -> Pick<T> {
    match form {
        Choice::Always(value) => Pick::Always(value.clone()),
        Choice::Column(form) => Pick::Column {
            column: check.column(&form.column, &format!("{place}.column")),
            words: form.words.clone(),
            otherwise: form.otherwise.clone(),
        },
    }
}

impl Value {
    fn of(constant: f64) -> Value {
        Value {
            column: None,
            constant,
            factor: 1.0,
            times: Vec::new(),
            given_as: GivenAs::Value,
            words: BTreeMap::new(),
            blank: None,
        }
    }
}

fn value(form: &Number, quantity: Quantity, place: &str, check: &mut Checker) -> Value {
    let mut value = Value::of(form.value.unwrap_or(0.0));
    match (&form.column, form.value) {
        (Some(name), None) => {
            let short = check.positions.line(&format!("{place}.column")).is_none();
            let at = if short {
                place.to_string()
            } else {
                format!("{place}.column")
            };
            value.column = Some(check.column(name, &at));
        }
        (None, Some(constant)) if constant.is_finite() => {}
        _ => check.error(
            place,
            "neither or both of `column` and `value`",
            "one of them",
        ),
    }
    // A factor of -1 turns a sign that the table means the other way round.
    if let Some(times) = form
        .times
        .filter(|times| !times.is_finite() || *times == 0.0)
    {
        let place = format!("{place}.times");
        check.error(&place, times.to_string(), "a finite number other than 0");
    }
    if let Some(over) = form.over {
        check.positive(over, &format!("{place}.over"));
    }
    let unit = form
        .unit
        .as_ref()
        .map_or(1.0, |unit| match numbers::unit(unit, quantity) {
            Ok(factor) => factor,
            Err(expected) => {
                check.error(&format!("{place}.unit"), format!("`{unit}`"), expected);
                1.0
            }
        });
    if form.given_as == GivenAs::Percent && !matches!(quantity, Quantity::Factor) {
        check.error(
            &format!("{place}.given_as"),
            "`percent`",
            "`percent` in `within` only",
        );
    }
    value.factor = unit * form.times.unwrap_or(1.0) / form.over.unwrap_or(1.0);
    value.times = check.columns(&form.times_columns, &format!("{place}.times_columns"));
    value.given_as = form.given_as;
    value.words = form.words.clone();
    value.blank = form.blank;
    value
}
