"""What an ensemble says of one target in one mode."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.modes.visibility import View
from waveguide.propagation.sampling import Percentile

Array = NDArray[np.float64]

SHARES = np.array([0.1, 0.5, 0.9])
"""P10, P50 and P90."""


@dataclass(frozen=True)
class RowPlan:
    """What one target can expect of one mode.

    Attributes
    ----------
    front, half_height, peak, width : Percentile
        Times from the stated start of the event, and duration above half height (s), at `SHARES`.
    ratio : ndarray, shape (3,)
        Peak over that of the source.
    height : ndarray, shape (3,)
        The same with the error of the source's height: sea level if the source had 1 m.
    window : (float, float)
        When to look (s).
    above : float
        Chance that the peak is above the threshold; NaN where the amplitude is unknown.
    time_shares, height_shares : ndarray, shape (inputs,)
        Of the variance of the half-height time and of ln height.
    speed : float
        Length of the path over the time of the front (m/s).
    reach : float
        Trapping scale at the target (m): how far off the guide a mooring may be.
    view : View or None
        What to measure; None where no stratification is known.
    """

    front: Percentile
    half_height: Percentile
    peak: Percentile
    width: Percentile
    ratio: Array
    height: Array
    window: tuple[float, float]
    above: float
    time_shares: Array
    height_shares: Array
    speed: float
    reach: float
    view: View | None
