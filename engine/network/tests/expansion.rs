//! What the expansion generates, in which order, and that it conserves everything.

use super::{expanded, small};
use crate::network::check::imbalance;
use crate::network::model::{Cause, Chemistry, GrainOptions, Phase, Reaction, Species, SpeciesId};
use crate::network::{expand, read};
use std::collections::BTreeMap;
use std::path::Path;

fn changes(chemistry: &Chemistry) -> Vec<&str> {
    chemistry
        .reactions
        .iter()
        .map(|r| r.change.as_str())
        .collect()
}

fn find<'a>(chemistry: &'a Chemistry, change: &str) -> &'a Reaction {
    chemistry
        .reactions
        .iter()
        .find(|r| r.change == change)
        .unwrap_or_else(|| panic!("no {change}"))
}

// A run file stores abundances by place; the documented order must hold.
#[test]
fn species_stand_in_the_documented_order() {
    let names = |options: &GrainOptions| {
        expanded(options)
            .species
            .iter()
            .map(|s| s.name.clone())
            .collect::<Vec<_>>()
    };
    let gas = "H H2 He C O OH H2O CO HCO e- H3+ HCO+ H2+";
    let ices = "H(ads) CO(ads) HCO(ads) H2O(ads) ices(total)";
    assert_eq!(
        names(&GrainOptions::default()).join(" "),
        format!("{gas} dust- dust dust+ {ices}")
    );
    let two = GrainOptions {
        charge_states: 2,
        ..GrainOptions::default()
    };
    assert_eq!(
        names(&two).join(" "),
        format!("{gas} dust-- dust- dust dust+ dust++ {ices}")
    );
    let none = GrainOptions {
        charge_states: 0,
        ..GrainOptions::default()
    };
    assert_eq!(names(&none).join(" "), format!("{gas} dust {ices}"));
}

// Written out by hand from the specification of the expansion.
#[test]
fn reactions_stand_in_the_documented_order() {
    let chemistry = expanded(&GrainOptions::default());
    let expected = [
        "H3+ + CO -> HCO+ + H2",
        "HCO+ + e- -> CO + H",
        "OH + H2 -> H2O + H",
        "H2+ + H2O -> H3+ + OH",
        "H + CO -> HCO",
        "H + H + H -> H2 + H",
        "HCO -> H + CO",
        "CO -> C + O",
        "H2O -> OH + H",
        "H2 -> H2+ + e-",
        "H2O -> OH + H",
        "H + H -> H2 (on dust)",
        "e- + dust -> dust-",
        "e- + dust+ -> dust",
        "HCO+ + dust- -> CO + H + dust",
        "HCO+ + dust -> CO + H + dust+",
        "H3+ + dust- -> H2 + H + dust",
        "H3+ + dust -> H2 + H + dust+",
        "H3+ + dust- -> H + H + H + dust",
        "H3+ + dust -> H + H + H + dust+",
        "H -> H(ads)",
        "H(ads) -> H",
        "H(ads) -> H",
        "H(ads) -> H",
        "CO -> CO(ads)",
        "CO(ads) -> CO",
        "CO(ads) -> CO",
        "CO(ads) -> CO",
        "HCO -> HCO(ads)",
        "HCO(ads) -> HCO",
        "HCO(ads) -> HCO",
        "H2O -> H2O(ads)",
        "H2O(ads) -> H2O",
        "H2O(ads) -> H2O",
        "H2O(ads) -> H2O",
        "H2O(ads) -> OH + H",
        "H(ads) + CO(ads) -> HCO(ads)",
        "H(ads) + CO(ads) -> HCO",
        "H(ads) + H(ads) -> H2",
        "H(ads) + HCO(ads) -> CO(ads) + H2",
        "H(ads) + HCO(ads) -> CO + H2",
    ];
    assert_eq!(changes(&chemistry), expected);
}

// No expanded reaction may create atoms, charge or grains, whatever the number of charges.
#[test]
fn every_reaction_conserves_atoms_charge_and_dust() {
    for charge_states in [0, 1, 3] {
        let chemistry = expanded(&GrainOptions {
            charge_states,
            ..GrainOptions::default()
        });
        for reaction in &chemistry.reactions {
            let of =
                |ids: &[SpeciesId]| ids.iter().map(|i| chemistry.species[*i].clone()).collect();
            let (left, right): (Vec<Species>, Vec<Species>) =
                (of(&reaction.consumed), of(&reaction.products));
            assert_eq!(imbalance(&left, &right), None, "{}", reaction.change);
            // The masses of electrons are not subtracted from ions, so masses agree to that.
            let mass = |side: &[Species]| side.iter().map(|s| s.mass).sum::<f64>();
            assert!(
                (mass(&left) - mass(&right)).abs() < 1e-2,
                "{}",
                reaction.change
            );
        }
    }
}

