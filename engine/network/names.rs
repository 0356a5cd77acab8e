//! Owns how species and changes are written: `HCO+`, `l-C3H2`, `CO(ads)`, `dust--`, `e-`, and
//! `A + B -> C + D`.
//!
//! It never knows which species a network has.

use super::model::{Phase, Species};
use crate::units::ELECTRON_MASS_AMU;

/// Elements a formula may contain, with abridged standard atomic weights (IUPAC 2021, Prohaska
/// et al. 2022, Pure Appl. Chem. 94, 573); D is the atomic mass of deuterium (AME2020).
const ELEMENTS: [(&str, f64); 20] = [
    ("H", 1.008),
    ("D", 2.0141),
    ("He", 4.0026),
    ("C", 12.011),
    ("N", 14.007),
    ("O", 15.999),
    ("F", 18.998),
    ("Na", 22.990),
    ("Mg", 24.305),
    ("Al", 26.982),
    ("Si", 28.085),
    ("P", 30.974),
    ("S", 32.06),
    ("Cl", 35.45),
    ("Ar", 39.95),
    ("K", 39.098),
    ("Ca", 40.078),
    ("Ti", 47.867),
    ("Fe", 55.845),
    ("Ni", 58.693),
];

/// Highest count of one element in a formula.
const MOST_ATOMS: u32 = 999;

/// Ending of an adsorbed species.
const ADSORBED: &str = "(ads)";

/// Why a text is not a name or a change.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct NameError {
    pub found: String,
    pub expected: String,
}

impl NameError {
    fn new(found: impl Into<String>, expected: impl Into<String>) -> Self {
        NameError {
            found: found.into(),
            expected: expected.into(),
        }
    }
}

/// Of `names` those that differ from `wanted` by case, by the place they are in, or that contain
/// it; at most five. For whoever mistyped a name.
pub fn alike<'a>(names: impl Iterator<Item = &'a str>, wanted: &str) -> Vec<&'a str> {
    let bare = |s: &str| s.trim_end_matches(ADSORBED).to_lowercase();
    let wanted = bare(wanted);
    let (mut same, other): (Vec<&str>, Vec<&str>) = names.partition(|s| bare(s) == wanted);
    if wanted.len() > 1 {
        same.extend(other.into_iter().filter(|s| bare(s).contains(&wanted)));
    }
    same.truncate(5);
    same
}

/// Standard atomic weight of an element symbol, amu.
pub fn atomic_weight(symbol: &str) -> Option<f64> {
    ELEMENTS
        .iter()
        .find(|(known, _)| *known == symbol)
        .map(|(_, weight)| *weight)
}

/// Name of dust in a charge state: `dust`, `dust+`, `dust--`.
pub fn dust_name(charge: i32) -> String {
    let sign = if charge < 0 { "-" } else { "+" };
    format!("dust{}", sign.repeat(charge.unsigned_abs() as usize))
}

/// Name of the adsorbed form of a gas species.
pub fn adsorbed_name(gas: &str) -> String {
    format!("{gas}{ADSORBED}")
}

/// Name of the gas form of an adsorbed species.
pub fn gas_name(adsorbed: &str) -> Option<&str> {
    adsorbed.strip_suffix(ADSORBED)
}

/// Reads a species name.
pub fn species(name: &str) -> Result<Species, NameError> {
    if name == "e-" {
        return Ok(Species {
            name: name.to_string(),
            phase: Phase::Gas,
            charge: -1,
            mass: ELECTRON_MASS_AMU,
            atoms: Vec::new(),
        });
    }
    let (neutral, phase) = match gas_name(name) {
        Some(gas) => (gas, Phase::Ice),
        None => (name, Phase::Gas),
    };
    let (body, charge) = split_charge(neutral)?;
    if body == "dust" {
        if phase == Phase::Ice {
            return Err(NameError::new(
                format!("`{name}`"),
                "`dust` without `(ads)`",
            ));
        }
        let atoms = vec![("dust".to_string(), 1)];
        return Ok(Species {
            name: name.to_string(),
            phase: Phase::Dust,
            charge,
            mass: 0.0,
            atoms,
        });
    }
    if phase == Phase::Ice && charge != 0 {
        return Err(NameError::new(
            format!("`{name}`, a charged ice"),
            "a neutral adsorbed species",
        ));
    }
    let atoms = atoms(name, without_prefix(body))?;
    let mass = atoms
        .iter()
        .map(|(e, n)| atomic_weight(e).unwrap_or(0.0) * f64::from(*n))
        .sum();
    Ok(Species {
        name: name.to_string(),
        phase,
        charge,
        mass,
        atoms,
    })
}

