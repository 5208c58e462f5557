"""Sea level at a target as the sum of what the wind did upstream, each part with its delay.

The ocean is at rest before the first time of the record. Until the longest delay has passed the
response misses the wind before that (spin-up); `spin_up` says when 95 % of it is there.
Between two times the stress is taken as a straight line, so that a delay is exact for it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.forcing.influence import Influence
from waveguide.forcing.projection import Forcing
from waveguide.network.graph import Network

Array = NDArray[np.float64]
Index = NDArray[np.int64]

SPUN_UP = 0.95
MOST_POSITIONS = 240
"""Positions along a route at which the response is told."""


@dataclass(frozen=True)
class RouteResponse:
    """Forcing and response along the main way to a target.

    Attributes
    ----------
    node : ndarray of int, shape (k,)
        Nodes from upstream to the target.
    distance : ndarray, shape (k,)
        Way to the target (m).
    delay : ndarray, shape (k,)
        Time to the target (s).
    stress : ndarray, shape (k, nt)
        Stress over the step that ends at the node (Pa), NaN where no wind counts.
    sea_level : ndarray, shape (k, nt)
        m.
    """

    node: Index
    distance: Array
    delay: Array
    stress: Array
    sea_level: Array


def add_delayed(into: Array, series: NDArray[np.floating], weight: float, lag: float) -> None:
    """Add weight × series(t − lag) to `into`, in place; nothing before the first value.

    Parameters
    ----------
    into : ndarray, shape (nt,)
        May be longer than `series`.
    series : ndarray, shape (ns,)
    weight : float
    lag : float
        In intervals of time, ≥ 0.
    """
    whole = int(lag)
    share = lag - whole
    if share == 0.0:
        room = min(into.size - whole, series.size)
        if room > 0:
            into[whole : whole + room] += weight * series[:room]
        return
    room = min(into.size - whole - 1, series.size - 1)
    if room > 0:
        part = into[whole + 1 : whole + 1 + room]
        part += (weight * (1.0 - share)) * series[1 : room + 1]
        part += (weight * share) * series[:room]


def contributions(influence: Influence, forcing: Forcing, group: Index, count: int) -> Array:
    """Sea level at the target by groups of steps.

    Parameters
    ----------
    influence : Influence
        k rows.
    forcing : Forcing
        Of all the steps of `influence` on which wind counts.
    group : ndarray of int, shape (k,)
        Group of each row, −1 for none.
    count : int
        Number of groups.

    Returns
    -------
    ndarray, shape (count, nt)
        m; the sum over groups is the response.
    """
    result = np.zeros((count, forcing.time.size))
    rows = np.nonzero((influence.weight > 0.0) & (group >= 0))[0]
    at = np.searchsorted(forcing.steps, influence.step[rows])
    for row, series in zip(rows.tolist(), at.tolist(), strict=True):
        lag = influence.delay[row] / forcing.step
        add_delayed(result[group[row]], forcing.stress[series], influence.weight[row], lag)
    return result


def target_response(influence: Influence, forcing: Forcing) -> Array:
    """Sea level at the target.

    Parameters
    ----------
    influence : Influence
    forcing : Forcing

    Returns
    -------
    ndarray, shape (nt,)
        m.
    """
    one = np.zeros(influence.step.size, dtype=np.int64)
    return np.asarray(contributions(influence, forcing, one, 1)[0])


def spin_up(influence: Influence) -> float:
    """Delay within which 95 % of the influence of a uniform wind lies (s).

    Parameters
    ----------
    influence : Influence

    Returns
    -------
    float
    """
    if not influence.weight.any():
        return 0.0
    order = np.argsort(influence.delay)
    share = np.cumsum(influence.weight[order])
    return float(influence.delay[order][int(np.searchsorted(share, SPUN_UP * share[-1]))])


def covered_share(influence: Influence, forcing: Forcing) -> float:
    """Share of the influence of a uniform wind that the record covers, 0 to 1.

    Parameters
    ----------
    influence : Influence
    forcing : Forcing

    Returns
    -------
    float
    """
    one = np.zeros(influence.step.size, dtype=np.int64)
    return float(covered_by_group(influence, forcing, one, 1)[0])


def covered_by_group(influence: Influence, forcing: Forcing, group: Index, count: int) -> Array:
    """The same for groups of steps, shape (count,).

    Parameters
    ----------
    influence : Influence
        k rows.
    forcing : Forcing
    group : ndarray of int, shape (k,)
        Group of each row, −1 for none.
    count : int

    Returns
    -------
    ndarray, shape (count,)
    """
    rows = np.nonzero((influence.weight > 0.0) & (group >= 0))[0]
    weight, at = influence.weight[rows], np.searchsorted(forcing.steps, influence.step[rows])
    total = np.bincount(group[rows], weight, minlength=count)
    found = np.bincount(group[rows], weight * forcing.covered[at], minlength=count)
    return np.asarray(found / np.maximum(total, 1e-300))


def main_way(influence: Influence) -> Index:
    """Rows of the way upstream along which wind counts most, from the target on.

    Parameters
    ----------
    influence : Influence

    Returns
    -------
    ndarray of int, shape (k,)
    """
    gathered = np.zeros(influence.step.size)
    for row, parent in enumerate(influence.parent.tolist()):
        gathered[row] = influence.weight[row] + (gathered[parent] if parent >= 0 else 0.0)
    rows, row = [], int(np.argmax(gathered)) if gathered.size else -1
    while row >= 0:
        rows.append(row)
        row = int(influence.parent[row])
    return np.array(rows[::-1], dtype=np.int64)


def route_response(network: Network, influence: Influence, forcing: Forcing) -> RouteResponse:
    """Response along the main way to a target.

    What the wind upstream of a node does at the target, taken back by the delay and the gain
    between the two, is the response at the node.

    Parameters
    ----------
    network : Network
    influence : Influence
    forcing : Forcing

    Returns
    -------
    RouteResponse
    """
    way = main_way(influence)
    place = _place_on_way(influence, way)
    every = max(1, -(-way.size // MOST_POSITIONS))
    kept = np.arange(0, way.size, every)
    shown = way[kept]
    ahead = int(np.ceil(influence.head_delay[shown].max(initial=0.0) / forcing.step)) + 1
    longer = np.zeros((kept.size, forcing.time.size + ahead))
    # A node gets what enters at it or upstream of it.
    group = np.searchsorted(kept, place, "right") - 1
    rows = np.nonzero(influence.weight > 0.0)[0]
    at = np.searchsorted(forcing.steps, influence.step[rows])
    for row, series in zip(rows.tolist(), at.tolist(), strict=True):
        lag = influence.delay[row] / forcing.step
        held = held_on(forcing.stress[series])
        add_delayed(longer[group[row]], held, influence.weight[row], lag)
    upstream = np.cumsum(longer[::-1], axis=0)[::-1]
    level = [
        taken_back(series, influence.head_delay[row] / forcing.step, forcing.time.size)
        / influence.gain[row]
        for series, row in zip(upstream, shown.tolist(), strict=True)
    ]
    sea_level = np.array(level).reshape(kept.size, -1)[::-1]
    return RouteResponse(
        node=network.head[influence.step[shown]][::-1],
        distance=influence.distance[shown][::-1],
        delay=influence.head_delay[shown][::-1],
        stress=_stress_at(influence, forcing, shown)[::-1],
        sea_level=sea_level,
    )


def _place_on_way(influence: Influence, way: Index) -> Index:
    """For every row the place on the way at which what it sends comes in."""
    place = np.full(influence.step.size, -1, dtype=np.int64)
    place[way] = np.arange(way.size)
    on_way = place >= 0
    for row, parent in enumerate(influence.parent.tolist()):
        if on_way[row]:
            continue
        if parent < 0:
            place[row] = 0
        else:  # a branch joins the way at the tail of the step that it leads into
            place[row] = min(place[parent] + int(on_way[parent]), way.size - 1)
    return place


def held_on(series: NDArray[np.floating]) -> Array:
    """A series with its last value once more, which an interpolation at its end needs.

    Parameters
    ----------
    series : ndarray, shape (nt,)

    Returns
    -------
    ndarray, shape (nt + 1,)
    """
    return np.append(series, series[-1:]).astype(float)


def taken_back(series: Array, lag: float, count: int) -> Array:
    """Values of a series `lag` intervals later, the first `count` of them.

    Parameters
    ----------
    series : ndarray, shape (nt,)
        With more than `count` + `lag` values.
    lag : float
        In intervals of time, ≥ 0.
    count : int

    Returns
    -------
    ndarray, shape (count,)
    """
    whole = int(lag)
    share = lag - whole
    earlier, later = series[whole : whole + count], series[whole + 1 : whole + 1 + count]
    return np.asarray((1.0 - share) * earlier + share * later)


def _stress_at(influence: Influence, forcing: Forcing, rows: Index) -> Array:
    """Stress over steps, NaN where no wind counts."""
    at = np.searchsorted(forcing.steps, influence.step[rows])
    at = np.minimum(at, forcing.steps.size - 1)
    known = forcing.steps[at] == influence.step[rows]
    return np.where(known[:, None], forcing.stress[at], np.nan).astype(float)
