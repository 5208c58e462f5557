"""Where a signal can leave one coast for another: straits, facing coasts and wide openings."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import cKDTree

from waveguide.coast.effective import EffectiveCoast, is_water
from waveguide.coast.gaps import Strait
from waveguide.geodesy import arc, chord, positions, unit_vectors
from waveguide.network.graph import StepKind
from waveguide.network.lines import Lines

Array = NDArray[np.float64]
Index = NDArray[np.int64]

FACING_REACH = 2.0
"""Facing coasts are joined up to this many deformation radii apart, where e⁻² = 14 % is left."""

DETOUR = 4.0
"""A crossing is kept only if the way along the coast is this many times longer."""


@dataclass(frozen=True)
class Crossings:
    """Directed crossings between coast nodes, one row each way.

    Attributes
    ----------
    tail, head, kind : ndarray of int, shape (k,)
    width, length, sill : ndarray, shape (k,)
        m; see :class:`waveguide.network.graph.Network`.
    way : list of (lon, lat)
        Places between the two nodes, degrees; without any for a facing coast or an opening.
        The second half of the rows are the first half in the other direction.
    """

    tail: Index
    head: Index
    kind: Index
    width: Array
    length: Array
    sill: Array
    way: list[tuple[Array, Array]]


@dataclass(frozen=True)
class _CoastNodes:
    """Coast nodes with what a search for crossings needs."""

    vectors: Array
    lat: Array
    line: Index
    along: Array
    ring_length: Array

    def distance(self, a: Index, b: Index) -> Array:
        """Distance between nodes (m)."""
        return arc(np.linalg.norm(self.vectors[a] - self.vectors[b], axis=-1))

    def along_from(self, a: Index, b: Index) -> Array:
        """Way round the coast from node a to nodes b of its ring, −½ to ½ of the ring (m)."""
        half = self.ring_length[a] / 2.0
        return np.asarray((self.along[b] - self.along[a] + half) % (2.0 * half) - half)

    def along_separation(self, a: Index, b: Index) -> Array:
        """Shorter way round the coast between nodes (m), infinite between different rings."""
        apart = np.abs(self.along_from(a, b))
        return np.where(self.line[a] == self.line[b], apart, np.inf)


def _coast_nodes(lines: Lines) -> _CoastNodes:
    """The coast part of the lines with distances along each ring."""
    n = int((~lines.equatorial).sum())
    vectors = unit_vectors(lines.lon[:n], lines.lat[:n])
    line = lines.line[:n]
    along, ring_length = np.zeros(n), np.zeros(n)
    for number in range(int(line.max()) + 1):
        members = np.nonzero(line == number)[0]
        ring = vectors[members]
        step = arc(np.linalg.norm(np.roll(ring, -1, axis=0) - ring, axis=1))
        along[members] = np.concatenate([[0.0], np.cumsum(step[:-1])])
        ring_length[members] = step.sum()
    return _CoastNodes(vectors, lines.lat[:n], line, along, ring_length)


def strait_crossings(
    lines: Lines, found: list[Strait], radius: Array, spacing: float
) -> Crossings:
    """Straits that lead somewhere the coast does not soon lead by itself.

    Only ways whose ends lie far apart along the coast or on different rings are kept (a wave
    does not notice a detour shorter than its own R), and of the many that a gap with many mouths
    offers, for each mouth the cheapest (narrow and long is dear) to each ring: from there the
    coast itself leads to the others.

    Parameters
    ----------
    lines : Lines
    found : list of Strait
    radius : ndarray, shape (n,)
        Deformation radius at every node (m).
    spacing : float
        Distance between nodes, and between the places along the way through (m). A mouth farther
        than twice this from any node borders no followed coast.

    Returns
    -------
    Crossings
        Each strait in both directions.
    """
    nodes = _coast_nodes(lines)
    ends = np.array([(s.lon[[0, -1]], s.lat[[0, -1]]) for s in found]).reshape(-1, 2, 2)
    distance, node = cKDTree(nodes.vectors).query(unit_vectors(ends[:, 0], ends[:, 1]))
    length = np.array([strait.length for strait in found])
    near = (arc(distance) <= 2.0 * spacing).all(axis=1)
    shortest = np.maximum(DETOUR * length, radius[node].min(axis=1))
    far_apart = nodes.along_separation(node[:, 0], node[:, 1]) > shortest
    rows = np.nonzero(near & far_apart & (node[:, 0] != node[:, 1]))[0]
    cost = np.array([found[row].inertia_length / found[row].width for row in rows])
    rows = rows[_cheapest_ways(node[rows], nodes.line[node[rows]], cost)]
    chosen, node = [found[row] for row in rows], node[rows]
    there = [_thinned(strait, spacing) for strait in chosen]
    return Crossings(
        tail=np.concatenate([node[:, 0], node[:, 1]]).astype(np.int64),
        head=np.concatenate([node[:, 1], node[:, 0]]).astype(np.int64),
        kind=np.full(2 * rows.size, int(StepKind.STRAIT)),
        width=np.tile([strait.width for strait in chosen], 2),
        length=np.tile([strait.inertia_length for strait in chosen], 2),
        sill=np.tile([strait.sill_depth for strait in chosen], 2),
        way=there + [(lon[::-1], lat[::-1]) for lon, lat in there],
    )


def _thinned(strait: Strait, spacing: float) -> tuple[Array, Array]:
    """Places along the middle of a strait about `spacing` (m) apart, its ends left out."""
    count = max(round(strait.length / spacing), 2)
    at = np.linspace(0, strait.lon.size - 1, count + 1).round().astype(int)[1:-1]
    at = np.unique(at[(at > 0) & (at < strait.lon.size - 1)])
    return strait.lon[at], strait.lat[at]


def _cheapest_ways(pairs: Index, rings: Index, cost: Array) -> Index:
    """Rows of pairs of nodes that are the cheapest from one of the two to the other's ring."""
    order = np.argsort(cost, kind="stable")
    kept = np.zeros(len(pairs), dtype=bool)
    for here, there in ((0, 1), (1, 0)):
        ways = np.stack([pairs[order, here], rings[order, there]], axis=1)
        _, first = np.unique(ways, axis=0, return_index=True)
        kept[order[first]] = True
    return np.nonzero(kept)[0]


