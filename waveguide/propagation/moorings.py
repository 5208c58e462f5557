"""From a target that is a mooring to what its instruments see of a mode."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.section import Sections, cross_shelf_sections
from waveguide.coast.section_quality import QualityFlag
from waveguide.constants import coriolis, deformation_radius
from waveguide.errors import InputError
from waveguide.geodesy import wgs84
from waveguide.modes.modeset import ModeSet
from waveguide.modes.trapped import trapped_modes
from waveguide.modes.vertical import VerticalModes, vertical_modes
from waveguide.network.atlas import Atlas, TrappedAtlas
from waveguide.network.graph import Network, StepKind
from waveguide.network.trapped_atlas import BLENDED
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.ocean.stratification import Climatology
from waveguide.propagation.arrivals import Arrival
from waveguide.propagation.at_depth import (
    SECTION_LIMIT,
    AtDepth,
    Offshore,
    flat_bottom_at_depth,
    off_coast,
    off_equator,
    section_at_depth,
)
from waveguide.propagation.modes import ModeAtNodes

Array = NDArray[np.float64]
Index = NDArray[np.int64]

SECTION, FLAT_BOTTOM, EQUATOR = "section", "flat bottom", "equator"
NO_COLUMN = "no stratification known"
UNIFORM = "a uniform speed has none"

_NEIGHBOURHOOD = 2.0
"""The direction of the coast is that of the last two deformation radii of the way."""


@dataclass(frozen=True)
class Water:
    """What lies below a network.

    Attributes
    ----------
    depths : Bathymetry
    climatology : Climatology
    bottom : ndarray, shape (n,)
        Depth of the water beside the nodes (m).
    rank : ndarray of int, shape (n,)
        Rank by speed that the mode has on the sections of the nodes, 0 barotropic; −1 where the
        mode is one of a flat bottom.
    """

    depths: Bathymetry
    climatology: Climatology
    bottom: Array
    rank: Index


@dataclass(frozen=True)
class MooringAnswer:
    """A mode at a mooring.

    Attributes
    ----------
    structure : str
        "section", "flat bottom" or "equator", or why there is none.
    distance : float
        From the shore, or from the equator (m).
    towards : float
        Azimuth of travel, in which a positive current flows (degrees).
    view : AtDepth or None
    """

    structure: str
    distance: float
    towards: float
    view: AtDepth | None


def mooring_answer(
    network: Network, mode: ModeAtNodes, arrival: Arrival, omega: float, water: Water,
    distance: float | None, depths: Sequence[float],
) -> MooringAnswer:
    """What the instruments of a mooring see of a mode, by the route that brings it first.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    arrival : Arrival
        At the mooring.
    omega : float
        Dominant angular frequency (rad/s).
    water : Water
    distance : float or None
        From the shore or the equator (m); None for that of the position.
    depths : sequence of float
        Of the instruments (m).

    Returns
    -------
    MooringAnswer
    """
    if not arrival.routes:
        return no_structure(arrival.status)
    route = arrival.routes[0]
    node = int(arrival.target.node[route.end])
    away = float(arrival.target.distance[route.end])
    towards = _azimuth(network, route.steps)
    n2 = water.climatology.profiles(network.lon[node], network.lat[node]).n2[0]
    if not (np.isfinite(n2).all() and np.isfinite(water.bottom[node])):
        return no_structure(NO_COLUMN)
    if network.equatorial[node]:
        y = away if distance is None else distance
        column = _column(mode, node, n2, water)
        offshore = off_equator(y, column.speed)
        return MooringAnswer(EQUATOR, y, towards, column.view(depths, offshore, np.inf))
    section = _section(network, node, float(mode.speed[node]), water)
    shelf = float(np.nan_to_num(section.inshore[0]))
    outward = -away if arrival.target.inshore[route.end] else away
    x = max(shelf + outward, 0.0) if distance is None else distance
    radius = float(deformation_radius(mode.speed[node], network.lat[node]))
    gamma = _growth(network, route.steps, _NEIGHBOURHOOD * radius)
    if float(mode.speed[node]) * abs(gamma) <= SECTION_LIMIT * omega:
        rank, lat = int(water.rank[node]), float(network.lat[node])
        modes = _trapped(section, rank, n2, water, lat)
        if modes is not None and x <= modes.offshore[-1]:
            return MooringAnswer(SECTION, x, towards, section_at_depth(modes, rank, x, depths))
    column = _column(mode, node, n2, water)
    coriolis_here = column.speed / float(deformation_radius(column.speed, network.lat[node]))
    offshore = off_coast(max(x - shelf, 0.0), omega, gamma, column.speed, coriolis_here)
    view = column.view(depths, offshore, _depth_at(section, x))
    return MooringAnswer(FLAT_BOTTOM, x, towards, view)


def no_structure(why: str) -> MooringAnswer:
    """The answer where there is none."""
    return MooringAnswer(why, float("nan"), float("nan"), None)


def section_rank(network: Network, atlas: Atlas, number: int) -> Index:
    """Rank by speed that a mode has on the section of every node.

    Parameters
    ----------
    network : Network
    atlas : Atlas
        The one that the mode travels by.
    number : int
        Of the mode.

    Returns
    -------
    ndarray of int, shape (n,)
        −1 for the barotropic mode, and where the atlas has the modes of a flat bottom, all or
        blended in. An atlas that has them throughout does not say; there rank is the number.
    """
    if number == 0:
        return np.full(network.size, -1)
    if not isinstance(atlas, TrappedAtlas):
        return np.full(network.size, number)
    row = atlas.row(number)
    sections = np.isfinite(atlas.error[row]) & (np.abs(network.lat) >= BLENDED)
    return np.where(sections, atlas.rank[row], -1)


class _Column(NamedTuple):
    """A mode over the flat bottom of the water beside a node, and N at its levels."""

    modes: VerticalModes
    row: int
    frequency: Array

    @property
    def speed(self) -> float:
        return float(self.modes.phase_speed[self.row])

    def view(self, depths: Sequence[float], offshore: Offshore, bottom: float) -> AtDepth:
        return flat_bottom_at_depth(
            self.modes, self.row, self.frequency, depths, offshore, bottom
        )


def _column(mode: ModeAtNodes, node: int, n2: Array, water: Water) -> _Column:
    levels = water.climatology.depth
    modes = vertical_modes(n2, levels, float(water.bottom[node]), max(mode.number, 1))
    return _Column(modes, mode.number, np.sqrt(np.interp(modes.depth, levels, n2)))


def _depth_at(section: Sections, distance: float) -> float:
    """Depth of the water at a distance from the shore (m), infinite where nothing is known."""
    offshore, depth = section.monotonic(0)
    known = offshore.size and distance <= offshore[-1]
    return float(np.interp(distance, offshore, depth)) if known else np.inf


def _section(network: Network, node: int, speed: float, water: Water) -> Sections:
    """The cross-shelf section through a node."""
    radius = deformation_radius(speed, network.lat[node])
    return cross_shelf_sections(
        network.lon[node], network.lat[node], np.nan_to_num(network.offshore[node]), radius,
        water.depths,
    )


def _trapped(
    section: Sections, rank: int, n2: Array, water: Water, lat: float
) -> ModeSet | None:
    """Modes of a section up to a baroclinic one, nothing where the section does not carry it."""
    if rank < 1 or section.flags[0] & int(QualityFlag.NO_SECTION):
        return None
    try:
        return trapped_modes(
            *section.monotonic(0), n2, water.climatology.depth, float(coriolis(lat)), count=rank
        )
    except InputError:
        return None


def _growth(network: Network, steps: Index, stretch: float) -> float:
    """Γ (1/m) over the last part of the way along a coast, 0 where there is none."""
    coast = network.kind[steps] == StepKind.COAST
    first = int(np.flatnonzero(~coast)[-1]) + 1 if not coast.all() else 0
    last = steps[first:]
    if not last.size:
        return 0.0
    length = np.cumsum(network.length[last][::-1])
    back = min(int(np.searchsorted(length, stretch)), last.size - 1)
    ends = network.tail[last[::-1][back]], network.head[last[-1]]
    first_f, last_f = np.abs(coriolis(network.lat[list(ends)]))
    return float((last_f - first_f) / ((last_f + first_f) * length[back]))


def _azimuth(network: Network, steps: Index) -> float:
    """Direction of travel on the last step (degrees), NaN without a step."""
    if not steps.size:
        return float("nan")
    tail, head = network.tail[steps[-1]], network.head[steps[-1]]
    azimuth, _, _ = wgs84().inv(
        network.lon[tail], network.lat[tail], network.lon[head], network.lat[head]
    )
    return float(azimuth % 360.0)
