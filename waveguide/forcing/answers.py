"""Forced response of one mode at all targets."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import SECONDS_PER_DAY
from waveguide.forcing.influence import Influence, influence
from waveguide.forcing.projection import Forcing
from waveguide.forcing.response import (
    Period,
    RouteResponse,
    contributions,
    covered_by_group,
    covered_share,
    main_way,
    route_response,
    spin_up,
    windy_rows,
)
from waveguide.forcing.stretches import Stretch, cut_into_stretches
from waveguide.forcing.transfer import Place, group_delays, wind_transfer
from waveguide.network.attach import Ties, point_box, tie
from waveguide.network.graph import Network
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.propagation.losses import StepPhysics
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.step_response import Conditions

Array = NDArray[np.float64]
Index = NDArray[np.int64]
Forcer = Callable[[Network, Array, Index], Forcing]
"""What makes the forcing of steps: network, phase speed at its nodes, rising steps."""

RESPONDS = "responds"
OFF_GUIDE = "target off the guide"
NOT_CARRIED = "mode not carried here"
NO_WIND = "no wind acts upstream"

LONGEST_MEMORY = 3.0 * 365.0 * SECONDS_PER_DAY
"""Wind longer ago than this is forgotten (s)."""


@dataclass(frozen=True)
class TargetResponse:
    """Response of one mode at one target.

    Attributes
    ----------
    status : str
    node : int
        Node the target is tied to, −1 if none.
    factor : float
        Share of the node's amplitude that the target feels.
    distance : float
        From the target to the guide (m).
    sea_level : ndarray, shape (nt,)
        m; NaN unless the target responds.
    stretches : list of Stretch
        Upstream, nearest first.
    by_stretch : ndarray, shape (stretches, nt)
        Their parts of `sea_level`.
    stretch_covered : ndarray, shape (stretches,)
        Share of each that the wind record covers.
    way : RouteResponse or None
        Along the main way.
    steps : ndarray of int
        Of the main way as far as 95 % of the influence reaches, in the order of travel.
    spin_up : float
        Delay of the long wave within which 95 % of the influence lies (s).
    covered : float
        Share of the influence that the wind record covers.
    """

    status: str
    node: int
    factor: float
    distance: float
    sea_level: Array
    stretches: list[Stretch]
    by_stretch: Array
    stretch_covered: Array
    way: RouteResponse | None
    steps: Index
    spin_up: float
    covered: float


@dataclass(frozen=True)
class ModeResponse:
    """Responses of one mode.

    Attributes
    ----------
    forcing : Forcing
        Of all steps upstream of the targets.
    targets : list of TargetResponse
    """

    forcing: Forcing
    targets: list[TargetResponse]


def mode_response(
    network: Network, mode: ModeAtNodes, physics: StepPhysics, conditions: Conditions,
    depths: Bathymetry, targets: Sequence[tuple[float, float]], omega: float, forcer: Forcer,
) -> ModeResponse:
    """Response of one mode at every target.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    physics : StepPhysics
        At the dominant frequency, which tells the ways upstream.
    conditions : Conditions
        Friction and damping.
    depths : Bathymetry
    targets : sequence of (lon, lat)
        Degrees.
    omega : float
        Dominant angular frequency (rad/s).
    forcer : Forcer

    Returns
    -------
    ModeResponse
    """
    ties = [tie(network, mode.speed, point_box(*place), depths) for place in targets]
    places = [_place(mode, tied) for tied in ties]
    reach = [
        None if place is None else influence(
            network, mode, physics, place.node, place.factor, LONGEST_MEMORY, place.beyond
        )
        for place in places
    ]
    asked = [found.step[found.weight != 0.0] for found in reach if found is not None]
    steps = np.unique(np.concatenate([np.zeros(0, np.int64), *asked]))
    forcing = forcer(network, mode.speed, steps)
    answers = []
    for tied, place, found in zip(ties, places, reach, strict=True):
        if place is None or found is None or not found.weight.any():
            answers.append(_silent(tied, found, forcing.time.size))
        else:
            answers.append(_answer(network, mode, conditions, place, found, forcing, omega,
                                   float(tied.distance[_best(tied)])))
    return ModeResponse(forcing, answers)


def _best(tied: Ties) -> int:
    """Of several stretches of guide the one whose wave the target feels most, then the nearest."""
    return int(np.lexsort((tied.distance, -tied.factor))[0])


def _place(mode: ModeAtNodes, tied: Ties) -> Place | None:
    """Where on the guide a target is, if it is on it."""
    if not tied.node.size:
        return None
    best = _best(tied)
    node = int(tied.node[best])
    return Place(node, float(tied.factor[best]), float(tied.along[best] / mode.speed[node]))


def _answer(
    network: Network, mode: ModeAtNodes, conditions: Conditions, place: Place, found: Influence,
    forcing: Forcing, omega: float, distance: float,
) -> TargetResponse:
    """Sum up what lies upstream of one target."""
    windy = windy_rows(found, forcing)
    period = Period.of(forcing, float(found.delay[windy].max(initial=0.0)))
    transfer = wind_transfer(network, mode, conditions, found, place, windy, period.few_omega)
    told = group_delays(transfer, found, omega)
    stretches, of_row = cut_into_stretches(network, told)
    parts = period.series(
        contributions(transfer, found, forcing, period, of_row, len(stretches))
    )
    way, memory = main_way(found), spin_up(found)
    return TargetResponse(
        status=RESPONDS, node=place.node, factor=place.factor, distance=distance,
        sea_level=parts.sum(axis=0), stretches=stretches, by_stretch=parts,
        stretch_covered=covered_by_group(found, forcing, of_row, len(stretches)),
        way=route_response(network, transfer, found, forcing, period, told.head_delay),
        steps=found.step[way[found.delay[way] <= memory]][::-1],
        spin_up=memory, covered=covered_share(found, forcing),
    )  # fmt: skip


def _silent(tied: Ties, found: Influence | None, count: int) -> TargetResponse:
    """The answer where there is none."""
    status = NO_WIND
    if found is None:
        status = OFF_GUIDE if np.isfinite(tied.nearest) else NOT_CARRIED
    return TargetResponse(
        status, -1, float("nan"), tied.nearest, np.full(count, np.nan), [],
        np.zeros((0, count)), np.zeros(0), None, np.zeros(0, np.int64), float("nan"),
        float("nan"),
    )
