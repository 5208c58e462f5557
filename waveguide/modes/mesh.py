"""Finite-element mesh of a cross-shelf section.

The mesh lines are vertical and horizontal: columns at chosen offshore distances, levels at
chosen depths, with every bottom node on a level. Cells are rectangles, and right triangles
along the bottom. Unlike a terrain-following grid no line crosses the isopycnals, so there is
no spurious cross-shelf gradient where the Burger number N h_x/f is large (steep slopes, low
latitudes); and N² is a function of the level alone.

Depth and speed enter the boundary condition along one line, from the surface at the coast down
the coastal wall and on along the bottom. The nodes are spread along that line: its corners are
those of a polygon that follows h(x) within a given relative error, and the intervals between
the corners go where the modes vary,

- per √(h_x/h) dx, the cross-shelf wavenumber of a barotropic shelf wave in the WKB sense,
- per N dh, the vertical wavenumber of a baroclinic mode,
- per exp(-|x - x'|/R)/2R around every piece N dh of slope, the decay of a baroclinic wave
  trapped against it,
- and a few evenly.

Multiplying all counts by 2 refines the mesh in a self-similar way, so that errors fall by 4
and may be extrapolated.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.modes.profile import Profile

Array = NDArray[np.float64]
Indices = NDArray[np.intp]

_SHELF, _SLOPE, _TRAPPED, _EVEN = 1.0, 1.0, 2.0, 0.2
"""Shares of the intervals along the bottom, by the list above."""

_DEPTH_SHARE = 0.15
"""Share of the levels spread by depth in place of N, so that weak N keeps some levels."""

_SAMPLES, _LEAST_SAMPLES = 6, 160
"""Samples of the spacing function per interval between corners, and in all."""

_SAME_LEVEL = 1e-5
"""Levels closer than this relative to their depth are one."""


@dataclass(frozen=True)
class MeshPlan:
    """Where the nodes go; see the module's text.

    Attributes
    ----------
    corner_offshore, corner_depth : ndarray, shape (ncorner,)
        Polygon that stands for h(x) (m).
    intervals : ndarray of int, shape (ncorner - 1,)
        Intervals between the corners.
    corner_count : ndarray, shape (ncorner,)
        Intended number of intervals (not an integer) inshore of each corner.
    sample_offshore, sample_count : ndarray, shape (nsample,)
        Offshore distance (m) and the intended number of intervals inshore of it.
    wall_sample_depth, wall_sample_count : ndarray
        The same down the coastal wall.
    wall_intervals : int
        Intervals down the coastal wall.
    """

    corner_offshore: Array
    corner_depth: Array
    intervals: NDArray[np.int_]
    corner_count: Array
    sample_offshore: Array
    sample_count: Array
    wall_sample_depth: Array
    wall_sample_count: Array
    wall_intervals: int


@dataclass(frozen=True)
class Mesh:
    """Columns and levels.

    Attributes
    ----------
    offshore : ndarray, shape (ncolumn,)
        Offshore distance of the columns (m), the first one 0.
    level : ndarray, shape (nlevel,)
        Depths of the levels (m), the first one 0.
    bottom : ndarray of int, shape (ncolumn,)
        Index of the level at the bottom of each column.
    """

    offshore: Array
    level: Array
    bottom: Indices

    @property
    def start(self) -> Indices:
        """Index of each column's surface node, and last the number of nodes."""
        return np.concatenate([[0], np.cumsum(self.bottom + 1)])

    @property
    def boundary(self) -> Indices:
        """Nodes down the coastal wall and on along the bottom."""
        start = self.start
        return np.concatenate([np.arange(self.bottom[0] + 1), start[1:-1] + self.bottom[1:]])

    @property
    def boundary_depth(self) -> Array:
        """Depths of the boundary nodes (m)."""
        return np.concatenate([self.level[: self.bottom[0] + 1], self.level[self.bottom[1:]]])


def simplified(offshore: Array, depth: Array, error: float) -> NDArray[np.bool_]:
    """Corners of a polygon within a relative `error` of the depth (Douglas and Peucker 1973).

    Parameters
    ----------
    offshore, depth : ndarray, shape (n,)
        The section (m).
    error : float
        Largest |h - polygon|/h.

    Returns
    -------
    ndarray of bool, shape (n,)
        True at the corners.

    References
    ----------
    Douglas, D. & Peucker, T. (1973): Cartographica 10, 112.
    """
    keep = np.zeros(offshore.size, dtype=bool)
    keep[[0, -1]] = True
    pending = [(0, offshore.size - 1)]
    while pending:
        a, b = pending.pop()
        if b - a < 2:
            continue
        slope = (depth[b] - depth[a]) / (offshore[b] - offshore[a])
        inner = slice(a + 1, b)
        chord = depth[a] + slope * (offshore[inner] - offshore[a])
        miss = np.abs(chord - depth[inner]) / depth[inner]
        worst = int(np.argmax(miss))
        if miss[worst] > error:
            k = a + 1 + worst
            keep[k] = True
            pending += [(a, k), (k, b)]
    return keep


