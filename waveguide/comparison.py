"""From a scenario with records to what they say of the theory."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from datetime import UTC, datetime
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from waveguide.compare.columns import column_modes
from waveguide.compare.events import EventResult, compare_event
from waveguide.compare.moorings import (
    MooringResult,
    compare_mooring,
    gradient_from_n2,
    responses,
)
from waveguide.compare.pairs import Prediction, compare_pair
from waveguide.compare.reading import Record, read_series
from waveguide.compare.result import ComparisonResult
from waveguide.compare.series import Series
from waveguide.constants import SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.geodesy import geodesic_length
from waveguide.pipeline import dominant_frequency, mode_conditions, mode_guide, target_arrivals
from waveguide.propagation.arrivals import REACHED
from waveguide.propagation.cautions import FAINT
from waveguide.propagation.transfer import paths_of_arrival, route_transfers
from waveguide.scenario import Comparison, Event, Observation, Scenario, Target, Waves

Array = NDArray[np.float64]
Progress = Callable[[str], None]
Position = tuple[float, float]

ONE_PLACE = 5e3
"""Records within this distance of each other belong to one mooring (m)."""

FREQUENCIES = 256
"""Of the transfer function, from zero to the middle of the band, to count the turns of phase."""

ANY_DAY = datetime(2031, 1, 1, tzinfo=UTC)
"""Stands for the start of a pair's event: lags do not depend on it."""


def comparison(question: Comparison, progress: Progress | None = None) -> ComparisonResult:
    """Confront the records of a scenario with theory.

    Parameters
    ----------
    question : Comparison
    progress : callable, optional
        Told the name of each stage as it begins.

    Returns
    -------
    ComparisonResult

    Raises
    ------
    InputError
        If a record cannot be used, with every such record.
    """
    say = progress or (lambda stage: None)
    say("reading records")
    records = dict(zip(
        (o.name for o in question.observations), read_all(question.observations), strict=True
    ))
    places = {o.name: o for o in question.observations}
    pairs = []
    for first, second in pairs_of(question):
        say(f"{first} to {second}")
        told = predictions(question, places[first].position, [places[second]], places[first])[0]
        pairs.append(compare_pair(
            records[first], records[second], question.compare.band_days, told,
            question.compare.longest_lag_days,
        ))
    events = [] if question.event is None else _events(question, records, say)
    moorings = [_mooring(question, group, records) for group in mooring_groups(question)]
    name = question.event.name if question.event else None
    return ComparisonResult(
        question.name, question.title, question.ocean.source, name or "event",
        question.compare.band_days, question.waves.modes, tuple(pairs), tuple(events),
        tuple(moorings),
    )


def read_all(observations: Sequence[Observation]) -> list[Series]:
    """All records, or one error with what is wrong with each."""
    found, problems = [], []
    for o in observations:
        try:
            found.append(read_series(Record(
                o.name, o.position, o.file, o.quantity, o.units, o.column, o.depth_m, o.zone,
                o.fill, o.pressure_column,
            )))
        except InputError as error:
            problems += error.problems
    if problems:
        raise InputError(problems)
    return found


def pairs_of(question: Comparison) -> list[tuple[str, str]]:
    """The pairs asked for, or each record and the next at another place."""
    if question.compare.pairs:
        return list(question.compare.pairs)
    heads = [group[0] for group in place_groups(question.observations)]
    return [(first.name, second.name) for first, second in pairwise(heads)]


def place_groups(observations: Sequence[Observation]) -> list[list[Observation]]:
    """Observations by place, in the order of the file."""
    groups: list[list[Observation]] = []
    for o in observations:
        for group in groups:
            if geodesic_length(*group[0].position, *o.position) <= ONE_PLACE:
                group.append(o)
                break
        else:
            groups.append([o])
    return groups


def mooring_groups(question: Comparison) -> list[list[Observation]]:
    """Places with two records or more."""
    return [group for group in place_groups(question.observations) if len(group) > 1]


