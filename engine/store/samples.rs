//! Owns the invented runs that tests of the store and the journal share.

use crate::disk::conditions::{Conditions, Disk, FieldKind, Light};
use crate::network::model::Phase;
use crate::run::record::{Balance, CellRecord, CellStatus, Work};
use crate::store::header::{RunHeader, SpeciesInfo, Tolerances};

fn info(name: &str, phase: Phase, charge: i32, mass: f64, atoms: &[(&str, u32)]) -> SpeciesInfo {
    let atoms = atoms
        .iter()
        .map(|(element, count)| (element.to_string(), *count))
        .collect();
    SpeciesInfo {
        name: name.to_string(),
        phase,
        charge,
        mass,
        atoms,
    }
}

fn condition(cell: usize) -> Conditions {
    let x = 1.0 + cell as f64 / 3.0;
    let shields = if cell == 1 {
        vec![None, Some(0.1)]
    } else {
        vec![None, None]
    };
    let sky = Light {
        strength: 1.0 / x,
        extinction: x,
        columns: vec![1.0e21 / x, -0.0],
        shields,
    };
    let star = Light {
        strength: 300.0 / x,
        extinction: 0.1,
        columns: vec![0.0, 1.0e17 * x],
        shields: vec![None, None],
    };
    Conditions {
        radius: 40.0 * x,
        height: x,
        n_h: 1.0e8 / x,
        t_gas: 20.0 + 1.0 / x,
        t_dust: 18.0 / x,
        light: vec![sky, star],
        zeta_cosmic: 1.3e-17,
        zeta_xray: 1.0e-19 * x,
        zeta_nuclides: 0.0,
        dust_area: 5.8575e-22,
        grain_radius: 1.0e-5,
    }
}

/// A run of `cells` cells, 3 snapshots and 5 species.
pub(crate) fn header(cells: usize) -> RunHeader {
    RunHeader {
        title: "Tirune, an invented disk".to_string(),
        engine_version: "0.1.0".to_string(),
        kernel: "scalar".to_string(),
        case_text: "title: Tirune\nnetwork: small\nclock: {until: 3 Myr}\n\u{3b6}: 1\n".to_string(),
        network_text: "network: small\nlayout: 1\n".to_string(),
        thermo_text: "thermo: small\nlayout: 1\n".to_string(),
        species: vec![
            info("H2", Phase::Gas, 0, 2.016, &[("H", 2)]),
            info(
                "HCO+",
                Phase::Gas,
                1,
                29.018,
                &[("H", 1), ("C", 1), ("O", 1)],
            ),
            info("dust-", Phase::Dust, -1, 0.0, &[("dust", 1)]),
            info("CO(ads)", Phase::Ice, 0, 28.01, &[("C", 1), ("O", 1)]),
            info("ices(total)", Phase::IceTotal, 0, 0.0, &[]),
        ],
        times_yr: vec![0.0, 1.0 / 3.0, 3.0e6],
        tolerances: Tolerances {
            relative: 1.0e-5,
            smallest: 1.0e-25,
        },
        caution_names: vec!["below_range".to_string(), "spectrum_missing".to_string()],
        notes: vec!["T_dust: taken as T_gas".to_string()],
        disk: Disk {
            fields: vec![
                FieldKind {
                    name: "sky".into(),
                    spectrum: "draine".into(),
                    attenuated: false,
                },
                FieldKind {
                    name: "star".into(),
                    spectrum: "warm".into(),
                    attenuated: true,
                },
            ],
            column_species: vec!["H2".to_string(), "CO".to_string()],
            cells: (0..cells).map(condition).collect(),
        },
    }
}

/// A record that fits [`header`]; every third cell failed after two snapshots. Awkward values are
/// among the abundances: -0, a subnormal, a NaN with a payload.
pub(crate) fn record(cell: usize) -> CellRecord {
    let failed = cell % 3 == 2;
    let reached = if failed { 2 } else { 3 };
    let mut abundances: Vec<f64> = (0..reached * 5)
        .map(|n| (1.0 + n as f64).powi(-3) / (1.0 + cell as f64))
        .collect();
    abundances[1] = -0.0;
    abundances[2] = f64::MIN_POSITIVE / 64.0;
    abundances[3] = f64::from_bits(0x7ff8_0000_0000_0000 | cell as u64);
    let drift = |n: usize| 1.0e-16 * (n + cell) as f64;
    CellRecord {
        cell,
        status: if failed {
            CellStatus::Failed
        } else {
            CellStatus::Done
        },
        reason: if failed {
            format!("step below 1e-10 s in cell {cell}")
        } else {
            String::new()
        },
        failed_at: if failed { 1.0e7 } else { f64::NAN },
        abundances,
        work: Work::from_counters([40, 3, 90, 95, 4, 12, u64::from(failed)], 0.5 + cell as f64),
        balance: (0..reached)
            .map(|n| Balance {
                elements: drift(n),
                charge: drift(1),
                dust: 0.0,
                ice: -0.0,
            })
            .collect(),
        cautions: vec![cell as u32, 7],
    }
}
