//! Owns which keys each law has, and finds the columns of its numbers.
//!
//! It never computes with them.

use super::{LawPlan, PowerPlan, Value, value};
use crate::import::checker::Checker;
use crate::import::mapping::{Law, LimitForm, MappingFile, Number, Rule};
use crate::import::numbers::Quantity;
use crate::network::groups::Group;

/// The keys that each law may have, beside those of all.
fn keys(law: Law) -> (&'static str, &'static [&'static str]) {
    let power = &["at_300K", "slope", "barrier", "reference_temperature"][..];
    match law {
        Law::PowerLaw => ("power_law", power),
        Law::ThreeBody => ("three_body", power),
        Law::ThirdBody => ("third_body", power),
        Law::Capture => (
            "capture",
            &["langevin", "x_300K", "polarisability", "dipole", "share"],
        ),
        Law::Falloff => (
            "falloff",
            &["low", "high", "centre", "reference_temperature"],
        ),
        Law::Light => ("light", &["rate", "extinction", "spectra"]),
        Law::Direct => ("direct", &["per_ionisation"]),
        Law::Secondary => ("secondary", &["per_ionisation"]),
        Law::LeaveOut => ("leave_out", &["reason"]),
    }
}

/// The law of a rule with its columns; errors are noted in `check`.
pub(super) fn law(rule: &Rule, mapping: &MappingFile, place: &str, check: &mut Checker) -> LawPlan {
    let (name, allowed) = keys(rule.law);
    let given = [
        ("at_300K", rule.at_300k.is_some()),
        ("slope", rule.slope.is_some()),
        ("barrier", rule.barrier.is_some()),
        (
            "reference_temperature",
            rule.reference_temperature.is_some(),
        ),
        ("langevin", rule.langevin.is_some()),
        ("x_300K", rule.x_300k.is_some()),
        ("polarisability", rule.polarisability.is_some()),
        ("dipole", rule.dipole.is_some()),
        ("share", rule.share.is_some()),
        ("low", rule.low.is_some()),
        ("high", rule.high.is_some()),
        ("centre", rule.centre.is_some()),
        ("rate", rule.rate.is_some()),
        ("extinction", rule.extinction.is_some()),
        ("spectra", !rule.spectra.is_empty()),
        ("per_ionisation", rule.per_ionisation.is_some()),
        ("reason", rule.reason.is_some()),
    ];
    for (key, given) in given {
        if given && !allowed.contains(&key) {
            let expected = format!("of the law `{name}` only {}", allowed.join(", "));
            check.error(&format!("{place}.{key}"), format!("`{key}`"), expected);
        }
    }
    let ranged = !matches!(
        rule.law,
        Law::Light | Law::Direct | Law::Secondary | Law::LeaveOut
    );
    if ranged && rule.valid.is_none() && mapping.valid.is_none() {
        let expected = "`valid`, here or at the top level: the range of temperatures";
        check.error(place, format!("no `valid` for the law `{name}`"), expected);
    }
    let reference = rule.reference_temperature.unwrap_or(300.0);
    check.positive(reference, &format!("{place}.reference_temperature"));
    let mut need = |form: &Option<Number>, key: &str, quantity| match form {
        Some(form) => value(form, quantity, &format!("{place}.{key}"), check),
        None => {
            check.error(
                place,
                format!("no `{key}`"),
                format!("`{key}` for the law `{name}`"),
            );
            Value::of(0.0)
        }
    };
    let group = match rule.law {
        Law::ThreeBody => Group::ThreeBody,
        Law::ThirdBody => Group::ThirdBody,
        _ => Group::Gas,
    };
    match rule.law {
        Law::PowerLaw | Law::ThreeBody | Law::ThirdBody => {
            let unit = if group == Group::ThreeBody {
                Quantity::ThreeBody
            } else {
                Quantity::TwoBody
            };
            let at_300k = need(&rule.at_300k, "at_300K", unit);
            LawPlan::Power(
                group,
                PowerPlan {
                    at_300k,
                    slope: rule
                        .slope
                        .as_ref()
                        .map(|f| value(f, Quantity::Plain, &format!("{place}.slope"), check)),
                    barrier: rule
                        .barrier
                        .as_ref()
                        .map(|f| value(f, Quantity::Energy, &format!("{place}.barrier"), check)),
                    reference,
                },
            )
        }
        Law::Capture if rule.polarisability.is_some() || rule.dipole.is_some() => {
            let polarisability = need(&rule.polarisability, "polarisability", Quantity::Plain);
            let dipole = need(&rule.dipole, "dipole", Quantity::Plain);
            if rule.langevin.is_some() || rule.x_300k.is_some() {
                let found = "both kinds of numbers";
                check.error(
                    place,
                    found,
                    "`langevin` and `x_300K`, or `polarisability` and `dipole`",
                );
            }
            LawPlan::Molecule {
                polarisability,
                dipole,
                share: share(rule, place, check),
            }
        }
        Law::Capture => LawPlan::Capture {
            langevin: need(&rule.langevin, "langevin", Quantity::TwoBody),
            x_300k: need(&rule.x_300k, "x_300K", Quantity::Plain),
            share: share(rule, place, check),
        },
        Law::Falloff => {
            let centre = need(&rule.centre, "centre", Quantity::Plain);
            let low = limit(
                &rule.low,
                "low",
                Quantity::ThreeBody,
                reference,
                place,
                check,
            );
            let high = limit(
                &rule.high,
                "high",
                Quantity::TwoBody,
                reference,
                place,
                check,
            );
            LawPlan::Falloff(Box::new((low, high)), centre)
        }
        Law::Light => {
            let rate = need(&rule.rate, "rate", Quantity::Plain);
            let extinction = need(&rule.extinction, "extinction", Quantity::Plain);
            let spectra = (rule.spectra.iter())
                .map(|(spectrum, form)| {
                    let place = format!("{place}.spectra.{spectrum}");
                    if !mapping.spectra.contains_key(spectrum) {
                        let expected = "a key that `spectra` at the top level explains";
                        check.error(&place, format!("spectrum `{spectrum}`"), expected);
                    }
                    (
                        spectrum.clone(),
                        value(form, Quantity::Plain, &place, check),
                    )
                })
                .collect();
            LawPlan::Light {
                rate,
                extinction,
                spectra,
            }
        }
        Law::Direct => LawPlan::Direct(need(
            &rule.per_ionisation,
            "per_ionisation",
            Quantity::Plain,
        )),
        Law::Secondary => LawPlan::Secondary(need(
            &rule.per_ionisation,
            "per_ionisation",
            Quantity::Plain,
        )),
        Law::LeaveOut => {
            let reason = rule.reason.clone().unwrap_or_default();
            if reason.trim().is_empty() {
                check.error(
                    place,
                    "no `reason`",
                    "`reason`, which is listed with each row",
                );
            }
            LawPlan::LeaveOut(reason)
        }
    }
}

fn share(rule: &Rule, place: &str, check: &mut Checker) -> Option<Value> {
    let form = rule.share.as_ref()?;
    Some(value(
        form,
        Quantity::Plain,
        &format!("{place}.share"),
        check,
    ))
}

fn limit(
    form: &Option<LimitForm>,
    key: &str,
    unit: Quantity,
    reference: f64,
    place: &str,
    check: &mut Checker,
) -> PowerPlan {
    let place = format!("{place}.{key}");
    let Some(form) = form else {
        check.error(
            &place,
            format!("no `{key}`"),
            format!("`{key}: {{at_300K: ..., slope: ..., barrier: ...}}`"),
        );
        return PowerPlan {
            at_300k: Value::of(0.0),
            slope: None,
            barrier: None,
            reference,
        };
    };
    let mut get = |form: &Number, key: &str, quantity| {
        value(form, quantity, &format!("{place}.{key}"), check)
    };
    PowerPlan {
        at_300k: get(&form.at_300k, "at_300K", unit),
        slope: form
            .slope
            .as_ref()
            .map(|form| get(form, "slope", Quantity::Plain)),
        barrier: form
            .barrier
            .as_ref()
            .map(|form| get(form, "barrier", Quantity::Energy)),
        reference,
    }
}
