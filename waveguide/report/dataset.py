"""Arrivals in the form in which they are saved, printed and drawn."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.constants import SECONDS_PER_DAY
from waveguide.propagation.answers import ModeAnswer
from waveguide.propagation.arrivals import REACHED, Arrival
from waveguide.propagation.cautions import Caution, by_seriousness, mixed_cautions, rise_cautions
from waveguide.propagation.frequency_limits import Criticality
from waveguide.propagation.legs import Leg
from waveguide.propagation.routes import Route
from waveguide.propagation.step_response import FATES
from waveguide.propagation.transfer import LegBudget
from waveguide.propagation.waveform import ArrivalTimes, arrival_times, mode_shares
from waveguide.report.instruments import instrument_columns
from waveguide.report.remarks import caution_words, remark_rows, validity_values
from waveguide.report.sums import farthest
from waveguide.schema import ARRIVALS, arranged, check
from waveguide.stored import Arrays

if TYPE_CHECKING:
    from waveguide.propagation.moorings import MooringAnswer
    from waveguide.scenario import Scenario


def arrivals_arrays(
    scenario: Scenario, answers: Mapping[int, ModeAnswer], attributes: Mapping[str, Any],
    moorings: Mapping[tuple[int, int], MooringAnswer],
) -> Arrays:
    """Put arrivals into arrays that follow the schema.

    Parameters
    ----------
    scenario : Scenario
    answers : mapping of mode to ModeAnswer
        With one arrival for each target of the scenario.
    attributes : mapping
        Global attributes.
    moorings : mapping of (target, mode) to MooringAnswer
        By index along both, for targets that are moorings.

    Returns
    -------
    Arrays
        See :data:`waveguide.schema.ARRIVALS`.
    """
    modes = list(answers)
    values: dict[str, Any] = {name: [] for name in ARRIVALS}
    values["target"] = [target.name for target in scenario.targets]
    values["mode"] = modes
    values["target_longitude"] = [target.position[0] for target in scenario.targets]
    values["target_latitude"] = [target.position[1] for target in scenario.targets]
    rows: dict[str, list[Any]] = {
        name: [] for name, variable in ARRIVALS.items() if variable.dims == ("target", "mode")
    }
    for target in range(len(scenario.targets)):
        for column, mode in enumerate(modes):
            answer = answers[mode]
            arrival = answer.arrivals[target]
            row = _row(scenario, arrival) | _wave_row(answer, target, scenario.event.amplitude_m)
            cautions = _cautions(answer, target)
            row["caution"] = caution_words(cautions)
            for remark in remark_rows(target, column, cautions):
                _append(values, remark)
            for name, value in row.items():
                rows[name].append(value)
            for rank, route in enumerate(arrival.routes):
                _add_route(values, target, column, arrival, rank, route)
                values["vertex_taken"].extend(answer.vertex_taken[target][rank].tolist())
                _add_budgets(
                    values, arrival.legs[rank], answer.budgets[target][rank],
                    answer.criticality[target][rank],
                )
    shape = (len(scenario.targets), len(modes))
    values.update({name: np.array(row).reshape(shape) for name, row in rows.items()})
    start = np.datetime64(scenario.event.start.replace(tzinfo=None), "ns")
    values.update(_waveforms(list(answers.values()), start))
    guide = values["peak_ratio"] / values["target_factor"]
    depths = [target.depth_m for target in scenario.targets]
    values.update(instrument_columns(moorings, depths, guide))
    values["fate_name"] = FATES
    values["vertex_taken"] = np.reshape(values["vertex_taken"], (-1, len(FATES)))
    arrays = arranged(values, attributes)
    check(arrays)
    return arrays


def _row(scenario: Scenario, arrival: Arrival) -> dict[str, Any]:
    """The variables of one target and mode."""
    nan = float("nan")
    row: dict[str, Any] = {
        "status": arrival.status,
        "front_time_days": nan,
        "front_date": np.datetime64("NaT", "ns"),
        "amplitude_ratio": nan,
        "amplitude_m": nan,
        "path_length_km": nan,
        "mean_speed_m_s": nan,
        "source_distance_km": arrival.source.nearest / 1e3,
        "source_distance_radii": arrival.source.nearest_radii,
        "source_factor": nan,
        "target_distance_km": arrival.target.nearest / 1e3,
        "target_distance_radii": arrival.target.nearest_radii,
        "target_factor": nan,
        **validity_values(arrival.validity),
    }
    for name in ("source", "target"):
        for unit in ("km", "radii"):
            key = f"{name}_distance_{unit}"
            row[key] = row[key] if np.isfinite(row[key]) else nan
    if arrival.status == REACHED:
        row.update(_reached(scenario, arrival))
    return row


def _wave_row(answer: ModeAnswer, target: int, height: float | None) -> dict[str, float]:
    """Times of the waveform (days from the start of the event) and the ratio of peaks, signed."""
    times: ArrivalTimes = answer.times[target]
    level, source = answer.waveforms.sea_level[target], answer.waveforms.source
    reached = answer.arrivals[target].status == REACHED
    peak = farthest(level) / farthest(source) if reached else float("nan")
    return {
        "half_height_time_days": times.half_height / SECONDS_PER_DAY,
        "peak_time_days": times.peak / SECONDS_PER_DAY,
        "centroid_time_days": times.centroid / SECONDS_PER_DAY,
        "peak_ratio": peak,
        "amplitude_m": float("nan") if height is None else peak * height,
    }


def _cautions(answer: ModeAnswer, target: int) -> list[Caution]:
    """Cautions of the route and of the waveform of one target, the most serious first."""
    arrival = answer.arrivals[target]
    if arrival.status != REACHED:
        return arrival.cautions
    waves, front = answer.waveforms, arrival.routes[0].time
    source = arrival_times(waves.time, waves.source).half_height
    return by_seriousness([
        *arrival.cautions, *rise_cautions(front, answer.times[target].half_height, source),
        *mixed_cautions(arrival.legs[0], waves.omega, waves.power),
    ])


def _waveforms(answers: list[ModeAnswer], start: np.datetime64) -> dict[str, Any]:
    """Waveforms of all modes on their common time axis, and their sum.

    Modes share the sea level at the source as wind of long duration would raise them.
    """
    waves = [answer.waveforms for answer in answers]
    top = float(np.abs(waves[0].source).max())
    level = np.stack([wave.sea_level for wave in waves], axis=1) / top
    share = mode_shares([_value_at_source(answer) for answer in answers])
    return {
        "time": start + (waves[0].time * 1e9).astype("timedelta64[ns]"),
        "time_days": waves[0].time / SECONDS_PER_DAY,
        "source_waveform": waves[0].source / top,
        "waveform": level,
        "waveform_sum": np.einsum("m,jmt->jt", share, level),
        "mode_share": share,
    }


def _value_at_source(answer: ModeAnswer) -> float:
    """F(0,0) where the source is tied to the guide, 0 where it is not."""
    node = answer.arrivals[0].source.node
    return float(answer.mode.coastal_value[node[0]]) if node.size else 0.0


def _add_budgets(
    values: dict[str, Any], legs: list[Leg], budget: LegBudget, criticality: list[Criticality]
) -> None:
    """Append the energy budget of the legs of one route; attachments take nothing."""
    guided, run, before = 0, 0, 1.0
    for leg in legs:
        taken, critical = np.zeros(len(FATES)), Criticality(np.nan, np.nan, 0.0)
        if leg.kind != "attachment":
            taken, before = budget.taken[guided], float(budget.arrives[guided])
            guided += 1
        if leg.step_count:
            critical = criticality[run]
            run += 1
        _append(values, {
            "leg_energy_share": before,
            "leg_lost_rossby": taken[0],
            "leg_lost_friction": taken[1],
            "leg_lost_damping": taken[2],
            "leg_lost_scattering": taken[3],
            "leg_other_ways": taken[4],
            "leg_critical_period_days": critical.typical / SECONDS_PER_DAY,
            "leg_quasi_simultaneous": int(critical.quasi_simultaneous),
        })


def _reached(scenario: Scenario, arrival: Arrival) -> dict[str, Any]:
    """What a row has where the target is reached."""
    route, source, target = arrival.routes[0], arrival.source, arrival.target
    length = sum(float(leg.distance[-1]) for leg in arrival.legs[0] if leg.kind != "attachment")
    start = np.datetime64(scenario.event.start.replace(tzinfo=None), "ns")
    return {
        "front_time_days": route.time / SECONDS_PER_DAY,
        "front_date": start + np.timedelta64(round(route.time * 1e9), "ns"),
        "amplitude_ratio": route.amplitude,
        "path_length_km": length / 1e3,
        "mean_speed_m_s": length / route.time if route.time > 0.0 else float("nan"),
        "source_distance_km": source.distance[route.start] / 1e3,
        "source_distance_radii": source.radii[route.start],
        "source_factor": source.factor[route.start],
        "target_distance_km": target.distance[route.end] / 1e3,
        "target_distance_radii": target.radii[route.end],
        "target_factor": target.factor[route.end],
    }


def _add_route(
    values: dict[str, Any], target: int, column: int, arrival: Arrival, rank: int, route: Route
) -> None:
    """Append one route with its legs and vertices."""
    legs = arrival.legs[rank]
    index = len(values["route_target"])
    guided = sum(float(leg.distance[-1]) for leg in legs if leg.kind != "attachment")
    _append(values, {
        "route_target": target,
        "route_mode": column,
        "route_kind": _route_kind(arrival.routes, rank),
        "route_via": _via(legs),
        "route_front_time_days": route.time / SECONDS_PER_DAY,
        "route_amplitude_ratio": route.amplitude,
        "route_length_km": guided / 1e3,
    })
    time = distance = 0.0
    for leg in legs:
        _add_leg(values, index, leg, time, distance)
        time += float(leg.time[-1])
        if leg.kind != "attachment":
            distance += float(leg.distance[-1])


def _add_leg(
    values: dict[str, Any], route: int, leg: Leg, time: float, distance: float
) -> None:
    """Append one leg and its vertices; `time` (s) and `distance` (m) are those at its start."""
    index = len(values["leg_route"])
    duration, length = float(leg.time[-1]), float(leg.distance[-1])
    _append(values, {
        "leg_route": route,
        "leg_kind": leg.kind,
        "leg_from_longitude": leg.lon[0],
        "leg_from_latitude": leg.lat[0],
        "leg_to_longitude": leg.lon[-1],
        "leg_to_latitude": leg.lat[-1],
        "leg_length_km": length / 1e3,
        "leg_time_days": duration / SECONDS_PER_DAY,
        "leg_phase_speed_m_s": length / duration if duration > 0.0 else float("nan"),
        "leg_amplitude_factor": leg.amplitude,
    })
    along = 0.0 if leg.kind == "attachment" else leg.distance
    for name, vertex in (
        ("vertex_leg", np.full(leg.lon.size, index)),
        ("vertex_longitude", leg.lon),
        ("vertex_latitude", leg.lat),
        ("vertex_distance_km", (distance + along + np.zeros(leg.lon.size)) / 1e3),
        ("vertex_time_days", (time + leg.time) / SECONDS_PER_DAY),
    ):
        values[name].extend(vertex.tolist())


def _append(values: dict[str, Any], row: Mapping[str, Any]) -> None:
    for name, value in row.items():
        values[name].append(value)


def _route_kind(routes: list[Route], rank: int) -> str:
    """Earliest, strongest or alternative; one that is both is called the earliest."""
    if rank == 0:
        return "earliest"
    strongest = max(route.amplitude for route in routes)
    return "strongest" if routes[rank].amplitude == strongest else "alternative"


def _via(legs: list[Leg]) -> str:
    """What tells a route from others: its gaps by position, else the kinds of guide."""
    gaps = [
        f"{leg.kind} at {_place(leg)}"
        for leg in legs
        if leg.kind in ("strait", "facing coast", "opening")
    ]
    if gaps:
        return ", ".join(gaps)
    kinds = dict.fromkeys(leg.kind for leg in legs if leg.kind != "attachment")
    return " and ".join(kinds)


def _place(leg: Leg) -> str:
    lon, lat = float(leg.lon[0]), float(leg.lat[0])
    return (
        f"{abs(lat):.1f}°{'N' if lat >= 0 else 'S'} {abs(lon):.1f}°{'E' if lon >= 0 else 'W'}"
    )
