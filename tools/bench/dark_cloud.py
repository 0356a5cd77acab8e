#!/usr/bin/env python3
"""Compares the dark cloud with what is observed, for networks/DARK_CLOUD.md.

    python3 tools/bench/dark_cloud.py [table]      the table at the time of best fit, and the fit over time
    python3 tools/bench/dark_cloud.py variants     how the fit moves when a parameter or line is changed
    python3 tools/bench/dark_cloud.py doubtful     the same for the lines of networks/NOTES.md trusted least

Runs cases/dark-cloud.yaml with target/release/frostclock (build it first; the network is read from networks/standard.yaml,
not from the one built in). The time is that with most rows within a factor 10 (the figure of merit); among equals that of
the smallest root mean square of log10(computed / observed). Python 3 standard library only.
"""
import csv
import math
import pathlib
import re
import subprocess
import sys
import tempfile

TOP = pathlib.Path(__file__).resolve().parents[2]
EXE = TOP / "target/release/frostclock"
CASE = (TOP / "cases/dark-cloud.yaml").read_text()
CELL = (TOP / "cases/dark-cloud.csv").read_text()
NETWORK = (TOP / "networks/standard.yaml").read_text()
EARLIEST = 1.0e4            # yr; before, most ices do not exist yet


def observed():
    with open(TOP / "tools/bench/dark_cloud_observed.csv", newline="") as file:
        rows = csv.DictReader(line for line in file if not line.startswith("#"))
        return {r["species"]: (float(r["observed"]), r["per"]) for r in rows}


OBSERVED = observed()


def run(case=CASE, cell=CELL, network=NETWORK):
    """{time in yr: {species: n(X)/n_H}}."""
    with tempfile.TemporaryDirectory() as name:
        folder = pathlib.Path(name)
        (folder / "dark-cloud.csv").write_text(cell)
        (folder / "network.yaml").write_text(network)
        (folder / "case.yaml").write_text(case.replace("network: standard", "network: network.yaml"))
        subprocess.run([EXE, "--quiet", "run", folder / "case.yaml", "--output", folder / "run.h5"], check=True)
        subprocess.run([EXE, "--quiet", "history", folder / "run.h5", "--near", "1,0", "--species", ",".join([*OBSERVED, "H2"]),
                        "--csv", folder / "run.csv"], check=True, stdout=subprocess.DEVNULL)
        with open(folder / "run.csv", newline="") as file:
            rows = list(csv.DictReader(file))
    return {float(r["time [yr]"]): {k: float(v) for k, v in r.items() if k != "time [yr]"} for r in rows}


def computed(state, name):
    """In the terms of the observation. H2 stands for half of all hydrogen, which here it holds to 1e-4."""
    per = OBSERVED[name][1]
    return state[name] / {"H": 1.0, "H2": 0.5}.get(per, state.get(per, 1.0))


def ratios(state):
    return {name: computed(state, name) / OBSERVED[name][0] for name in OBSERVED}


def fit(state):
    """Root mean square of log10 of the ratios, and how many are within a factor 10."""
    logs = [math.log10(max(r, 1e-30)) for r in ratios(state).values()]
    return math.sqrt(sum(x * x for x in logs) / len(logs)), sum(abs(x) <= 1.0 for x in logs)


def best(history):
    """The time with most rows within a factor 10; among equals that of the smallest rms."""
    def merit(t):
        rms, within = fit(history[t])
        return -within, rms
    return min((t for t in history if t >= EARLIEST), key=merit)


def table():
    history = run()
    time = best(history)
    state = history[time]
    print(f"Best time {time:.3g} yr: rms {fit(state)[0]:.2f} dex, {fit(state)[1]} of {len(OBSERVED)} within a factor 10\n")
    print("| Species | computed | observed | per | ratio | within 10 |\n|---|---|---|---|---|---|")
    for name, ratio in ratios(state).items():
        wanted, per = OBSERVED[name]
        print(f"| {name} | {computed(state, name):.2e} | {wanted:.2e} | {per} | {ratio:.2g} | {'yes' if 0.1 <= ratio <= 10 else '**no**'} |")
    print("\n| Time, yr | rms, dex | within 10 |\n|---|---|---|")
    for wanted in (1e5, 2e5, 3.2e5, 5e5, 8e5, 1e6, 1.26e6, time, 2e6, 3.2e6, 5e6, 1e7):
        t = min(history, key=lambda t: abs(t - wanted))
        print(f"| {t:.3g} | {fit(history[t])[0]:.2f} | {fit(history[t])[1]} |")


def replaced(text, pattern, by):
    new, count = re.subn(pattern, by, text)
    if not count:
        raise SystemExit(f"nothing reads {pattern}")
    return new


