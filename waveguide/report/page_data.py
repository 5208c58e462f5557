"""What the page shows, as one document that JSON can hold."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.propagation import cautions as limit
from waveguide.report.colours import FATE_COLOURS, KIND_COLOURS, MODE_COLOURS
from waveguide.report.document import plain_value
from waveguide.report.map_view import choose_view
from waveguide.report.page_shore import UNITS_PER_DEGREE, shore_rings
from waveguide.report.routes import legs_of, vertices_of
from waveguide.report.text import plain

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.geodesy import Array
    from waveguide.stored import Stored

_MOST_POINTS = 500  # of a waveform: more than a chart has pixels
_LONGEST_NAME = 80
_LOST = ("leg_lost_rossby", "leg_lost_friction", "leg_lost_damping", "leg_lost_scattering",
         "leg_other_ways")  # in the order of FATE_COLOURS

_CHECKS: tuple[tuple[str, str, str, Callable[[float], bool]], ...] = (
    ("frequency_over_f", "Largest ω/|f| on the coasts", f"below {limit.FASTEST_SHARE_OF_F:g}",
     lambda x: x > limit.FASTEST_SHARE_OF_F),
    ("critical_share", "Share of coast below the critical frequency",
     f"below {limit.LARGEST_CRITICAL_SHARE:g}",
     lambda x: x >= limit.LARGEST_CRITICAL_SHARE),
    ("coast_radius_radii", "Radius of curvature of the coast, in R",
     f"above {limit.SHARPEST_COAST:g}", lambda x: x < limit.SHARPEST_COAST),
    ("basin_width_radii", "Width of the water beside the coast, in R (5 or more: 5)",
     f"above {limit.NARROWEST_BASIN:g}", lambda x: x < limit.NARROWEST_BASIN),
    ("speed_change", "Change of speed over a wavelength/2π",
     f"below {limit.LARGEST_CHANGE:.2f}", lambda x: x > limit.LARGEST_CHANGE),
    ("narrowest_strait_km", "Narrowest strait on the way, km",
     f"above {limit.RESOLVED_STRAIT / 1e3:g}", lambda x: x < limit.RESOLVED_STRAIT / 1e3),
    ("northernmost_latitude", "Northernmost latitude (sea ice)",
     f"below {limit.NORTHERN_ICE:g}", lambda x: x > limit.NORTHERN_ICE),
    ("southernmost_latitude", "Southernmost latitude (sea ice)",
     f"above {limit.SOUTHERN_ICE:g}", lambda x: x < limit.SOUTHERN_ICE),
    ("upper_ocean_share", "Share of speed from the upper 100 m (season)",
     f"below {limit.UPPER_SHARE:g}", lambda x: x > limit.UPPER_SHARE),
    ("source_distance_radii", "Source off the guide, in R", f"below {limit.FARTHEST_TIE:g}",
     lambda x: x > limit.FARTHEST_TIE),
    ("target_distance_radii", "Target off the guide, in R", f"below {limit.FARTHEST_TIE:g}",
     lambda x: x > limit.FARTHEST_TIE),
)
"""Variables of validity with their names, limits, and when they are beyond them."""


def page_data(
    arrivals: Stored, plan: xr.Dataset, sections: Sequence[Mapping[str, Any]]
) -> dict[str, Any]:
    """Everything the page shows.

    Parameters
    ----------
    arrivals : xarray.Dataset or Arrays
        Arrivals that pass :func:`waveguide.schema.check`.
    plan : xarray.Dataset
        The plan for the same targets and modes; see :mod:`waveguide.report.plan_dataset`.
    sections : sequence of mapping
        Cross-shelf sections along the routes: ``lon``, ``lat``, ``offshore_km``, ``depth_m``,
        ``radius_km``.

    Returns
    -------
    dict
        Lists, numbers and texts on one line; missing numbers are None.
    """
    lon, lat = _positions(arrivals)
    view = choose_view(lon, lat)
    modes = [int(mode) for mode in arrivals["mode"].values]
    return {
        "title": plain(arrivals.attrs["title"], 120),
        "summary": plain(arrivals.attrs["summary"], 1000),
        "event": _event(arrivals) | {"start_error": plan.attrs["start_error_days"]},
        "facts": _facts(arrivals, plan),
        "caution": arrivals.attrs["caution"],
        "view": {"middle": round(view.middle, 3), "pole": view.pole},
        "modes": [
            {"number": mode, "name": _mode_name(mode), "colour": MODE_COLOURS[mode],
             "share": _round(float(arrivals["mode_share"].values[m]), 4)}
            for m, mode in enumerate(modes)
        ],
        "kinds": KIND_COLOURS,
        "fates": [{"name": name, "colour": colour} for name, colour in FATE_COLOURS.items()],
        "targets": [_target(arrivals, plan, t) for t in range(arrivals.sizes["target"])],
        "routes": [_route(arrivals, r) for r in range(arrivals.sizes["route"])],
        "waves": _waves(arrivals),
        "sections": [_section(section) for section in sections],
        "land": {"units": UNITS_PER_DEGREE, "rings": shore_rings(lon, lat)},
    }  # fmt: skip


def _positions(arrivals: Stored) -> tuple[Array, Array]:
    """Longitudes and latitudes of all that must be seen."""
    lon, lat = (
        np.concatenate([
            [float(arrivals.attrs[f"source_{axis}"])], arrivals[f"target_{axis}"].values,
            arrivals[f"vertex_{axis}"].values,
        ])
        for axis in ("longitude", "latitude")
    )
    return lon, lat


def _mode_name(mode: int) -> str:
    return "mode 0 (barotropic)" if mode == 0 else f"mode {mode}"


def _event(arrivals: Stored) -> dict[str, Any]:
    attributes = arrivals.attrs
    start = attributes["event_start"]
    box = attributes.get("event_box_west_south_east_north")
    return {
        "name": plain(attributes["event_name"] or "event", _LONGEST_NAME),
        "start": start,
        "days": attributes["event_duration_days"],
        "metres": plain_value(attributes["event_amplitude_m"]),
        "lon": attributes["source_longitude"],
        "lat": attributes["source_latitude"],
        "box": None if box is None else [float(side) for side in box],
    }


def _facts(arrivals: Stored, plan: xr.Dataset) -> list[list[str]]:
    """What the answer was computed from, as names and values."""
    attributes = plan.attrs
    return [
        ["Dominant period", f"{arrivals.attrs['period_days']:g} days"],
        ["Ocean", str(arrivals.attrs["ocean"])],
        ["Ensemble", f"{attributes['members']} members, seed {attributes['seed']}"],
        ["Standard deviations", str(attributes["standard_deviations"])],
        ["Chance of the windows", f"{attributes['chance_percent']:g} %"],
        ["Threshold", f"{100 * attributes['threshold_m']:g} cm"],
        ["Software", str(arrivals.attrs["source"])],
        ["Data (SHA-256)", str(arrivals.attrs["data_sha256"])],
    ]


def _target(arrivals: Stored, plan: xr.Dataset, t: int) -> dict[str, Any]:
    return {
        "name": plain(arrivals["target"].values[t], _LONGEST_NAME),
        "lon": _round(float(arrivals["target_longitude"].values[t]), 3),
        "lat": _round(float(arrivals["target_latitude"].values[t]), 3),
        "rows": [_row(arrivals, plan, (t, m)) for m in range(arrivals.sizes["mode"])],
    }


def _row(arrivals: Stored, plan: xr.Dataset, row: tuple[int, int]) -> dict[str, Any]:
    """One target and mode."""
    status = str(arrivals["status"].values[row])
    if status != "reached":
        return {"status": plain(status)}
    number = {
        key: plain_value(arrivals[name].values[row])
        for key, name in (
            ("front", "front_time_days"), ("half", "half_height_time_days"),
            ("peak", "peak_time_days"), ("ratio", "peak_ratio"), ("metres", "amplitude_m"),
            ("km", "path_length_km"), ("speed", "mean_speed_m_s"),
        )
    }  # fmt: skip
    return {
        "status": status,
        **number,
        "plan": _plan(plan, row),
        "checks": _checks(arrivals, row),
        "instruments": _instruments(arrivals, row),
        "cautions": [plain(c, 300) for c in str(arrivals["caution"].values[row]).split("; ") if c],
    }


def _instruments(arrivals: Stored, row: tuple[int, int]) -> list[dict[str, Any]]:
    """What the instruments of a mooring see per centimetre of sea level."""
    names = {
        "depth": "depth_m", "rise": "displacement_m_per_cm", "flow": "current_cm_s_per_cm",
        "pressure": "bottom_pressure_cm_per_cm", "guide": "guide_ratio",
    }  # fmt: skip
    mine = (arrivals["instrument_target"].values == row[0]) & (
        arrivals["instrument_mode"].values == row[1]
    )
    return [
        {key: _round(float(arrivals[f"instrument_{name}"].values[i]), 3)
         for key, name in names.items()}
        for i in np.flatnonzero(mine)
    ]


def _plan(plan: xr.Dataset, row: tuple[int, int]) -> dict[str, Any]:
    def values(name: str) -> Any:
        found = plan[name].values[row]
        return [_round(float(v), 4) for v in found] if found.ndim else _round(float(found), 4)

    shares = {
        key: _shares(plan["input"].values.tolist(), plan[of].values[row])
        for key, of in (("time_from", "time_share"), ("height_from", "height_share"))
    }
    return {
        key: values(name)
        for key, name in (
            ("front", "front_days"), ("half", "half_height_days"), ("peak", "peak_days"),
            ("ratio", "peak_ratio"), ("metres", "peak_m"), ("look_from", "look_from_days"),
            ("look_until", "look_until_days"), ("seen", "chance_above_threshold"),
            ("gap_days", "longest_gap_days"), ("gap_km", "longest_gap_km"),
            ("reach_km", "reach_km"), ("depth", "measure_depth_m"), ("off", "measure_offshore_km"),
            ("per_metre", "measure_per_metre"), ("clarity", "measure_clarity"),
        )
    } | shares | {"first": str(plan["measure_first"].values[row])}  # fmt: skip


def _shares(names: Sequence[str], shares: Array) -> list[list[Any]]:
    """Inputs and their shares of a variance, the largest first; what is below 1 % is left out."""
    order = [i for i in np.argsort(-shares) if shares[i] >= 0.01]
    return [[str(names[i]), _round(float(shares[i]), 3)] for i in order]


def _checks(arrivals: Stored, row: tuple[int, int]) -> list[list[Any]]:
    """Each assumption that applies: its name, number, limit, and whether it is beyond it."""
    found = []
    for name, words, bound, beyond in _CHECKS:
        value = float(arrivals[name].values[row])
        if np.isfinite(value):
            found.append([words, float(f"{value:.3g}"), bound, bool(beyond(value))])
    return found


def _route(arrivals: Stored, route: int) -> dict[str, Any]:
    """A route with its legs and the vertices of all of them, in order of travel."""
    legs = legs_of(arrivals, route)
    spans = [vertices_of(arrivals, leg) for leg in legs]
    at = np.array([vertex for span in spans for vertex in span], dtype=int)
    return {
        "target": int(arrivals["route_target"].values[route]),
        "mode": int(arrivals["route_mode"].values[route]),
        "kind": str(arrivals["route_kind"].values[route]),
        "via": plain(arrivals["route_via"].values[route], 200),
        "legs": [_leg(arrivals, leg, len(span)) for leg, span in zip(legs, spans, strict=True)],
        "lon": _steps(arrivals["vertex_longitude"].values[at], 1e3),
        "lat": _steps(arrivals["vertex_latitude"].values[at], 1e3),
        "days": _steps(arrivals["vertex_time_days"].values[at], 1e3),
        "km": _steps(arrivals["vertex_distance_km"].values[at], 10.0),
    }


def _leg(arrivals: Stored, leg: int, vertices: int) -> dict[str, Any]:
    def value(name: str, digits: int) -> float | None:
        return _round(float(arrivals[name].values[leg]), digits)

    return {
        "kind": str(arrivals["leg_kind"].values[leg]),
        "vertices": vertices,
        "km": value("leg_length_km", 1),
        "days": value("leg_time_days", 3),
        "factor": value("leg_amplitude_factor", 5),
        "left": value("leg_energy_share", 4),
        "lost": [value(name, 4) for name in _LOST],
        "critical": value("leg_critical_period_days", 1),
        "at_once": bool(arrivals["leg_quasi_simultaneous"].values[leg]),
    }


def _steps(values: Array, scale: float) -> list[int]:
    """Values times a scale as whole numbers, each less the one before it."""
    whole = np.rint(values * scale).astype(int)
    return [int(v) for v in np.diff(whole, prepend=0)]


def _waves(arrivals: Stored) -> dict[str, Any]:
    """Waveforms on a common axis, each as whole numbers of a thousandth of its largest value."""
    every = max(1, -(-arrivals.sizes["time"] // _MOST_POINTS))
    time = arrivals["time_days"].values[::every]
    return {
        "step": _round(float(time[1] - time[0]), 6),
        "count": int(time.size),
        "source": _thousandths(arrivals["source_waveform"].values[::every]),
        "modes": [
            [_thousandths(wave[::every]) for wave in target]
            for target in arrivals["waveform"].values
        ],
        "sum": [_thousandths(wave[::every]) for wave in arrivals["waveform_sum"].values],
    }


def _thousandths(wave: Array) -> dict[str, Any]:
    top = float(np.nanmax(np.abs(wave), initial=0.0))
    if not top > 0.0:
        return {"top": 0.0, "values": []}
    return {"top": float(f"{top:.5g}"), "values": [int(v) for v in np.rint(wave / top * 1e3)]}


def _section(section: Mapping[str, Any]) -> dict[str, Any]:
    return {
        "lon": _round(float(section["lon"]), 3),
        "lat": _round(float(section["lat"]), 3),
        "x": [_round(float(v), 1) for v in section["offshore_km"]],
        "h": [round(float(v)) for v in section["depth_m"]],
        "radius": _round(float(section["radius_km"]), 1),
    }


def _round(value: float, digits: int) -> float | None:
    return round(value, digits) if np.isfinite(value) else None
