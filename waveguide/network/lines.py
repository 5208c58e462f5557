"""Nodes of coast rings and equatorial stretches, and the steps along them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.effective import (
    EffectiveCoast,
    cell_indices,
    offshore_azimuths,
)
from waveguide.constants import EARTH_RADIUS
from waveguide.geodesy import destination, geodesic_length

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
    east = (np.roll(lon, -1)[at] - lon[at] + 180.0) % 360.0 - 180.0
    crossing = (lon[at] + share * east + 180.0) % 360.0 - 180.0
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
    """Longitudes of the nodes strictly between two ends of an equatorial stretch (degrees)."""
    span = (east - west) % 360.0
    count = max(round(np.radians(span) * EARTH_RADIUS / spacing), 1)
    return (west + span * np.arange(1, count) / count + 180.0) % 360.0 - 180.0


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
    lon, lat, line, offshore, tails, heads, crossings = [], [], [], [], [], [], []
    first = 0
    for number, (ring_lon, ring_lat) in enumerate(_coast_lines(coast)):
        tail, head = coast_steps(ring_lat, first)
        lon.append(ring_lon)
        lat.append(ring_lat)
        line.append(np.full(ring_lon.size, number))
        offshore.append(offshore_azimuths(ring_lon, ring_lat))
        crossing = np.nonzero(ring_lat == 0.0)[0]
        crossings.append(
            np.stack([crossing + first, np.roll(ring_lat, -1)[crossing] > 0.0])
        )
        tails.append(tail)
        heads.append(head)
        first += ring_lon.size
    junction, northward = np.concatenate(crossings, axis=1)
    # Land is on the right of the stored order: heading north it lies to the east.
    eastern, western = junction[northward == 1], junction[northward == 0]
    coast_lon = np.concatenate(lon)
    coast_offshore = np.concatenate(offshore)
    basin = [_basins(coast, coast_lon, np.concatenate(lat), coast_offshore)]
    coast_count, number = first, len(lon)
    for start, end in _stretches(coast_lon, eastern, western):
        middle = equator_nodes(coast_lon[start], coast_lon[end], spacing)
        chain = np.concatenate([[start], first + np.arange(middle.size), [end]])
        lon.append(middle)
        lat.append(np.zeros(middle.size))
        line.append(np.full(middle.size, number))
        offshore.append(np.full(middle.size, np.nan))
        basin.append(np.full(middle.size, basin[0][start]))
        tails.append(chain[:-1])
        heads.append(chain[1:])
        first += middle.size
        number += 1
    all_lon, all_lat = np.concatenate(lon), np.concatenate(lat)
    tail, head = np.concatenate(tails), np.concatenate(heads)
    return Lines(
        lon=all_lon,
        lat=all_lat,
        line=np.concatenate(line).astype(np.int64),
        equatorial=np.arange(all_lon.size) >= coast_count,
        offshore=np.concatenate(offshore),
        basin=np.concatenate(basin),
        tail=tail,
        head=head,
        length=geodesic_length(all_lon[tail], all_lat[tail], all_lon[head], all_lat[head]),
        eastern=eastern,
        western=western,
    )
