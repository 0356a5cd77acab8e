"""Whether a run of a closed, fully reversible gas ends at the Gibbs minimum.

    python -m reference.gibbs RUN.h5

Takes elements, temperature and density from the run, polynomials from networks/thermo.yaml, and nothing from any
coefficient. At given volume n_i = (p0/kT) exp(-G_i/RT + sum of a_ij pi_j); the element potentials pi_j are
found with SciPy so that the elements add up. Exit status 0: every species above 1e-8 (in either) agrees within 0.1 percent in every cell, 1: not.
"""

import argparse
import sys

import numpy as np
from scipy.optimize import root
from scipy.special import logsumexp

from . import names, rates
from .network import REPOSITORY
from .thermo import by_species, interval, read_thermo

TOLERANCE = 1.0e-3  # seen: 3e-6; 0.01 would let a standard pressure of 1 atm pass
FLOOR = 1.0e-8
FEWEST = 6  # main species per cell, else the comparison says little


def gibbs(table, species, t):
    """G/RT of one species at 1 bar."""
    line = interval(table[species], t)
    return rates.enthalpy(t, line["a"], line["b"]) / t - rates.entropy(t, line["a"], line["b"])


def minimum(table, species, totals, t, n_h):
    """Abundances at the Gibbs minimum of the elements `totals` (per H)."""
    elements = [e for e in totals if totals[e] > 0.0]
    count = np.array([[names.composition(s).get(e, 0) for e in elements] for s in species], dtype=float)
    wanted = np.log([totals[e] for e in elements])

    def logs(potentials, at):
        g = np.array([gibbs(table, s, at) for s in species])
        return np.log(1.0e6 / (rates.BOLTZMANN * at) / n_h) - g + count @ potentials

    def excess(potentials, at):
        x = logs(potentials, at)
        return np.array([logsumexp(x, b=count[:, e]) for e in range(len(elements))]) - wanted

    # At 6000 K the gas is mostly atoms, whose potentials are known; from there down to t.
    ladder = np.geomspace(6000.0, t, 80)
    potentials = np.array([wanted[e] - logs(np.zeros(len(elements)), 6000.0)[species.index(el)] for e, el in enumerate(elements)])
    for at in ladder:
        found = root(excess, potentials, args=(at,), tol=1.0e-12)
        potentials = found.x
    left = np.abs(excess(potentials, t)).max()
    if not left < 1.0e-8:
        raise ValueError(f"no Gibbs minimum found at {t} K, {n_h:.0e} cm^-3: elements are off by {left:.1e}")
    return np.exp(logs(potentials, t))


def check(path):
    import h5py

    with h5py.File(path) as file:
        species = [s.decode() if isinstance(s, bytes) else str(s) for s in file["species"][:]]
        abundance = file["abundance"][:]
        density, temperature = file["n_H"][:], file["T_gas"][:]
        stored = file["provenance/thermo"][()]
    table = read_thermo(REPOSITORY / "networks/thermo.yaml")
    stored = stored[0] if isinstance(stored, np.ndarray) else stored
    if by_species(stored.decode() if isinstance(stored, bytes) else stored) != table:
        print("the run holds other polynomials than networks/thermo.yaml")
        return 1
    wrong = 0
    for cell, (n_h, t) in enumerate(zip(density, temperature)):
        totals = {}
        for s, x in zip(species, abundance[cell, 0]):
            for element, atoms in names.composition(s).items():
                totals[element] = totals.get(element, 0.0) + atoms * x
        aim = minimum(table, species, totals, t, n_h)
        main = np.maximum(aim, abundance[cell, -1]) > FLOOR
        off = np.abs(abundance[cell, -1] / aim - 1.0)
        moved = np.abs(abundance[cell, 0] / aim - 1.0)[main].max()
        worst = int(np.argmax(np.where(main, off, 0.0)))
        print(f"{t:6.0f} K {n_h:.0e} cm^-3: {main.sum()} species above {FLOOR:.0e}, worst {species[worst]} {off[worst]:.1e}; "
              f"all {len(species)} within {off.max():.1e}; the start is off by {moved:.1e}")
        for s in np.flatnonzero(main & ~(off <= TOLERANCE)):
            wrong += 1
            print(f"    {species[s]}: {abundance[cell, -1, s]:.6e} in the run, {aim[s]:.6e} at the minimum")
        if main.sum() < FEWEST or not moved > 0.1:
            wrong += 1
            print("    too little to compare")
    return 1 if wrong else 0


def main(arguments=None):
    parser = argparse.ArgumentParser(prog="reference.gibbs", description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("run")
    return check(parser.parse_args(arguments).run)


if __name__ == "__main__":
    sys.exit(main())
