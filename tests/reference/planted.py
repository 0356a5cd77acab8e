"""Errors planted on purpose, to show that the comparison finds them.

    python -m reference.planted CASE --rust FILE.csv

Each entry replaces one function while a `with planted(...)` block runs, or spoils the rows of a
coefficient table. Against the engine's own table every planting must make the comparison fail.
"""

import argparse
import contextlib
import copy
import csv
import sys
from math import e, exp, log, log10, pi, sqrt

from . import check, names, rates, system
from .cells import read_case
from .coefficients import Coefficient, Context

_original = {module: dict(vars(module)) for module in (rates, names, system, Context)}


def _was(module, name):
    return _original[module][name]


def _bilinear_in_the_factor(column, column_h2, log_columns, log_h2, factor):
    i, u = rates.axis_position(log_columns, rates.log_column(column))
    j, v = rates.axis_position(log_h2, rates.log_column(column_h2))
    return ((1 - u) * (1 - v) * factor[j][i] + u * (1 - v) * factor[j][i + 1]
            + (1 - u) * v * factor[j + 1][i] + u * v * factor[j + 1][i + 1])


def _h2_without_b(column, doppler):
    x = column / 5.0e14
    return 0.965 / (1.0 + x) ** 2 + 0.035 / sqrt(1.0 + x) * exp(-8.5e-4 * sqrt(1.0 + x))


def _capture_low_branch_only(t, langevin, x_300):
    x = x_300 * sqrt(300.0 / t)
    return langevin * ((x + 0.509) ** 2 / 10.526 + 0.9754)


def _capture_high_branch_only(t, langevin, x_300):
    return langevin * (0.4767 * x_300 * sqrt(300.0 / t) + 0.62)


def _frequency_without_root(energy, weight, site_density):
    return 2.0 * site_density * rates.BOLTZMANN * energy / (pi**2 * weight * rates.AMU)


def _proton_taken_off(name):
    mass = _was(names, "mass")(name)
    return mass - 1.008 if name.endswith("+") and name != "H+" else mass


def _accretion_of_all_hydrogen(self, reaction, line):
    c, species = self.cell, line["species"]
    sticking = rates.hydrogen_sticking(c.t_gas, c.t_dust) if species == "H" else 1.0
    return Coefficient(rates.accretion(c.t_gas, names.mass(species), sticking, c.dust_area, c.n_h))


