#!/usr/bin/env python3
"""Builds networks/standard.yaml from the reviewed fact tables.

    python3 tools/make-network/make_network.py /path/to/facts networks/standard.yaml

Reads the CSV tables (species, gas_reactions, photo, cosmic, binding ...), arranges them in network
layout 1 and writes one entry per line. The same tables always give the same bytes. A report goes to
standard output: counts, joints of temperature pieces, neutralisation choices, rows left out. It is
the basis of networks/NOTES.md.

Why it exists: to rebuild networks/standard.yaml when the fact tables change. Once somebody has edited
networks/standard.yaml by hand, that file is the authority and this script only shows, by a diff, what
the tables would say. Python 3 standard library only. Beside it: citations.py makes the source keys,
spectra.py estimates photo rates in fields where the tables give none, yaml_text.py writes values.
"""
import collections
import csv
import math
import os
import re
import sys

from citations import Sources
from spectra import EV, FIELDS, Estimate
from yaml_text import flow, noted, quoted, real, scalar, shorten, whole

GRAIN_LIMIT_EV = 3.0      # recombination channels that release less are closed on grains
JOINT_TOLERANCE = 0.05    # relative jump between two temperature pieces that is reported
SHIELDED = {("H2", "dissociation"): "H2", ("CO", "dissociation"): "CO",
            ("N2", "dissociation"): "N2", ("C", "ionisation"): "C"}
BELOW = {"extrapolate": "extend", "freeze": "hold", "zero": "zero"}
# Own changes of gas rows: row -> (reason, {column: (value in the facts, value here)}). NOTES.md lists them.
CAPTURE_ROUNDING = "last digit lowered: the sum rounded to above 1.3 x capture"
CHANGED = {
    "G0017": (CAPTURE_ROUNDING, {"a": ("1.938e-09", "1.937e-09")}),
    "G0137": (CAPTURE_ROUNDING, {"a": ("1.742e-09", "1.741e-09")}),
    "G0157": (CAPTURE_ROUNDING, {"a": ("1.886e-09", "1.885e-09")}),
    "G0170": (CAPTURE_ROUNDING, {"a": ("1.703e-09", "1.702e-09")}),
    "G0620": (CAPTURE_ROUNDING, {"a": ("1.443e-09", "1.442e-09")}),
    "G0716": (CAPTURE_ROUNDING, {"a": ("2.197e-09", "2.196e-09")}),
    "G1188": (CAPTURE_ROUNDING, {"a": ("2.726e-09", "2.725e-09")}),
    "G0770": ("with the threshold 5.2e-12 at 300 K, measured 1.5e-10: enthalpies and experiment disagree",
              {"factor": ("1.5", "30"), "confidence": ("measured", "estimated")}),
    "G1662": ("the factor is that of the extrapolation", {"factor": ("3", "5")}),
    "G1880": ("held below 30 K, where the high-pressure limit would pass 1e-9",
              {"T_lo": ("10", "30"), "below_T_lo": ("extrapolate", "freeze")}),
    "G2278": ("starts at 282 K, where it crosses the fit of the cold range", {"T_lo": ("300", "282")}),
    "G2511": ("ends at 282 K, where it crosses the fit of the warm range", {"T_hi": ("300", "282")}),
}
# High-temperature fits whose barrier is less than the endothermicity. Extended to cold gas the reverse reaction would be
# faster than collisions; below the joint the barrier is the endothermicity instead, and the value at the joint is kept.
# Row -> (joint in K, {column: value of the cold piece}).
COLD_PIECES = {
    "G1748": (800, {"a": "1.32e-10", "b": "0", "c": "16345"}),
    "G1753": (800, {"a": "7.233e-09", "b": "0", "c": "14625"}),
    "G2259": (500, {"a": "2.08e-09", "b": "0", "c": "10079"}),
}
HOP_BARRIER = {"N": 400, "O": 750}      # K, measured: Minissale, Congiu & Dulieu 2016


# ---------------------------------------------------------------- reading

def table(folder, name):
    with open(os.path.join(folder, name), encoding="utf8", newline="") as f:
        return list(csv.DictReader(line for line in f if not line.startswith("#")))


def same_change(reactants, products):
    return tuple(sorted(reactants.split(" + "))), tuple(sorted(products.split(" + ")))


# ---------------------------------------------------------------- gas reactions