def predictions(
    question: Comparison, source: Position, targets: Sequence[Observation],
    upstream: Observation | None = None,
) -> list[list[Prediction]]:
    """What theory says of every target and mode, in the middle of the band.

    Parameters
    ----------
    question : Comparison
    source : (lon, lat)
        Degrees.
    targets : sequence of Observation
    upstream : Observation, optional
        The record at the source; None where the source is an event, measured in sea level.

    Returns
    -------
    list of list of Prediction
        For each target one prediction of each mode.
    """
    short, long = question.compare.band_days
    scenario = _pair_scenario(question, source, targets, float(np.sqrt(short * long)))
    omega = np.linspace(0.0, dominant_frequency(scenario), FREQUENCIES + 1)[1:]
    told: list[list[Prediction]] = [[] for _ in targets]
    for mode in question.waves.modes:
        network, carried = mode_guide(scenario, mode, lambda stage: None)
        conditions = mode_conditions(scenario, network, carried)
        for row, arrival in enumerate(target_arrivals(scenario, network, carried)):
            if arrival.status != REACHED:
                told[row].append(_none(mode, arrival.status))
                continue
            if arrival.routes[0].amplitude < FAINT:
                told[row].append(_none(mode, "no route that leaves more than a trace"))
                continue
            path = paths_of_arrival(arrival)[:1]
            transfer = route_transfers(network, carried, path, omega, conditions)[0]
            phase = np.unwrap(np.angle(transfer.response), discont=np.pi)
            factor = _factor(targets[row], mode) / (_factor(upstream, mode) if upstream else 1.0)
            told[row].append(Prediction(
                mode, arrival.status, float(phase[-1] / omega[-1] / SECONDS_PER_DAY),
                transfer.front_time / SECONDS_PER_DAY,
                float(np.abs(transfer.response[-1])) * factor, tuple(arrival.cautions),
            ))
    return told


def _none(mode: int, status: str) -> Prediction:
    nan = float("nan")
    return Prediction(mode, status, nan, nan, nan)


def _pair_scenario(
    question: Comparison, source: Position, targets: Sequence[Observation], period: float
) -> Scenario:
    """A scenario whose event lies at the source and whose targets are records."""
    start = question.event.start if question.event else ANY_DAY
    names = [Target(name=o.name, position=o.position) for o in targets]
    waves = Waves(**{**question.waves.model_dump(), "period_days": period})
    return Scenario(
        name=question.name, title=question.title, waves=waves, ocean=question.ocean,
        event=Event(position=source, start=start, duration_days=1.0), targets=tuple(names),
    )


def _events(
    question: Comparison, records: dict[str, Series], say: Progress
) -> list[EventResult]:
    """The event in every record."""
    event = question.event
    assert event is not None
    say("predicting the event at every record")
    told = predictions(question, event.centre, question.observations)
    sign = -1.0 if (event.amplitude_m or 1.0) < 0.0 else 1.0
    start = np.datetime64(event.start.replace(tzinfo=None), "s")
    found = []
    for o, prediction in zip(question.observations, told, strict=True):
        say(f"the event at {o.name}")
        found.append(compare_event(
            records[o.name], question.compare.band_days, start, event.duration_days, prediction,
            sign, question.compare.longest_lag_days,
        ))
    return found


def _mooring(
    question: Comparison, group: Sequence[Observation], records: dict[str, Series]
) -> MooringResult:
    """Measured and predicted structure at one place."""
    modes = np.array([m for m in question.waves.modes if m > 0] or [0])
    rows = np.array([[_factor(o, int(mode)) for mode in modes] for o in group])
    return compare_mooring(
        [records[o.name] for o in group], rows, modes, question.compare.band_days
    )


def _factor(observation: Observation, mode: int) -> float:
    """What a record measures per metre of sea level in a mode."""
    if observation.quantity in ("sea level", "dynamic height"):
        return 1.0
    modes, n2 = column_modes(*observation.position)
    gradient = observation.gradient_c_per_m
    if gradient is None:
        gradient = gradient_from_n2(float(np.interp(observation.depth_m, *n2)))
    row = responses(observation.quantity, observation.depth_m, modes, gradient)
    return float(row[list(modes.mode).index(mode)])
