"""The transfer function of a whole route, and what each of its legs takes.

Convention exp(−iωt): η(target) = G(ω) η(source), and arg G > 0 is a delay. Along a route

    G = (source factor) (target factor) · P_end/P_start · exp Σ(−n + iφ)

with the lag φ and the nepers n of every step (:mod:`waveguide.propagation.step_response`) and the
potentials P that turn energy flux into sea level. |G| at one frequency is the amplitude that
`waveguide.propagation.routes` gives a route, and arg G → ω × front time where ω is high.

Routes share most of their steps, so every step is computed once and legs are sums over steps.

Energy is that of the mode's flux, a², with 1 at the start of the first leg. A leg that takes N
nepers leaves exp(−2N) of what it is given; what it takes is dealt out to the fates in proportion
to their nepers, as if they acted side by side along the leg. So the shares sum to one on every
leg and on the whole route. The factors of source and target, which only say how far off the guide
they are, are not part of it.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array

from waveguide.network.graph import Network
from waveguide.propagation.arrivals import Arrival
from waveguide.propagation.junctions import JunctionTable
from waveguide.propagation.mixed_waves import gains
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.near_equator import network_wall_table, potential
from waveguide.propagation.step_response import (
    FATES,
    STILL,
    Conditions,
    step_response,
    step_speeds,
)

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Index = NDArray[np.int64]

_FREQUENCIES_AT_ONCE = 128  # larger blocks gain nothing and take more memory


@dataclass(frozen=True)
class Path:
    """A route as a transfer function needs it.

    Attributes
    ----------
    steps : ndarray of int, shape (k,)
        In order of travel.
    leg_ends : ndarray of int, shape (legs,)
        Number of steps up to the end of each leg along the guide; the last is k. A leg between
        two places next to one node has no steps.
    start : int
        Node where the path begins.
    end : int
        Position in the target's ties of the node where it ends.
    source_factor, target_factor : float
        Shares of amplitude at the attachments.
    source_along, target_along : float
        How far beyond the first and the last node the path begins and ends (m).
    """

    steps: Index
    leg_ends: Index
    start: int
    end: int
    source_factor: float
    target_factor: float
    source_along: float = 0.0
    target_along: float = 0.0

    @property
    def leg_steps(self) -> list[Index]:
        """The steps of each leg."""
        return np.split(self.steps, self.leg_ends[:-1])


@dataclass(frozen=True)
class RouteTransfer:
    """Transfer function of a route.

    Attributes
    ----------
    omega : ndarray, shape (nω,)
        Angular frequency (rad/s).
    response : ndarray of complex, shape (nω,)
        G: sea level at the target over sea level at the source.
    leg_response : ndarray of complex, shape (legs, nω)
        The same at the end of every leg along the guide, without the target's factor.
    leg_nepers : ndarray, shape (5, legs, nω)
        Nepers that every leg takes, by fate in the order of `FATES`.
    front_time : float
        ∫ ds/(c + U), the time of the earliest energy (s).
    """

    omega: Array
    response: ComplexArray
    leg_response: ComplexArray
    leg_nepers: Array
    front_time: float

    def at(self, rows: Index) -> RouteTransfer:
        """The transfer function at some of its frequencies, in the order given."""
        return RouteTransfer(
            self.omega[rows], self.response[rows], self.leg_response[:, rows],
            self.leg_nepers[:, :, rows], self.front_time,
        )  # fmt: skip

    def beside(self, other: RouteTransfer) -> RouteTransfer:
        """The transfer function of the same route at the frequencies of two."""
        return RouteTransfer(
            np.append(self.omega, other.omega), np.append(self.response, other.response),
            np.append(self.leg_response, other.leg_response, axis=-1),
            np.append(self.leg_nepers, other.leg_nepers, axis=-1), self.front_time,
        )  # fmt: skip


class LegBudget(NamedTuple):
    """Where the energy of the source goes, as shares of it.

    Attributes
    ----------
    arrives : ndarray, shape (legs,)
        At the end of every leg.
    taken : ndarray, shape (legs, 5)
        On every leg, by fate in the order of `FATES`. The last of `arrives` and all of `taken`
        sum to one.
    """

    arrives: Array
    taken: Array


class _Times(NamedTuple):
    """Travel time of the front along the steps, and what both ends of a path add to it (s)."""

    steps: float
    before: float
    after: float


def paths_of_arrival(arrival: Arrival) -> list[Path]:
    """The routes of an arrival, in its order.

    Parameters
    ----------
    arrival : Arrival

    Returns
    -------
    list of Path
        Legs are those of the arrival without the attachments.
    """
    paths = []
    for route, legs in zip(arrival.routes, arrival.legs, strict=True):
        counts = [leg.step_count for leg in legs if leg.kind != "attachment"]
        paths.append(Path(
            route.steps,
            np.cumsum(counts, dtype=np.int64),
            int(arrival.source.node[route.start]),
            route.end,
            float(arrival.source.factor[route.start]),
            float(arrival.target.factor[route.end]),
            float(arrival.source.along[route.start]),
            float(arrival.target.along[route.end]),
        ))
    return paths


def independent_paths(paths: Sequence[Path]) -> list[int]:
    """Which paths to one target may be added up.

    A signal at a target is the sum over the different ways through the network, and the factors
    at straits, facing coasts and junctions make the sum right: what crosses a strait and what
    jumps its mouth are parts of one wave. A path within another one is no other way. It is the
    same wave, let in further on by a source that is tied to many nodes or let out earlier by a
    target tied to several; of such a pair the one with the larger attachment factors is kept, and
    if they are alike the one given first.

    Parameters
    ----------
    paths : sequence of Path

    Returns
    -------
    list of int
        Positions in `paths`, rising.
    """
    factor = [path.source_factor * path.target_factor for path in paths]
    kept: list[int] = []
    for one in sorted(range(len(paths)), key=lambda i: -factor[i]):
        if not any(_same_way(paths[one], paths[other]) for other in kept):
            kept.append(one)
    return sorted(kept)


def _same_way(one: Path, other: Path) -> bool:
    """Whether the steps of one path are a run within the other's."""
    short, long = sorted((one.steps, other.steps), key=lambda steps: int(steps.size))
    if not short.size:
        return True
    first = np.nonzero(long == short[0])[0]
    return any(np.array_equal(long[i : i + short.size], short) for i in first)


