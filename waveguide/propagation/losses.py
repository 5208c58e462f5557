"""What each step of a network does to a wave: its time, and what it loses.

The amplitude of sea level is written η = a P, where the potential P of a node holds everything
that only depends on where the wave is, and a² is the energy flux of the wave:

- on a coast P = F √(2|f|), because the flux of p = φF e^(−x/R) is φ²/(2|f|);
- on the equator P = F (βc/π)^(1/4), because that of p = φF e^(−βy²/2c) is φ² √(π/βc).

So a changes by losses only, which are never negative and can be weights of a path search:
radiation of Rossby waves, junctions of coast and equator, straits and facing coasts, damping.

Close to the equator the coast has no trapping of its own. There (within `matching` equatorial
radii) the losses of the coast are those of the junction, and the shape of sea level along the wall
is the junction's own wall solution, put into P.

What a step does at any frequency is in :mod:`waveguide.propagation.step_response`; here it is
taken at the dominant one, as weights of the search.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import coriolis
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.modes import ModeAtNodes, friction_of_steps
from waveguide.propagation.near_equator import network_wall_table, potential
from waveguide.propagation.step_response import FATES, Conditions, step_response

Array = NDArray[np.float64]
Index = NDArray[np.int64]

_RUBBED = [FATES.index(fate) for fate in ("bottom friction", "interior damping")]


@dataclass(frozen=True)
class StepPhysics:
    """Times and losses of one mode at one frequency.

    Attributes
    ----------
    time : ndarray, shape (m,)
        Travel time of the front along each step (s); infinite where the mode does not exist.
    loss : ndarray, shape (m,)
        Nepers of a, ≥ 0.
    rubbed : ndarray, shape (m,)
        What bottom friction and damping have of them.
    slowness : ndarray, shape (n,)
        1/c at every node (s/m), NaN where the mode does not exist.
    potential : ndarray, shape (n,)
        P of every node (m^-1/2 s^-1/2); ratios of P are ratios of sea level at equal flux.
    """

    time: Array
    loss: Array
    rubbed: Array
    slowness: Array
    potential: Array


def step_physics(
    network: Network, mode: ModeAtNodes, omega: float, damping: float = 0.0, drag: float = 0.0
) -> StepPhysics:
    """Time and loss of every step, and the potential of every node.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    omega : float
        Dominant angular frequency (rad/s).
    damping : float
        Interior damping (1/s).
    drag : float
        Coefficient of the linear bottom stress (m/s).

    Returns
    -------
    StepPhysics
    """
    slowness = 1.0 / mode.speed
    along = 0.5 * (slowness[network.tail] + slowness[network.head])
    carried = np.nonzero(np.isfinite(along))[0]
    time = np.full(along.size, np.inf)
    loss, rubbed = np.zeros(along.size), np.zeros(along.size)
    time[carried] = network.length[carried] * along[carried]
    frequency = np.array([omega])
    nodes = np.arange(network.size)
    table = network_wall_table(network, mode, frequency, nodes)
    conditions = Conditions(friction=friction_of_steps(network, mode, drag), damping=damping)
    response = step_response(network, mode, carried, frequency, table, conditions)
    loss[carried] = response.nepers.sum(axis=0)[:, 0]
    rubbed[carried] = response.nepers[_RUBBED].sum(axis=0)[:, 0]
    level = potential(network, mode, nodes, table)[:, 0]
    return StepPhysics(time, loss, rubbed, slowness, level)


def critical_share(network: Network, steps: Index, speed: Array, omega: float) -> float:
    """Share of a route's coastal length that is travelled poleward below the critical frequency.

    Parameters
    ----------
    network : Network
    steps : ndarray of int, shape (k,)
    speed : ndarray, shape (n,)
    omega : float

    Returns
    -------
    float
        0 to 1. There the signal is nearly simultaneous along the coast.
    """
    coast = steps[network.kind[steps] == StepKind.COAST]
    if not coast.size:
        return 0.0
    tail, head = network.tail[coast], network.head[coast]
    rise = np.abs(coriolis(network.lat[head])) - np.abs(coriolis(network.lat[tail]))
    f = 0.5 * (np.abs(coriolis(network.lat[head])) + np.abs(coriolis(network.lat[tail])))
    gamma = rise / (2.0 * f * network.length[coast])
    below = omega < speed[tail] * gamma
    return float(network.length[coast][below].sum() / network.length[coast].sum())
