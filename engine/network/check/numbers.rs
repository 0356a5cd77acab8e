//! Owns the rules for numbers in reaction lines: their signs, ranges and temperature pieces.
//!
//! It never judges a value that is possible: `warn` compares with collision limits.

use crate::network::findings::Findings;
use crate::network::groups::{self, Group, Head};
use crate::network::layout::{Below, CosmicLine, GasLine, LightLine, LimitLine, NetworkFile};
use crate::network::model::Piece;

/// Ranges that start at or below this (K) need no rule for what lies below.
const COLDEST: f64 = 5.0;

/// Pieces abut when their ends differ by less than this share.
const ABUT: f64 = 1e-9;

/// What a number must be.
#[derive(Clone, Copy)]
pub(super) enum Must {
    BeFinite,
    NotBeNegative,
    BePositive,
    /// Lie in [0, 1].
    BeShare,
}

/// Notes an error unless `value` is what it must be.
pub(super) fn number(
    value: f64,
    must: Must,
    field: &str,
    place: &str,
    entry: &str,
    findings: &mut Findings,
) {
    let (good, expected) = match must {
        Must::BeFinite => (true, "a finite number"),
        Must::NotBeNegative => (value >= 0.0, "a finite number, not negative"),
        Must::BePositive => (value > 0.0, "a finite number above 0"),
        Must::BeShare => ((0.0..=1.0).contains(&value), "a share from 0 to 1"),
    };
    if !(good && value.is_finite()) {
        findings.add(
            &format!("{place}.{field}"),
            entry,
            format!("{field} {value:e}"),
            expected,
        );
    }
}

pub(super) fn all(file: &NetworkFile, findings: &mut Findings) {
    for (group, index, line) in groups::power_laws(file) {
        power_law(line, &place(group, index), findings);
    }
    for (index, line) in file.capture.iter().enumerate() {
        let place = place(Group::Capture, index);
        let mut must = |value, field| {
            number(
                value,
                Must::NotBeNegative,
                field,
                &place,
                &line.change,
                findings,
            );
        };
        must(line.langevin, "langevin");
        must(line.x_300k, "x_300K");
        range(line.valid, "valid", &place, &line.change, findings);
        below(line.valid[0], line.below, &place, &line.change, findings);
    }
    for (index, line) in file.falloff.iter().enumerate() {
        let place = place(Group::Falloff, index);
        limit(&line.low, &format!("{place}.low"), &line.change, findings);
        limit(&line.high, &format!("{place}.high"), &line.change, findings);
        centre(line.centre, &place, &line.change, findings);
        range(line.valid, "valid", &place, &line.change, findings);
        below(line.valid[0], line.below, &place, &line.change, findings);
    }
    for (index, line) in file.light.iter().enumerate() {
        light(line, &place(Group::Light, index), findings);
    }
    for (index, line) in file.cosmic.iter().enumerate() {
        cosmic(line, &place(Group::Cosmic, index), findings);
    }
}

fn place(group: Group, index: usize) -> String {
    format!("{}[{index}]", group.key())
}

/// `within` is a factor, so at least 1.
pub(super) fn uncertainty(head: &Head, findings: &mut Findings) {
    if let Some(within) = head.within {
        let place = place(head.group, head.index);
        factor(within, &place, head.change, findings);
    }
}

/// An uncertainty factor.
pub(super) fn factor(within: f64, place: &str, entry: &str, findings: &mut Findings) {
    if !(within >= 1.0 && within.is_finite()) {
        let found = format!("within {within:e}");
        findings.add(
            &format!("{place}.within"),
            entry,
            found,
            "a factor of at least 1",
        );
    }
}

fn power_law(line: &GasLine, place: &str, findings: &mut Findings) {
    let change = &line.change;
    let single = [line.at_300k, line.slope, line.barrier]
        .iter()
        .any(Option::is_some)
        || line.valid.is_some();
    let form = "either `at_300K` (slope, barrier) with `valid`, or `pieces`";
    match (single, line.pieces.is_empty()) {
        (true, false) => return findings.add(place, change, "coefficients and `pieces`", form),
        (false, true) => return findings.add(place, change, "no coefficients", form),
        (true, true) if line.at_300k.is_none() => {
            return findings.add(place, change, "no `at_300K`", form);
        }
        (true, true) if line.valid.is_none() => {
            return findings.add(place, change, "no `valid`", form);
        }
        _ => {}
    }
    let pieces = groups::pieces(line);
    for (i, piece) in pieces.iter().enumerate() {
        let place = if single {
            place.to_string()
        } else {
            format!("{place}.pieces[{i}]")
        };
        number(
            piece.at_300k,
            Must::NotBeNegative,
            "at_300K",
            &place,
            change,
            findings,
        );
        number(
            piece.slope,
            Must::BeFinite,
            "slope",
            &place,
            change,
            findings,
        );
        number(
            piece.barrier,
            Must::BeFinite,
            "barrier",
            &place,
            change,
            findings,
        );
        range(piece.valid, "valid", &place, change, findings);
    }
    joints(&pieces, place, change, findings);
    if let Some(lowest) = pieces.first() {
        below(lowest.valid[0], line.below, place, change, findings);
    }
}

