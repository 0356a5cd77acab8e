"""Checks that a run file explains itself to readers that know nothing of frostclock.

Usage: python tests/support/xarray_reads.py RUN.h5     (needs xarray, h5netcdf, h5py)
If it fails, a user of Python would meet nameless axes, missing units or other values. The netCDF4
library is asked as well where it is installed.
"""

import importlib.util
import sys
import warnings

import h5py
import numpy as np
import xarray as xr


def by_h5py(path):
    """What the file holds, with the plainest reader there is."""
    with h5py.File(path) as file:
        abundance = file["abundance"]
        assert [axis[0].name for axis in abundance.dims] == ["/cell", "/time", "/species"]
        assert abundance.attrs["units"] == "1" and file["time"].attrs["units"] == "yr"
        assert file["radius"].attrs["units"] == "au" and file["radius"].dims[0][0].name == "/cell"
        # An unfinished cell is NaN: nobody takes a zero for an abundance.
        status = file["status"][:]
        unreached = np.isnan(abundance[:]).all(axis=2)
        assert not unreached[status == 0].any(), "a done cell without values"
        assert unreached[status != 0, -1].all(), "a cell not finished with values at the end"
        assert "title: " in file["provenance/case"].asstr()[()]
        return abundance[:], list(file["species"].asstr()[:]), file["time"][:]


def by_xarray(path, engine, raw, names, times):
    """The same through xarray: named dimensions, coordinates, units, and the same bits."""
    with xr.open_dataset(path, engine=engine) as run:
        abundance = run.abundance
        assert abundance.dims == ("cell", "time", "species"), abundance.dims
        assert {"cell", "time", "species", "radius", "height"} <= set(run.coords), run.coords
        assert list(run.species.values) == names
        assert run.time.dtype == "float64" and run.time.attrs["units"] == "yr"
        assert np.array_equal(run.time.values, times)
        units = {"n_H": "cm-3", "T_gas": "K", "T_dust": "K", "zeta_cosmic": "s-1", "abundance": "1"}
        for name, unit in units.items():
            assert run[name].attrs["units"] == unit and run[name].attrs["long_name"], name
        assert run.n_H.dims == ("cell",)
        assert run.status.attrs["flag_meanings"] == "done failed not_run"
        assert list(run.status.attrs["flag_values"]) == [0, 1, 2]
        number = np.isnan(raw)
        assert np.array_equal(number, np.isnan(abundance.values))
        assert (abundance.values.view("u8") == raw.view("u8"))[~number].all(), "other bits"
        by_name = abundance.sel(species=names[-1]).values
        assert np.array_equal(by_name, raw[:, :, -1], equal_nan=True)
        assert abundance.sel(time=times[-1]).dims == ("cell", "species")
    for group in ("work", "checks", "provenance"):
        with xr.open_dataset(path, engine=engine, group=group) as part:
            assert part.variables, group


def main(path):
    warnings.simplefilter("error")
    raw, names, times = by_h5py(path)
    engines = ["h5netcdf"]
    if importlib.util.find_spec("netCDF4"):
        engines.append("netcdf4")
    for engine in engines:
        by_xarray(path, engine, raw, names, times)
    print(f"{raw.shape[0]} cells x {raw.shape[1]} times x {raw.shape[2]} species by {', '.join(engines)}")


main(sys.argv[1])
