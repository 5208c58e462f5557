"""Where a signal can leave one coast for another: straits, facing coasts and wide openings."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import minimum_spanning_tree
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

    def along_separation(self, a: Index, b: Index) -> Array:
        """Shorter way round the coast between nodes (m), infinite between different rings."""
        apart = np.abs(self.along[a] - self.along[b])
        apart = np.minimum(apart, self.ring_length[a] - apart)
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
    lines: Lines, found: list[Strait], reach: float, spacing: float
) -> Crossings:
    """Straits that lead somewhere the coast does not soon lead by itself.

    Of the many pairs of mouths of one gap only the cheapest tree is kept (narrow and long is
    dear), and of that only pairs whose ends lie far apart along the coast or on different rings.

    Parameters
    ----------
    lines : Lines
    found : list of Strait
    reach : float
        A mouth farther than this from any node borders no followed coast (m).
    spacing : float
        Distance between the places along the way through (m).

    Returns
    -------
    Crossings
        Each strait in both directions.
    """
    nodes = _coast_nodes(lines)
    tree = cKDTree(nodes.vectors)
    ends = np.array([(s.lon[[0, -1]], s.lat[[0, -1]]) for s in found]).reshape(-1, 2, 2)
    distance, node = tree.query(unit_vectors(ends[:, 0], ends[:, 1]))
    size = np.array(
        [(s.width, s.length, s.sill_depth, s.inertia_length) for s in found]
    ).reshape(-1, 4)
    near = (arc(distance) <= reach).all(axis=1)
    far_apart = nodes.along_separation(node[:, 0], node[:, 1]) > DETOUR * size[:, 1]
    keep = near & far_apart & (node[:, 0] != node[:, 1])
    rows, node, size = np.nonzero(keep)[0], node[keep], size[keep]
    chosen = _cheapest_tree(node, size[:, 3] / size[:, 0], nodes.vectors.shape[0])
    rows, node, size = rows[chosen], node[chosen], size[chosen]
    there = [_thinned(found[row], spacing) for row in rows]
    return Crossings(
        tail=np.concatenate([node[:, 0], node[:, 1]]).astype(np.int64),
        head=np.concatenate([node[:, 1], node[:, 0]]).astype(np.int64),
        kind=np.full(2 * len(node), int(StepKind.STRAIT)),
        width=np.tile(size[:, 0], 2),
        length=np.tile(size[:, 3], 2),
        sill=np.tile(size[:, 2], 2),
        way=there + [(lon[::-1], lat[::-1]) for lon, lat in there],
    )


def _thinned(strait: Strait, spacing: float) -> tuple[Array, Array]:
    """Places along the middle of a strait about `spacing` (m) apart, its ends left out."""
    count = max(round(strait.length / spacing), 2)
    at = np.linspace(0, strait.lon.size - 1, count + 1).round().astype(int)[1:-1]
    at = np.unique(at[(at > 0) & (at < strait.lon.size - 1)])
    return strait.lon[at], strait.lat[at]


def _cheapest_tree(pairs: Index, cost: Array, n: int) -> Index:
    """Rows of the pairs that form a minimum spanning forest."""
    if not len(pairs):
        return np.zeros(0, dtype=np.int64)
    order = np.argsort(cost, kind="stable")
    low, high = pairs.min(axis=1)[order], pairs.max(axis=1)[order]
    _, first = np.unique(low * n + high, return_index=True)
    unique = order[first]
    rank = np.empty(len(pairs))
    rank[order] = np.arange(1, len(pairs) + 1)
    graph = coo_matrix((rank[unique], (pairs[unique, 0], pairs[unique, 1])), shape=(n, n))
    forest = minimum_spanning_tree(graph.tocsr())
    return np.sort(order[forest.data.astype(np.int64) - 1])


def facing_crossings(
    lines: Lines, coast: EffectiveCoast, radius: Array, nearest_equator: float
) -> Crossings:
    """Facing coasts and wide openings within reach of a trapped wave.

    Candidates are pairs of nodes closer than `FACING_REACH` deformation radii, far apart along
    the coast, with open water between. Of each run of such pairs only the closest approach is
    kept. Where the crossing runs along the direction of travel it is the mouth of a wide opening;
    where it runs across it, the far shore is a facing coast.

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
    n = nodes.lat.size
    a, b = _candidate_pairs(nodes, radius[:n], nearest_equator)
    distance = arc(np.linalg.norm(nodes.vectors[a] - nodes.vectors[b], axis=1))
    near = _closest_approaches(nodes, a, b, distance)
    near = near[_open_water(coast, nodes.vectors[a[near]], nodes.vectors[b[near]])]
    extent = np.tile(_facing_extent(nodes, a, b, near), 2)
    tail, head = np.concatenate([a[near], b[near]]), np.concatenate([b[near], a[near]])
    kind = _opening_or_facing(lines, nodes, tail, head)
    return Crossings(
        tail=tail,
        head=head,
        kind=kind,
        width=np.tile(distance[near], 2),
        length=np.where(kind == int(StepKind.FACING_COAST), extent, 0.0),
        sill=np.full(tail.size, np.inf),
        way=[(np.zeros(0), np.zeros(0))] * tail.size,
    )


