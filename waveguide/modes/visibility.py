"""Where a mode is best seen: what instruments at depth measure of it.

Per metre of sea level at the coast or on the equator a mode of a flat bottom, of pressure structure
p(z), moves isopycnals by ζ(z) = −g p_z/(N² p(0)), has the current (g/c) p(z)/p(0) along the guide,
strongest at the surface, and changes the pressure at the bottom by p(−H)/p(0) metres of water: at
the coast or on the equator itself, and less farther away. A mode of a cross-shelf section has its
own structure p(x, z), of which the same follows (:mod:`waveguide.modes.modeset`), and places where
each quantity is largest. They are looked for within twice the trapping scale, beyond which the mode
has 2 % of its energy; the pressure at the bottom in more than `INNER_SHELF` of water, as inshore of
it a sensor measures sea level.

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
from waveguide.modes.modeset import ModeSet, alongshore_velocity, isopycnal_displacement
from waveguide.modes.vertical import VerticalModes

Array = NDArray[np.float64]

QUANTITIES = ("sea level", "isopycnal displacement", "current along the guide", "bottom pressure")
"""What can be measured, in the order of `NOISE`."""

NOISE = (0.03, 7.3, 0.10, 0.01)
"""m, m where N = `NOISE_FREQUENCY`, m/s and m of water."""

NOISE_FREQUENCY = 5.24e-3
"""N₀ of the internal waves (1/s)."""

INNER_SHELF = 50.0
"""Depth (m)."""

_LEAST_FREQUENCY = 1e-5  # 1/s; less is no stratification


class View(NamedTuple):
    """What one mode shows, of each of `QUANTITIES`.

    Attributes
    ----------
    per_metre : ndarray, shape (4,)
        Per metre of sea level (m, m, m/s, m), at the depth where it stands out most.
    depth : ndarray, shape (4,)
        That depth (m, positive down).
    offshore : ndarray, shape (4,)
        How far from the shore of the section that is (m); 0 for a flat bottom.
    noise : ndarray, shape (4,)
        Level of noise there, in the same units.
    """

    per_metre: Array
    depth: Array
    offshore: Array
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
    moved = _moved(np.interp(modes.depth, n2_depth, n2))
    at = int(np.argmax(np.abs(modes.displacement[row]) / moved))
    pressure = float(modes.structure[row, -1] / modes.structure[row, 0])
    current = GRAVITY / float(modes.phase_speed[row])
    return View(
        np.array([1.0, float(modes.displacement[row, at]), current, pressure]),
        np.array([0.0, float(modes.depth[at]), 0.0, float(modes.depth[-1])]),
        np.zeros(len(QUANTITIES)),
        np.array([NOISE[0], float(moved[at]), NOISE[2], NOISE[3]]),
    )


def view_of_section(modes: ModeSet, rank: int) -> View:
    """What instruments measure of a mode of a section, and where it stands out most.

    Parameters
    ----------
    modes : ModeSet
        Of the section at the place.
    rank : int
        Of the mode, by speed; one that `modes` holds.

    Returns
    -------
    View
    """
    row = int(np.flatnonzero(modes.mode == rank)[0])
    moved = _moved(modes.profile.at(modes.depth))
    rise, flow = isopycnal_displacement(modes)[row], alongshore_velocity(modes)[row]
    near = modes.offshore <= max(2.0 * float(modes.trapping_scale[row]), modes.offshore[1])
    rise, flow = rise[:, near], flow[:, near]
    column = np.flatnonzero(near)
    bottom = modes.depth[modes.bottom[near]]
    pressure = modes.structure[row, modes.bottom[near], column] / modes.structure[row, 0, 0]
    pressure = np.where(bottom >= min(INNER_SHELF, bottom.max()), pressure, 0.0)
    level, across = _largest(rise / moved[:, None])
    up, out = _largest(flow)
    floor = int(np.argmax(np.abs(pressure)))
    return View(
        np.array([1.0, rise[level, across], flow[up, out], pressure[floor]]),
        np.array([0.0, modes.depth[level], modes.depth[up], bottom[floor]]),
        modes.offshore[[0, across, out, floor]],
        np.array([NOISE[0], moved[level], NOISE[2], NOISE[3]]),
    )


def _moved(n2: Array) -> Array:
    """How far internal waves move isopycnals (m) where N² (1/s²) is given."""
    frequency = np.maximum(np.sqrt(n2), _LEAST_FREQUENCY)
    return np.asarray(NOISE[1] * np.sqrt(NOISE_FREQUENCY / frequency))


def _largest(field: Array) -> tuple[int, int]:
    """Row and column of the largest modulus of a field with missing values."""
    row, column = np.unravel_index(np.nanargmax(np.abs(field)), field.shape)
    return int(row), int(column)


def clarity(view: View, height: float) -> Array:
    """Expected signal over noise of each of `QUANTITIES` for a sea level (m), shape (4,)."""
    return np.asarray(np.abs(height * view.per_metre) / view.noise)