def make_changes(rows):
    """CHANGED, applied in place; a row that no longer reads as it did when the change was decided stops the work."""
    by_id = {row["id"]: row for row in rows}
    for name, (reason, columns) in CHANGED.items():
        row = by_id[name]
        for column, (before, after) in columns.items():
            if row[column] != before:
                raise SystemExit("%s: %s is %s, not %s: decide the change anew" % (name, column, row[column], before))
            row[column] = after
        row["note"] = "; ".join(x for x in (row["note"], "changed here: " + reason) if x)
    for name, (joint, columns) in COLD_PIECES.items():
        row = by_id[name]
        cold = dict(row, id=name + " cold", T_hi=str(joint), confidence="estimated",
                    note="made here: barrier of the endothermicity", **columns)
        row["T_lo"] = str(joint)
        rows.insert(rows.index(row), cold)


def power_law(row, T):
    return float(row["a"]) * (T / 300) ** float(row["b"] or 0) * math.exp(-float(row["c"] or 0) / T)


def coefficients(row, prefix=""):
    """at_300K, slope, barrier; zeros are the layout's defaults and left out."""
    a, b, c = (row[prefix + x] or "0" for x in "abc")
    pairs = [("at_300K", real(a))]
    if float(b):
        pairs.append(("slope", real(b)))
    if float(c):
        pairs.append(("barrier", real(c)))
    return pairs


def valid(row):
    return "[%s, %s]" % (whole(row["T_lo"]), whole(row["T_hi"]))


def group_of(row):
    form = row["form"]
    if form == "third-body dissociation" and len(row["reactants"].split(" + ")) > 1:
        return "gas"        # the collider is written out: an ordinary two-body reaction
    return {"power law": "gas", "radiative": "gas", "dipole capture": "capture", "falloff": "falloff",
            "three-body": "three_body", "third-body dissociation": "third_body"}[form]


def gas_groups(rows, sources, report):
    """Entries of gas, capture, falloff, three_body, third_body; pieces joined, duplicates marked."""
    names = ("gas", "capture", "falloff", "three_body", "third_body")
    entries = {name: collections.OrderedDict() for name in names}
    for row in rows:
        change = same_change(row["reactants"], row["products"])
        if change[0] == change[1]:      # an exchange between isomers that the species set merges
            report["gas left out"].append("%s %s" % (row["id"], row["reactants"]))
            continue
        entries[group_of(row)].setdefault(change, []).append(row)
    written, seen = {}, set()
    for name in names:
        written[name] = []
        for change, parts in entries[name].items():
            parts.sort(key=lambda r: float(r["T_lo"]))
            low = parts[0]
            pairs = [("change", scalar("%s -> %s" % (low["reactants"], low["products"])))]
            if name == "capture":
                pairs += [("langevin", real(low["a"])), ("x_300K", real(low["b"])), ("valid", valid(low))]
            elif name == "falloff":
                pairs += [("low", flow(coefficients(low, "k0_"))), ("high", flow(coefficients(low))),
                          ("centre", real(low["Fc"])), ("valid", valid(low))]
            elif len(parts) == 1:
                pairs += coefficients(low) + [("valid", valid(low))]
            else:
                check_joints(parts, report)
                pieces = [flow(coefficients(p) + [("valid", valid(p))]) for p in parts]
                pairs.append(("pieces", "[%s]" % ", ".join(pieces)))
            if len(parts) > 1 and name in ("capture", "falloff"):
                raise SystemExit("several %s rows for %s" % (name, pairs[0][1]))
            pairs.append(("below", BELOW[low["below_T_lo"]]))
            if change in seen:
                pairs.append(("adds", "true"))
                report["adds"].append("%s (%s, %s)" % (pairs[0][1], name, low["id"]))
            seen.add(change)
            worst = max(parts, key=lambda r: float(r["factor"]))
            order = ("evaluated", "measured", "recalled", "estimated")
            standing = max((p["confidence"] for p in parts), key=order.index)
            notes = []
            for p in parts:
                note = shorten(p["note"])
                if p["form"] == "radiative" and "radiative" not in note:
                    note = "; ".join(x for x in ("radiative", note) if x)
                notes.append(p["id"] + (": " + note if note else ""))
            pairs += [("within", real(worst["factor"])), ("standing", standing),
                      ("source", sources.of_rows(parts)), ("note", quoted(" | ".join(notes)))]
            written[name].append(flow(pairs))
            report["rows"][name] += len(parts)
    return written


