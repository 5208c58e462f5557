"""From an ocean mask to closed, smoothed boundary lines.

Every side between an ocean cell and a land cell becomes a directed piece of boundary with land
on its right, and the pieces are chained into rings. Longitudes wrap, so a ring that goes round a
pole (Antarctica) or crosses the date line is a ring like any other. The staircase is removed by a
Gaussian average along the line, whose width may vary along it.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import gaussian_filter1d

from waveguide.coast.raster import GlobalGrid, Mask
from waveguide.geodesy import arc, positions, unit_vectors

Array = NDArray[np.float64]
Index = NDArray[np.int64]


def boundary_pieces(ocean: Mask) -> tuple[Index, Index]:
    """Directed sides between ocean and land, land on the right.

    Parameters
    ----------
    ocean : ndarray of bool, shape (ny, nx)
        Rows run northward, columns eastward and wrap. The first and the last row, at the poles,
        must be all ocean or all land, or the sides there would not close.

    Returns
    -------
    start, end : ndarray of int, shape (n,)
        Corners as row × nx + column; corner (j, i) is the south-west corner of cell (j, i).
    """
    nx = ocean.shape[1]
    west = np.roll(ocean, 1, axis=1)
    j, i = np.nonzero(ocean != west)  # the side west of cell (j, i)
    land_east = ~ocean[j, i]
    low, high = j * nx + i, (j + 1) * nx + i
    starts = [np.where(land_east, low, high)]
    ends = [np.where(land_east, high, low)]
    j, i = np.nonzero(ocean[1:] != ocean[:-1])  # the side south of cell (j + 1, i)
    land_south = ~ocean[j, i]
    left, right = (j + 1) * nx + i, (j + 1) * nx + (i + 1) % nx
    starts.append(np.where(land_south, left, right))
    ends.append(np.where(land_south, right, left))
    return np.concatenate(starts), np.concatenate(ends)


def chain_rings(start: Index, end: Index, columns: int) -> list[Index]:
    """Chain directed pieces into rings of corners.

    Where two rings touch at a corner (two land cells meeting diagonally) the line turns right,
    towards its own land, so that land cells joined only by a corner stay apart.

    Parameters
    ----------
    start, end : ndarray of int, shape (n,)
        As from `boundary_pieces`.
    columns : int
        Number of columns nx of the grid.

    Returns
    -------
    list of ndarray of int
        Corners of each ring in order, without repeating the first.
    """
    order = np.argsort(start, kind="stable")
    start, end = start[order], end[order]
    first = np.searchsorted(start, end, side="left")
    last = np.searchsorted(start, end, side="right")
    following = first.copy()
    for piece in np.nonzero(last - first == 2)[0]:
        options = (first[piece], first[piece] + 1)
        following[piece] = max(
            options, key=lambda option: _right_turn(start, end, int(piece), int(option), columns)
        )
    return _cycles(following, start)


def _right_turn(start: Index, end: Index, piece: int, option: int, columns: int) -> int:
    """Positive when piece `option` turns right (clockwise) off piece `piece`."""
    ax, ay = _step(start[piece], end[piece], columns)
    bx, by = _step(start[option], end[option], columns)
    return ay * bx - ax * by


def _step(start: int, end: int, columns: int) -> tuple[int, int]:
    """Step of a piece in columns and rows, the wrap undone."""
    dx = (int(end) % columns - int(start) % columns + 1) % columns - 1
    return dx, int(end) // columns - int(start) // columns


def _cycles(following: Index, start: Index) -> list[Index]:
    """Cycles of a permutation, each as the corners it starts from."""
    steps = following.tolist()
    seen = bytearray(len(steps))
    rings = []
    for seed in range(len(steps)):
        if seen[seed]:
            continue
        ring, piece = [], seed
        while not seen[piece]:
            seen[piece] = 1
            ring.append(piece)
            piece = steps[piece]
        rings.append(start[np.array(ring)])
    return rings


def corner_positions(grid: GlobalGrid, corners: Index) -> tuple[Array, Array]:
    """Positions of grid corners.

    Parameters
    ----------
    grid : GlobalGrid
    corners : ndarray of int, shape (n,)
        As from `boundary_pieces`.

    Returns
    -------
    lon, lat : ndarray, shape (n,), degrees
    """
    nx = grid.lon.size
    dx, dy = grid.lon[1] - grid.lon[0], grid.lat[1] - grid.lat[0]
    lon = grid.lon[0] + (corners % nx - 0.5) * dx
    lat = np.clip(grid.lat[0] + (corners // nx - 0.5) * dy, -90.0, 90.0)
    return lon, lat


def _closed_steps(vectors: Array) -> Array:
    """Distance (m) from each point of a closed line to the next, shape (n,)."""
    return arc(np.linalg.norm(vectors - np.roll(vectors, -1, axis=0), axis=1))


def _on_line(vectors: Array, parameter: Array, wanted: Array) -> Array:
    """Places on a closed line at values of a parameter that grows along it.

    The parameter has one more entry than `vectors`: its last is that of the first point again.
    """
    closed = np.concatenate([vectors, vectors[:1]])
    points = np.stack([np.interp(wanted, parameter, closed[:, k]) for k in range(3)], axis=1)
    return np.asarray(points / np.linalg.norm(points, axis=1, keepdims=True))


def smooth_ring(vectors: Array, width: Array) -> Array:
    """Average a closed line along itself with a Gaussian of varying width.

    Parameters
    ----------
    vectors : ndarray, shape (n, 3)
        Unit vectors in order.
    width : ndarray, shape (n,)
        Standard deviation of the average (m) at each point.

    Returns
    -------
    ndarray, shape (m, 3)
        The smoothed line, four points to a width.
    """
    mean_width = 0.5 * (width + np.roll(width, -1))
    warped = np.concatenate([[0.0], np.cumsum(_closed_steps(vectors) / mean_width)])
    count = max(int(np.ceil(4.0 * warped[-1])), 8)
    even = _on_line(vectors, warped, np.arange(count) * (warped[-1] / count))
    sigma = count / warped[-1]
    averaged = gaussian_filter1d(even, sigma, axis=0, mode="wrap")
    return np.asarray(averaged / np.linalg.norm(averaged, axis=1, keepdims=True))


def space_evenly(vectors: Array, spacing: float) -> Array:
    """Nodes at equal distances along a closed line, as close to a wanted one as fits the turn.

    Where the line bends between two nodes the straight way from one to the next is shorter.

    Parameters
    ----------
    vectors : ndarray, shape (n, 3)
        Unit vectors, closer together than the spacing.
    spacing : float
        Wanted distance between nodes (m).

    Returns
    -------
    ndarray, shape (m, 3)
        At least four nodes.
    """
    along = np.concatenate([[0.0], np.cumsum(_closed_steps(vectors))])
    count = max(round(along[-1] / spacing), 4)
    return _on_line(vectors, along, np.arange(count) * (along[-1] / count))


def smoothed_positions(
    grid: GlobalGrid, corners: Index, width_by_latitude: tuple[Array, Array], spacing: float
) -> tuple[Array, Array]:
    """Evenly spaced nodes of the smoothed ring through grid corners.

    Parameters
    ----------
    grid : GlobalGrid
    corners : ndarray of int, shape (n,)
    width_by_latitude : tuple of ndarray
        Latitudes (degrees, ascending) and smoothing widths (m) there.
    spacing : float
        Wanted distance between nodes (m).

    Returns
    -------
    lon, lat : ndarray, shape (m,), degrees
    """
    lon, lat = corner_positions(grid, corners)
    width = np.interp(lat, *width_by_latitude)
    return positions(space_evenly(smooth_ring(unit_vectors(lon, lat), width), spacing))