def route_transfers(
    network: Network, mode: ModeAtNodes, paths: Sequence[Path], omega: Array,
    conditions: Conditions = STILL,
) -> list[RouteTransfer]:
    """Transfer functions of many routes of one mode.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    paths : sequence of Path
    omega : ndarray, shape (nω,)
        Angular frequency ≥ 0 (rad/s).
    conditions : Conditions

    Returns
    -------
    list of RouteTransfer
        One for each path.
    """
    if not paths:
        return []
    lag, nepers, at_nodes, junctions = _leg_sums(network, mode, paths, omega, conditions)
    ways = [(path.steps, path.leg_ends) for path in paths]
    mixed = gains(network, mode, junctions, omega, ways, conditions.damping)
    transfers, leg = [], 0
    for row, path in enumerate(paths):
        legs = slice(leg, leg + path.leg_ends.size)
        here = at_nodes[leg + row : legs.stop + row + 1]  # a path has one node more than legs
        leg = legs.stop
        time = _times(network, mode, path, conditions)
        transfers.append(
            _assembled(path, omega, lag[legs], nepers[:, legs], here, time, mixed[row])
        )
    return transfers


def leg_budget(transfer: RouteTransfer, weight: Array) -> LegBudget:
    """Where the energy goes, leg by leg.

    Parameters
    ----------
    transfer : RouteTransfer
    weight : ndarray, shape (nω,)
        Weight of the frequencies, such as the energy spectrum |S|² of the source.

    Returns
    -------
    LegBudget
    """
    return energy_budget(transfer.leg_nepers, weight)


