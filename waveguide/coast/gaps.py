"""Gaps that the closing of the coast has bridged and that open on two waters: straits.

A gap is a patch of water deep enough for the mode that the effective coast does not enter,
because it is narrower than the mode's scale. A patch with one mouth is an inlet, which is not
followed; one with two or more mouths is a strait between them.
"""

from __future__ import annotations

from dataclasses import dataclass

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
    """Cells of one gap as a graph: unit vectors, clearance to walls (m), depth (m), neighbours."""

    vectors: Array
    clearance: Array
    depth: Array
    links: tuple[Index, Index]
    mouth: NDArray[np.bool_]


_NEIGHBOURS = ((0, 1), (1, 0), (1, 1), (1, -1))


def straits(coast: EffectiveCoast, depth: Array) -> list[Strait]:
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
    labels, count = label_periodic(gap)
    walls = cKDTree(grid.vectors(~coast.passable & _near(gap)))
    found: list[Strait] = []
    for patch in _patches(coast, depth, labels, count, walls):
        found.extend(_passages(patch))
    return found


def _near(mask: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Cells of a mask and their eight neighbours (longitudes wrap)."""
    grown = mask | np.roll(mask, 1, axis=1) | np.roll(mask, -1, axis=1)
    result = grown.copy()
    result[1:] |= grown[:-1]
    result[:-1] |= grown[1:]
    return result


def _patches(
    coast: EffectiveCoast, depth: Array, labels: Index, count: int, walls: cKDTree
) -> list[_Patch]:
    """The gaps that touch the effective ocean, each as a graph of its cells."""
    order = np.argsort(labels, axis=None, kind="stable")
    first = np.searchsorted(labels.ravel()[order], np.arange(1, count + 2))
    beside_water = _near(coast.water).ravel()
    patches = []
    for cells in (order[a:b] for a, b in zip(first[:-1], first[1:], strict=True)):
        mouth = beside_water[cells]
        if mouth.sum() < 2:
            continue
        patches.append(_patch(coast.grid, depth, cells, mouth, walls))
    return patches


def _patch(
    grid: GlobalGrid, depth: Array, cells: Index, mouth: NDArray[np.bool_], walls: cKDTree
) -> _Patch:
    """Graph of the cells of one gap (flat indices, ascending)."""
    ny, nx = grid.shape
    rows, columns = cells // nx, cells % nx
    vectors = unit_vectors(grid.lon[columns], grid.lat[rows])
    tails, heads = [], []
    for down, right in _NEIGHBOURS:
        target = (rows + down) * nx + (columns + right) % nx
        place = np.minimum(np.searchsorted(cells, target), cells.size - 1)
        hit = (cells[place] == target) & (rows + down < ny)
        tails.append(np.nonzero(hit)[0])
        heads.append(place[hit])
    # Walls are cell centres, so the free water starts half a cell nearer.
    clearance = arc(walls.query(vectors)[0]) - 0.5 * grid.spacing
    links = (np.concatenate(tails), np.concatenate(heads))
    return _Patch(vectors, np.maximum(clearance, 0.25 * grid.spacing),
                  depth.ravel()[cells].astype(float), links, mouth)


def _mouths(patch: _Patch) -> list[Index]:
    """Groups of mouth cells that touch one another."""
    tail, head = patch.links
    both = patch.mouth[tail] & patch.mouth[head]
    n = patch.mouth.size
    graph = coo_matrix((np.ones(both.sum()), (tail[both], head[both])), shape=(n, n))
    _, group = connected_components(graph, directed=False)
    return [np.nonzero(patch.mouth & (group == g))[0] for g in np.unique(group[patch.mouth])]


def _passages(patch: _Patch) -> list[Strait]:
    """Passages between the mouths of one gap along its middle, where the water is widest."""
    mouths = _mouths(patch)
    if len(mouths) < 2:
        return []
    tail, head = patch.links
    step = arc(np.linalg.norm(patch.vectors[tail] - patch.vectors[head], axis=1))
    # Narrow water is dear, so the path keeps to the middle and prefers the wider of two ways.
    cost = step * (np.max(patch.clearance) / np.minimum(patch.clearance[tail],
                                                        patch.clearance[head])) ** 2
    n = patch.mouth.size
    graph = csr_matrix((cost, (tail, head)), shape=(n, n))
    passages = []
    for a, start in enumerate(mouths):
        reach, before, _ = dijkstra(graph, directed=False, indices=start, min_only=True,
                                    return_predecessors=True)
        for end in mouths[a + 1:]:
            last = int(end[np.argmin(reach[end])])
            passages.append(_passage(patch, _path(before, last), mouths[a], end))
    return passages


def _path(before: NDArray[np.int32], last: int) -> Index:
    """Cells of the cheapest path that ends at `last`, from its start."""
    path = [last]
    while before[path[-1]] >= 0:
        path.append(int(before[path[-1]]))
    return np.array(path[::-1])


def _passage(patch: _Patch, path: Index, start: Index, end: Index) -> Strait:
    """Width, length and sill of the passage along a path of cells."""
    along = patch.vectors[path]
    lon, lat = positions(along)
    step = arc(np.linalg.norm(np.diff(along, axis=0), axis=1))
    width = 2.0 * patch.clearance[path]
    inertia = width.min() * (step * 0.5 * (1.0 / width[1:] + 1.0 / width[:-1])).sum()
    return Strait(
        lon=lon,
        lat=lat,
        length=float(step.sum()),
        width=float(width.min()),
        inertia_length=float(inertia),
        sill_depth=float(patch.depth[path].min()),
    )
