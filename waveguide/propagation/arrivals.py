"""Arrivals at all targets of one mode."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.network.attach import Box, Ties, point_box, tie
from waveguide.network.graph import Network
from waveguide.network.search import Searcher
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.ocean.stratification import Climatology
from waveguide.propagation.cautions import Caution, route_cautions
from waveguide.propagation.legs import Leg, legs_of_route
from waveguide.propagation.losses import step_physics
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.routes import Route, RouteFinder
from waveguide.propagation.validity import Survey, Validity

Array = NDArray[np.float64]
Position = tuple[float, float]

REACHED = "reached"
NO_ROUTE = "no route"
SOURCE_OFF_GUIDE = "source off the guide"
TARGET_OFF_GUIDE = "target off the guide"
NOT_CARRIED = "mode not carried here"


@dataclass(frozen=True)
class Arrival:
    """The answer for one target and mode.

    Attributes
    ----------
    status : str
    source, target : Ties
    routes : list of Route
        The headline route first; empty unless reached.
    legs : list of list of Leg
        For each route.
    cautions : list of Caution
        Of the headline route, the most serious first.
    validity : Validity or None
        Of the headline route.
    """

    status: str
    source: Ties
    target: Ties
    routes: list[Route]
    legs: list[list[Leg]]
    cautions: list[Caution]
    validity: Validity | None = None


def mode_arrivals(
    network: Network, mode: ModeAtNodes, depths: Bathymetry, source: Box,
    source_place: Position, targets: list[Position], omega: float, damping: float = 0.0,
    drag: float = 0.0, climatology: Climatology | None = None,
) -> list[Arrival]:
    """Arrivals of one mode at every target.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    depths : Bathymetry
        Tells land from water between positions and the guide.
    source : (west, south, east, north)
        Degrees; a position is a box without extent.
    source_place : (lon, lat)
        Where legs start on a map.
    targets : list of (lon, lat)
    omega : float
        Dominant angular frequency (rad/s).
    damping : float
        Interior damping (1/s).
    drag : float
        Coefficient of the linear bottom stress (m/s).
    climatology : Climatology, optional
        That the phase speeds are from, to say what the season may change.

    Returns
    -------
    list of Arrival
        One for each target.
    """
    physics = step_physics(network, mode, omega, damping, drag)
    ties = tie(network, mode.speed, source, depths)
    survey = Survey(network, mode, omega, depths, climatology)
    finder = RouteFinder(Searcher.of(network), physics, ties) if ties.node.size else None
    arrivals = []
    for place in targets:
        target = tie(network, mode.speed, point_box(*place), depths)
        if finder is None or not target.node.size:
            status = _off_guide(ties, target)
            arrivals.append(Arrival(status, ties, target, [], [], []))
            continue
        routes = finder.routes(target)
        if not routes:
            arrivals.append(Arrival(NO_ROUTE, ties, target, [], [], []))
            continue
        legs = [
            legs_of_route(network, physics, route, source_place, ties, place, target)
            for route in routes
        ]
        validity = survey.of(routes[0].steps)
        cautions = route_cautions(validity, routes[0], ties, target)
        arrivals.append(Arrival(REACHED, ties, target, routes, legs, cautions, validity))
    return arrivals


def _off_guide(source: Ties, target: Ties) -> str:
    """Why a target and a source cannot be joined."""
    if not np.isfinite(source.nearest):
        return NOT_CARRIED
    return TARGET_OFF_GUIDE if source.node.size else SOURCE_OFF_GUIDE
