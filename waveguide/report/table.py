"""The arrivals as a table for the terminal."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterable
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.budget import budget_line, budget_text
from waveguide.report.caution_text import cautions_text
from waveguide.report.instruments import instruments_text
from waveguide.report.layout import WIDTH, filled
from waveguide.report.routes import legs_of, routes_of
from waveguide.report.sums import SumOfModes, shares_text, sum_of_modes
from waveguide.report.text import columns, pad, plain
from waveguide.report.ways import guided_legs

if TYPE_CHECKING:
    from waveguide.stored import Stored

_ABSENT = "–"

_AT_ONCE = "at once"
"""In place of a speed where most of the way is quasi-simultaneous."""

_NOTE = (
    "at once: most of the way is quasi-simultaneous. Below its critical frequency a coast that "
    "leads\n         poleward has no wave to follow; the front still has ∫ds/c, and little comes "
    "with it."
)


_SUM_NOTE = (
    "sum: each mode is told as if all of the signal were in it; a gauge sees their sum, here with "
    "the shares that a lasting wind raises at the source:"
)


def table(dataset: Stored, budget: bool = False) -> str:
    """What a person wants to read: rows, routes and cautions.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals that pass :func:`waveguide.schema.check`.
    budget : bool
        Also tell where the energy goes on every leg.

    Returns
    -------
    str
        Lines of at most about 110 columns, without colours or control characters.
    """
    rows = [(t, m) for t in range(dataset.sizes["target"]) for m in range(dataset.sizes["mode"])]
    parts = [_heading(dataset), _rows(dataset, rows), _routes(dataset, rows)]
    parts.append(instruments_text(dataset))
    if budget:
        parts.append(budget_text(dataset))
    parts.append(cautions_text(dataset))
    return "\n\n".join(part for part in parts if part)


def _heading(dataset: Stored) -> str:
    attributes = dataset.attrs
    place = _position(attributes["source_longitude"], attributes["source_latitude"])
    amplitude = attributes["event_amplitude_m"]
    height = f"{amplitude:g} m" if math.isfinite(amplitude) else "amplitude unknown"
    event = (
        f"Event   {plain(attributes['event_name']) or 'unnamed'}, at {place}, from "
        f"{attributes['event_start'][:16].replace('T', ' ')} UTC, "
        f"{attributes['event_duration_days']:g} days, {height}"
    )
    waves = f"Waves   dominant period {attributes['period_days']:g} days"
    ocean = f"Ocean   {attributes['ocean']}"
    return "\n".join([plain(attributes["title"], WIDTH), filled(event, 8), waves, ocean])


def _position(lon: float, lat: float) -> str:
    east, north = "E" if lon >= 0.0 else "W", "N" if lat >= 0.0 else "S"
    return f"{abs(lat):.2f}°{north} {abs(lon):.2f}°{east}"


def _rows(dataset: Stored, rows: list[tuple[int, int]]) -> str:
    """The table itself: a heading, a line for each target and mode, and one for their sum."""
    show = _columns(dataset)
    lines = [("Target", *(top for top, _, _ in show), "Status"), ("", *(u for _, u, _ in show), "")]
    summed = False
    for target, mode in rows:
        name = plain(dataset["target"].values[target], 28)
        status = plain(dataset["status"].values[target, mode], 28)
        lines.append((name, *(cell(target, mode) for _, _, cell in show), status))
        total = sum_of_modes(dataset, target) if mode == rows[-1][1] else None
        if total is not None:
            peak = f"peak {np.datetime_as_string(total.date, unit='h').replace('T', ' ')} h"
            lines.append((name, *(_sum_cell(total, top, unit) for top, unit, _ in show), peak))
            summed = True
    padded = [_filled_column(list(cells), 0 < k <= len(show))
              for k, cells in enumerate(zip(*lines, strict=True))]  # fmt: skip
    text = ["  ".join(cells).rstrip() for cells in zip(*padded, strict=True)]
    rule = "─" * max(columns(line) for line in text)
    notes = [_NOTE] if any(_quasi_simultaneous(dataset, *row) for row in rows) else []
    if summed:
        notes.append(filled(f"{_SUM_NOTE} {shares_text(dataset)}.", 9))
    return "\n".join([*text[:2], rule, *text[2:], *notes])


def _columns(dataset: Stored) -> list[tuple[str, str, Callable[[int, int], str]]]:
    """Heading, unit and cells of the columns between target and status."""
    metres = np.isfinite(dataset["amplitude_m"].values).any()
    return [
        ("Mode", "", lambda t, m: str(int(dataset["mode"].values[m]))),
        ("Front", "(days)", _column(dataset, "front_time_days", ".2f")),
        ("Half", "(days)", _column(dataset, "half_height_time_days", ".2f")),
        ("Peak", "(days)", _column(dataset, "peak_time_days", ".2f")),
        ("Front", "(UTC)", _date(dataset)),
        ("Speed", "(m/s)", _speed(dataset)),
        ("Path", "(km)", _column(dataset, "path_length_km", ".0f")),
        ("Peak", "ratio", _column(dataset, "peak_ratio", ".3g")),
        *([("Peak", "(m)", _column(dataset, "amplitude_m", ".3f"))] if metres else []),
    ]


def _sum_cell(total: SumOfModes, top: str, unit: str) -> str:
    """What the line of the sum has in a column; fronts and routes belong to modes."""
    told = {
        "Mode": "sum", "Peak (days)": f"{total.peak_time:.1f}",
        "Peak ratio": f"{total.peak_ratio:.3g}", "Peak (m)": f"{total.metres:.3f}",
    }  # fmt: skip
    return told.get(f"{top} {unit}".strip(), "")


def _speed(dataset: Stored) -> Callable[[int, int], str]:
    """The mean speed, or that there is none to speak of."""
    number = _column(dataset, "mean_speed_m_s", ".2f")
    return lambda t, m: _AT_ONCE if _quasi_simultaneous(dataset, t, m) else number(t, m)


def _quasi_simultaneous(dataset: Stored, target: int, mode: int) -> bool:
    """Whether legs of which most is below the critical frequency are most of the way."""
    routes = routes_of(dataset, target, mode)
    legs = guided_legs(dataset, routes[0]) if routes else []
    length = dataset["leg_length_km"].values[legs]
    at_once = dataset["leg_quasi_simultaneous"].values[legs] > 0
    return bool(length[at_once].sum() > 0.5 * length.sum())


def _column(dataset: Stored, name: str, style: str) -> Callable[[int, int], str]:
    values = dataset[name].values
    return lambda t, m: format(values[t, m], style) if np.isfinite(values[t, m]) else _ABSENT


def _date(dataset: Stored) -> Callable[[int, int], str]:
    values = dataset["front_date"].values

    def cell(target: int, mode: int) -> str:
        moment = values[target, mode]
        if np.isnat(moment):
            return _ABSENT
        return str(np.datetime_as_string(moment, unit="m")).replace("T", " ")

    return cell


def _filled_column(cells: list[str], right: bool = False) -> list[str]:
    width = max(columns(cell) for cell in cells)
    return [pad(cell, width, right) for cell in cells]


def _routes(dataset: Stored, rows: Iterable[tuple[int, int]]) -> str:
    """By which legs the front comes, one paragraph for each route."""
    lines = [
        filled(f"  {_row_name(dataset, *row)}, {_route(dataset, route)}", 6)
        for row in rows
        for route in routes_of(dataset, *row)
    ]
    return "\n".join(["Routes", *lines]) if lines else ""


def _route(dataset: Stored, route: int) -> str:
    """The earliest route by its legs, a further one by what tells it from the others."""
    kind = plain(dataset["route_kind"].values[route])
    via = plain(dataset["route_via"].values[route], 200)
    time = float(dataset["route_front_time_days"].values[route])
    ratio = float(dataset["route_amplitude_ratio"].values[route])
    head = f"{kind} via {via}" if via else kind
    told = f"{time:.2f} days, amplitude ratio {ratio:.3g}"
    if kind != "earliest":
        return f"{head}: {told}"
    return f"{head}: {_legs(dataset, route)} ({told}; {budget_line(dataset, route)})"


def _legs(dataset: Stored, route: int) -> str:
    """Legs of one kind that follow each other are told as one."""
    kinds = itertools.groupby(legs_of(dataset, route), key=lambda i: dataset["leg_kind"].values[i])
    return " → ".join(_run(dataset, kind, list(legs)) for kind, legs in kinds)


def _run(dataset: Stored, kind: str, legs: list[int]) -> str:
    """Legs of one kind, with their critical periods where most of them is quasi-simultaneous."""
    length = dataset["leg_length_km"].values[legs]
    text = f"{plain(kind)} {length.sum():.0f} km"
    at_once = dataset["leg_quasi_simultaneous"].values[legs] > 0
    if not length[at_once].sum() > 0.5 * length.sum():
        return text
    periods = dataset["leg_critical_period_days"].values[legs][at_once]
    low, high = f"{periods.min():.0f}", f"{periods.max():.0f}"
    days = low if low == high else f"{low} to {high}"
    return f"{text} (quasi-simultaneous, critical period {days} days)"


def _row_name(dataset: Stored, target: int, mode: int) -> str:
    name: Any = dataset["target"].values[target]
    return f"{plain(name, 28)} mode {int(dataset['mode'].values[mode])}"
