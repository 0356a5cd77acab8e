//! Owns the tests of reading, checking and expanding as a whole, on one small network.

mod errors;
mod expansion;
mod reversible;
mod warnings;

use super::model::{Chemistry, GrainOptions};
use super::{Network, expand, read};
use std::path::Path;

/// Every group once, every number easy to recognise.
const SMALL: &str = r#"network: small
layout: 1
about: for tests
sources: {s: "Somebody 1999", t: "Somebody else 2001"}
spectra: {black_body_4000K: a cool star}
species:
  - {name: H, enthalpy: 218.0, polarisability: 0.667, source: s}
  - {name: H2, enthalpy: 0.0, polarisability: 0.804, source: s}
  - {name: He, enthalpy: 0.0, polarisability: 0.205}
  - {name: C, enthalpy: 716.87, polarisability: 1.67}
  - {name: O, enthalpy: 249.23, polarisability: 0.785}
  - {name: OH, enthalpy: 37.5, polarisability: 1.0, dipole: 1.66}
  - {name: H2O, enthalpy: -241.82, polarisability: 1.45, dipole: 1.855}
  - {name: CO, enthalpy: -110.53, polarisability: 1.95, dipole: 0.11}
  - {name: HCO, enthalpy: 41.83, polarisability: 2.5, dipole: 1.36}
  - {name: e-, enthalpy: 0.0}
  - {name: H3+, enthalpy: 1106.7}
  - {name: HCO+, enthalpy: 827.24}
  - {name: H2+, enthalpy: 1488.48}
compositions:
  - {name: atoms, source: s, abundances: {H2: 0.5, He: 0.09, O: 1.0e-4, CO(ads): 1.0e-5}}
shielding:
  - {name: H2, law: draine_bertoldi, column: H2, source: s}
  - {name: CO, law: table, column: CO, log_column: [0, 15], log_h2: [0, 20], factor: [[1.0, 0.1], [0.5, 0.01]], source: s}
gas:
  - {change: H3+ + CO -> HCO+ + H2, at_300K: 1.36e-9, slope: -0.14, barrier: -3.4, valid: [10, 400], below: extend, within: 1.25, standing: evaluated, source: s}
  - {change: HCO+ + e- -> CO + H, at_300K: 2.4e-7, slope: -0.69, valid: [5, 1000], standing: measured, source: s}
  - {change: OH + H2 -> H2O + H, pieces: [{at_300K: 1.0e-12, slope: 0.0, barrier: 200.0, valid: [50, 200]}, {at_300K: 1.0e-12, barrier: 200.0, valid: [200, 2500]}], below: hold, standing: measured, source: t}
capture:
  - {change: H2+ + H2O -> H3+ + OH, langevin: 1.0e-10, x_300K: 5.41, valid: [10, 1000], below: extend, standing: estimated, source: s}
falloff:
  - {change: H + CO -> HCO, low: {at_300K: 1.4e-34, barrier: 100.0}, high: {at_300K: 2.0e-10, barrier: 1370.0}, centre: 0.6, valid: [100, 1000], below: zero, standing: evaluated, source: s}
three_body:
  - {change: H + H + H -> H2 + H, at_300K: 8.8e-33, valid: [50, 5000], below: extend, standing: recalled, source: s}
third_body:
  - {change: HCO -> H + CO, at_300K: 6.0e-11, barrier: 7721.0, valid: [300, 2500], below: extend, standing: evaluated, source: s}
light:
  - {change: CO -> C + O, rate: 2.4e-10, extinction: 3.88, shield: CO, standing: evaluated, source: s}
  - {change: H2O -> OH + H, rate: 6.33e-10, extinction: 2.65, spectra: {black_body_4000K: 1.0e-10}, standing: evaluated, source: s}
cosmic:
  - {change: H2 -> H2+ + e-, direct: 0.923, standing: evaluated, source: s}
  - {change: H2O -> OH + H, secondary: 971.0, within: 2.0, standing: recalled, source: t}
ices:
  - {species: H, energy: 650.0, prefactor: 4.0e12, photodesorption: [{products: H, yield: 1.0e-3, source: s}], standing: recalled, source: s}
  - {species: CO, energy: 1390.0, prefactor: 9.1e14, pure: {energy: 930.0, prefactor: 6.1e13, source: t}, hop_energy: 1300.0, photodesorption: [{products: CO, yield: 2.7e-3, source: s}], within: 1.1, standing: recalled, source: s}
  - {species: HCO, energy: 2400.0, prefactor: 1.0e13, hop_barrier: 900.0, photodesorption: [], standing: estimated, source: s}
  - {species: H2O, energy: 5705.0, prefactor: 5.0e15, photodesorption: [{products: H2O, yield: 5.0e-4, source: s}, {products: OH + H, yield: 5.0e-4, source: t}], standing: recalled, source: s}
surface:
  - {change: H(ads) + CO(ads) -> HCO(ads), barrier: 2500.0, width: 1.5, share: 0.8, standing: recalled, source: s}
  - {change: H(ads) + H(ads) -> H2, leaves: 0.5, standing: recalled, source: s}
  - {change: H(ads) + HCO(ads) -> CO(ads) + H2, share: 0.6, leaves: 0.25, tunnelling_mass: 1.008, standing: recalled, source: s}
dust:
  hydrogen_formation: {at_100K: 3.0e-17, slope: 0.5, source: s}
  ion_sticking: 0.9
  neutralisation:
    - {ion: HCO+, becomes: CO + H, share: 1.0, source: s}
    - {ion: H3+, becomes: H2 + H, share: 0.4, source: s}
    - {ion: H3+, becomes: H + H + H, share: 0.6, source: s}
"#;

fn small() -> Network {
    read(Path::new("small.yaml"), SMALL).unwrap()
}

fn expanded(options: &GrainOptions) -> Chemistry {
    expand(&small(), options).unwrap()
}

/// The small network with one text replaced, and the line where the replacement stands.
fn altered(from: &str, to: &str) -> (String, usize) {
    assert_eq!(
        SMALL.matches(from).count(),
        1,
        "`{from}` must mark one place"
    );
    let place = SMALL.find(from).unwrap();
    (
        SMALL.replacen(from, to, 1),
        SMALL[..place].matches('\n').count() + 1,
    )
}
