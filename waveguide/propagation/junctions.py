"""The two coasts of every junction with the equator: how they lean and what each of them gets.

The lean of a coast is that of the straight line from the junction to where the coast leaves the
matching distance (see :mod:`waveguide.propagation.equator`), positive where the coast leads on
past the meridian as it leaves the equator: eastward at an eastern junction, westward at a
western one. A cape, which comes back to the equator before, leans as far as has been checked.

With g e^(iδ) the ratio of sea level at the matching distance ŷ_m to that without lean, counted
from a wave that runs along the leaning line with speed c,

- sea level along an eastern coast is that of a meridional wall times g^(ŷ/ŷ_m): lean leaves it
  as it is at the equator, to first order, and its logarithm grows about as ŷ from there. δ is
  dealt out with what the coast is longer than its rise in latitude. Integrations along straight
  coasts of 30° and 57° agree within 20 % and 30° up to ω̂ = 0.8, on the coast that leads on;
- along a western coast the wave comes on with speed c, and δ is had at the junction. It is
  negative where the wave leaves for the equator ahead of the line of the route.

That the straight line stands for a coast with bends is an approximation. North-east Brazil tries
it hard, nearly zonal from the equator to 5° S and meridional beyond. In an integration over the
real Atlantic (tests/oracle/test_oracle_atlantic.py) a burst reaches Africa 5 days
earlier and 1.5 times weaker than meridional junctions make it, after 31 days. Of 5.3 days the
lean explains 4.3: 3.5 because a coast that leans away keeps back the faster part of the burst,
so that what passes rises more slowly but sooner, and 0.8 by the phase δ of the wave that leaves
the coast on its way. What is left, 1 day and 11 %, is Brazil's (on the equator at 20° W 1.5 days
and 14 %) and is put down to the bend; from there to Gabon and Angola lean theory is within
0.2 days and 6 %.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import BETA_EQUATOR, coriolis
from waveguide.geodesy import wrap_longitude
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.equator import (
    STEEPEST_LEAN,
    coastal_amplitude,
    equatorial_radius,
    scaled_frequency,
)
from waveguide.propagation.modes import ModeAtNodes, scaled_distance, stretch_lengths

Array = NDArray[np.float64]
Index = NDArray[np.int64]

SIDES = ("north", "south")


@dataclass(frozen=True)
class Junctions:
    """Where the equator of an ocean meets its coasts.

    Attributes
    ----------
    node : ndarray of int, shape (j,)
        The node on the equator.
    eastern : ndarray of bool, shape (j,)
        Whether it is an eastern boundary.
    lean : ndarray, shape (j, 2)
        Lean (degrees) of the coasts in the order of `SIDES`.
    excess : ndarray, shape (j, 2)
        What they are longer than their rise in latitude, up to the matching distance (m).
    at : ndarray of int, shape (n,)
        The junction that a node is, otherwise −1.
    coast : ndarray of int, shape (n,)
        For coast nodes between a junction and the matching distance twice the number of the
        junction, plus 1 if to the south; otherwise −1.
    """

    node: Index
    eastern: NDArray[np.bool_]
    lean: Array
    excess: Array
    at: Index
    coast: Index


@dataclass(frozen=True)
class JunctionTable:
    """What the coasts of junctions get at every frequency.

    Attributes
    ----------
    junctions : Junctions
    energy : ndarray, shape (j, 2, nω)
        Share of the energy of a wave along the equator that each coast gets at an eastern
        junction, and of a wave along the coast that the equator gets at a western one.
    gain : ndarray, shape (j, 2, nω)
        Sea level at the matching distance over that without lean.
    lag : ndarray, shape (j, 2, nω)
        Phase δ of that ratio (rad); on a cape the share of it that its shorter line has.
    upright : ndarray, shape (j, nω)
        Phase at the matching distance without lean (rad).
    """

    junctions: Junctions
    energy: Array
    gain: Array
    lag: Array
    upright: Array

    def at(self, frequencies: slice) -> JunctionTable:
        """The table at some of its frequencies."""
        return JunctionTable(
            self.junctions, self.energy[..., frequencies], self.gain[..., frequencies],
            self.lag[..., frequencies], self.upright[..., frequencies],
        )


def network_junctions(network: Network, mode: ModeAtNodes) -> Junctions:
    """Junctions of coasts with the equator of oceans, and the lean of the coasts.

    Water shorter than L_e along the equator is no ocean with waves of its own: it passes.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes

    Returns
    -------
    Junctions
    """
    east, west = _ends(network, mode, True), _ends(network, mode, False)
    node = np.concatenate([east, west])
    lean = np.zeros((node.size, len(SIDES)))
    at, coast = (np.full(network.size, -1, dtype=np.int64) for _ in range(2))
    at[node] = np.arange(node.size)
    for eastern, nodes in ((True, east), (False, west)):
        for line in _coasts_from(network, mode, nodes, eastern):
            side = int(network.lat[line[1]] < 0.0)
            lean[at[line[0]], side] = _lean(network, line, eastern)
            near = line[1:][scaled_distance(network, mode, line[1:]) < mode.matching]
            coast[near] = np.where(at[near] < 0, 2 * at[line[0]] + side, -1)
    steps = np.nonzero(network.kind == StepKind.COAST)[0]
    row, excess = coasts_of_steps(network, coast, steps), excess_lengths(network, mode, steps)
    total = np.zeros(lean.size + 1)  # the last for steps of no junction
    np.add.at(total, row, excess)
    return Junctions(
        node, np.arange(node.size) < east.size, lean, total[:-1].reshape(lean.shape), at, coast
    )


def coasts_of_steps(network: Network, coast: Index, steps: Index) -> Index:
    """The coast of a junction (see `Junctions.coast`) along which each coast step runs, or −1.

    Parameters
    ----------
    network : Network
    coast : ndarray of int, shape (n,)
    steps : ndarray of int, shape (k,)

    Returns
    -------
    ndarray of int, shape (k,)
    """
    return np.maximum(coast[network.tail[steps]], coast[network.head[steps]])


def excess_lengths(network: Network, mode: ModeAtNodes, steps: Index) -> Array:
    """What coast steps are longer than their rise in latitude, within the matching distance.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    steps : ndarray of int, shape (k,)

    Returns
    -------
    ndarray, shape (k,)
        Metres; 0 for steps that do not lie within the matching distance.
    """
    ends = network.tail[steps], network.head[steps]
    near = np.maximum(*(scaled_distance(network, mode, node) for node in ends)) < mode.matching
    first, last = (np.abs(coriolis(network.lat[node])) for node in ends)
    rise = np.abs(last - first) / BETA_EQUATOR
    return np.where(near, np.maximum(network.length[steps] - rise, 0.0), 0.0)


def junction_table(
    junctions: Junctions, mode: ModeAtNodes, omega: Array, nodes: Index
) -> JunctionTable:
    """What the coasts of the junctions near some nodes get; the others are left out.

    Parameters
    ----------
    junctions : Junctions
    mode : ModeAtNodes
    omega : ndarray, shape (nω,)
        Angular frequency ≥ 0 (rad/s).
    nodes : ndarray of int

    Returns
    -------
    JunctionTable
    """
    near = np.unique(np.concatenate([junctions.at[nodes], junctions.coast[nodes] // 2]))
    some = _selected(junctions, near[near >= 0])
    c = mode.speed[some.node][:, None, None]
    frequency = scaled_frequency(omega, c)
    here, there = some.lean[:, :, None], some.lean[:, ::-1, None]
    leaning = coastal_amplitude(frequency, mode.matching, here, there)
    upright = coastal_amplitude(frequency, mode.matching, 0.0, 0.0)
    detour = mode.matching * (1.0 / np.cos(np.radians(here)) - 1.0)
    whole = np.maximum(detour * equatorial_radius(c), 1.0)
    reached = np.minimum(some.excess[:, :, None] / whole, 1.0)
    carried = np.abs(upright) > 0.0
    ratio = np.divide(leaning, upright, out=np.ones_like(leaning), where=carried)
    return JunctionTable(
        some,
        np.abs(leaning) ** 2 / (2.0 * np.sqrt(np.pi) * mode.matching),
        np.abs(ratio),
        reached * np.angle(ratio * np.exp(-1j * frequency * detour)),
        np.angle(upright[:, 0]),
    )


def leaning_shape(table: JunctionTable, nodes: Index, place: Array) -> Array:
    """Sea level along a coast that leans over that at the matching distance, and without lean.

    At the junction it is that of the coast that gets more; what its wave has in excess there, the
    first step of the other coast loses. Along western coasts no such shape is known.

    Parameters
    ----------
    table : JunctionTable
    nodes : ndarray of int, shape (k,)
    place : ndarray, shape (k,)
        Their ŷ over that of the matching distance.

    Returns
    -------
    ndarray, shape (k, nω)
        g^(ŷ/ŷ_m − 1) on coasts of eastern junctions, elsewhere 1.
    """
    found = table.junctions
    shape = np.ones((nodes.size, table.upright.shape[-1]))
    owner = np.maximum(found.coast[nodes] // 2, found.at[nodes])
    here = np.nonzero((owner >= 0) & np.append(found.eastern, False)[owner])[0]
    owner, side = owner[here], found.coast[nodes[here]] % 2
    on_coast = (found.coast[nodes[here]] >= 0)[:, None]
    gain = np.where(on_coast, table.gain[owner, side], table.gain[owner].max(axis=1))
    shape[here] = gain ** (place[here, None] - 1.0)
    return shape


def _ends(network: Network, mode: ModeAtNodes, eastern: bool) -> Index:
    """Coast nodes at one end of the equatorial stretches as long as L_e."""
    end = network.head if eastern else network.tail
    steps = np.nonzero((network.kind == StepKind.EQUATOR) & ~network.equatorial[end])[0]
    c = mode.speed[end[steps]]
    exists = np.isfinite(c)
    steps, c = steps[exists], c[exists]
    ocean = stretch_lengths(network)[steps] >= equatorial_radius(c)
    return np.asarray(np.unique(end[steps[ocean]]))


def _coasts_from(
    network: Network, mode: ModeAtNodes, nodes: Index, eastern: bool
) -> list[Index]:
    """Nodes of the coasts that meet at junctions, outwards to the first beyond the matching."""
    coast = network.kind == StepKind.COAST
    near, far = network.tail[coast], network.head[coast]
    if not eastern:
        near, far = far, near
    outwards = np.full(network.size, -1, dtype=np.int64)
    outwards[near] = far
    distance = scaled_distance(network, mode, np.arange(network.size))
    lines = []
    for first in np.nonzero(np.isin(near, nodes))[0]:
        line = [int(near[first]), int(far[first])]
        while distance[line[-1]] < mode.matching and outwards[line[-1]] >= 0:
            line.append(int(outwards[line[-1]]))
        lines.append(np.array(line))
    return lines


def _lean(network: Network, line: Index, eastern: bool) -> float:
    """Lean (degrees) of the straight line between the ends of a coast."""
    (west, east), (start, end) = network.lon[line[[0, -1]]], network.lat[line[[0, -1]]]
    across = wrap_longitude(east - west) * np.cos(np.radians(0.5 * (start + end)))
    lean = np.degrees(np.arctan2(across if eastern else -across, abs(end - start)))
    return float(np.clip(lean, -STEEPEST_LEAN, STEEPEST_LEAN))


def _selected(junctions: Junctions, rows: Index) -> Junctions:
    """Some of the junctions, numbered anew."""
    number = np.full(junctions.node.size + 1, -1, dtype=np.int64)  # the last stands for none
    number[rows] = np.arange(rows.size)
    coast = junctions.coast
    owner = number[np.where(coast >= 0, coast // 2, -1)]
    return Junctions(
        junctions.node[rows],
        junctions.eastern[rows],
        junctions.lean[rows],
        junctions.excess[rows],
        number[junctions.at],
        np.where(owner >= 0, 2 * owner + coast % 2, -1),
    )
