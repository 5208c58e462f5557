"""Guides made by hand: one chain of nodes along coasts and the equator, and ways along it."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise
from types import SimpleNamespace

import numpy as np
import pytest

from waveguide.constants import EARTH_RADIUS
from waveguide.network.attach import Ties
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.arrivals import REACHED, Arrival
from waveguide.propagation.legs import legs_of_route
from waveguide.propagation.losses import step_physics
from waveguide.propagation.modes import ModeAtNodes, uniform_mode
from waveguide.propagation.routes import Route
from waveguide.propagation.transfer import Path

COAST, EQUATOR = int(StepKind.COAST), int(StepKind.EQUATOR)


def chain(parts: list[tuple[int, list[tuple[float, float]]]], spacing: float = 0.2) -> Network:
    """Straight parts (kind, corners in lon, lat) joined end to end; lengths on the plane chart."""
    lon, lat, kind = [np.array([parts[0][1][0][0]])], [np.array([parts[0][1][0][1]])], []
    for step_kind, corners in parts:
        for (x0, y0), (x1, y1) in pairwise(corners):
            count = max(round(np.hypot(x1 - x0, y1 - y0) / spacing), 1)
            share = np.arange(1, count + 1) / count
            lon.append(x0 + share * (x1 - x0))
            lat.append(y0 + share * (y1 - y0))
            kind += [step_kind] * count
    x, y, kinds = np.concatenate(lon), np.concatenate(lat), np.array(kind)
    around = np.concatenate([kinds[:1], kinds, kinds[-1:]])
    equatorial = (around[:-1] == EQUATOR) & (around[1:] == EQUATOR)
    middle = np.radians(0.5 * (y[1:] + y[:-1]))
    length = EARTH_RADIUS * np.radians(np.hypot(np.diff(x) * np.cos(middle), np.diff(y)))
    none, nothing = np.full(kinds.size, -1), np.zeros(0)
    return Network(
        x, y, np.where(equatorial, 1, 0), equatorial, np.where(equatorial, np.nan, 90.0),
        np.zeros(x.size, dtype=np.int64), np.arange(kinds.size), np.arange(1, x.size), kinds,
        length, none, none, nothing, nothing, nothing,
    )  # fmt: skip


def uniform(network: Network, speed: float, number: int = 1) -> ModeAtNodes:
    """One speed and coastal value everywhere."""
    return uniform_mode(network, number, speed)


def path(network: Network, steps: np.ndarray | None = None, every_step: bool = False) -> Path:
    """The way along a chain, with a leg for each run of one kind, or for each step."""
    steps = np.arange(network.tail.size) if steps is None else steps
    kind = network.kind[steps]
    ends = np.append(np.nonzero(np.diff(kind))[0] + 1, kind.size)
    ends = np.arange(1, kind.size + 1) if every_step else ends
    return Path(steps, ends, int(network.tail[steps[0]]), 0, 1.0, 1.0)


def arrival(
    network: Network, mode: ModeAtNodes, ways: list[np.ndarray], omega: float = 1e-6
) -> Arrival:
    """An arrival with a route along each of the ways, from node to node."""
    physics = step_physics(network, mode, omega)
    starts = [int(network.tail[steps[0]]) for steps in ways]
    ends = [int(network.head[steps[-1]]) for steps in ways]
    source, target = _ties(network, starts), _ties(network, ends)
    routes, legs = [], []
    for number, steps in enumerate(ways):
        ratio = physics.potential[ends[number]] / physics.potential[starts[number]]
        amplitude = float(ratio * np.exp(-physics.loss[steps].sum()))
        route = Route(steps, number, number, float(physics.time[steps].sum()), amplitude)
        routes.append(route)
        legs.append(legs_of_route(network, physics, route, (0, 0), source, (0, 0), target))
    return Arrival(REACHED, source, target, routes, legs, [])


def _ties(network: Network, nodes: list[int]) -> Ties:
    zero = np.zeros(len(nodes))
    return Ties(
        np.array(nodes), zero, zero, network.lon[nodes], network.lat[nodes], zero, zero + 1.0,
        zero > 0.0, 0.0, 0.0,
    )  # fmt: skip


@pytest.fixture
def guides() -> SimpleNamespace:
    return SimpleNamespace(
        COAST=COAST, EQUATOR=EQUATOR, chain=chain, uniform=uniform, path=path, arrival=arrival,
        replace=replace,
    )  # fmt: skip