def check_joints(parts, report):
    for lower, upper in zip(parts, parts[1:]):
        T = float(upper["T_lo"])
        if float(lower["T_hi"]) != T:
            raise SystemExit("ranges of %s and %s do not abut" % (lower["id"], upper["id"]))
        jump = power_law(upper, T) / power_law(lower, T) - 1
        report["joints"].append("%s / %s at %g K: %+.2f %%%s" % (
            lower["id"], upper["id"], T, 100 * jump, "  JUMP" if abs(jump) > JOINT_TOLERANCE else ""))


# ---------------------------------------------------------------- light and energetic particles

def light_lines(photo, fields, estimate, sources, report):
    total = collections.Counter()
    for row in photo:
        total[row["species"], row["process"]] += float(row["k0_s-1"])
    other = {(r["species"], r["process"]): r for r in fields}
    lines = []
    for row in photo:
        which = row["species"], row["process"]
        rate, note = float(row["k0_s-1"]), row["note"]
        if which in other:
            share = rate / total[which]
            spectra = [(name, real("%.4g" % (share * float(other[which][column])))) for name, _, column in FIELDS]
        else:
            ratios, words = estimate.of(*which, float(row["gamma"]))
            spectra = [(name, real("%.3g" % (rate * ratio))) for name, ratio in ratios]
            note = "; ".join(x for x in (note, words) if x)
            report["spectra estimated"].append("%s %s: %s: %s of the Draine rate" % (
                *which, words, ", ".join("%.3g" % ratio for _, ratio in ratios)))
        lines.append(flow([
            ("change", scalar("%s -> %s" % (row["species"], row["products"]))), ("rate", real(row["k0_s-1"])),
            ("extinction", real(row["gamma"])), ("shield", SHIELDED.get(which)), ("spectra", flow(spectra)),
            ("within", real(row["factor"])), ("standing", row["confidence"]),
            ("source", sources.key(row["source"])), ("note", noted("class " + row["class"], note))]))
    return lines


def cosmic_lines(rows, sources):
    kind = {"direct": "direct", "secondary photons": "secondary"}
    lines = []
    for row in rows:
        note = row["note"]
        if row["p_check"] and float(row["p_check"]) != float(row["value"]):
            note = "; ".join(x for x in (note, "own integral gives " + row["p_check"]) if x)
        lines.append(flow([
            ("change", scalar("%s -> %s" % (row["species"], row["products"]))),
            (kind[row["process"]], real(row["value"])), ("within", real(row["factor"])),
            ("standing", row["confidence"]), ("source", sources.key(row["source"])), ("note", noted("", note))]))
    return lines


def shielding_lines(rows, sources):
    axis = [c for c in rows[0] if c.startswith("theta_")]
    log_column = "[%s]" % ", ".join("0" if c.endswith("none") else c.rsplit("_", 1)[1] for c in axis)
    rows = [r for r in rows if r["isotopologue"] == "12CO"]
    log_h2 = "[%s]" % ", ".join(whole(r["logN_H2"]) for r in rows)
    factor = "[%s]" % ", ".join("[%s]" % ", ".join(real(r[c]) for c in axis) for r in rows)
    grid = [("log_column", log_column), ("log_h2", log_h2), ("factor", factor)]
    return [
        flow([("name", "H2"), ("law", "draine_bertoldi"), ("column", "H2"), ("source", sources.add("draine1996"))]),
        flow([("name", "CO"), ("law", "table"), ("column", "CO")] + grid + [("source", sources.add("visser2009")),
             ("note", quoted("12CO at b = 0.3 km/s and 5 K; warm gas is shielded slightly less"))]),
        flow([("name", "N2"), ("law", "table"), ("column", "N2")] + grid + [("source", sources.add("visser2009")),
             ("note", quoted("stop-gap: the CO table with the N2 column, estimated to a factor 1.5 to 2 up to "
                             "1e17 cm^-2, shields too early below 1e15 in warm gas; to be replaced by the tables of "
                             "Li et al. 2013 A&A 555 A14 or Heays et al. 2014 A&A 562 A61"))]),
        flow([("name", "C"), ("law", "carbon"), ("column", "C"), ("source", sources.add("kamp2000+tielens1985")),
             ("note", quoted("recalled, order of magnitude"))]),
    ]


# ---------------------------------------------------------------- ices and surfaces

