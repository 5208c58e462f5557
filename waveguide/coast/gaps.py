"""Gaps that the closing of the coast has bridged and that open on two waters: straits.

A gap is a patch of water deep enough for the mode that the effective coast does not enter,
because it is narrower than the mode's scale. A patch with one mouth is an inlet, which is not
followed; one with two or more mouths is a strait between them.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import coo_matrix, csr_matrix
from scipy.sparse.csgraph import connected_components, dijkstra
from scipy.spatial import cKDTree

from waveguide.coast.effective import EffectiveCoast
from waveguide.coast.raster import GlobalGrid, label_periodic
from waveguide.geodesy import arc, positions, unit_vectors

Array = NDArray[np.float64]
Index = NDArray[np.int64]


@dataclass(frozen=True)
class Strait:
    """A passage between two mouths on the effective coast.

    Attributes
    ----------
    lon, lat : ndarray, shape (k,)
        Middle of the passage from mouth to mouth, degrees.
    length : float
        Length of the passage between the mouths (m).
    width : float
        Width at its narrowest (m), as the grid resolves it.
    inertia_length : float
        Length (m) that a channel of the narrowest width would need to have the same inertia,
        W ∫ ds/W(s): where the passage widens it counts for less.
    sill_depth : float
        Greatest depth that the whole passage offers (m).
    """

    lon: Array
    lat: Array
    length: float
    width: float
    inertia_length: float
    sill_depth: float


@dataclass(frozen=True)
class _Patch:
    """One gap and the effective ocean before its mouths, as a graph of cells.

    `links` are pairs of neighbours of which at least one is in the gap, `shores` pairs of
    neighbours in the ocean; clearance to walls and depth in m.
    """

    vectors: Array
    clearance: Array
    depth: Array
    ocean: NDArray[np.bool_]
    links: tuple[Index, Index]
    shores: tuple[Index, Index]


WALLS_ABOUT = 64
"""Wall cells about a place that are searched for one on either side."""

_NEIGHBOURS = ((0, 1), (1, 0), (1, 1), (1, -1))


def straits(coast: EffectiveCoast, depth: NDArray[np.floating]) -> list[Strait]:
    """All passages through gaps of an effective coast.

    Parameters
    ----------
    coast : EffectiveCoast
    depth : ndarray, shape (ny, nx)
        Depth on the coast's grid (m), positive down.

    Returns
    -------
    list of Strait
        One for each pair of mouths of each gap, in a fixed order.
    """
    grid = coast.grid
    gap = coast.passable & ~coast.water
    labels, count = label_periodic(gap, diagonal=True)
    walls = cKDTree(grid.vectors(~coast.passable & _near(gap)))
    found: list[Strait] = []
    for patch in _patches(coast, depth, labels, count, walls):
        paths = _passages(patch)
        used = np.unique(np.concatenate([*paths, np.zeros(0, dtype=np.int64)]))
        width = np.full(patch.ocean.size, np.nan)
        width[used] = _widths(walls, patch.vectors[used], grid.spacing)
        for path in paths:
            lon, lat = positions(patch.vectors[path])
            sill = float(patch.depth[path[1:-1]].min())
            found.append(strait_along(lon, lat, width[path], sill))
    return found


def _near(mask: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Cells of a mask and their eight neighbours (longitudes wrap)."""
    grown = mask | np.roll(mask, 1, axis=1) | np.roll(mask, -1, axis=1)
    result = grown.copy()
    result[1:] |= grown[:-1]
    result[:-1] |= grown[1:]
    return result


def _patches(
    coast: EffectiveCoast, depth: NDArray[np.floating], labels: Index, count: int, walls: cKDTree
) -> list[_Patch]:
    """The gaps that open on the effective ocean, each as a graph of its cells."""
    order = np.argsort(labels, axis=None, kind="stable")
    first = np.searchsorted(labels.ravel()[order], np.arange(1, count + 2))
    patches = []
    for cells in (order[a:b] for a, b in pairwise(first)):
        before = _before(coast, cells)
        if before.size > 1:
            patches.append(_patch(coast.grid, depth, cells, before, walls))
    return patches


