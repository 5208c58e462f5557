"""Arrivals of one mode together with their waveforms and energy budgets."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.network.graph import Network
from waveguide.propagation.arrivals import Arrival
from waveguide.propagation.frequency_limits import leg_criticality
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.sources import SourceFunction
from waveguide.propagation.step_response import Conditions
from waveguide.propagation.transfer import LegBudget, leg_budget
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
    critical_periods : list of list of ndarray
        For each target and route, the critical period of every leg along the guide (s), NaN for
        legs that nowhere lead poleward along a coast.
    """

    mode: ModeAtNodes
    arrivals: Sequence[Arrival]
    waveforms: ModeWaveforms
    times: list[ArrivalTimes]
    budgets: list[list[LegBudget]]
    critical_periods: list[list[Array]]


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
    budgets = [[leg_budget(route, waves.power) for route in target] for target in waves.transfers]
    periods = [
        [_leg_periods(network, mode, arrival, rank, omega) for rank in range(len(arrival.routes))]
        for arrival in arrivals
    ]
    return ModeAnswer(mode, arrivals, waves, times, budgets, periods)


def _leg_periods(
    network: Network, mode: ModeAtNodes, arrival: Arrival, rank: int, omega: float
) -> Array:
    """Geometric mean of the range of critical periods of every leg with steps (s)."""
    ends = np.cumsum([leg.step_count for leg in arrival.legs[rank] if leg.step_count])
    runs = np.split(arrival.routes[rank].steps, ends[:-1]) if ends.size else []
    found = [leg_criticality(network, mode, run, omega) for run in runs]
    return np.array([np.sqrt(c.shortest * c.longest) for c in found])
