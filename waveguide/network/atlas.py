"""The mode atlas: what every node of a network knows about its modes.

The modes made here are those of a flat bottom over the deep water that adjoins the node; those of
cross-shelf sections go into the same table (:mod:`waveguide.network.trapped_atlas`). The deep water
is the deepest within two deformation radii, since that is what the trapped wave feels; a barotropic
wave feels the whole ocean within its R, so its depth is the mean over the offshore distance x with
the weight e^(−2x/R) of its energy.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import BETA_EQUATOR, EARTH_RADIUS, deformation_radius
from waveguide.geodesy import destination
from waveguide.modes.vertical import (
    barotropic_speed,
    end_values,
    phase_speeds,
    sill_share,
    vertical_modes,
)
from waveguide.network.graph import Network, StepKind
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.ocean.stratification import Climatology

Array = NDArray[np.float64]
Index = NDArray[np.int64]

BAROCLINIC_MODES = (1, 2, 3)
SHALLOWEST_DEEP_WATER = 200.0
"""Nodes whose adjoining water is nowhere deeper than this carry no baroclinic mode (m)."""


@dataclass(frozen=True)
class Atlas:
    """Modes at the nodes of a network.

    Attributes
    ----------
    mode : ndarray of int, shape (k,)
    depth : ndarray, shape (n,)
        Depth of the adjoining deep water (m), NaN where there is none.
    phase_speed : ndarray, shape (k, n)
        Long-wave phase speed (m/s), NaN where the mode does not exist.
    coastal_value : ndarray, shape (k, n)
        Modal pressure at the coast F(0,0) with ∫ F² dz = 1 over the coastal wall (m^-1/2).
    gap_share : ndarray, shape (k, ngap)
        Share of the mode that clears the sill of each gap, 0 to 1.
    decay_per_drag : ndarray, shape (k, n)
        Bottom friction: decay per metre and unit linear drag r (s/m²). Over a flat bottom it is
        F(−H)²/(2c): see `waveguide.propagation.step_response.flat_bottom_friction`.
    dispersion, barotropic_tail : ndarray, shape (k, n)
        d (s²) and b of :func:`waveguide.modes.modeset.low_frequency_wavenumber`, 0 over a flat
        bottom.
    """

    mode: Index
    depth: Array
    phase_speed: Array
    coastal_value: Array
    gap_share: Array
    decay_per_drag: Array
    dispersion: Array
    barotropic_tail: Array

    def row(self, mode: int) -> int:
        """Row of a mode, −1 if the atlas does not hold it."""
        found = np.nonzero(self.mode == mode)[0]
        return int(found[0]) if found.size else -1


@dataclass(frozen=True)
class TrappedAtlas(Atlas):
    """Modes of sections at the nodes of the baroclinic network.

    Attributes
    ----------
    error : ndarray, shape (k, n)
        Relative error of the phase speed, NaN for flat-bottom modes.
    trapping_scale : ndarray, shape (k, n)
        Offshore scale (m), no more than the equatorial radius.
    rank : ndarray of int, shape (k, n)
        Rank by speed that the mode has on the node's own section (0 barotropic).
    overlap : ndarray, shape (3, 3, m)
        Along each step of a coast, the overlap of modes 1 to 3 of its tail (first axis) with
        those of its head; NaN elsewhere. The product of many single overlaps along a route
        overstates scattering: what one step scatters the next may gather. A wave longer than the
        steps is passed on by the product of these matrices.
    flags : ndarray of int, shape (n,)
        Bits of :class:`waveguide.coast.section_quality.QualityFlag`.
    """

    error: Array
    trapping_scale: Array
    rank: Index
    overlap: Array
    flags: Index

    def of_modes(self, first: int) -> TrappedAtlas:
        """The same without the modes below `first`."""
        rows = np.flatnonzero(self.mode >= first)
        names = ("mode", "phase_speed", "coastal_value", "gap_share", "error", "decay_per_drag",
                 "dispersion", "barotropic_tail", "trapping_scale", "rank")
        return replace(self, **{name: getattr(self, name)[rows] for name in names})


def _offshore_depths(network: Network, depths: Bathymetry, nodes: Index, distance: Array) -> Array:
    """Depths along the seaward normals, NaN from the first far shore on.

    Parameters
    ----------
    network : Network
    depths : Bathymetry
    nodes : ndarray of int, shape (n,)
        Coast nodes.
    distance : ndarray, shape (k,)
        Offshore distances (m).

    Returns
    -------
    ndarray, shape (n, k)
    """
    lon, lat = destination(
        network.lon[nodes, None], network.lat[nodes, None], network.offshore[nodes, None],
        distance[None, :],
    )
    depth = depths.sample(lon, lat)
    wet = np.maximum.accumulate(depth > SHALLOWEST_DEEP_WATER, axis=1)
    dry_again = wet & ~(depth > 0.0) & np.isfinite(depth)
    return np.where(np.maximum.accumulate(dry_again, axis=1), np.nan, depth)


def adjoining_depth(network: Network, depths: Bathymetry, radius: Array) -> Array:
    """Depth of the deep water next to each node, for baroclinic modes.

    Parameters
    ----------
    network : Network
    depths : Bathymetry
    radius : ndarray, shape (n,)
        Deformation radius (m).

    Returns
    -------
    ndarray, shape (n,)
        Greatest depth within 2 R (at least 60 km) seaward of a coast node and within 1° of a node
        on the equator (m); NaN where none is known.
    """
    result = np.full(network.size, np.nan)
    coast = np.nonzero(np.isfinite(network.offshore))[0]
    fractions = np.linspace(0.0, 1.0, 25)[1:]
    reach = np.maximum(2.0 * radius[coast], 60e3)
    lon, lat = destination(
        network.lon[coast, None], network.lat[coast, None], network.offshore[coast, None],
        reach[:, None] * fractions[None, :],
    )
    result[coast] = _greatest(depths.sample(lon, lat))
    equator = np.nonzero(network.equatorial)[0]
    lat = np.linspace(-1.0, 1.0, 21)
    result[equator] = _mean(depths.sample(network.lon[equator, None], lat[None, :]),
                            np.ones(lat.size))
    return np.where(result > SHALLOWEST_DEEP_WATER, result, np.nan)


def _greatest(values: Array) -> Array:
    """Largest known value along the last axis, NaN where nothing is known."""
    largest = np.max(np.where(np.isfinite(values), values, -np.inf), axis=-1)
    return np.where(np.isfinite(largest), largest, np.nan)


def _mean(values: Array, weight: Array) -> Array:
    """Weighted mean over the water along the last axis, NaN where there is none."""
    wet = np.where(np.nan_to_num(values, nan=-1.0) > 0.0, weight, 0.0)
    total = wet.sum(axis=-1)
    summed = (wet * np.nan_to_num(values)).sum(axis=-1)
    return np.where(total > 0.0, summed / np.where(total > 0.0, total, 1.0), np.nan)


def barotropic_depth(network: Network, depths: Bathymetry) -> Array:
    """Depth that a barotropic wave feels at each node.

    Parameters
    ----------
    network : Network
    depths : Bathymetry

    Returns
    -------
    ndarray, shape (n,)
        Mean depth weighted by the wave's energy, e^(−2x/R) off a coast out to 2000 km and
        e^(−y²/L_e²) about the equator (m).
    """
    result = np.full(network.size, np.nan)
    speed = 200.0  # √(gh) over 4000 m; sets the width of the weight only
    coast = np.nonzero(np.isfinite(network.offshore))[0]
    distance = np.linspace(0.0, 2000e3, 81)[1:]
    radius = deformation_radius(speed, network.lat[coast])
    weight = np.exp(-2.0 * distance[None, :] / radius[:, None])
    result[coast] = _mean(_offshore_depths(network, depths, coast, distance), weight)
    equator = np.nonzero(network.equatorial)[0]
    lat = np.linspace(-25.0, 25.0, 101)
    y = np.radians(lat) * EARTH_RADIUS
    result[equator] = _mean(
        depths.sample(network.lon[equator, None], lat[None, :]),
        np.exp(-(y**2) * BETA_EQUATOR / speed),
    )
    return result


def barotropic_atlas(network: Network, depths: Bathymetry) -> Atlas:
    """Barotropic phase speeds √(gh) and coastal values h^(−1/2) at every node.

    Parameters
    ----------
    network : Network
        Of the barotropic family.
    depths : Bathymetry

    Returns
    -------
    Atlas
        One mode, number 0.
    """
    depth = _through_straits(network, barotropic_depth(network, depths))
    speed = barotropic_speed(np.nan_to_num(depth))
    known = np.isfinite(depth) & (depth > 0.0)
    return Atlas(
        mode=np.array([0]),
        depth=depth,
        phase_speed=np.where(known, speed, np.nan)[None, :],
        coastal_value=np.where(known, 1.0 / np.sqrt(np.where(known, depth, 1.0)), np.nan)[None, :],
        # F is uniform with depth, so the share is that of the water above the sill
        gap_share=np.minimum(network.gap_sill / _at_gaps(network, depth), 1.0)[None, :],
        decay_per_drag=np.where(
            known, 0.5 / np.where(known, depth * speed, 1.0), np.nan
        )[None, :],
        dispersion=np.zeros((1, depth.size)),
        barotropic_tail=np.zeros((1, depth.size)),
    )


def flat_bottom_atlas(
    network: Network,
    depths: Bathymetry,
    climatology: Climatology,
    radius: Array,
    report: Callable[[int, int], None] = lambda done, total: None,
) -> Atlas:
    """Baroclinic modes 1 to 3 over the adjoining deep water at every node.

    Parameters
    ----------
    network : Network
        Of the baroclinic family.
    depths : Bathymetry
    climatology : Climatology
    radius : ndarray, shape (n,)
        First-mode deformation radius expected at the nodes (m); sets how far out "deep" is sought.
    report : callable, optional
        Told how many nodes of how many are done.

    Returns
    -------
    Atlas
    """
    depth = adjoining_depth(network, depths, radius)
    known = np.nonzero(np.isfinite(depth))[0]
    count = len(BAROCLINIC_MODES)
    speed = np.full((count, network.size), np.nan)
    value = np.full((count, network.size), np.nan)
    decay = np.full((count, network.size), np.nan)
    n2 = climatology.profiles(network.lon[known], network.lat[known]).n2
    for start in range(0, known.size, 1000):
        nodes, columns = known[start : start + 1000], n2[start : start + 1000]
        usable = np.isfinite(columns).all(axis=1)
        if usable.any():
            column = (columns[usable], climatology.depth, depth[nodes[usable]])
            c = phase_speeds(*column, count)
            speed[:, nodes[usable]] = c.T
            surface, floor = end_values(*column, c)
            value[:, nodes[usable]] = surface.T
            decay[:, nodes[usable]] = (floor**2 / (2.0 * c)).T
        report(min(start + 1000, known.size), known.size)
    share = _gap_shares(network, climatology, n2, depth, known)
    return Atlas(
        np.array(BAROCLINIC_MODES),
        _through_straits(network, depth),
        np.stack([_through_straits(network, row) for row in speed]),
        np.stack([_through_straits(network, row) for row in value]),
        share,
        np.stack([_through_straits(network, row) for row in decay]),
        np.zeros_like(speed),
        np.zeros_like(speed),
    )


def _through_straits(network: Network, values: Array) -> Array:
    """Values with those of nodes within straits set to the mean of the strait's two ends.

    The passage formula takes one speed for a strait, that of the coasts it joins.
    """
    result = values.copy()
    inside = np.nonzero(network.in_strait)[0]
    if not inside.size:
        return result
    strait = network.kind == StepKind.STRAIT
    within = network.in_strait
    total, count = (np.zeros(int(network.line.max()) + 1) for _ in range(2))
    for node, other in ((network.tail, network.head), (network.head, network.tail)):
        ends = strait & within[node] & ~within[other]
        np.add.at(total, network.line[node[ends]], values[other[ends]])
        np.add.at(count, network.line[node[ends]], 1.0)
    line = network.line[inside]
    result[inside] = total[line] / count[line]
    return result


def _at_gaps(network: Network, values: Array) -> Array:
    """Values of the nodes that the gaps open at, shape (ngap,)."""
    step = np.nonzero(network.gap >= 0)[0]
    result = np.full(network.gap_width.size, np.nan)
    result[network.gap[step]] = values[network.tail[step]]
    return result


def _gap_shares(
    network: Network, climatology: Climatology, n2: Array, depth: Array, known: Index
) -> Array:
    """Share of each mode above the sill of each gap, 1 where there is no sill."""
    count = len(BAROCLINIC_MODES)
    share = np.ones((count, network.gap_width.size))
    for step in np.nonzero((network.gap >= 0) & (network.kind == StepKind.STRAIT))[0]:
        node, gap = network.tail[step], network.gap[step]
        row = np.searchsorted(known, node)
        if row >= known.size or known[row] != node or not np.isfinite(n2[row]).all():
            continue
        modes = vertical_modes(n2[row], climatology.depth, float(depth[node]), count)
        share[:, gap] = sill_share(modes.depth, modes.structure[1:], network.gap_sill[gap])
    return share
