//! The verb `network check`.

use super::line;
use crate::command::Outcome;
use crate::command::print::{Table, counted, out};
use crate::errors::Failure;
use crate::inquiry::audit;
use crate::network::Severity;
use std::path::PathBuf;

#[derive(Debug, clap::Args)]
#[command(after_help = "Exit status: 0 no errors, 2 errors (with --strict: errors or warnings).")]
pub struct Arguments {
    /// A network file, or `standard`
    network: String,
    /// Warnings count as errors
    #[arg(long)]
    strict: bool,
    /// Write the findings as CSV
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
}

pub fn check(arguments: &Arguments) -> Result<Outcome, Failure> {
    let audit = audit::audit(&arguments.network)?;
    if let Some(path) = &arguments.csv {
        let heads = ["severity", "file", "line", "entry", "what", "why"];
        let mut table = Table::new(heads);
        table.rows = (audit.findings.iter())
            .map(|finding| {
                vec![
                    finding.severity.word().to_string(),
                    finding.file.display().to_string(),
                    line(finding.line),
                    finding.entry.clone(),
                    finding.what.clone(),
                    finding.why.clone(),
                ]
            })
            .collect();
        table.csv(path)?;
    }
    let of = |severity| (audit.findings.iter()).filter(move |f| f.severity == severity);
    let all = [Severity::Error, Severity::Warning, Severity::Remark];
    for severity in all {
        if of(severity).next().is_some() {
            out(&format!("{}s:", severity.word()))?;
            for finding in of(severity) {
                out(&finding.to_string())?;
            }
            out("")?;
        }
    }
    if let Some(network) = &audit.network {
        let gas = network.roster.gas;
        let lines = network.standings().iter().map(|(_, n)| n).sum::<usize>();
        let standings: Vec<String> = (network.standings().iter())
            .map(|(name, n)| {
                let share = 100.0 * *n as f64 / lines.max(1) as f64;
                format!("{n} {name} ({share:.0} %)")
            })
            .collect();
        out(&format!(
            "{}: {gas} gas species, {}, {}, {}",
            network.file.network,
            counted(network.file.ices.len(), "ice"),
            counted(network.entries.len(), "reaction line"),
            counted(network.file.sources.len(), "source"),
        ))?;
        out(&format!(
            "{}: {}",
            counted(lines, "line"),
            standings.join(", ")
        ))?;
    }
    let counts = all.map(|severity| counted(of(severity).count(), severity.word()));
    out(&format!("{}: {}", audit.path.display(), counts.join(", ")))?;
    let gravest = audit.findings.iter().map(|f| f.severity).min();
    let wrong = match gravest {
        Some(Severity::Error) => true,
        Some(Severity::Warning) => arguments.strict,
        _ => false,
    };
    Ok(if wrong {
        Outcome::InputWrong
    } else {
        Outcome::Done
    })
}
