"""The coastal-trapped modes of one cross-shelf section, with what to make of them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.section import Sections
from waveguide.coast.section_quality import SLOPE_FOOT, QualityFlag
from waveguide.constants import coriolis, deformation_radius
from waveguide.errors import InputError, WaveguideError
from waveguide.modes.finite_frequency import cutoff, dispersion, stratified_guide
from waveguide.modes.modeset import ModeSet
from waveguide.modes.profile import make_profile
from waveguide.modes.trapped import TOLERANCE, trapped_modes

Array = NDArray[np.float64]

LEAST_LATITUDE = 0.05
"""Closer to the equator (degrees) the trapping scale c/f is wider than any ocean."""


CUT_OFF_TOLERANCE = 0.02
"""Relative accuracy of the long waves on the mesh that cut-off periods are sought on."""


@dataclass(frozen=True)
class Column:
    """The stratification a section problem uses.

    Attributes
    ----------
    depth, n2 : ndarray, shape (nz,)
        Depth (m) and N² (1/s²).
    reached : float
        Depth of the deepest value that comes from data (m).
    source : str
        Where it is from.
    notes : tuple of str
        What had to be done to it.
    """

    depth: Array
    n2: Array
    reached: float
    source: str
    notes: tuple[str, ...] = ()


@dataclass(frozen=True)
class FrequencyLimits:
    """How the modes depart from long waves.

    Attributes
    ----------
    cut_off : ndarray, shape (nmode,)
        Period (s) below which a mode does not travel downstream; NaN where it does at all periods
        longer than the inertial one, and for mode 0.
    period : float
        Period of the following (s), NaN if none was asked for.
    phase_speed, group_speed : ndarray, shape (nmode,)
        At that period (m/s), NaN where the mode has stopped.
    """

    cut_off: Array
    period: float
    phase_speed: Array
    group_speed: Array


@dataclass(frozen=True)
class SectionModes:
    """Modes of one section.

    Attributes
    ----------
    section : Sections
        One row.
    column : Column
    modes : ModeSet
        Of the monotonic section.
    trapping_scale : ndarray, shape (nmode,)
        See `limited_scale` (m).
    raw_speed : ndarray, shape (nmode,)
        Phase speeds on the raw depths (m/s), NaN where those have land within.
    raw_reverse_speed : float
        Speed of the fastest wave that runs the other way on the raw depths (m/s), 0 for none and
        NaN where they have land within.
    burger : float
        (∫N dz)²/(f L)², L the width of shelf and slope.
    flags : QualityFlag
    limits : FrequencyLimits
        What holds at periods that are not long.
    """

    section: Sections
    column: Column
    modes: ModeSet
    trapping_scale: Array
    raw_speed: Array
    raw_reverse_speed: float
    burger: float
    flags: QualityFlag
    limits: FrequencyLimits


def section_modes(
    section: Sections,
    column: Column,
    lat: float,
    count: int = 3,
    period: float = float("nan"),
) -> SectionModes:
    """Modes 0 … `count` of a section.

    Parameters
    ----------
    section : Sections
        One row.
    column : Column
    lat : float
        Latitude that f is taken at (degrees).
    count : int
        Highest mode number.
    period : float
        Period of phase and group speed at finite frequency (s); none if NaN.

    Returns
    -------
    SectionModes

    Raises
    ------
    InputError
        At the equator, for a period shorter than the inertial one, without a section, or if the
        stratification cannot be used.
    """
    check_latitude(lat)
    flags = QualityFlag(int(section.flags[0]))
    if flags & QualityFlag.NO_SECTION:
        raise InputError(
            f"no water is met seaward of {section.lon[0]:.2f}, {section.lat[0]:.2f} in the "
            "bathymetry: choose another position, or give the depths with --profile"
        )
    f = float(coriolis(lat))
    x, h = section.monotonic(0)
    modes = trapped_modes(x, h, column.n2, column.depth, f, count=count)
    if np.any(modes.error > TOLERANCE):
        flags |= QualityFlag.NOT_CONVERGED
    raw_speed, reverse = _raw_speeds(section, column, f, count, modes.mode)
    scale = limited_scale(modes.trapping_scale, modes.phase_speed, lat)
    limits = frequency_limits(x, h, column, f, modes, period)
    return SectionModes(
        section, column, modes, scale, raw_speed, reverse, burger_number(x, h, column, f), flags,
        limits,
    )


def check_latitude(lat: float) -> None:
    """Refuse the equator, where the section problem has no meaning.

    Parameters
    ----------
    lat : float
        Degrees.

    Raises
    ------
    InputError
    """
    if abs(lat) < LEAST_LATITUDE:
        raise InputError(
            f"latitude {lat:.3f}: the section problem needs the earth's rotation, so |latitude| "
            f"must be {LEAST_LATITUDE} or more; on the equator the guide is the equator itself, "
            "and its modes are the vertical modes of the deep water, which `arrivals` uses there"
        )


def frequency_limits(
    offshore: Array, depth: Array, column: Column, f: float, modes: ModeSet, period: float
) -> FrequencyLimits:
    """Cut-off periods, and speeds at one period.

    Parameters
    ----------
    offshore, depth : ndarray, shape (n,)
        Monotonic section (m).
    column : Column
    f : float
        Coriolis parameter (1/s).
    modes : ModeSet
        Its long waves.
    period : float
        Seconds, NaN for none.

    Returns
    -------
    FrequencyLimits

    Raises
    ------
    InputError
        If the period is shorter than the inertial one.
    """
    problem, count = (offshore, depth, column.n2, column.depth, f), int(modes.mode[-1])
    size = modes.mode.size
    cut_off, phase, group = (np.full(size, np.nan) for _ in range(3))
    if np.isfinite(period):
        at = dispersion(stratified_guide(*problem, count=count), 2.0 * np.pi / period)
        held = min(at.mode.size, size)
        phase[:held], group[:held] = at.phase_speed[:held], at.group_speed[:held]
    guide = stratified_guide(*problem, count=count, tolerance=CUT_OFF_TOLERANCE)
    for n in np.flatnonzero(guide.mode[:size] > 0):
        highest = cutoff(guide, int(n))[0]
        cut_off[n] = 2.0 * np.pi / highest if highest < abs(f) else np.nan
    return FrequencyLimits(cut_off, period, phase, group)


def limited_scale(scale: Array, phase_speed: Array, lat: Array | float) -> Array:
    """Trapping scale, no wider than β lets it be close to the equator.

    A section has one f, and c/f grows without bound towards the equator; the wave is trapped
    within the equatorial radius √(c/2β) where that is less.

    Parameters
    ----------
    scale, phase_speed : ndarray
        Trapping scale (m) and c (m/s), of one shape.
    lat : ndarray or float
        Degrees.

    Returns
    -------
    ndarray
        Scale (m).
    """
    share = deformation_radius(phase_speed, lat) * np.abs(coriolis(lat)) / phase_speed
    result: Array = scale * share
    return result


def _raw_speeds(
    section: Sections, column: Column, f: float, count: int, numbers: NDArray[np.int_]
) -> tuple[Array, float]:
    """Speeds on the raw depths, ranked, and of the fastest wave of the other direction."""
    x, h = section.raw(0)
    speed = np.full(numbers.size, np.nan)
    if np.any(h[1:] <= 0.0):
        return speed, float("nan")
    try:
        raw = trapped_modes(x, h, column.n2, column.depth, f, count=count)
    except WaveguideError:
        return speed, float("nan")
    held = min(raw.phase_speed.size, speed.size)
    speed[:held] = raw.phase_speed[:held]
    return speed, raw.reverse_speed


def burger_number(offshore: Array, depth: Array, column: Column, f: float) -> float:
    """Square of (∫N dz)/(f L): how stratification compares with rotation over shelf and slope.

    Parameters
    ----------
    offshore, depth : ndarray, shape (n,)
        Monotonic section (m).
    column : Column
    f : float
        Coriolis parameter (1/s).

    Returns
    -------
    float
        Well above 1 the modes are like internal Kelvin waves, well below like shelf waves.
    """
    deep = float(depth[-1])
    width = float(np.interp(SLOPE_FOOT * deep, depth, offshore))
    integral = float(make_profile(column.n2, column.depth).n_integral(np.array([deep]))[0])
    return (integral / (abs(f) * max(width, 1.0))) ** 2
