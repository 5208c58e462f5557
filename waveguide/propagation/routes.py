"""Routes from a source to a target: the earliest, the strongest, and what lies between."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import SECONDS_PER_DAY
from waveguide.network.attach import Ties
from waveguide.network.graph import Network
from waveguide.network.search import Origin, Reach, Searcher
from waveguide.propagation.losses import StepPhysics

Array = NDArray[np.float64]
Index = NDArray[np.int64]

PATIENCE_DAYS = (0.0, 1.0, 5.0, 25.0, 125.0, 1e6)
"""Days a signal may come later for each neper (factor e) that more of it is left.

The first finds the earliest route, the last the strongest.
"""

FAINTEST_SHARE = 1.0 / 3.0
"""The headline route carries at least this share of the amplitude of the strongest one."""

FAINTEST_ALTERNATIVE = 0.02
"""Routes with less than this share of the strongest one's amplitude are not listed."""

NOTHING_LEFT = 1e-4
"""A path on which even with half the friction less than this amplitude ratio is left is no route.
The nepers of friction are not known to better than that; what they only may make faint is told."""

LATEST_ALTERNATIVE = 4.0
"""Nor are those that take this many times longer than the headline route."""

MOST_ALTERNATIVES = 3


@dataclass(frozen=True)
class Route:
    """A path through the network from a source to a target.

    Attributes
    ----------
    steps : ndarray of int, shape (k,)
        In order of travel; none where source and target are tied to the same node.
    start, end : int
        Positions in the ties of the source and of the target.
    time : float
        Travel time of the front (s), from the foot of the source's tie to that of the target's.
    amplitude : float
        Sea level at the target over sea level at the source.
    """

    steps: Index
    start: int
    end: int
    time: float
    amplitude: float


class RouteFinder:
    """Finds routes of one mode from one source; searches are kept and shared by targets.

    Parameters
    ----------
    searcher : Searcher
    physics : StepPhysics
    source : Ties
    """

    def __init__(self, searcher: Searcher, physics: StepPhysics, source: Ties) -> None:
        self._searcher = searcher
        self._physics = physics
        self._source = source
        self._origin = Origin(source.node, -np.log(np.maximum(source.factor, 1e-300)))
        self._reaches: dict[tuple[float, int], Reach] = {}

    def routes(self, target: Ties) -> list[Route]:
        """Routes to a target, the headline route first, then alternatives by time.

        Parameters
        ----------
        target : Ties

        Returns
        -------
        list of Route
            Empty if there is none that leaves anything.
        """
        family = [self._best(target, patience, -1) for patience in PATIENCE_DAYS]
        found = _distinct([route for route in family if route is not None])
        if not any(self._with_half_the_friction(route) >= NOTHING_LEFT for route in found):
            return []
        found = _distinct(found + self._detours(target, _headline(found)))
        headline = _headline(found)
        strongest = max(found, key=lambda route: route.amplitude)
        faintest = FAINTEST_ALTERNATIVE * strongest.amplitude
        others = [
            route
            for route in found
            if route is not headline
            and route.amplitude >= faintest
            and route.time <= LATEST_ALTERNATIVE * max(headline.time, SECONDS_PER_DAY)
        ]
        by_amplitude = sorted(others, key=lambda route: -route.amplitude)
        told = _told_apart(self._searcher.network, [headline, *by_amplitude])
        return [headline, *sorted(told[1 : MOST_ALTERNATIVES + 1], key=lambda route: route.time)]

    def _with_half_the_friction(self, route: Route) -> float:
        """Amplitude that a route would leave with half of bottom friction and damping."""
        rubbed = float(self._physics.rubbed[route.steps].sum())
        # Beyond 2 x 700 the amplitude itself is zero in floating point.
        return route.amplitude * float(np.exp(min(0.5 * rubbed, 700.0)))

    def _detours(self, target: Ties, headline: Route) -> list[Route]:
        """Routes that do without one of the gaps the headline route crosses."""
        network = self._searcher.network
        gaps = headline.steps[network.gap[headline.steps] >= 0].tolist()
        found = [self._best(target, PATIENCE_DAYS[2], step) for step in gaps[:4]]
        return [route for route in found if route is not None]

    def _reach(self, patience: float, closed: int) -> Reach:
        """Search once for each patience (days) and closed step (−1 for none)."""
        key = (patience, closed)
        if key not in self._reaches:
            seconds = patience * SECONDS_PER_DAY
            finite_loss = np.where(np.isfinite(self._physics.loss), self._physics.loss, 1e3)
            weight = self._physics.time + seconds * finite_loss
            if closed >= 0:
                weight[closed] = np.inf
            self._reaches[key] = self._searcher.reach(weight, self._origin, seconds)
        return self._reaches[key]

    def _best(self, target: Ties, patience: float, closed: int) -> Route | None:
        """Best route under a patience to any of the nodes a target is tied to."""
        reach = self._reach(patience, closed)
        loss = -np.log(np.maximum(target.factor, 1e-300))
        beyond = self._physics.slowness[target.node] * target.along
        cost = reach.cost[target.node] + beyond + patience * SECONDS_PER_DAY * loss
        if not np.isfinite(cost).any():
            return None
        end = int(np.argmin(cost))
        return self._route(reach.steps_to(int(target.node[end]), self._searcher.network),
                           int(target.node[end]), target, end)

    def _route(self, steps: Index, last: int, target: Ties, end: int) -> Route:
        """Time and amplitude of a path."""
        network, physics = self._searcher.network, self._physics
        first = int(network.tail[steps[0]]) if steps.size else last
        entries = np.nonzero(self._source.node == first)[0]
        start = int(entries[np.argmax(self._source.factor[entries])])
        ratio = physics.potential[last] / physics.potential[first]
        kept = float(np.exp(-physics.loss[steps].sum()))
        amplitude = self._source.factor[start] * target.factor[end] * ratio * kept
        beyond = physics.slowness[last] * target.along[end]
        before = physics.slowness[first] * self._source.along[start]
        time = max(float(physics.time[steps].sum() + beyond - before), 0.0)
        return Route(steps, start, end, time, float(amplitude))


def _headline(routes: list[Route]) -> Route:
    """The earliest of the routes that are not faint beside the strongest."""
    strongest = max(route.amplitude for route in routes)
    return min(
        (route for route in routes if route.amplitude >= FAINTEST_SHARE * strongest),
        key=lambda route: route.time,
    )


def _distinct(routes: list[Route]) -> list[Route]:
    """Routes without repetitions, in order."""
    unique = {(route.steps.tobytes(), route.end): route for route in reversed(routes)}
    return list(unique.values())[::-1]


def _told_apart(network: Network, routes: list[Route]) -> list[Route]:
    """Routes that differ in the gaps they enter or in how they end, the first of each kind."""
    kinds: dict[tuple[bytes, int], Route] = {}
    for route in routes:
        gaps = route.steps[network.gap[route.steps] >= 0]
        kinds.setdefault((network.tail[gaps].tobytes(), route.end), route)
    return list(kinds.values())
