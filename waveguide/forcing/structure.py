"""What a mooring on the equator sees of a mode beside sea level."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from waveguide.modes.vertical import vertical_modes
from waveguide.ocean.stratification import Climatology

Array = NDArray[np.float64]

REFERENCE_LEVEL = 500.0
"""Depth (m) against which dynamic height is told; moorings usually reach so far."""

_THERMOCLINE = (30.0, 400.0)
"""Depths (m) between which the greatest N² marks the thermocline."""


class MooringRatios(NamedTuple):
    """Per metre of sea level in a mode.

    Attributes
    ----------
    dynamic_height : float
        Dynamic height 0/500 m over g (m): 1 − p(500)/p(0).
    thermocline_depth : float
        Deepening of the thermocline (m): g p_z/(N² p(0)) at the depth of the greatest N².
    """

    dynamic_height: float
    thermocline_depth: float


def mooring_ratios(
    climatology: Climatology, lon: float, lat: float, depth: float, mode: int
) -> MooringRatios:
    """Dynamic height and thermocline depth per sea level in a baroclinic mode.

    Parameters
    ----------
    climatology : Climatology
    lon, lat : float
        Degrees.
    depth : float
        Of the water (m).
    mode : int
        1 and up.

    Returns
    -------
    MooringRatios
        NaN where the climatology knows no column, or the water is not deep enough.
    """
    n2 = climatology.profiles(np.array([lon]), np.array([lat])).n2[0]
    if not np.isfinite(n2).all() or not depth > REFERENCE_LEVEL:
        return MooringRatios(float("nan"), float("nan"))
    modes = vertical_modes(n2, climatology.depth, depth, mode)
    pressure, displacement = modes.structure[-1], modes.displacement[-1]
    below = np.interp(REFERENCE_LEVEL, modes.depth, pressure) / pressure[0]
    near = np.linspace(*_THERMOCLINE, 371)
    thermocline = near[np.argmax(np.interp(near, climatology.depth, n2))]
    return MooringRatios(
        float(1.0 - below), float(-np.interp(thermocline, modes.depth, displacement))
    )
