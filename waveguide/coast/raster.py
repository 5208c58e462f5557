"""Which cells of a global grid a boundary-trapped mode sees as ocean.

A mode does not follow the surveyed shoreline. Water too shallow to carry it is a wall, and
inlets, islands and gaps smaller than its own cross-shore scale are passed by. On a global
grid that is two operations: a depth threshold (the sill depth), and a morphological closing
of the land with a disc of half the scale, both of which vary with latitude. The closing joins
land across gaps narrower than the scale and leaves wider water untouched, which is the rule
"a strait narrower than R is crossed, one wider is entered".

Distances are measured between unit vectors, so the date line and the poles need no care.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import label
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components
from scipy.spatial import cKDTree

from waveguide.constants import EARTH_RADIUS
from waveguide.errors import InputError
from waveguide.geodesy import chord, unit_vectors

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]


@dataclass(frozen=True)
class GlobalGrid:
    """A regular global grid of cells whose longitudes close on themselves.

    Attributes
    ----------
    lon : ndarray, shape (nx,)
        Cell centres, degrees east, ascending, nx × spacing = 360.
    lat : ndarray, shape (ny,)
        Cell centres, degrees north, ascending, from pole to pole.
    """

    lon: Array
    lat: Array

    def __post_init__(self) -> None:
        step = np.diff(self.lon)
        if not np.allclose(step, step[0]) or not np.isclose(step[0] * self.lon.size, 360.0):
            raise InputError(
                f"grid: {self.lon.size} longitudes {step[0]:g}° apart do not close the globe; "
                "give a regular grid that covers 360° once"
            )

    @property
    def shape(self) -> tuple[int, int]:
        """Rows and columns (ny, nx)."""
        return self.lat.size, self.lon.size

    @property
    def spacing(self) -> float:
        """Meridional spacing (m)."""
        return float(np.radians(self.lat[1] - self.lat[0]) * EARTH_RADIUS)

    def vectors(self, mask: Mask) -> Array:
        """Unit vectors of the cells of a mask, in row-major order, shape (n, 3)."""
        rows, columns = np.nonzero(mask)
        return unit_vectors(self.lon[columns], self.lat[rows])


def _edge_cells(mask: Mask) -> Mask:
    """Cells of a mask that touch a cell outside it (4 neighbours, longitudes wrap)."""
    outside = ~mask
    touches = np.roll(outside, 1, axis=1) | np.roll(outside, -1, axis=1)
    touches[1:] |= outside[:-1]
    touches[:-1] |= outside[1:]
    return mask & touches


def within(grid: GlobalGrid, mask: Mask, candidates: Mask, radius: Array) -> Mask:
    """Candidate cells that lie no farther from a mask than a radius of their row.

    Parameters
    ----------
    grid : GlobalGrid
    mask, candidates : ndarray of bool, shape (ny, nx)
    radius : ndarray, shape (ny,)
        Radius by latitude (m).

    Returns
    -------
    ndarray of bool, shape (ny, nx)
    """
    result = np.zeros(grid.shape, dtype=bool)
    if not mask.any():
        return result
    tree = cKDTree(grid.vectors(_edge_cells(mask)), balanced_tree=False)
    rows, _ = np.nonzero(candidates)
    limit = chord(radius)[rows]
    nearest, _ = tree.query(
        grid.vectors(candidates), distance_upper_bound=float(limit.max(initial=0.0)), workers=-1
    )
    result[candidates] = nearest <= limit
    return result | (candidates & mask)


def closed_ocean(grid: GlobalGrid, ocean: Mask, radius: Array) -> Mask:
    """The part of the ocean that a disc can reach: the complement of the closed land.

    Parameters
    ----------
    grid : GlobalGrid
    ocean : ndarray of bool, shape (ny, nx)
        Water deep enough for the mode.
    radius : ndarray, shape (ny,)
        Half the width below which gaps are crossed, by latitude (m).

    Returns
    -------
    ndarray of bool, shape (ny, nx)
        Ocean cells less inlets and gaps narrower than twice the radius.
    """
    open_water = ocean & ~within(grid, ~ocean, ocean, radius)
    return ocean & within(grid, open_water, ocean, radius)


def label_periodic(mask: Mask, diagonal: bool = False) -> tuple[NDArray[np.int64], int]:
    """Label connected components of a mask whose columns wrap and whose pole rows are one cell.

    Parameters
    ----------
    mask : ndarray of bool, shape (ny, nx)
    diagonal : bool
        Whether cells that meet at a corner only are connected. A traced line passes between
        land cells that do (see `waveguide.coast.trace.chain_rings`), so water is connected
        that way and land is not.

    Returns
    -------
    labels : ndarray of int, shape (ny, nx)
        0 outside the mask, then 1 … count.
    count : int
    """
    labels, count = label(mask, np.ones((3, 3)) if diagonal else None)
    first, last = labels[:, 0], labels[:, -1]
    links = [np.stack([first, last])]
    if diagonal:
        links += [np.stack([first[1:], last[:-1]]), np.stack([first[:-1], last[1:]])]
    for row in (labels[0], labels[-1]):
        links.append(np.stack([row, np.full(row.size, row.max())]))
    pairs = np.concatenate(links, axis=1)
    pairs = pairs[:, (pairs > 0).all(axis=0)]
    graph = coo_matrix((np.ones(pairs.shape[1]), pairs), shape=(count + 1, count + 1))
    _, merged = connected_components(graph, directed=False)
    _, compact = np.unique(merged, return_inverse=True)
    # label 0 is its own component and sorts first
    relabelled = np.asarray(compact, dtype=np.int64)[labels]
    return relabelled, int(relabelled.max(initial=0))


def component_areas(grid: GlobalGrid, labels: NDArray[np.int64], count: int) -> Array:
    """Area of every labelled component.

    Parameters
    ----------
    grid : GlobalGrid
    labels : ndarray of int, shape (ny, nx)
        0 … count.
    count : int

    Returns
    -------
    ndarray, shape (count + 1,)
        Area (m²); entry 0 is the unlabelled rest.
    """
    cell = grid.spacing**2 * np.cos(np.radians(grid.lat)) * (
        (grid.lon[1] - grid.lon[0]) / (grid.lat[1] - grid.lat[0])
    )
    weights = np.broadcast_to(cell[:, None], grid.shape)
    area = np.bincount(labels.ravel(), weights=weights.ravel(), minlength=count + 1)
    return np.asarray(area, dtype=float)
