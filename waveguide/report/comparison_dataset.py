"""What records say of theory, as one Dataset of declared variables."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.attributes import software_version
from waveguide.schema import CAUTION, Variable, assemble

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.compare.events import EventResult
    from waveguide.compare.pairs import PairResult
    from waveguide.compare.result import ComparisonResult

_ROW, _ROW_MODE = ("row",), ("row", "mode")
_PART, _PART_MODE = ("instrument",), ("instrument", "mode")


def _number(dims: tuple[str, ...], long_name: str, units: str) -> Variable:
    return Variable(dims, "number", long_name, units)


def _text(dims: tuple[str, ...], long_name: str) -> Variable:
    return Variable(dims, "text", long_name)


COMPARISON: dict[str, Variable] = {
    "mode": Variable(("mode",), "integer", "mode number", "1", None, True),
    "kind": _text(_ROW, "pair of records, or event and record"),
    "first": _text(_ROW, "upstream record, or the event"),
    "second": _text(_ROW, "downstream record"),
    "lag_days": _number(_ROW, "lag of the second behind the first", "day"),
    "lag_low_days": _number(_ROW, "lower end of the 95 % interval of the lag", "day"),
    "lag_high_days": _number(_ROW, "upper end of the 95 % interval of the lag", "day"),
    "correlation": _number(_ROW, "correlation at the lag", "1"),
    "chance": _number(_ROW, "probability of as high a correlation without a relation", "1"),
    "least_chance": _number(_ROW, "smallest chance that a record of this length can tell", "1"),
    "independent_blocks": _number(_ROW, "independent blocks in the record", "1"),
    "dominant_period_days": _number(_ROW, "dominant period in the band", "day"),
    "other_cycle_share": _number(_ROW, "share of draws on another cycle", "1"),
    "amplitude_ratio": _number(_ROW, "slope of the second on the first, SI units", "1"),
    "amplitude_ratio_low": _number(_ROW, "lower end of its 95 % interval", "1"),
    "amplitude_ratio_high": _number(_ROW, "upper end of its 95 % interval", "1"),
    "predicted_lag_days": _number(_ROW_MODE, "predicted lag in the middle of the band", "day"),
    "predicted_front_days": _number(_ROW_MODE, "predicted travel time of the front", "day"),
    "predicted_ratio": _number(_ROW_MODE, "predicted amplitude ratio, SI units", "1"),
    "verdict": _text(_ROW_MODE, "consistent, too early, too late or not resolvable"),
    "reason": _text(_ROW_MODE, "why"),
    "cautions": _text(_ROW_MODE, "where the theory of the route is out of its depth"),
    "instrument_name": _text(_PART, "record of a mooring"),
    "instrument_reference": _text(_PART, "record it is compared with"),
    "instrument_depth": _number(_PART, "depth of the instrument", "m"),
    "instrument_ratio": _number(_PART, "slope on the reference, SI units", "1"),
    "instrument_ratio_low": _number(_PART, "lower end of its 95 % interval", "1"),
    "instrument_ratio_high": _number(_PART, "upper end of its 95 % interval", "1"),
    "instrument_predicted_ratio": _number(_PART_MODE, "predicted ratio, SI units", "1"),
    "instrument_verdict": _text(
        _PART_MODE, "consistent, too weak, too strong, wrong sign or not resolvable"
    ),
    "mooring_explained": _number(
        _PART_MODE, "share of variance of the mooring that the mode explains", "1"
    ),
}
"""Rows of pairs and events, instruments of moorings; baroclinic structure has no mode 0."""


def comparison_dataset(result: ComparisonResult) -> xr.Dataset:
    """All numbers of a comparison.

    Parameters
    ----------
    result : ComparisonResult

    Returns
    -------
    xarray.Dataset
        As declared in `COMPARISON`.
    """
    modes = list(result.modes)
    rows = [_pair_row(pair) for pair in result.pairs]
    rows += [_event_row(result.event, e) for e in result.events]
    parts = _instruments(result, modes)
    values: dict[str, Any] = {"mode": modes}
    for name, variable in COMPARISON.items():
        if name == "mode":
            continue
        column = [row[name] for row in (rows if variable.dims[0] == "row" else parts)]
        shape = (len(column), len(modes)) if "mode" in variable.dims else (len(column),)
        values[name] = np.array(column).reshape(shape)
    return assemble(values, {
        "Conventions": "CF-1.11",
        "title": result.title,
        "scenario": result.name,
        "band_days": list(result.band),
        "ocean": result.ocean,
        "source": f"waveguide {software_version()}",
        "history": f"waveguide compare {result.name}",
        "caution": CAUTION,
    }, COMPARISON)


def _pair_row(pair: PairResult) -> dict[str, Any]:
    slope = pair.slope
    return {
        "kind": "pair", "first": pair.first.name, "second": pair.second.name,
        "amplitude_ratio": slope.slope, "amplitude_ratio_low": slope.low,
        "amplitude_ratio_high": slope.high, **_shared(pair),
    }


def _event_row(name: str, event: EventResult) -> dict[str, Any]:
    nan = float("nan")
    return {
        "kind": "event", "first": name, "second": event.series.name,
        "amplitude_ratio": nan, "amplitude_ratio_low": nan, "amplitude_ratio_high": nan,
        **_shared(event),
    }


def _shared(result: PairResult | EventResult) -> dict[str, Any]:
    estimate = result.estimate
    return {
        "lag_days": estimate.lag, "lag_low_days": estimate.low, "lag_high_days": estimate.high,
        "correlation": estimate.correlation, "chance": result.chance,
        "least_chance": result.least_chance,
        "independent_blocks": estimate.blocks, "dominant_period_days": estimate.period,
        "other_cycle_share": estimate.other_cycle,
        "predicted_lag_days": [p.lag for p in result.predictions],
        "predicted_front_days": [p.front for p in result.predictions],
        "predicted_ratio": [p.ratio for p in result.predictions],
        "verdict": [v.word for v in result.verdicts],
        "reason": [v.reason for v in result.verdicts],
        "cautions": ["; ".join(c.text for c in p.cautions) for p in result.predictions],
    }


def _instruments(result: ComparisonResult, modes: Sequence[int]) -> list[dict[str, Any]]:
    """One row for each instrument beside the reference; modes without structure are NaN."""
    rows = []
    for mooring in result.moorings:
        at = [list(mooring.modes).index(m) if m in mooring.modes else -1 for m in modes]
        for part in mooring.instruments:
            rows.append({
                "instrument_name": part.series.name,
                "instrument_reference": mooring.reference,
                "instrument_depth": part.series.depth,
                "instrument_ratio": part.slope.slope,
                "instrument_ratio_low": part.slope.low,
                "instrument_ratio_high": part.slope.high,
                "instrument_predicted_ratio": [
                    float(part.predicted[i]) if i >= 0 else np.nan for i in at
                ],
                "instrument_verdict": [part.words[i] if i >= 0 else "" for i in at],
                "mooring_explained": [
                    float(mooring.explained[i]) if i >= 0 else np.nan for i in at
                ],
            })
    return rows
