#!/usr/bin/env python3
"""Builds networks/thermo.yaml from the reviewed table of polynomials.

    python3 tools/make-network/make_thermo.py /path/to/facts networks/thermo.yaml

Reads nasa9.csv, adds the listed shift to the enthalpy of every species, and writes one line per species and
temperature interval. The same table always gives the same bytes. Python 3 standard library only.
"""
import csv
import os
import sys

from yaml_text import scalar

R = 8.314510    # J/(mol K), the gas constant these polynomials were fitted with
SOURCES = {
    "G": ("mcbride2002", "McBride, Zehe & Gordon 2002, NASA/TP-2002-211556"),
    "B": ("burcat2005", "Burcat & Ruscic 2005, ANL-05/20, third millennium tables"),
}
HEAD = """\
# Thermodynamic polynomials of gas species; standard pressure 1 bar. Written by tools/make-network/make_thermo.py.
#   Cp/R  = a1 T^-2 + a2 T^-1 + a3 + a4 T + a5 T^2 + a6 T^3 + a7 T^4
#   H/RT  = -a1 T^-2 + a2 ln(T)/T + a3 + a4 T/2 + a5 T^2/3 + a6 T^3/4 + a7 T^4/5 + b1/T
#   S/R   = -a1 T^-2/2 - a2 T^-1 + a3 ln(T) + a4 T + a5 T^2/2 + a6 T^3/3 + a7 T^4/4 + b2
# H includes the enthalpy of formation at 298.15 K. Fits with seven coefficients have a1 = a2 = 0.
# shift: kJ/mol that b1 contains beyond the published fit (1000 shift/R with R = 8.314510 J/mol/K), so that H(298.15 K)
#   is the `enthalpy` of networks/standard.yaml: equilibria and the audit of barriers then use the same numbers.
# Ions are in the thermal-electron convention, as is e- (H = 0 at 298.15 K, heat capacity 5/2 R): H(298.15 K) is
#   `enthalpy` + 6.197 kJ/mol (5/2 R 298.15 K) per positive charge. In a balanced reaction nothing of it is left, as long as
#   every charged species, e- included, is taken from this file.
thermo: standard
layout: 1
about: polynomials behind the reverse of reversible reactions
sources:
"""


def number(x):
    """A float of YAML 1.1 and 1.2, ten digits as in the tables; zero short."""
    return "0.0" if float(x) == 0.0 else "%.9e" % float(x)


def main(facts, out):
    with open(os.path.join(facts, "nasa9.csv"), encoding="utf8", newline="") as f:
        rows = list(csv.DictReader(line for line in f if not line.startswith("#")))
    text = HEAD
    for key, citation in SOURCES.values():
        text += '  %s: "%s"\n' % (key, citation)
    text += "polynomials:\n"
    for row in rows:
        shift = float(row["shift_kJ_mol"]) + 0.0    # no negative zero
        a = ", ".join(number(row["a%d" % i]) for i in range(1, 8))
        b1 = float(row["b1"]) + 1000.0 * shift / R
        text += "  - {species: %s, valid: [%s, %s], a: [%s], b: [%s, %s], shift: %.2f, source: %s}\n" % (
            scalar(row["species"]), float(row["T_lo"]), float(row["T_hi"]), a,
            number(b1), number(row["b2"]), shift or 0.0, SOURCES[row["source"]][0])
    with open(out, "w", encoding="utf8", newline="\n") as f:
        f.write(text)
    print("%d lines of %d species" % (len(rows), len({row["species"] for row in rows})))


if __name__ == "__main__":
    main(*sys.argv[1:])
