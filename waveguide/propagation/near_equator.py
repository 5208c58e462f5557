"""The coast within reach of the equator, where the wave is not yet trapped by the coast alone.

Within the matching distance of a junction (see :mod:`waveguide.propagation.equator`) sea level
follows the wall solution W(ŷ, ω): its modulus shapes the coast between the equator and the
matching latitude, and its phase is the lag along it. A western wall has its own solution; its
lag between two latitudes is that of the eastern one read backwards (reciprocity), to within 2.5°
from ŷ = 0.5 outwards.

The wall of that solution is meridional. A real coast between two latitudes is longer; what is in
excess of its extent in latitude adds the lag of a wave that runs along it with speed c. What its
lean does besides is that of :mod:`waveguide.propagation.junctions`.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import BETA_EQUATOR, coriolis
from waveguide.network.graph import Network
from waveguide.propagation.equator import eastern_wall, scaled_frequency, western_wall
from waveguide.propagation.junctions import (
    JunctionTable,
    junction_table,
    leaning_shape,
    network_junctions,
)
from waveguide.propagation.modes import (
    HIGHEST_SCALED_FREQUENCY,
    ModeAtNodes,
    known_speed,
    poleward_nodes,
    scaled_distance,
)

Array = NDArray[np.float64]
Index = NDArray[np.int64]

_CELLS = 40


@dataclass(frozen=True)
class WallTable:
    """Wall solutions between the equator and the matching latitude.

    Attributes
    ----------
    matching : float
        Matching distance ŷ.
    eastern, western : ndarray, shape (g, nω)
        |W(ŷ)|/|W(matching)| at g equidistant ŷ from 0 to `matching`.
    lag : ndarray, shape (g, nω)
        arg W(ŷ) − arg W(0) (rad).
    junctions : JunctionTable
        What the lean of the coasts changes.
    """

    matching: float
    eastern: Array
    western: Array
    lag: Array
    junctions: JunctionTable

    def at(self, frequencies: slice) -> WallTable:
        """The table at some of its frequencies."""
        return WallTable(
            self.matching, self.eastern[:, frequencies], self.western[:, frequencies],
            self.lag[:, frequencies], self.junctions.at(frequencies),
        )  # fmt: skip


def wall_table(
    omega: Array, speed: float, matching: float, junctions: JunctionTable
) -> WallTable:
    """Tabulate the wall solutions.

    Parameters
    ----------
    omega : ndarray, shape (nω,)
        Angular frequency (rad/s).
    speed : float
        Phase speed (m/s) typical of the walls.
    matching : float
        Matching distance in L_e.
    junctions : JunctionTable
        At the same frequencies.

    Returns
    -------
    WallTable
        Where ω̂ exceeds the range of the wall solution its modulus is that of the highest ω̂ and
        its lag grows with ω.
    """
    frequency = scaled_frequency(omega, speed)
    inside = np.minimum(frequency, HIGHEST_SCALED_FREQUENCY)
    distance = np.linspace(0.0, matching, _CELLS + 1)
    wall, back = eastern_wall(inside, distance).T, western_wall(inside, distance).T
    lag = np.unwrap(np.angle(wall), axis=0)
    beyond = np.maximum(frequency / HIGHEST_SCALED_FREQUENCY, 1.0)
    return WallTable(
        matching, np.abs(wall / wall[-1]), np.abs(back / back[-1]), (lag - lag[0]) * beyond,
        junctions,
    )  # fmt: skip


def network_wall_table(
    network: Network, mode: ModeAtNodes, omega: Array, nodes: Index
) -> WallTable:
    """Wall table for the median speed of the coast nodes within the matching distance.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    omega : ndarray, shape (nω,)
        Angular frequency (rad/s).
    nodes : ndarray of int
        Where it will be used.

    Returns
    -------
    WallTable
    """
    near = np.isfinite(network.offshore)
    near &= scaled_distance(network, mode, np.arange(network.size)) < mode.matching
    speed = float(np.median(known_speed(mode)[near])) if near.any() else 1.0
    junctions = junction_table(network_junctions(network, mode), mode, omega, nodes)
    return wall_table(omega, speed, mode.matching, junctions)


def potential(network: Network, mode: ModeAtNodes, nodes: Index, table: WallTable) -> Array:
    """Sea level of a wave of unit energy flux at nodes, P (see `waveguide.propagation.losses`).

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    nodes : ndarray of int, shape (k,)
    table : WallTable

    Returns
    -------
    ndarray, shape (k, nω)
        P (m^-1/2 s^-1/2).
    """
    c = known_speed(mode)[nodes]
    f = floored_coriolis(network.lat[nodes], c, mode.matching)
    flux = np.where(
        network.equatorial[nodes], (BETA_EQUATOR * c / np.pi) ** 0.25, np.sqrt(2.0 * f)
    )
    return (mode.coastal_value[nodes] * flux)[:, None] * _shape(network, mode, nodes, table)


def floored_coriolis(lat: Array, speed: Array, matching: float) -> Array:
    """|f|, but no less than at the matching distance from the equator.

    Parameters
    ----------
    lat : ndarray
        Degrees.
    speed : ndarray
        Phase speed (m/s), broadcasts.
    matching : float
        Matching distance in L_e.

    Returns
    -------
    ndarray
        |f| (1/s).
    """
    return np.maximum(np.abs(coriolis(lat)), matching * np.sqrt(BETA_EQUATOR * speed))


def wall_lag(table: WallTable, first: Array, last: Array) -> Array:
    """Lag of the wall solution between two distances from the equator.

    Parameters
    ----------
    table : WallTable
    first, last : ndarray, shape (k,)
        ŷ, from 0 to the matching distance, in either order.

    Returns
    -------
    ndarray, shape (k, nω)
        Radians.
    """
    near, far = np.minimum(first, last), np.maximum(first, last)
    return _at(table.lag, far / table.matching) - _at(table.lag, near / table.matching)


def _shape(network: Network, mode: ModeAtNodes, nodes: Index, table: WallTable) -> Array:
    """Sea level along the wall of a junction over that at the matching distance."""
    distance = scaled_distance(network, mode, nodes)
    shape = np.ones((nodes.size, table.eastern.shape[1]))
    near = np.nonzero(np.isfinite(network.offshore[nodes]) & (distance < table.matching))[0]
    place = distance[near] / table.matching
    found = table.junctions.junctions
    coast = found.coast[nodes[near]]  # a bend on the way to a junction does not change its sides
    ours = np.append(found.eastern, False)[coast // 2]
    eastward = np.where(coast >= 0, ours, poleward_nodes(network)[nodes[near]])
    shape[near] = np.where(
        eastward[:, None], _at(table.eastern, place), _at(table.western, place)
    )
    shape[near] *= leaning_shape(table.junctions, nodes[near], place)
    return shape


def _at(values: Array, position: Array) -> Array:
    """Linear interpolation between the rows of a table; position 0 to 1."""
    exact = np.clip(position, 0.0, 1.0) * _CELLS
    row = np.minimum(exact.astype(np.int64), _CELLS - 1)
    weight = (exact - row)[:, None]
    return np.asarray((1.0 - weight) * values[row] + weight * values[row + 1])
