"""How a value, a key or a note is written in a network file.

Used by make_network.py only. Everything here turns one value into text that YAML 1.1 and YAML 1.2
readers take for the same thing; it reads no table and decides nothing about chemistry.
"""
import re

YAML_11_BOOLEANS = {"y", "n", "yes", "no", "on", "off", "true", "false", "null", "~"}

# Words of the table notes that the layout itself already says, or that can be said shorter.
SHORTER = [
    ("M = all heavy colliders (H2, He, H); rate = k0[M]kinf/(k0[M]+kinf) with broadening Fc", ""),
    ("rate = k[M][X], low-pressure limit, M = H2, He, H", "low-pressure limit"),
    ("a in cm6 s-1", ""),
    ("line process: multiply by the self-shielding function", "line process"),
    ("line process: multiply by the table in co_shielding.csv", "line process"),
    ("line process: self-shielding, see h2_shielding.md", "line process"),
    ("branching after branching from", "branching from"),
    ("300 K value kept, temperature dependence of dipole capture", "300 K value, slope of dipole capture"),
    ("literature range not stated, taken as 300 K upward", "range not stated, taken as 300 K up"),
    ("total agrees with the planetary-ion data set within 30 percent at 300 K", "two collections agree to 30 percent at 300 K"),
    ("total agrees within 30 percent at 300 K with a second collection", "two collections agree to 30 percent at 300 K"),
    ("reverse of the literature direction, from detailed balance", "reverse, from detailed balance"),
    ("reverse of the listed exothermic reaction, from detailed balance", "reverse, from detailed balance"),
]


def real(x):
    """A float with a dot and a signed exponent: YAML 1.1 and 1.2 readers both take it for one."""
    value = float(x)
    if value == 0.0 or 1e-3 <= abs(value) < 1e6:
        return repr(value)
    text = next(t for t in ("%.*e" % (digits, value) for digits in range(1, 18)) if float(t) == value)
    mantissa, _, exponent = text.partition("e")
    return "%se%+d" % (mantissa, int(exponent))


def whole(x):
    """Integers without a dot, everything else as `real`: for temperatures and energies in K."""
    return "%d" % float(x) if float(x) == int(float(x)) else real(x)


def quoted(text):
    return '"%s"' % text.replace("\\", "\\\\").replace('"', '\\"')


def scalar(text):
    """Plain where both YAML versions read a string, quoted elsewhere."""
    if text.lower() in YAML_11_BOOLEANS or not re.fullmatch(r"[A-Za-z][A-Za-z0-9 +().>-]*", text):
        return quoted(text)
    return text


def flow(pairs):
    return "{" + ", ".join("%s: %s" % (k if "_" in k else scalar(k), v) for k, v in pairs if v is not None) + "}"


def shorten(note):
    for long, short in SHORTER:
        note = note.replace(long, short)
    return "; ".join(part for part in re.split(r";\s*", note) if part)


def noted(tag, note):
    note = shorten(note)
    return quoted("%s: %s" % (tag, note) if tag and note else tag or note) if tag or note else None