// The ice total is what layers are counted from: it must follow the adsorbed molecules.
#[test]
fn the_ice_total_changes_with_the_adsorbed_molecules() {
    let chemistry = expanded(&GrainOptions::default());
    let total = chemistry.ice_total().unwrap();
    assert_eq!(chemistry.species[total].phase, Phase::IceTotal);
    for reaction in &chemistry.reactions {
        let net = reaction.net_change(Some(total), &chemistry.species);
        let adsorbed: i32 = net
            .iter()
            .filter(|(id, _)| chemistry.species[*id].phase == Phase::Ice)
            .map(|(_, change)| change)
            .sum();
        let stored = net
            .iter()
            .find(|(id, _)| *id == total)
            .map_or(0, |(_, change)| *change);
        assert_eq!(stored, adsorbed, "{}", reaction.change);
        assert!(
            net.iter().all(|(_, change)| *change != 0),
            "{}",
            reaction.change
        );
        let ids = [&reaction.reactants, &reaction.consumed, &reaction.products];
        assert!(
            ids.iter().all(|ids| !ids.contains(&total)),
            "{}",
            reaction.change
        );
    }
    let net = |change: &str| {
        let net = find(&chemistry, change).net_change(Some(total), &chemistry.species);
        let name = |id: usize| chemistry.species[id].name.clone();
        net.into_iter()
            .map(|(id, n)| (name(id), n))
            .collect::<BTreeMap<_, _>>()
    };
    let of = |pairs: &[(&str, i32)]| {
        pairs
            .iter()
            .map(|(name, n)| (name.to_string(), *n))
            .collect::<BTreeMap<_, _>>()
    };
    assert_eq!(
        net("H(ads) + CO(ads) -> HCO(ads)"),
        of(&[
            ("H(ads)", -1),
            ("CO(ads)", -1),
            ("HCO(ads)", 1),
            ("ices(total)", -1)
        ])
    );
    assert_eq!(
        net("H(ads) + H(ads) -> H2"),
        of(&[("H(ads)", -2), ("H2", 1), ("ices(total)", -2)])
    );
    assert_eq!(net("H + H + H -> H2 + H"), of(&[("H", -2), ("H2", 1)]));
    assert_eq!(net("H + H -> H2 (on dust)"), of(&[("H", -2), ("H2", 1)]));
}

// Every number of a line must reach its cause.
#[test]
fn causes_carry_the_numbers_of_their_lines() {
    let chemistry = expanded(&GrainOptions::default());
    let hydrogen = find(&chemistry, "H + H -> H2 (on dust)");
    let h = chemistry.find("H").unwrap();
    assert_eq!(
        (&hydrogen.reactants, &hydrogen.consumed),
        (&vec![h], &vec![h, h])
    );
    assert_eq!(
        hydrogen.cause,
        Cause::HydrogenFormation {
            at_100k: 3.0e-17,
            slope: 0.5
        }
    );
    let Cause::Charging {
        sticking,
        charge,
        mass,
        grain,
        share,
    } = find(&chemistry, "H3+ + dust- -> H2 + H + dust").cause
    else {
        panic!("not charging")
    };
    assert_eq!((sticking, charge, grain, share), (0.9, 1, -1, 0.4));
    assert!((mass - 3.024).abs() < 1e-12);
    let Cause::Charging {
        sticking,
        charge,
        mass,
        grain,
        share,
    } = find(&chemistry, "e- + dust+ -> dust").cause
    else {
        panic!("not charging")
    };
    assert_eq!((sticking, charge, grain, share), (0.6, -1, 1, 1.0));
    assert!((mass - 5.48579909065e-4).abs() < 1e-15);
    let light: Vec<&Cause> = chemistry
        .reactions
        .iter()
        .map(|r| &r.cause)
        .filter(|cause| matches!(cause, Cause::Light { .. }))
        .collect();
    assert_eq!(chemistry.spectra, ["draine", "black_body_4000K"]);
    assert_eq!(
        *light[0],
        Cause::Light {
            rates: vec![Some(2.4e-10), None],
            extinction: 3.88,
            shield: Some(1)
        }
    );
    assert_eq!(
        *light[1],
        Cause::Light {
            rates: vec![Some(6.33e-10), Some(1e-10)],
            extinction: 2.65,
            shield: None
        }
    );
    assert_eq!(chemistry.column_species, ["H2", "CO"]);
    let table = &chemistry.shielding[1];
    assert_eq!(
        (table.column, table.h2, table.log_factor[1][1]),
        (1, 0, -2.0)
    );
    let hydrogen_sticks = |change: &str| match find(&chemistry, change).cause {
        Cause::Accretion { hydrogen, .. } => hydrogen,
        _ => panic!("not accretion"),
    };
    assert!(hydrogen_sticks("H -> H(ads)") && !hydrogen_sticks("CO -> CO(ads)"));
}

