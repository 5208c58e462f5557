"""Depth profiles of cross-shelf sections: checks, and the monotonic version."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.errors import InputError

Array = NDArray[np.float64]

LEAST_DEPTH = 1.0
"""Shallower water is given this depth (m): a beach becomes a low wall."""


def checked_section(offshore: ArrayLike, depth: ArrayLike) -> tuple[Array, Array]:
    """Section as arrays of float, or one error that lists every problem.

    Parameters
    ----------
    offshore : array_like, shape (n,)
        Distance from the coast (m), increasing from 0.
    depth : array_like, shape (n,)
        Water depth (m, positive down); 0 is allowed at the coast only.

    Returns
    -------
    offshore, depth : ndarray, shape (n,)
        The same, with depth at least `LEAST_DEPTH`.

    Raises
    ------
    InputError
        If values are missing, distances not increasing from 0, or there is land.
    """
    x, h = np.asarray(offshore, dtype=float), np.asarray(depth, dtype=float)
    if x.ndim != 1 or x.shape != h.shape or x.size < 2:
        raise InputError(
            f"offshore has shape {x.shape} and depth {h.shape}: give one depth for each of at "
            "least two distances"
        )
    if not (np.isfinite(x).all() and np.isfinite(h).all()):
        raise InputError(
            f"the section has {int((~np.isfinite(x) | ~np.isfinite(h)).sum())} holes (missing "
            "values): fill them, or leave those points out"
        )
    problems = []
    if x[0] != 0.0:
        problems.append(f"offshore starts at {x[0]:g} m: it must start at 0, the coast")
    step = np.diff(x)
    if np.any(step <= 0.0):
        kind = "duplicate" if np.any(step == 0.0) else "unsorted"
        problems.append(f"offshore has {kind} distances: they must increase from the coast")
    if np.all(h <= 0.0):
        problems.append("depth is nowhere positive: depth is positive down, change the sign")
    elif np.any(h[1:] <= 0.0) or h[0] < 0.0:
        where = x[np.argmax(h <= 0.0) if h[0] < 0.0 else 1 + np.argmax(h[1:] <= 0.0)]
        problems.append(
            f"there is land at {where / 1e3:g} km offshore: depth is positive down, and a section "
            "has water throughout; cut it there, or start it on the seaward side"
        )
    if problems:
        raise InputError(problems)
    return x, np.maximum(h, LEAST_DEPTH)


def monotonic_depth(offshore: ArrayLike, depth: ArrayLike) -> Array:
    """Depth that never decreases offshore and is closest to the given one.

    Least squares in the logarithm of depth, weighted by distance, so that a narrow trench or bank
    is levelled into its surroundings and shelf depths count as much as deep ones.

    Parameters
    ----------
    offshore : array_like, shape (n,)
        Distance from the coast (m), increasing from 0.
    depth : array_like, shape (n,)
        Water depth (m, positive down).

    Returns
    -------
    ndarray, shape (n,)
        Depth (m), at least `LEAST_DEPTH`.

    Raises
    ------
    InputError
        As `checked_section`.
    """
    from scipy.optimize import isotonic_regression  # here, because most answers never need it

    x, h = checked_section(offshore, depth)
    width = np.gradient(x)
    result: Array = np.exp(isotonic_regression(np.log(h), weights=width).x)
    return result
