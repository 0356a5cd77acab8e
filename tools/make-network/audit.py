#!/usr/bin/env python3
"""Audits a network file with code of its own: limits, thresholds, routes, joints.

    python3 tools/make-network/audit.py networks/standard.yaml

Everything it finds it prints, one line each, under the rule that was broken; networks/NOTES.md answers every line that
stays. Written from the formulas and independent of `frostclock network check`, so that the two can be compared. Exit
status 1 if anything was found that ACCEPTED does not name, or if ACCEPTED names something that is not found any more.
Needs PyYAML and, for masses, tests/reference/names.py beside it.
"""
import collections
import math
import os
import sys

import yaml

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "..", "tests"))
from reference import names, rates  # noqa: E402

COLLISION = 1.0e-9          # cm^3 s^-1, no pair of neutrals meets faster
CAPTURE_MARGIN = 1.3
ENDOTHERMIC = 8.0           # kJ/mol
JOINT = 0.05
R = 8.314462618e-3          # kJ/mol/K
STATCOULOMB_CM_PER_DEBYE = 1.0e-18

# What stays, with where NOTES.md says why. Rule -> changes or species.
ACCEPTED = {
    "barrier lower than the endothermicity": (
        "C2H5 + HNCO -> C2H6 + NCO", "CH3 + NO -> H2CN + OH", "H + C2 -> CH + C",
        "HO2 + C2H4 -> C2H5 + O2", "NH + OH -> NH2 + O", "NO2 + OH -> NO + HO2"),
    "neutral without a route": ("He",),
}


def load(path):
    with open(path, encoding="utf8") as file:
        return yaml.load(file, Loader=getattr(yaml, "CSafeLoader", yaml.SafeLoader))


def laws(group, line):
    """[(name of the part, function of T)] of one line of the gas groups, with the range rules applied."""
    if group == "capture":
        low, high = line["valid"]
        return [("k", lambda T: at(T, low, high, line.get("below", "extend"),
                                   lambda t: rates.capture(t, line["langevin"], line["x_300K"])))]
    if group == "falloff":
        low, high = line["valid"]
        return [(part, lambda T, p=line[part]: at(T, low, high, line.get("below", "extend"), lambda t: power(t, p)))
                for part in ("high", "low")]
    return [("k", lambda T: pieces(T, line))]


def power(T, part):
    return rates.power_law(T, part["at_300K"], part.get("slope", 0.0), part.get("barrier", 0.0))


def at(T, low, high, below, law):
    t = rates.evaluation_temperature(T, low, high, below)
    return 0.0 if t is None else law(t)


def pieces(T, line):
    parts = line.get("pieces") or [line]
    part = next((p for p in parts if T <= p["valid"][1]), parts[-1])
    return at(T, *part["valid"], line.get("below", "extend"), lambda t: power(t, part))


def capture_limit(T, ion, neutral, species):
    """Su & Chesnavich 1982; None without a polarisability. Unlisted dipoles count as 0."""
    s = species[neutral]
    if not s.get("polarisability"):
        return None
    m1, m2 = names.mass(ion), names.mass(neutral)
    langevin = 2.0 * math.pi * rates.ELECTRON_CHARGE * math.sqrt(
        s["polarisability"] * 1.0e-24 / (m1 * m2 / (m1 + m2) * rates.AMU))
    x = s.get("dipole", 0.0) * STATCOULOMB_CM_PER_DEBYE / math.sqrt(
        2.0 * s["polarisability"] * 1.0e-24 * rates.BOLTZMANN * T)
    return rates.capture(300.0, langevin, x)     # the law takes x at the temperature it is given


GRID_WIDE = [5.0 * (4000.0 / 5.0) ** (i / 160) for i in range(161)]


def grid(low, high, count=60):
    return [low * (high / low) ** (i / count) for i in range(count + 1)]


