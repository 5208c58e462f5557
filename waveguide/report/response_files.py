"""Writing the outputs of a forced response."""

from __future__ import annotations

import csv
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.csv_files import cell
from waveguide.report.files import written
from waveguide.report.response_dataset import RESPONSE

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.forcing.result import ResponseResult


def write_response(
    result: ResponseResult, dataset: xr.Dataset, folder: Path, formats: Iterable[str]
) -> None:
    """Write a response in the formats a scenario asks for; "map" stands for the figures.

    Parameters
    ----------
    result : ResponseResult
    dataset : xarray.Dataset
        As declared in `RESPONSE`.
    folder : Path
        An existing folder.
    formats : iterable of {"csv", "netcdf", "geojson", "map"}
        A response has no geometry of its own, so nothing is written for "geojson".

    Raises
    ------
    InputError
        Where the files cannot be written.
    """
    with written():
        for name in formats:
            if name == "csv":
                write_response_csv(dataset, folder)
            elif name == "netcdf":
                write_series(dataset, folder / "response.nc")
                write_ways(result, dataset, folder / "along_guide.nc")
            elif name == "map":
                from waveguide.report.response_figure import write_response_figures

                write_response_figures(result, dataset, folder)


def write_response_csv(dataset: xr.Dataset, folder: Path) -> None:
    """Write ``sea_level.csv``, ``responses.csv`` and ``stretches.csv``.

    Parameters
    ----------
    dataset : xarray.Dataset
    folder : Path
    """
    row = [name for name, v in RESPONSE.items() if v.dims == ("target", "mode")]
    part = [name for name, v in RESPONSE.items() if v.dims == ("stretch",)]
    part = [name for name in part if name not in ("stretch_target", "stretch_mode")]
    _write(folder / "sea_level.csv", _series_rows(dataset))
    _write(folder / "responses.csv", _response_rows(dataset, row))
    _write(folder / "stretches.csv", _stretch_rows(dataset, part))


def _write(path: Path, rows: Iterator[list[Any]]) -> None:
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerows([cell(value) for value in row] for row in rows)


def _series_rows(dataset: xr.Dataset) -> Iterator[list[Any]]:
    """One column for each target and mode, and one for the sum (m)."""
    header, columns = ["time"], []
    for t, target in enumerate(dataset["target"].values):
        for m, mode in enumerate(dataset["mode"].values):
            header.append(f"{target} mode {mode} (m)")
            columns.append(dataset["sea_level"].values[t, m])
        header.append(f"{target} (m)")
        columns.append(dataset["total_sea_level"].values[t])
    yield header
    for k, moment in enumerate(dataset["time"].values):
        yield [moment, *(column[k] for column in columns)]


def _response_rows(dataset: xr.Dataset, names: list[str]) -> Iterator[list[Any]]:
    places = ["target_longitude", "target_latitude"]
    yield ["target", *places, "mode", *names]
    for t, target in enumerate(dataset["target"].values):
        for m, mode in enumerate(dataset["mode"].values):
            place = [dataset[name].values[t] for name in places]
            yield [target, *place, mode, *(dataset[name].values[t, m] for name in names)]


def _stretch_rows(dataset: xr.Dataset, names: list[str]) -> Iterator[list[Any]]:
    yield ["target", "mode", *names]
    for row in range(dataset.sizes["stretch"]):
        which = [dataset[f"stretch_{dim}"].values[row] for dim in ("target", "mode")]
        head = [dataset["target"].values[which[0]], dataset["mode"].values[which[1]]]
        yield [*head, *(dataset[name].values[row] for name in names)]


