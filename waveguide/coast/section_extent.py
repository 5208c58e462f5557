"""Where a cross-shelf section begins and ends along its ray.

The ray runs through a node of the guide, which lies on the shelf edge: landward to the shore and
seaward into deep water. Landward it ends at the first land; at the crest of a bank or a sill,
where the bottom falls away again behind it; or after `LANDWARD_REACH`. Seaward it ends where the
wave's trapping does; or, where another coast rises first, at the deepest water before it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Index = NDArray[np.intp]
Mask = NDArray[np.bool_]

LANDWARD_REACH = 600e3
"""Shelves wider than this are cut and marked (m); the widest, of Siberia, reach 800 km."""

ISLET = 15e3
"""Land narrower than this along the ray does not end it (m): a cell and a half of 0.1°."""

INSHORE_SEA = 1000.0
"""Water inshore of a crest that is deeper than this (m), and twice as deep as the crest, belongs
to another sea; shallower basins belong to the shelf."""

BARRIER = 0.1
"""Seaward, a rise to less than this share of the deepest water passed is a barrier."""

BARRIER_WIDTH = 20e3
"""A barrier at least this wide (m), and half a deformation radius, is a facing coast."""

DEEPEST = 0.98
"""Before a facing coast the section ends at the last water of this share of the greatest depth."""

FIRST_WATER = 100e3
"""If the node is on land its water is sought this far seaward (m)."""


@dataclass(frozen=True)
class Extents:
    """Samples of each ray that form its section.

    Attributes
    ----------
    found : ndarray of bool, shape (n,)
        Whether there is water to make a section of.
    start, end : ndarray of int, shape (n,)
        First sample of the section, and the one after its last.
    origin : ndarray, shape (n,)
        Position of the shore or the wall on the ray's axis (m).
    wall : ndarray, shape (n,)
        Depth there (m), 0 at a shore.
    facing : ndarray, shape (n,)
        Position of the facing coast (m), NaN where none is met.
    no_shore, cut_shelf, cut_data : ndarray of bool, shape (n,)
        The inner end is a crest; the end of the reach; an end is that of the known depths.
    """

    found: Mask
    start: Index
    end: Index
    origin: Array
    wall: Array
    facing: Array
    no_shore: Mask
    cut_shelf: Mask
    cut_data: Mask


def section_extents(offset: Array, depth: Array, radius: Array, reach: Array) -> Extents:
    """Find both ends of sections.

    Parameters
    ----------
    offset : ndarray, shape (k,)
        Distance of the samples from the node (m), increasing, positive seaward.
    depth : ndarray, shape (n, k)
        Depth (m), positive down; 0 or less on land, NaN where unknown.
    radius : ndarray, shape (n,)
        Deformation radius (m).
    reach : ndarray, shape (n,)
        How far seaward of the node the section should go (m).

    Returns
    -------
    Extents
    """
    wet = depth > 0.0
    within = wet & (offset >= 0.0) & (offset <= FIRST_WATER)
    node = np.argmax(within, axis=1)
    start, origin, wall, no_shore, cut_shelf, hole = _inner_ends(offset, depth, node)
    end, facing, gap = _outer_ends(offset, depth, node, radius, reach)
    return Extents(
        within.any(axis=1) & (end > start + 1), start, end, origin, wall, facing,
        no_shore, cut_shelf, hole | gap,
    )


def _last(mask: Mask) -> Index:
    """Last true entry of each row, −1 where there is none."""
    last = mask.shape[1] - 1 - np.argmax(mask[:, ::-1], axis=1)
    return np.asarray(np.where(mask.any(axis=1), last, -1))


def _first(mask: Mask) -> Index:
    """First true entry of each row, the number of columns where there is none."""
    return np.asarray(np.where(mask.any(axis=1), np.argmax(mask, axis=1), mask.shape[1]))


def _inner_ends(
    x: Array, depth: Array, node: Index
) -> tuple[Index, Array, Array, Mask, Mask, Mask]:
    """Start, origin, wall, and whether it is a crest, the end of the reach or of the data."""
    column = np.arange(x.size)
    inshore = column < node[:, None]
    dry, unknown = depth <= 0.0, np.isnan(depth)
    # width of the land from each sample on landward
    behind = np.maximum.accumulate(np.where(dry, -1, column), axis=1)
    width = np.where(behind < 0, np.inf, x - x[np.maximum(behind, 0)])
    shore = _last(inshore & dry & (width >= ISLET))
    hole = _last(inshore & unknown)
    known = np.where(inshore | (column == node[:, None]), np.nan_to_num(depth), np.inf)
    crest = np.minimum.accumulate(known[:, ::-1], axis=1)[:, ::-1]
    sea = _last(inshore & (depth > np.maximum(INSHORE_SEA, 2.0 * crest)))

    row = np.arange(depth.shape[0])
    beyond_sea = np.where(column > sea[:, None], known, np.inf)
    top = np.argmin(beyond_sea, axis=1)
    islet = _last(inshore & dry & (column > sea[:, None]))
    at_crest = (sea > shore) & (sea > hole)
    last_land = np.where(at_crest, islet, shore)
    on_land = (last_land >= 0) & (last_land > hole)
    start = np.where(on_land, last_land + 1, np.where(at_crest, top, hole + 1))
    origin, wall = x[start], np.maximum(depth[row, start], 0.0)
    land = np.maximum(last_land, 0)
    share = -depth[row, land] / np.where(on_land, depth[row, start] - depth[row, land], 1.0)
    origin = np.where(on_land, x[land] + share * (x[start] - x[land]), origin)
    ended = on_land | at_crest
    return (
        start, origin, np.where(on_land, 0.0, wall), at_crest & ~on_land,
        ~ended & (hole < 0), ~ended & (hole >= 0),
    )


def _outer_ends(
    x: Array, depth: Array, node: Index, radius: Array, reach: Array
) -> tuple[Index, Array, Mask]:
    """End, position of a facing coast, and whether the data end first."""
    column = np.arange(x.size)
    seaward = column > node[:, None]
    known = np.nan_to_num(depth)
    passed = np.maximum.accumulate(np.where(column >= node[:, None], known, 0.0), axis=1)
    low = seaward & ~np.isnan(depth) & (known < BARRIER * passed)
    ahead = np.where(low, x.size, column)
    ahead = np.minimum.accumulate(ahead[:, ::-1], axis=1)[:, ::-1]
    width = np.where(ahead == x.size, np.inf, x[np.minimum(ahead, x.size - 1)] - x)
    coast = _first(low & (width >= np.maximum(BARRIER_WIDTH, 0.5 * radius)[:, None]))
    data = _first(seaward & np.isnan(depth))
    far = np.searchsorted(x, reach, side="right")
    faced = (coast < data) & (coast < far)
    before = np.where(seaward & (column < coast[:, None]), known, 0.0)
    level = DEEPEST * before.max(axis=1, keepdims=True)
    deepest = np.maximum(_last(before >= level), node)
    end = np.where(faced, deepest + 1, np.minimum(data, far))
    facing = np.where(faced, x[np.minimum(coast, x.size - 1)], np.nan)
    return end, facing, ~faced & (data < far)
