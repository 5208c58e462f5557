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
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import BETA_EQUATOR, coriolis
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.dispersion import segment_loss
from waveguide.propagation.equator import (
    eastern_junction,
    eastern_wall,
    equatorial_radius,
    scaled_frequency,
)
from waveguide.propagation.gaps import facing_coast_share, passage

Array = NDArray[np.float64]
Index = NDArray[np.int64]

MATCHING = 2.0
"""Distance from the equator, in L_e, where a coast takes over from a junction."""

BAROTROPIC_MATCHING = 1.0
"""The same for the barotropic mode, whose L_e of 3000 km leaves no room for two."""

HIGHEST_SCALED_FREQUENCY = 3.0
"""ω̂ up to which the wall solution holds."""


@dataclass(frozen=True)
class StepPhysics:
    """Times and losses of one mode at one frequency.

    Attributes
    ----------
    time : ndarray, shape (m,)
        Travel time of the front along each step (s); infinite where the mode does not exist.
    loss : ndarray, shape (m,)
        Nepers of a, ≥ 0.
    slowness : ndarray, shape (n,)
        1/c at every node (s/m), NaN where the mode does not exist.
    potential : ndarray, shape (n,)
        P of every node (m^-1/2 s^-1/2); ratios of P are ratios of sea level at equal flux.
    """

    time: Array
    loss: Array
    slowness: Array
    potential: Array


@dataclass(frozen=True)
class ModeAtNodes:
    """One mode at the nodes and gaps of a network.

    Attributes
    ----------
    number : int
    speed, coastal_value : ndarray, shape (n,)
        Phase speed (m/s) and F(0,0) (m^-1/2), NaN where the mode does not exist.
    gap_share : ndarray, shape (k,)
        Share of the mode that clears the sill of each gap.
    """

    number: int
    speed: Array
    coastal_value: Array
    gap_share: Array

    @property
    def matching(self) -> float:
        """Distance from the equator where a coast takes over, in L_e."""
        return MATCHING if self.number > 0 else BAROTROPIC_MATCHING


