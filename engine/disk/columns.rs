//! Owns the shielding columns of a disk by species: the assumed mean abundances that stand in
//! for columns nobody gave, and the match with the species a network shields by.
//!
//! It never computes a shielding factor: `rates` does.

use super::conditions::{Disk, REFERENCE_DUST_AREA};
use crate::errors::InputError;
use crate::units::COLUMN_PER_MAGNITUDE;
use std::path::Path;

/// Mean abundances N(X)/N_H towards the light where no column is given.
///
/// H2: all hydrogen molecular. CO: two fifths of a carbon abundance of 1.2e-4. N2: a quarter of a
/// nitrogen abundance of 7.6e-5. C: a twelfth of the carbon, about what a surface layer holds. Own
/// choices; they err on the side of too much shielding above the layer where each begins.
pub const ASSUMED: [(&str, f64); 4] = [("H2", 0.5), ("CO", 5.0e-5), ("N2", 1.0e-5), ("C", 1.0e-5)];

/// [`ASSUMED`] with the values a case gives in its place or adds (in the order given).
pub fn assumed_with(given: &[(String, f64)]) -> Vec<(String, f64)> {
    let mut all: Vec<(String, f64)> = ASSUMED
        .iter()
        .map(|(name, value)| (name.to_string(), *value))
        .collect();
    for (name, value) in given {
        match all.iter_mut().find(|(known, _)| known == name) {
            Some(entry) => entry.1 = *value,
            None => all.push((name.clone(), *value)),
        }
    }
    all
}

/// Hydrogen column (cm^-2) behind `extinction` magnitudes of dust with projected cross-section
/// `dust_area` (cm^2 per H): the Bohlin, Savage & Drake 1978 ratio holds for the reference dust
/// and scales inversely with the area.
pub fn hydrogen_column(extinction: f64, dust_area: f64) -> f64 {
    COLUMN_PER_MAGNITUDE * extinction * (REFERENCE_DUST_AREA / dust_area)
}

/// Inverse of [`hydrogen_column`]: visual magnitudes of a hydrogen column (cm^-2).
pub fn extinction(hydrogen_column: f64, dust_area: f64) -> f64 {
    hydrogen_column / COLUMN_PER_MAGNITUDE * (dust_area / REFERENCE_DUST_AREA)
}

impl Disk {
    /// The same disk with its columns in the order of `wanted`, the species by which a network
    /// shields; columns the network does not use are dropped.
    ///
    /// An error names a species the network needs and the disk lacks, or one that `case` asks
    /// for (a table column, an assumed column) and the network never uses: a typing error there
    /// would else go unnoticed.
    pub fn for_columns(&self, wanted: &[String], case: &Path) -> Result<Disk, InputError> {
        let has = |name: &String| self.column_species.iter().position(|known| known == name);
        let mut places = Vec::with_capacity(wanted.len());
        for name in wanted {
            let place = has(name).ok_or_else(|| {
                InputError::new(
                    case,
                    None,
                    "disk.assumed_columns",
                    format!("no column of {name}, by which the network shields"),
                    format!("a mean abundance of {name}, or its columns in the table"),
                )
            })?;
            places.push(place);
        }
        let usual = |name: &String| ASSUMED.iter().any(|(known, _)| known == name);
        if let Some(stray) = self
            .column_species
            .iter()
            .find(|name| !usual(name) && !wanted.contains(name))
        {
            return Err(InputError::new(
                case,
                None,
                "disk.assumed_columns",
                format!("{stray}, by which the network does not shield"),
                format!("only species among {}", wanted.join(", ")),
            ));
        }
        let mut disk = self.clone();
        disk.column_species = wanted.to_vec();
        for cell in &mut disk.cells {
            for light in &mut cell.light {
                light.columns = places.iter().map(|&p| light.columns[p]).collect();
                light.shields = places.iter().map(|&p| light.shields[p]).collect();
            }
        }
        Ok(disk)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::disk::{FieldKind, table};

    /// Wrong order here would shield CO by the column of H2.
    #[test]
    fn columns_follow_the_network() {
        let text = "radius [au],height [au],n_H [cm^-3],T_gas [K],zeta_cosmic [s^-1],UV_sky [Draine],\
                    AV_sky [mag],N_CO_sky [cm^-2]\n1,0,1e8,20,1e-17,1,2,1e15\n";
        let fields = vec![FieldKind {
            name: "sky".into(),
            spectrum: "draine".into(),
            attenuated: false,
        }];
        let path = Path::new("cells.csv");
        let (disk, _) = table::read(path, text, &fields, &assumed_with(&[])).unwrap();
        let wanted = ["CO".to_string(), "H2".to_string()];
        let disk = disk.for_columns(&wanted, path).unwrap();
        assert_eq!(disk.column_species, wanted);
        let light = &disk.cells[0].light[0];
        assert_eq!(light.columns[0], 1.0e15);
        // 2 mag of reference dust, half of the nuclei in H2 pairs.
        assert!((light.columns[1] / (0.5 * 3.74e21) - 1.0).abs() < 1e-12);
        let error = disk.for_columns(&["HD".to_string()], path).unwrap_err();
        assert!(error.found.contains("no column of HD"));
        // A case that asks for a column nobody uses has most likely mistyped one.
        let stray = assumed_with(&[("C0".to_string(), 1.0e-5)]);
        let (disk, _) = table::read(path, text, &fields, &stray).unwrap();
        let error = disk.for_columns(&wanted, path).unwrap_err();
        assert!(error.found.starts_with("C0"));
    }
}
