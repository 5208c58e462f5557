"""The arrivals as one JSON document."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.routes import legs_of, remarks_of, routes_of
from waveguide.report.sums import sum_of_modes
from waveguide.schema import ARRIVALS

if TYPE_CHECKING:
    from waveguide.stored import Stored

_ROW = [name for name, v in ARRIVALS.items() if v.dims == ("target", "mode")]
_INSTRUMENT = [
    name for name, v in ARRIVALS.items()
    if v.dims == ("instrument",) and name not in ("instrument_target", "instrument_mode")
]
_TAKEN = ("lost_rossby", "lost_friction", "lost_damping", "lost_scattering", "other_ways")
_EVENT = ("event_name", "event_start", "event_duration_days", "event_amplitude_m")
_HEAD = ("scenario", "title", "summary", "period_days", "ocean", "source", "data_sha256", "caution")


def document(dataset: Stored) -> dict[str, Any]:
    """The arrivals as nested dictionaries and lists that JSON can hold.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals that pass :func:`waveguide.schema.check`.

    Returns
    -------
    dict
        ``arrivals`` has one entry for each target and mode, reached or not, with the legs of the
        earliest route; ``alternatives`` has the further routes; ``sums`` the peak of all modes
        together at each target; then the event and what the answer was computed from. Missing
        numbers are None.
    """
    rows = [(t, m) for t in range(dataset.sizes["target"]) for m in range(dataset.sizes["mode"])]
    further = [route for row in rows for route in routes_of(dataset, *row)[1:]]
    head = {key: plain_value(dataset.attrs[key]) for key in _HEAD}
    event = {key.removeprefix("event_"): plain_value(dataset.attrs[key]) for key in _EVENT}
    event["position"] = [
        plain_value(dataset.attrs[f"source_{axis}"]) for axis in ("longitude", "latitude")
    ]
    return {
        "arrivals": [_arrival(dataset, *row) for row in rows],
        "alternatives": [_alternative(dataset, route) for route in further],
        "sums": _sums(dataset),
        "mode_share": [plain_value(share) for share in dataset["mode_share"].values],
        "event": event,
        **head,
    }


def _sums(dataset: Stored) -> list[dict[str, Any]]:
    """The peak of the sum of modes at every target that has one."""
    found = [(t, sum_of_modes(dataset, t)) for t in range(dataset.sizes["target"])]
    return [
        {
            "target": plain_value(dataset["target"].values[t]),
            "peak_time_days": plain_value(total.peak_time),
            "peak_date": plain_value(total.date),
            "peak_ratio": plain_value(total.peak_ratio),
            "amplitude_m": plain_value(total.metres),
        }
        for t, total in found if total is not None
    ]


def plain_value(value: Any) -> Any:
    """A number, date or text as JSON holds it: nine digits, ISO 8601 in UTC, None for missing."""
    if isinstance(value, np.generic):
        value = None if isinstance(value, np.datetime64) and np.isnat(value) else value
    if isinstance(value, np.datetime64):
        return f"{np.datetime_as_string(value, unit='s')}Z"
    if isinstance(value, np.integer):
        return int(value)
    if isinstance(value, float | np.floating):
        return float(f"{value:.9g}") if math.isfinite(value) else None
    return str(value) if isinstance(value, np.str_) else value


def _arrival(dataset: Stored, target: int, mode: int) -> dict[str, Any]:
    routes = routes_of(dataset, target, mode)
    return {
        **_identity(dataset, target, mode),
        **{name: plain_value(dataset.variables[name].values[target, mode]) for name in _ROW},
        "cautions": cautions_of(dataset, target, mode),
        "legs": _legs(dataset, routes[0]) if routes else [],
        "at_depth": _at_depth(dataset, target, mode),
    }


def cautions_of(dataset: Stored, target: int, mode: int) -> list[dict[str, Any]]:
    """Each caution of a row with its number, the most serious first.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays
        Arrivals, or a plan.
    target, mode : int
        Indices of the row, along ``target`` and along ``mode``.

    Returns
    -------
    list of dict
        With ``kind``, ``number`` and ``unit``.
    """
    return [
        {
            "kind": plain_value(dataset.variables["remark_kind"].values[i]),
            "number": plain_value(dataset.variables["remark_number"].values[i]),
            "unit": plain_value(dataset.variables["remark_unit"].values[i]),
        }
        for i in remarks_of(dataset, target, mode)
    ]


def _at_depth(dataset: Stored, target: int, mode: int) -> list[dict[str, Any]]:
    """What the instruments of a mooring see of a mode, one entry for each depth."""
    mine = (dataset.variables["instrument_target"].values == target) & (
        dataset.variables["instrument_mode"].values == mode
    )
    return [
        {
            name.removeprefix("instrument_"): plain_value(dataset.variables[name].values[i])
            for name in _INSTRUMENT
        }
        for i in np.flatnonzero(mine)
    ]


def _alternative(dataset: Stored, route: int) -> dict[str, Any]:
    target, mode = (
        int(dataset.variables[f"route_{dim}"].values[route]) for dim in ("target", "mode")
    )
    return {
        **_identity(dataset, target, mode),
        "kind": plain_value(dataset.variables["route_kind"].values[route]),
        "via": plain_value(dataset.variables["route_via"].values[route]),
        "front_time_days": plain_value(dataset.variables["route_front_time_days"].values[route]),
        "amplitude_ratio": plain_value(dataset.variables["route_amplitude_ratio"].values[route]),
        "path_length_km": plain_value(dataset.variables["route_length_km"].values[route]),
        "legs": _legs(dataset, route),
    }


def _identity(dataset: Stored, target: int, mode: int) -> dict[str, Any]:
    return {
        "target": plain_value(dataset.variables["target"].values[target]),
        "mode": plain_value(dataset.variables["mode"].values[mode]),
        "target_position": [
            plain_value(dataset.variables[f"target_{axis}"].values[target])
            for axis in ("longitude", "latitude")
        ],
    }


def _legs(dataset: Stored, route: int) -> list[dict[str, Any]]:
    return [_leg(dataset, leg) for leg in legs_of(dataset, route)]


def _leg(dataset: Stored, leg: int) -> dict[str, Any]:
    def value(name: str) -> Any:
        return plain_value(dataset.variables[f"leg_{name}"].values[leg])

    return {
        "kind": value("kind"),
        "from": [value("from_longitude"), value("from_latitude")],
        "to": [value("to_longitude"), value("to_latitude")],
        "length_km": value("length_km"),
        "time_days": value("time_days"),
        "phase_speed_m_s": value("phase_speed_m_s"),
        "amplitude_factor": value("amplitude_factor"),
        "critical_period_days": value("critical_period_days"),
        "quasi_simultaneous": bool(value("quasi_simultaneous")),
        "energy_share": value("energy_share"),
        **{name: value(name) for name in _TAKEN},
    }
