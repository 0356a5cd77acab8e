//! The verb `network show`.

use crate::command::print::{Table, counted, exact, out};
use crate::command::{Outcome, wrong};
use crate::errors::Failure;
use crate::inquiry::listing::{Asked, Filter, Order, Row};
use crate::inquiry::{self, listing};
use crate::network::expand;
use crate::network::model::{Chemistry, GrainOptions};
use crate::units::{Dimension, parse};
use std::path::PathBuf;

#[derive(Debug, clap::Args)]
#[command(
    after_help = "Quantities may carry a unit (\"0.3 um\"); plain numbers are in the unit of \
the option. Coefficients: cm^3 s^-1 between two, cm^6 s^-1 among three (third_body and falloff: \
cm^3 s^-1), s^-1 alone; between molecules on ice s^-1 per layer that the partner covers."
)]
pub struct Arguments {
    /// A network file, or `standard`
    network: String,
    /// Temperature of gas and dust, K [default: 10]
    #[arg(long = "T", value_name = "K", allow_hyphen_values = true)]
    t: Option<String>,
    /// Temperature of the gas, K [default: --T]
    #[arg(
        long = "T-gas",
        alias = "T_gas",
        value_name = "K",
        allow_hyphen_values = true
    )]
    t_gas: Option<String>,
    /// Temperature of the dust, K [default: --T]
    #[arg(
        long = "T-dust",
        alias = "T_dust",
        value_name = "K",
        allow_hyphen_values = true
    )]
    t_dust: Option<String>,
    /// Hydrogen nuclei, cm^-3 [default: 1e6]
    #[arg(
        long = "n-H",
        alias = "n_H",
        value_name = "cm^-3",
        allow_hyphen_values = true
    )]
    n_h: Option<String>,
    /// Radiation field before extinction, Draine [default: 1]
    #[arg(long = "UV", value_name = "DRAINE", allow_hyphen_values = true)]
    uv: Option<String>,
    /// Spectrum of the radiation field
    #[arg(long, value_name = "NAME", default_value = "draine")]
    spectrum: String,
    /// Visual extinction of the field, mag; columns that shield follow from it [default: 10]
    #[arg(
        long = "AV",
        alias = "A_V",
        value_name = "MAG",
        allow_hyphen_values = true
    )]
    av: Option<String>,
    /// Cosmic-ray ionisation rate of H2, s^-1 [default: 1.3e-17]
    #[arg(long, value_name = "s^-1", allow_hyphen_values = true)]
    zeta: Option<String>,
    /// Dust cross-section per hydrogen nucleus, cm^2 [default: 5.8575e-22]
    #[arg(long, value_name = "cm^2", allow_hyphen_values = true)]
    dust_area: Option<String>,
    /// Grain radius, cm [default: 0.1 um]
    #[arg(long, value_name = "cm", allow_hyphen_values = true)]
    grain_radius: Option<String>,
    /// n(H2) + n(H) + n(He) over n_H, for falloff reactions [default: 0.6]
    #[arg(long, value_name = "RATIO", allow_hyphen_values = true)]
    colliders: Option<String>,
    /// Desorption energies: from water ice or from the pure ice
    #[arg(long, default_value = "water")]
    binding: Binding,
    /// Only reactions with one of these on either side, separated by commas
    #[arg(long, value_name = "NAMES", allow_hyphen_values = true)]
    species: Option<String>,
    /// Only reactions that form one of these
    #[arg(long, value_name = "NAMES", allow_hyphen_values = true)]
    forms: Option<String>,
    /// Only reactions that destroy one of these
    #[arg(long, value_name = "NAMES", allow_hyphen_values = true)]
    destroys: Option<String>,
    /// Largest first (reactions of one unit together), or as in the file
    #[arg(long, default_value = "coefficient")]
    sort: Sort,
    /// Write all digits as CSV, with the conditions and the coefficient in units of the state
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, clap::ValueEnum)]
enum Binding {
    Water,
    Pure,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, clap::ValueEnum)]
enum Sort {
    Coefficient,
    File,
}

pub fn show(arguments: &Arguments) -> Result<Outcome, Failure> {
    let asked = asked(arguments)?;
    let network = inquiry::open(&arguments.network)?;
    let options = GrainOptions {
        pure_ice: arguments.binding == Binding::Pure,
        ..GrainOptions::default()
    };
    let chemistry = expand(&network, &options).map_err(Failure::Input)?;
    let wanted = |option: &str, names: &Option<String>| match names {
        Some(names) => listing::species(&chemistry, option, names),
        None => Ok(Vec::new()),
    };
    let filter = Filter {
        with: wanted("--species", &arguments.species)?,
        forms: wanted("--forms", &arguments.forms)?,
        destroys: wanted("--destroys", &arguments.destroys)?,
    };
    let order = match arguments.sort {
        Sort::Coefficient => Order::Coefficient,
        Sort::File => Order::File,
    };
    let rows = listing::list(&chemistry, &asked, &filter, order)?;
    if let Some(path) = &arguments.csv {
        csv_table(&chemistry, &asked, &rows).csv(path)?;
    }
    out(&format!(
        "{}: T_gas {} K, T_dust {} K, n_H {:e} cm^-3, {} UV {} Draine behind A_V {} mag, zeta {:e} s^-1, dust area {:e} cm^2, grain radius {:e} cm",
        chemistry.name,
        asked.t_gas,
        asked.t_dust,
        asked.n_h,
        asked.spectrum,
        asked.uv,
        asked.extinction,
        asked.zeta,
        asked.dust_area,
        asked.grain_radius,
    ))?;
    let heads = [
        "line",
        "coefficient",
        "unit",
        "reaction",
        "cause",
        "outside its range",
        "standing",
        "source",
    ];
    let mut table = Table::new(heads);
    table.words = vec![2, 3, 4, 5, 6, 7];
    table.rows = rows.iter().map(|row| shown(&chemistry, row)).collect();
    table.print()?;
    let beyond = rows.iter().filter(|row| row.outside.is_some()).count();
    out(&format!(
        "{} of {}, {beyond} outside the range",
        counted(rows.len(), "reaction"),
        chemistry.reactions.len()
    ))?;
    Ok(Outcome::Done)
}