def ice_lines(species, binding, photodesorption, sources, report):
    yields = collections.defaultdict(list)
    previous = ""
    for row in photodesorption:
        source = re.sub(r"^same(?=;|$)", previous, row["source"])
        if source == row["source"]:
            previous = row["source"]
        products = row["process"].split(" -> ")[1]
        yields[row["species"]].append((products, row["yield"], source))
    lines = []
    for name in species:
        rows = [r for r in binding if r["species"] == name]
        chosen = [r for r in rows if r["default"] == "yes"]
        set_a = [r for r in rows if r["set"] == "A"]
        pure = [r for r in rows if r["set"] == "D"]
        if len(chosen) != 1 or len(set_a) != 1 or len(pure) > 1:
            raise SystemExit("binding rows of %s: need one default, one of set A, at most one of set D" % name)
        row, harmonic = chosen[0], set_a[0]
        hop = None if row["set"] == "A" else whole(harmonic["E_des_K"])
        channels = yields.get(name) or [(name, yields["*"][0][1], yields["*"][0][2])]
        note = row["note"]
        if name in HOP_BARRIER:
            note = "; ".join(x for x in (note, "hop_barrier measured: Minissale, Congiu & Dulieu 2016 A&A 585 A146") if x)
        within = (float(row["E_des_K"]) + float(row["uncertainty_K"])) / float(row["E_des_K"])
        lines.append(flow([
            ("species", scalar(name)), ("energy", whole(row["E_des_K"])), ("prefactor", real(row["nu_s-1"])),
            ("pure", flow([("energy", whole(pure[0]["E_des_K"])), ("prefactor", real(pure[0]["nu_s-1"])),
                           ("source", sources.key(pure[0]["source"]))]) if pure else None),
            ("hop_energy", hop), ("hop_barrier", whole(HOP_BARRIER[name]) if name in HOP_BARRIER else None),
            ("photodesorption", "[%s]" % ", ".join(flow([
                ("products", scalar(p)), ("yield", real(y)), ("source", sources.key(s))]) for p, y, s in channels)),
            ("within", real("%.3g" % within)), ("standing", row["confidence"]),
            ("source", sources.key(row["source"])), ("note", noted("set " + row["set"], note))]))
    report["ices"] = len(lines)
    return lines


def surface_factor(row):
    """One-sigma factor of a surface line, estimated: a rectangular barrier of 1 A differs from computed tunnelling
    rates by about 10 either way (Lamberts et al. 2016, in the head of surface_reactions.csv); a barrierless line is
    uncertain by its branching alone."""
    return 10.0 if float(row["Ea_K"]) else 2.0


def surface_lines(rows, sources, report):
    """The first form has no H2 ice: H2(ads) made leaves as H2, rows that need H2(ads) are left out."""
    weights = collections.Counter()
    for row in rows:
        weights[same_change(row["reactants"], row["products"])[0]] += float(row["weight"])
    lines = []
    for row in rows:
        pair = same_change(row["reactants"], row["products"])[0]
        if "H2(ads)" in pair or pair == ("H(ads)", "H(ads)"):
            report["surface left out"].append("%s %s -> %s" % (row["id"], row["reactants"], row["products"]))
            continue
        share = float(row["weight"])
        if abs(weights[pair] - 1) < 0.01:       # 3 x 0.333: rounding, not a missing channel
            share = float("%.6g" % (share / weights[pair]))
        products = " + ".join("H2" if p == "H2(ads)" else p for p in row["products"].split(" + "))
        lines.append(flow([
            ("change", scalar("%s -> %s" % (row["reactants"], products))),
            ("barrier", real(row["Ea_K"]) if float(row["Ea_K"]) else None), ("width", real(row["width_A"])),
            ("share", real(share)), ("within", real(surface_factor(row))), ("standing", row["confidence"]), ("source", sources.key(row["source"])),
            ("note", noted(row["id"], row["note"]))]))
    return lines


# ---------------------------------------------------------------- dust

