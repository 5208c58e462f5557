"""From a scenario to its arrivals: the only module that knows every stage."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from waveguide.constants import SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.network.packaged import family_of, packaged_network
from waveguide.network.trapped_store import packaged_guide
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.ocean.packaged import used_files
from waveguide.ocean.stratification import Climatology, packaged_climatology
from waveguide.positions import check_places, swapped
from waveguide.propagation.adaptation import adapted
from waveguide.propagation.answers import ModeAnswer, mode_answer
from waveguide.propagation.arrivals import REACHED, Arrival, mode_arrivals
from waveguide.propagation.dispersion import interior_damping_rate
from waveguide.propagation.modes import atlas_mode, friction_of_steps, uniform_mode
from waveguide.propagation.sources import (
    SourceFunction,
    boxcar_burst,
    gaussian_burst,
    series_source,
    step_rise,
)
from waveguide.propagation.step_response import Conditions
from waveguide.propagation.waveform import default_window
from waveguide.report.attributes import arrivals_attributes
from waveguide.report.dataset import arrivals_arrays
from waveguide.scenario import Scenario
from waveguide.scenario.source_series import read_source_series
from waveguide.stored import Arrays

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.network.attach import Box
    from waveguide.network.graph import Network
    from waveguide.propagation.modes import ModeAtNodes
    from waveguide.propagation.moorings import MooringAnswer

Progress = Callable[[str], None]


@dataclass(frozen=True)
class Study:
    """Arrivals and what they were computed from.

    Attributes
    ----------
    source : SourceFunction
    omega : float
        Dominant angular frequency (rad/s).
    networks : dict of int to Network
        By mode, like the next two.
    answers : dict of int to ModeAnswer
    conditions : dict of int to Conditions
    arrays : Arrays
        As declared in :data:`waveguide.schema.ARRIVALS`.
    """

    source: SourceFunction
    omega: float
    networks: dict[int, Network]
    answers: dict[int, ModeAnswer]
    conditions: dict[int, Conditions]
    arrays: Arrays

    @cached_property
    def dataset(self) -> xr.Dataset:
        """The same for xarray."""
        return self.arrays.dataset()


def arrivals(scenario: Scenario, progress: Progress | None = None) -> xr.Dataset:
    """When, by which route and how strongly a signal reaches each target.

    Parameters
    ----------
    scenario : Scenario
    progress : callable, optional
        Told the name of each stage as it begins.

    Returns
    -------
    xarray.Dataset
        Arrivals, as declared in :data:`waveguide.schema.ARRIVALS`.

    Raises
    ------
    InputError
        If a position is far inland, the user's own files do not cover a route, or no target is
        reached in any mode.
    """
    return study(scenario, progress).dataset


def study(scenario: Scenario, progress: Progress | None = None) -> Study:
    """Arrivals together with what they were computed from.

    Parameters
    ----------
    scenario : Scenario
    progress : callable, optional
        Told the name of each stage as it begins.

    Returns
    -------
    Study

    Raises
    ------
    InputError
        As `arrivals`.
    """
    say = progress or (lambda stage: None)
    say("reading depths")
    check_positions(scenario)
    guides = {mode: mode_guide(scenario, mode, say) for mode in scenario.waves.modes}
    found: dict[int, list[Arrival]] = {}
    for mode, (network, carried) in guides.items():
        say(f"routes of mode {mode}")
        found[mode] = target_arrivals(scenario, network, carried)
    _require_an_answer(scenario, found)
    source = source_function(scenario)
    window = _window(scenario, found, source)
    omega = dominant_frequency(scenario)
    answers, conditions = {}, {}
    for mode, (network, carried) in guides.items():
        say(f"waveforms of mode {mode}")
        conditions[mode] = mode_conditions(scenario, network, carried)
        answers[mode] = mode_answer(
            network, carried, found[mode], source, window, omega, conditions[mode]
        )
    moorings: dict[tuple[int, int], MooringAnswer] = {}
    if any(target.depth_m for target in scenario.targets):
        from waveguide.moorings import mooring_views

        say("moorings")
        moorings = mooring_views(scenario, guides, found, omega)
    attributes = arrivals_attributes(scenario, used_files())
    arrays = arrivals_arrays(scenario, answers, attributes, moorings)
    networks = {mode: network for mode, (network, _) in guides.items()}
    return Study(source, omega, networks, answers, conditions, arrays)


def dominant_frequency(scenario: Scenario) -> float:
    """Dominant angular frequency of a scenario.

    Parameters
    ----------
    scenario : Scenario

    Returns
    -------
    float
        rad/s.
    """
    return 2.0 * np.pi / (scenario.waves.period_days * SECONDS_PER_DAY)


def source_function(scenario: Scenario) -> SourceFunction:
    """Sea level at the source as a function of time.

    Parameters
    ----------
    scenario : Scenario

    Returns
    -------
    SourceFunction
        With peak 1, unless it is a series of the user's own.
    """
    event = scenario.event
    if event.series_file is not None:
        return series_source(*read_source_series(event.series_file, event.start))
    shapes = {"gaussian": gaussian_burst, "boxcar": boxcar_burst, "step": step_rise}
    return shapes[event.shape](event.duration_days * SECONDS_PER_DAY)


def _window(
    scenario: Scenario, found: dict[int, list[Arrival]], source: SourceFunction
) -> float:
    """How long waveforms go on (s)."""
    if scenario.waves.window_days is not None:
        return scenario.waves.window_days * SECONDS_PER_DAY
    headline = [a.routes[0].time for rows in found.values() for a in rows if a.routes]
    return default_window(headline, source)


def damping_rate(days: float | None, mode: ModeAtNodes) -> float:
    """Interior damping of a mode (1/s): that of mode 1 times (c₁/c)², by median speeds.

    Parameters
    ----------
    days : float or None
        e-folding time of mode 1; None for no damping.
    mode : ModeAtNodes

    Returns
    -------
    float
    """
    if days is None or mode.number == 0:
        return 0.0
    first = atlas_mode(packaged_network("baroclinic")[1], 1).speed
    rate = interior_damping_rate(
        np.nanmedian(mode.speed), 1.0 / (days * SECONDS_PER_DAY), np.nanmedian(first)
    )
    return float(rate)


def mode_conditions(scenario: Scenario, network: Network, mode: ModeAtNodes) -> Conditions:
    """Friction and damping of a mode.

    Parameters
    ----------
    scenario : Scenario
    network : Network
    mode : ModeAtNodes

    Returns
    -------
    Conditions
    """
    friction = friction_of_steps(network, mode, scenario.waves.drag_m_s)
    damping = damping_rate(scenario.waves.damping_days, mode)
    return Conditions(friction=friction, damping=damping)


def source_box(scenario: Scenario) -> Box:
    """The place of the event as a box (west, south, east, north; degrees)."""
    event = scenario.event
    return event.box if event.box is not None else (*event.centre, *event.centre)


def target_arrivals(scenario: Scenario, network: Network, mode: ModeAtNodes) -> list[Arrival]:
    """Arrivals of one mode at every target.

    Parameters
    ----------
    scenario : Scenario
    network : Network
    mode : ModeAtNodes

    Returns
    -------
    list of Arrival
        In the order of the targets.
    """
    return mode_arrivals(
        network, mode, packaged_bathymetry(), source_box(scenario), scenario.event.centre,
        [target.position for target in scenario.targets],
        dominant_frequency(scenario), damping_rate(scenario.waves.damping_days, mode),
        scenario.waves.drag_m_s, _annual_mean(scenario),
    )


def _annual_mean(scenario: Scenario) -> Climatology | None:
    """The packaged climatology, where the phase speeds are from it."""
    ocean = scenario.ocean
    own = ocean.phase_speed_m_s is not None or ocean.climatology or ocean.atlas
    return None if own else packaged_climatology()


def mode_guide(scenario: Scenario, mode: int, say: Progress) -> tuple[Network, ModeAtNodes]:
    """The network of a mode and what its nodes know of it in the scenario's ocean.

    Parameters
    ----------
    scenario : Scenario
    mode : int
    say : callable
        Told the name of each stage as it begins.

    Returns
    -------
    network : Network
    mode : ModeAtNodes

    Raises
    ------
    InputError
        If the user's own files leave a part of a route without a speed.
    """
    network, atlas = packaged_guide(family_of(mode))
    ocean, omega = scenario.ocean, dominant_frequency(scenario)
    if ocean.phase_speed_m_s is not None:
        return network, uniform_mode(network, mode, ocean.phase_speed_m_s)
    packaged = adapted(network, atlas_mode(atlas, mode), omega)
    if ocean.source == "packaged":
        return network, packaged
    from waveguide.own_modes import own_modes

    say(f"own files at the nodes of mode {mode}")
    own = adapted(network, atlas_mode(own_modes(ocean, mode), mode), omega)
    _require_coverage(scenario, network, packaged, own)
    return network, own


def _require_coverage(
    scenario: Scenario, network: Network, packaged: ModeAtNodes, own: ModeAtNodes
) -> None:
    """Refuse own files that leave a part of a route without a speed."""
    problems = []
    for target, answer in zip(
        scenario.targets, target_arrivals(scenario, network, packaged), strict=True
    ):
        if answer.status != REACHED:
            continue
        steps = answer.routes[0].steps
        nodes = np.unique(np.concatenate(
            [network.tail[steps], network.head[steps], answer.target.node]
        ))
        bare = nodes[~np.isfinite(own.speed[nodes])]
        if bare.size:
            problems.append(
                f"ocean: the files given do not cover the route of mode {own.number} to "
                f"{target.name!r}: {bare.size} of its {nodes.size} nodes have no phase speed, "
                f"between {_extent(network, bare)}; give files that cover this part, or leave the "
                "key out to use the packaged data"
            )
    if problems:
        raise InputError(problems)


def _extent(network: Network, nodes: np.ndarray[tuple[int], np.dtype[np.int64]]) -> str:
    """Where nodes lie, in words."""
    south, north = network.lat[nodes].min(), network.lat[nodes].max()
    lon = np.sort(network.lon[nodes] % 360.0)
    gap = np.diff(np.append(lon, lon[0] + 360.0))
    east, west = lon[np.argmax(gap)], lon[(np.argmax(gap) + 1) % lon.size]
    west, east = ((value + 180.0) % 360.0 - 180.0 for value in (west, east))
    return f"longitudes {west:.1f} and {east:.1f}, latitudes {south:.1f} and {north:.1f}"


def check_positions(scenario: Scenario) -> None:
    """Refuse positions far inland.

    Parameters
    ----------
    scenario : Scenario

    Raises
    ------
    InputError
        Naming every such position, and the swapped one where that is at sea.
    """
    places = [(f"targets: {t.name!r}", t.position) for t in scenario.targets]
    if scenario.event.position is not None:
        places.append(("event.position", scenario.event.position))
    check_places(places)


def _require_an_answer(scenario: Scenario, answers: dict[int, list[Arrival]]) -> None:
    """Refuse a scenario none of whose targets is reached, with the reasons."""
    if any(a.status == REACHED for rows in answers.values() for a in rows):
        return
    problems = [
        f"{target.name!r}, mode {mode}: {_reason(answer)}{swapped(target.position)}"
        for mode, rows in answers.items()
        for target, answer in zip(scenario.targets, rows, strict=True)
    ]
    raise InputError(["no target is reached in any mode:", *problems])


def _reason(answer: Arrival) -> str:
    """Why there is no arrival, with the distances that decide it."""
    for what, ties in (("source", answer.source), ("target", answer.target)):
        if answer.status == f"{what} off the guide":
            return (
                f"{answer.status}, {ties.nearest / 1e3:.0f} km or {ties.nearest_radii:.1f} R from "
                "it where at most 3 R are followed (or land lies between); move it towards the "
                "coast or the equator"
            )
    if answer.status == "no route":
        return (
            "no route: signals do not travel that way, or nothing is left of them. They keep the "
            "coast on the right in the northern hemisphere, on the left in the southern, and go "
            "eastward on the equator; "
            "see whether source and target should be exchanged"
        )
    return answer.status
