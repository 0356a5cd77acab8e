"""Reads a case and its table of cells. All conditions leave here in cgs units and K."""

import csv
import re
from dataclasses import dataclass, field
from pathlib import Path

from . import names, rates
from .network import read_network, read_yaml

REPOSITORY = Path(__file__).resolve().parents[2]
UNITS = {
    "1": 1.0, "": 1.0, "K": 1.0, "mag": 1.0, "Draine": 1.0,
    "cm^-3": 1.0, "m^-3": 1.0e-6, "cm^-2": 1.0, "m^-2": 1.0e-4, "cm^2": 1.0, "m^2": 1.0e4, "s^-1": 1.0, "yr^-1": 1.0 / rates.YEAR,
    "au": 1.495978707e13, "cm": 1.0, "m": 100.0, "mm": 0.1, "um": 1.0e-4, "nm": 1.0e-7,
    "s": 1.0, "yr": rates.YEAR, "kyr": 1.0e3 * rates.YEAR, "Myr": 1.0e6 * rates.YEAR, "Gyr": 1.0e9 * rates.YEAR,
    "cm/s": 1.0, "m/s": 100.0, "km/s": 1.0e5,
}

# Mean abundances per H of the gas towards a field's source, where neither table nor case says more
# (defaults documented in cases/README.md).
ASSUMED_COLUMNS = {"H2": 0.5, "CO": 5.0e-5, "N2": 1.0e-5, "C": 1.0e-5}


def quantity(value, default_unit="1"):
    """`3 Myr` or a bare number in `default_unit`, to cgs."""
    if isinstance(value, (int, float)):
        return float(value) * UNITS[default_unit]
    number, _, unit = str(value).strip().partition(" ")
    return float(number) * UNITS[unit.strip() or default_unit]


@dataclass
class Field:
    name: str
    spectrum: str = "draine"
    attenuated: bool = False
    strength: float = 0.0
    a_v: float = 0.0
    columns: dict = field(default_factory=dict)  # N(X) given or assumed
    shields: dict = field(default_factory=dict)  # factors given outright


@dataclass
class Cell:
    n_h: float
    t_gas: float
    t_dust: float
    zeta_cosmic: float
    zeta_xray: float
    zeta_nuclides: float
    dust_area: float
    grain_radius: float
    fields: list

    @property
    def grain_abundance(self):
        return self.dust_area / (3.141592653589793 * self.grain_radius**2)


@dataclass
class Case:
    path: Path
    network_path: Path
    raw: dict
    cells: list
    fields: list

    # the options of `grains` and `gas`, with their defaults
    @property
    def grains(self):
        given = self.raw.get("grains") or {}
        ratio = {"atoms": 0.35, "molecules": 0.5} | (given.get("hop_ratio") or {})
        return {"active_layers": 2.0, "desorbing_layers": 1.0, "lit_layers": 2.0, "leaving_share": 0.01,
                "charge_states": 1, "binding": "water"} | given | {
                "site_density": quantity(given.get("site_density", 1.5e15)), "hop_ratio": ratio}

    @property
    def colliders(self):
        value = (self.raw.get("gas") or {}).get("colliders")
        return value if isinstance(value, (int, float)) else None

    @property
    def turbulence(self):
        return quantity((self.raw.get("gas") or {}).get("turbulence", "0.2 km/s"), "cm/s")

    def network(self):
        return read_network(self.network_path, self.grains["leaving_share"], self.grains["charge_states"])

    def times(self):
        """Snapshot times in s, 0 first."""
        clock = self.raw["clock"]
        if "at" in clock:
            return [0.0] + [quantity(t, "yr") for t in clock["at"]]
        until, first = quantity(clock["until"], "yr"), quantity(clock.get("first", 1.0), "yr")
        out, k = [0.0], 0
        while first * 10.0 ** (k / clock.get("per_decade", 10)) < until * (1.0 - 1.0e-9):
            out.append(first * 10.0 ** (k / clock.get("per_decade", 10)))
            k += 1
        return out + [until]

    def start(self, network, cell):
        """Abundances at the beginning, by species."""
        given = self.raw["start"].get("abundances")
        if given is None:
            wanted = self.raw["start"]["composition"]
            given = next(c["abundances"] for c in network.raw["compositions"] if c["name"] == wanted)
        x = {name: 0.0 for name in network.species}
        for name, value in given.items():
            if name not in x:
                raise ValueError(f"start: {name} is not a species of the network")
            x[name] = float(value)
        if "e-" not in given:
            x["e-"] = sum(names.charge(n) * v for n, v in given.items())
        x["dust"] = cell.grain_abundance
        x[names.ICE_TOTAL] = sum(v for n, v in x.items() if names.is_adsorbed(n))
        return x


def read_case(path, table=None, network=None):
    path = Path(path)
    raw = read_yaml(path)
    if network is None:
        named = raw["network"]
        network = path.parent / named if str(named).endswith(".yaml") else REPOSITORY / "networks" / f"{named}.yaml"
    disk = raw["disk"]
    if table is None:
        if "table" not in disk:
            raise ValueError("a recipe: give the cells with --cells FILE.csv")
        table = path.parent / disk["table"]
    fields = [Field(f["name"], f.get("spectrum", "draine"), bool(f.get("attenuated", False)))
              for f in disk.get("fields") or [{"name": "sky"}]]
    cells = read_table(table, fields, ASSUMED_COLUMNS | (disk.get("assumed_columns") or {}))
    return Case(path, Path(network), raw, cells, fields)


def read_table(path, fields, assumed):
    lines = [line for line in Path(path).read_text(encoding="utf-8").splitlines()
             if line.strip() and not line.lstrip().startswith("#")]
    rows = list(csv.reader(lines))
    header = []
    for cell in rows[0]:
        match = re.fullmatch(r"\s*(\S+)(?:\s*\[(.*)\])?\s*", cell)
        name, unit = match.group(1), (match.group(2) or "1").strip()
        if unit not in UNITS:
            raise ValueError(f"{path}: unit [{unit}] of {name} is not known")
        header.append((name, UNITS[unit]))
    return [_cell({n: float(v) * u for (n, u), v in zip(header, row)}, fields, assumed) for row in rows[1:]]


def _cell(row, fields, assumed):
    area = row.get("dust_area", rates.STANDARD_DUST_AREA)
    lit = []
    for plan in fields:
        f = Field(plan.name, plan.spectrum, plan.attenuated, row[f"UV_{plan.name}"], row[f"AV_{plan.name}"])
        for species, share in assumed.items():
            f.columns[species] = share * rates.COLUMN_PER_MAG * f.a_v * (rates.STANDARD_DUST_AREA / area)
        for kind, into in (("N", f.columns), ("shield", f.shields)):
            for suffix in ("", f"_{plan.name}"):  # the one for this field comes last and wins
                for name, value in row.items():
                    match = re.fullmatch(rf"{kind}_([A-Za-z0-9]+){suffix}", name)
                    if match:
                        into[match.group(1)] = value
        lit.append(f)
    return Cell(row["n_H"], row["T_gas"], row.get("T_dust", row["T_gas"]), row["zeta_cosmic"],
                row.get("zeta_xray", 0.0), row.get("zeta_nuclides", 0.0), area,
                row.get("grain_radius", 1.0e-5), lit)