def _before(coast: EffectiveCoast, cells: Index) -> Index:
    """Ocean cells beside the cells of a gap (flat indices, ascending)."""
    ny, nx = coast.grid.shape
    rows, columns = (cells // nx)[:, None], (cells % nx)[:, None]
    down, right = np.array([(y, x) for y in (-1, 0, 1) for x in (-1, 0, 1)]).T
    beside = np.unique(np.clip(rows + down, 0, ny - 1) * nx + (columns + right) % nx)
    return np.asarray(beside[coast.water.ravel()[beside]])


def _patch(
    grid: GlobalGrid, depth: NDArray[np.floating], gap: Index, before: Index, walls: cKDTree
) -> _Patch:
    """Graph of a gap and the ocean before it (flat indices, ascending)."""
    cells = np.union1d(gap, before)
    rows, columns = cells // grid.lon.size, cells % grid.lon.size
    ocean = np.isin(cells, before)
    vectors = unit_vectors(grid.lon[columns], grid.lat[rows])
    tail, head = _neighbours(grid, cells)
    shore = ocean[tail] & ocean[head]
    # Walls are cell centres, so the free water starts half a cell nearer.
    clearance = arc(walls.query(vectors)[0]) - 0.5 * grid.spacing
    return _Patch(
        vectors=vectors,
        clearance=np.maximum(clearance, 0.25 * grid.spacing),
        depth=depth.ravel()[cells].astype(float),
        ocean=ocean,
        links=(tail[~shore], head[~shore]),
        shores=(tail[shore], head[shore]),
    )


def _neighbours(grid: GlobalGrid, cells: Index) -> tuple[Index, Index]:
    """Pairs of neighbours (eight to a cell, longitudes wrap) among flat indices, ascending."""
    ny, nx = grid.shape
    rows, columns = cells // nx, cells % nx
    tails, heads = [], []
    for down, right in _NEIGHBOURS:
        target = (rows + down) * nx + (columns + right) % nx
        place = np.minimum(np.searchsorted(cells, target), cells.size - 1)
        hit = (cells[place] == target) & (rows + down < ny)
        tails.append(np.nonzero(hit)[0])
        heads.append(place[hit])
    return np.concatenate(tails), np.concatenate(heads)


def _mouths(patch: _Patch) -> list[Index]:
    """Groups of ocean cells before a gap that touch one another: each is before one mouth.

    Grouped by the gap's own cells, both mouths of a gap one cell long would be one.
    """
    tail, head = patch.shores
    n = patch.ocean.size
    graph = coo_matrix((np.ones(tail.size), (tail, head)), shape=(n, n))
    _, group = connected_components(graph, directed=False)
    return [np.nonzero(patch.ocean & (group == g))[0] for g in np.unique(group[patch.ocean])]


def _widths(walls: cKDTree, vectors: Array, cell: float) -> Array:
    """Water between the nearest wall and the nearest one on the other side of each place (m).

    Walls are known by the centres of their cells, so half a cell is taken off at either side.
    """
    distance, index = walls.query(vectors, k=range(1, min(WALLS_ABOUT, walls.n) + 1))
    towards = walls.data[index] - vectors[:, None, :]
    opposite = (towards * towards[:, :1]).sum(axis=2) < 0.0
    far = distance[np.arange(len(vectors)), np.argmax(opposite, axis=1)]
    return np.maximum(arc(distance[:, 0]) + arc(far) - cell, 0.5 * cell)


def _passages(patch: _Patch) -> list[Index]:
    """Paths between the mouths of one gap along its middle, their ends in the ocean."""
    mouths = _mouths(patch)
    if len(mouths) < 2:
        return []
    tail, head = patch.links
    step = arc(np.linalg.norm(patch.vectors[tail] - patch.vectors[head], axis=1))
    # Narrow water is dear, so the path keeps to the middle and prefers the wider of two ways.
    cost = step * (np.max(patch.clearance) / np.minimum(patch.clearance[tail],
                                                        patch.clearance[head])) ** 2
    n = patch.ocean.size
    graph = csr_matrix((cost, (tail, head)), shape=(n, n))
    passages = []
    for a, start in enumerate(mouths):
        reach, before, _ = dijkstra(graph, directed=False, indices=start, min_only=True,
                                    return_predecessors=True)
        for end in mouths[a + 1:]:
            path = _path(before, int(end[np.argmin(reach[end])]))
            # What leads past a third mouth is two passages.
            if not patch.ocean[path[1:-1]].any():
                passages.append(path)
    return passages


def _path(before: NDArray[np.int32], last: int) -> Index:
    """Cells of the cheapest path that ends at `last`, from its start."""
    path = [last]
    while before[path[-1]] >= 0:
        path.append(int(before[path[-1]]))
    return np.array(path[::-1])


def strait_along(lon: Array, lat: Array, width: Array, sill_depth: float) -> Strait:
    """A strait from its middle line.

    Parameters
    ----------
    lon, lat : ndarray, shape (k,)
        From the ocean before one mouth to that before the other, degrees; k ≥ 3.
    width : ndarray, shape (k,)
        Width at these places (m).
    sill_depth : float
        m.

    Returns
    -------
    Strait
    """
    vectors = unit_vectors(lon, lat)
    step = arc(np.linalg.norm(np.diff(vectors, axis=0), axis=1))
    narrowest = float(width[1:-1].min())
    inertia = narrowest * (step * 0.5 * (1.0 / width[1:] + 1.0 / width[:-1])).sum()
    return Strait(
        lon=lon,
        lat=lat,
        length=float(step.sum()),
        width=narrowest,
        inertia_length=float(inertia),
        sill_depth=sill_depth,
    )
