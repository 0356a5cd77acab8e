"""Compares the engine with this implementation. Exit status 0: agrees, 1: differs, 2: cannot compare.

    python -m reference.check coefficients CASE --rust FILE.csv
    python -m reference.check abundances CASE RUN.h5
    python -m reference.check dump CASE OUT.csv

Run from `tests/` (or with tests/ on PYTHONPATH). For a case with a recipe give the cells with
--cells FILE.csv, in the layout of a cell table.
"""

import argparse
import csv
import sys
from collections import Counter
from dataclasses import dataclass

import numpy as np

from . import names, rates
from .cells import read_case
from .coefficients import coefficients
from .integrate import LADDER, SECOND_METHOD, integrate

COEFFICIENT_TOLERANCE = 1.0e-10
SMALL = 1.0e-280  # below this both count as zero: subnormal numbers carry fewer digits
ABUNDANCE_TOLERANCE = 0.01
NEUTRAL_FLOOR, CHARGED_FLOOR = 1.0e-12, 1.0e-15
COLUMNS = ("cell", "reaction", "change", "consumed", "products", "coefficient", "low", "high", "log_centre")


@dataclass
class Difference:
    size: float
    text: str


def reference_rows(case, network, wanted=None):
    """What this implementation finds, in the columns the engine writes."""
    for c, cell in enumerate(case.cells):
        if wanted is not None and c not in wanted:
            continue
        for r, (reaction, k) in enumerate(zip(network.reactions, coefficients(case, network, cell))):
            row = {"cell": c, "reaction": r, "change": reaction.change,
                   "consumed": " + ".join(reaction.consumed), "products": " + ".join(reaction.products),
                   "coefficient": repr(k.value), "low": "", "high": "", "log_centre": ""}
            if k.low is not None:
                row |= {"low": repr(k.low), "high": repr(k.high), "log_centre": repr(k.log_centre)}
            yield row


def relative(a, b):
    if max(abs(a), abs(b)) < SMALL:
        return 0.0
    return abs(a - b) / max(abs(a), abs(b))


def sides(row):
    if row.get("consumed") and row.get("products") is not None:
        return Counter(names.split(row["consumed"])), Counter(names.split(row["products"]))
    consumed, products = names.parse_change(row["change"])
    return Counter(consumed), Counter(products)


def compare_coefficients(ours, theirs):
    """Every difference beyond the tolerance, and the number of coefficients compared."""
    ours = {(int(r["cell"]), int(r["reaction"])): r for r in ours}
    theirs = {(int(r["cell"]), int(r["reaction"])): r for r in theirs}
    found, compared, told = [], 0, set()
    for key in sorted(ours.keys() | theirs.keys()):
        a, b = ours.get(key), theirs.get(key)
        where = f"cell {key[0]} reaction {key[1]}"
        if a is None or b is None:
            found.append(Difference(np.inf, f"{where}: only {'the engine' if a is None else 'the reference'} has {(a or b)['change']}"))
            continue
        if sides(a) != sides(b):
            if key[1] not in told:
                told.add(key[1])
                found.append(Difference(np.inf, f"{where}: reference {a['change']}, engine {b['change']}"))
            continue
        for column in ("coefficient", "low", "high", "log_centre"):
            x, y = a.get(column) or "", b.get(column) or ""
            if x == "" and y == "":
                continue
            compared += 1
            if x == "" or y == "":
                found.append(Difference(np.inf, f"{where} {a['change']}: {column} is {x or 'missing'} here, {y or 'missing'} in the engine"))
                continue
            size = relative(float(x), float(y))
            if not size <= COEFFICIENT_TOLERANCE:  # also catches not-a-number
                found.append(Difference(size, f"{where} {a['change']}: {column} {float(x):.12e} here, {float(y):.12e} in the engine ({size:.2e})"))
    return sorted(found, key=lambda d: -(d.size if d.size == d.size else np.inf)), compared


def compare_abundances(species, reference, engine, times, cell):
    """Relative differences of what is abundant enough in either."""
    found, compared = [], 0
    for s, name in enumerate(species):
        charged = name not in (names.ICE_TOTAL,) and names.charge(name) != 0
        floor = CHARGED_FLOOR if charged else NEUTRAL_FLOOR
        for t, (a, b) in enumerate(zip(reference[:, s], engine[:, s])):
            if max(a, b) < floor:
                continue
            compared += 1
            size = abs(a - b) / max(a, b)
            if not size <= ABUNDANCE_TOLERANCE:
                found.append(Difference(size, f"cell {cell} {name} at {times[t]:.4g} yr: {a:.6e} here, {b:.6e} in the engine ({size:.1%})"))
    return found, compared


