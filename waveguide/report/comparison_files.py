"""Writing the outputs of a comparison."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from waveguide.report.files import written

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.compare.result import ComparisonResult


def write_comparison(
    result: ComparisonResult, dataset: xr.Dataset, folder: Path, formats: Iterable[str]
) -> None:
    """Write a comparison in the formats a scenario asks for; "map" stands for the figures.

    Parameters
    ----------
    result : ComparisonResult
    dataset : xarray.Dataset
        See `waveguide.report.comparison_dataset`.
    folder : Path
        An existing folder.
    formats : iterable of {"csv", "netcdf", "geojson", "map"}
        A comparison has no geometry of its own, so nothing is written for "geojson".

    Raises
    ------
    InputError
        Where the files cannot be written.
    """
    with written():
        for name in formats:
            if name == "csv":
                from waveguide.report.comparison_text import write_comparison_csv

                write_comparison_csv(dataset, folder)
            elif name == "netcdf":
                dataset.to_netcdf(folder / "comparison.nc", engine="netcdf4")
                series_dataset(result).to_netcdf(folder / "records.nc", engine="netcdf4")
            elif name == "map":
                from waveguide.report.comparison_figure import write_comparison_figures

                write_comparison_figures(result, folder)


def series_dataset(result: ComparisonResult) -> xr.Dataset:
    """The prepared records, each on its own axis of time.

    Parameters
    ----------
    result : ComparisonResult

    Returns
    -------
    xarray.Dataset
        One variable and one coordinate of times for each record, numbered in the order met.
    """
    import xarray as xr

    records = {
        series.name: series
        for pair in result.pairs for series in (pair.first, pair.second)
    } | {event.series.name: event.series for event in result.events}
    variables, times = {}, {}
    for number, series in enumerate(records.values(), start=1):
        units = {"temperature": "degree_Celsius", "alongshore velocity": "m s-1"}
        variables[f"record_{number}"] = (
            (f"time_{number}",), series.values,
            {"long_name": f"{series.quantity} at {series.name}, band-passed",
             "units": units.get(series.quantity, "m"), "comment": "; ".join(series.notes),
             "depth_m": series.depth, "longitude": series.position[0],
             "latitude": series.position[1]},
        )
        times[f"time_{number}"] = series.times.astype("datetime64[ns]")
    dataset = xr.Dataset(variables, times, {"Conventions": "CF-1.11"})
    for name in times:
        dataset[name].attrs.update(standard_name="time", long_name="time (UTC)")
        dataset[name].encoding.update(
            units="days since 1970-01-01 00:00:00", dtype="f8", _FillValue=np.nan
        )
    return dataset
