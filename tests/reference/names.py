"""Species names: composition, charge, mass. Knows nothing of reactions."""

import re
from collections import Counter

# Standard atomic weights (IUPAC, abridged), amu.
WEIGHTS = {
    "H": 1.008, "D": 2.014, "He": 4.0026, "C": 12.011, "N": 14.007, "O": 15.999, "F": 18.998,
    "Na": 22.990, "Mg": 24.305, "Al": 26.982, "Si": 28.085, "P": 30.974, "S": 32.06,
    "Cl": 35.45, "Ar": 39.95, "K": 39.098, "Ca": 40.078, "Ti": 47.867, "Fe": 55.845, "Ni": 58.693,
}
ELECTRON_WEIGHT = 5.48579909065e-4
ADSORBED = "(ads)"
ICE_TOTAL = "ices(total)"


def is_adsorbed(name):
    return name.endswith(ADSORBED)


def gas_partner(name):
    return name.removesuffix(ADSORBED)


def grain(charge):
    """Name of a grain of that charge: dust, dust+, dust--, ..."""
    return "dust" + ("+" if charge > 0 else "-") * abs(charge)


def is_grain(name):
    return re.fullmatch(r"dust(\++|-*)", name) is not None


def charge(name):
    if name == "e-":
        return -1
    tail = re.search(r"[+-]*$", gas_partner(name)).group()
    return tail.count("+") - tail.count("-")


def composition(name):
    """Atoms by element."""
    if name == "e-" or is_grain(name):
        return Counter()
    formula = gas_partner(name).rstrip("+-")
    formula = re.sub(r"^[a-z0-9]+-(?=[A-Z])", "", formula)
    parts = re.findall(r"([A-Z][a-z]?)(\d*)", formula)
    if "".join(a + b for a, b in parts) != formula or not parts:
        raise ValueError(f"cannot read the formula of {name}")
    atoms = Counter()
    for element, count in parts:
        if element not in WEIGHTS:
            raise ValueError(f"unknown element {element} in {name}")
        atoms[element] += int(count or 1)
    return atoms


def mass(name):
    """Mass in amu; ions weigh what their neutrals weigh."""
    if name == "e-":
        return ELECTRON_WEIGHT
    return sum(WEIGHTS[e] * n for e, n in composition(name).items())


def atom_count(name):
    return sum(composition(name).values())


def split(side):
    """One side of an equation: `A + B` to ["A", "B"]."""
    return [part.strip() for part in side.split(" + ") if part.strip()]


def parse_change(text):
    """`A + B -> C (on dust)` to (["A", "B"], ["C"]); a remark after a blank in brackets is dropped."""
    text = re.sub(r"\s\([^()]*\)\s*$", "", text)
    left, right = text.split("->")
    return split(left.strip()), split(right.strip())
