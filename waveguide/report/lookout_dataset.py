"""Windows of a lookout and the speeds measured in model output, as one Dataset."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.attributes import software_version
from waveguide.report.lookout_text import route_row, window_rows
from waveguide.schema import CAUTION, Variable, assemble

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.compare.lookout_result import LookoutResult

_WINDOW, _ROUTE = ("window",), ("route",)


def _number(dims: tuple[str, ...], long_name: str, units: str) -> Variable:
    return Variable(dims, "number", long_name, units)


def _date(long_name: str) -> Variable:
    return Variable(_WINDOW, "date", long_name, None, "time")


WINDOWS: dict[str, Variable] = {
    "mode": Variable(_WINDOW, "integer", "mode number", "1"),
    "kind": Variable(_WINDOW, "text", "coast or equator, along which the signal runs"),
    "from_longitude": _number(_WINDOW, "longitude where the stretch begins", "degrees_east"),
    "from_latitude": _number(_WINDOW, "latitude where the stretch begins", "degrees_north"),
    "to_longitude": _number(_WINDOW, "longitude where the stretch ends", "degrees_east"),
    "to_latitude": _number(_WINDOW, "latitude where the stretch ends", "degrees_north"),
    "from_distance_km": _number(_WINDOW, "distance along the route to its beginning", "km"),
    "to_distance_km": _number(_WINDOW, "distance along the route to its end", "km"),
    "opens": _date("first time to look (UTC)"),
    "closes": _date("last time to look (UTC)"),
    "opens_days": _number(_WINDOW, "first time to look, after the start of the event", "day"),
    "closes_days": _number(_WINDOW, "last time to look, after the start of the event", "day"),
    "trapping_width_km": _number(_WINDOW, "distance off the guide that the signal reaches", "km"),
    "amplitude_ratio": _number(_WINDOW, "amplitude per amplitude at the source", "1"),
    "sea_level_m": _number(_WINDOW, "expected sea level, NaN where the event's is unknown", "m"),
    "quantity": Variable(_WINDOW, "text", "what shows the signal best"),
    "depth_m": _number(_WINDOW, "depth at which it does", "m"),
    "isopycnal_displacement_m": _number(_WINDOW, "expected there, upward positive", "m"),
}
"""Stretches of coast and equator, and when to look there."""

SPEEDS: dict[str, Variable] = {
    "route_target": Variable(_ROUTE, "text", "target of the route"),
    "route_mode": Variable(_ROUTE, "integer", "mode number", "1"),
    "predicted_speed_m_s": _number(_ROUTE, "mean phase speed of theory", "m s-1"),
    "measured_speed_m_s": _number(_ROUTE, "mean phase speed in the output", "m s-1"),
    "measured_speed_low_m_s": _number(_ROUTE, "lower end of its 95 % interval", "m s-1"),
    "measured_speed_high_m_s": _number(_ROUTE, "upper end of its 95 % interval", "m s-1"),
    "semblance": _number(_ROUTE, "how well the route lines up, 0 to 1", "1"),
    "chance": _number(_ROUTE, "share of noise without direction that does as well", "1"),
    "length_km": _number(_ROUTE, "length of the route with values", "km"),
    "verdict": Variable(_ROUTE, "text", "consistent, faster, slower or not resolvable"),
    "reason": Variable(_ROUTE, "text", "why"),
}
"""Routes in the model output; none without it."""


def lookout_dataset(result: LookoutResult) -> xr.Dataset:
    """Windows, and speeds where a model was looked at.

    Parameters
    ----------
    result : LookoutResult

    Returns
    -------
    xarray.Dataset
        As declared in `WINDOWS` and `SPEEDS`.
    """
    routes = [route_row(diagram) for diagram in result.diagrams]
    for row in routes:
        row["route_target"], row["route_mode"] = row.pop("target"), row.pop("mode")
    values = _columns(window_rows(result), WINDOWS) | _columns(routes, SPEEDS)
    return assemble(values, {
        "Conventions": "CF-1.11",
        "title": result.title,
        "scenario": result.name,
        "event_start": str(result.start),
        "variable": result.variable,
        "notes": list(result.notes),
        "source": f"waveguide {software_version()}",
        "history": f"waveguide lookout {result.name}",
        "caution": CAUTION,
    }, WINDOWS | SPEEDS)


def _columns(rows: list[dict[str, Any]], table: dict[str, Variable]) -> dict[str, Any]:
    """Rows as one array for each variable; None, which JSON knows, is NaN."""
    return {
        name: np.array([np.nan if row[name] is None else row[name] for row in rows])
        for name in table
    }
