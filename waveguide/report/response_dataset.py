"""A forced response as one Dataset of declared variables, and where it came from."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import SECONDS_PER_DAY
from waveguide.forcing.answers import RESPONDS, TargetResponse
from waveguide.report.remarks import caution_words, remark_rows, validity_values
from waveguide.schema import ARRIVALS, REMARKS, VALIDITY, Variable, assemble

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.forcing.result import ResponseResult

Array = NDArray[np.float64]

MOST_STRETCHES = 24
"""Stretches of coast told for each target and mode; what is left is told as one."""

_ROW, _SERIES, _SUM = ("target", "mode"), ("target", "mode", "time"), ("target", "time")
_PART, _PART_SERIES = ("stretch",), ("stretch", "time")


def _number(dims: tuple[str, ...], long_name: str, units: str) -> Variable:
    return Variable(dims, "number", long_name, units)


def _place(what: str, axis: str) -> Variable:
    units = "degrees_east" if axis == "longitude" else "degrees_north"
    return Variable(_PART, "number", f"{axis} of the {what} of the stretch", units, axis)


RESPONSE: dict[str, Variable] = {
    "target": Variable(("target",), "text", "name of the target", coordinate=True),
    "mode": Variable(
        ("mode",), "integer", "mode number, 0 barotropic, 1 and up baroclinic", "1", None, True
    ),
    "time": Variable(("time",), "date", "time (UTC)", None, "time", True),
    "target_longitude": Variable(
        ("target",), "number", "longitude of the target", "degrees_east", "longitude", True
    ),
    "target_latitude": Variable(
        ("target",), "number", "latitude of the target", "degrees_north", "latitude", True
    ),
    "status": Variable(_ROW, "text", "responds, or why there is no response"),
    "sea_level": _number(_SERIES, "sea level driven by the wind in the mode", "m"),
    "total_sea_level": _number(_SUM, "sea level driven by the wind, sum of the modes", "m"),
    "dynamic_height": _number(
        _SUM, "dynamic height 0/500 m over g, sum of the baroclinic modes, on the equator", "m"
    ),
    "thermocline_deepening": _number(
        _SUM, "deepening of the thermocline, sum of the baroclinic modes, on the equator", "m"
    ),
    "standard_deviation": _number(_ROW, "standard deviation after spin-up", "m"),
    "peak": _number(_ROW, "sea level farthest from zero after spin-up", "m"),
    "peak_date": Variable(_ROW, "date", "its date (UTC)", None, "time"),
    "total_standard_deviation": _number(
        ("target",), "standard deviation of the sum after spin-up", "m"
    ),
    "total_peak": _number(("target",), "sum of the modes farthest from zero after spin-up", "m"),
    "total_peak_date": Variable(("target",), "date", "its date (UTC)", None, "time"),
    "spin_up_days": _number(_ROW, "delay within which 95 % of the influence lies", "day"),
    "wind_covered": _number(_ROW, "share of the influence that the wind record covers", "1"),
    "target_distance_km": _number(_ROW, "distance from the target to the guide", "km"),
    "target_factor": _number(_ROW, "amplitude factor for that distance", "1"),
    **{name: ARRIVALS[name] for name in (*VALIDITY, *REMARKS)},
    "stretch_target": Variable(_PART, "integer", "index of the target"),
    "stretch_mode": Variable(_PART, "integer", "index of the mode along mode"),
    "stretch_kind": Variable(_PART, "text", "coast, equator or elsewhere"),
    "stretch_from_longitude": _place("start", "longitude"),
    "stretch_from_latitude": _place("start", "latitude"),
    "stretch_to_longitude": _place("end", "longitude"),
    "stretch_to_latitude": _place("end", "latitude"),
    "stretch_distance_km": _number(_PART, "way from the end of the stretch to the target", "km"),
    "stretch_first_delay_days": _number(_PART, "time from its end to the target", "day"),
    "stretch_last_delay_days": _number(_PART, "time from its start to the target", "day"),
    "stretch_weight": _number(_PART, "sea level per uniform stress along the stretch", "m Pa-1"),
    "stretch_standard_deviation": _number(_PART, "of its part, after spin-up", "m"),
    "stretch_at_peak": _number(_PART, "its part of the sum's peak at the target", "m"),
    "stretch_wind_start": Variable(
        _PART, "date", "first date of the wind behind that part (UTC)", None, "time"
    ),
    "stretch_wind_end": Variable(
        _PART, "date", "last date of the wind behind that part (UTC)", None, "time"
    ),
    "stretch_sea_level": _number(_PART_SERIES, "part of the mode's sea level", "m"),
}
"""Rows of targets and modes, their series, and the stretches upstream, nearest first.

