"""The standard network against values computed by other code when the fact tables were reviewed.

A failure means that this reader or the network file understands the tables otherwise.
"""

import csv
import os
from collections import Counter
from pathlib import Path

import pytest

from . import names, rates, section9
from .cells import REPOSITORY
from .coefficients import power_law
from .network import read_yaml

HERE = Path(__file__).parent
STANDARD = Path(os.environ.get("FROSTCLOCK_STANDARD", REPOSITORY / "networks" / "standard.yaml"))
pytestmark = pytest.mark.skipif(not STANDARD.exists(), reason=f"{STANDARD} is not there yet")


@pytest.fixture(scope="module")
def raw():
    return section9.gas_only(STANDARD)


def test_strip_takes_only_ices_surface_and_charge(raw):
    whole = read_yaml(STANDARD)
    assert set(whole) - set(raw) == {"ices", "surface"}
    assert set(raw["dust"]) == {"hydrogen_formation", "electron_sticking"}
    assert [c["name"] for c in raw["compositions"]] == ["atoms"]
    assert all(raw[g] == whole[g] for g in ("species", "sources", "gas", "capture", "falloff", "three_body", "third_body", "light", "cosmic"))


def test_gas_abundances_of_section_9(raw):
    """All 128 values within 1 percent (they agree to their last digit)."""
    differences = section9.compare(section9.values(raw))
    assert len(differences) == 128
    assert differences[0][0] < section9.TOLERANCE, differences[:3]


def test_section_9_sees_a_wrong_reading(raw):
    """Shielding the secondary-photon rows of CO and N2 as well is not how the table was made: C is 9 times lower at 500 K."""
    differences = section9.compare(section9.values(raw, secondary_shielded=True))
    assert differences[0][1] == "C" and differences[0][0] > 0.5


def lines():
    text = (HERE / "section3_table.csv").read_text().splitlines()
    return [row for row in csv.reader(line for line in text if not line.startswith("#"))][1:]


@pytest.mark.parametrize("row", lines(), ids=lambda row: row[0])
def test_total_coefficients_of_section_3(raw, row):
    """A hair above each temperature: where ranges meet, the table used the upper one (H2CO + OH jumps by 12 percent at 300 K)."""
    pair = Counter(names.split(row[0]))
    for t, expected in zip((10.0, 50.0, 300.0, 800.0), map(float, row[1:])):
        t *= 1.0 + 1.0e-9
        total = 0.0
        for line in raw["gas"]:
            if Counter(names.parse_change(line["change"])[0]) == pair:
                total += power_law(t, line)
        for line in raw["capture"]:
            if Counter(names.parse_change(line["change"])[0]) == pair:
                at = rates.evaluation_temperature(t, *line["valid"], line.get("below", "extend"))
                total += 0.0 if at is None else rates.capture(at, line["langevin"], line["x_300K"])
        assert total == pytest.approx(expected, rel=6e-4, abs=1e-300)
