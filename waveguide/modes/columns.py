"""Columns of N²: their checks, and the thin layers of constant N that stand for them."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.errors import InputError

Array = NDArray[np.float64]

LEAST_N2 = 1e-14
"""Stand-in for N² = 0 (1/s²): small enough to change no speed by 1e-6 in 10 km of water."""


def checked_columns(
    n2: ArrayLike, depth: ArrayLike, bottom: ArrayLike, count: int
) -> tuple[Array, Array, Array]:
    """Columns as arrays of float, or one error that lists every problem.

    Parameters
    ----------
    n2, depth, bottom, count
        As for `waveguide.modes.vertical.phase_speeds`.

    Returns
    -------
    n2 : ndarray, shape (ncolumn, ndepth)
        Buoyancy frequency squared (1/s²).
    depth : ndarray, shape (ndepth,)
        Depths (m).
    bottom : ndarray, shape (ncolumn,)
        Water depths (m).

    Raises
    ------
    InputError
        If a value is missing, N² is negative, or depths are not increasing and positive.
    """
    columns = np.asarray(n2, dtype=float)
    levels = np.asarray(depth, dtype=float)
    floor = np.asarray(bottom, dtype=float)
    shapes_fit = columns.ndim == 2 and columns.shape == (floor.size, levels.size)
    if not shapes_fit or levels.ndim != 1 or floor.ndim != 1 or columns.size == 0:
        raise InputError(
            f"n2 has shape {columns.shape}, depth {levels.shape}, bottom {floor.shape}: "
            "n2 must have one row for each bottom and one column for each depth"
        )
    problems = []
    if count < 1:
        problems.append(f"count is {count}: ask for at least one mode")
    holes = int(np.isnan(columns).any(axis=1).sum())
    if holes:
        problems.append(
            f"n2 has missing values in {holes} of {floor.size} columns: fill them, or repeat the "
            "deepest known value down to the last depth"
        )
    if np.any(columns < 0.0):
        problems.append(
            f"n2 reaches {np.nanmin(columns):.3g} 1/s²: stratification must be stable; sort or "
            "smooth the density profile, or set negative values to 0"
        )
    if not np.all(np.diff(levels) > 0.0) or not levels[0] >= 0.0:
        problems.append("depth must increase downward from 0 or more, without duplicates or holes")
    if not np.all((floor > 0.0) & np.isfinite(floor)):
        problems.append("bottom must be positive and finite: water depth is positive down, in m")
    if not np.all(np.nan_to_num(columns, nan=1.0).max(axis=1) > LEAST_N2):
        problems.append("n2 is 0 throughout a column: without stratification only mode 0 exists")
    if problems:
        raise InputError(problems)
    return columns, levels, floor


def _layer_edges(levels: Array, floor: Array, parts: int) -> Array:
    """Edges of thin layers from the surface to each bottom (m), shape (ncolumn, nlayer + 1).

    All `levels` above the bottom are edges; the intervals below it have no thickness.
    """
    marks = np.minimum(np.append(np.union1d(0.0, levels), np.inf), floor[:, None])
    inner = marks[:, :-1, None] + np.diff(marks)[:, :, None] * (np.arange(parts) / parts)
    return np.append(inner.reshape(floor.size, -1), marks[:, -1:], axis=1)


def thin_layers(columns: Array, levels: Array, floor: Array, parts: int) -> tuple[Array, Array]:
    """Cut columns into thin layers that hold their mean N².

    N² is linear across a thin layer, so its mean is the mean of the two ends.

    Parameters
    ----------
    columns : ndarray, shape (ncolumn, ndepth)
        N² (1/s²).
    levels : ndarray, shape (ndepth,)
        Its depths (m).
    floor : ndarray, shape (ncolumn,)
        Water depths (m).
    parts : int
        Layers between two depths.

    Returns
    -------
    thickness, n : ndarray, shape (ncolumn, nlayer)
        Thickness (m), 0 below the bottom, and N (1/s).
    """
    z = _layer_edges(levels, floor, parts)
    at = np.clip(z, levels[0], levels[-1])
    i = np.clip(np.searchsorted(levels, at, side="right") - 1, 0, max(levels.size - 2, 0))
    upper = np.take_along_axis(columns, i, axis=1)
    if levels.size > 1:
        lower = np.take_along_axis(columns, i + 1, axis=1)
        upper = upper + (lower - upper) * (at - levels[i]) / (levels[i + 1] - levels[i])
    mean = 0.5 * (upper[:, 1:] + upper[:, :-1])
    return np.diff(z, axis=1), np.sqrt(np.maximum(mean, LEAST_N2))
