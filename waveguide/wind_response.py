"""From a scenario with wind to the sea level it drives at every target."""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.forcing.answers import RESPONDS, Forcer, ModeResponse, TargetResponse, mode_response
from waveguide.forcing.events import Event, Patch, Storm, event_end, event_start
from waveguide.forcing.projection import Forcing, event_forcing, record_forcing
from waveguide.forcing.result import ResponseResult
from waveguide.forcing.samples import step_samples
from waveguide.forcing.stations import Measure, read_stations, station_forcing
from waveguide.forcing.structure import MooringRatios, mooring_ratios
from waveguide.forcing.time_axis import Times, bridged_gaps, seconds, uniform_times
from waveguide.forcing.wind_file import WindFile, open_wind
from waveguide.network.graph import Network
from waveguide.network.packaged import family_of
from waveguide.network.trapped_store import packaged_guide
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.ocean.packaged import WIND_RECORD, packaged_file
from waveguide.ocean.stratification import packaged_climatology
from waveguide.pipeline import damping_rate
from waveguide.positions import check_places
from waveguide.propagation.adaptation import adapted
from waveguide.propagation.cautions import COVERED_WIND, response_cautions
from waveguide.propagation.losses import step_physics
from waveguide.propagation.modes import ModeAtNodes, atlas_mode, friction_of_steps
from waveguide.propagation.step_response import Conditions
from waveguide.propagation.validity import Survey, Validity
from waveguide.report.response_attributes import response_attributes
from waveguide.scenario import WindPatch, WindScenario, WindStorm

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]
Index = NDArray[np.int64]
Progress = Callable[[str], None]

NEAREST_WIND = 25e3
"""The wind of a coast is taken at least so far offshore (m)."""

LEAST_COVERED = 0.8
"""A record on a grid must cover this share of what lies upstream of a target."""

COARSE = 5.0 * SECONDS_PER_DAY
"""Means over longer than this lose gusts that stress depends on, and the response is told at finer
times than theirs (s)."""


def response(question: WindScenario, progress: Progress | None = None) -> xr.Dataset:
    """Sea level that the wind drives at each target.

    Parameters
    ----------
    question : WindScenario
    progress : callable, optional
        Told the name of each stage as it begins.

    Returns
    -------
    xarray.Dataset
        As declared in :data:`waveguide.report.response_dataset.RESPONSE`.

    Raises
    ------
    InputError
        If the wind cannot be used, or nothing responds to it.
    """
    from waveguide.report.response_dataset import response_dataset

    return response_dataset(wind_response(question, progress))


def wind_response(question: WindScenario, progress: Progress | None = None) -> ResponseResult:
    """The same with all that figures need.

    Parameters
    ----------
    question : WindScenario
    progress : callable, optional

    Returns
    -------
    ResponseResult

    Raises
    ------
    InputError
    """
    say = progress or (lambda stage: None)
    check_places([(f"targets: {t.name!r}", t.position) for t in question.targets])
    say("reading the wind")
    forcer, notes, used = _forcer(question)
    omega = 2.0 * np.pi / (question.waves.period_days * SECONDS_PER_DAY)
    networks: dict[int, Network] = {}
    answers: dict[int, ModeResponse] = {}
    ratios: dict[tuple[int, int], MooringRatios] = {}
    validity: dict[tuple[int, int], Validity] = {}
    for number in question.waves.modes:
        say(f"response of mode {number}")
        found = _of_mode(question, number, omega, forcer)
        networks[number], answers[number] = found.network, found.response
        ratios.update({(i, number): ratio for i, ratio in found.ratios.items()})
        validity.update({(i, number): stands for i, stands in found.validity.items()})
    _require_cover(question, answers)
    _require_an_answer(question, answers)
    forcing = next(iter(answers.values())).forcing
    if forcing.bridged > 0.0:
        notes.append(f"{100.0 * forcing.bridged:.2g} % of the wind was missing and is bridged by "
                     "straight lines")
    positions = np.array([target.position for target in question.targets])
    return ResponseResult(
        target=[target.name for target in question.targets],
        lon=positions[:, 0], lat=positions[:, 1], time=forcing.time, networks=networks,
        answers=answers, ratios=ratios,
        validity=validity,
        cautions={
            (i, number): response_cautions(stands, answers[number].targets[i].covered)
            for (i, number), stands in validity.items()
        },
        notes=notes + _calm_parts(answers), attributes=response_attributes(question, forcing, used),
        calm_before=question.wind.invented,
    )  # fmt: skip


class _OfMode(NamedTuple):
    """Responses of one mode, and by target what moorings on the equator see and how it stands."""

    network: Network
    response: ModeResponse
    ratios: dict[int, MooringRatios]
    validity: dict[int, Validity]


