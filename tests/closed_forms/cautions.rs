//! The counts of uses outside what a law is known for: a user who is not warned believes them.

use super::*;
use frostclock::rates::CAUTIONS;

const DOUBTFUL: &str = "
spectra: {lamp: a lamp}
species: [{name: H}, {name: H2}, {name: CO}, {name: C}, {name: O}, {name: OH}]
shielding:
  - {name: CO, law: table, column: CO, log_column: [0, 15], log_h2: [0, 21], factor: [[1.0, 0.2], [0.3, 0.08]], source: s}
gas:
  - {change: H + OH -> O + H2, at_300K: 1.0e-12, valid: [300, 800], below: extend, standing: recalled, source: s}
  - {change: O + H2 -> OH + H, at_300K: 1.0e-12, valid: [200, 800], below: zero, standing: recalled, source: s}
  - {change: C + O -> CO, at_300K: 1.0e-17, valid: [10, 50], below: extend, standing: recalled, source: s}
  - {change: C + OH -> CO + H, at_300K: 1.0e-12, valid: [10, 300], below: extend, standing: recalled, source: s}
light:
  - {change: CO -> C + O, rate: 2.6e-10, extinction: 3.9, shield: CO, standing: recalled, source: s}
  - {change: OH -> O + H, rate: 3.8e-10, extinction: 2.7, spectra: {lamp: 1.0e-10}, standing: recalled, source: s}
cosmic:
  - {change: OH -> O + H, secondary: 509.0, standing: recalled, source: s}
ices:
  - {species: CO, energy: 1300.0, prefactor: 1.0e12, photodesorption: [{products: CO, yield: 1.0e-3, source: s}], standing: recalled, source: s}
";

/// Fails if a caution is left out, counted under another's name, or given without reason: at 100 K
/// two laws are below and one above their range, one photo rate lacks the lamp, one column of CO
/// lies beyond the table, and grown sparse dust is none the other laws were made for.
#[test]
fn every_use_outside_a_range_is_counted_under_its_name() {
    let setup = Setup::new(DOUBTFUL, &GrainOptions::default());
    let light = |column: f64| Light {
        strength: 1.0,
        extinction: 1.0,
        columns: vec![1e20, column],
        shields: vec![None, None],
    };
    let setting = Setting {
        turbulence: 2e4,
        colliders: None,
    };
    let counts = |place: &Conditions, spectrum: &str| {
        let mut fields = sky(place);
        for field in &mut fields {
            field.spectrum = spectrum.into();
        }
        cell_rates(&setup.chemistry, &fields, place, &setting).cautions
    };
    let plain = Conditions {
        light: vec![light(1e14)],
        ..dark(1e6, 40.0)
    };
    let doubtful = Conditions {
        light: vec![light(1e17)],
        dust_area: 0.05 * REFERENCE_DUST_AREA,
        grain_radius: 1e-4,
        ..dark(1e6, 100.0)
    };
    // At 40 K the two laws above still lie below their ranges; nothing else is doubtful.
    assert_eq!(counts(&plain, "draine"), [2, 0, 0, 0, 0, 0], "{CAUTIONS:?}");
    assert_eq!(
        counts(&doubtful, "lamp"),
        [2, 1, 1, 1, 1, 1],
        "{CAUTIONS:?}"
    );
}
