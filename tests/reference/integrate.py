"""Integrates one cell with SciPy. Tight tolerances: this is what others are measured against.

LSODA comes first: near equilibrium round-off in the conserved sums (some 1e-11 of an abundance)
exceeds what Newton's iteration in SciPy's BDF and Radau asks for at a relative tolerance of 1e-6,
so that those crawl; they serve as a second method at 1e-5. A method that fails or crawls hands
over to the next at the last time reached. `LADDER` is that order.
"""

import warnings

import numpy as np
from scipy.integrate import BDF, LSODA, Radau

from .coefficients import coefficients
from .system import System

SMALLEST = 1.0e-22
FIRST_STEP = 1.0e-12  # s: thermal desorption of warm volatile ice takes 1e-11 s
METHODS = {"LSODA": LSODA, "BDF": BDF, "Radau": Radau}
LADDER = (("LSODA", 1.0e-7), ("LSODA", 1.0e-6), ("BDF", 1.0e-5), ("Radau", 1.0e-5))
SECOND_METHOD = (("BDF", 1.0e-5), ("Radau", 1.0e-5))
EVALUATIONS = 30_000


class Crawls(RuntimeError):
    """Too many evaluations of the right-hand side."""


def integrate(case, network, cell, times, ladder=LADDER, start=None):
    """Abundances [time, species] at `times` (s, ascending, 0 allowed)."""
    system = System(case, network, cell, coefficients(case, network, cell))
    if start is None:
        given = case.start(network, cell)
        start = np.array([given[name] for name in system.names])
    return integrate_system(system, start, times, ladder)


def integrate_system(system, start, times, ladder=LADDER):
    times = np.unique(np.asarray(times, dtype=float))
    reached, now, x = [], 0.0, np.asarray(start, dtype=float)
    if times[0] == 0.0:
        reached.append(x)
    told = []
    for method, relative in ladder:
        left = times[len(reached):]
        if not len(left):
            break
        got, why = _attempt(system, x, now, left, method, relative)
        if len(got):
            reached.extend(got)
            now, x = left[len(got) - 1], got[-1]
        told.append(f"{method} {relative:g}: {why}")
    if len(reached) < len(times):
        raise RuntimeError(f"no method passed {now:.4g} s ({'; '.join(told)})")
    return np.array(reached)


def _attempt(system, x, now, times, method, relative):
    """Abundances at as many of `times` as the method reaches, and why it stopped."""
    if method == "LSODA":  # takes no sparse matrices
        def jacobian(t, y):
            return system.jacobian(t, y).toarray()
    else:
        jacobian = system.jacobian
    spent = 0

    def rhs(t, y):
        nonlocal spent
        spent += 1
        if spent > EVALUATIONS:
            raise Crawls
        return system.rhs(t, y)

    got = []
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            solver = METHODS[method](rhs, now, x, times[-1], jac=jacobian, rtol=relative, atol=SMALLEST,
                                     first_step=FIRST_STEP if now == 0.0 else None)
            while solver.status == "running":
                why = solver.step()
                if solver.status == "failed":
                    return got, why
                between = solver.dense_output()
                while len(got) < len(times) and times[len(got)] <= solver.t:
                    got.append(between(times[len(got)]))
    except Crawls:
        return got, f"more than {EVALUATIONS} evaluations"
    return got, "done"
