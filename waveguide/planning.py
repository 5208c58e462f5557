"""From a scenario to a plan: when to look, what to measure, and what the window hangs on."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import deformation_radius
from waveguide.modes.vertical import VerticalModes, vertical_modes
from waveguide.modes.visibility import View, view_of_mode
from waveguide.network.packaged import family_of, packaged_network
from waveguide.ocean.stratification import packaged_climatology
from waveguide.pipeline import Study, study
from waveguide.propagation.arrivals import REACHED, Arrival
from waveguide.propagation.ensemble import Members, chance_window, members, sensitivity
from waveguide.propagation.priors import INPUTS, Priors
from waveguide.propagation.row_plan import SHARES, RowPlan
from waveguide.propagation.sampling import first_order_shares, normal_sample, percentiles
from waveguide.scenario import Scenario
from waveguide.scenario.fields import HIGHEST_MODE

Array = NDArray[np.float64]
Progress = Callable[[str], None]

@dataclass(frozen=True)
class Plan:
    """A plan of observations.

    Attributes
    ----------
    study : Study
        What was computed without errors.
    rows : dict
        A `RowPlan` for each (target, mode) that is reached.
    members : int
        Size of the ensemble that was drawn.
    """

    study: Study
    rows: dict[tuple[int, int], RowPlan]
    members: int


def plan(scenario: Scenario, progress: Progress | None = None) -> Plan:
    """When to look for a signal at each target, and what the answer hangs on.

    Parameters
    ----------
    scenario : Scenario
    progress : callable, optional
        Told the name of each stage as it begins.

    Returns
    -------
    Plan

    Raises
    ------
    InputError
        As :func:`waveguide.pipeline.arrivals`.
    """
    say = progress or (lambda stage: None)
    done = study(scenario, progress)
    wanted = scenario.uncertainty
    sample = normal_sample(wanted.members, len(INPUTS), wanted.seed)
    rows = {}
    for mode, answer in done.answers.items():
        say(f"ensemble of mode {mode}")
        for target, arrival in enumerate(answer.arrivals):
            if arrival.status == REACHED:
                rows[target, mode] = _row(scenario, done, mode, target, wanted.priors, sample)
    return Plan(done, rows, sample.shape[0])


def _row(
    scenario: Scenario, done: Study, mode: int, target: int, priors: Priors, sample: Array
) -> RowPlan:
    network, answer = done.networks[mode], done.answers[mode]
    given = sensitivity(
        network, answer, target, done.source, done.omega, priors, done.conditions[mode]
    )
    found = members(given, priors, sample)
    arrival = answer.arrivals[target]
    node = int(arrival.target.node[arrival.routes[0].end])
    shares = first_order_shares(sample, np.stack([found.half_height, found.log_height]))
    last = found.half_height if done.source.lasting else found.peak
    return RowPlan(
        front=percentiles(found.front, SHARES),
        half_height=percentiles(found.half_height, SHARES),
        peak=percentiles(found.peak, SHARES),
        width=percentiles(found.fall - found.half_height, SHARES),
        ratio=np.exp(np.quantile(found.log_ratio, SHARES)),
        height=np.exp(np.quantile(found.log_height, SHARES)),
        window=chance_window(found.half_height, last, scenario.plan.chance_percent / 100.0),
        above=_above(found, scenario),
        time_shares=shares[0],
        height_shares=shares[1],
        speed=_mean_speed(arrival),
        radius=float(deformation_radius(answer.mode.speed[node], network.lat[node])),
        view=_view(mode, node, float(network.lon[node]), float(network.lat[node])),
    )


def _above(found: Members, scenario: Scenario) -> float:
    """Chance of a peak above the threshold."""
    amplitude = scenario.event.amplitude_m
    if not amplitude:
        return float("nan")
    needed = np.log(scenario.plan.threshold_m / abs(amplitude))
    return float(np.mean(found.log_height > needed))


def _mean_speed(arrival: Arrival) -> float:
    length = sum(float(leg.distance[-1]) for leg in arrival.legs[0] if leg.kind != "attachment")
    time = arrival.routes[0].time
    return length / time if time > 0.0 else float("nan")


def _view(mode: int, node: int, lon: float, lat: float) -> View | None:
    """What to measure in the water beside a node, by the packaged depths and stratification."""
    depth = float(packaged_network(family_of(mode))[1].depth[node])
    column = _column(lon, lat, depth) if np.isfinite(depth) else None
    return None if column is None else view_of_mode(column[0], mode, *column[1:])


@cache
def _column(lon: float, lat: float, depth: float) -> tuple[VerticalModes, Array, Array] | None:
    """Modes 0 to 3 of a column of the packaged ocean, with its N² and its depths."""
    profile = packaged_climatology().profiles(lon, lat)
    n2 = profile.n2[0]
    if not np.isfinite(n2).all():
        return None
    return vertical_modes(n2, profile.depth, depth, HIGHEST_MODE), n2, profile.depth
