"""The arrivals as a NetCDF file that follows the CF conventions."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    import xarray as xr


def write_netcdf(dataset: xr.Dataset, folder: Path) -> None:
    """Write ``arrivals.nc``, NetCDF-4 by CF-1.11.

    CF allows no texts in a coordinate variable, so the names of the targets are stored as the
    label ``target_name``; ``xarray.open_dataset(path).set_index(target="target_name")`` brings
    the selection by name back.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals that pass :func:`waveguide.schema.check`.
    folder : Path
    """
    stored = dataset.copy().reset_index("target").rename_vars(target="target_name")
    for name in ("front_date", "time"):
        stored[name].attrs["units_metadata"] = "leap_seconds: none"  # section 4.4
    encoding = {str(name): _encoding(variable) for name, variable in stored.variables.items()}
    stored.to_netcdf(folder / "arrivals.nc", engine="netcdf4", encoding=encoding)


def _encoding(variable: xr.Variable) -> dict[str, Any]:
    if variable.dtype.kind == "M":
        fill = None if variable.dims == ("time",) else np.nan  # none in a coordinate
        return {"units": "days since 1970-01-01 00:00:00", "dtype": "f8", "_FillValue": fill}
    if variable.dtype.kind == "f":
        return {"_FillValue": np.nan}
    return {}