def energy_budget(nepers: Array, weight: Array) -> LegBudget:
    """Where the energy goes, leg by leg or step by step.

    Parameters
    ----------
    nepers : ndarray, shape (5, legs, nω)
        What every leg takes, by fate in the order of `FATES`.
    weight : ndarray, shape (nω,)
        Weight of the frequencies.

    Returns
    -------
    LegBudget
    """
    share = weight / weight.sum()
    total = nepers.sum(axis=0)
    after = np.exp(-2.0 * np.cumsum(total, axis=0))
    before = np.concatenate([np.ones((1, share.size)), after])[:-1]
    with np.errstate(invalid="ignore"):
        parts = np.where(total > 0.0, nepers / total, 0.0)
    return LegBudget(after @ share, ((before - after) * parts @ share).T)


def _leg_nodes(network: Network, path: Path) -> Index:
    """Start of a path and the ends of its legs."""
    nodes = np.concatenate([[path.start], network.head[path.steps]])
    return np.concatenate([[path.start], nodes[path.leg_ends]])


def _leg_sums(
    network: Network, mode: ModeAtNodes, paths: Sequence[Path], omega: Array,
    conditions: Conditions,
) -> tuple[Array, Array, Array, JunctionTable]:
    """Lag and nepers of legs, the potential at their `_leg_nodes`, and the junctions."""
    nodes = np.concatenate([_leg_nodes(network, path) for path in paths])
    steps, column = np.unique(np.concatenate([path.steps for path in paths]), return_inverse=True)
    ends = np.concatenate([nodes, network.tail[steps], network.head[steps]])
    table = network_wall_table(network, mode, omega, ends)
    sizes = np.concatenate([np.diff(path.leg_ends, prepend=0) for path in paths])
    bounds = np.concatenate([[0], np.cumsum(sizes)])
    legs = csr_array((np.ones(column.size), column, bounds), shape=(sizes.size, steps.size))
    lag = np.empty((sizes.size, omega.size))
    nepers = np.empty((len(FATES), *lag.shape))
    for first in range(0, omega.size, _FREQUENCIES_AT_ONCE):
        part = slice(first, first + _FREQUENCIES_AT_ONCE)
        response = step_response(network, mode, steps, omega[part], table.at(part), conditions)
        lag[:, part] = legs @ response.lag
        for fate in range(len(FATES)):
            nepers[fate][:, part] = legs @ response.nepers[fate]
    return lag, nepers, potential(network, mode, nodes, table), table.junctions


def _times(network: Network, mode: ModeAtNodes, path: Path, conditions: Conditions) -> _Times:
    speed = step_speeds(network, mode, path.steps, conditions)[1]
    steps = float((network.length[path.steps] / speed).sum())
    last = int(network.head[path.steps[-1]]) if path.steps.size else path.start
    before = -path.source_along / float(mode.speed[path.start])
    after = path.target_along / float(mode.speed[last])
    return _Times(steps, before, max(after, -steps - before))


def _assembled(
    path: Path, omega: Array, lag: Array, nepers: Array, at_nodes: Array, time: _Times,
    mixed: ComplexArray,
) -> RouteTransfer:
    """A transfer function from the sums over its legs."""
    exponent = np.cumsum(1j * lag - nepers.sum(axis=0), axis=0)
    exponent = np.concatenate([np.zeros((1, omega.size)), exponent])
    exponent[1:] += 1j * omega * time.before
    exponent[-1] += 1j * omega * time.after
    response = path.source_factor * at_nodes / at_nodes[0] * np.exp(exponent)
    response[1:] *= mixed
    front = time.steps + time.before + time.after
    return RouteTransfer(omega, path.target_factor * response[-1], response[1:], nepers, front)
