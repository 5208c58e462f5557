"""The arrivals and the legs of their routes as CSV, for a spreadsheet."""

from __future__ import annotations

import csv
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from waveguide.report.document import plain_value
from waveguide.report.routes import legs_of
from waveguide.report.text import plain
from waveguide.schema import ARRIVALS

if TYPE_CHECKING:
    import xarray as xr

_ROW = [name for name, v in ARRIVALS.items() if v.dims == ("target", "mode")]
_PLACE = ["target_longitude", "target_latitude"]
_ROUTE = ["route_kind", "route_via"]
_LEG = [name for name, v in ARRIVALS.items() if v.dims == ("leg",) and name != "leg_route"]
_INSTRUMENT = [
    name for name, v in ARRIVALS.items()
    if v.dims == ("instrument",) and name not in ("instrument_target", "instrument_mode")
]

_FORMULA = ("=", "+", "-", "@")
"""First characters by which a spreadsheet takes a text for a formula."""


def write_csv(dataset: xr.Dataset, folder: Path) -> None:
    """Write ``arrivals.csv``, a line for each target and mode, and ``legs.csv``, one for each leg.

    Where targets are moorings ``moorings.csv`` has a line for each instrument and mode. Missing
    numbers are empty; a text that a spreadsheet would run as a formula starts with an apostrophe.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals that pass :func:`waveguide.schema.check`.
    folder : Path
    """
    write_rows(folder / "arrivals.csv", ["target", *_PLACE, "mode", *_ROW], _arrival_rows(dataset))
    write_rows(folder / "legs.csv", ["target", "mode", *_ROUTE, "leg", *_LEG], _leg_rows(dataset))
    if dataset.sizes["instrument"]:
        header = ["target", "mode", *(name.removeprefix("instrument_") for name in _INSTRUMENT)]
        write_rows(folder / "moorings.csv", header, _instrument_rows(dataset))


def write_rows(path: Path, header: Sequence[str], rows: Iterable[Sequence[Any]]) -> None:
    """Write a heading and rows, made safe for a spreadsheet.

    Parameters
    ----------
    path : Path
    header : sequence of str
    rows : iterable of sequence
        Numbers, dates and texts.
    """
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow([cell(name) for name in header])
        writer.writerows([cell(value) for value in row] for row in rows)


def cell(value: Any) -> Any:
    """A value as a spreadsheet reads it: empty where missing, no text that runs as a formula."""
    value = plain_value(value)
    if not isinstance(value, str):
        return "" if value is None else value
    text = plain(value, limit=4000)
    return f"'{text}" if text.startswith(_FORMULA) else text


def _arrival_rows(dataset: xr.Dataset) -> Iterator[list[Any]]:
    for t, target in enumerate(dataset.variables["target"].values):
        for m, mode in enumerate(dataset.variables["mode"].values):
            place = [dataset.variables[name].values[t] for name in _PLACE]
            yield [target, *place, mode, *(dataset.variables[name].values[t, m] for name in _ROW)]


def _leg_rows(dataset: xr.Dataset) -> Iterator[list[Any]]:
    for route in range(dataset.sizes["route"]):
        head = [
            dataset.variables[dim].values[dataset.variables[f"route_{dim}"].values[route]]
            for dim in ("target", "mode")
        ]
        head += [dataset.variables[name].values[route] for name in _ROUTE]
        for number, leg in enumerate(legs_of(dataset, route), start=1):
            yield [*head, number, *(dataset.variables[name].values[leg] for name in _LEG)]


def _instrument_rows(dataset: xr.Dataset) -> Iterator[list[Any]]:
    for i in range(dataset.sizes["instrument"]):
        whose = [
            dataset.variables[dim].values[dataset.variables[f"instrument_{dim}"].values[i]]
            for dim in ("target", "mode")
        ]
        yield [*whose, *(dataset.variables[name].values[i] for name in _INSTRUMENT)]