def with_grains(text):
    return CASE + f"grains: {{{text}}}\n"


def start(**changes):
    """Network whose `atoms` have other abundances."""
    network = NETWORK
    for species, value in changes.items():
        network = replaced(network, r"(name: atoms,.*[ {]%s: )[-+.e0-9]+" % re.escape(species), r"\g<1>%s" % value)
    return network


def variants():
    return {
        "as it is": {},
        "H2 formation x 0.5": {"network": replaced(NETWORK, "at_100K: 3.0e-17", "at_100K: 1.5e-17")},
        "H2 formation x 0.1": {"network": replaced(NETWORK, "at_100K: 3.0e-17", "at_100K: 3.0e-18")},
        "leaving share 0": {"case": with_grains("leaving_share: 0.0")},
        "leaving share 0.05": {"case": with_grains("leaving_share: 0.05")},
        "hop ratio molecules 0.35": {"case": with_grains("hop_ratio: {atoms: 0.35, molecules: 0.35}")},
        "hop ratio atoms 0.5": {"case": with_grains("hop_ratio: {atoms: 0.5, molecules: 0.5}")},
        "hop ratio both 0.77": {"case": with_grains("hop_ratio: {atoms: 0.77, molecules: 0.77}")},
        "binding pure": {"case": with_grains("binding: pure")},
        "4 active layers": {"case": with_grains("active_layers: 4.0")},
        "sulfur x 10": {"network": start(**{"S+": "8.0e-7"})},
        "C/O 1.2 (O 1.0e-4)": {"network": start(O="1.0e-4")},
        "C/O 0.75 (O 1.6e-4)": {"network": start(O="1.6e-4")},
        "zeta x 4": {"cell": CELL.replace("1.3e-17", "5.2e-17")},
        "H + CO barrier 1500 K": {"network": replaced(NETWORK, r"(change: H\(ads\) \+ CO\(ads\) -> HCO\(ads\), barrier: )2500.0", r"\g<1>1500.0")},
        "O hop barrier 560 K (ratio 0.35)": {"network": replaced(NETWORK, "hop_barrier: 750", "hop_barrier: 560")},
    }


SHOWN = ["CO", "NH3", "HCN", "CN", "CS", "SO", "H2CO", "HC3N", "CH3OH", "H2O(ads)", "CO(ads)", "CO2(ads)", "CH3OH(ads)", "NH3(ads)", "CH4(ads)"]


def print_variants():
    print("| Variant | best time | rms | within 10 | " + " | ".join(SHOWN) + " |\n|" + "---|" * (4 + len(SHOWN)))
    for name, changes in variants().items():
        history = run(**changes)
        time = best(history)
        found = ratios(history[time])
        print(f"| {name} | {time:.2g} | {fit(history[time])[0]:.2f} | {fit(history[time])[1]} | "
              + " | ".join(f"{math.log10(max(found[s], 1e-30)):+.1f}" for s in SHOWN) + " |", flush=True)


DOUBTFUL = ("G0576 G0582 G1662 G2276 G2498 G1027 G0406 G0539 G1476 G1859 G1667 G2211 G2479 G2180 G1930 G1664 G1653 G1655 "
            "G0770 G2139").split()


def scaled(row, up):
    """The network with one line multiplied or divided by its own factor of uncertainty."""
    lines = NETWORK.split("\n")
    at = next(i for i, line in enumerate(lines) if f'note: "{row}' in line)
    factor = float(re.search(r"within: ([0-9.]+)", lines[at]).group(1)) ** (1 if up else -1)
    lines[at] = re.sub(r"at_300K: ([-+.e0-9]+)", lambda m: "at_300K: %.4e" % (float(m[1]) * factor), lines[at])
    return "\n".join(lines), factor


def print_doubtful():
    base = run()
    time = best(base)
    watched = [k for k in OBSERVED]
    print(f"At {time:.3g} yr, line times and over its factor: largest changes of the rows of the table above")
    for row in DOUBTFUL:
        moved = []
        for up in (True, False):
            network, factor = scaled(row, up)
            state = run(network=network)[time]
            changes = sorted(((computed(state, k) / computed(base[time], k), k) for k in watched), key=lambda c: -abs(math.log(c[0])))
            moved.append(", ".join(f"{k} x {r:.3g}" for r, k in changes[:2] if abs(math.log(r)) > 0.02) or "nothing by 2 percent")
        print(f"{row} (factor {max(factor, 1 / factor):.3g}): up {moved[0]}; down {moved[1]}", flush=True)


if __name__ == "__main__":
    match sys.argv[1:]:
        case [] | ["table"]:
            table()
        case ["variants"]:
            print_variants()
        case ["doubtful"]:
            print_doubtful()
        case _:
            raise SystemExit(__doc__)