fn shown(chemistry: &Chemistry, row: &Row) -> Vec<String> {
    let reaction = &chemistry.reactions[row.reaction];
    vec![
        reaction.line.to_string(),
        format!("{:.3e}", row.value),
        row.unit.to_string(),
        reaction.change.clone(),
        listing::cause(reaction).to_string(),
        row.outside.clone().unwrap_or_default(),
        format!("{:?}", reaction.standing).to_lowercase(),
        reaction.source.clone(),
    ]
}

fn csv_table(chemistry: &Chemistry, asked: &Asked, rows: &[Row]) -> Table {
    let mut table = Table::new([
        "line",
        "reaction",
        "cause",
        "coefficient",
        "unit",
        "in the state [s^-1]",
        "outside",
        "within",
        "standing",
        "source",
        "T_gas [K]",
        "T_dust [K]",
        "n_H [cm^-3]",
        "spectrum",
        "UV [Draine]",
        "AV [mag]",
        "zeta_cosmic [s^-1]",
        "dust_area [cm^2]",
        "grain_radius [cm]",
        "colliders",
    ]);
    let number = |value: f64| exact(Some(value));
    for row in rows {
        let reaction = &chemistry.reactions[row.reaction];
        table.rows.push(vec![
            reaction.line.to_string(),
            reaction.change.clone(),
            listing::cause(reaction).to_string(),
            number(row.value),
            row.unit.to_string(),
            number(row.in_state),
            row.outside.clone().unwrap_or_default(),
            number(reaction.within),
            format!("{:?}", reaction.standing).to_lowercase(),
            reaction.source.clone(),
            number(asked.t_gas),
            number(asked.t_dust),
            number(asked.n_h),
            asked.spectrum.clone(),
            number(asked.uv),
            number(asked.extinction),
            number(asked.zeta),
            number(asked.dust_area),
            number(asked.grain_radius),
            number(asked.colliders),
        ]);
    }
    table
}

/// The conditions of the arguments; what is left out has its default.
fn asked(arguments: &Arguments) -> Result<Asked, Failure> {
    let usual = Asked::default();
    let kelvin = |option, text: &Option<String>, usual| {
        quantity(option, text, Dimension::Temperature, "K", true, usual)
    };
    let t = kelvin("--T", &arguments.t, usual.t_gas)?;
    let zero = |option, text, dimension, unit, usual| {
        quantity(option, text, dimension, unit, false, usual)
    };
    let above =
        |option, text, dimension, unit, usual| quantity(option, text, dimension, unit, true, usual);
    use Dimension::{Area, Extinction, FieldStrength, Length, Number, NumberDensity, Rate};
    let a = arguments;
    Ok(Asked {
        t_gas: kelvin("--T-gas", &a.t_gas, t)?,
        t_dust: kelvin("--T-dust", &a.t_dust, t)?,
        n_h: above("--n-H", &a.n_h, NumberDensity, "cm^-3", usual.n_h)?,
        uv: zero("--UV", &a.uv, FieldStrength, "Draine", usual.uv)?,
        spectrum: a.spectrum.clone(),
        extinction: zero("--AV", &a.av, Extinction, "mag", usual.extinction)?,
        zeta: zero("--zeta", &a.zeta, Rate, "s^-1", usual.zeta)?,
        dust_area: above("--dust-area", &a.dust_area, Area, "cm^2", usual.dust_area)?,
        grain_radius: above(
            "--grain-radius",
            &a.grain_radius,
            Length,
            "cm",
            usual.grain_radius,
        )?,
        colliders: zero("--colliders", &a.colliders, Number, "1", usual.colliders)?,
    })
}

/// A quantity, in `unit` if it carries none; `above` zero, or not below it.
fn quantity(
    option: &str,
    text: &Option<String>,
    dimension: Dimension,
    unit: &str,
    above: bool,
    usual: f64,
) -> Result<f64, Failure> {
    let Some(text) = text else { return Ok(usual) };
    let number = text.trim().parse::<f64>().is_ok();
    let full = match number {
        true => format!("{} {unit}", text.trim()),
        false => text.clone(),
    };
    let value = parse(&full, dimension).map_err(|misread| {
        let expected = format!("{}; a plain number is in {unit}", misread.expected);
        wrong(option, format!("`{text}`"), expected)
    })?;
    if value > 0.0 || (value == 0.0 && !above) {
        return Ok(value);
    }
    let bound = if above { "above 0" } else { "not below 0" };
    Err(wrong(
        option,
        format!("`{text}`"),
        format!("{} {bound}", dimension.words()),
    ))
}