/// Pieces must ascend and meet.
fn joints(pieces: &[Piece], place: &str, change: &str, findings: &mut Findings) {
    for (i, pair) in pieces.windows(2).enumerate() {
        let (lower, upper) = (pair[0].valid, pair[1].valid);
        let gap = upper[0] - lower[1];
        if gap.abs() <= ABUT * lower[1].abs() {
            continue;
        }
        let found = if upper[0] < lower[0] {
            format!(
                "pieces that descend: [{}, {}] before [{}, {}]",
                lower[0], lower[1], upper[0], upper[1]
            )
        } else if gap < 0.0 {
            format!("pieces that overlap from {} to {} K", upper[0], lower[1])
        } else {
            format!("a gap between pieces from {} to {} K", lower[1], upper[0])
        };
        let place = format!("{place}.pieces[{}].valid", i + 1);
        findings.add(
            &place,
            change,
            found,
            "pieces that ascend, each starting where the last ends",
        );
    }
}

/// A range of temperatures: [low, high] in K.
fn range(valid: [f64; 2], field: &str, place: &str, entry: &str, findings: &mut Findings) {
    let [low, high] = valid;
    if !(low >= 0.0 && low < high && high.is_finite()) {
        let found = format!("{field} [{low}, {high}]");
        let expected = "[low, high] in K with 0 <= low < high";
        findings.add(&format!("{place}.{field}"), entry, found, expected);
    }
}

/// Where the range starts above [`COLDEST`], the file must say what holds below it.
fn below(low: f64, below: Option<Below>, place: &str, entry: &str, findings: &mut Findings) {
    if low > COLDEST && below.is_none() {
        let found = format!("no `below` for a range that starts at {low} K");
        findings.add(place, entry, found, "`below: extend`, `hold` or `zero`");
    }
}

fn limit(line: &LimitLine, place: &str, change: &str, findings: &mut Findings) {
    // Both limits are divided by each other, so neither may be 0.
    number(
        line.at_300k,
        Must::BePositive,
        "at_300K",
        place,
        change,
        findings,
    );
    number(line.slope, Must::BeFinite, "slope", place, change, findings);
    number(
        line.barrier,
        Must::BeFinite,
        "barrier",
        place,
        change,
        findings,
    );
}

fn centre(value: f64, place: &str, change: &str, findings: &mut Findings) {
    if !(value > 0.0 && value <= 1.0) {
        let found = format!("centre {value:e}");
        findings.add(
            &format!("{place}.centre"),
            change,
            found,
            "a factor above 0, at most 1",
        );
    }
}

fn light(line: &LightLine, place: &str, findings: &mut Findings) {
    number(
        line.rate,
        Must::NotBeNegative,
        "rate",
        place,
        &line.change,
        findings,
    );
    number(
        line.extinction,
        Must::NotBeNegative,
        "extinction",
        place,
        &line.change,
        findings,
    );
    for (spectrum, rate) in &line.spectra {
        let place = format!("{place}.spectra");
        number(
            *rate,
            Must::NotBeNegative,
            spectrum,
            &place,
            &line.change,
            findings,
        );
    }
}

fn cosmic(line: &CosmicLine, place: &str, findings: &mut Findings) {
    let both = "exactly one of `direct` and `secondary`";
    match (line.direct, line.secondary) {
        (Some(_), Some(_)) => findings.add(place, &line.change, "`direct` and `secondary`", both),
        (None, None) => findings.add(
            place,
            &line.change,
            "neither `direct` nor `secondary`",
            both,
        ),
        (Some(value), None) => {
            number(
                value,
                Must::NotBeNegative,
                "direct",
                place,
                &line.change,
                findings,
            );
        }
        (None, Some(value)) => {
            number(
                value,
                Must::NotBeNegative,
                "secondary",
                place,
                &line.change,
                findings,
            );
        }
    }
}