/// Splits `HCO+` into `HCO` and +1.
fn split_charge(text: &str) -> Result<(&str, i32), NameError> {
    let body = text.trim_end_matches(['+', '-']);
    let signs = &text[body.len()..];
    let charge = match (signs.contains('+'), signs.contains('-')) {
        (true, true) => {
            return Err(NameError::new(
                format!("`{text}`, both signs"),
                "`+` or `-`, repeated",
            ));
        }
        (_, negative) => signs.len() as i32 * if negative { -1 } else { 1 },
    };
    Ok((body, charge))
}

/// Drops an isomer or state prefix: `l-C3H2` is `C3H2`.
fn without_prefix(body: &str) -> &str {
    match body.split_once('-') {
        Some((prefix, rest))
            if prefix.starts_with(|c: char| c.is_ascii_lowercase())
                && prefix
                    .chars()
                    .all(|c| c.is_ascii_lowercase() || c.is_ascii_digit()) =>
        {
            rest
        }
        _ => body,
    }
}

/// Atoms of a formula, elements in order of first appearance.
fn atoms(name: &str, formula: &str) -> Result<Vec<(String, u32)>, NameError> {
    let example = "a formula such as `HCO+`, `l-C3H2`, `CO(ads)`, `e-`";
    if formula.is_empty() {
        return Err(NameError::new(format!("`{name}`"), example));
    }
    let mut atoms: Vec<(String, u32)> = Vec::new();
    let mut rest = formula;
    while !rest.is_empty() {
        let small = rest
            .chars()
            .skip(1)
            .take_while(char::is_ascii_lowercase)
            .count();
        if !rest.starts_with(|c: char| c.is_ascii_uppercase()) {
            let here: String = rest.chars().take(6).collect();
            return Err(NameError::new(
                format!("`{name}`, unreadable at `{here}`"),
                example,
            ));
        }
        let (symbol, after) = rest.split_at(1 + small);
        if atomic_weight(symbol).is_none() {
            let known = ELEMENTS.map(|(e, _)| e).join(" ");
            let found = format!("`{name}`, with an unknown element `{symbol}`");
            return Err(NameError::new(found, format!("elements {known}")));
        }
        let digits = after.chars().take_while(char::is_ascii_digit).count();
        let (count, after) = after.split_at(digits);
        let number = if count.is_empty() {
            Some(1)
        } else {
            count.parse().ok()
        };
        // `H1` and `H02` are refused so that every species has one spelling.
        let well_written = count.is_empty() || !(count == "1" || count.starts_with('0'));
        let Some(number) = number.filter(|n| well_written && *n <= MOST_ATOMS) else {
            let found = format!("`{name}`, with the count `{count}` of {symbol}");
            return Err(NameError::new(
                found,
                "counts from 2 to 999 without leading zeros",
            ));
        };
        match atoms.iter_mut().find(|(known, _)| known == symbol) {
            Some((_, total)) => *total += number,
            None => atoms.push((symbol.to_string(), number)),
        }
        rest = after;
    }
    Ok(atoms)
}

/// A change as written: names on both sides of the arrow.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Change {
    pub reactants: Vec<String>,
    pub products: Vec<String>,
}

/// Reads `A + B -> C + D`. Spaces are needed around `+` and `->`, because `+` is also a charge.
pub fn change(text: &str) -> Result<Change, NameError> {
    let Some((left, right)) = text.split_once(" -> ") else {
        return Err(NameError::new(
            format!("`{text}`"),
            "`A + B -> C + D` with spaces around `->`",
        ));
    };
    if right.contains("->") || left.contains("->") {
        return Err(NameError::new("more than one `->`", "`A + B -> C + D`"));
    }
    Ok(Change {
        reactants: side(left)?,
        products: side(right)?,
    })
}