def facing_crossings(
    lines: Lines, coast: EffectiveCoast, radius: Array, nearest_equator: float
) -> Crossings:
    """Facing coasts and wide openings within reach of a trapped wave.

    Candidates are pairs of nodes closer than `FACING_REACH` deformation radii, far apart along
    the coast, with open water between. Of each run of such pairs only the closest approach is
    kept. Where the coast leads from one end to the other by itself the crossing is the mouth of
    a wide opening; everywhere else the far shore is a facing coast.

    Parameters
    ----------
    lines : Lines
    coast : EffectiveCoast
    radius : ndarray, shape (n,)
        Deformation radius at every node (m).
    nearest_equator : float
        Closer to the equator than this the trapping is equatorial, not coastal (degrees).

    Returns
    -------
    Crossings
    """
    nodes = _coast_nodes(lines)
    a, b = _candidate_pairs(nodes, radius[: nodes.lat.size], nearest_equator)
    clear = _open_water(coast, nodes.vectors[a], nodes.vectors[b])
    a, b = a[clear], b[clear]
    distance = nodes.distance(a, b)
    near = _closest_approaches(nodes, a, b, distance)
    extent = np.tile(_facing_extent(nodes, a, b, near), 2)
    tail, head = np.concatenate([a[near], b[near]]), np.concatenate([b[near], a[near]])
    opening = _leads_on(nodes, tail, head)
    return Crossings(
        tail=tail,
        head=head,
        kind=np.where(opening, int(StepKind.OPENING), int(StepKind.FACING_COAST)),
        width=np.tile(distance[near], 2),
        length=np.where(opening, 0.0, extent),
        sill=np.full(tail.size, np.inf),
        way=[(np.zeros(0), np.zeros(0))] * tail.size,
    )