// Shares of staying and leaving, masses and bindings decide the surface chemistry.
#[test]
fn surface_causes_follow_line_and_options() {
    let options = GrainOptions {
        leaving_share: 0.1,
        ..GrainOptions::default()
    };
    let of =
        |change: &str, options: &GrainOptions| match find(&expanded(options), change).cause.clone()
        {
            Cause::Surface {
                first,
                second,
                same,
                share,
                own,
                barriers,
            } => {
                assert_eq!(barriers, [own]);
                (first, second, same, own.height, own.width, own.mass, share)
            }
            other => panic!("{other:?}"),
        };
    let (h, co, same, barrier, width, mass, share) = of("H(ads) + CO(ads) -> HCO(ads)", &options);
    assert_eq!((same, barrier, width), (false, 2500.0, 1.5));
    assert!((share - 0.8 * 0.9).abs() < 1e-15);
    assert!((mass - 1.008 * 28.010 / 29.018).abs() < 1e-12);
    // H is one atom: 0.35 x 650. CO hops by 0.5 x its hop energy.
    assert_eq!((h.energy, h.hop_energy), (650.0, 650.0));
    assert!((h.hop_barrier - 227.5).abs() < 1e-12);
    assert_eq!(
        (co.energy, co.prefactor, co.hop_energy, co.hop_barrier),
        (1390.0, 9.1e14, 1300.0, 650.0)
    );
    let share = of("H(ads) + CO(ads) -> HCO", &options).6;
    assert!((share - 0.08).abs() < 1e-15);
    // All products leave anyway: `leaves` plays no part.
    let (_, _, same, _, _, _, share) = of("H(ads) + H(ads) -> H2", &options);
    assert_eq!((same, share), (true, 1.0));
    let (_, hco, _, _, _, mass, share) = of("H(ads) + HCO(ads) -> CO + H2", &options);
    assert_eq!((hco.hop_barrier, mass), (900.0, 1.008));
    assert!((share - 0.15).abs() < 1e-15);
    // Pure ices keep the hop energy of the line.
    let pure = GrainOptions {
        pure_ice: true,
        ..GrainOptions::default()
    };
    let co = of("H(ads) + CO(ads) -> HCO(ads)", &pure).1;
    assert_eq!(
        (co.energy, co.prefactor, co.hop_energy),
        (930.0, 6.1e13, 1300.0)
    );
    // Nothing leaves: no leaving part, but for the line that says so itself.
    let none = expanded(&GrainOptions {
        leaving_share: 0.0,
        ..GrainOptions::default()
    });
    assert!(!changes(&none).contains(&"H(ads) + CO(ads) -> HCO"));
    assert!(changes(&none).contains(&"H(ads) + HCO(ads) -> CO + H2"));
}

// Channels of one measurement vary together, different processes do not.
#[test]
fn uncertainty_groups_join_channels_of_one_cause() {
    let chemistry = expanded(&GrainOptions::default());
    let group = |change: &str| find(&chemistry, change).group;
    assert_eq!(
        group("H3+ + dust -> H2 + H + dust+"),
        group("H3+ + dust -> H + H + H + dust+")
    );
    assert_ne!(
        group("H3+ + dust -> H2 + H + dust+"),
        group("HCO+ + dust -> CO + H + dust+")
    );
    assert_eq!(
        group("H(ads) + CO(ads) -> HCO(ads)"),
        group("H(ads) + CO(ads) -> HCO")
    );
    let water: Vec<&Reaction> = chemistry
        .reactions
        .iter()
        .filter(|r| r.change == "H2O -> OH + H")
        .collect();
    assert_ne!(water[0].group, water[1].group);
    assert_eq!(
        (water[1].within, water[1].line, water[1].source.as_str()),
        (2.0, 42, "t")
    );
    assert_eq!(find(&chemistry, "HCO+ + e- -> CO + H").within, 1.5);
    let photo: Vec<&Reaction> = chemistry
        .reactions
        .iter()
        .filter(|r| matches!(r.cause, Cause::Photodesorption { .. }) && r.change.starts_with("H2O"))
        .collect();
    assert_eq!(photo.len(), 2);
    assert_eq!(photo[0].group, photo[1].group);
    let count = chemistry.reactions.iter().map(|r| r.group).max().unwrap() + 1;
    assert!((0..count).all(|g| chemistry.reactions.iter().any(|r| r.group == g)));
}

// A gas-phase network needs neither ices nor dust.
#[test]
fn gas_alone_expands_to_itself() {
    let text = super::SMALL
        .split_once("ices:")
        .unwrap()
        .0
        .replace(", CO(ads): 1.0e-5", "");
    let network = read(Path::new("x"), &text).unwrap();
    let chemistry = expand(&network, &GrainOptions::default()).unwrap();
    assert_eq!(
        (chemistry.species.len(), chemistry.reactions.len()),
        (13, 11)
    );
    assert_eq!(chemistry.ice_total(), None);
}

#[test]
fn a_negative_number_of_charges_is_refused() {
    let options = GrainOptions {
        charge_states: -1,
        ..GrainOptions::default()
    };
    let errors = expand(&small(), &options).unwrap_err();
    assert_eq!(
        (errors[0].entry.as_str(), errors[0].found.as_str()),
        ("grains.charge_states", "-1")
    );
}
