"""From a position to the modes of its cross-shelf section: every stage of that question."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from waveguide.coast.own_section import own_section
from waveguide.coast.profile_files import read_profile, read_stratification
from waveguide.coast.section_modes import Column, SectionModes, check_latitude, section_modes
from waveguide.constants import REFERENCE_DENSITY, SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.network.packaged import packaged_network
from waveguide.network.section_query import (
    check_reach,
    climatological_column,
    coast_section,
    snap_to_coast,
)
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.ocean.packaged import used_files
from waveguide.ocean.stratification import packaged_climatology
from waveguide.report.section_dataset import Place, section_dataset

if TYPE_CHECKING:
    import xarray as xr

DRAG = 5e-4
"""Linear bottom drag (m/s) of the decay length, if none is stated."""


def section(
    lon: float,
    lat: float,
    *,
    profile: Path | None = None,
    stratification: Path | None = None,
    drag: float = DRAG,
    modes: int = 3,
    period_days: float | None = None,
) -> xr.Dataset:
    """The cross-shelf section at a coast and its coastal-trapped modes.

    Parameters
    ----------
    lon, lat : float
        Position near a coast, degrees. It is moved to the guide's coast, unless `profile` is given.
    profile : Path, optional
        CSV file with ``offshore_km`` and ``depth_m``, in place of the packaged bathymetry.
    stratification : Path, optional
        CSV file with ``depth`` (m) and ``n2`` (1/s²), or ``depth``, ``temperature`` and
        ``salinity``, in place of the packaged climatology.
    drag : float
        Linear bottom drag r (m/s) of the decay length.
    modes : int
        Highest mode number, 1 to 10.
    period_days : float, optional
        Period of phase and group speed at finite frequency; it must exceed the inertial one.

    Returns
    -------
    xarray.Dataset
        See :data:`waveguide.report.section_dataset.SECTION`.

    Raises
    ------
    InputError
        If a number is out of range, no coast is near, a file cannot be used, the position is on
        the equator, or there is no stratification.
    """
    check_numbers(lon, lat, drag, modes)
    check_latitude(lat)
    period = float("nan") if period_days is None else _period(period_days)
    if profile is None:
        place, result = _at_coast(lon, lat, stratification, modes, period)
    else:
        place, result = _of_profile(lon, lat, profile, stratification, modes, period)
    data = {
        "depths": packaged_bathymetry().source if profile is None else str(profile),
        "stratification": result.column.source,
        "sha256": "; ".join(f"{name} {digest}" for name, digest in used_files().items()),
    }
    return section_dataset(place, result, drag, REFERENCE_DENSITY, data)


def check_numbers(lon: float, lat: float, drag: float, modes: int) -> None:
    """Refuse numbers that cannot be meant.

    Parameters
    ----------
    lon, lat : float
        Degrees.
    drag : float
        m/s.
    modes : int

    Raises
    ------
    InputError
        With every problem.
    """
    problems = []
    if not abs(lat) <= 90.0:
        exchanged = abs(lon) <= 90.0 and abs(lat) <= 360.0
        swapped = f" Are they swapped? Try {lat:g} {lon:g}." if exchanged else ""
        problems.append(f"latitude {lat:g}: must lie within -90..90 degrees.{swapped}")
    if not abs(lon) <= 360.0:
        problems.append(f"longitude {lon:g}: must lie within -180..360 degrees")
    if not 0.0 <= drag < 1.0:
        problems.append(f"drag {drag:g}: give a linear drag in m/s, such as 5e-4")
    if not 1 <= modes <= 10:
        problems.append(f"modes {modes}: give the highest mode number, 1 to 10")
    if problems:
        raise InputError(problems)


def _period(days: float) -> float:
    if not 0.0 < days < np.inf:
        raise InputError(f"period {days:g}: give a period in days, such as 5")
    return days * SECONDS_PER_DAY


def _at_coast(
    lon: float, lat: float, stratification: Path | None, modes: int, period: float
) -> tuple[Place, SectionModes]:
    """The section of the packaged bathymetry through the closest coast of the guide."""
    network, flat = packaged_network("baroclinic")
    snap = snap_to_coast(network, flat, lon, lat)
    column = _column(stratification, snap.lon, snap.lat)
    result = coast_section(snap, packaged_bathymetry(), column, modes, period)
    return Place((lon, lat), (snap.lon, snap.lat), snap.distance, snap.azimuth), result


def _of_profile(
    lon: float, lat: float, profile: Path, stratification: Path | None, modes: int, period: float
) -> tuple[Place, SectionModes]:
    """The section that a person brings, at the position as it stands."""
    offshore, depth = read_profile(profile)
    own = own_section(offshore, depth, lon, lat, f"profile {profile}")
    column = _column(stratification, lon, lat)
    check_reach(column, own)
    result = section_modes(own, column, lat, modes, period)
    return Place((lon, lat), (lon, lat), 0.0, float(np.nan)), result


def _column(stratification: Path | None, lon: float, lat: float) -> Column:
    if stratification is None:
        return climatological_column(packaged_climatology(), lon, lat)
    return read_stratification(stratification, lon, lat)
