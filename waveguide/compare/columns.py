"""Vertical modes of the packaged ocean at a place."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from waveguide.errors import InputError
from waveguide.modes.vertical import VerticalModes, vertical_modes
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.ocean.stratification import packaged_climatology

Array = NDArray[np.float64]

SHALLOWEST = 200.0
"""Positions in shallower water take the vertical structure of a column this deep (m)."""

HIGHEST_MODE = 3


def column_modes(lon: float, lat: float) -> tuple[VerticalModes, tuple[Array, Array]]:
    """Vertical modes 0 to 3 of the packaged ocean at a place, and its depths and N².

    Parameters
    ----------
    lon, lat : float
        Degrees.

    Returns
    -------
    VerticalModes
    (depth, n2) : pair of ndarray
        m and 1/s².

    Raises
    ------
    InputError
        If no sea is known there.
    """
    depth = float(packaged_bathymetry().sample(np.array([lon]), np.array([lat]))[0])
    bottom = max(depth, SHALLOWEST) if np.isfinite(depth) else SHALLOWEST
    profile = packaged_climatology().profiles(lon, lat, minimum_depth=bottom / 2.0)
    n2 = profile.n2[0]
    if not np.isfinite(n2).all():
        raise InputError(
            f"position [{lon:g}, {lat:g}]: the packaged climatology has no water there; move the "
            "record, or leave its vertical structure out"
        )
    return vertical_modes(n2, profile.depth, bottom, HIGHEST_MODE), (profile.depth, n2)
