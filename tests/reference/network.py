"""Reads a network file (layout 1, YAML 1.2) and expands it to the ordered list of reactions.

Knows the layout and the order of the generated reactions, not the rate laws.
"""

from dataclasses import dataclass, field
from pathlib import Path

from ruamel.yaml import YAML

from . import names
from .thermo import read_thermo

REPOSITORY = Path(__file__).resolve().parents[2]
GAS_GROUPS = ("gas", "capture", "falloff", "three_body", "third_body", "light", "cosmic")


def read_yaml(path):
    """YAML 1.2 (so that NO is a molecule); duplicate keys are errors."""
    yaml = YAML(typ="safe", pure=True)
    yaml.version = (1, 2)
    return yaml.load(Path(path).read_text(encoding="utf-8"))


@dataclass
class Reaction:
    """One reaction: what it takes, what it makes, whose abundances its rate contains."""

    kind: str
    consumed: list
    products: list
    line: dict
    factors: list = field(default_factory=list)  # abundances of the rate law
    extra: dict = field(default_factory=dict)

    @property
    def change(self):
        return " + ".join(self.consumed) + " -> " + " + ".join(self.products)


@dataclass
class Network:
    gas: list
    ices: list  # lines
    reactions: list
    raw: dict
    charge_states: int
    thermo: dict = field(default_factory=dict)  # polynomials by species

    @property
    def species(self):
        grains = [names.grain(z) for z in range(-self.charge_states, self.charge_states + 1)]
        ices = [line["species"] + names.ADSORBED for line in self.ices]
        return self.gas + grains + ices + [names.ICE_TOTAL]

    def ice_line(self, adsorbed):
        wanted = names.gas_partner(adsorbed)
        for line in self.ices:
            if line["species"] == wanted:
                return line
        raise KeyError(f"{adsorbed} has no line in `ices`")

    def shielding(self, name):
        for line in self.raw.get("shielding", []):
            if line["name"] == name:
                return line
        raise KeyError(f"no shielding `{name}`")


def read_network(path, leaving_share=0.01, charge_states=1):
    raw = read_yaml(path)
    if raw["layout"] != 1:
        raise ValueError(f"{path}: layout {raw['layout']} is not known here")
    return expand(raw, leaving_share, charge_states, Path(path).parent)


def expand(raw, leaving_share=0.01, charge_states=1, folder=Path()):
    gas = [line["name"] for line in raw["species"]]
    ices = raw.get("ices") or []
    reactions = []
    for group in GAS_GROUPS:
        for line in raw.get(group) or []:
            consumed, products = names.parse_change(line["change"])
            reactions.append(Reaction(group, consumed, products, line, list(consumed)))
            if line.get("reversible", False):  # right behind its forward reaction
                reactions.append(Reaction("reverse", products, consumed, line, list(products), {"forward": group}))
    dust = raw.get("dust") or {}
    reactions += _hydrogen_formation(dust) + _charging(dust, charge_states)
    for line in ices:
        reactions += _ice(line)
    for line in raw.get("surface") or []:
        reactions += _surface(line, leaving_share)
    network = Network(gas, ices, reactions, raw, charge_states)
    if "thermo" in raw:
        built_in = raw["thermo"] == "standard"
        network.thermo = read_thermo(REPOSITORY / "networks/thermo.yaml" if built_in else folder / raw["thermo"])
    _check(network)
    return network


def _hydrogen_formation(dust):
    line = dust.get("hydrogen_formation")
    return [Reaction("hydrogen_formation", ["H", "H"], ["H2"], line, ["H"])] if line else []


def _charging(dust, n):
    if not dust:
        return []
    out = []
    for z in range(-n + 1, n + 1):
        out.append(Reaction("charging", ["e-", names.grain(z)], ["e-"], dict(dust), extra={"z": z}))
        out[-1].products = [names.grain(z - 1)]
        out[-1].extra |= {"projectile": "e-", "sticking": dust.get("electron_sticking", 0.6), "share": 1.0}
    for line in dust.get("neutralisation") or []:
        for z in range(-n, n):
            out.append(Reaction("charging", [line["ion"], names.grain(z)],
                                names.split(line["becomes"]) + [names.grain(z + 1)], line,
                                extra={"z": z, "projectile": line["ion"],
                                       "sticking": dust.get("ion_sticking", 1.0), "share": line["share"]}))
    for reaction in out:
        reaction.factors = list(reaction.consumed)
    return out


def _ice(line):
    gas = line["species"]
    ads = gas + names.ADSORBED
    out = [Reaction("accretion", [gas], [ads], line, [gas]),
           Reaction("thermal_desorption", [ads], [gas], line, [ads]),
           Reaction("cosmic_desorption", [ads], [gas], line, [ads])]
    for channel in line["photodesorption"]:
        out.append(Reaction("photodesorption", [ads], names.split(channel["products"]), channel, [ads]))
    return out


def _surface(line, leaving_share):
    consumed, products = names.parse_change(line["change"])
    share = line.get("share", 1.0)
    if not any(names.is_adsorbed(p) for p in products):
        return [Reaction("surface", consumed, products, line, list(consumed), {"share": share})]
    leaves = line.get("leaves", leaving_share)
    out = [Reaction("surface", consumed, products, line, list(consumed), {"share": share * (1.0 - leaves)})]
    if leaves > 0.0:
        gone = [names.gas_partner(p) for p in products]
        out.append(Reaction("surface", consumed, gone, line, list(consumed), {"share": share * leaves}))
    return out


def _check(network):
    """Elements, charge and names must match: an unbalanced network compares nothing."""
    known = set(network.species)
    for reaction in network.reactions:
        total = {}
        for sign, side in ((1, reaction.consumed), (-1, reaction.products)):
            for name in side:
                if name not in known:
                    raise ValueError(f"{reaction.change}: {name} is not a species of the network")
                for element, count in names.composition(name).items():
                    total[element] = total.get(element, 0) + sign * count
                total["charge"] = total.get("charge", 0) + sign * names.charge(name)
                total["grains"] = total.get("grains", 0) + sign * names.is_grain(name)
        if any(total.values()):
            raise ValueError(f"{reaction.change} is not balanced: {total}")