def write_series(dataset: xr.Dataset, path: Path) -> None:
    """Write the series as a CF file of the feature type timeSeries.

    Parameters
    ----------
    dataset : xarray.Dataset
    path : Path
        Sea level of each mode is a variable of its own, since the data of a time series have
        the dimensions of station and time alone.
    """
    import xarray as xr

    dims = ("station", "time")
    variables: dict[str, Any] = {
        "station_name": (
            "station", dataset["target"].values.astype(str),
            {"cf_role": "timeseries_id", "long_name": "name of the target"},
        ),
    }
    for m, mode in enumerate(dataset["mode"].values):
        variables[f"sea_level_mode_{mode}"] = (
            dims, dataset["sea_level"].values[:, m],
            {"long_name": f"sea level driven by the wind in mode {mode}", "units": "m"},
        )
    for name in ("total_sea_level", "dynamic_height", "thermocline_deepening"):
        variables[name] = (dims, dataset[name].values, RESPONSE[name].attributes())
    coordinates = {
        "time": ("time", dataset["time"].values, {"standard_name": "time"}),
        "lon": ("station", dataset["target_longitude"].values,
                RESPONSE["target_longitude"].attributes()),
        "lat": ("station", dataset["target_latitude"].values,
                RESPONSE["target_latitude"].attributes()),
    }
    stored = xr.Dataset(variables, coordinates, {**dataset.attrs, "featureType": "timeSeries"})
    _store(stored.set_coords("station_name"), path)


def write_ways(result: ResponseResult, dataset: xr.Dataset, path: Path) -> None:
    """Write forcing and response along the main way to every target.

    Parameters
    ----------
    result : ResponseResult
    dataset : xarray.Dataset
    path : Path
    """
    import xarray as xr

    columns: dict[str, list[Any]] = {name: [] for name in _WAY}
    for mode, answer in result.answers.items():
        network = result.networks[mode]
        for i, found in enumerate(answer.targets):
            if found.way is None:
                continue
            count = found.way.node.size
            for name, value in {
                "way_target": np.full(count, i), "way_mode": np.full(count, mode),
                "way_lon": network.lon[found.way.node], "way_lat": network.lat[found.way.node],
                "way_distance": found.way.distance, "way_delay": found.way.delay / 86400.0,
                "way_stress": found.way.stress, "way_sea_level": found.way.sea_level,
            }.items():  # fmt: skip
                columns[name].append(value)
    variables = {
        name: (
            ("place", "time") if name in ("way_stress", "way_sea_level") else ("place",),
            np.concatenate(parts).astype(np.int32 if name in _WHOLE else np.float32), _WAY[name],
        )
        for name, parts in columns.items()
    }
    time = {"time": ("time", result.time, {"standard_name": "time"})}
    names = {"target_name": ("target", dataset["target"].values.astype(str))}
    _store(xr.Dataset({**variables, **names}, time, dataset.attrs), path)


_WHOLE = ("way_target", "way_mode")

_WAY: dict[str, dict[str, str]] = {
    "way_target": {"long_name": "index of the target the place is on the way to"},
    "way_mode": {"long_name": "mode number"},
    "way_lon": {"standard_name": "longitude", "units": "degrees_east"},
    "way_lat": {"standard_name": "latitude", "units": "degrees_north"},
    "way_distance": {"long_name": "way to the target", "units": "m"},
    "way_delay": {"long_name": "time to the target", "units": "day"},
    "way_stress": {"long_name": "stress in the direction of travel", "units": "Pa"},
    "way_sea_level": {"long_name": "sea level driven by the wind in the mode", "units": "m"},
}


def _store(dataset: xr.Dataset, path: Path) -> None:
    """Write a dataset, compressed, its times in days."""
    encoding: dict[str, dict[str, Any]] = {}
    for name, variable in dataset.variables.items():
        if variable.dtype.kind == "M":
            encoding[str(name)] = {"units": "days since 1970-01-01 00:00:00", "dtype": "f8",
                                   "_FillValue": None}
        elif variable.dtype.kind == "f":
            encoding[str(name)] = {"zlib": True, "complevel": 4, "_FillValue": np.nan}
    for name in ("lon", "lat"):
        if name in dataset.variables:
            encoding[name] = {"_FillValue": None}
    dataset.to_netcdf(path, engine="netcdf4", encoding=encoding)
