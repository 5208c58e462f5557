"""Stretches of coast and equator upstream of a target, to tell which wind did what."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.forcing.influence import Influence
from waveguide.network.graph import Network, StepKind

Array = NDArray[np.float64]
Index = NDArray[np.int64]

LONGEST_STRETCH = 1000e3
"""Coasts and the equator are cut into stretches of at most this length (m)."""


@dataclass(frozen=True)
class Stretch:
    """A stretch of coast or equator upstream of a target.

    Attributes
    ----------
    kind : str
        "coast" or "equator".
    start, end : (lon, lat)
        Its ends in the direction of travel, degrees.
    distance : float
        Way from its end to the target (m).
    first_delay, last_delay : float
        Times from its end and from its start to the target (s).
    weight : float
        Sea level at the target per stress along the whole stretch (m/Pa).
    """

    kind: str
    start: tuple[float, float]
    end: tuple[float, float]
    distance: float
    first_delay: float
    last_delay: float
    weight: float


def cut_into_stretches(
    network: Network, influence: Influence, longest: float = LONGEST_STRETCH
) -> tuple[list[Stretch], Index]:
    """The stretches of what lies upstream, nearest first.

    Parameters
    ----------
    network : Network
    influence : Influence
    longest : float
        Length at which a coast is cut (m).

    Returns
    -------
    stretches : list of Stretch
    of_row : ndarray of int, shape (k,)
        Stretch of each row of `influence`, −1 where no wind counts.
    """
    forced = np.nonzero(influence.weight != 0.0)[0]
    steps = influence.step[forced]
    inner = np.where(network.equatorial[network.head[steps]], network.head[steps],
                     network.tail[steps])
    cut = (influence.distance[forced] // longest).astype(np.int64)
    keys = np.stack([network.line[inner], network.kind[steps], cut], axis=1)
    _, number = np.unique(keys, axis=0, return_inverse=True)
    number = number.ravel()
    count = int(number.max(initial=-1)) + 1
    nearest = np.full(count, np.inf)
    np.minimum.at(nearest, number, influence.delay[forced])
    rank = np.empty(count, dtype=np.int64)
    rank[np.argsort(nearest, kind="stable")] = np.arange(count)
    of_row = np.full(influence.step.size, -1, dtype=np.int64)
    of_row[forced] = rank[number]
    return [_stretch(network, influence, np.nonzero(of_row == k)[0]) for k in range(count)], of_row


def _stretch(network: Network, influence: Influence, rows: Index) -> Stretch:
    last, first = rows[np.argmin(influence.delay[rows])], rows[np.argmax(influence.delay[rows])]
    head, tail = network.head[influence.step[last]], network.tail[influence.step[first]]
    behind = 2.0 * (influence.delay[first] - influence.head_delay[first])
    return Stretch(
        kind=StepKind(int(network.kind[influence.step[last]])).label,
        start=(float(network.lon[tail]), float(network.lat[tail])),
        end=(float(network.lon[head]), float(network.lat[head])),
        distance=float(influence.distance[last]),
        first_delay=float(influence.head_delay[last]),
        last_delay=float(influence.head_delay[first] + behind),
        weight=float(influence.weight[rows].sum()),
    )
