"""The wave-guide network: nodes along coasts and the equator, and directed steps between them.

A step is the short way from one node to the next (some 20 km along a coast); a leg, in results, is
a run of steps of one kind. Directions follow from the sign of f alone: land lies on the right of
travel in the northern hemisphere and on the left in the southern, and the equator is travelled
eastward. A western boundary therefore feeds the equator from both sides and an eastern boundary is
fed by it, without a rule for either.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from waveguide.geodesy import unit_vectors

Array = NDArray[np.float64]
Index = NDArray[np.int64]


class StepKind(IntEnum):
    """What a step of the network runs along."""

    COAST = 0
    EQUATOR = 1
    STRAIT = 2
    FACING_COAST = 3
    OPENING = 4

    @property
    def label(self) -> str:
        """The kind in words."""
        return self.name.lower().replace("_", " ")


GAP_KINDS = (StepKind.STRAIT, StepKind.FACING_COAST, StepKind.OPENING)


@dataclass(frozen=True)
class Network:
    """Nodes and directed steps of one family of modes.

    Attributes
    ----------
    lon, lat : ndarray, shape (n,)
        Nodes, degrees.
    line : ndarray of int, shape (n,)
        The coast ring, equatorial stretch or way through a strait a node belongs to; nodes of
        a line are consecutive and in the order of travel (of the northern hemisphere on a coast).
    equatorial : ndarray of bool, shape (n,)
        Whether the node lies on an equatorial stretch. Junctions belong to their coast.
    offshore : ndarray, shape (n,)
        Azimuth of the seaward normal, degrees clockwise from north; NaN on the equator and
        in straits.
    basin : ndarray of int, shape (n,)
        Connected body of water the node borders.
    tail, head : ndarray of int, shape (m,)
        Nodes a step leads from and to.
    kind : ndarray of int, shape (m,)
        `StepKind`.
    length : ndarray, shape (m,)
        WGS84 length (m).
    gap : ndarray of int, shape (m,)
        For the step that enters a gap the row in the gap table; otherwise −1.
    passes : ndarray of int, shape (m,)
        Row of the gap whose mouth a coast step passes, otherwise −1.
    gap_width, gap_length, gap_sill : ndarray, shape (k,)
        Width across; inertia length of a strait (`waveguide.coast.gaps.Strait`), length of the
        stretch that faces a facing coast, 0 for an opening; sill depth (infinite for facing
        coasts and openings). All in m.
    """

    lon: Array
    lat: Array
    line: Index
    equatorial: NDArray[np.bool_]
    offshore: Array
    basin: Index
    tail: Index
    head: Index
    kind: Index
    length: Array
    gap: Index
    passes: Index
    gap_width: Array
    gap_length: Array
    gap_sill: Array

    @property
    def size(self) -> int:
        """Number of nodes."""
        return int(self.lon.size)

    @cached_property
    def vectors(self) -> Array:
        """Nodes as unit vectors, shape (n, 3)."""
        return unit_vectors(self.lon, self.lat)

    @property
    def in_strait(self) -> NDArray[np.bool_]:
        """Whether a node lies within a strait, on no coast and no equator; shape (n,)."""
        return np.isnan(self.offshore) & ~self.equatorial

    @property
    def step_lat(self) -> Array:
        """Latitude half-way along each step (degrees), shape (m,)."""
        return 0.5 * (self.lat[self.tail] + self.lat[self.head])
