//! Owns the evaluation of all coefficients of a network in one cell, in units of the state
//! (abundances per hydrogen nucleus, s^-1), and the count of uses outside a law's range.

use super::reverse::Reverse;
use super::two_body::{self, Place, power_law};
use super::{dust, ice, light, shielding, surface};
use crate::disk::conditions::{Conditions, FieldKind, Light};
use crate::kinetics::{Coefficients, Falloff};
use crate::network::equilibrium::{Reach, log_constant};
use crate::network::model::{Cause, Chemistry, Range};

/// What the counts of [`Cautions`] mean, in their order.
pub const CAUTIONS: [&str; 6] = [
    "coefficients used below their temperature range",
    "coefficients held above their temperature range",
    "photo rates without a value for a field's spectrum (Draine rate used)",
    "shielding columns beyond the table (edge value used)",
    "cosmic-ray desorption rated for 0.1 um grains used for grains of another radius",
    "secondary UV scaled by more than 10 for sparse dust (absorption by gas left out)",
];

/// The secondary UV field scales inversely with the dust as long as dust absorbs it.
const SECONDARY_SCALE_KNOWN: f64 = 10.0;

/// How often a law was used outside what it is known for, per [`CAUTIONS`].
pub type Cautions = [u32; 6];

/// What all cells of a case share besides the network.
#[derive(Debug, Clone, PartialEq)]
pub struct Setting {
    /// Turbulent width of lines, cm s^-1.
    pub turbulence: f64,
    /// `[M]/n_H` given outright, or None to take it from the abundances.
    pub colliders: Option<f64>,
}

/// The numbers of one cell.
#[derive(Debug, Clone, PartialEq)]
pub struct CellRates {
    pub coefficients: Coefficients,
    pub cautions: Cautions,
}

/// All coefficients of `chemistry` under `conditions`; `fields` and the order of columns belong to
/// the same disk. Units and laws: networks/README.md and the functions of this folder.
pub fn cell_rates(
    chemistry: &Chemistry,
    fields: &[FieldKind],
    conditions: &Conditions,
    setting: &Setting,
) -> CellRates {
    let mut cell = Cell::new(chemistry, fields, conditions, setting);
    let mut falloff = Vec::new();
    let mut k = Vec::with_capacity(chemistry.reactions.len());
    for reaction in &chemistry.reactions {
        k.push(cell.coefficient(&reaction.cause, reaction.reactants.len(), &mut falloff));
    }
    CellRates {
        coefficients: Coefficients {
            k,
            falloff,
            sites: conditions.sites(chemistry.options.site_density),
            fixed_colliders: setting.colliders,
        },
        cautions: cell.cautions,
    }
}

/// The conditions of a cell with what several laws need, worked out once.
struct Cell<'a> {
    chemistry: &'a Chemistry,
    conditions: &'a Conditions,
    fields: &'a [FieldKind],
    /// Place of each field's spectrum in the network.
    spectra: Vec<Option<usize>>,
    /// Shielding factor by law and field.
    shields: Vec<Vec<f64>>,
    flux_on_ice: f64,
    /// Rate per H at which H2 forms, s^-1; 0 if the network has no such reaction.
    hydrogen_formation: f64,
    cautions: Cautions,
}

impl<'a> Cell<'a> {
    fn new(
        chemistry: &'a Chemistry,
        fields: &'a [FieldKind],
        conditions: &'a Conditions,
        setting: &Setting,
    ) -> Self {
        let mut cautions = Cautions::default();
        let width = shielding::h2_doppler_width(conditions.t_gas, setting.turbulence);
        let shields = chemistry
            .shielding
            .iter()
            .map(|law| {
                let of_field = |l: &Light| {
                    let (factor, outside) = shielding::factor(law, &l.columns, &l.shields, width);
                    cautions[3] += u32::from(outside);
                    factor
                };
                conditions.light.iter().map(of_field).collect()
            })
            .collect();
        let hydrogen_formation = chemistry.reactions.iter().find_map(|r| match r.cause {
            Cause::HydrogenFormation { at_100k, slope } => Some(dust::hydrogen_formation(
                at_100k,
                slope,
                conditions.t_gas,
                conditions.dust_area,
                conditions.n_h,
            )),
            _ => None,
        });
        Cell {
            chemistry,
            conditions,
            fields,
            spectra: fields
                .iter()
                .map(|f| chemistry.spectra.iter().position(|s| *s == f.spectrum))
                .collect(),
            shields,
            flux_on_ice: light::flux_on_ice(
                fields,
                &conditions.light,
                conditions.zeta_cosmic + conditions.zeta_xray,
                conditions.dust_area,
            ),
            hydrogen_formation: hydrogen_formation.unwrap_or(0.0),
            cautions,
        }
    }

    fn count(&mut self, place: Place) {
        match place {
            Place::Inside => {}
            Place::Below => self.cautions[0] += 1,
            Place::Above => self.cautions[1] += 1,
        }
    }

