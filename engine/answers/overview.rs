//! Owns the summary of a run: what it is, how far it came, how well its sums close.
//!
//! It never judges a number it does not show.

use crate::errors::Failure;
use crate::network::model::Phase;
use crate::run::record::{Balance, CellStatus};
use crate::store::RunFile;

/// A label and what is to be said about it.
pub type Line = (String, String);

/// The lines of the summary, in reading order.
pub fn overview(run: &RunFile) -> Result<Vec<Line>, Failure> {
    let header = run.header();
    let mut lines: Vec<Line> = Vec::new();
    let mut say = |label: &str, text: String| lines.push((label.to_string(), text));
    say("run", header.title.clone());
    say(
        "made by",
        format!("frostclock {} ({})", header.engine_version, header.kernel),
    );
    say("inputs", format!("sha256 {}", run.input_hash()));
    let count = |wanted| run.statuses().iter().filter(|s| **s == wanted).count();
    let (done, failed) = (count(CellStatus::Done), count(CellStatus::Failed));
    say(
        "cells",
        format!(
            "{} ({done} done, {failed} failed, {} not run)",
            run.statuses().len(),
            count(CellStatus::Missing)
        ),
    );
    let phase = |p| header.species.iter().filter(|s| s.phase == p).count();
    say(
        "species",
        format!(
            "{} gas, {} adsorbed, {} grain charges",
            phase(Phase::Gas),
            phase(Phase::Ice),
            phase(Phase::Dust)
        ),
    );
    let times = &header.times_yr;
    if let (Some(first), Some(last)) = (times.get(1), times.last()) {
        say(
            "snapshots",
            format!("{}: 0, {first} yr ... {last:e} yr", times.len()),
        );
    }
    let t = header.tolerances;
    say(
        "accuracy",
        format!(
            "relative {:e}, smallest abundance {:e}",
            t.relative, t.smallest
        ),
    );
    say("", String::new());
    for (label, unit, pick) in ranges() {
        let values = header.disk.cells.iter().map(pick);
        let (low, high) = values.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| {
            (l.min(v), h.max(v))
        });
        say(label, format!("{low:.4e} ... {high:.4e} {unit}"));
    }
    for (f, kind) in header.disk.fields.iter().enumerate() {
        let light = header.disk.cells.iter().map(|c| &c.light[f]);
        let (low, high) = light.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| {
            (l.min(v.extinction), h.max(v.extinction))
        });
        say(
            &format!("A_V of `{}`", kind.name),
            format!("{low:.3e} ... {high:.3e} mag ({})", kind.spectrum),
        );
    }
    say("", String::new());
    for (label, text) in closures(run)? {
        say(label, text);
    }
    let work = run.work()?;
    let sum = |pick: fn(&crate::run::record::Work) -> u64| work.iter().map(pick).sum::<u64>();
    let seconds: f64 = work
        .iter()
        .map(|w| w.seconds)
        .filter(|s| s.is_finite())
        .sum();
    say(
        "work",
        format!(
            "{} steps, {} factorisations, {} restarts, {seconds:.1} s of one core",
            sum(|w| w.steps),
            sum(|w| w.factorisations),
            sum(|w| w.restarts)
        ),
    );
    let cautions = run.cautions()?;
    for (i, name) in header.caution_names.iter().enumerate() {
        let counts = cautions.iter().filter_map(|c| c.get(i).copied());
        let (cells, most) = counts.fold((0, 0), |(n, m), c| (n + u32::from(c > 0), m.max(c)));
        if cells > 0 {
            let plural = if cells == 1 { "" } else { "s" };
            say(
                "caution",
                format!("{name}: in {cells} cell{plural}, up to {most} in one"),
            );
        }
    }
    Ok(lines)
}

type Pick = fn(&crate::disk::conditions::Conditions) -> f64;

fn ranges() -> [(&'static str, &'static str, Pick); 6] {
    [
        ("radius", "au", |c| c.radius),
        ("height", "au", |c| c.height),
        ("n_H", "cm^-3", |c| c.n_h),
        ("T_gas", "K", |c| c.t_gas),
        ("T_dust", "K", |c| c.t_dust),
        ("zeta (all)", "s^-1", |c| {
            c.zeta_cosmic + c.zeta_xray + c.zeta_nuclides
        }),
    ]
}

/// How well the sums that must not change close, over all cells and snapshots.
fn closures(run: &RunFile) -> Result<Vec<(&'static str, String)>, Failure> {
    let mut worst = [0.0f64; 4];
    for balance in run.balance()?.iter().flatten() {
        for (w, v) in worst.iter_mut().zip(balance.numbers()) {
            // NaN marks snapshots that were not reached.
            *w = w.max(if v.is_nan() { 0.0 } else { v });
        }
    }
    let worst = Balance::from_numbers(worst);
    let Balance {
        elements,
        charge,
        dust,
        ice,
    } = worst;
    let mut lines = vec![
        (
            "elements",
            format!("kept to {elements:.1e} of each total at worst"),
        ),
        (
            "charge",
            format!("kept to {charge:.1e} of the sum of all charges at worst"),
        ),
        (
            "grains",
            format!("kept to {dust:.1e}; ice total matches its parts to {ice:.1e}"),
        ),
    ];
    if let Some(complaint) = worst.complaint() {
        lines.push(("caution", format!("{complaint} in some cell: see `checks`")));
    }
    Ok(lines)
}

/// The failed cells: number, when (s) and why.
pub fn failed(run: &RunFile) -> Vec<(usize, f64, String)> {
    let all = run.statuses().iter().enumerate();
    all.filter(|(_, s)| **s == CellStatus::Failed)
        .map(|(cell, _)| (cell, run.failed_at()[cell], run.reasons()[cell].clone()))
        .collect()
}
