"""How a position off the guide is tied to it.

A trapped wave reaches a position at an offshore distance d with the share e^(−d/R) of its coastal
amplitude, and one at a distance y from the equator with e^(−y²/2L_e²). Shoreward of the guide,
over the shelf, its sea level is taken as that of the guide. Positions beyond 3 R are refused.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import BETA_EQUATOR, deformation_radius
from waveguide.geodesy import (
    arc,
    chord,
    geodesic_length,
    positions,
    unit_vectors,
    wrap_longitude,
)
from waveguide.network.graph import Network, StepKind
from waveguide.ocean.bathymetry import Bathymetry

Array = NDArray[np.float64]
Index = NDArray[np.int64]
Box = tuple[float, float, float, float]

FARTHEST_RADII = 3.0
"""Positions farther off the guide than this many deformation radii are refused."""

WIDEST_SHELF = 300e3
"""Shoreward of the guide a position may lie this far on the shelf (m)."""

FAINTEST_TIE = 0.3
"""Of several stretches of guide near a position those with less than this share of the amplitude
of the best are left out: the signal there is that of the nearer guide."""

MOST_LAND = 0.5
"""A tie may lead over land for this share of its way: gauges stand on land cells of the grid."""


@dataclass(frozen=True)
class Ties:
    """Nodes that a position (or a box) is tied to.

    Attributes
    ----------
    node : ndarray of int, shape (k,)
        Empty when the position is off the guide.
    distance : ndarray, shape (k,)
        Distance to the line of the guide at the node (m); 0 within a box.
    along : ndarray, shape (k,)
        How far the closest point of the line lies beyond the node in the direction of travel
        (m, negative upstream).
    foot_lon, foot_lat : ndarray, shape (k,)
        That closest point, degrees.
    radii : ndarray, shape (k,)
        The same in deformation radii.
    factor : ndarray, shape (k,)
        Share of the guide's amplitude, 0 to 1.
    inshore : ndarray of bool, shape (k,)
        Whether the position lies shoreward of the guide.
    nearest : float
        Distance to the nearest node that carries the mode, tied or not (m); infinite if none.
    nearest_radii : float
        The same in deformation radii.
    """

    node: Index
    distance: Array
    along: Array
    foot_lon: Array
    foot_lat: Array
    radii: Array
    factor: Array
    inshore: NDArray[np.bool_]
    nearest: float
    nearest_radii: float


def point_box(lon: float, lat: float) -> Box:
    """A position as a box without extent.

    Parameters
    ----------
    lon, lat : float
        Degrees.

    Returns
    -------
    (west, south, east, north), degrees
    """
    return (lon, lat, lon, lat)


def closest_in_box(box: Box, lon: Array, lat: Array) -> tuple[Array, Array]:
    """The place in a box closest to each position, along its own parallel and meridian.

    Parameters
    ----------
    box : (west, south, east, north)
        Degrees; from west eastward to east, so across the date line where west > east. A box
        of 360° goes round the globe.
    lon, lat : ndarray of one shape, degrees

    Returns
    -------
    lon, lat : ndarray of that shape, degrees
    """
    west, south, east, north = box
    # a hair (1e-9°) wider, or two equal sides that rounding has swapped would span the globe
    half = 180.0 if abs(east - west) > 359.999999999 else ((east - west + 1e-9) % 360.0) / 2.0
    middle = west + half
    off = wrap_longitude(lon - middle)
    return wrap_longitude(middle + np.clip(off, -half, half)), np.clip(lat, south, north)


def tie(network: Network, speed: Array, box: Box, depths: Bathymetry) -> Ties:
    """Tie a position or a box to the nodes of a network that carry a mode.

    Of every stretch of guide within reach the node of closest approach is taken; of nodes inside
    the box, all.

    Parameters
    ----------
    network : Network
    speed : ndarray, shape (n,)
        Phase speed of the mode (m/s), NaN where it does not exist.
    box : (west, south, east, north)
        Degrees; a position is a box without extent.
    depths : Bathymetry
        Tells whether land lies between.

    Returns
    -------
    Ties
    """
    lon, lat = closest_in_box(box, network.lon, network.lat)
    rough = arc(np.linalg.norm(unit_vectors(lon, lat) - network.vectors, axis=1))
    node = _within_reach(network, speed, rough)
    off_lon, off_lat = lon[node], lat[node]
    if not node.size:
        return _none(network, speed, box)
    distance, along, foot_lon, foot_lat = _feet(network, node, off_lon, off_lat)
    inshore = _is_inshore(network, node, off_lon, off_lat) & (distance > 0.0)
    local = speed[node]
    radius = deformation_radius(local, network.lat[node])
    radii = distance / radius
    offshore_loss = np.where(
        network.equatorial[node],
        BETA_EQUATOR * distance**2 / (2.0 * local),
        np.where(inshore, 0.0, radii),
    )
    keep = np.where(inshore, distance <= WIDEST_SHELF, radii <= FARTHEST_RADII)
    keep &= _closest_on_line(network, node, distance, rough)
    keep &= _mostly_water(network, node, off_lon, off_lat, distance, depths)
    keep &= _not_round_a_corner(network, node, distance)
    if not keep.any():
        return _none(network, speed, box)
    factor = np.exp(-offshore_loss)
    keep &= factor >= FAINTEST_TIE * np.max(factor[keep])
    nearest = int(np.argmin(distance))
    return Ties(
        node[keep], distance[keep], along[keep], foot_lon[keep], foot_lat[keep],
        radii[keep], factor[keep], inshore[keep],
        float(distance[nearest]), float(radii[nearest]),
    )


def _within_reach(network: Network, speed: Array, rough: Array) -> Index:
    """Nodes that carry the mode, and by their distance on the sphere (m) may be tied."""
    carried = np.isfinite(speed)
    radius = deformation_radius(np.where(carried, speed, 0.0), network.lat)
    reach = np.maximum(FARTHEST_RADII * radius, WIDEST_SHELF) * 1.01
    return np.nonzero(carried & (rough <= reach))[0]


def _feet(
    network: Network, node: Index, lon: Array, lat: Array
) -> tuple[Array, Array, Array, Array]:
    """Closest points to places on the line through each node and its neighbours.

    Nodes lie some 20 km apart, which may be more than R: what counts is the distance to the line.

    Returns
    -------
    distance, along : ndarray, shape (n,)
        m; `along` is positive downstream of the node.
    lon, lat : ndarray, shape (n,)
        The closest points, degrees.
    """
    lines = np.isin(network.kind, (StepKind.COAST, StepKind.EQUATOR, StepKind.STRAIT))
    row = np.full(network.size, -1)
    row[node] = np.arange(node.size)
    place, here = unit_vectors(lon, lat), network.vectors[node]
    foot, along = here.copy(), np.zeros(node.size)
    nearest = np.linalg.norm(place - here, axis=1)
    for start, end, sign in (
        (network.tail[lines], network.head[lines], 1.0),
        (network.head[lines], network.tail[lines], -1.0),
    ):
        step = np.nonzero(row[start] >= 0)[0]
        at = row[start[step]]
        span = network.vectors[end[step]] - here[at]
        share = ((place[at] - here[at]) * span).sum(axis=1) / (span**2).sum(axis=1)
        # beyond half-way the other node is the closer one
        reached = here[at] + np.clip(share, 0.0, 0.5)[:, None] * span
        away = np.linalg.norm(place[at] - reached, axis=1)
        for k in np.nonzero(away < nearest[at])[0]:
            if away[k] < nearest[at[k]]:
                nearest[at[k]], foot[at[k]] = away[k], reached[k]
                along[at[k]] = sign
    foot_lon, foot_lat = positions(foot)
    along *= geodesic_length(foot_lon, foot_lat, network.lon[node], network.lat[node])
    return geodesic_length(foot_lon, foot_lat, lon, lat), along, foot_lon, foot_lat


def _none(network: Network, speed: Array, box: Box) -> Ties:
    """No ties, but how far away the guide is."""
    carried = np.nonzero(np.isfinite(speed))[0]
    nearest, radii = np.inf, np.inf
    if carried.size:
        lon, lat = closest_in_box(box, network.lon[carried], network.lat[carried])
        away = geodesic_length(network.lon[carried], network.lat[carried], lon, lat)
        at = int(np.argmin(away))
        nearest = float(away[at])
        radii = nearest / float(
            deformation_radius(speed[carried[at]], network.lat[carried[at]])
        )
    empty = np.zeros(0)
    return Ties(
        np.zeros(0, np.int64), empty, empty, empty, empty, empty, empty, np.zeros(0, bool),
        nearest, radii,
    )


def _is_inshore(network: Network, node: Index, lon: Array, lat: Array) -> NDArray[np.bool_]:
    """Whether places lie on the landward side of the coast at their nodes."""
    here = network.vectors[node]
    azimuth = np.radians(np.nan_to_num(network.offshore[node]))
    lam = np.radians(network.lon[node])
    east = np.stack([-np.sin(lam), np.cos(lam), np.zeros_like(lam)], axis=1)
    north = np.cross(here, east)
    seaward = np.sin(azimuth)[:, None] * east + np.cos(azimuth)[:, None] * north
    towards = unit_vectors(lon, lat) - here
    return np.asarray(((seaward * towards).sum(axis=1) < 0.0) & np.isfinite(network.offshore[node]))


def _closest_on_line(
    network: Network, node: Index, distance: Array, rough: Array
) -> NDArray[np.bool_]:
    """Nodes no farther than both neighbours on their line, or within the box itself.

    A neighbour may be beyond its own reach and yet nearer, so all of them are compared.
    """
    away = rough.copy()
    away[node] = distance
    along = np.isin(network.kind, (StepKind.COAST, StepKind.EQUATOR, StepKind.STRAIT))
    tail, head = network.tail[along], network.head[along]
    best_neighbour = np.full(network.size, np.inf)
    np.minimum.at(best_neighbour, tail, away[head])
    np.minimum.at(best_neighbour, head, away[tail])
    return np.asarray((distance <= best_neighbour[node]) | (distance == 0.0))


def _not_round_a_corner(network: Network, node: Index, distance: Array) -> NDArray[np.bool_]:
    """Leave out other stretches of the nearest line that are more than twice as far.

    A place off one side of a cape belongs to that side, not also to the other.
    """
    nearest = int(np.argmin(distance))
    same = network.line[node] == network.line[node[nearest]]
    beside = distance <= 2.0 * (distance[nearest] + _spacing(network))
    # A strait is narrower than R: only what lies in it, nearer than to any coast, is tied to it.
    within = network.in_strait[node] & ~network.in_strait[node[nearest]]
    return np.asarray((~same | beside) & ~within)


def _mostly_water(
    network: Network, node: Index, lon: Array, lat: Array, distance: Array, depths: Bathymetry
) -> NDArray[np.bool_]:
    """Whether the way between node and place is not mainly over land."""
    share = np.linspace(0.0, 1.0, 41)[:, None, None]
    way = (1.0 - share) * unit_vectors(lon, lat) + share * network.vectors[node]
    land = (depths.sample(*positions(way)) <= 0.0).mean(axis=0)
    short = distance <= 1.5 * _spacing(network)
    return np.asarray((land <= MOST_LAND) | short)


def _spacing(network: Network) -> float:
    """Typical distance between nodes (m)."""
    return float(np.median(network.length[network.kind == StepKind.COAST]))


def distance_to_water(lon: float, lat: float, depths: Bathymetry, reach: float) -> float:
    """Distance from a position to the nearest sea of the bathymetry.

    Parameters
    ----------
    lon, lat : float
        Degrees.
    depths : Bathymetry
    reach : float
        How far to look (m).

    Returns
    -------
    float
        m; infinite if there is no sea within reach.
    """
    if depths.sample(lon, lat) > 0.0:
        return 0.0
    half = np.degrees(chord(reach))
    stretch = 1.0 / max(np.cos(np.radians(lat)), 0.05)
    offset = np.linspace(-half, half, 61)
    x, y = np.meshgrid(lon + offset * stretch, np.clip(lat + offset, -90.0, 90.0))
    wet = depths.sample(x, y) > 0.0
    if not wet.any():
        return float("inf")
    return float(geodesic_length(lon, lat, x[wet], y[wet]).min())
