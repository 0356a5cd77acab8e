"""Every planted error must make the comparison fail, and nothing else may.

The engine's side is played by this implementation, unspoilt; with FROSTCLOCK_COEFFICIENTS set to a
table the engine wrote for three_cells.yaml, by the engine. A planting that passes would mean that
`three_cells` does not exercise that law.
"""

import csv
import os
from pathlib import Path

import numpy as np
import pytest

from . import check, planted, rates
from .cells import read_case
from .integrate import integrate

HERE = Path(__file__).parent


@pytest.fixture(scope="module")
def case():
    return read_case(HERE / "three_cells.yaml")


@pytest.fixture(scope="module")
def engine(case):
    path = os.environ.get("FROSTCLOCK_COEFFICIENTS")
    if path:
        with open(path, newline="") as file:
            return list(csv.DictReader(file))
    return planted.rows(case)


def test_unspoilt_coefficients_agree(case, engine):
    found, compared = check.compare_coefficients(planted.rows(case), engine)
    assert not found and compared > 1500


@pytest.mark.parametrize("name", planted.IN_FUNCTIONS)
def test_planted_in_a_function(case, engine, name):
    with planted.planted(*planted.IN_FUNCTIONS[name]):
        found, _ = check.compare_coefficients(planted.rows(case), engine)
    assert found


@pytest.mark.parametrize("name", planted.IN_ROWS)
def test_planted_in_the_table(case, engine, name):
    spoilt = [dict(row) for row in engine]
    planted.IN_ROWS[name](spoilt)
    assert check.compare_coefficients(planted.rows(case), spoilt)[0]


def test_command_line_of_coefficients(case, tmp_path, capsys):
    """Exit status, and the spoilt reaction named."""
    path = tmp_path / "engine.csv"
    assert check.main(["dump", str(HERE / "three_cells.yaml"), str(path)]) == 0
    arguments = ["coefficients", str(HERE / "three_cells.yaml"), "--rust", str(path)]
    assert check.main(arguments) == 0
    path.write_text(path.read_text().replace("H3+ + CO,HCO+ + H2", "H3+ + CO,HCO+ + H + H"))
    assert check.main(arguments) == 1
    assert "H3+ + CO" in capsys.readouterr().out
    assert check.main(["coefficients", "missing.yaml", "--rust", str(path)]) == 2


# ---- abundances --------------------------------------------------------------------------------

def write_run(path, case):
    """A run file as the engine writes it, from this implementation."""
    import h5py

    network = case.network()
    times = np.array([t / rates.YEAR for t in case.times()])
    with h5py.File(path, "w") as file:
        file["time"] = times
        file["species"] = np.array(network.species, dtype=h5py.string_dtype())
        file["abundance"] = np.stack([integrate(case, network, cell, times * rates.YEAR) for cell in case.cells])


@pytest.fixture(scope="module")
def run(case, tmp_path_factory):
    path = tmp_path_factory.mktemp("run") / "three_cells.h5"
    write_run(path, case)
    return path


def test_unspoilt_abundances_agree(case, run):
    found, compared = check.abundances(case, run)
    assert not found and compared > 200
    assert check.main(["abundances", str(HERE / "three_cells.yaml"), str(run), "--only", "0"]) == 0


@pytest.mark.parametrize("name", planted.IN_STATE)
def test_planted_in_the_state(case, run, name):
    with planted.planted(*planted.IN_STATE[name]):
        assert check.abundances(case, run, {0})[0]


@pytest.mark.parametrize("name, cell", [
    ("a factor 2 in H2 formation", "2"), ("attraction and repulsion exchanged", "0"), ("no tunnelling", "0"),
    ("capture without the square root", "1"), ("extinction in place of its exponential", "1")])
def test_planted_in_a_function_shows_in_abundances(run, name, cell):
    with planted.planted(*planted.IN_FUNCTIONS[name]):
        assert check.main(["abundances", str(HERE / "three_cells.yaml"), str(run), "--only", cell]) == 1


def test_wrong_start_or_species_is_told(case, run, tmp_path):
    import shutil

    import h5py

    spoilt = tmp_path / "spoilt.h5"
    shutil.copy(run, spoilt)
    with h5py.File(spoilt, "r+") as file:
        file["abundance"][0, 0, case.network().species.index("CO(ads)")] *= 1.001
    assert "starts with CO(ads)" in check.abundances(case, spoilt, {0})[0][0].text
