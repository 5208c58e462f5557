"""A route told as legs: runs of steps of one kind along one line."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from waveguide.network.attach import Ties
from waveguide.network.graph import GAP_KINDS, Network, StepKind
from waveguide.propagation.losses import StepPhysics
from waveguide.propagation.routes import Route

Array = NDArray[np.float64]
Index = NDArray[np.int64]
Position = tuple[float, float]


@dataclass(frozen=True)
class Leg:
    """A part of a route.

    Attributes
    ----------
    kind : str
        "coast", "equator", "strait", "facing coast", "opening" or "attachment".
    lon, lat : ndarray, shape (k,)
        Vertices from start to end, degrees.
    distance, time : ndarray, shape (k,)
        Distance (m) and time of the front (s) at the vertices, from the start of the leg.
    amplitude : float
        Sea level at the end over that at the start.
    """

    kind: str
    lon: Array
    lat: Array
    distance: Array
    time: Array
    amplitude: float


def legs_of_route(
    network: Network, physics: StepPhysics, route: Route,
    source: Position, source_ties: Ties, target: Position, target_ties: Ties,
) -> list[Leg]:
    """The legs of a route, with an attachment at either end that is off the guide.

    Parameters
    ----------
    network : Network
    physics : StepPhysics
    route : Route
    source, target : (lon, lat)
        Degrees.
    source_ties, target_ties : Ties

    Returns
    -------
    list of Leg
    """
    first = int(source_ties.node[route.start])
    last = int(target_ties.node[route.end])
    legs = [
        _leg(network, physics, route.steps[a:b])
        for a, b in _runs(network, route.steps)
    ]
    if source_ties.distance[route.start] > 0.0:
        legs.insert(0, _attachment(
            source, _place(network, first), source_ties.distance[route.start],
            source_ties.factor[route.start],
        ))
    if target_ties.distance[route.end] > 0.0:
        legs.append(_attachment(
            _place(network, last), target, target_ties.distance[route.end],
            target_ties.factor[route.end],
        ))
    return legs


def _place(network: Network, node: int) -> Position:
    return float(network.lon[node]), float(network.lat[node])


def _runs(network: Network, steps: Index) -> list[tuple[int, int]]:
    """Bounds of runs of one kind along one line; every gap is a run of its own."""
    if not steps.size:
        return []
    kind = network.kind[steps]
    inner = np.where(network.equatorial[network.head[steps]], network.head[steps],
                     network.tail[steps])
    line = np.where(np.isin(kind, [int(k) for k in GAP_KINDS]), -1, network.line[inner])
    new = (kind[1:] != kind[:-1]) | (network.gap[steps[1:]] >= 0) | (line[1:] != line[:-1])
    bounds = np.concatenate([[0], np.nonzero(new)[0] + 1, [steps.size]])
    return [(int(a), int(b)) for a, b in pairwise(bounds)]


def _leg(network: Network, physics: StepPhysics, steps: Index) -> Leg:
    """One run of steps."""
    nodes = np.concatenate([network.tail[steps[:1]], network.head[steps]])
    ratio = physics.potential[nodes[-1]] / physics.potential[nodes[0]]
    return Leg(
        kind=StepKind(int(network.kind[steps[0]])).label,
        lon=network.lon[nodes],
        lat=network.lat[nodes],
        distance=np.concatenate([[0.0], np.cumsum(network.length[steps])]),
        time=np.concatenate([[0.0], np.cumsum(physics.time[steps])]),
        amplitude=float(ratio * np.exp(-physics.loss[steps].sum())),
    )


def _attachment(start: Position, end: Position, distance: float, factor: float) -> Leg:
    """The tie between a position and the guide; a trapped wave is in phase across it."""
    return Leg(
        kind="attachment",
        lon=np.array([start[0], end[0]]),
        lat=np.array([start[1], end[1]]),
        distance=np.array([0.0, float(distance)]),
        time=np.zeros(2),
        amplitude=float(factor),
    )
