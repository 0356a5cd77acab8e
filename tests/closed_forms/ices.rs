//! Freeze-out and the ways back from the ice: thermal, by cosmic rays, by light.

use super::*;

const ICES: &str = "\
species:
  - {name: CO, source: s}
  - {name: H2O, source: s}
  - {name: CO2, source: s}
ices:
  - {species: CO, energy: 1390, prefactor: 9.14e+14, photodesorption: [], standing: recalled, source: s}
  - {species: H2O, energy: 5705, prefactor: 4.96e+15, photodesorption: [], standing: recalled, source: s}
  - {species: CO2, energy: 3196, prefactor: 6.81e+16, photodesorption: [], standing: recalled, source: s}
";

/// Fails if dust, sticking, thermal speed or density enters freeze-out wrongly anywhere between
/// the table of a case and the last snapshot. E-folding times with sticking 1: closed_form_checks.md
/// section 1 (kinetic theory; masses there 28 and 18, here those of the formulas).
#[test]
fn molecules_freeze_out_exponentially() {
    let table = "radius [au],height [au],n_H [cm^-3],T_gas [K],zeta_cosmic [s^-1]\n\
                 1,0,1.0e4,10,0\n1,0,1.0e6,10,0\n1,0,1.0e8,20,0\n1,0,1.0e8,20,0\n";
    let rows = [
        ("CO", 28.010 / 28.0, 6.2213e5),
        ("CO", 28.010 / 28.0, 6.2213e3),
        ("CO", 28.010 / 28.0, 4.3991e1),
        ("H2O", 18.015 / 18.0, 3.5271e1),
    ];
    for (cell, (species, heavier, years)) in rows.into_iter().enumerate() {
        let tau = years * YEAR * f64::sqrt(heavier);
        let times = [0.3 * tau, tau, 4.0 * tau];
        let run = case(
            ICES,
            "fields: []",
            "CO: 1.0e-4, H2O: 1.0e-4",
            &times,
            "",
            table,
        );
        for (x, t) in history(&run, cell, species).into_iter().zip(times) {
            // The last digit of the table, thrice over at 4 tau.
            close(
                x,
                1e-4 * (-t / tau).exp(),
                1e-4,
                &format!("{species} after {t:e} s"),
            );
        }
    }
}

/// Fails if thermal desorption is not first order below one layer, with the half-life
/// ln 2/(nu exp(-E/T)) (Polanyi & Wigner 1925).
#[test]
fn thin_ice_desorbs_with_its_half_life() {
    let setup = Setup::new(ICES, &GrainOptions::default());
    for (species, energy, nu, t) in [
        ("CO", 1390.0, 9.14e14, 25.0),
        ("H2O", 5705.0, 4.96e15, 100.0),
        ("CO2", 3196.0, 6.81e16, 55.0),
    ] {
        let half = LN_2 / (nu * f64::exp(-energy / t));
        let ice = names::adsorbed_name(species);
        // So thin a gas that nothing comes back.
        let x = setup.run(
            &dark(1e-3, t),
            &[(&ice, 1e-6)],
            &[0.5 * half, half, 2.0 * half, 10.0 * half],
            [ice.as_str(), species],
        );
        for ([ice, gas], halves) in x.into_iter().zip([0.5, 1.0, 2.0, 10.0]) {
            let left = 1e-6 * f64::powf(0.5, halves);
            close(ice, left, 1e-6, species);
            close(gas, 1e-6 - left, 1e-6, species);
        }
    }
}

/// Fails if thick ice loses more than its top layers: linear decrease with slope
/// k * sites * layers down to the last desorbing layer, then exponential (zeroth- and first-order
/// desorption, e.g. Collings et al. 2004, MNRAS 354, 1133).
#[test]
fn thick_ice_desorbs_layer_by_layer() {
    for layers in [1.0, 3.0] {
        let grains = GrainOptions {
            desorbing_layers: layers,
            ..Default::default()
        };
        let setup = Setup::new(ICES, &grains);
        let k = 9.14e14 * f64::exp(-1390.0 / 25.0);
        let (start, last) = (1e-4, layers * SITES);
        let bare = (start - last) / (k * last);
        let times = [
            0.2 * bare,
            0.6 * bare,
            0.99 * bare,
            bare + 1.0 / k,
            bare + 3.0 / k,
        ];
        let x = setup.run(
            &dark(1e-3, 25.0),
            &[("CO(ads)", start)],
            &times,
            ["CO(ads)"],
        );
        for ([x], t) in x.into_iter().zip(times) {
            let expected = if t < bare {
                start - k * last * t
            } else {
                last * (-k * (t - bare)).exp()
            };
            close(
                x,
                expected,
                1e-5,
                &format!("{layers} layers at {:.2} of the way", t / bare),
            );
        }
    }
}

