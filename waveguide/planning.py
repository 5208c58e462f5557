"""From a scenario to a plan: when to look, what to measure, and what the window hangs on."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.section import cross_shelf_sections
from waveguide.coast.section_quality import QualityFlag
from waveguide.constants import coriolis, deformation_radius
from waveguide.errors import InputError
from waveguide.modes.modeset import ModeSet
from waveguide.modes.trapped import trapped_modes
from waveguide.modes.vertical import vertical_modes
from waveguide.modes.visibility import View, view_of_mode, view_of_section
from waveguide.network.packaged import family_of
from waveguide.network.section_runs import RANKS
from waveguide.network.trapped_store import packaged_guide
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.ocean.stratification import packaged_climatology
from waveguide.pipeline import Study, study
from waveguide.propagation.arrivals import REACHED, Arrival
from waveguide.propagation.ensemble import Members, chance_window, members, sensitivity
from waveguide.propagation.moorings import section_rank
from waveguide.propagation.priors import INPUTS, Priors
from waveguide.propagation.row_plan import SHARES, RowPlan
from waveguide.propagation.sampling import first_order_shares, normal_sample, percentiles
from waveguide.report.plan_dataset import plan_dataset
from waveguide.scenario import Scenario

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]
Progress = Callable[[str], None]

@dataclass(frozen=True)
class Plan:
    """A plan of observations.

    Attributes
    ----------
    study : Study
        What was computed without errors.
    dataset : xarray.Dataset
        As declared in :data:`waveguide.report.plan_dataset.PLAN`.
    """

    study: Study
    dataset: xr.Dataset


def plan(scenario: Scenario, progress: Progress | None = None) -> xr.Dataset:
    """When to look for a signal at each target, what to measure, and what the answer hangs on.

    Parameters
    ----------
    scenario : Scenario
    progress : callable, optional
        Told the name of each stage as it begins.

    Returns
    -------
    xarray.Dataset
        As declared in :data:`waveguide.report.plan_dataset.PLAN`.

    Raises
    ------
    InputError
        As :func:`waveguide.pipeline.arrivals`.
    """
    return planned(scenario, progress).dataset


def planned(scenario: Scenario, progress: Progress | None = None) -> Plan:
    """A plan together with the arrivals it is about.

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
    return Plan(done, plan_dataset(scenario, done.dataset, rows, sample.shape[0]))


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
    real = scenario.ocean.source != "uniform"
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
        reach=_reach(mode, node, float(answer.mode.speed[node]), real),
        view=_view(mode, node) if real else None,
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


def _reach(mode: int, node: int, speed: float, real: bool) -> float:
    """Trapping scale of the section at a node, or the deformation radius over a flat bottom (m)."""
    section, rank = _mode_of_section(mode, node) if real else (None, 0)
    if section is None:
        return float(deformation_radius(speed, packaged_guide(family_of(mode))[0].lat[node]))
    return float(section.trapping_scale[list(section.mode).index(rank)])


def _view(mode: int, node: int) -> View | None:
    """What to measure beside a node, by the packaged depths and stratification."""
    section, rank = _mode_of_section(mode, node)
    if section is not None:
        return view_of_section(section, rank)
    n2, depth = _stratification(node, mode), packaged_guide(family_of(mode))[1].depth[node]
    if n2 is None or not np.isfinite(depth):
        return None
    levels = packaged_climatology().depth
    modes = vertical_modes(n2, levels, float(depth), max(mode, 1))
    return view_of_mode(modes, mode, n2, levels)


def _mode_of_section(mode: int, node: int) -> tuple[ModeSet | None, int]:
    """The modes of the section at a node and the rank of one of them, or nothing."""
    network, atlas = packaged_guide(family_of(mode))
    rank = int(section_rank(network, atlas, mode)[node])
    section = _section(node) if rank > 0 else None
    return (None, 0) if section is None or rank not in section.mode else (section, rank)


@cache
def _section(node: int) -> ModeSet | None:
    """Modes of the section at a coast node of the baroclinic guide, nothing where there is none."""
    network, atlas = packaged_guide("baroclinic")
    n2 = _stratification(node, 1)
    lon, lat = float(network.lon[node]), float(network.lat[node])
    radius = deformation_radius(atlas.phase_speed[atlas.row(1), node], lat)
    sections = cross_shelf_sections(
        lon, lat, network.offshore[node], radius, packaged_bathymetry()
    )
    if n2 is None or sections.flags[0] & int(QualityFlag.NO_SECTION):
        return None
    try:
        return trapped_modes(
            *sections.monotonic(0), n2, packaged_climatology().depth, float(coriolis(lat)),
            count=RANKS,
        )
    except InputError:  # a section too shallow or too steep for its modes
        return None


def _stratification(node: int, mode: int) -> Array | None:
    """N² at the depths of the packaged climatology beside a node, nothing where it is unknown."""
    network, _ = packaged_guide(family_of(mode))
    n2 = packaged_climatology().profiles(network.lon[node], network.lat[node]).n2[0]
    return n2 if np.isfinite(n2).all() else None
