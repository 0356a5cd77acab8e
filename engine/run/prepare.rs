//! Owns the step from a resolved case to everything a cell needs: expanded network, mechanism,
//! conditions, start, and the header of the run.
//!
//! It never integrates and never writes.

use super::balance::Invariants;
use crate::case::{Case, start_state};
use crate::disk::conditions::Disk;
use crate::errors::{Failure, InputError};
use crate::kinetics::{Mechanism, Tolerance};
use crate::network::{self, Network, model::Chemistry};
use crate::rates::{self, CAUTIONS, Setting};
use crate::store::{RunHeader, SpeciesInfo, Tolerances};
use crate::units::YEAR;
use std::path::{Path, PathBuf};

/// The engine's version and the build it is: a journal is continued by the same code only.
pub const ENGINE_VERSION: &str = concat!(env!("CARGO_PKG_VERSION"), "+", env!("FROSTCLOCK_BUILD"));

/// A case made ready to run. Shared by all threads.
#[derive(Debug)]
pub struct Prepared {
    pub header: RunHeader,
    pub chemistry: Chemistry,
    pub mechanism: Mechanism,
    pub invariants: Invariants,
    pub disk: Disk,
    /// One initial state per cell: they differ by their grains only.
    pub starts: Vec<Vec<f64>>,
    /// Snapshot times, s, 0 first.
    pub times: Vec<f64>,
    pub tolerance: Tolerance,
    pub setting: Setting,
    /// What the network reader remarked.
    pub warnings: Vec<network::Warning>,
}

impl Prepared {
    /// Reads and expands the network of `case`, and checks what only the network can tell.
    ///
    /// # Errors
    /// [`Failure::Input`] for anything wrong in the network, the start or the fields.
    pub fn new(case: &Case) -> Result<Self, Failure> {
        let path = network_path(case);
        let polynomials = Some(case.thermo_text.as_str()).filter(|text| !text.is_empty());
        let network =
            network::read_with(&path, &case.network_text, polynomials).map_err(Failure::Input)?;
        let chemistry = network::expand(&network, &case.grains).map_err(Failure::Input)?;
        let mechanism = rates::mechanism(&chemistry).map_err(|error| {
            let found = error.to_string();
            InputError::new(
                &path,
                None,
                "network",
                found,
                "steps the kinetics core can carry",
            )
        })?;
        let disk = case.disk_for(&chemistry)?;
        let starts = starts(case, &network, &chemistry, &disk)?;
        let mut notes = case.notes.clone();
        notes.extend(crate::case::start_notes(&chemistry, &starts[0]));
        let header = RunHeader {
            title: case.title.clone(),
            engine_version: ENGINE_VERSION.to_string(),
            kernel: kernel_name(),
            case_text: case.resolved.clone(),
            network_text: case.network_text.clone(),
            thermo_text: case.thermo_text.clone(),
            species: chemistry.species.iter().map(SpeciesInfo::from).collect(),
            times_yr: case.snapshots.iter().map(|t| t / YEAR).collect(),
            tolerances: Tolerances {
                relative: case.relative,
                smallest: case.smallest,
            },
            caution_names: CAUTIONS.iter().map(|name| (*name).to_string()).collect(),
            notes,
            disk: disk.clone(),
        };
        Ok(Prepared {
            header,
            invariants: Invariants::new(&chemistry),
            mechanism,
            chemistry,
            disk,
            starts,
            times: case.snapshots.clone(),
            tolerance: Tolerance {
                relative: case.relative,
                smallest: case.smallest,
            },
            setting: Setting {
                turbulence: case.turbulence,
                colliders: case.colliders,
            },
            warnings: network.warnings,
        })
    }
}

/// Where errors of the network point to.
fn network_path(case: &Case) -> PathBuf {
    let built_in = || Path::new("networks").join(format!("{}.yaml", case.network_name));
    case.network_path.clone().unwrap_or_else(built_in)
}

fn starts(
    case: &Case,
    network: &Network,
    chemistry: &Chemistry,
    disk: &Disk,
) -> Result<Vec<Vec<f64>>, Failure> {
    let compositions: Vec<_> = (network.file.compositions.iter())
        .map(|c| (c.name.clone(), c.abundances.clone()))
        .collect();
    let of_cell = |cell: &crate::disk::conditions::Conditions| {
        start_state(&case.start, &compositions, chemistry, cell.dust_abundance())
    };
    disk.cells
        .iter()
        .map(of_cell)
        .collect::<Result<_, _>>()
        .map_err(Failure::from)
}

/// The numerical kernel in use. The linear algebra library chooses its instructions by what the
/// processor offers, so results are the same bits only within one such set.
fn kernel_name() -> String {
    #[cfg(target_arch = "x86_64")]
    let wide = if is_x86_feature_detected!("avx512f") {
        "avx512f"
    } else if is_x86_feature_detected!("avx2") && is_x86_feature_detected!("fma") {
        "avx2+fma"
    } else {
        "baseline"
    };
    #[cfg(not(target_arch = "x86_64"))]
    let wide = "baseline";
    format!("diffsol BDF, static LU, {} {wide}", std::env::consts::ARCH)
}