A stretch belongs to one target and mode; the parts of all stretches sum to the mode's sea level.
"""


@dataclass(frozen=True)
class _Peaks:
    """Where each target's sum is farthest from zero, and where spin-up ends."""

    first: int
    at: int


def response_dataset(result: ResponseResult) -> xr.Dataset:
    """All numbers of a response but those of the way along the guide.

    Parameters
    ----------
    result : ResponseResult

    Returns
    -------
    xarray.Dataset
        As declared in `RESPONSE`.
    """
    targets, modes = range(len(result.target)), result.modes
    totals = np.array([result.total(i) for i in targets])
    peaks = [_peaks(result, i, totals[i]) for i in targets]
    values: dict[str, Any] = {
        "target": result.target, "mode": modes, "time": result.time,
        "target_longitude": result.lon, "target_latitude": result.lat,
        "total_sea_level": totals, **_moorings(result),
        "total_standard_deviation": [
            totals[i, p.first :].std() for i, p in zip(targets, peaks, strict=True)
        ],
        "total_peak": [totals[i, p.at] for i, p in zip(targets, peaks, strict=True)],
        "total_peak_date": [
            result.time[p.at] if np.isfinite(totals[i, p.at]) else np.datetime64("NaT", "ns")
            for i, p in zip(targets, peaks, strict=True)
        ],
    }  # fmt: skip
    rows = [_row(result, i, mode, peaks[i]) for i in targets for mode in modes]
    shape = (len(result.target), len(modes))
    for name in rows[0]:
        column = np.array([row[name] for row in rows])
        values[name] = column.reshape(*shape, *column.shape[1:])
    parts = [
        part for i in targets for k, mode in enumerate(modes)
        for part in _stretches(result, i, k, mode, peaks[i])
    ]
    remarks = [
        remark for i in targets for k, mode in enumerate(modes)
        for remark in remark_rows(i, k, result.cautions.get((i, mode), ()))
    ]
    for name, variable in RESPONSE.items():
        if variable.dims[0] in ("stretch", "remark"):
            listed = parts if variable.dims[0] == "stretch" else remarks
            values[name] = [one[name] for one in listed]
    return assemble(values, _attributes(result), RESPONSE)


def _attributes(result: ResponseResult) -> dict[str, Any]:
    return {**result.attributes, "notes": "; ".join(result.notes)}


def _peaks(result: ResponseResult, target: int, total: Array) -> _Peaks:
    first = result.spun_up(target)
    if not np.isfinite(total).any():
        return _Peaks(first, 0)
    return _Peaks(first, first + int(np.argmax(np.abs(total[first:]))))


def _moorings(result: ResponseResult) -> dict[str, Array]:
    """Dynamic height and thermocline of the targets on the equator, NaN elsewhere."""
    names = {"dynamic_height": 0, "thermocline_deepening": 1}
    series = {name: np.full((len(result.target), result.time.size), np.nan) for name in names}
    for target in range(len(result.target)):
        modes = [mode for i, mode in result.ratios if i == target]
        for name, which in names.items():
            if modes:
                series[name][target] = sum(
                    result.ratios[target, mode][which]
                    * result.answers[mode].targets[target].sea_level
                    for mode in modes
                )
    return series


