//! The verb `preview`.

use super::Outcome;
use super::print::{self, Table};
use crate::case;
use crate::disk::write_table;
use crate::errors::Failure;
use crate::network::model::Phase;
use crate::run::Prepared;
use std::path::PathBuf;

#[derive(Debug, clap::Args)]
pub struct Arguments {
    /// The case file
    case: PathBuf,
    /// Write the cells as a table that a case can name
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
    /// Print every remark on the network
    #[arg(long)]
    remarks: bool,
}

pub fn preview(arguments: &Arguments) -> Result<Outcome, Failure> {
    let case = case::open(&arguments.case)?;
    let run = Prepared::new(&case)?;
    let phase = |p| {
        run.chemistry
            .species
            .iter()
            .filter(|s| s.phase == p)
            .count()
    };
    print::out(&format!(
        "{}\n{} cells, {} snapshots; {} gas species, {} ices, {} reactions",
        case.title,
        run.disk.cells.len(),
        run.times.len(),
        phase(Phase::Gas),
        phase(Phase::Ice),
        run.chemistry.reactions.len()
    ))?;
    for note in &run.header.notes {
        print::out(note)?;
    }
    if arguments.remarks {
        for warning in &run.warnings {
            print::out(&warning.to_string())?;
        }
    } else if !run.warnings.is_empty() {
        print::out(&format!(
            "{} remarks on the network (--remarks shows them)",
            run.warnings.len()
        ))?;
    }
    let heads = [
        "cell",
        "radius [au]",
        "height [au]",
        "n_H [cm^-3]",
        "T_gas [K]",
        "T_dust [K]",
        "zeta [s^-1]",
        "UV after A_V [Draine]",
    ];
    let mut table = Table::new(heads);
    for (i, c) in run.disk.cells.iter().enumerate() {
        // What light is left for a typical exponent of extinction, 2 per mag.
        let light: f64 = (run.disk.fields.iter().zip(&c.light))
            .map(|(kind, l)| l.strength * crate::rates::light::attenuation(kind, l, 2.0))
            .sum();
        table.rows.push(vec![
            i.to_string(),
            format!("{:.3}", c.radius),
            format!("{:.3}", c.height),
            format!("{:.2e}", c.n_h),
            format!("{:.1}", c.t_gas),
            format!("{:.1}", c.t_dust),
            format!("{:.2e}", c.zeta_cosmic + c.zeta_xray + c.zeta_nuclides),
            format!("{light:.2e}"),
        ]);
    }
    table.print()?;
    if let Some(path) = &arguments.csv {
        let mut file = print::create(path, "--csv")?;
        write_table(&run.disk, &mut file)
            .map_err(|e| Failure::machine("writing the cells", path, e))?;
        log::info!("wrote {}", path.display());
    }
    Ok(Outcome::Done)
}