    /// Evaluates `law` at the temperature that its range allows; 0 where it does not happen.
    fn ranged(&mut self, range: Range, law: impl Fn(f64) -> f64) -> f64 {
        let (at, place) = two_body::evaluation_temperature(range, self.conditions.t_gas);
        self.count(place);
        at.map_or(0.0, law)
    }

    /// The coefficient of a cause in units of the state; falloff limits go to `falloff`.
    fn coefficient(&mut self, cause: &Cause, order: usize, falloff: &mut Vec<Falloff>) -> f64 {
        let c = self.conditions;
        let n_h = c.n_h;
        let options = &self.chemistry.options;
        match cause {
            Cause::PowerLaw { pieces, below } => {
                let (k, place) = two_body::pieces(pieces, *below, c.t_gas);
                self.count(place);
                k * n_h.powi(order as i32 - 1)
            }
            Cause::ThirdBody { pieces, below } => {
                let (k, place) = two_body::pieces(pieces, *below, c.t_gas);
                self.count(place);
                k * n_h
            }
            Cause::Capture {
                langevin,
                x_300k,
                range,
            } => n_h * self.ranged(*range, |t| two_body::capture(*langevin, *x_300k, t)),
            Cause::Falloff {
                low,
                high,
                centre,
                range,
            } => {
                let limit = |[a, b, barrier]: [f64; 3]| move |t| power_law(a, b, barrier, t);
                let low = self.ranged(*range, limit(*low));
                let (at, _) = two_body::evaluation_temperature(*range, c.t_gas);
                let high = at.map_or(0.0, limit(*high));
                falloff.push(Falloff {
                    low: low * n_h * n_h,
                    high: high * n_h,
                    log_centre: centre.log10(),
                });
                1.0
            }
            Cause::Reverse {
                forward,
                gained,
                polynomials,
            } => {
                let (log_constant, reach) = log_constant(polynomials, *gained, c.t_gas);
                self.count(match reach {
                    Reach::Inside => Place::Inside,
                    Reach::Below => Place::Below,
                    Reach::Above => Place::Above,
                });
                let reverse = Reverse {
                    log_constant,
                    order,
                    t: c.t_gas,
                    n_h,
                };
                reverse.coefficient(forward, falloff)
            }
            Cause::Light {
                rates,
                extinction,
                shield,
            } => self.light(rates, *extinction, *shield),
            Cause::Ionisation { value } => value * (c.zeta_cosmic + c.zeta_xray + c.zeta_nuclides),
            Cause::SecondaryLight { value } => {
                self.cautions[5] +=
                    u32::from(light::secondary_dust_scale(c.dust_area) > SECONDARY_SCALE_KNOWN);
                value * (c.zeta_cosmic + c.zeta_xray) * light::secondary_dust_scale(c.dust_area)
            }
            Cause::HydrogenFormation { .. } => self.hydrogen_formation,
            Cause::Charging {
                sticking,
                charge,
                mass,
                grain,
                share,
            } => {
                let a = c.grain_radius;
                share * n_h * dust::charging(*sticking, *charge, *mass, *grain, a, c.t_gas)
            }
            Cause::Accretion { mass, hydrogen } => {
                let all = |s| dust::accretion(s, *mass, c.dust_area, n_h, c.t_gas);
                if *hydrogen {
                    // H that leaves as H2 by the formation formula is not accreted too.
                    let sticking = dust::hydrogen_sticking(c.t_gas, c.t_dust);
                    (all(sticking) - 2.0 * self.hydrogen_formation).max(0.0)
                } else {
                    all(1.0)
                }
            }
            Cause::ThermalDesorption { binding } => ice::thermal_desorption(binding, c.t_dust),
            Cause::CosmicDesorption { binding } => {
                let known = ice::COSMIC_HEATING_RADIUS;
                self.cautions[4] += u32::from((c.grain_radius / known - 1.0).abs() > 0.01);
                ice::cosmic_desorption(binding, c.zeta_cosmic)
            }
            Cause::Photodesorption { yields } => ice::photodesorption(
                self.flux_on_ice,
                *yields,
                options.site_density,
                options.lit_layers,
            ),
            Cause::Surface {
                first,
                second,
                same,
                share,
                own,
                barriers,
            } => {
                let (density, t) = (options.site_density, c.t_dust);
                let pair = [first, second];
                share
                    * surface::reaction_probability(pair, *own, barriers, density, t)
                    * surface::encounter(pair, *same, c.sites(density), density, t)
            }
        }
    }

    /// Sum over the fields of strength, rate in the field's spectrum, shielding and attenuation.
    fn light(&mut self, rates: &[Option<f64>], extinction: f64, shield: Option<usize>) -> f64 {
        let mut total = 0.0;
        for (f, (kind, light)) in self.fields.iter().zip(&self.conditions.light).enumerate() {
            let own = self.spectra[f].and_then(|s| rates[s]);
            if own.is_none() {
                self.cautions[2] += 1;
            }
            // The first spectrum is the Draine field, for which every photo line has a rate.
            let rate = own.or(rates[0]).unwrap_or(0.0);
            let shielded = shield.map_or(1.0, |law| self.shields[law][f]);
            total += light.strength * rate * shielded * light::attenuation(kind, light, extinction);
        }
        total
    }
}