def plan_mesh(
    offshore: Array, depth: Array, profile: Profile, f: float, intervals: int, error: float
) -> MeshPlan:
    """Decide where the nodes of a section go.

    Parameters
    ----------
    offshore, depth : ndarray, shape (n,)
        The section (m), depth positive.
    profile : Profile
        Stratification.
    f : float
        Coriolis parameter (1/s).
    intervals : int
        Intended number of intervals along the bottom (more if there are more corners).
    error : float
        Largest relative error of the depth.

    Returns
    -------
    MeshPlan
        For `build_mesh`.
    """
    keep = simplified(offshore, depth, error)
    x, h = offshore[keep], depth[keep]
    deepest = float(h.max())
    whole = float(profile.n_integral(np.array(deepest)))
    parts = max(_SAMPLES, _LEAST_SAMPLES // x.size)
    samples = (x[:-1, None] + np.diff(x)[:, None] * (np.arange(parts) / parts)).ravel()
    samples = np.append(samples, x[-1])
    wanted = _spacing(samples, np.interp(samples, x, h), profile, abs(f), deepest)
    count = wanted * (intervals / wanted[-1])
    counts = np.maximum(1, np.rint(np.diff(count[::parts]))).astype(int)

    wall = np.linspace(0.0, h[0], 65)
    share = _level_share(wall, profile, deepest, whole)
    wall_intervals = max(2, intervals // 10, int(np.ceil(intervals * share[-1])))
    wall_count = share * (wall_intervals / share[-1])
    return MeshPlan(x, h, counts, count[::parts], samples, count, wall, wall_count, wall_intervals)


def _level_share(depth: Array, profile: Profile, deepest: float, whole: float) -> Array:
    """Share of the levels above `depth`: by ∫N dz, and some by depth."""
    by_n = profile.n_integral(depth) / whole
    share: Array = (1.0 - _DEPTH_SHARE) * by_n + _DEPTH_SHARE * depth / deepest
    return share


def _spacing(x: Array, h: Array, profile: Profile, f: float, deepest: float) -> Array:
    """Cumulative number of intervals (any scale) at the samples; the terms of the module's text."""
    middle = 0.5 * (h[1:] + h[:-1])
    dx, dh = np.diff(x), np.abs(np.diff(h))
    n_above = profile.n_integral(h)
    whole = float(profile.n_integral(np.array(deepest)))
    shelf = np.append(0.0, np.cumsum(np.sqrt(dh / middle * dx)))
    levels = np.abs(np.diff(_level_share(h, profile, deepest, whole)))
    slope = np.append(0.0, np.cumsum(levels))

    strength = np.append(np.abs(np.diff(n_above)), n_above[0])
    centre = np.append(0.5 * (x[1:] + x[:-1]), 0.0)
    radius = np.append(profile.n_integral(middle), n_above[0]) / (np.pi * f)
    distance = (x[:, None] - centre) / radius
    decay = 0.5 * np.exp(-np.abs(distance))
    trapped = np.where(distance < 0.0, decay, 1.0 - decay) @ (strength / whole)

    total: Array = (
        _SHELF * shelf / max(shelf[-1], np.finfo(float).tiny)
        + _SLOPE * slope
        + _TRAPPED * (trapped - trapped[0])
        + _EVEN * x / x[-1]
    )
    return total


def build_mesh(plan: MeshPlan, refinement: int = 1) -> Mesh:
    """Mesh of a plan.

    Parameters
    ----------
    plan : MeshPlan
        From `plan_mesh`.
    refinement : int
        Factor on all counts of intervals.

    Returns
    -------
    Mesh
        Columns, levels and bottom.
    """
    counts = plan.intervals * refinement
    ends = plan.corner_count
    first = np.cumsum(counts) - counts
    within = np.arange(counts.sum()) - np.repeat(first, counts)
    wanted = np.repeat(ends[:-1], counts) + within * np.repeat(np.diff(ends) / counts, counts)
    x = np.append(np.interp(wanted, plan.sample_count, plan.sample_offshore), 0.0)
    x[np.append(first, -1)] = plan.corner_offshore
    h = np.interp(x, plan.corner_offshore, plan.corner_depth)

    n = plan.wall_intervals * refinement
    wall = np.interp(
        np.linspace(0.0, plan.wall_sample_count[-1], n + 1),
        plan.wall_sample_count,
        plan.wall_sample_depth,
    )
    levels = np.union1d(wall, h)
    apart = np.diff(levels) > _SAME_LEVEL * levels[1:]
    levels = levels[np.append(True, apart)]
    return Mesh(x, levels, np.searchsorted(levels, h * (1.0 + _SAME_LEVEL), side="right") - 1)
