"""Cross-shelf sections of the bathymetry along the seaward normals of the guide.

Every section is kept twice: the raw depths along the ray, and the closest section that deepens
all the way offshore (:mod:`waveguide.coast.monotonic`), which is the one that modes are computed
on: it carries waves of one direction only. How far the two differ, and what else is odd about a
section, is recorded with it.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from functools import cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.coast.monotonic import LEAST_STEP, LEVELS, isobaths
from waveguide.coast.section_extent import LANDWARD_REACH, Extents, section_extents
from waveguide.coast.section_quality import (
    change,
    extent_flags,
    interpolated_rows,
    shelf_and_slope,
)
from waveguide.coast.shoreline import land_mask
from waveguide.constants import EARTH_RADIUS
from waveguide.geodesy import positions, unit_vectors, wrap_longitude
from waveguide.ocean.bathymetry import Bathymetry

Array = NDArray[np.float64]

LEAST_REACH, FARTHEST_REACH, REACH_RADII = 300e3, 1000e3, 4.0
"""Sections go four deformation radii seaward of the guide, but no less and no more than this (m).
At four radii a wave trapped within R has 2 % of its amplitude left; 300 km reaches deep water off
the widest slopes and borderlands."""

LEAST_DECAY = 50e3
"""Depths count in the monotonic fit by e^(−x/R), with R no less than the width of a slope (m)."""

ICE_LATITUDE = -60.0
"""South of this the ice shelves of Antarctica are land, whatever the depth below them."""

_CHUNK = 1000


@dataclass(frozen=True)
class Sections:
    """Cross-shelf sections.

    Attributes
    ----------
    lon, lat, azimuth : ndarray, shape (n,)
        Node of the guide and azimuth of the seaward normal, degrees.
    inshore : ndarray, shape (n,)
        Distance of the shore (or inner wall) landward of the node (m).
    wall : ndarray, shape (n,)
        Depth of the wall at the inner end (m), 0 at a shore.
    offshore, depth : ndarray, shape (n, k)
        The monotonic section: distance from the shore and depth (m), NaN where not used.
    raw_offshore, raw_depth : ndarray, shape (n, j)
        The depths along the ray, NaN outside the section.
    coverage : ndarray, shape (n,)
        Share of the intended section whose depth is known.
    rms_change, max_change : ndarray, shape (n,)
        Difference of the monotonic from the raw depth (m).
    rms_share, max_share : ndarray, shape (n,)
        The same in units of the greater of the two depths.
    shelf_width : ndarray, shape (n,)
        Distance of the 200 m isobath from the shore (m).
    slope : ndarray, shape (n,)
        Mean slope from there to 0.8 of the outer depth.
    facing : ndarray, shape (n,)
        Distance of a facing coast from the shore (m), NaN where none is met.
    flags : ndarray of int, shape (n,)
        Bits of `QualityFlag`.
    """

    lon: Array
    lat: Array
    azimuth: Array
    inshore: Array
    wall: Array
    offshore: Array
    depth: Array
    raw_offshore: Array
    raw_depth: Array
    coverage: Array
    rms_change: Array
    max_change: Array
    rms_share: Array
    max_share: Array
    shelf_width: Array
    slope: Array
    facing: Array
    flags: NDArray[np.int64]

    @property
    def size(self) -> int:
        """Number of sections."""
        return int(self.lon.size)

    def monotonic(self, row: int) -> tuple[Array, Array]:
        """Distances and depths (m) of one monotonic section, shape (m,) each."""
        known = np.isfinite(self.offshore[row])
        return self.offshore[row, known], self.depth[row, known]

    def raw(self, row: int) -> tuple[Array, Array]:
        """Distances and depths (m) of one raw section, shape (m,) each."""
        known = np.isfinite(self.raw_offshore[row])
        return self.raw_offshore[row, known], self.raw_depth[row, known]


def ray_offsets() -> Array:
    """Distances of the samples of a ray from its node (m): 2 km close to it, then growing.

    The node lies on the shelf edge, so shelf edge and slope have the finest spacing.
    """
    fine = np.arange(0.0, 60e3, 2e3)
    landward = np.geomspace(60e3, LANDWARD_REACH, 60)
    seaward = np.geomspace(60e3, FARTHEST_REACH, 76)
    return np.concatenate([-landward[::-1], -fine[:0:-1], fine, seaward])


def cross_shelf_sections(
    lon: ArrayLike,
    lat: ArrayLike,
    azimuth: ArrayLike,
    radius: ArrayLike,
    depths: Bathymetry,
) -> Sections:
    """Sections from the shore to deep water through nodes of the guide.

    Parameters
    ----------
    lon, lat : array_like, shape (n,)
        Nodes, degrees.
    azimuth : array_like, shape (n,)
        Azimuth of the seaward normal, degrees clockwise from north.
    radius : array_like, shape (n,)
        First-mode deformation radius (m); sets how far seaward the section goes.
    depths : Bathymetry

    Returns
    -------
    Sections
    """
    x, y, seaward, scale = np.broadcast_arrays(
        *(np.atleast_1d(np.asarray(v, float)) for v in (lon, lat, azimuth, radius))
    )
    parts = [
        _sections(x[k], y[k], seaward[k], scale[k], depths)
        for k in (slice(i, i + _CHUNK) for i in range(0, x.size, _CHUNK))
    ]
    return Sections(*(
        np.concatenate([getattr(part, field.name) for part in parts])
        for field in fields(Sections)
    ))


def _sections(
    lon: Array, lat: Array, azimuth: Array, radius: Array, depths: Bathymetry
) -> Sections:
    offset = ray_offsets()
    depth = _depth_along(lon, lat, azimuth, offset, depths)
    reach = np.clip(REACH_RADII * radius, LEAST_REACH, FARTHEST_REACH)
    extents = section_extents(offset, depth, radius, reach)
    column = np.arange(offset.size)
    inside = (column >= extents.start[:, None]) & (column < extents.end[:, None])
    decay = np.maximum(radius, LEAST_DECAY)[:, None]
    weight = inside * np.gradient(offset) * np.exp(-np.maximum(offset, 0.0) / decay)
    x, h = _monotonic(offset, depth, weight, extents)
    raw_x = np.where(inside, offset - extents.origin[:, None], np.nan)
    changed = change(depth, interpolated_rows(x, h, raw_x), weight)
    width, slope = shelf_and_slope(x, h)
    inner = np.where(extents.found, 0.0, np.nan)
    return Sections(
        lon=lon, lat=lat, azimuth=azimuth, inshore=-extents.origin, wall=extents.wall,
        offshore=x, depth=h,
        raw_offshore=np.column_stack([inner, raw_x]),
        raw_depth=np.column_stack([inner + extents.wall, np.where(inside, depth, np.nan)]),
        coverage=_coverage(offset, extents, reach),
        rms_change=changed.rms, max_change=changed.largest,
        rms_share=changed.rms_share, max_share=changed.largest_share,
        shelf_width=width, slope=slope, facing=extents.facing - extents.origin,
        flags=changed.flags | extent_flags(extents),
    )


def _depth_along(
    lon: Array, lat: Array, azimuth: Array, offset: Array, depths: Bathymetry
) -> Array:
    """Depths (m) along great circles on the mean earth, shape (n, k); ice shelves count as land."""
    here = unit_vectors(lon, lat)
    lam, angle = np.radians(lon), np.radians(azimuth)
    east = np.stack([-np.sin(lam), np.cos(lam), np.zeros_like(lam)], axis=1)
    seaward = np.sin(angle)[:, None] * east + np.cos(angle)[:, None] * np.cross(here, east)
    turn = (offset / EARTH_RADIUS)[None, :, None]
    x, y = positions(np.cos(turn) * here[:, None] + np.sin(turn) * seaward[:, None])
    depth = depths.sample(x, y)
    polar = y < ICE_LATITUDE
    if polar.any():
        depth[polar] = np.where(_ice_or_land(x[polar], y[polar]), -1.0, depth[polar])
    return depth


def _ice_or_land(lon: Array, lat: Array) -> NDArray[np.bool_]:
    """Whether positions south of `ICE_LATITUDE` (degrees) are within the shoreline, to 0.1°."""
    mask = _southern_land()
    column = np.rint((wrap_longitude(lon) + 180.0) * 10.0).astype(int) % mask.shape[1]
    row = np.clip(np.rint((lat + 90.0) * 10.0).astype(int), 0, mask.shape[0] - 1)
    return np.asarray(mask[row, column])


@cache
def _southern_land() -> NDArray[np.bool_]:
    """Land and ice at 0.1° from the pole to `ICE_LATITUDE`."""
    rows = round((ICE_LATITUDE + 90.0) * 10.0) + 1
    return land_mask(np.arange(3600) / 10.0 - 180.0, np.arange(rows) / 10.0 - 90.0)


def _monotonic(
    offset: Array, depth: Array, weight: Array, extents: Extents
) -> tuple[Array, Array]:
    """Points of the monotonic sections: the inner end, the isobaths, the outer end."""
    distance, level = isobaths(offset, depth, weight)
    row = np.arange(distance.shape[0])
    inshore = np.isneginf(distance).sum(axis=1)
    beyond = np.isposinf(distance).sum(axis=1)
    first, last = np.maximum(inshore - 1, 0), np.maximum(LEVELS - 1 - beyond, 0)
    foot = np.where(inshore > 0, level[row, first], 0.0)  # what depth begins with
    at_shore = extents.wall == 0.0
    distance[row, first] = np.where(
        at_shore & (inshore > 0), _first_isobath(offset, depth, extents, foot), distance[row, first]
    )
    distance[~np.isfinite(distance)] = np.nan
    wall = np.where(at_shore, 0.0, np.where(inshore > 0, foot, extents.wall))
    reached = np.fmax(np.where(beyond < LEVELS, distance[row, last], np.nan), extents.origin)
    outer = _outer_depth(offset, depth, weight, reached)
    outer = np.clip(outer, level[row, last], level[row, np.minimum(last + 1, LEVELS - 1)])
    end = np.maximum(offset[extents.end - 1], reached + 1e3)
    x = np.column_stack([extents.origin, distance, end]) - extents.origin[:, None]
    x[:, 1:] = np.maximum(x[:, 1:], LEAST_STEP * np.arange(1, LEVELS + 2))
    h = np.column_stack([wall, level, outer])
    unused = np.isnan(x) | ~extents.found[:, None]
    return np.where(unused, np.nan, x), np.where(unused, np.nan, h)


def _first_isobath(offset: Array, depth: Array, extents: Extents, isobath: Array) -> Array:
    """Where an isobath inshore of the first sample lies: the bottom falls evenly from the shore."""
    sample = depth[np.arange(isobath.size), extents.start]
    share = np.minimum(isobath / np.maximum(sample, 1e-9), 1.0)
    result: Array = extents.origin + share * (offset[extents.start] - extents.origin)
    return result


def _outer_depth(offset: Array, depth: Array, weight: Array, beyond: Array) -> Array:
    """Mean depth (m) seaward of a distance on each ray, 0 where the section ends there."""
    flat = weight * (offset > beyond[:, None])
    total = flat.sum(axis=1)
    result: Array = (flat * np.nan_to_num(depth)).sum(axis=1) / np.where(total > 0.0, total, 1.0)
    return result


def _coverage(offset: Array, extents: Extents, reach: Array) -> Array:
    """Share of the way from the inner end to where the section should end that is known."""
    known = offset[extents.end - 1] - extents.origin
    wanted = np.where(extents.cut_data, reach - extents.origin, known)
    result: Array = np.clip(known / np.maximum(wanted, 1.0), 0.0, 1.0)
    return np.where(extents.found, result, 0.0)