def neutralisation_lines(ions, gas, enthalpy, sources, report):
    """Rule 6 of the fact tables: recombination channels that release at least 3 eV, renormalised."""
    lines = []
    for ion in ions:
        channels = []
        for row in gas:
            if sorted(row["reactants"].split(" + ")) == sorted([ion, "e-"]):
                made = sum(enthalpy[p] for p in row["products"].split(" + "))
                channels.append((row, (enthalpy[ion] - made) / EV, power_law(row, 300.0)))
        if not channels:
            raise SystemExit("no recombination row for %s: decide what it becomes on a grain" % ion)
        kept = [c for c in channels if c[1] >= GRAIN_LIMIT_EV]
        if not kept:
            kept = [max(channels, key=lambda c: c[1])]
            report["neutralisation"].append("%s: no channel above the limit, most exothermic kept: %s (%.2f eV)" % (
                ion, kept[0][0]["products"], kept[0][1]))
        elif len(kept) < len(channels):
            closed = ", ".join("%s (%.2f eV)" % (c[0]["products"], c[1]) for c in channels if c not in kept)
            report["neutralisation"].append("%s: closed %s" % (ion, closed))
        for row, released, _ in channels:
            if abs(released - GRAIN_LIMIT_EV) < 0.3:
                report["near the limit"].append("%s -> %s (%.2f eV)" % (ion, row["products"], released))
        total = sum(k for _, _, k in kept)
        shares = [round(k / total, 6) for _, _, k in kept]
        largest = shares.index(max(shares))
        shares[largest] = round(1 - sum(s for i, s in enumerate(shares) if i != largest), 6)
        for (row, _, _), share in zip(kept, shares):
            if share > 0:
                lines.append(flow([("ion", scalar(ion)), ("becomes", scalar(row["products"])), ("share", real(share)),
                                   ("source", sources.of_rows([row]))]))
    report["neutralisation lines"] = len(lines)
    return lines


# ---------------------------------------------------------------- species and start compositions

def species_lines(species, enthalpy, polar, sources):
    lines = []
    for row in species:
        name = row["species"]
        h, p = enthalpy[name], polar.get(name)
        key = sources.species_key(h["source"], p, atom=re.fullmatch(r"[A-Z][a-z]?", name) is not None)
        lines.append(flow([
            ("name", scalar(name)), ("enthalpy", real(h["h298_kJ_mol"])),
            ("polarisability", real(p["alpha_A3"]) if p else None), ("dipole", real(p["dipole_D"]) if p else None),
            ("meaning", quoted(row["meaning"]) if row["meaning"] else None), ("source", key)]))
    return lines


def count(name, element):
    found = re.findall(r"(He|Si|Na|Mg|Fe|[HCNOS])(\d*)", name.replace("(ads)", "").rstrip("+-"))
    return sum(int(n or 1) for e, n in found if e == element)


def compositions(elements, ices, sources):
    """`atoms`, and `ices`: inherited ice whose element totals equal those of `atoms`."""
    total = {r["element"]: float(r["metal_poor_gas"]) for r in elements}
    atoms = [("H2", 0.5)]
    for element in ("He", "C", "N", "O", "S", "Si", "Na", "Mg", "Fe"):
        ion = "" if element in ("He", "N", "O") else "+"
        atoms.append((element + ion, total[element]))
    # Relative to water ice. NCO is the anion OCN- in the ice and booked as HNCO; SO2 is left out: tentative,
    # and with 0.3 percent of the water it alone would hold three to four times all sulfur of this set.
    ratio = {r["species"]: float(r["low_mass"]) / 100 for r in ices if re.fullmatch(r"[\d.]+", r["low_mass"])}
    ratio["HNCO"] = ratio.pop("NCO")
    del ratio["SO2"]
    per_water = {e: sum(v * count(k, e) for k, v in ratio.items()) for e in "HCNOS"}
    # All oxygen is bound: O in ices + O of the gas CO that takes the carbon left over + SiO.
    water = (total["O"] - total["Si"] - total["C"]) / (per_water["O"] - per_water["C"])
    frozen = [(k + "(ads)", float("%.9g" % (v * water))) for k, v in ratio.items()]
    held = {e: sum(v * count(k, e) for k, v in frozen) for e in "HCNOS"}
    frozen += [("H2S(ads)", total["S"] - held["S"]), ("SiO(ads)", total["Si"])]
    frozen += [(e + "(ads)", total[e]) for e in ("Na", "Mg", "Fe")]
    held["H"] += 2 * (total["S"] - held["S"])
    gas = [("H2", (1 - held["H"]) / 2), ("He", total["He"]),
           ("CO", total["C"] - held["C"]), ("N2", (total["N"] - held["N"]) / 2)]

    def line(name, key, note, pairs):
        return flow([("name", name), ("source", key), ("note", quoted(note)),
                     ("abundances", flow([(k, real("%.9g" % v)) for k, v in pairs]))])
    return [
        line("atoms", sources.add("graedel1982+lee1998"), "metal-poor gas set (recalled): H2 and atoms or atomic ions", atoms),
        line("ices", sources.add("oberg2011"), "inherited cloud: low-mass protostar ices with the element totals of "
             "`atoms`; remaining C as CO gas, remaining N as N2 gas, remaining S as H2S ice, metals frozen out", gas + frozen),
    ]


