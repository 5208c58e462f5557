"""Arrivals of one mode together with their waveforms and energy budgets."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.network.graph import Network
from waveguide.propagation.arrivals import Arrival
from waveguide.propagation.budgets import budget_of_legs, step_budgets, taken_up_to
from waveguide.propagation.frequency_limits import Criticality, leg_criticality
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.sources import SourceFunction
from waveguide.propagation.step_response import Conditions
from waveguide.propagation.transfer import LegBudget, paths_of_arrival
from waveguide.propagation.waveform import (
    ArrivalTimes,
    ModeWaveforms,
    arrival_times,
    mode_waveforms,
)

Array = NDArray[np.float64]


@dataclass(frozen=True)
class ModeAnswer:
    """Everything about one mode.

    Attributes
    ----------
    mode : ModeAtNodes
    arrivals : sequence of Arrival
        One for each target.
    waveforms : ModeWaveforms
    times : list of ArrivalTimes
        For each target, NaN where it is not reached.
    budgets : list of list of LegBudget
        For each target and route.
    vertex_taken : list of list of ndarray, shape (vertices, 5)
        For each target and route, the energy taken between the source and every vertex of its
        legs, by fate.
    criticality : list of list of list of Criticality
        For each target, route and leg along the guide that has steps.
    """

    mode: ModeAtNodes
    arrivals: Sequence[Arrival]
    waveforms: ModeWaveforms
    times: list[ArrivalTimes]
    budgets: list[list[LegBudget]]
    vertex_taken: list[list[Array]]
    criticality: list[list[list[Criticality]]]


def mode_answer(
    network: Network, mode: ModeAtNodes, arrivals: Sequence[Arrival], source: SourceFunction,
    window: float, omega: float, conditions: Conditions,
) -> ModeAnswer:
    """Waveforms, times and budgets for arrivals of one mode.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    arrivals : sequence of Arrival
    source : SourceFunction
    window : float
        Length of the waveforms from the start of the event (s).
    omega : float
        Dominant angular frequency (rad/s), for the critical share of each leg.
    conditions : Conditions

    Returns
    -------
    ModeAnswer
    """
    waves = mode_waveforms(network, mode, arrivals, source, window, conditions=conditions)
    times = [
        arrival_times(waves.time, level, source.lasting)
        if arrival.routes
        else ArrivalTimes(np.nan, np.nan, np.nan)
        for arrival, level in zip(arrivals, waves.sea_level, strict=True)
    ]
    steps = iter(step_budgets(
        network, mode, [path for arrival in arrivals for path in paths_of_arrival(arrival)],
        waves.omega, waves.power, conditions,
    ))
    budgets, taken, critical = [], [], []
    for arrival in arrivals:
        mine = [next(steps) for _ in arrival.routes]
        ends = [path.leg_ends for path in paths_of_arrival(arrival)]
        budgets.append([budget_of_legs(*pair) for pair in zip(mine, ends, strict=True)])
        ranks = range(len(arrival.routes))
        taken.append([_taken_at_vertices(network, arrival, rank, mine[rank]) for rank in ranks])
        critical.append([_criticality(network, mode, arrival, rank, omega) for rank in ranks])
    return ModeAnswer(mode, arrivals, waves, times, budgets, taken, critical)


def _taken_at_vertices(
    network: Network, arrival: Arrival, rank: int, steps: LegBudget
) -> Array:
    """Energy taken up to the vertices of a route, whose first and last are feet of ties."""
    route, legs = arrival.routes[rank], arrival.legs[rank]
    along = np.concatenate([[0.0], np.cumsum(network.length[route.steps])])
    along -= arrival.source.along[route.start]
    place, reached = [], 0.0
    for leg in legs:
        guided = leg.kind != "attachment"
        place.append(reached + leg.distance * guided)
        reached = float(place[-1][-1])
    taken = taken_up_to(steps)
    where = np.concatenate(place) if place else np.zeros(0)
    return np.stack([np.interp(where, along, fate) for fate in taken.T], axis=1)


def _criticality(
    network: Network, mode: ModeAtNodes, arrival: Arrival, rank: int, omega: float
) -> list[Criticality]:
    """Critical periods of every leg with steps."""
    ends = np.cumsum([leg.step_count for leg in arrival.legs[rank] if leg.step_count])
    runs = np.split(arrival.routes[rank].steps, ends[:-1]) if ends.size else []
    return [leg_criticality(network, mode, run, omega) for run in runs]
