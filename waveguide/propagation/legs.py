"""A route told as legs: runs of steps of one kind along one line."""

from __future__ import annotations

from dataclasses import dataclass, replace
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
    step_count : int
        Steps of the network it is made of; vertices are these steps' nodes and, at the ends of a
        route, the feet of the ties.
    """

    kind: str
    lon: Array
    lat: Array
    distance: Array
    time: Array
    amplitude: float
    step_count: int


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
    if legs:
        legs[0] = _from_foot(legs[0], source_ties, route.start, physics.slowness[first])
        legs[-1] = _to_foot(legs[-1], target_ties, route.end, physics.slowness[last])
    source_foot = _foot(source_ties, route.start)
    target_foot = _foot(target_ties, route.end)
    if not legs and source_foot != target_foot:
        legs = [_short_leg(network, physics, last, source_ties, route, target_ties)]
    if source_ties.distance[route.start] > 0.0:
        legs.insert(0, _attachment(
            source, source_foot, source_ties.distance[route.start],
            source_ties.factor[route.start],
        ))
    if target_ties.distance[route.end] > 0.0:
        legs.append(_attachment(
            target_foot, target, target_ties.distance[route.end],
            target_ties.factor[route.end],
        ))
    return legs


def _foot(ties: Ties, at: int) -> Position:
    return float(ties.foot_lon[at]), float(ties.foot_lat[at])


def _from_foot(leg: Leg, ties: Ties, at: int, slowness: float) -> Leg:
    """The leg from the foot of the source's tie: cut short of it, or led back to it."""
    shift = float(ties.along[at])
    keep = slice(1, None) if shift >= 0.0 else slice(None)  # downstream feet pass the node by
    lon, lat = _foot(ties, at)
    return replace(
        leg,
        lon=np.concatenate([[lon], leg.lon[keep]]),
        lat=np.concatenate([[lat], leg.lat[keep]]),
        distance=np.concatenate([[0.0], leg.distance[keep] - shift]),
        time=np.concatenate([[0.0], leg.time[keep] - shift * slowness]),
    )


def _to_foot(leg: Leg, ties: Ties, at: int, slowness: float) -> Leg:
    """The leg to the foot of the target's tie: cut short at it, or led on to it."""
    shift = float(ties.along[at])
    keep = slice(None, -1) if shift <= 0.0 else slice(None)
    lon, lat = _foot(ties, at)
    return replace(
        leg,
        lon=np.concatenate([leg.lon[keep], [lon]]),
        lat=np.concatenate([leg.lat[keep], [lat]]),
        distance=np.concatenate([leg.distance[keep], [leg.distance[-1] + shift]]),
        time=np.concatenate([leg.time[keep], [leg.time[-1] + shift * slowness]]),
    )


def _short_leg(
    network: Network, physics: StepPhysics, node: int, source: Ties, route: Route, target: Ties
) -> Leg:
    """The way between two feet next to the same node."""
    length = max(float(target.along[route.end] - source.along[route.start]), 0.0)
    (lon0, lat0), (lon1, lat1) = _foot(source, route.start), _foot(target, route.end)
    kind = StepKind.EQUATOR if network.equatorial[node] else StepKind.COAST
    return Leg(
        kind=kind.label, lon=np.array([lon0, lon1]), lat=np.array([lat0, lat1]),
        distance=np.array([0.0, length]), time=np.array([0.0, length]) * physics.slowness[node],
        amplitude=1.0,
        step_count=0,
    )


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
        step_count=int(steps.size),
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
        step_count=0,
    )
