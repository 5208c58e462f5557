"""Physical constants and the earth, each with its source.

Values are those of Gill (1982), Atmosphere-Ocean Dynamics, Academic Press, appendix 2,
and of the WGS84 ellipsoid for distances (see :mod:`waveguide.geodesy`).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

GRAVITY = 9.81
"""Acceleration of gravity (m/s²)."""

ROTATION_RATE = 7.292115e-5
"""Rotation rate of the earth (rad/s), WGS84."""

EARTH_RADIUS = 6.371e6
"""Mean radius of the earth (m)."""

REFERENCE_DENSITY = 1025.0
"""Reference density of sea water (kg/m³)."""

SECONDS_PER_DAY = 86400.0

BETA_EQUATOR = 2.0 * ROTATION_RATE / EARTH_RADIUS
"""Meridional gradient of the Coriolis parameter at the equator (1/(m s))."""


def coriolis(lat: ArrayLike) -> NDArray[np.float64]:
    """Coriolis parameter f = 2 Ω sin(lat).

    Parameters
    ----------
    lat : array_like
        Latitude, degrees north.

    Returns
    -------
    ndarray
        f (1/s), same shape as `lat`, negative in the southern hemisphere.
    """
    return np.asarray(2.0 * ROTATION_RATE * np.sin(np.radians(np.asarray(lat, dtype=float))))


def beta(lat: ArrayLike) -> NDArray[np.float64]:
    """Meridional gradient of the Coriolis parameter, β = 2 Ω cos(lat)/a.

    Parameters
    ----------
    lat : array_like
        Latitude, degrees north.

    Returns
    -------
    ndarray
        β (1/(m s)), same shape as `lat`.
    """
    return np.asarray(BETA_EQUATOR * np.cos(np.radians(np.asarray(lat, dtype=float))))


def deformation_radius(phase_speed: ArrayLike, lat: ArrayLike) -> NDArray[np.float64]:
    """Deformation radius, continuous from the equator to the poles.

    R = c/|f| away from the equator and √(c/2β) close to it, the definition of
    Chelton et al. (1998, J. Phys. Oceanogr. 28, 433); the smaller of the two is taken,
    which is continuous where they cross (near 4.4° for c = 2.7 m/s).

    Parameters
    ----------
    phase_speed : array_like
        Phase speed c (m/s).
    lat : array_like
        Latitude, degrees north; broadcasts with `phase_speed`.

    Returns
    -------
    ndarray
        R (m).
    """
    c = np.asarray(phase_speed, dtype=float)
    f = np.abs(coriolis(lat))
    near_equator = np.sqrt(c / (2.0 * beta(0.0)))
    with np.errstate(divide="ignore"):
        away = np.where(f > 0.0, c / np.where(f > 0.0, f, 1.0), np.inf)
    return np.minimum(near_equator, away)