# name: (module, function, what stands in its place)
IN_FUNCTIONS = {
    "sign of the exponent of a barrier": (rates, "power_law", lambda t, a, s, c: a * (t / 300.0) ** s * exp(min(c / t, 500.0))),
    "sign of the slope": (rates, "power_law", lambda t, a, s, c: a * (t / 300.0) ** -s * exp(-c / t)),
    "slope relative to 298 K": (rates, "power_law", lambda t, a, s, c: a * (t / 298.0) ** s * exp(-c / t)),
    "not held above its range": (rates, "evaluation_temperature", lambda t, low, high, below: t if t > high else _was(rates, "evaluation_temperature")(t, low, high, below)),
    "extended where it should be held or zero": (rates, "evaluation_temperature", lambda t, low, high, below: min(t, high)),
    "capture without the square root": (rates, "capture", lambda t, k, x: _was(rates, "capture")(t, k, x * sqrt(300.0 / t))),
    "capture by its lower branch": (rates, "capture", _capture_low_branch_only),
    "capture by its upper branch": (rates, "capture", _capture_high_branch_only),
    "reverse over the inverse of the constant": (rates, "log_equilibrium", lambda t, h, s, n: -_was(rates, "log_equilibrium")(t, h, s, n)),
    "standard pressure of one atmosphere": (rates, "log_equilibrium", lambda t, h, s, n: _was(rates, "log_equilibrium")(t, h, s, n) + n * log(1.01325)),
    "constant of pressures, not of densities": (rates, "log_equilibrium", lambda t, h, s, n: s - h / t),
    "entropy without its second constant": (rates, "entropy", lambda t, a, b: _was(rates, "entropy")(t, a, [b[0], 0.0])),
    "extinction in place of its exponential": (rates, "dust_transmission", lambda g, a, att: 1.0 if att else g * a),
    "an attenuated field attenuated again": (rates, "dust_transmission", lambda g, a, att: exp(-g * a)),
    "H2 lines without the line width": (rates, "h2_shielding", _h2_without_b),
    "turbulence in km/s": (rates, "doppler", lambda t, v: _was(rates, "doppler")(t, v / 1.0e5)),
    "shielding bilinear in the factor": (rates, "table_shielding", _bilinear_in_the_factor),
    "columns of a table exchanged": (rates, "table_shielding", lambda c, h, *rest: _was(rates, "table_shielding")(h, c, *rest)),
    "carbon shielding without H2": (rates, "carbon_shielding", lambda c, h: _was(rates, "carbon_shielding")(c, 0.0)),
    "nuclides left out": (rates, "direct", lambda v, c, x, n: v * (c + x)),
    "X-rays left out of the secondary light": (rates, "secondary", lambda v, c, x, a: _was(rates, "secondary")(v, c, 0.0, a)),
    "grown dust lowers the secondary light": (rates, "secondary", lambda v, c, x, a: v * (c + x) * a / rates.STANDARD_DUST_AREA),
    "a factor 2 in H2 formation": (rates, "hydrogen_formation", lambda *a: 2.0 * _was(rates, "hydrogen_formation")(*a)),
    "speed without the square root": (rates, "thermal_speed", lambda t, m: 8.0 * rates.BOLTZMANN * t / (pi * m * rates.AMU)),
    "root mean square speed": (rates, "thermal_speed", lambda t, m: sqrt(3.0 * rates.BOLTZMANN * t / (m * rates.AMU))),
    "ions lighter by a hydrogen": (names, "mass", _proton_taken_off),
    "attraction and repulsion exchanged": (rates, "coulomb_factor", lambda z, q, a, t: _was(rates, "coulomb_factor")(z, -q, a, t)),
    "grain radius in um": (rates, "coulomb_factor", lambda z, q, a, t: _was(rates, "coulomb_factor")(z, q, a * 1.0e4, t)),
    "hydrogen always sticks": (rates, "hydrogen_sticking", lambda g, d: 1.0),
    "hydrogen that forms H2 is accreted as well": (Context, "_accretion", _accretion_of_all_hydrogen),
    "cosmic desorption without the ionisation rate": (rates, "cosmic_desorption", lambda energy, nu, z: _was(rates, "cosmic_desorption")(energy, nu, 1.3e-17)),
    "photodesorption by the cross-section, not a quarter of the surface": (rates, "photodesorption", lambda *a: 4.0 * _was(rates, "photodesorption")(*a)),
    "photons of energetic particles without the dust": (rates, "cosmic_photon_flux", lambda c, x, a: 1.4e20 * (c + x)),
    "sites of the cross-section": (rates, "sites", lambda a, n: a * n),
    "hopping attempt without the square root": (rates, "oscillation_frequency", _frequency_without_root),
    "tunnelling without the factor 2 in the root": (rates, "tunnelling", lambda w, m, barrier: _was(rates, "tunnelling")(w, m / 2.0, barrier)),
    "heavier partner tunnels": (rates, "reduced_mass", lambda a, b: max(a, b)),
    "no tunnelling": (rates, "over_or_through", lambda t, w, m, barrier: exp(-barrier / t)),
    "no competition with diffusion": (rates, "reaction_probability", lambda p, away: min(1.0, p / 1.0e12)),
    "a pair of one species counted twice": (rates, "meeting", lambda a, b, same, s: (a + b) / s),
    "every pair counted half": (rates, "meeting", lambda a, b, same, s: 0.5 * (a + b) / s),
}