# ---------------------------------------------------------------- the file

def main(folder, output):
    report = collections.defaultdict(list)
    report["rows"] = collections.Counter()
    sources = Sources(table(folder, "references.csv"))
    species = table(folder, "species.csv")
    gas = table(folder, "gas_reactions.csv")
    make_changes(gas)
    enthalpy = {r["species"]: r for r in table(folder, "enthalpy.csv")}
    h298 = {name: float(r["h298_kJ_mol"]) for name, r in enthalpy.items()}
    polar = {r["species"]: r for r in table(folder, "polarisability_dipole.csv")}
    others = ("photo.csv", "cosmic.csv", "binding.csv", "surface_reactions.csv", "photodesorption.csv")
    photo, cosmic, binding, surface, desorbed = (table(folder, name) for name in others)
    used = [r for r in binding if r["default"] == "yes" or r["set"] == "D"]
    sources.learn([r["reference"] for r in gas] +
                  [r["source"] for rows in (photo, cosmic, used, surface, enthalpy.values()) for r in rows], gas)
    frozen = [r["species"] for r in species if r["ice"] == "yes" and r["species"] != "H2"]
    ions = [r["species"] for r in species if r["charge"] == "1"]

    groups = [("species", species_lines(species, enthalpy, polar, sources)),
              ("compositions", compositions(table(folder, "elements.csv"), table(folder, "initial_ices.csv"), sources)),
              ("shielding", shielding_lines(table(folder, "co_shielding.csv"), sources))]
    groups += gas_groups(gas, sources, report).items()
    fields = table(folder, "photo_fields.csv")
    groups += [("light", light_lines(photo, fields, Estimate(photo, fields, enthalpy), sources, report)),
               ("cosmic", cosmic_lines(cosmic, sources)),
               ("ices", ice_lines(frozen, binding, desorbed, sources, report)),
               ("surface", surface_lines(surface, sources, report))]
    neutralised = neutralisation_lines(ions, gas, h298, sources, report)
    formation = flow([("at_100K", "3.0e-17"), ("slope", "0.5"), ("source", sources.add("jura1975"))])

    with open(output, "w", encoding="utf8", newline="\n") as f:
        f.write("# The standard network of frostclock. Layout and cautions: networks/README.md; decisions: networks/NOTES.md.\n"
                "# First written by tools/make-network/make_network.py; edited by hand, this file is the authority.\n"
                "network: standard\nlayout: 1\nabout: %s\n\nsources:\n" % quoted(
                    "gas and ice chemistry of H, He, C, N, O, S, Si, Na, Mg, Fe for planet-forming disks, 10-800 K"))
        for key, text in sources.used():
            f.write("  %s: %s\n" % (key, quoted(text)))
        f.write("\nspectra:\n")
        for name, T, _ in FIELDS:
            f.write("  %s: %s\n" % (name, quoted("black body of %d K, its energy flux between 91.2 and 200 nm equal to that "
                                                  "of the Draine field" % T)))
        for name, lines in groups:
            f.write("\n%s:\n" % name + "".join("  - %s\n" % line for line in lines))
        f.write("\ndust:\n  hydrogen_formation: %s\n  electron_sticking: 0.6\n  ion_sticking: 1.0\n  neutralisation:\n" % formation)
        f.write("".join("    - %s\n" % line for line in neutralised))

    print("entries: " + ", ".join("%s %d" % (n, len(v)) for n, v in groups))
    print("fact rows in the gas groups: %s, total %d" % (dict(report["rows"]), sum(report["rows"].values())))
    print("rows changed here: %s" % ", ".join([*CHANGED, *COLD_PIECES]))
    print("sources: %d; neutralisation lines: %d" % (len(sources.used()), report["neutralisation lines"]))
    for title in ("joints", "adds", "gas left out", "surface left out", "neutralisation", "near the limit",
                  "spectra estimated"):
        print("\n%s:" % title)
        for line in report[title]:
            print("  " + line)


if __name__ == "__main__":
    if len(sys.argv) != 3:
        raise SystemExit(__doc__)
    main(sys.argv[1], sys.argv[2])
