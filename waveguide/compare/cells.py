"""Which cells of a model lie on a route, with which weight, and in which bin along it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array
from scipy.spatial import cKDTree

from waveguide.compare.route_lines import RouteLine, densified
from waveguide.compare.windows import guide_width, seaward
from waveguide.errors import InputError
from waveguide.geodesy import arc, chord, unit_vectors

Array = NDArray[np.float64]
Index = NDArray[np.intp]

ROUTE_SPACING = 5e3
"""Distance between the places along a route to which cells are tied (m)."""

FINEST_BIN = 25e3
"""Bins along a route are no shorter than this (m)."""

ZONE_WIDTHS = 1.0
"""The trapping zone reaches so many e-folding widths from the guide."""

CELLS_AT_ONCE = 500_000

LANDWARD = 60e3
"""Landward of the guide, over the shelf, cells are taken within this (m)."""


@dataclass(frozen=True)
class GuideCells:
    """Cells of a model grid in the trapping zones of some routes.

    Attributes
    ----------
    cell : ndarray of int, shape (n,)
        Flat index into the grid, rising.
    weights : csr_array, shape (n, nbin)
        Weight of each cell in each bin, all routes side by side.
    first_bin : ndarray of int, shape (nroute + 1,)
        Bins of route r are first_bin[r] to first_bin[r + 1].
    bin_distance : ndarray, shape (nbin,)
        Along its route (m).
    distance_off : ndarray, shape (n,)
        Distance of each cell from the nearest of the routes (m).
    """

    cell: Index
    weights: csr_array
    first_bin: Index
    bin_distance: Array
    distance_off: Array


def guide_cells(lines: Sequence[RouteLine], lon: Array, lat: Array) -> GuideCells:
    """Find the cells of a grid that lie in the trapping zones of routes.

    A cell belongs to the nearest place of a route, if it lies seaward of it (or on the shelf)
    within the e-folding width. Cells on the far side of the land, nearest though they may be, are
    left out. Within a bin cells count by the structure of the wave, e^(−d/R) off a coast and
    e^(−y²/2L²) about the equator.

    Parameters
    ----------
    lines : sequence of RouteLine
    lon, lat : ndarray, shape (ny, nx)
        Degrees, NaN where a cell has no position.

    Returns
    -------
    GuideCells

    Raises
    ------
    InputError
        If the grid has no cell near the routes.
    """
    flat = near_cells(lines, lon.ravel(), lat.ravel())
    if not flat.size:
        raise InputError(
            "--model: no cell lies near the routes; the model does not cover them, or longitude "
            "and latitude are not what they seem"
        )
    where = unit_vectors(lon.ravel()[flat], lat.ravel()[flat])
    spacing = typical_spacing(cKDTree(where), lines)
    found = [_on_route(line, where, spacing) for line in lines]
    first_bin = np.concatenate([[0], np.cumsum([part.bins.size for part in found])])
    rows = np.concatenate([part.cell for part in found])
    columns = np.concatenate([part.bin + b for part, b in zip(found, first_bin, strict=False)])
    weight = np.concatenate([part.weight for part in found])
    away = np.concatenate([part.away for part in found])
    used, row = np.unique(rows, return_inverse=True)
    nearest = np.full(used.size, np.inf)
    np.minimum.at(nearest, row, away)
    weights = csr_array((weight, (row, columns)), shape=(used.size, int(first_bin[-1])))
    return GuideCells(
        flat[used], weights, np.asarray(first_bin, np.intp),
        np.concatenate([part.bins for part in found]), nearest,
    )


def near_cells(lines: Sequence[RouteLine], lon: Array, lat: Array) -> Index:
    """Flat indices of cells within the widest zone of any route, roughly.

    The whole grid is gone through in parts and measured against a few places only, so that a grid
    of many millions of cells costs seconds and no memory.

    Parameters
    ----------
    lines : sequence of RouteLine
    lon, lat : ndarray, shape (n,)
        Degrees, NaN where a cell has no position.

    Returns
    -------
    ndarray of int
    """
    rough = 200e3
    found = np.zeros(lon.size, bool)
    for line in lines:
        _, x, y = densified(line, rough)
        reach = chord(max(2.0 * ZONE_WIDTHS * float(guide_width(line).max()), 2.0 * rough))
        tree = cKDTree(unit_vectors(x, y))
        for start in range(0, lon.size, CELLS_AT_ONCE):
            part = slice(start, start + CELLS_AT_ONCE)
            open_cells = start + np.flatnonzero(np.isfinite(lon[part]) & ~found[part])
            places = unit_vectors(lon[open_cells], lat[open_cells])
            away, _ = tree.query(places, distance_upper_bound=float(reach))
            found[open_cells[np.isfinite(away)]] = True
    return np.flatnonzero(found)


def typical_spacing(tree: cKDTree, lines: Sequence[RouteLine]) -> float:
    """Distance along the routes from one cell to the next (m).

    Cells of many grids are far longer one way than the other, so what counts for bins without holes
    is how far the nearest cell stays the same as one goes along: its median, which stretches
    outside a regional model do not change.

    Parameters
    ----------
    tree : cKDTree
        Of the cells' unit vectors.
    lines : sequence of RouteLine

    Returns
    -------
    float
    """
    stays = [np.zeros(0)]
    for line in lines:
        distance, lon, lat = densified(line, ROUTE_SPACING)
        _, nearest = tree.query(unit_vectors(lon, lat))
        stays.append(np.diff(distance[np.flatnonzero(np.diff(nearest))]))
    known = np.concatenate(stays)
    return float(np.median(known)) if known.size else float(lines[0].distance[-1])


@dataclass(frozen=True)
class _OnRoute:
    """Cells of one route: index into the known cells, bin, weight, distance off; bin middles."""

    cell: Index
    bin: Index
    weight: Array
    away: Array
    bins: Array


def _on_route(line: RouteLine, where: Array, spacing: float) -> _OnRoute:
    distance, lon, lat = densified(line, ROUTE_SPACING)
    place = unit_vectors(lon, lat)
    width = np.interp(distance, line.distance, guide_width(line))
    equatorial = np.interp(distance, line.distance, line.equatorial.astype(float)) > 0.5
    reach = np.maximum(ZONE_WIDTHS * width, 1.5 * spacing)
    cell = np.arange(len(where))
    chords, nearest = cKDTree(place).query(where)
    away = arc(chords)
    outward = _seaward_distance(line, distance, place, where[cell], nearest)
    shelf = max(LANDWARD, 1.5 * spacing)
    beyond = (nearest == 0) | (nearest == distance.size - 1)  # before the start, after the end
    within = away <= np.where(beyond, spacing, reach[nearest])
    keep = within & (equatorial[nearest] | (outward >= -shelf))
    cell, away, nearest = cell[keep], away[keep], nearest[keep]
    decay = np.where(equatorial[nearest], (away / width[nearest]) ** 2, away / width[nearest])
    edges = _bin_edges(float(distance[-1]), spacing)
    number = np.clip(np.searchsorted(edges, distance[nearest], side="right") - 1, 0, edges.size - 2)
    return _OnRoute(
        cell, np.asarray(number, np.intp), np.exp(-decay), away, 0.5 * (edges[1:] + edges[:-1])
    )


def _bin_edges(length: float, spacing: float) -> Array:
    count = max(int(length / max(FINEST_BIN, 1.5 * spacing)), 1)
    return np.linspace(0.0, length, count + 1)


def _seaward_distance(
    line: RouteLine, distance: Array, place: Array, where: Array, nearest: Index
) -> Array:
    """How far cells lie seaward of their nearest place on the route (m), negative landward."""
    azimuth = np.radians(np.nan_to_num(seaward(line)))
    at = np.clip(np.searchsorted(line.distance, distance), 0, line.distance.size - 1)
    here, a = place[nearest], azimuth[at[nearest]]
    lam, sin_lat = np.arctan2(here[:, 1], here[:, 0]), here[:, 2]
    cos_lat = np.sqrt(1.0 - sin_lat**2)
    east = np.stack([-np.sin(lam), np.cos(lam), np.zeros_like(lam)], axis=1)
    north = np.stack([-sin_lat * np.cos(lam), -sin_lat * np.sin(lam), cos_lat], axis=1)
    outward = np.sin(a)[:, None] * east + np.cos(a)[:, None] * north
    projected = ((where - here) * outward).sum(axis=1)
    return np.asarray(np.sign(projected) * arc(np.abs(projected)))
