"""Where a mode is best seen: what instruments at depth measure of it.

Per metre of sea level at the coast or on the equator a mode of pressure structure p(z) moves
isopycnals by ζ(z) = −g p_z/(N² p(0)), has the current (g/c) p(z)/p(0) along the guide, strongest
at the surface, and changes the pressure at the bottom by p(−H)/p(0) metres of water.

How well that is seen depends on what else moves there. Isopycnals are moved by internal waves, by
√(½b²E N₀/N) = 7.3 m √(N₀/N) in the model of Garrett and Munk (b = 1300 m, E = 6.3e-5,
N₀ = 5.24e-3 s⁻¹), more where the water is less stratified; so the depth where a mode is seen best
is not that of its largest displacement. The other levels of `NOISE` are round figures for a record
freed of tides and averaged over a day (MEMORY): sea level 3 cm (weather, after the inverse
barometer), currents 10 cm/s (eddies), bottom pressure 1 cm of water (drift and weather). They
compare instruments with each other; they do not design one.

References
----------
Munk (1981), Internal waves and small-scale processes, in Evolution of Physical Oceanography, MIT
Press.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import GRAVITY
from waveguide.modes.vertical import VerticalModes

Array = NDArray[np.float64]

QUANTITIES = ("sea level", "isopycnal displacement", "current along the guide", "bottom pressure")
"""What can be measured, in the order of `NOISE`."""

NOISE = (0.03, 7.3, 0.10, 0.01)
"""m, m where N = `NOISE_FREQUENCY`, m/s and m of water."""

NOISE_FREQUENCY = 5.24e-3
"""N₀ of the internal waves (1/s)."""

_LEAST_FREQUENCY = 1e-5  # 1/s; less is no stratification


class View(NamedTuple):
    """What one mode shows, of each of `QUANTITIES`.

    Attributes
    ----------
    per_metre : ndarray, shape (4,)
        Per metre of sea level (m, m, m/s, m), at the depth where it stands out most.
    depth : ndarray, shape (4,)
        That depth (m, positive down).
    noise : ndarray, shape (4,)
        Level of noise there, in the same units.
    """

    per_metre: Array
    depth: Array
    noise: Array


def view_of_mode(modes: VerticalModes, mode: int, n2: Array, n2_depth: Array) -> View:
    """What instruments measure of a mode, and at which depth it stands out most.

    Parameters
    ----------
    modes : VerticalModes
        Of the water beside the place.
    mode : int
        One that `modes` holds.
    n2, n2_depth : ndarray, shape (nz,)
        Buoyancy frequency squared (1/s²) at depths (m).

    Returns
    -------
    View
    """
    row = int(np.flatnonzero(modes.mode == mode)[0])
    frequency = np.sqrt(np.interp(modes.depth, n2_depth, n2))
    moved = NOISE[1] * np.sqrt(NOISE_FREQUENCY / np.maximum(frequency, _LEAST_FREQUENCY))
    at = int(np.argmax(np.abs(modes.displacement[row]) / moved))
    pressure = float(modes.structure[row, -1] / modes.structure[row, 0])
    current = GRAVITY / float(modes.phase_speed[row])
    return View(
        np.array([1.0, float(modes.displacement[row, at]), current, pressure]),
        np.array([0.0, float(modes.depth[at]), 0.0, float(modes.depth[-1])]),
        np.array([NOISE[0], float(moved[at]), NOISE[2], NOISE[3]]),
    )


def clarity(view: View, height: float) -> Array:
    """Expected signal over noise of each of `QUANTITIES` for a sea level (m), shape (4,)."""
    return np.asarray(np.abs(height * view.per_metre) / view.noise)
