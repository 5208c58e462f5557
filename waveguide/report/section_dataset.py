"""A section and its modes as one xarray Dataset: the form that is saved, printed and drawn."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.section_modes import SectionModes
from waveguide.coast.section_quality import MEANING, QualityFlag
from waveguide.constants import GRAVITY, SECONDS_PER_DAY
from waveguide.modes.modeset import alongshore_velocity, isopycnal_displacement
from waveguide.report.attributes import software_version
from waveguide.schema import CAUTION, Variable, assemble

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]

_MODE, _POINT, _RAW, _N2 = ("mode",), ("point",), ("raw_point",), ("n2_level",)
_FIELD = ("mode", "level", "column")


def _number(dims: tuple[str, ...], long_name: str, units: str, name: str | None = None) -> Variable:
    return Variable(dims, "number", long_name, units, name)


SECTION: dict[str, Variable] = {
    "mode": Variable(_MODE, "integer", "mode number, 0 barotropic, 1 and up by speed", "1",
                     coordinate=True),
    "column_offshore_km": Variable(("column",), "number", "distance from the shore", "km",
                                   coordinate=True),
    "level_depth_m": Variable(("level",), "number", "depth below the surface", "m", "depth",
                              coordinate=True),
    "phase_speed_m_s": _number(_MODE, "long-wave phase speed, downstream", "m s-1"),
    "phase_speed_km_day": _number(_MODE, "long-wave phase speed, downstream", "km day-1"),
    "relative_error": _number(_MODE, "relative error of the phase speed by refinement", "1"),
    "raw_phase_speed_m_s": _number(
        _MODE, "phase speed on the raw depths, in order of speed", "m s-1"
    ),
    "trapping_scale_km": _number(
        _MODE, "distance within which 1 - exp(-2) of the surface kinetic energy lies", "km"
    ),
    "decay_length_km": _number(_MODE, "distance in which bottom friction damps by 1/e", "km"),
    "decay_per_drag_s_m2": _number(_MODE, "decay per metre and unit linear drag", "s m-2"),
    "wind_coupling": _number(_MODE, "modal pressure at the coast F(0,0), the wind coupling",
                             "m-0.5"),
    "wind_response_cm_per_1000_km": _number(
        _MODE, "sea level per 1000 km of steady downstream wind stress of 0.1 Pa, no friction", "cm"
    ),
    "cut_off_period_days": _number(
        _MODE, "period below which the mode does not travel downstream", "day"
    ),
    "phase_speed_at_period_m_s": _number(_MODE, "phase speed at the stated period", "m s-1"),
    "group_speed_at_period_m_s": _number(_MODE, "group speed at the stated period", "m s-1"),
    "pressure": _number(_FIELD, "pressure relative to that at the coast's surface", "1"),
    "alongshore_velocity": _number(
        _FIELD, "downstream velocity per metre of coastal sea level", "s-1"
    ),
    "isopycnal_displacement": _number(
        _FIELD, "upward displacement per metre of coastal sea level", "1"
    ),
    "section_offshore_km": _number(_POINT, "distance from the shore, monotonic section", "km"),
    "section_depth_m": _number(
        _POINT, "depth of the monotonic section", "m", "sea_floor_depth_below_mean_sea_level"
    ),
    "raw_offshore_km": _number(_RAW, "distance from the shore, raw section", "km"),
    "raw_depth_m": _number(_RAW, "depth along the section, negative on land", "m",
                           "sea_floor_depth_below_mean_sea_level"),
    "n2_depth_m": _number(_N2, "depth of the buoyancy frequency", "m", "depth"),
    "n2": _number(_N2, "square of the buoyancy frequency", "s-2",
                  "square_of_brunt_vaisala_frequency_in_sea_water"),
}
"""What is stored of a section."""

WIND_STRESS, FETCH = 0.1, 1e6
"""Stress (Pa) and length of coast (m) of the wind response that is printed."""


@dataclass(frozen=True)
class Place:
    """Where a section was asked for and where it is.

    Attributes
    ----------
    asked : (lon, lat)
        Degrees.
    found : (lon, lat)
        The guide's coast, or `asked` for a person's own profile.
    distance : float
        Between them (m).
    azimuth : float
        Of the section, degrees clockwise from north; NaN for a person's own profile.
    """

    asked: tuple[float, float]
    found: tuple[float, float]
    distance: float
    azimuth: float


def section_dataset(
    place: Place, result: SectionModes, drag: float, density: float, data: Mapping[str, str]
) -> xr.Dataset:
    """Put a section and its modes into a Dataset.

    Parameters
    ----------
    place : Place
    result : SectionModes
    drag : float
        Linear bottom drag r (m/s) of the decay length.
    density : float
        Reference density (kg/m³) of the wind response.
    data : mapping of str to str
        Where depths and stratification are from.

    Returns
    -------
    xarray.Dataset
        With the variables of `SECTION`.
    """
    modes = result.modes
    x, h = result.section.monotonic(0)
    raw_x, raw_h = result.section.raw(0)
    coastal = modes.structure[:, :1, :1]
    values: dict[str, Any] = {
        "mode": modes.mode,
        "column_offshore_km": modes.offshore / 1e3,
        "level_depth_m": modes.depth,
        "phase_speed_m_s": modes.phase_speed,
        "phase_speed_km_day": modes.phase_speed * SECONDS_PER_DAY / 1e3,
        "relative_error": modes.error,
        "raw_phase_speed_m_s": result.raw_speed,
        "trapping_scale_km": result.trapping_scale / 1e3,
        "decay_length_km": _decay_length(modes.bottom_friction, drag) / 1e3,
        "decay_per_drag_s_m2": modes.bottom_friction,
        "wind_coupling": modes.coastal_value,
        # ∂s φ = F(0,0) τ/ρ₀ and η = F(0,0) φ/g
        "wind_response_cm_per_1000_km":
            100.0 * modes.coastal_value**2 * WIND_STRESS * FETCH / (density * GRAVITY),
        "cut_off_period_days": result.limits.cut_off / SECONDS_PER_DAY,
        "phase_speed_at_period_m_s": result.limits.phase_speed,
        "group_speed_at_period_m_s": result.limits.group_speed,
        "pressure": modes.structure / coastal,
        "alongshore_velocity": alongshore_velocity(modes),
        "isopycnal_displacement": isopycnal_displacement(modes),
        "section_offshore_km": x / 1e3, "section_depth_m": h,
        "raw_offshore_km": raw_x / 1e3, "raw_depth_m": raw_h,
        "n2_depth_m": result.column.depth, "n2": result.column.n2,
    }
    return assemble(values, _attributes(place, result, drag, data), SECTION)


def _decay_length(decay: Array, drag: float) -> Array:
    """Distance of a decay by 1/e (m), infinite without friction."""
    rate = decay * drag
    return np.where(rate > 0.0, 1.0 / np.where(rate > 0.0, rate, 1.0), np.inf)


def _notes(result: SectionModes) -> tuple[str, ...]:
    """What had to be done or should be known."""
    narrowed = np.any(result.trapping_scale[1:] < 0.99 * result.modes.trapping_scale[1:])
    if not narrowed:
        return result.column.notes
    return (
        *result.column.notes,
        "close to the equator: the trapping scale is limited to the equatorial radius, and the "
        "speeds are close to those of the equatorial guide",
    )


def _attributes(
    place: Place, result: SectionModes, drag: float, data: Mapping[str, str]
) -> dict[str, Any]:
    """Global attributes: the place, the quality of the section, and where the data are from."""
    section = result.section
    named = [flag for flag in QualityFlag if flag & result.flags]
    return {
        "Conventions": "CF-1.11",
        "title": "cross-shelf section and its long coastal-trapped modes",
        "asked_longitude": place.asked[0], "asked_latitude": place.asked[1],
        "longitude": place.found[0], "latitude": place.found[1],
        "snap_distance_km": place.distance / 1e3,
        "seaward_azimuth_degrees": place.azimuth,
        "coriolis_parameter_s-1": result.modes.f,
        "shelf_width_km": float(section.shelf_width[0]) / 1e3,
        "mean_slope": float(section.slope[0]),
        "burger_number": result.burger,
        "coverage": float(section.coverage[0]),
        "facing_coast_km": float(section.facing[0]) / 1e3,
        "depth_change_rms_m": float(section.rms_change[0]),
        "depth_change_largest_m": float(section.max_change[0]),
        "depth_change_rms_share": float(section.rms_share[0]),
        "depth_change_largest_share": float(section.max_share[0]),
        "reverse_speed_raw_depths_m_s": result.raw_reverse_speed,
        "quality": ", ".join(flag.words for flag in named) or "no flags",
        "quality_meaning": "; ".join(f"{flag.words}: {MEANING[flag]}" for flag in named),
        "notes": "; ".join(_notes(result)),
        "stratification_reaches_m": result.column.reached,
        "drag_m_s": drag,
        "inertial_period_days": 2.0 * np.pi / abs(result.modes.f) / SECONDS_PER_DAY,
        "period_days": result.limits.period / SECONDS_PER_DAY,
        "depths_from": data["depths"], "stratification_from": data["stratification"],
        "data_sha256": data["sha256"],
        "source": f"waveguide {software_version()}",
        "caution": CAUTION,
    }
