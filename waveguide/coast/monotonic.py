"""The section that deepens all the way offshore and is closest to a given one.

Closest in the sense of misplaced water: the isobath of depth t is put where as little weight as
possible lies on its wrong side,

    x(t) = argmin_x  ∫_{x' < x} [h > t] w dx' + ∫_{x' > x} [h ≤ t] w dx',

which is the monotone fit of least absolute deviation, ∫ |h − h_fit| w dx, one level at a time
(threshold decomposition; Robertson, Wright and Dykstra 1988, Order restricted statistical
inference, Wiley). A bank, an islet or a trench that is narrower than the water around it changes
nothing, where a least-squares fit would spread it over its surroundings.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Index = NDArray[np.intp]

LEVELS = 96
"""Isobaths that describe a section: half of them spread in equal ratios of depth (from 5 m to
5000 m each is 16 % deeper than the one before), half where the samples are, for wide plains."""

SHALLOWEST_LEVEL = 5.0
"""The first of them (m); inshore of it the bottom rises evenly to the shore."""

LEAST_STEP = 20.0
"""Isobaths are kept this far apart (m): all of them together within a cell of fine data."""

LEAST_RATIO = 1.004
"""Each isobath is deeper than the one before by at least this factor: thinner layers of weak
stratification would spoil the condition of the section problem."""

_CHUNK = 50


def isobaths(offshore: Array, depth: Array, weight: Array) -> tuple[Array, Array]:
    """Isobaths of the monotonic section closest to each of many sections.

    Parameters
    ----------
    offshore : ndarray, shape (k,)
        Distances of the samples (m), increasing.
    depth : ndarray, shape (n, k)
        Depth (m), positive down, 0 or less on land. Samples of no weight may be NaN.
    weight : ndarray, shape (n, k)
        Weight of each sample, 0 outside the section.

    Returns
    -------
    distance : ndarray, shape (n, LEVELS)
        Where each isobath lies, on the axis of `offshore` and increasing (m); −inf for isobaths
        shallower than the section's inner end and inf for those deeper than its outer one.
    level : ndarray, shape (n, LEVELS)
        Their depths (m), increasing.
    """
    used = weight > 0.0
    h = np.where(used, depth, 0.0)
    level = _levels(h, used)
    cut = np.concatenate([
        _cuts(h[i : i + _CHUNK], weight[i : i + _CHUNK], level[i : i + _CHUNK])
        for i in range(0, h.shape[0], _CHUNK)
    ])
    first = np.argmax(used, axis=1)[:, None]
    last = used.shape[1] - np.argmax(used[:, ::-1], axis=1)[:, None]
    distance = np.where(cut > first, _crossings(offshore, h, cut, level), -np.inf)
    return np.where(cut < last, _apart(distance), np.inf), level


def _levels(h: Array, used: NDArray[np.bool_]) -> Array:
    """Depths of the isobaths of each section (m), shape (n, LEVELS)."""
    half = LEVELS // 2
    ratio = np.maximum(h.max(axis=1), 2.0 * SHALLOWEST_LEVEL) / SHALLOWEST_LEVEL
    even = SHALLOWEST_LEVEL * ratio[:, None] ** np.linspace(0.0, 1.0, LEVELS - half)
    ascending = np.sort(np.where(used, h, np.inf), axis=1)
    rank = (used.sum(axis=1)[:, None] * (np.arange(half) + 0.5) / half).astype(int)
    # just less than the depth of a plain, so that the isobath lies at its edge
    present = np.take_along_axis(ascending, rank, axis=1) * (1.0 - 1e-5)
    present = np.where(np.isfinite(present), np.maximum(present, SHALLOWEST_LEVEL), 1e-3)
    level = np.sort(np.concatenate([even, present], axis=1), axis=1)
    apart = LEAST_RATIO ** np.arange(LEVELS)
    return np.asarray(np.maximum.accumulate(level / apart, axis=1) * apart)


def _cuts(h: Array, weight: Array, level: Array) -> Index:
    """Sample before which each isobath is put, shape (n, nlevel).

    Moving the isobath past a sample deeper than it costs the sample's weight, and past a
    shallower one wins it; so the best place is where the running sum is least.
    """
    depth, cost, isobath = (v.astype(np.float32) for v in (h, weight, level))
    total = np.where(depth[:, None, :] > isobath[:, :, None], cost[:, None, :], -cost[:, None, :])
    np.cumsum(total, axis=2, out=total)
    best = np.argmin(total, axis=2)
    gained = np.take_along_axis(total, best[:, :, None], axis=2)[:, :, 0] < 0.0
    return np.where(gained, best + 1, 0)


def _crossings(x: Array, h: Array, cut: Index, level: Array) -> Array:
    """Where between the samples on either side of a cut the depth passes the level."""
    outer = np.clip(cut, 1, x.size - 1)
    inner = outer - 1
    shallow, deep = (np.take_along_axis(h, k, axis=1) for k in (inner, outer))
    between = (shallow <= level) & (level < deep)
    rise = np.where(between, deep - shallow, 1.0)
    share = np.where(between, (level - shallow) / rise, 0.5)
    result: Array = x[inner] + share * (x[outer] - x[inner])
    return result


def _apart(distance: Array) -> Array:
    """The same, increasing by at least `LEAST_STEP`."""
    step = LEAST_STEP * np.arange(distance.shape[1])
    result: Array = np.maximum.accumulate(distance - step, axis=1) + step
    return result
