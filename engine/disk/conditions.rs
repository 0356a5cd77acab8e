//! Owns a cell and its conditions: the full set every cell carries, whatever it was read from.
//!
//! It never reads files and never computes chemistry.

/// Projected dust cross-section per hydrogen nucleus of the reference grains, cm^2
/// (0.1 um, 3 g cm^-3, dust/gas 0.01 by mass, 1.4 m_H per H).
pub const REFERENCE_DUST_AREA: f64 = 5.8575e-22;

/// What all cells of a disk share about one radiation field.
#[derive(Debug, Clone, PartialEq)]
pub struct FieldKind {
    /// Name as in the table's columns (`sky`, `star`, ...).
    pub name: String,
    /// Spectrum of the network (`draine`, `black_body_4000K`, ...).
    pub spectrum: String,
    /// Whether the strength already includes extinction (then no exp(-gamma A_V)).
    pub attenuated: bool,
}

/// One radiation field as one cell sees it.
#[derive(Debug, Clone, PartialEq)]
pub struct Light {
    /// Strength before extinction (after it, if the kind is `attenuated`), Draine units.
    pub strength: f64,
    /// Visual extinction towards the source, mag.
    pub extinction: f64,
    /// Columns towards the source, cm^-2, one per species of [`Disk::column_species`].
    pub columns: Vec<f64>,
    /// Shielding factors given outright instead of columns, one per `column_species`.
    pub shields: Vec<Option<f64>>,
}

/// The conditions of one cell.
#[derive(Debug, Clone, PartialEq)]
pub struct Conditions {
    /// Cylindrical radius, au.
    pub radius: f64,
    /// Height above the midplane, au.
    pub height: f64,
    /// Hydrogen nuclei, cm^-3.
    pub n_h: f64,
    /// Gas temperature, K.
    pub t_gas: f64,
    /// Dust temperature, K.
    pub t_dust: f64,
    /// One per [`Disk::fields`].
    pub light: Vec<Light>,
    /// Ionisation rates per H2, s^-1.
    pub zeta_cosmic: f64,
    pub zeta_xray: f64,
    pub zeta_nuclides: f64,
    /// Projected dust cross-section per hydrogen nucleus, cm^2.
    pub dust_area: f64,
    /// Grain radius, cm.
    pub grain_radius: f64,
}

impl Conditions {
    /// Dust grains per hydrogen nucleus, n_d/n_H = dust_area / (pi a^2).
    pub fn dust_abundance(&self) -> f64 {
        self.dust_area / (std::f64::consts::PI * self.grain_radius * self.grain_radius)
    }

    /// Adsorption sites per hydrogen nucleus at `site_density` (cm^-2): the grain surface
    /// 4 pi a^2 is four times its projected cross-section.
    pub fn sites(&self, site_density: f64) -> f64 {
        4.0 * self.dust_area * site_density
    }
}

/// All cells of a disk.
#[derive(Debug, Clone, PartialEq)]
pub struct Disk {
    pub fields: Vec<FieldKind>,
    /// The species whose columns shield, in the order of [`Light::columns`].
    pub column_species: Vec<String>,
    pub cells: Vec<Conditions>,
}