def _row(result: ResponseResult, target: int, mode: int, peaks: _Peaks) -> dict[str, Any]:
    """The variables of one target and mode."""
    answer = result.answers[mode].targets[target]
    level, nan = answer.sea_level, float("nan")
    row: dict[str, Any] = {
        "status": answer.status, "sea_level": level, "standard_deviation": nan, "peak": nan,
        "peak_date": np.datetime64("NaT", "ns"), "spin_up_days": answer.spin_up / SECONDS_PER_DAY,
        "wind_covered": answer.covered, "target_factor": answer.factor,
        "target_distance_km": answer.distance / 1e3 if np.isfinite(answer.distance) else nan,
        "caution": caution_words(result.cautions.get((target, mode), ())),
        **validity_values(result.validity.get((target, mode))),
    }  # fmt: skip
    if answer.status == RESPONDS:
        at = peaks.first + int(np.argmax(np.abs(level[peaks.first :])))
        row.update(
            standard_deviation=level[peaks.first :].std(), peak=level[at],
            peak_date=result.time[at],
        )
    return row


def _stretches(
    result: ResponseResult, target: int, column: int, mode: int, peaks: _Peaks
) -> list[dict[str, Any]]:
    """The stretches that matter most to one target and mode, nearest first, and the rest."""
    answer = result.answers[mode].targets[target]
    spread = answer.by_stretch[:, peaks.first :].std(axis=1) if answer.stretches else np.zeros(0)
    order = np.argsort(-spread, kind="stable")
    shown, rest = np.sort(order[:MOST_STRETCHES]), order[MOST_STRETCHES:]
    parts = [_stretch(result, answer, int(k), peaks) for k in shown]
    if rest.size:
        parts.append(_elsewhere(answer, rest, peaks))
    return [{"stretch_target": target, "stretch_mode": column, **part} for part in parts]


def _stretch(
    result: ResponseResult, answer: TargetResponse, k: int, peaks: _Peaks
) -> dict[str, Any]:
    stretch, series = answer.stretches[k], answer.by_stretch[k]
    delays = [np.timedelta64(round(d * 1e9), "ns")
              for d in (stretch.first_delay, stretch.last_delay)]
    return {
        "stretch_kind": stretch.kind,
        "stretch_from_longitude": stretch.start[0], "stretch_from_latitude": stretch.start[1],
        "stretch_to_longitude": stretch.end[0], "stretch_to_latitude": stretch.end[1],
        "stretch_distance_km": stretch.distance / 1e3,
        "stretch_first_delay_days": stretch.first_delay / SECONDS_PER_DAY,
        "stretch_last_delay_days": stretch.last_delay / SECONDS_PER_DAY,
        "stretch_weight": stretch.weight,
        "stretch_standard_deviation": series[peaks.first :].std(),
        "stretch_at_peak": series[peaks.at],
        "stretch_wind_start": result.time[peaks.at] - delays[1],
        "stretch_wind_end": result.time[peaks.at] - delays[0],
        "stretch_sea_level": series,
    }  # fmt: skip


def _elsewhere(
    answer: TargetResponse, rest: NDArray[np.intp], peaks: _Peaks
) -> dict[str, Any]:
    """All other stretches as one."""
    series = answer.by_stretch[rest].sum(axis=0)
    part: dict[str, Any] = {
        name: float("nan") for name, v in RESPONSE.items()
        if v.dims[0] == "stretch" and v.kind == "number"
    }
    part.update(
        stretch_kind="elsewhere",
        stretch_weight=sum(answer.stretches[k].weight for k in rest),
        stretch_standard_deviation=series[peaks.first :].std(),
        stretch_at_peak=series[peaks.at], stretch_sea_level=series,
        stretch_wind_start=np.datetime64("NaT", "ns"),
        stretch_wind_end=np.datetime64("NaT", "ns"),
    )
    return part