def audit(network):
    found = collections.defaultdict(dict)
    species = {s["name"]: s for s in network["species"]}
    enthalpy = {n: s["enthalpy"] for n, s in species.items()}
    sums = collections.defaultdict(list)
    made, lost, electrons = set(), set(), set()
    for group in ("gas", "capture", "falloff", "three_body", "third_body"):
        for line in network.get(group) or []:
            left, right = names.parse_change(line["change"])
            made.update(p for p in right if p not in left)
            lost.update(p for p in left if p not in right)
            electrons.update(p for p in left if "e-" in left)
            functions = laws(group, line)
            for part, law in functions:
                for T in GRID_WIDE:
                    k = law(T)
                    if not (math.isfinite(k) and k >= 0.0):
                        found["overflow or negative, 5-4000 K"][line["change"]] = f"{part} {k:g} at {T:.0f} K"
            if len(left) == 2 and group in ("gas", "capture", "falloff"):
                sums[tuple(sorted(left))].append(functions[0][1])
            coldest = line["high"] if group == "falloff" else (line.get("pieces") or [line])[0]
            barrier = coldest.get("barrier", 0.0)
            release = sum(map(enthalpy.get, left)) - sum(map(enthalpy.get, right))
            if group in ("gas", "capture", "falloff") and -release > ENDOTHERMIC and barrier * R < -release - ENDOTHERMIC:
                rule = "barrierless endothermic" if barrier <= 0 else "barrier lower than the endothermicity"
                found[rule][line["change"]] = f"{-release:.1f} kJ/mol, barrier {barrier * R:.1f}"
            parts = line.get("pieces") or []
            for lower, upper in zip(parts, parts[1:]):
                T = upper["valid"][0]
                if lower["valid"][1] != T:
                    found["pieces do not abut"][line["change"]] = f"{lower['valid']} {upper['valid']}"
                jump = power(T, upper) / power(T, lower) - 1.0
                if abs(jump) > JOINT:
                    found["jump at a joint"][line["change"]] = f"{jump:+.1%} at {T} K"
    for group in ("light", "cosmic"):
        for line in network[group]:
            left, right = names.parse_change(line["change"])
            made.update(right)
            lost.update(left)
    for pair, functions in sums.items():
        charges = [names.charge(p) for p in pair]
        text = " + ".join(pair)
        total = lambda T: sum(f(T) for f in functions)  # noqa: E731
        if charges == [0, 0]:
            k, T = max((total(T), T) for T in grid(10.0, 1000.0))
            if k > COLLISION:
                found["neutral + neutral above 1e-9"][text] = f"{k:.2e} at {T:.0f} K"
        elif sorted(charges) == [0, 1]:
            ion, neutral = sorted(pair, key=names.charge, reverse=True)
            if capture_limit(10.0, ion, neutral, species) is None:
                found["no polarisability"][neutral] = text
                continue
            ratio, T = max((total(T) / capture_limit(T, ion, neutral, species), T) for T in grid(10.0, 300.0))
            if ratio > CAPTURE_MARGIN:
                found["ion + neutral above 1.3 capture"][text] = f"{ratio:.5f} at {T:.0f} K"
    ices = {line["species"] for line in network["ices"]}
    neutralised = collections.Counter()
    for line in network["dust"]["neutralisation"]:
        neutralised[line["ion"]] += line["share"]
    for name in species:
        if names.charge(name) == 0 and names.mass(name) > names.mass("H2"):
            missing = [what for what, group in (("gas formation", made), ("gas destruction", lost), ("ice", ices)) if name not in group]
            if missing:
                found["neutral without a route"][name] = ", ".join(missing)
        elif names.charge(name) > 0:
            if name not in electrons:
                found["ion without electrons"][name] = "no recombination"
            if abs(neutralised[name] - 1.0) > 1e-6:
                found["ion without grains"][name] = f"shares add up to {neutralised[name]:g}"
    return found


def main(path):
    found = audit(load(path))
    unexpected = 0
    for rule, rows in found.items():
        print(f"{rule}: {len(rows)}")
        for what, text in sorted(rows.items()):
            known = what in ACCEPTED.get(rule, ())
            unexpected += not known
            print(f"  {what}: {text}{'  (accepted, see NOTES.md)' if known else ''}")
    gone = [f"{rule}: {what}" for rule, rows in ACCEPTED.items() for what in rows if what not in found.get(rule, {})]
    for text in gone:
        print("accepted but not found any more: " + text)
    print(f"{unexpected} unexpected, {len(gone)} gone")
    return 1 if unexpected or gone else 0


if __name__ == "__main__":
    if len(sys.argv) != 2:
        raise SystemExit(__doc__)
    sys.exit(main(sys.argv[1]))