def step_physics(
    network: Network, mode: ModeAtNodes, omega: float, damping: float = 0.0
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

    Returns
    -------
    StepPhysics
    """
    slowness = 0.5 * (1.0 / mode.speed[network.tail] + 1.0 / mode.speed[network.head])
    time = np.where(np.isfinite(slowness), network.length * slowness, np.inf)
    speed = np.where(np.isfinite(slowness), 1.0 / np.where(slowness > 0, slowness, 1.0), 1.0)
    loss = np.zeros(network.tail.size)
    coast = network.kind == StepKind.COAST
    loss[coast] = _coast_loss(network, coast, speed, mode.matching, omega, damping)
    other = ~coast & np.isfinite(time)
    loss[other] += damping * time[other]
    loss += _junction_loss(network, speed, mode.matching, omega)
    loss += _gap_loss(network, mode, omega)
    return StepPhysics(time, loss, 1.0 / mode.speed, _potential(network, mode, omega))


def _floored_coriolis(lat: Array, speed: Array, matching: float) -> Array:
    """|f|, but no less than at the matching distance from the equator."""
    floor = matching * np.sqrt(BETA_EQUATOR * speed)
    return np.maximum(np.abs(coriolis(lat)), floor)


def _coast_loss(
    network: Network, coast: NDArray[np.bool_], speed: Array, matching: float,
    omega: float, damping: float,
) -> Array:
    """Radiation of Rossby waves and damping along coast steps."""
    c = speed[coast]
    start = _floored_coriolis(network.lat[network.tail[coast]], c, matching)
    end = _floored_coriolis(network.lat[network.head[coast]], c, matching)
    return segment_loss(omega, c, start, end, network.length[coast], damping)


def stretch_lengths(network: Network) -> Array:
    """Length of the equatorial stretch that each step belongs to (m), 0 off the equator."""
    equator = network.kind == StepKind.EQUATOR
    inner = np.where(network.equatorial[network.head], network.head, network.tail)
    line = np.where(equator & network.equatorial[inner], network.line[inner], -1)
    total = np.bincount(line + 1, weights=network.length, minlength=1)
    return np.where(line >= 0, total[line + 1], np.where(equator, network.length, 0.0))


def _junction_loss(network: Network, speed: Array, matching: float, omega: float) -> Array:
    """Loss where a step of the equator starts at a western or ends at an eastern boundary.

    Water shorter than L_e along the equator is no ocean with waves of its own: the signal passes.
    """
    stretch = stretch_lengths(network) >= equatorial_radius(speed)
    equator = (network.kind == StepKind.EQUATOR) & stretch
    # The share of energy that one coast delivers or receives is the same (reciprocity).
    ends = equator & ~network.equatorial[network.head]
    starts = equator & ~network.equatorial[network.tail]
    loss = np.zeros(network.tail.size)
    at = np.nonzero(ends | starts)[0]
    energy = eastern_junction(omega, speed[at], matching).energy_out
    with np.errstate(divide="ignore"):
        loss[at] = -0.5 * np.log(energy) * (ends[at].astype(float) + starts[at])
    return np.maximum(loss, 0.0)


def _gap_loss(network: Network, mode: ModeAtNodes, omega: float) -> Array:
    """Loss of what crosses a gap, and of what passes its mouth."""
    crossing, passing = gap_factors(network, mode, omega)
    loss = np.zeros(network.tail.size)
    with np.errstate(divide="ignore"):
        for row, factor in ((network.gap, crossing), (network.passes, passing)):
            at = row >= 0
            loss[at] -= np.log(factor[row[at]])
    return np.maximum(loss, 0.0)


def gap_factors(network: Network, mode: ModeAtNodes, omega: float) -> tuple[Array, Array]:
    """Amplitude that crosses each gap, and that stays on the coast whose mouth it opens.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    omega : float

    Returns
    -------
    crossing, passing : ndarray, shape (k,)
        Through a strait crosses what the far basin gets; a facing coast and the far side of
        an opening get what jumps over.
    """
    step = np.nonzero(network.gap >= 0)[0]
    step = step[np.argsort(network.gap[step])]
    speed = mode.speed[network.tail[step]]
    f = np.maximum(np.abs(coriolis(network.lat[network.tail[step]])), 1e-7)
    known = np.isfinite(speed)
    c = np.where(known, speed, 1.0)
    direct = facing_coast_share(network.gap_width, c / f)
    length = np.maximum(network.gap_length, 1e3)
    beyond = passage(omega, network.gap_width, length, f, c, mode.gap_share)
    through, across = np.abs(beyond.through), np.abs(beyond.across)
    strait = network.kind[step] == StepKind.STRAIT
    opening = network.kind[step] == StepKind.OPENING
    crossing = np.where(strait, through, np.where(opening, direct, across))
    passing = np.where(strait, across, np.where(opening, 1.0 - direct**2, through))
    return np.where(known, crossing, 0.0), np.where(known, passing, 1.0)


def poleward_nodes(network: Network) -> NDArray[np.bool_]:
    """Coast nodes from which the signal travels towards the pole: an eastern boundary."""
    coast = network.kind == StepKind.COAST
    tail, head = network.tail[coast], network.head[coast]
    poleward = np.zeros(network.size, dtype=bool)
    poleward[tail] = np.abs(network.lat[head]) > np.abs(network.lat[tail])
    return poleward


def _potential(network: Network, mode: ModeAtNodes, omega: float) -> Array:
    """P of every node."""
    c = np.where(np.isfinite(mode.speed), mode.speed, 1.0)
    flux = np.where(
        network.equatorial,
        (BETA_EQUATOR * c / np.pi) ** 0.25,
        np.sqrt(2.0 * _floored_coriolis(network.lat, c, mode.matching)),
    )
    return mode.coastal_value * flux * _wall_shape(network, c, mode.matching, omega)


def _wall_shape(network: Network, speed: Array, matching: float, omega: float) -> Array:
    """Sea level along the wall of a junction over that at the matching distance.

    At a western wall it is ŷ over the shape of the eastern one (reciprocity, see
    `waveguide.propagation.equator`), kept finite where the wall meets the equator.
    """
    shape = np.ones(network.size)
    distance = np.abs(coriolis(network.lat)) / np.sqrt(BETA_EQUATOR * speed)
    near = np.nonzero(np.isfinite(network.offshore) & (distance < matching))[0]
    if not near.size:
        return shape
    typical = float(np.median(speed[near]))
    frequency = np.minimum(scaled_frequency(omega, typical), HIGHEST_SCALED_FREQUENCY)
    grid = np.linspace(0.0, matching, 41)
    wall = np.abs(eastern_wall(frequency, grid))
    eastern = np.interp(distance[near], grid, wall / wall[-1])
    western = np.maximum(distance[near], 0.05) / matching / eastern
    shape[near] = np.where(poleward_nodes(network)[near], eastern, western)
    return shape


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