def _facing_extent(nodes: _CoastNodes, a: Index, b: Index, near: Index) -> Array:
    """Length over which two coasts face each other within reach about each approach (m)."""
    extent = np.zeros(near.size)
    for row, i in enumerate(near):
        same = (nodes.line[a] == nodes.line[a[i]]) & (nodes.line[b] == nodes.line[b[i]])
        off = nodes.along[a[same]] - nodes.along[a[i]]
        turn = nodes.ring_length[a[i]]
        off = np.unique((off + turn / 2.0) % turn - turn / 2.0)
        # the run of neighbouring nodes about the approach
        gaps = np.diff(off) > 3.0 * np.median(np.diff(off), axis=0) if off.size > 2 else []
        run = np.split(off, np.nonzero(gaps)[0] + 1)
        extent[row] = next(float(np.ptp(part)) for part in run if (part == 0.0).any())
    return extent


def _candidate_pairs(
    nodes: _CoastNodes, radius: Array, nearest_equator: float
) -> tuple[Index, Index]:
    """Pairs (a < b) within reach of each other and far apart along the coast."""
    tree = cKDTree(nodes.vectors)
    reach = chord(FACING_REACH * radius)
    hits = tree.query_ball_point(nodes.vectors, reach, workers=-1, return_sorted=True)
    counts = np.array([len(hit) for hit in hits])
    a = np.repeat(np.arange(counts.size), counts)
    b = np.fromiter((j for hit in hits for j in hit), dtype=np.int64, count=int(counts.sum()))
    distance = arc(np.linalg.norm(nodes.vectors[a] - nodes.vectors[b], axis=1))
    away = np.minimum(np.abs(nodes.lat[a]), np.abs(nodes.lat[b])) > nearest_equator
    far = nodes.along_separation(a, b) > DETOUR * distance
    keep = (a < b) & away & far & (nodes.lat[a] * nodes.lat[b] > 0.0)
    return a[keep], b[keep]


def _closest_approaches(
    nodes: _CoastNodes, a: Index, b: Index, distance: Array
) -> Index:
    """Rows of the pairs nearer than every other pair within two crossing widths along either coast."""
    order = np.argsort(distance, kind="stable")
    kept: list[int] = []
    for i in order:
        if kept:
            k = np.array(kept)
            near_a = nodes.along_separation(a[k], np.full(k.size, a[i]))
            near_b = nodes.along_separation(b[k], np.full(k.size, b[i]))
            if ((near_a < 2 * distance[i]) & (near_b < 2 * distance[i])).any():
                continue
        kept.append(int(i))
    return np.sort(np.array(kept, dtype=np.int64))


def _open_water(coast: EffectiveCoast, a: Array, b: Array) -> NDArray[np.bool_]:
    """Whether the straight way between positions stays in the effective ocean."""
    shares = np.linspace(0.15, 0.85, 8)[:, None, None]
    lon, lat = positions((1.0 - shares) * a + shares * b)
    return np.asarray(is_water(coast, lon, lat).all(axis=0))


def _opening_or_facing(lines: Lines, nodes: _CoastNodes, tail: Index, head: Index) -> Index:
    """Kind of crossing from the angle between it and the direction of travel."""
    onward = np.zeros(nodes.lat.size, dtype=np.int64)
    coast = ~lines.equatorial[lines.tail] & ~lines.equatorial[lines.head]
    onward[lines.tail[coast]] = lines.head[coast]
    travel = nodes.vectors[onward[tail]] - nodes.vectors[tail]
    across = nodes.vectors[head] - nodes.vectors[tail]
    cosine = (travel * across).sum(1) / (
        np.linalg.norm(travel, axis=1) * np.linalg.norm(across, axis=1)
    )
    return np.where(cosine > 0.5, int(StepKind.OPENING), int(StepKind.FACING_COAST))
