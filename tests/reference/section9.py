"""Section 9 of the closed-form checks: gas-phase abundances of the standard network.

    python -m reference.section9 strip STANDARD.yaml OUT.yaml    the network without ices and grain charge
    python -m reference.section9 check STANDARD.yaml             integrate here, compare with the table
    python -m reference.section9 run RUN.h5                      compare a run of section9.yaml with the table

Settings of the table: see section9.yaml and section9.csv. Exit status 1 beyond 1 percent.
"""

import csv
import re
import sys
from pathlib import Path

import numpy as np
from ruamel.yaml import YAML

from . import names, rates
from .cells import read_case
from .integrate import LADDER, integrate_system
from .coefficients import coefficients
from .network import expand
from .system import System

HERE = Path(__file__).parent
TOLERANCE = 0.01
COLUMNS = ((0, 1.0e5), (0, 1.0e6), (1, 1.0e5), (2, 1.0e5))  # cell and time (yr) of each column


def strip(text):
    """The network file without ices, surface and grain charge; its lines as they stand. H2 still forms on dust."""
    blocks = re.split(r"(?m)^(?=[A-Za-z_]+:)", text)
    kept = []
    for block in blocks:
        key = block.split(":", 1)[0]
        if key == "network":
            block = block.rstrip("\n") + "-gas\n"
        if key == "compositions":
            head, *entries = re.split(r"(?m)^(?=\s*- )", block)
            block = head + "".join(e for e in entries if names.ADSORBED not in e)
        if key == "dust":
            formation = re.search(r"(?m)^\s*hydrogen_formation:.*\n", block).group()
            block = f"dust:\n{formation}  electron_sticking: 0.0\n"
        if key not in ("ices", "surface"):
            kept.append(block)
    return "".join(kept)


def gas_only(path):
    """The stripped network, parsed."""
    return YAML(typ="safe", pure=True).load(strip(Path(path).read_text(encoding="utf-8")))


def table():
    """{species: four values}."""
    lines = (line for line in (HERE / "section9_table.csv").read_text().splitlines() if not line.startswith("#"))
    return {row[0]: [float(v) for v in row[1:]] for row in list(csv.reader(lines))[1:]}


def shield_secondary(network, cell, found):
    """Lowers the secondary-photon rows of CO and N2 by the factors of line shielding."""
    for reaction, c in zip(network.reactions, found):
        if reaction.kind == "cosmic" and "secondary" in reaction.line and reaction.change in ("CO -> C + O", "N2 -> N + N"):
            c.value *= cell.fields[0].shields[reaction.consumed[0]]
    return found


def values(raw, secondary_shielded=False, ladder=LADDER):
    """{species: four values} by integration here of a network without ices."""
    case = read_case(HERE / "section9.yaml")
    network = expand(raw, charge_states=0)
    out = {name: [0.0] * len(COLUMNS) for name in network.species}
    for c, cell in enumerate(case.cells):
        found = coefficients(case, network, cell)
        if secondary_shielded:
            found = shield_secondary(network, cell, found)
        system = System(case, network, cell, found)
        given = case.start(network, cell)
        wanted = [(k, t) for k, (which, t) in enumerate(COLUMNS) if which == c]
        x = integrate_system(system, [given[n] for n in system.names], [t * rates.YEAR for _, t in wanted], ladder)
        for (k, _), row in zip(wanted, x):
            for name, value in zip(system.names, row):
                out[name][k] = value
    return out


def from_run(path):
    import h5py

    with h5py.File(path) as file:
        times = np.asarray(file["time"][:], dtype=float)
        stored = [s.decode() if isinstance(s, bytes) else str(s) for s in file["species"][:]]
        data = file["abundance"][:]
    at = [(c, int(np.argmin(np.abs(times - t)))) for c, t in COLUMNS]
    if any(abs(times[i] / t - 1.0) > 1.0e-6 for (_, i), (_, t) in zip(at, COLUMNS)):
        raise ValueError(f"{path}: no snapshots at 1e5 and 1e6 yr")
    return {name: [data[c, i, s] for c, i in at] for s, name in enumerate(stored)}


def compare(found):
    """[(relative difference, species, column, table, found)], largest first."""
    out = []
    for name, row in table().items():
        for column, (wanted, value) in enumerate(zip(row, found[name])):
            out.append((abs(value / wanted - 1.0), name, column, wanted, value))
    return sorted(out, reverse=True)


def main(arguments=None):
    arguments = sys.argv[1:] if arguments is None else arguments
    match arguments:
        case ["strip", source, target]:
            Path(target).write_text(strip(Path(source).read_text(encoding="utf-8")), encoding="utf-8")
            return 0
        case ["check", source, *options]:
            found = values(gas_only(source), "--secondary-shielded" in options)
        case ["run", path]:
            found = from_run(path)
        case _:
            print(__doc__, file=sys.stderr)
            return 2
    differences = compare(found)
    beyond = [d for d in differences if not d[0] <= TOLERANCE]
    for size, name, column, wanted, value in beyond or differences[:5]:
        cell, time = COLUMNS[column]
        print(f"{name} cell {cell} at {time:g} yr: table {wanted:.3e}, found {value:.4e} ({size:.2%})")
    print(f"{len(differences)} values, {len(beyond)} beyond {TOLERANCE:.0%}")
    return 1 if beyond else 0


if __name__ == "__main__":
    sys.exit(main())