/// Fails if adsorption and desorption do not balance where they should: gas equals ice within the
/// rounding of the tabulated half-depletion temperatures at n_H = 1e8 (closed_form_checks.md
/// section 1). Light and cosmic rays are off.
#[test]
fn half_of_a_molecule_is_gas_at_its_half_depletion_temperature() {
    let setup = Setup::new(ICES, &GrainOptions::default());
    for (species, t) in [("CO", 25.10), ("H2O", 101.59), ("CO2", 53.68)] {
        let ice = names::adsorbed_name(species);
        let ratio = |t| {
            let x = setup.run(
                &dark(1e8, t),
                &[(species, 1e-6)],
                &[1e4 * YEAR],
                [species, &ice],
            );
            let [gas, ice] = x[0];
            gas / ice
        };
        let (colder, warmer) = (ratio(t - 0.012), ratio(t + 0.012));
        assert!(
            colder < 1.0 && warmer > 1.0,
            "{species}: {colder} and {warmer}"
        );
    }
}

/// Loss of ice per hydrogen nucleus and second, from the change of the ice within `time` (s) that
/// is short against its life.
fn loss(setup: &Setup, place: &Conditions, ice: f64, time: f64) -> f64 {
    let x = setup.run(place, &[("CO(ads)", ice)], &[time], ["CO"]);
    x[0][0] / time
}

const ONE_ICE: &str = "\
species:
  - {name: CO, source: s}
ices:
  - {species: CO, energy: 1150, prefactor: 1.0e+12, photodesorption: [CHANNELS], standing: recalled, source: s}
";

/// Fails if the duty cycle of hot grains or the share of the top layer is off: for CO (1150 K,
/// 1e12 s^-1) by hand 3.16e-19 * 1e12 exp(-1150/70) = 2.3166e-14 s^-1 per molecule at
/// zeta = 1.3e-17 s^-1 (Hasegawa & Herbst 1993, MNRAS 261, 83), from the top layer only.
#[test]
fn cosmic_rays_desorb_the_top_layer() {
    let setup = Setup::new(&ONE_ICE.replace("CHANNELS", ""), &GrainOptions::default());
    // X-rays and nuclides do not heat grains.
    let place = Conditions {
        zeta_cosmic: 1.3e-17,
        zeta_xray: 1e-15,
        zeta_nuclides: 1e-15,
        ..dark(1e-6, 8.0)
    };
    let thin = loss(&setup, &place, 1e-7, 1e9);
    close(thin / 1e-7, 2.3166e-14, 1e-4, "thin ice");
    // 2.3166e-14 s^-1 times 3.5145e-6 sites per H, whatever the thickness.
    for ice in [2e-5, 1e-4] {
        close(
            loss(&setup, &place, ice, 1e9),
            8.1416e-20,
            1e-4,
            "thick ice",
        );
    }
}

/// Fails if photons, yields, layers or sites are counted wrongly: a thick ice loses yield times
/// photons on the projected area of the grains, sigma_H F Y; a thin one (under two lit layers)
/// F Y/(4 n_s 2) per molecule. F = 1e8 chi exp(-2 A_V) + 1.4e20 zeta (disk_relations.md; yield of
/// CO 2.7e-3: Oberg et al. 2007, ApJ 662, L23).
#[test]
fn photons_desorb_from_the_lit_layers() {
    let channel = "{products: CO, yield: 2.7e-3, source: s}";
    let setup = Setup::new(
        &ONE_ICE.replace("CHANNELS", channel),
        &GrainOptions::default(),
    );
    let lit = |strength, extinction| Light {
        strength,
        extinction,
        columns: vec![0.0],
        shields: vec![None],
    };
    // X-rays make secondary photons without heating grains: 1.4e20 * 1.3e-17 = 1820 cm^-2 s^-1,
    // ten times as many where a tenth of the dust absorbs them.
    let xrays = Conditions {
        zeta_xray: 1.3e-17,
        ..dark(1e-6, 8.0)
    };
    let bare = Conditions {
        dust_area: 0.1 * REFERENCE_DUST_AREA,
        ..xrays.clone()
    };
    let sunny = Conditions {
        light: vec![lit(30.0, 2.0), lit(1.0, 0.5)],
        ..dark(1e-6, 8.0)
    };
    let rows = [
        (&xrays, 1820.0, REFERENCE_DUST_AREA),
        (&bare, 18200.0, 0.1 * REFERENCE_DUST_AREA),
        // 1e8 (30 exp(-4) + exp(-1)) = 9.1735e7.
        (&sunny, 9.1735e7, REFERENCE_DUST_AREA),
    ];
    for (place, flux, area) in rows {
        let per_molecule = flux * 2.7e-3 / (4.0 * SITE_DENSITY * 2.0);
        let time = 1e-4 / per_molecule;
        let thin = loss(&setup, place, 1e-8, time);
        // Half of the 1e-4 is gone to the course of the decay.
        close(thin / 1e-8, per_molecule * (1.0 - 0.5e-4), 2e-5, "thin ice");
        close(
            loss(&setup, place, 1e-4, time),
            flux * 2.7e-3 * area,
            2e-5,
            "thick ice",
        );
    }
}
