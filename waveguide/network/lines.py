"""Nodes of coast rings and equatorial stretches, and the steps along them."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.effective import (
    EffectiveCoast,
    cell_indices,
    offshore_azimuths,
)
from waveguide.constants import EARTH_RADIUS
from waveguide.geodesy import destination, geodesic_length, wrap_longitude

Array = NDArray[np.float64]
Index = NDArray[np.int64]


@dataclass(frozen=True)
class Lines:
    """Nodes and directed steps along coasts and the equator, before gaps are added.

    Attributes are those of the same names in :class:`waveguide.network.graph.Network`;
    `eastern` and `western` list the nodes where a coast meets the equator as the eastern or
    the western boundary of an ocean.
    """

    lon: Array
    lat: Array
    line: Index
    equatorial: NDArray[np.bool_]
    offshore: Array
    basin: Index
    tail: Index
    head: Index
    length: Array
    eastern: Index
    western: Index


def with_equator_nodes(lon: Array, lat: Array) -> tuple[Array, Array]:
    """A closed line with a node put exactly on the equator wherever it crosses.

    Parameters
    ----------
    lon, lat : ndarray, shape (n,)
        Nodes of the closed line, degrees.

    Returns
    -------
    lon, lat : ndarray, shape (n + crossings,)
    """
    lat = np.where(lat == 0.0, 1e-9, lat)
    following = np.roll(lat, -1)
    at = np.nonzero(np.sign(lat) != np.sign(following))[0]
    share = lat[at] / (lat[at] - following[at])
    east = wrap_longitude(np.roll(lon, -1)[at] - lon[at])
    crossing = wrap_longitude(lon[at] + share * east)
    return np.insert(lon, at + 1, crossing), np.insert(lat, at + 1, 0.0)


def coast_steps(lat: Array, first: int) -> tuple[Index, Index]:
    """Directed steps round a closed line whose land is on the right of its stored order.

    Parameters
    ----------
    lat : ndarray, shape (n,)
        Latitudes, with nodes on the equator where the line crosses it.
    first : int
        Index of the line's first node in the network.

    Returns
    -------
    tail, head : ndarray of int, shape (n,)
    """
    here = np.arange(lat.size) + first
    there = np.roll(here, -1)
    northern = lat + np.roll(lat, -1) > 0.0
    return np.where(northern, here, there), np.where(northern, there, here)


def equator_nodes(west: float, east: float, spacing: float) -> Array:
    """Longitudes of the nodes strictly between two ends of an equatorial stretch.

    Parameters
    ----------
    west, east : float
        Ends, degrees.
    spacing : float
        Wanted distance between nodes (m).

    Returns
    -------
    ndarray, shape (n,)
        Degrees; at least one, which marks the stretch as equatorial.
    """
    span = (east - west) % 360.0
    count = max(round(np.radians(span) * EARTH_RADIUS / spacing), 2)
    return wrap_longitude(west + span * np.arange(1, count) / count)


def _coast_lines(coast: EffectiveCoast) -> list[tuple[Array, Array]]:
    """Rings with equator nodes, largest first so that line numbers are stable to read."""
    rings = [with_equator_nodes(*ring) for ring in coast.rings]
    return sorted(rings, key=lambda ring: -ring[0].size)


def _basins(coast: EffectiveCoast, lon: Array, lat: Array, offshore: Array) -> Index:
    """Body of water seaward of each node: the first met within five cells along the normal."""
    basin = np.zeros(lon.size, dtype=np.int64)
    for cells in (1.0, 2.0, 3.0, 4.0, 5.0):
        out_lon, out_lat = destination(lon, lat, offshore, cells * coast.grid.spacing)
        here = coast.basin[cell_indices(coast.grid, out_lon, out_lat)]
        basin = np.where(basin == 0, here, basin)
    return basin


def _stretches(lon: Array, eastern: Index, western: Index) -> list[tuple[int, int]]:
    """Pairs of junction nodes (western boundary, eastern boundary) that bound equatorial water.

    East of a western boundary lies water up to the next coast, which is an eastern boundary.
    """
    pairs = []
    for start in western:
        span = (lon[eastern] - lon[start]) % 360.0
        pairs.append((int(start), int(eastern[np.argmin(span)])))
    return pairs


def build_lines(coast: EffectiveCoast, spacing: float) -> Lines:
    """Nodes and steps along every coast ring and every equatorial stretch of water.

    Parameters
    ----------
    coast : EffectiveCoast
    spacing : float
        Distance between nodes on the equator (m).

    Returns
    -------
    Lines
    """
    shores = _along_coasts(coast)
    parts = [shores]
    first, number = shores.lon.size, int(shores.line[-1]) + 1
    for start, end in _stretches(shores.lon, shores.eastern, shores.western):
        parts.append(_along_equator(shores, start, end, spacing, first, number))
        first, number = first + parts[-1].lon.size, number + 1
    joined = {
        field.name: np.concatenate([getattr(part, field.name) for part in parts])
        for field in fields(Lines)
    }
    return Lines(**joined)


def _along_coasts(coast: EffectiveCoast) -> Lines:
    """Nodes and steps along every ring."""
    rings = _coast_lines(coast)
    sizes = np.array([ring_lon.size for ring_lon, _ in rings])
    firsts = np.cumsum(sizes) - sizes
    lon, lat = (np.concatenate(part) for part in zip(*rings, strict=True))
    offshore = np.concatenate([offshore_azimuths(*ring) for ring in rings])
    steps = [coast_steps(ring_lat, int(first))
             for (_, ring_lat), first in zip(rings, firsts, strict=True)]
    tail, head = (np.concatenate(part) for part in zip(*steps, strict=True))
    # Land is on the right of the stored order: heading north it lies to the east.
    northward = np.concatenate([np.roll(ring_lat, -1) > 0.0 for _, ring_lat in rings])
    return Lines(
        lon=lon,
        lat=lat,
        line=np.repeat(np.arange(sizes.size), sizes),
        equatorial=np.zeros(lon.size, dtype=bool),
        offshore=offshore,
        basin=_basins(coast, lon, lat, offshore),
        tail=tail,
        head=head,
        length=geodesic_length(lon[tail], lat[tail], lon[head], lat[head]),
        eastern=np.nonzero((lat == 0.0) & northward)[0],
        western=np.nonzero((lat == 0.0) & ~northward)[0],
    )


def _along_equator(
    shores: Lines, start: int, end: int, spacing: float, first: int, number: int
) -> Lines:
    """Nodes and steps from a western to an eastern boundary, the first node numbered `first`."""
    lon = equator_nodes(shores.lon[start], shores.lon[end], spacing)
    chain = np.concatenate([[start], first + np.arange(lon.size), [end]])
    along = np.concatenate([shores.lon[[start]], lon, shores.lon[[end]]])
    none = np.zeros(0, dtype=np.int64)
    return Lines(
        lon=lon,
        lat=np.zeros(lon.size),
        line=np.full(lon.size, number),
        equatorial=np.ones(lon.size, dtype=bool),
        offshore=np.full(lon.size, np.nan),
        basin=np.full(lon.size, shores.basin[start]),
        tail=chain[:-1],
        head=chain[1:],
        length=geodesic_length(along[:-1], 0.0, along[1:], 0.0),
        eastern=none,
        western=none,
    )