/// Reads one side of a change: `OH + H`.
pub fn side(text: &str) -> Result<Vec<String>, NameError> {
    let names: Vec<String> = text
        .split(" + ")
        .map(|name| name.trim().to_string())
        .collect();
    match names
        .iter()
        .find(|name| name.is_empty() || name.contains(char::is_whitespace))
    {
        None => Ok(names),
        Some(name) if name.is_empty() => Err(NameError::new(
            format!("an empty place in `{text}`"),
            "a species on both sides of ` + `",
        )),
        Some(name) => Err(NameError::new(
            format!("`{name}` in place of one name"),
            "names separated by ` + ` with a space on both sides",
        )),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn count(name: &str, element: &str) -> u32 {
        let species = species(name).unwrap();
        species
            .atoms
            .iter()
            .find(|(e, _)| e == element)
            .map_or(0, |(_, n)| *n)
    }

    // A wrong mass or composition would shift rates and break conservation everywhere.
    #[test]
    fn names_give_atoms_charge_phase_and_mass() {
        // Masses summed by hand from the atomic weights.
        for (name, charge, phase, mass) in [
            ("H2O", 0, Phase::Gas, 18.015),
            ("CH3OH", 0, Phase::Gas, 32.042),
            ("H3+", 1, Phase::Gas, 3.024),
            ("C2++", 2, Phase::Gas, 24.022),
            ("OH-", -1, Phase::Gas, 17.007),
            ("l-C3H2", 0, Phase::Gas, 38.049),
            ("c-C3H3+", 1, Phase::Gas, 39.057),
            ("CO(ads)", 0, Phase::Ice, 28.010),
            ("o-H2(ads)", 0, Phase::Ice, 2.016),
            ("SiC2", 0, Phase::Gas, 52.107),
            ("NaCl", 0, Phase::Gas, 58.44),
            ("HDO", 0, Phase::Gas, 19.0211),
            ("e-", -1, Phase::Gas, 5.48579909065e-4),
            ("dust", 0, Phase::Dust, 0.0),
            ("dust--", -2, Phase::Dust, 0.0),
        ] {
            let species = species(name).unwrap();
            assert_eq!((species.charge, species.phase), (charge, phase), "{name}");
            assert!(
                (species.mass - mass).abs() < 1e-9,
                "{name}: {}",
                species.mass
            );
        }
        assert_eq!(count("CH3OH", "H"), 4);
        assert_eq!(count("CH3OH", "C"), 1);
        assert_eq!(count("Cl", "C"), 0);
        assert_eq!(count("HNCO", "N"), 1);
        assert_eq!(count("C10H22", "C"), 10);
        assert_eq!(count("dust-", "dust"), 1);
        assert!(species("e-").unwrap().atoms.is_empty());
    }

    // Names that look right must not slip through as another species.
    #[test]
    fn bad_names_say_what_is_wrong() {
        for (name, found) in [
            ("", "``"),
            ("+", "`+`"),
            ("h2o", "unreadable"),
            ("Co", "element `Co`"),
            ("XeF2", "element `Xe`"),
            ("M", "element `M`"),
            ("H02", "count `02`"),
            ("CO1", "count `1`"),
            ("H99999999999", "count"),
            ("H2O(s)", "unreadable at `(s)`"),
            ("CO+(ads)", "charged ice"),
            ("CO(ads)+", "unreadable"),
            ("H+-", "both signs"),
            ("dust(ads)", "dust(ads)"),
            ("(CH3)2", "unreadable"),
            ("CO–", "unreadable"),
        ] {
            let error = species(name).expect_err(name);
            assert!(error.found.contains(found), "{name}: {error:?}");
        }
    }

    // The plus of a charge must not be taken for the plus between reactants.
    #[test]
    fn changes_split_at_spaced_signs_only() {
        let change_of = |text| change(text).unwrap();
        let ion = change_of("H3+ + CO -> HCO+ + H2");
        assert_eq!(ion.reactants, ["H3+", "CO"]);
        assert_eq!(ion.products, ["HCO+", "H2"]);
        assert_eq!(change_of("H2 -> H+ + H + e-").products, ["H+", "H", "e-"]);
        assert_eq!(change_of("H- + H -> H2 + e-").reactants, ["H-", "H"]);
        // Without spaces it stays one name, which is then no species.
        assert!(species(&change_of("H+H -> H2").reactants[0]).is_err());
        for (text, found) in [
            ("H + H", "`H + H`"),
            ("H +H -> H2", "one name"),
            ("H + -> H2", "one name"),
            ("H +  + H -> H2", "empty"),
            ("H ->H2", "`H ->H2`"),
            ("A -> B -> C", "more than one"),
            ("H + H => H2", "`H + H => H2`"),
            (" -> H", "empty"),
        ] {
            assert!(
                change(text).expect_err(text).found.contains(found),
                "{text}: {:?}",
                change(text)
            );
        }
    }

    #[test]
    fn generated_names_read_back() {
        for charge in -2..=2 {
            assert_eq!(species(&dust_name(charge)).unwrap().charge, charge);
        }
        assert_eq!(gas_name(&adsorbed_name("H2O")), Some("H2O"));
    }
}