def _row(rows, change):
    return [r for r in rows if r["change"] == change]


def _swap_product(rows):
    for r in _row(rows, "H3O+ + e- -> OH + H2"):
        r["change"], r["products"] = "H3O+ + e- -> H2O + H", "H2O + H"


def _lose_a_product(rows):
    for r in _row(rows, "H2O -> O + H + H"):
        r["products"] = "O + H"


def _drop(rows):
    rows.remove(_row(rows, "H3+ + CO -> HCO+ + H2")[0])


def _exchange_neighbours(rows):
    for r in (a := [r for r in rows if r["cell"] == rows[0]["cell"]])[10], a[11]:
        r["reaction"] = 21 - int(r["reaction"])


def _nan(rows):
    rows[5]["coefficient"] = "nan"


def _ninth_digit(rows):
    rows[5]["coefficient"] = repr(float(rows[5]["coefficient"]) * (1.0 + 1.0e-9))


def _two_body_unit(rows):
    """A falloff limit per n_H, not per n_H^2."""
    for r in rows:
        if r["low"]:
            r["low"] = repr(float(r["low"]) * 1.0e-9)


def _natural_logarithm(rows):
    for r in rows:
        if r["log_centre"]:
            r["log_centre"] = repr(float(r["log_centre"]) / log10(e))


IN_ROWS = {
    "a swapped product": _swap_product, "a lost product": _lose_a_product, "a lost reaction": _drop,
    "two reactions exchanged": _exchange_neighbours, "not a number": _nan, "the ninth digit": _ninth_digit,
    "a limit in another unit": _two_body_unit, "natural logarithm of the centre": _natural_logarithm,
}


def _no_dilution(n, layers):
    return 1.0, 0.0


def _encounters_to_the_first_power(n, layers):
    top, _ = _was(system, "top_layers")(n, layers)
    return top / min(max(layers, 1.0), n), 0.0


# wrong only in what depends on the state: coefficients cannot show these, abundances must
IN_STATE = {
    "falloff without its centre": (rates, "falloff", lambda p, k, c: k * p / (1.0 + p)),
    "falloff at the high-pressure limit": (rates, "falloff", lambda p, k, c: k),
    "molecules below the top layers desorb": (system, "top_layers", _no_dilution),
    "all layers react": (system, "encounters", _encounters_to_the_first_power),
    "H2 left out of the third body": (system, "COLLIDERS", ("H", "He")),
}


@contextlib.contextmanager
def planted(module, name, value):
    setattr(module, name, value)
    try:
        yield
    finally:
        setattr(module, name, _was(module, name))


def rows(case):
    return list(check.reference_rows(case, case.network()))


def found_by_coefficients(case, engine):
    """{planting: number of differences}, with the unspoilt comparison under None."""
    out = {None: len(check.compare_coefficients(rows(case), engine)[0])}
    for name, planting in IN_FUNCTIONS.items():
        with planted(*planting):
            out[name] = len(check.compare_coefficients(rows(case), engine)[0])
    clean = rows(case)
    for name, spoil in IN_ROWS.items():
        spoilt = copy.deepcopy(engine)
        spoil(spoilt)
        out[name] = len(check.compare_coefficients(clean, spoilt)[0])
    return out


def main(arguments=None):
    parser = argparse.ArgumentParser(prog="reference.planted", description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("case")
    parser.add_argument("--rust", required=True, metavar="FILE.csv")
    given = parser.parse_args(arguments)
    with open(given.rust, newline="") as file:
        engine = list(csv.DictReader(file))
    found = found_by_coefficients(read_case(given.case), engine)
    clean = found.pop(None)
    for name, count in found.items():
        print(f"{count:6d} differences  {name}")
    missed = [name for name, count in found.items() if count <= clean]
    print(f"unspoilt: {clean} differences; {len(found)} plantings, {len(missed)} missed {missed or ''}")
    return 1 if clean or missed else 0


if __name__ == "__main__":
    sys.exit(main())
