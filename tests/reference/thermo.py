"""Reads polynomials (networks/thermo.yaml) and makes equilibrium constants of reactions with them.

The formulas are in `rates`; here is which interval counts, and what holds outside of all.
"""

from pathlib import Path

from . import rates


def read_thermo(path):
    """{species: [line, ...]}, ascending in temperature."""
    return by_species(Path(path).read_text(encoding="utf-8"))


def by_species(text):
    from ruamel.yaml import YAML

    yaml = YAML(typ="safe", pure=True)
    yaml.version = (1, 2)
    raw = yaml.load(text)
    if raw["layout"] != 1:
        raise ValueError(f"layout {raw['layout']} of polynomials is not known here")
    table = {}
    for line in raw["polynomials"]:
        table.setdefault(line["species"], []).append(line)
    return table


def interval(lines, t):
    """The line that counts at t: the lower one at a joint."""
    return next((line for line in lines if t <= line["valid"][1]), lines[-1])


def log_constant(table, consumed, products, t):
    """ln K_c of consumed -> products. Beyond the polynomials heat and entropy stay what they are at the end."""
    involved = [table[s] for s in (*consumed, *products)]
    low = max(lines[0]["valid"][0] for lines in involved)
    high = min(lines[-1]["valid"][1] for lines in involved)
    at = min(max(t, low), high)
    heat = order = 0.0
    for sign, side in ((-1, consumed), (1, products)):
        for species in side:
            line = interval(table[species], at)
            heat += sign * rates.enthalpy(at, line["a"], line["b"])
            order += sign * rates.entropy(at, line["a"], line["b"])
    return rates.log_equilibrium(t, heat, order, len(products) - len(consumed))
