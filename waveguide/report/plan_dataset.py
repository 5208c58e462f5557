"""A plan of observations as one Dataset of declared variables."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.constants import SECONDS_PER_DAY
from waveguide.modes.visibility import NOISE, QUANTITIES, clarity
from waveguide.propagation.priors import INPUTS
from waveguide.schema import ARRIVALS, REMARKS, VALIDITY, Variable, assemble

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.propagation.row_plan import RowPlan
    from waveguide.scenario import Scenario

PERCENT = (10, 50, 90)

_ROW = ("target", "mode")
_SPREAD = (*_ROW, "percentile")
_INPUT = (*_ROW, "input")
_MEASURED = (*_ROW, "quantity")
_SHARED = (*VALIDITY, *REMARKS)  # with the arrivals


def _number(dims: tuple[str, ...], long_name: str, units: str) -> Variable:
    return Variable(dims, "number", long_name, units)


PLAN: dict[str, Variable] = {
    "target": Variable(("target",), "text", "name of the target", coordinate=True),
    "mode": Variable(
        ("mode",), "integer", "mode number, 0 barotropic, 1 and up baroclinic", "1", None, True
    ),
    "percentile": Variable(("percentile",), "integer", "percentile", "percent", None, True),
    "input": Variable(("input",), "text", "what the prediction depends on", coordinate=True),
    "quantity": Variable(("quantity",), "text", "what can be measured", coordinate=True),
    "status": Variable(_ROW, "text", "reached, or why there is no arrival"),
    "look_from_date": Variable(_ROW, "date", "when to start looking (UTC)", None, "time"),
    "look_until_date": Variable(_ROW, "date", "when to stop looking (UTC)", None, "time"),
    "look_from_days": _number(_ROW, "time from the event's start to the start of looking", "day"),
    "look_until_days": _number(_ROW, "time from the event's start to the end of looking", "day"),
    "front_days": _number(_SPREAD, "time from the start of the event to the front", "day"),
    "half_height_days": _number(
        _SPREAD, "time from the start of the event until sea level reaches half of its peak", "day"
    ),
    "peak_days": _number(_SPREAD, "time from the start of the event to the peak", "day"),
    "sampling_error_days": _number(
        _ROW, "largest standard error of these percentiles for the size of the ensemble", "day"
    ),
    "duration_days": _number(_SPREAD, "time that sea level stays above half of its peak", "day"),
    "peak_ratio": _number(_SPREAD, "peak of sea level over that at the source", "1"),
    "peak_m": _number(_SPREAD, "peak of sea level", "m"),
    "chance_above_threshold": _number(_ROW, "chance of a peak above the threshold", "1"),
    "longest_gap_days": _number(
        _ROW, "gap between samples that one signal in ten would fit into unseen", "day"
    ),
    "longest_gap_km": _number(_ROW, "way that the signal goes in that time", "km"),
    "reach_km": _number(_ROW, "trapping scale: reach of the signal off the guide", "km"),
    "time_share": _number(_INPUT, "share of the variance of the half-height time", "1"),
    "height_share": _number(_INPUT, "share of the variance of the logarithm of the peak", "1"),
    "measure_depth_m": _number(_MEASURED, "depth where the mode stands out most", "m"),
    "measure_offshore_km": _number(
        _MEASURED, "distance from the shore there; 0 where the bottom is taken as flat", "km"
    ),
    "measure_per_metre": _number(
        _MEASURED, "signal there per metre of sea level (SI units, upward and downstream)", "1"
    ),
    "measure_clarity": _number(
        _MEASURED, "signal over noise for the median peak, or for 1 cm if that is unknown", "1"
    ),
    "measure_first": Variable(_ROW, "text", "quantity that stands out most"),
    **{name: ARRIVALS[name] for name in _SHARED},
}
"""Rows of targets and modes; what is not reached has missing numbers."""


def plan_dataset(
    scenario: Scenario, arrivals: xr.Dataset, rows: Mapping[tuple[int, int], RowPlan], members: int
) -> xr.Dataset:
    """All numbers of a plan.

    Parameters
    ----------
    scenario : Scenario
    arrivals : xarray.Dataset
        Of the scenario, without errors.
    rows : mapping
        What the ensemble says of each (target, mode) that is reached.
    members : int
        Size of the ensemble.

    Returns
    -------
    xarray.Dataset
        As declared in `PLAN`.
    """
    modes = [int(mode) for mode in arrivals["mode"].values]
    values: dict[str, Any] = {
        "target": arrivals["target"].values, "mode": modes, "percentile": PERCENT,
        "input": INPUTS, "quantity": QUANTITIES, "status": arrivals["status"].values,
        **{name: arrivals[name].values for name in _SHARED},
    }  # fmt: skip
    lines = [
        [_row(scenario, rows.get((target, mode))) for mode in modes]
        for target in range(arrivals.sizes["target"])
    ]
    for name in PLAN.keys() - values.keys():
        values[name] = [[row[name] for row in line] for line in lines]
    return assemble(values, _attributes(scenario, arrivals, members), PLAN)


def _attributes(scenario: Scenario, arrivals: xr.Dataset, members: int) -> dict[str, Any]:
    kept = dict(arrivals.attrs)
    wanted = scenario.uncertainty
    errors = {k: v for k, v in wanted.model_dump().items() if k not in ("members", "seed")}
    return kept | {
        "history": f"waveguide plan {scenario.name}",
        "chance_percent": scenario.plan.chance_percent,
        "threshold_m": scenario.plan.threshold_m,
        "members": members,
        "start_error_days": wanted.start_days,
        "seed": str(wanted.seed),
        "standard_deviations": "; ".join(f"{key} {value:g}" for key, value in errors.items()),
        "noise": "; ".join(f"{q} {n:g}" for q, n in zip(QUANTITIES, NOISE, strict=True)),
    }


def _row(scenario: Scenario, row: RowPlan | None) -> dict[str, Any]:
    """The variables of one target and mode."""
    nan, date = float("nan"), np.datetime64("NaT", "ns")
    if row is None:
        sizes = {"percentile": len(PERCENT), "input": len(INPUTS), "quantity": len(QUANTITIES)}
        empty: dict[str, Any] = {
            name: [nan] * sizes[variable.dims[-1]] if len(variable.dims) == 3 else nan
            for name, variable in PLAN.items()
        }
        return empty | {"look_from_date": date, "look_until_date": date, "measure_first": ""}
    start = np.datetime64(scenario.event.start.replace(tzinfo=None), "ns")
    times = (row.front, row.half_height, row.peak)
    gap = float(row.width.value[0])
    amplitude = scenario.event.amplitude_m
    return {
        "look_from_date": start + np.timedelta64(round(row.window[0] * 1e9), "ns"),
        "look_until_date": start + np.timedelta64(round(row.window[1] * 1e9), "ns"),
        "look_from_days": row.window[0] / SECONDS_PER_DAY,
        "look_until_days": row.window[1] / SECONDS_PER_DAY,
        "front_days": row.front.value / SECONDS_PER_DAY,
        "half_height_days": row.half_height.value / SECONDS_PER_DAY,
        "peak_days": row.peak.value / SECONDS_PER_DAY,
        "sampling_error_days": max(float(np.nanmax(t.error, initial=0.0)) for t in times)
        / SECONDS_PER_DAY,
        "duration_days": row.width.value / SECONDS_PER_DAY,
        "peak_ratio": row.ratio,
        "peak_m": row.height * (nan if amplitude is None else amplitude),
        "chance_above_threshold": row.above,
        "longest_gap_days": gap / SECONDS_PER_DAY,
        "longest_gap_km": gap * row.speed / 1e3,
        "reach_km": row.reach / 1e3,
        "time_share": row.time_shares,
        "height_share": row.height_shares,
        **_measured(row, amplitude),
    }


def _measured(row: RowPlan, amplitude: float | None) -> dict[str, Any]:
    nothing = np.full(len(QUANTITIES), np.nan)
    if row.view is None:
        return {
            "measure_depth_m": nothing, "measure_offshore_km": nothing,
            "measure_per_metre": nothing, "measure_clarity": nothing,
            "measure_first": QUANTITIES[0],
        }  # fmt: skip
    height = 0.01 if amplitude is None else amplitude * float(row.height[1])
    clear = clarity(row.view, height)
    return {
        "measure_depth_m": row.view.depth,
        "measure_offshore_km": row.view.offshore / 1e3,
        "measure_per_metre": row.view.per_metre,
        "measure_clarity": clear,
        "measure_first": QUANTITIES[int(np.argmax(clear))],
    }
