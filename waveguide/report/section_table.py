"""A section and its modes as text for the terminal, and as one JSON document."""

from __future__ import annotations

import math
import textwrap
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.document import plain_value
from waveguide.report.section_dataset import SECTION
from waveguide.report.text import plain

if TYPE_CHECKING:
    import xarray as xr

_WIDTH = 100

_AT_PERIOD = (
    ("Phase", "(m/s)", "phase_speed_at_period_m_s", ".2f"),
    ("Group", "(m/s)", "group_speed_at_period_m_s", ".2f"),
)
"""Further columns where a period was asked for."""

_COLUMNS = (
    ("Mode", "", "mode", "d"),
    ("Speed", "(m/s)", "phase_speed_m_s", ".2f"),
    ("Speed", "(km/day)", "phase_speed_km_day", ".0f"),
    ("Error", "(%)", "relative_error", ".2f"),
    ("Trapping", "(km)", "trapping_scale_km", ".0f"),
    ("Decay", "(km)", "decay_length_km", ".0f"),
    ("Coupling", "(m^-1/2)", "wind_coupling", ".4f"),
    ("Wind", "(cm)", "wind_response_cm_per_1000_km", ".1f"),
    ("Cut-off", "(days)", "cut_off_period_days", ".2f"),
)
"""Heading, unit, variable and format of the table's columns."""


def section_table(dataset: xr.Dataset) -> str:
    """What a person wants to read of a section.

    Parameters
    ----------
    dataset : xarray.Dataset
        From :func:`waveguide.report.section_dataset.section_dataset`.

    Returns
    -------
    str
    """
    parts = [_heading(dataset), _rows(dataset), _remarks(dataset)]
    return "\n\n".join(part for part in parts if part)


def _heading(dataset: xr.Dataset) -> str:
    a = dataset.attrs
    place = _position(a["longitude"], a["latitude"])
    lines = [f"Section at {place}"]
    if math.isfinite(a["seaward_azimuth_degrees"]):
        asked = _position(a["asked_longitude"], a["asked_latitude"])
        lines.append(
            f"Asked for {asked}; the guide's coast is {a['snap_distance_km']:.0f} km away; "
            f"seaward is {a['seaward_azimuth_degrees']:.0f}° from north"
        )
    deepest = float(np.nanmax(dataset["section_depth_m"].values))
    slope = f", mean slope {a['mean_slope']:.3f}" if math.isfinite(a["mean_slope"]) else ""
    lines += [
        f"Shelf {a['shelf_width_km']:.0f} km wide (to 200 m){slope}, deep water {deepest:.0f} m, "
        f"Burger number {a['burger_number']:.2g}",
        f"Depths from {plain(a['depths_from'], 80)}: {100 * a['coverage']:.0f} % known; made "
        f"monotonic by {a['depth_change_rms_m']:.0f} m rms "
        f"({100 * a['depth_change_rms_share']:.0f} %), {a['depth_change_largest_m']:.0f} m at most "
        f"({100 * a['depth_change_largest_share']:.0f} %)",
        f"Stratification from {plain(a['stratification_from'], 80)}, reaching "
        f"{a['stratification_reaches_m']:.0f} m",
    ]
    return "\n".join(_filled(line) for line in lines)


def _position(lon: float, lat: float) -> str:
    east, north = "E" if lon >= 0.0 else "W", "N" if lat >= 0.0 else "S"
    return f"{abs(lat):.2f}°{north} {abs(lon):.2f}°{east}"


def _rows(dataset: xr.Dataset) -> str:
    """The table, one line for each mode."""
    columns = []
    asked = math.isfinite(dataset.attrs["period_days"])
    for heading, unit, name, style in _COLUMNS + (_AT_PERIOD if asked else ()):
        values = dataset[name].values * (100.0 if name == "relative_error" else 1)
        cells = [format(v, style) if np.isfinite(v) else "–" for v in values]
        width = max(map(len, (heading, unit, *cells)))
        columns.append([cell.rjust(width) for cell in (heading, unit, *cells)])
    lines = ["  ".join(cells) for cells in zip(*columns, strict=True)]
    return "\n".join([*lines[:2], "─" * len(lines[0]), *lines[2:]])


def _remarks(dataset: xr.Dataset) -> str:
    a = dataset.attrs
    remarks = [
        f"Decay: distance of a loss by 1/e under a linear bottom drag of {a['drag_m_s']:g} m/s. "
        "Wind: sea level per 1000 km of steady downstream stress of 0.1 Pa, without friction. "
        "Cut-off: period below which the mode does not travel downstream; – where it does at all "
        f"periods longer than the inertial one of {a['inertial_period_days']:.2f} days."
    ]
    if math.isfinite(a["period_days"]):
        remarks.append(f"Phase and group: speeds at a period of {a['period_days']:g} days.")
    raw = dataset["raw_phase_speed_m_s"].values
    if np.isfinite(raw).any():
        speeds = ", ".join(f"{v:.2f}" if np.isfinite(v) else "–" for v in raw)
        remarks.append(f"Speeds on the raw depths: {speeds} m/s" + _reverse(a))
    elif a["depth_change_largest_m"] > 0.0:
        remarks.append("On the raw depths, which have land within, no speeds are computed.")
    remarks += [f"Quality: {item}" for item in a["quality_meaning"].split("; ") if item]
    remarks += [f"Note: {note}" for note in a["notes"].split("; ") if note]
    remarks.append(a["caution"])
    return "\n".join(_filled(plain(remark, 400)) for remark in remarks)


def _reverse(attributes: dict[str, Any]) -> str:
    speed = attributes["reverse_speed_raw_depths_m_s"]
    if not speed > 0.0:
        return ""
    return f"; slopes that rise offshore carry waves the other way, at most {speed:.2f} m/s"


def _filled(text: str) -> str:
    return textwrap.fill(text, _WIDTH, subsequent_indent="  ", break_on_hyphens=False)


def section_document(dataset: xr.Dataset) -> dict[str, Any]:
    """A section as nested dictionaries and lists that JSON can hold.

    Parameters
    ----------
    dataset : xarray.Dataset
        From :func:`waveguide.report.section_dataset.section_dataset`.

    Returns
    -------
    dict
        ``modes`` has one entry for each mode with its numbers; then the section's depths, the
        stratification and what is known of their quality. Missing numbers are None.
    """
    per_mode = [name for name, variable in SECTION.items() if variable.dims == ("mode",)]
    return {
        "modes": [
            {name: plain_value(dataset[name].values[row]) for name in per_mode}
            for row in range(dataset.sizes["mode"])
        ],
        "section": {
            name: [plain_value(value) for value in dataset[name].values]
            for name, variable in SECTION.items()
            if variable.dims in (("point",), ("raw_point",), ("n2_level",))
        },
        **{key: plain_value(value) for key, value in dataset.attrs.items()},
    }
