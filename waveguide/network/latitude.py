"""What is typical of a latitude: the first mode's speed, and how shallow water still carries it.

The effective coastline needs both before any node exists, so they are taken as medians over the
open ocean of each latitude band.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.modes.vertical import phase_speeds
from waveguide.ocean.stratification import Climatology

Array = NDArray[np.float64]

BAND = 5.0
"""Width of a latitude band (degrees)."""

OPEN_OCEAN_DEPTH = 4000.0
"""Bottom of the typical column (m)."""

SILL_FRACTION = 0.2
"""Water carries the mode if N integrated over its depth is this share of the open ocean's.

That integral is π c₁ in the WKB approximation, so at the sill the mode would travel at a fifth of
its speed and be trapped within a fifth of its radius: a wall for practical purposes. The depth it
gives is 120 to 350 m, the depth of shelf breaks (our choice of the fraction).
"""


@dataclass(frozen=True)
class TypicalOcean:
    """Typical first mode by latitude.

    Attributes
    ----------
    lat : ndarray, shape (n,)
        Degrees, ascending, from pole to pole.
    phase_speed : ndarray, shape (n,)
        First-mode phase speed (m/s).
    sill_depth : ndarray, shape (n,)
        Depth that still carries the mode (m).
    """

    lat: Array
    phase_speed: Array
    sill_depth: Array


def typical_ocean(climatology: Climatology) -> TypicalOcean:
    """Typical first mode by latitude from a global climatology.

    Parameters
    ----------
    climatology : Climatology

    Returns
    -------
    TypicalOcean
        Bands without deep columns take the value of the nearest band that has some.
    """
    deep = np.isfinite(climatology.n2[np.searchsorted(climatology.depth, 2000.0)])
    centres = np.arange(-87.5, 90.0, BAND)
    speed, sill = np.full(centres.size, np.nan), np.full(centres.size, np.nan)
    for band, centre in enumerate(centres):
        rows = np.abs(climatology.lat - centre) <= BAND / 2.0
        columns = climatology.n2[:, rows][:, deep[rows]].T.astype(float)
        if columns.shape[0] < 20:
            continue
        known = np.isfinite(columns).sum(axis=0) >= 20
        column = np.nanmedian(columns[:, known], axis=0)
        column = np.append(column, np.full((~known).sum(), column[-1]))
        speed[band] = phase_speeds(
            column[None, :], climatology.depth, np.array([OPEN_OCEAN_DEPTH]), 1
        )[0, 0]
        sill[band] = _carrying_depth(column, climatology.depth)
    found = np.isfinite(speed)
    lat = np.concatenate([[-90.0], centres, [90.0]])
    return TypicalOcean(
        lat=lat,
        phase_speed=np.interp(lat, centres[found], speed[found]),
        sill_depth=np.interp(lat, centres[found], sill[found]),
    )


def _carrying_depth(n2: Array, depth: Array) -> float:
    """Depth above which the share `SILL_FRACTION` of ∫N dz lies (m)."""
    z = np.linspace(0.0, OPEN_OCEAN_DEPTH, 4001)
    n = np.sqrt(np.interp(z, depth, n2))
    integral = np.concatenate([[0.0], np.cumsum(0.5 * (n[1:] + n[:-1]) * np.diff(z))])
    return float(np.interp(SILL_FRACTION * integral[-1], integral, z))