def _of_mode(question: WindScenario, number: int, omega: float, forcer: Forcer) -> _OfMode:
    network, mode = _mode(question, number, omega)
    damping, drag = damping_rate(question.waves.damping_days, mode), question.waves.drag_m_s
    physics = step_physics(network, mode, omega, damping, drag)
    friction = friction_of_steps(network, mode, drag)
    places = [target.position for target in question.targets]
    found = mode_response(
        network, mode, physics, Conditions(friction, damping), packaged_bathymetry(), places,
        omega, forcer,
    )
    responding = {i: a for i, a in enumerate(found.targets) if a.status == RESPONDS}
    ratios = {
        i: mooring_ratios(
            packaged_climatology(), *places[i], float(mode.depth[answer.node]), number
        )
        for i, answer in responding.items() if number > 0 and network.equatorial[answer.node]
    }
    own = question.ocean.climatology or question.ocean.atlas
    annual_mean = None if own else packaged_climatology()
    survey = Survey(network, mode, omega, packaged_bathymetry(), annual_mean)
    return _OfMode(
        network, found, ratios, {i: survey.of(answer.steps) for i, answer in responding.items()}
    )


def _mode(question: WindScenario, number: int, omega: float) -> tuple[Network, ModeAtNodes]:
    """Network and mode in the scenario's ocean."""
    network, atlas = packaged_guide(family_of(number))
    if question.ocean.source == "own files":
        from waveguide.own_modes import own_modes

        atlas = own_modes(question.ocean, number)
    return network, adapted(network, atlas_mode(atlas, number), omega)


def _forcer(question: WindScenario) -> tuple[Forcer, list[str], list[Path]]:
    """What makes the forcing, notes on the wind, and the files it comes from."""
    if question.wind.invented:
        return _invented(question), [], []
    if question.wind.stations is not None:
        return _at_stations(question)
    return _on_grid(question)


def _moment(value: datetime) -> np.datetime64:
    return np.datetime64(value.replace(tzinfo=None), "ns")


def _period(question: WindScenario, time: Times) -> tuple[int, int]:
    """Records of the period asked for."""
    start, end = question.wind.start, question.wind.end
    first = 0 if start is None else int(np.searchsorted(time, _moment(start)))
    last = time.size if end is None else int(np.searchsorted(time, _moment(end), "right"))
    return first, last


def _step(question: WindScenario, time: Times) -> float:
    """Interval of the response (s)."""
    if question.wind.step_hours is not None:
        return question.wind.step_hours * 3600.0
    interval = float(np.median(seconds(time[1:] - time[:-1])))
    return interval if interval <= COARSE else interval / 6.0


def _on_grid(question: WindScenario) -> tuple[Forcer, list[str], list[Path]]:
    """Forcing by a record on a grid."""
    wind = question.wind
    files = list(wind.file or [packaged_file(WIND_RECORD)])
    quantity = wind.quantity if wind.quantity in ("wind", "stress") else None
    record = open_wind(
        files, packaged_bathymetry(), wind.drag_law, wind.unresolved_m_s, quantity,
        (wind.eastward, wind.northward), wind.units,
    )
    period = _period(question, record.time)
    time = record.time[slice(*period)]
    notes = bridged_gaps(time) + _coarse(record, time)
    step = _step(question, time)
    offshore = max(0.5 * record.interval * 111.2e3, NEAREST_WIND)

    def forcer(network: Network, speed: Array, steps: Index) -> Forcing:
        samples = step_samples(network, speed, steps, offshore)
        return record_forcing(record, network, samples, steps, period, step, wind.remove)

    return forcer, notes, files


def _coarse(record: WindFile, time: Times) -> list[str]:
    """What to say of winds that are means over long."""
    days = float(np.median(seconds(time[1:] - time[:-1]))) / SECONDS_PER_DAY
    mean_wind = record.components.quantity == "wind" and record.unresolved == 0.0
    if days * SECONDS_PER_DAY < COARSE or not mean_wind:
        return []
    return [
        f"stress of winds that are means over {days:.0f} days is too weak, since it grows with the "
        "square of the wind; say with unresolved_m_s in [wind] how much the wind varies within"
    ]


def _at_stations(question: WindScenario) -> tuple[Forcer, list[str], list[Path]]:
    """Forcing by alongshore winds at stations."""
    wind = question.wind
    assert wind.file is not None  # Wind's rules hold
    assert wind.stations is not None
    measure: Measure = "alongshore stress"
    if wind.quantity == "upwelling index":
        measure = "upwelling index"
    winds = read_stations(wind.file[0], wind.stations, measure)
    period = _period(question, winds.time)
    time = winds.time[slice(*period)]
    notes, step = bridged_gaps(time), _step(question, time)

    def forcer(network: Network, speed: Array, steps: Index) -> Forcing:
        return station_forcing(winds, network, speed, steps, period, step, wind.remove)

    return forcer, notes, [wind.file[0], wind.stations]