def nearest_snapshots(times, count=5):
    """Indices of the snapshots nearest to `count` log-spaced times from the first after 0 to the last."""
    later = np.flatnonzero(times > 0.0)
    aims = np.geomspace(times[later[0]], times[later[-1]], count)
    return sorted({int(later[np.argmin(np.abs(np.log(times[later] / aim)))]) for aim in aims})


def abundances(case, run, wanted=None, ladder=LADDER):
    """Reads the run, integrates its cells here and compares."""
    import h5py

    network = case.network()
    with h5py.File(run) as file:
        times = np.asarray(file["time"][:], dtype=float)
        stored = [s.decode() if isinstance(s, bytes) else str(s) for s in file["species"][:]]
        data = file["abundance"][:]
    here = network.species
    common = [s for s in here if s in stored]
    found = [Difference(np.inf, f"species {s} is not in the run") for s in here if s not in stored and s != names.ICE_TOTAL]
    found += [Difference(np.inf, f"species {s} is only in the run") for s in stored if s not in here]
    if data.shape[0] != len(case.cells):
        found.append(Difference(np.inf, f"{data.shape[0]} cells in the run, {len(case.cells)} in the case"))
    mine, theirs = [here.index(s) for s in common], [stored.index(s) for s in common]
    chosen = nearest_snapshots(times)
    compared = 0
    for c, cell in enumerate(case.cells[: data.shape[0]]):
        if wanted is not None and c not in wanted:
            continue
        given = case.start(network, cell)
        for s in common:
            if times[0] == 0.0 and relative(given[s], data[c, 0, stored.index(s)]) > 1.0e-9:
                found.append(Difference(np.inf, f"cell {c} starts with {s} = {given[s]:.9e} here, {data[c, 0, stored.index(s)]:.9e} in the run"))
        x = integrate(case, network, cell, times[chosen] * rates.YEAR, ladder)
        more, n = compare_abundances(common, x[:, mine], data[c][chosen][:, theirs], times[chosen], c)
        found, compared = found + more, compared + n
    return sorted(found, key=lambda d: -(d.size if d.size == d.size else np.inf)), compared


def report(found, compared, what, listed=20):
    for difference in found[:listed]:
        print(difference.text)
    if len(found) > listed:
        print(f"... and {len(found) - listed} more")
    if not compared:
        print(f"no {what} compared")
        return 1
    print(f"{compared} {what} compared, {len(found)} differ")
    return 1 if found else 0


def main(arguments=None):
    parser = argparse.ArgumentParser(prog="reference.check", description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    verbs = parser.add_subparsers(dest="verb", required=True)
    for verb, second in (("coefficients", None), ("abundances", "run"), ("dump", "out")):
        sub = verbs.add_parser(verb)
        sub.add_argument("case")
        if second:
            sub.add_argument(second)
        else:
            sub.add_argument("--rust", required=True, metavar="FILE.csv", help="coefficients written by the engine")
        sub.add_argument("--cells", metavar="FILE.csv", help="cell table in place of the one in the case")
        sub.add_argument("--network", metavar="FILE.yaml", help="network in place of the one in the case")
        sub.add_argument("--only", metavar="0,3", help="these cells only")
    sub = verbs.choices["abundances"]
    sub.add_argument("--second-method", action="store_true", help="integrate with BDF in place of LSODA")
    given = parser.parse_args(arguments)
    wanted = None if given.only is None else {int(c) for c in given.only.split(",")}
    try:
        case = read_case(given.case, given.cells, given.network)
        if given.verb == "abundances":
            ladder = SECOND_METHOD if given.second_method else LADDER
            return report(*abundances(case, given.run, wanted, ladder), "abundances")
        rows = reference_rows(case, case.network(), wanted)
        if given.verb == "dump":
            with open(given.out, "w", newline="") as file:
                writer = csv.DictWriter(file, COLUMNS)
                writer.writeheader()
                writer.writerows(rows)
            return 0
        with open(given.rust, newline="") as file:
            theirs = [r for r in csv.DictReader(file) if wanted is None or int(r["cell"]) in wanted]
        return report(*compare_coefficients(rows, theirs), "coefficients")
    except (OSError, ValueError, KeyError) as error:
        print(f"cannot compare: {error}", file=sys.stderr)
        return 2


if __name__ == "__main__":
    sys.exit(main())
