"""The section and its modes at a position that a person names."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.section import Sections, cross_shelf_sections
from waveguide.coast.section_extent import LANDWARD_REACH
from waveguide.coast.section_modes import Column, SectionModes, check_latitude, section_modes
from waveguide.constants import deformation_radius
from waveguide.errors import InputError
from waveguide.geodesy import geodesic_length, positions, unit_vectors
from waveguide.network.atlas import Atlas
from waveguide.network.graph import Network
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.ocean.stratification import Climatology

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Snap:
    """The place on the guide's coast closest to a position.

    Attributes
    ----------
    lon, lat, azimuth : float
        Place and seaward normal there (degrees).
    radius : float
        First-mode deformation radius over the adjoining deep water (m).
    distance : float
        From the position (m).
    """

    lon: float
    lat: float
    azimuth: float
    radius: float
    distance: float


def snap_to_coast(network: Network, flat: Atlas, lon: float, lat: float) -> Snap:
    """Find the closest place on a coast of the guide, between nodes too.

    Parameters
    ----------
    network : Network
    flat : Atlas
        Its mode 1 gives the deformation radius.
    lon, lat : float
        Degrees.

    Returns
    -------
    Snap

    Raises
    ------
    InputError
        If the guide is farther away than the widest shelf.
    """
    coast = np.flatnonzero(np.isfinite(network.offshore))
    here = unit_vectors(network.lon[coast], network.lat[coast])
    place = unit_vectors(lon, lat)
    nearest = int(np.argmax(here @ place))
    following = _neighbours(network.line[coast], nearest)
    foot, share, other = here[nearest], 0.0, nearest
    for neighbour in following:
        span = here[neighbour] - here[nearest]
        part = float(np.clip((place - here[nearest]) @ span / (span @ span), 0.0, 0.5))
        if part > share:
            foot, share, other = here[nearest] + part * span, part, neighbour
    node = coast[nearest]
    x, y = (float(value) for value in positions(foot))
    turn = (network.offshore[coast[other]] - network.offshore[node] + 180.0) % 360.0 - 180.0
    distance = float(geodesic_length(lon, lat, x, y))
    if distance > LANDWARD_REACH:
        raise InputError(
            f"position {lon:g} {lat:g}: the nearest coast of the guide is {distance / 1e3:.0f} km "
            f"away, more than {LANDWARD_REACH / 1e3:.0f}; positions are longitude, then latitude, "
            "in degrees, near a coast"
        )
    speed = flat.phase_speed[flat.row(1)]
    c = speed[node] if np.isfinite(speed[node]) else np.nanmedian(speed)
    return Snap(
        x, y, float((network.offshore[node] + share * turn) % 360.0),
        float(deformation_radius(c, y)), distance,
    )


def _neighbours(line: NDArray[np.int64], node: int) -> tuple[int, int]:
    """The nodes before and after one on its closed line."""
    ring = np.flatnonzero(line == line[node])
    at = int(np.searchsorted(ring, node))
    return int(ring[at - 1]), int(ring[(at + 1) % ring.size])


def climatological_column(climatology: Climatology, lon: float, lat: float) -> Column:
    """The stratification of the climatology at a position.

    Parameters
    ----------
    climatology : Climatology
    lon, lat : float
        Degrees.

    Returns
    -------
    Column

    Raises
    ------
    InputError
        If the climatology has no data near by.
    """
    found = climatology.profiles(lon, lat)
    if not np.isfinite(found.n2).all():
        raise InputError(
            f"position {lon:.2f} {lat:.2f}: the climatology ({climatology.source}) has no "
            "stratification near it; give a profile with --stratification"
        )
    return Column(
        found.depth, found.n2[0], float(found.depth_reached[0]), climatology.source,
        (f"stratification from {found.distance[0] / 1e3:.0f} km away",),
    )


def check_reach(column: Column, section: Sections, lowest_share: float = 0.5) -> None:
    """Refuse a stratification that is far too shallow for a section.

    Parameters
    ----------
    column : Column
    section : Sections
        One row.
    lowest_share : float
        Share of the section's depth that the data must reach.

    Raises
    ------
    InputError
    """
    deepest = float(np.nanmax(section.depth[0], initial=0.0))
    if column.reached < lowest_share * deepest:
        raise InputError(
            f"{column.source}: the stratification reaches {column.reached:.0f} m where the "
            f"section is {deepest:.0f} m deep; give one that goes down to at least "
            f"{lowest_share * deepest:.0f} m, or repeat its last value at the bottom to hold it"
        )


def coast_section(
    snap: Snap,
    depths: Bathymetry,
    column: Column,
    count: int = 3,
    period: float = float("nan"),
) -> SectionModes:
    """The section through a place on the guide's coast and its modes.

    Parameters
    ----------
    snap : Snap
    depths : Bathymetry
    column : Column
    count : int
        Highest mode number.
    period : float
        Period of phase and group speed at finite frequency (s); none if NaN.

    Returns
    -------
    SectionModes

    Raises
    ------
    InputError
        At the equator, without water, or if the stratification is too shallow.
    """
    check_latitude(snap.lat)
    section = cross_shelf_sections(snap.lon, snap.lat, snap.azimuth, snap.radius, depths)
    check_reach(column, section)
    return section_modes(section, column, snap.lat, count, period)