def _facing_extent(nodes: _CoastNodes, a: Index, b: Index, near: Index) -> Array:
    """Length over which two coasts face each other about each approach (m).

    Every pair within reach is counted to the nearest approach between the same two rings; of
    the two stretches the shorter is taken.
    """
    apart = np.stack([
        nodes.along_separation(a, a[i]) + nodes.along_separation(b, b[i]) for i in near
    ]) if near.size else np.zeros((0, a.size))
    nearest = np.argmin(apart, axis=0) if near.size else np.zeros(0, dtype=np.int64)
    extent = np.zeros(near.size)
    for row, i in enumerate(near):
        own = (nearest == row) & np.isfinite(apart[row])
        extent[row] = min(
            np.ptp(nodes.along_from(side[i], side[own])) for side in (a, b)
        )
    return extent


def _candidate_pairs(
    nodes: _CoastNodes, radius: Array, nearest_equator: float
) -> tuple[Index, Index]:
    """Pairs (a < b) within reach of each other and far apart along the coast."""
    tree = cKDTree(nodes.vectors)
    reach = chord(FACING_REACH * radius)
    hits = tree.query_ball_point(nodes.vectors, reach, return_sorted=True)
    counts = np.array([len(hit) for hit in hits])
    a = np.repeat(np.arange(counts.size), counts)
    b = np.fromiter((j for hit in hits for j in hit), dtype=np.int64, count=int(counts.sum()))
    distance = nodes.distance(a, b)
    close = distance <= FACING_REACH * np.minimum(radius[a], radius[b])
    away = np.minimum(np.abs(nodes.lat[a]), np.abs(nodes.lat[b])) > nearest_equator
    far = nodes.along_separation(a, b) > DETOUR * distance
    keep = (a < b) & close & away & far & (nodes.lat[a] * nodes.lat[b] > 0.0)
    return a[keep], b[keep]


def _closest_approaches(nodes: _CoastNodes, a: Index, b: Index, distance: Array) -> Index:
    """Rows of pairs nearer than every other pair within two widths along either coast."""
    kept: list[int] = []
    for i in np.argsort(distance, kind="stable"):
        k = np.array(kept, dtype=np.int64)
        beside = [
            (nodes.along_separation(a[k], here) < 2.0 * distance[i])
            & (nodes.along_separation(b[k], there) < 2.0 * distance[i])
            for here, there in ((a[i], b[i]), (b[i], a[i]))
        ]
        if not np.any(beside):
            kept.append(int(i))
    return np.sort(np.array(kept, dtype=np.int64))


def _open_water(coast: EffectiveCoast, a: Array, b: Array) -> NDArray[np.bool_]:
    """Whether the straight way between positions stays in the effective ocean.

    The ends, which lie on the shore, are left out.
    """
    longest = float(arc(np.linalg.norm(a - b, axis=1)).max(initial=0.0))
    count = max(round(longest / (3.0 * coast.grid.spacing)), 8)
    shares = np.linspace(0.15, 0.85, count)[:, None, None]
    lon, lat = positions((1.0 - shares) * a + shares * b)
    return np.asarray(is_water(coast, lon, lat).all(axis=0))


def _leads_on(nodes: _CoastNodes, tail: Index, head: Index) -> NDArray[np.bool_]:
    """Whether a signal that follows the coast from `tail` soon comes by `head`.

    Soon: before the equator, and before it is half-way round the ring.
    """
    found = np.zeros(tail.size, dtype=bool)
    for row, (here, there) in enumerate(zip(tail, head, strict=True)):
        if nodes.line[here] != nodes.line[there]:
            continue
        turn = nodes.ring_length[here]
        ring = nodes.line == nodes.line[here]
        junctions = np.nonzero(ring & (nodes.lat == 0.0))[0]
        # Rings are stored in the order of travel of the northern hemisphere.
        sign = 1.0 if nodes.lat[here] > 0.0 else -1.0
        onward = (sign * (nodes.along[there] - nodes.along[here])) % turn
        to_equator = (sign * (nodes.along[junctions] - nodes.along[here])) % turn
        found[row] = onward < min(turn / 2.0, to_equator.min(initial=np.inf))
    return found
