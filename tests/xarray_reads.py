"""Checks that a run file explains itself to readers that know nothing of frostclock.

Usage: python tests/xarray_reads.py RUN.h5     (needs xarray, h5netcdf, h5py, netCDF4)
If it fails, a user of Python would meet nameless axes, missing units or other values.
"""

import sys
import warnings

import h5py
import numpy as np
import xarray as xr


def main(path):
    warnings.simplefilter("error")
    with h5py.File(path) as file:
        raw = file["abundance"][:]
        assert [axis[0].name for axis in file["abundance"].dims] == ["/cell", "/time", "/species"]
        names = list(file["species"].asstr()[:])
    for engine in ("h5netcdf", "netcdf4"):
        with xr.open_dataset(path, engine=engine) as run:
            abundance = run.abundance
            assert abundance.dims == ("cell", "time", "species"), abundance.dims
            assert {"cell", "time", "species", "radius", "height"} <= set(run.coords)
            assert list(run.species.values) == names
            assert run.time.dtype == "float64" and run.time.attrs["units"] == "yr"
            assert abundance.attrs["units"] == "1" and run.n_H.attrs["units"] == "cm-3"
            assert run.status.attrs["flag_meanings"] == "done failed not_run"
            values = abundance.values.view("u8")
            number = np.isnan(raw)
            assert (values == raw.view("u8"))[~number].all() and number.sum() == np.isnan(abundance).sum()
            assert (run.status.values[number.all(axis=(1, 2))] != 0).all(), "a done cell without values"
            by_name = abundance.sel(species=names[-1]).values
            assert np.array_equal(by_name, raw[:, :, -1], equal_nan=True)
        for group in ("work", "checks", "provenance"):
            with xr.open_dataset(path, engine=engine, group=group) as part:
                assert part.variables
    print(f"{path}: {raw.shape[0]} cells x {raw.shape[1]} times x {raw.shape[2]} species read alike")


main(sys.argv[1])
