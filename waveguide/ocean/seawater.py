"""Buoyancy frequency of sea water by TEOS-10 (IOC, SCOR and IAPSO 2010)."""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
TemperatureKind = Literal["in-situ", "potential", "conservative"]
SalinityKind = Literal["practical", "absolute"]
AxisKind = Literal["depth", "pressure"]

MINIMUM_N2 = 1e-8
"""Floor of N² (1/s²): a buoyancy period of 17 hours, below what a climatology resolves."""


def layer_pressures(levels: Array, lat: Array, axis: AxisKind) -> Array:
    """Sea pressure at the levels of a grid.

    Parameters
    ----------
    levels : ndarray, shape (nz,)
        Depth (m, positive down) or sea pressure (dbar), as `axis` says.
    lat : ndarray, shape (ny,)
        Latitude, degrees.
    axis : {"depth", "pressure"}

    Returns
    -------
    ndarray, shape (nz, ny, 1)
        Sea pressure (dbar).
    """
    import gsw

    if axis == "pressure":
        return np.broadcast_to(levels[:, None, None], (levels.size, lat.size, 1)).copy()
    return np.asarray(gsw.p_from_z(-levels[:, None, None], lat[None, :, None]), float)


def conservative_temperature_absolute_salinity(
    temperature: Array,
    salinity: Array,
    pressure: Array,
    lon: Array,
    lat: Array,
    temperature_kind: TemperatureKind,
    salinity_kind: SalinityKind,
) -> tuple[Array, Array]:
    """The two variables of TEOS-10 from those of a file.

    Parameters
    ----------
    temperature : ndarray, shape (nz, ny, nx)
        In-situ, potential (reference pressure 0) or conservative temperature (°C).
    salinity : ndarray, shape (nz, ny, nx)
        Practical salinity (PSS-78) or absolute salinity (g/kg).
    pressure : ndarray, shape (nz, ny, 1)
        Sea pressure (dbar).
    lon, lat : ndarray, shape (nx,) and (ny,)
        Position, degrees.
    temperature_kind, salinity_kind : str
        Which of these they are.

    Returns
    -------
    conservative_temperature, absolute_salinity : ndarray, shape (nz, ny, nx)
        °C and g/kg.

    References
    ----------
    IOC, SCOR and IAPSO (2010), The international thermodynamic equation of seawater – 2010,
    Manuals and Guides 56, UNESCO.
    """
    import gsw

    sa = salinity
    if salinity_kind == "practical":
        sa = gsw.SA_from_SP(salinity, pressure, lon[None, None, :], lat[None, :, None])
    if temperature_kind == "in-situ":
        return gsw.CT_from_t(sa, temperature, pressure), sa
    if temperature_kind == "potential":
        return gsw.CT_from_pt(sa, temperature), sa
    return temperature, sa


def layer_n2(
    conservative_temperature: Array, absolute_salinity: Array, pressure: Array, lat: Array
) -> Array:
    """N² between neighbouring levels, negative where the water column is unstable.

    Parameters
    ----------
    conservative_temperature, absolute_salinity : ndarray, shape (nz, ny, nx)
        °C and g/kg, NaN where unknown.
    pressure : ndarray, shape (nz, ny, 1)
        Sea pressure (dbar), increasing along the first axis.
    lat : ndarray, shape (ny,)
        Latitude, degrees; gravity depends on it.

    Returns
    -------
    ndarray, shape (nz − 1, ny, nx)
        N² (1/s²) halfway between the levels.
    """
    import gsw

    shape = conservative_temperature.shape
    n2, _ = gsw.Nsquared(
        absolute_salinity,
        conservative_temperature,
        np.broadcast_to(pressure, shape),
        np.broadcast_to(lat[None, :, None], shape),
        axis=0,
    )
    return np.asarray(n2, float)


def stabilise(n2: Array, levels: Array, minimum: float = MINIMUM_N2) -> Array:
    """Mix unstable parts of water columns and give N² a floor.

    The buoyancy profile −Σ N² Δz is replaced by the nearest one that does not increase
    downward, nearest in the mean square with the thickness that each level stands for. That
    is complete convective mixing: every unstable stack of levels takes its mean buoyancy
    (pool adjacent violators), the columns' ∫ b dz stays, and stable parts are untouched.

    Parameters
    ----------
    n2 : ndarray, shape (nz − 1, …)
        N² (1/s²) between levels; NaN (land, below the bottom) is kept.
    levels : ndarray, shape (nz,)
        Depth (m) or pressure (dbar) of the levels, increasing.
    minimum : float
        Floor of N² (1/s²).

    Returns
    -------
    ndarray, shape (nz − 1, …)
        N² ≥ `minimum`.

    References
    ----------
    Barlow, Bartholomew, Bremner and Brunk (1972), Statistical inference under order
    restrictions, Wiley, chapter 1.
    """
    from scipy.optimize import isotonic_regression

    thickness = np.diff(levels)
    weights = np.r_[thickness[:1], thickness[:-1] + thickness[1:], thickness[-1:]] / 2.0
    columns = np.array(n2, float).reshape(thickness.size, -1)
    for k in np.flatnonzero((columns < 0.0).any(axis=0)):
        known = np.isfinite(columns[:, k])
        depth = int(np.argmin(np.r_[known, False]))
        density = np.r_[0.0, np.cumsum(columns[:depth, k] * thickness[:depth])]
        mixed = isotonic_regression(density, weights=weights[: depth + 1]).x
        columns[:depth, k] = np.diff(mixed) / thickness[:depth]
    return np.asarray(np.maximum(columns, minimum).reshape(n2.shape))