def _invented(question: WindScenario) -> Forcer:
    """Forcing by patches and storms."""
    wind = question.wind
    events: list[Event] = [_patch(patch) for patch in wind.patches]
    events += [_storm(storm, wind.drag_law) for storm in wind.storms]
    start = min(event_start(event) for event in events)
    first = start if wind.start is None else _moment(wind.start)
    assert wind.end is not None  # Wind's rules hold
    last = _moment(wind.end)
    if last <= max(start, first):
        raise InputError(
            f"wind.end = {wind.end}: the response would end before the wind begins; give a later "
            "end"
        )
    shortest = min(float(seconds(np.asarray(event_end(e) - event_start(e)))) for e in events)
    step = min(shortest / 20.0, 0.25 * SECONDS_PER_DAY)
    if wind.step_hours is not None:
        step = wind.step_hours * 3600.0
    time = uniform_times(first, last, step)

    def forcer(network: Network, speed: Array, steps: Index) -> Forcing:
        samples = step_samples(network, speed, steps, 0.0)
        return event_forcing(events, samples, steps, time, step)

    return forcer


def _patch(patch: WindPatch) -> Patch:
    towards, heading = patch.towards_degrees, patch.heading_degrees
    return Patch(
        *patch.position, _moment(patch.start), patch.duration_days * SECONDS_PER_DAY,
        patch.length_km * 1e3, patch.width_km * 1e3, patch.stress_pa, towards, patch.speed_m_s,
        towards if heading is None else heading,
    )


def _storm(storm: WindStorm, law: str) -> Storm:
    lon, lat = (np.array([point[k] for point in storm.track], dtype=float) for k in (0, 1))
    time = np.array([_moment(point[2]) for point in storm.track])
    return Storm(lon, lat, time, storm.max_wind_m_s, storm.radius_km * 1e3, law)


def _require_cover(question: WindScenario, answers: dict[int, ModeResponse]) -> None:
    """Refuse a record on a grid that leaves out much of what lies upstream of a target."""
    if question.wind.stations is not None or question.wind.invented:
        return
    problems = [
        f"wind: the record covers {100 * answer.covered:.0f} % of what lies upstream of "
        f"{question.targets[i].name!r} in mode {number}; it has no wind along {_bare(answer)}; "
        "give one that covers this part of the guide"
        for number, found in answers.items()
        for i, answer in enumerate(found.targets)
        if answer.status == RESPONDS and answer.covered < LEAST_COVERED
    ]
    if problems:
        raise InputError(problems)


def _bare(answer: TargetResponse, most: int = 3) -> str:
    """The stretches without wind that count most, in words."""
    weight = np.array([stretch.weight for stretch in answer.stretches])
    lost = weight * (1.0 - answer.stretch_covered)
    rows = [k for k in np.argsort(-lost)[:most] if lost[k] > 0.0]
    return "; ".join(
        f"the {answer.stretches[k].kind} from {_place(answer.stretches[k].start)} to "
        f"{_place(answer.stretches[k].end)}"
        for k in rows
    )


def _place(position: tuple[float, float]) -> str:
    lon, lat = position
    return (
        f"{abs(lat):.1f}°{'N' if lat >= 0 else 'S'} {abs(lon):.1f}°{'E' if lon >= 0 else 'W'}"
    )


def _require_an_answer(question: WindScenario, answers: dict[int, ModeResponse]) -> None:
    """Refuse a scenario none of whose targets responds, with the reasons."""
    rows = [
        (question.targets[i].name, number, answer)
        for number, found in answers.items() for i, answer in enumerate(found.targets)
    ]
    if any(answer.status == RESPONDS for *_, answer in rows):
        return
    raise InputError(["no target responds in any mode:", *(
        f"{name!r}, mode {number}: {answer.status}"
        + (f", {answer.distance / 1e3:.0f} km from it" if np.isfinite(answer.distance) else "")
        for name, number, answer in rows
    )])


def _calm_parts(answers: dict[int, ModeResponse]) -> list[str]:
    """Where wind that counts is not known, each part once."""
    parts = [
        _bare(answer, 1) for found in answers.values() for answer in found.targets
        if answer.status == RESPONDS and answer.covered < COVERED_WIND
    ]
    return [f"no wind is known along {part}" for part in dict.fromkeys(parts) if part]
