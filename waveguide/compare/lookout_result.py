"""Everything that a lookout finds, and the subset of the model output that it keeps."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from waveguide.compare.cells import GuideCells
from waveguide.compare.model_grid import ModelField
from waveguide.compare.phase_speed import PhaseSpeed
from waveguide.compare.route_lines import RouteLine
from waveguide.compare.windows import Window
from waveguide.constants import SECONDS_PER_DAY

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Diagram:
    """Distance–time diagram of one route.

    Attributes
    ----------
    line : RouteLine
    days : ndarray, shape (nt,)
        After the start of the event.
    distance : ndarray, shape (nbin,)
        Along the route (m).
    values : ndarray, shape (nt, nbin)
        NaN where there are none.
    travel : ndarray, shape (nbin,)
        Predicted time of the front (days after the start of the event).
    speed : PhaseSpeed
    """

    line: RouteLine
    days: Array
    distance: Array
    values: Array
    travel: Array
    speed: PhaseSpeed


@dataclass(frozen=True)
class LookoutResult:
    """Windows, and what the model shows in them.

    Attributes
    ----------
    name, title : str
        Of the scenario.
    start : numpy.datetime64
        Of the event, UTC.
    duration : float
        Of the event (days).
    amplitude : float
        Of sea level at the source (m), NaN where unknown.
    windows : tuple of Window
    variable : str
        Name, and units in brackets, of the model's variable; empty without a model.
    diagrams : tuple of Diagram
    subset : xarray.Dataset or None
        Cells and times worth looking at.
    chunks : int
        Chunks of the output that were read.
    notes : tuple of str
    arrivals : xarray.Dataset
        Of the scenario, with the cautions and validity numbers of every answer.
    """

    name: str
    title: str
    start: np.datetime64
    duration: float
    amplitude: float
    windows: tuple[Window, ...]
    variable: str
    diagrams: tuple[Diagram, ...]
    subset: xr.Dataset | None
    chunks: int
    notes: tuple[str, ...]
    arrivals: xr.Dataset


def cell_windows(
    cells: GuideCells, lines: Sequence[RouteLine], windows: Sequence[Window]
) -> tuple[Array, Array]:
    """When the signal of any mode passes each cell.

    Parameters
    ----------
    cells : GuideCells
    lines : sequence of RouteLine
        Those of the cells.
    windows : sequence of Window

    Returns
    -------
    opens, closes : ndarray, shape (ncell,)
        Days after the start of the event.
    """
    opens, closes = np.empty(cells.bin_distance.size), np.empty(cells.bin_distance.size)
    for r, line in enumerate(lines):
        part = slice(int(cells.first_bin[r]), int(cells.first_bin[r + 1]))
        travel = np.interp(cells.bin_distance[part], line.distance, line.time) / SECONDS_PER_DAY
        tail = max(w.closes - w.opens for w in windows if w.mode == line.mode)
        early = np.maximum(0.1 * travel, 1.0)
        opens[part] = np.maximum(travel - early, 0.0)
        closes[part] = travel + early + tail
    table = cells.weights.tocsr()
    starts = table.indptr[:-1]
    first = np.minimum.reduceat(opens[table.indices], starts)
    last = np.maximum.reduceat(closes[table.indices], starts)
    return first, last


def subset_dataset(
    field: ModelField, times: NDArray[np.datetime64], days: Array, values: NDArray[np.float32],
    cells: GuideCells, spans: tuple[Array, Array], attributes: dict[str, Any],
) -> xr.Dataset:
    """The cells and times worth looking at, as a dataset of CF.

    Parameters
    ----------
    field : ModelField
    times : ndarray of datetime64, shape (nt,)
    days : ndarray, shape (nt,)
        After the start of the event.
    values : ndarray, shape (nt, ncell)
    cells : GuideCells
    spans : (opens, closes)
        From `cell_windows`.
    attributes : dict
        Global attributes.

    Returns
    -------
    xarray.Dataset
        Of dimensions (time, cell); cells without a value at any time are left out.
    """
    import xarray as xr

    inside = (days[:, None] >= spans[0]) & (days[:, None] <= spans[1])
    shown = np.where(inside, values, np.nan)
    wet = np.isfinite(shown).any(axis=0)
    name = str(field.data.name or "value")
    row, column = np.divmod(cells.cell[wet], field.lon.shape[1])
    kept = {
        key: value for key, value in field.data.attrs.items()
        if key in ("units", "long_name", "standard_name")
    }
    dataset = xr.Dataset(
        {name: (("time", "cell"), shown[:, wet], kept)},
        {
            "time": ("time", times.astype("datetime64[ns]"), {"standard_name": "time"}),
            "lon": ("cell", field.lon.ravel()[cells.cell[wet]],
                    {"units": "degrees_east", "standard_name": "longitude"}),
            "lat": ("cell", field.lat.ravel()[cells.cell[wet]],
                    {"units": "degrees_north", "standard_name": "latitude"}),
            "row": ("cell", row, {"long_name": "row of the cell in the model's grid, from 0"}),
            "column": ("cell", column,
                       {"long_name": "column of the cell in the model's grid, from 0"}),
            "distance_off": ("cell", cells.distance_off[wet],
                             {"units": "m", "long_name": "distance from the guide"}),
        },
        attributes,
    )
    dataset[name].encoding.update(zlib=True, complevel=1, dtype="float32", _FillValue=np.nan)
    dataset["time"].encoding.update(units="days since 1970-01-01 00:00:00", dtype="f8")
    return dataset
