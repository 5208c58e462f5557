"""Writing the outputs of a lookout."""

from __future__ import annotations

import json
from collections.abc import Iterable
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from waveguide.report.document import plain_value
from waveguide.report.files import written
from waveguide.report.lookout_text import window_rows, write_lookout_csv

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.compare.lookout_result import LookoutResult


def write_lookout(result: LookoutResult, folder: Path, formats: Iterable[str]) -> None:
    """Write a lookout in the formats a scenario asks for; "map" stands for the figures.

    Parameters
    ----------
    result : LookoutResult
    folder : Path
        An existing folder.
    formats : iterable of {"csv", "netcdf", "geojson", "map"}

    Raises
    ------
    InputError
        Where the files cannot be written.
    """
    with written():
        for name in formats:
            _write(result, folder, name)


def _write(result: LookoutResult, folder: Path, name: str) -> None:
    if name == "csv":
        write_lookout_csv(result, folder)
    elif name == "geojson":
        document = json.dumps(windows_geojson(result), indent=1, allow_nan=False)
        (folder / "windows.geojson").write_text(document, encoding="utf-8")
    elif name == "map" and result.diagrams:
        from waveguide.report.lookout_figure import write_diagrams

        write_diagrams(result, folder)
    elif name == "netcdf" and result.subset is not None:
        result.subset.to_netcdf(folder / "subset.nc", engine="netcdf4")
        diagrams_dataset(result).to_netcdf(folder / "distance_time.nc", engine="netcdf4")


def windows_geojson(result: LookoutResult) -> dict[str, object]:
    """The windows as straight lines from their start to their end, with what is expected there.

    Parameters
    ----------
    result : LookoutResult

    Returns
    -------
    dict
    """
    features = []
    for window, row in zip(result.windows, window_rows(result), strict=True):
        (west, south), (east, north) = window.start_position, window.end_position
        crosses = abs(east - west) > 180.0  # RFC 7946 cuts lines at the date line
        geometry: dict[str, object] = {
            "type": "LineString", "coordinates": [[west, south], [east, north]]
        }
        if crosses:
            side = 180.0 if west > 0.0 else -180.0
            whole = abs(side - west) + abs(-side - east)
            middle = south + (north - south) * abs(side - west) / whole
            geometry = {"type": "MultiLineString", "coordinates": [
                [[west, south], [side, middle]], [[-side, middle], [east, north]],
            ]}
        properties = {key: plain_value(value) for key, value in row.items()}
        features.append({"type": "Feature", "geometry": geometry, "properties": properties})
    return {"type": "FeatureCollection", "features": features}


def diagrams_dataset(result: LookoutResult) -> xr.Dataset:
    """Distance–time diagrams of all routes, numbered in the order of the table.

    Parameters
    ----------
    result : LookoutResult

    Returns
    -------
    xarray.Dataset
    """
    import xarray as xr

    days = result.diagrams[0].days
    moments = result.start + np.rint(86400.0 * days).astype("timedelta64[s]")
    dataset = xr.Dataset(
        coords={"time": ("time", moments.astype("datetime64[ns]"), {"standard_name": "time"})},
        attrs={"Conventions": "CF-1.11", "title": f"distance-time diagrams: {result.title}"},
    )
    for number, diagram in enumerate(result.diagrams, start=1):
        axis = f"distance_{number}"
        dataset[axis] = (axis, diagram.distance, {"units": "m", "long_name": "along the route"})
        dataset[f"diagram_{number}"] = (("time", axis), diagram.values, {
            "long_name": f"{result.variable}, mode {diagram.line.mode} to {diagram.line.target}"
        })
        dataset[f"travel_{number}"] = (axis, diagram.travel, {
            "units": "day", "long_name": "predicted time of the front after the start of the event"
        })
    dataset["time"].encoding.update(units="days since 1970-01-01 00:00:00", dtype="f8")
    return dataset
