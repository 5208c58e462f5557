"""Writing the outputs of a plan."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from waveguide.report.files import written

if TYPE_CHECKING:
    import xarray as xr


def write_plan(dataset: xr.Dataset, folder: Path, formats: Iterable[str]) -> None:
    """Write ``plan.csv`` and ``plan.nc`` as far as a scenario asks for their formats.

    Parameters
    ----------
    dataset : xarray.Dataset
        See :mod:`waveguide.report.plan_dataset`.
    folder : Path
        An existing folder.
    formats : iterable of {"csv", "netcdf", "geojson", "map"}
        A plan has no geometry of its own beyond that of the arrivals.

    Raises
    ------
    InputError
        Where the files cannot be written.
    """
    with written():
        if "csv" in formats:
            from waveguide.report.plan_text import write_plan_csv

            write_plan_csv(dataset, folder)
        if "netcdf" in formats:
            _write_netcdf(dataset, folder / "plan.nc")


def _write_netcdf(dataset: xr.Dataset, path: Path) -> None:
    dates = {"units": "days since 1970-01-01 00:00:00", "dtype": "f8", "_FillValue": np.nan}
    encoding = {
        str(name): dates if variable.dtype.kind == "M" else {"_FillValue": np.nan}
        for name, variable in dataset.variables.items()
        if variable.dtype.kind in "Mf"
    }
    stored = dataset.copy()
    for name in ("target", "input", "quantity"):  # a text is no axis in CF
        stored = stored.reset_index(name).rename_vars({name: f"{name}_name"})
    stored.to_netcdf(path, engine="netcdf4", encoding=encoding)
