"""Coefficient of every reaction of a network in one cell, in state units.

Joins the lines of the network and the conditions of a cell to the laws in `rates`.
"""

from dataclasses import dataclass
from math import exp, log, log10

from . import names, rates, thermo


@dataclass
class Coefficient:
    value: float
    low: float | None = None  # falloff: k0 n_H^2 (per [M]/n_H) and kinf n_H
    high: float | None = None
    log_centre: float | None = None


def coefficients(case, network, cell):
    context = Context(case, network, cell)
    return [context.coefficient(reaction) for reaction in network.reactions]


def power_law(t, line):
    """A line with `pieces`, or with its coefficients on the line itself."""
    pieces = line.get("pieces") or [line]
    below = line.get("below", "extend")
    chosen = next((p for p in pieces if t <= p["valid"][1]), pieces[-1])
    at = rates.evaluation_temperature(t, *chosen["valid"], below)
    if at is None:
        return 0.0
    return rates.power_law(at, chosen["at_300K"], chosen.get("slope") or 0.0, chosen.get("barrier") or 0.0)


class Context:
    def __init__(self, case, network, cell):
        self.case, self.network, self.cell = case, network, cell
        self.grains = case.grains

    def coefficient(self, reaction):
        return getattr(self, "_" + reaction.kind)(reaction, reaction.line)

    # gas

    def _gas(self, reaction, line):
        return Coefficient(power_law(self.cell.t_gas, line) * self.cell.n_h)

    _third_body = _gas

    def _three_body(self, reaction, line):
        return Coefficient(power_law(self.cell.t_gas, line) * self.cell.n_h**2)

    def _capture(self, reaction, line):
        at = rates.evaluation_temperature(self.cell.t_gas, *line["valid"], line.get("below", "extend"))
        k = 0.0 if at is None else rates.capture(at, line["langevin"], line["x_300K"])
        return Coefficient(k * self.cell.n_h)

    def _falloff(self, reaction, line):
        at = rates.evaluation_temperature(self.cell.t_gas, *line["valid"], line.get("below", "extend"))
        if at is None:
            return Coefficient(0.0, 0.0, 0.0, log10(line["centre"]))
        low, high = (rates.power_law(at, p["at_300K"], p.get("slope") or 0.0, p.get("barrier") or 0.0)
                     for p in (line["low"], line["high"]))
        return Coefficient(1.0, low * self.cell.n_h**2, high * self.cell.n_h, log10(line["centre"]))

    def _reverse(self, reaction, line):
        """The forward coefficient over the equilibrium constant; every third body stays."""
        cell = self.cell
        log_constant = thermo.log_constant(self.network.thermo, reaction.products, reaction.consumed, cell.t_gas)
        densities = (len(reaction.consumed) - len(reaction.products)) * log(cell.n_h)

        def over_constant(k):
            return exp(min(log(k) - log_constant + densities, 690.0)) if k > 0.0 else 0.0

        forward = getattr(self, "_" + reaction.extra["forward"])(reaction, line)
        if forward.low is None:
            return Coefficient(over_constant(forward.value))
        return Coefficient(1.0, over_constant(forward.low), over_constant(forward.high), forward.log_centre)

    # light and particles

    def _light(self, reaction, line):
        total = 0.0
        for f in self.cell.fields:
            rate = line["rate"] if f.spectrum == "draine" else (line.get("spectra") or {}).get(f.spectrum, line["rate"])
            shield = self.shield(line["shield"], f) if line.get("shield") else 1.0
            total += f.strength * rate * shield * rates.dust_transmission(line["extinction"], f.a_v, f.attenuated)
        return Coefficient(total)

    def shield(self, name, f):
        line = self.network.shielding(name)
        if line["column"] in f.shields:
            return f.shields[line["column"]]
        try:
            column, h2 = f.columns[line["column"]], f.columns["H2"]
        except KeyError as missing:
            raise ValueError(f"no column of {missing} towards {f.name}: give N_X or assumed_columns") from None
        if line["law"] == "draine_bertoldi":
            return rates.h2_shielding(column, rates.doppler(self.cell.t_gas, self.case.turbulence))
        if line["law"] == "carbon":
            return rates.carbon_shielding(column, h2)
        return rates.table_shielding(column, h2, line["log_column"], line["log_h2"], line["factor"])

    def _cosmic(self, reaction, line):
        c = self.cell
        if line.get("direct") is not None:
            return Coefficient(rates.direct(line["direct"], c.zeta_cosmic, c.zeta_xray, c.zeta_nuclides))
        return Coefficient(rates.secondary(line["secondary"], c.zeta_cosmic, c.zeta_xray, c.dust_area))

    # dust

    def hydrogen_formation(self):
        """R n_H, s^-1."""
        line = (self.network.raw.get("dust") or {}).get("hydrogen_formation")
        if not line:
            return 0.0
        return rates.hydrogen_formation(self.cell.t_gas, line["at_100K"], line["slope"], self.cell.dust_area) * self.cell.n_h

    def _hydrogen_formation(self, reaction, line):
        return Coefficient(self.hydrogen_formation())

    def _charging(self, reaction, line):
        e = reaction.extra
        k = rates.charging(e["z"], names.charge(e["projectile"]), names.mass(e["projectile"]), e["sticking"],
                           self.cell.grain_radius, self.cell.t_gas)
        return Coefficient(e["share"] * k * self.cell.n_h)

    # ices

    def binding(self, line):
        chosen = line["pure"] if self.grains["binding"] == "pure" and line.get("pure") else line
        return chosen["energy"], chosen["prefactor"]

    def _accretion(self, reaction, line):
        c, species = self.cell, line["species"]
        sticking = rates.hydrogen_sticking(c.t_gas, c.t_dust) if species == "H" else 1.0
        k = rates.accretion(c.t_gas, names.mass(species), sticking, c.dust_area, c.n_h)
        if species == "H":  # what forms H2 is not accreted as well
            k = max(0.0, k - 2.0 * self.hydrogen_formation())
        return Coefficient(k)

    def _thermal_desorption(self, reaction, line):
        return Coefficient(rates.thermal_desorption(self.cell.t_dust, *self.binding(line)))

    def _cosmic_desorption(self, reaction, line):
        return Coefficient(rates.cosmic_desorption(*self.binding(line), self.cell.zeta_cosmic))

    def _photodesorption(self, reaction, line):
        c = self.cell
        flux = sum(rates.field_photon_flux(f.strength, f.a_v, f.attenuated) for f in c.fields)
        flux += rates.cosmic_photon_flux(c.zeta_cosmic, c.zeta_xray, c.dust_area)
        return Coefficient(rates.photodesorption(flux, line["yield"], self.grains["site_density"], self.grains["lit_layers"]))

    # surface

    def hop(self, adsorbed):
        """Attempt frequency and hopping rate, s^-1."""
        line = self.network.ice_line(adsorbed)
        energy = line.get("hop_energy") or line["energy"]
        kind = "atoms" if names.atom_count(adsorbed) == 1 else "molecules"
        barrier = line.get("hop_barrier")
        if barrier is None:
            barrier = self.grains["hop_ratio"][kind] * energy
        frequency = rates.oscillation_frequency(energy, names.mass(adsorbed), self.grains["site_density"])
        return frequency, rates.hopping(self.cell.t_dust, frequency, barrier)

    def _barriers(self, a, b):
        """The different barriers (height, width, mass) that channels of this pair cross."""
        found = set()
        for line in self.network.raw["surface"]:
            if sorted(names.parse_change(line["change"])[0]) == sorted((a, b)):
                weight = line.get("tunnelling_mass") or rates.reduced_mass(names.mass(a), names.mass(b))
                width = 1.0 if line.get("width") is None else line["width"]
                found.add((line.get("barrier", 0.0), width, weight))
        return found

    def _surface(self, reaction, line):
        a, b = reaction.consumed
        (freq_a, hop_a), (freq_b, hop_b) = self.hop(a), self.hop(b)
        kappa = 1.0
        barrier = line.get("barrier", 0.0)
        if barrier > 0.0:
            weight = line.get("tunnelling_mass") or rates.reduced_mass(names.mass(a), names.mass(b))
            width = 1.0 if line.get("width") is None else line["width"]

            def attempts(height, width, weight):
                return max(freq_a, freq_b) * rates.over_or_through(self.cell.t_dust, width, weight, height)

            own = attempts(barrier, width, weight)
            others = sum(attempts(*rival) for rival in self._barriers(a, b) - {(barrier, width, weight)})
            away = sum(rates.thermal_desorption(self.cell.t_dust, *self.binding(self.network.ice_line(s))) for s in (a, b))
            kappa = rates.reaction_probability(own, others + hop_a + hop_b + away)
        count = rates.sites(self.cell.dust_area, self.grains["site_density"])
        return Coefficient(reaction.extra["share"] * kappa * rates.meeting(hop_a, hop_b, a == b, count))
