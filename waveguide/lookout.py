"""Where and when to look in model output for the signal of a scenario."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from waveguide.compare.cells import GuideCells, guide_cells
from waveguide.compare.extraction import Extraction, extract
from waveguide.compare.lookout_result import (
    Diagram,
    LookoutResult,
    cell_windows,
    subset_dataset,
)
from waveguide.compare.model_grid import ModelField, model_field
from waveguide.compare.phase_speed import phase_speed
from waveguide.compare.route_lines import RouteLine, route_lines
from waveguide.compare.windows import Window, windows
from waveguide.constants import SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.pipeline import arrivals
from waveguide.report.attributes import software_version
from waveguide.scenario import Scenario
from waveguide.schema import CAUTION

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]
Progress = Callable[[str], None]


def lookout(
    scenario: Scenario, model: xr.Dataset | None = None, progress: Progress | None = None
) -> LookoutResult:
    """Windows of place and time for the signal, and what model output shows in them.

    Parameters
    ----------
    scenario : Scenario
    model : xarray.Dataset, optional
        Output with CF coordinates, on a regular or curvilinear grid, backed by dask, Zarr or files
        and larger than memory if it likes; see `waveguide.compare.model_grid.open_model`. Without
        it only the windows are told.
    progress : callable, optional
        Told the name of each stage as it begins.

    Returns
    -------
    LookoutResult

    Raises
    ------
    InputError
        If the model has no such variable, times or places.
    """
    say = progress or (lambda stage: None)
    answers = arrivals(scenario, progress)
    lines = route_lines(answers)
    if not lines:
        raise InputError(
            "lookout: every target lies at the source, so there is no way to look along; give "
            "targets further away"
        )
    found = tuple(windows(lines, scenario.event.duration_days, scenario.waves.period_days))
    start = np.datetime64(scenario.event.start.replace(tzinfo=None), "s")
    height = scenario.event.amplitude_m
    basics = (
        scenario.name, scenario.title, start, scenario.event.duration_days,
        float("nan") if height is None else height, found,
    )
    if model is None:
        return LookoutResult(*basics, "", (), None, 0, (), answers)
    field = model_field(model, scenario.lookout.variable, scenario.lookout.depth_m)
    days = (field.times - start) / np.timedelta64(1, "s") / SECONDS_PER_DAY
    first, last, note = wanted_times(field, days, found)
    say("finding the cells on the guide")
    cells = guide_cells(lines, field.lon, field.lat)
    say("going through the model output")
    taken = extract(field.data, first, last, cells, _counter(say))
    say("measuring phase speeds")
    span = days[first:last]
    spans = cell_windows(cells, lines, found)
    subset = subset_dataset(
        field, field.times[first:last], span, taken.values, cells, spans, _attributes(scenario)
    )
    units = str(field.data.attrs.get("units", ""))
    return LookoutResult(
        *basics, f"{field.data.name} ({units})" if units else str(field.data.name),
        diagrams(lines, cells, taken, span), subset, taken.chunks, (*field.notes, *note),
        answers,
    )


def wanted_times(
    field: ModelField, days: Array, found: Sequence[Window]
) -> tuple[int, int, list[str]]:
    """First time of the model within any window, the one after the last, and what is missing.

    Parameters
    ----------
    field : ModelField
    days : ndarray, shape (nt,)
        After the start of the event.
    found : sequence of Window

    Returns
    -------
    first, last : int
    notes : list of str

    Raises
    ------
    InputError
        If the model ends before the event or starts after all windows, or has fewer than three
        times in them.
    """
    closes = max(window.closes for window in found)
    span = f"{field.times[0]} to {field.times[-1]}"
    if days[-1] < 0.0:
        raise InputError(
            f"--model: its times ({span}) end before the event starts; give the output that "
            "follows the event, or correct event.start"
        )
    if days[0] > closes:
        raise InputError(
            f"--model: its times ({span}) start after the last window has closed ({closes:.0f} "
            "days after the start of the event); give earlier output, or correct event.start"
        )
    step = float(np.median(np.diff(days))) if days.size > 1 else 1.0
    first = int(np.searchsorted(days, -step))
    last = int(np.searchsorted(days, closes + step))
    if last - first < 3:
        raise InputError(
            f"--model: {last - first} of its times lie in the windows; output every day or so is "
            "needed to follow a signal"
        )
    notes = []
    if days[0] > step:
        notes.append(f"the model starts {days[0]:.0f} days after the event")
    if days[-1] < closes - step:
        notes.append(
            f"the model ends {days[-1]:.0f} days after the start of the event; the last window "
            f"closes at {closes:.0f} days"
        )
    return first, last, notes


def diagrams(
    lines: Sequence[RouteLine], cells: GuideCells, taken: Extraction, days: Array
) -> tuple[Diagram, ...]:
    """Distance–time diagrams of all routes, with the speeds measured from them."""
    found = []
    for r, line in enumerate(lines):
        part = slice(int(cells.first_bin[r]), int(cells.first_bin[r + 1]))
        distance = cells.bin_distance[part]
        travel = np.interp(distance, line.distance, line.time) / SECONDS_PER_DAY
        values = taken.diagram[:, part]
        found.append(Diagram(
            line, days, distance, values, travel, phase_speed(values, days, distance, travel)
        ))
    return tuple(found)


def _counter(say: Progress) -> Callable[[int, int], None]:
    """Progress in tenths of the output."""
    told = [-1]

    def report(done: int, total: int) -> None:
        tenth = 10 * done // total
        if tenth > told[0]:
            told[0] = tenth
            say(f"going through the model output, {done} of {total} pieces")

    return report


def _attributes(scenario: Scenario) -> dict[str, str]:
    return {
        "Conventions": "CF-1.11",
        "title": f"cells and times worth looking at: {scenario.title}",
        "source": f"waveguide {software_version()}",
        "history": f"waveguide lookout {scenario.name}",
        "caution": CAUTION,
    }
