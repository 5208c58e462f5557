"""A plan as text for the terminal, as a JSON document and as CSV."""

from __future__ import annotations

import csv
import math
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.propagation.sampling import share_error
from waveguide.report.caution_text import cautions_text
from waveguide.report.document import cautions_of, plain_value
from waveguide.report.layout import WIDTH, aligned, filled
from waveguide.report.plan_dataset import PLAN
from waveguide.report.text import plain

if TYPE_CHECKING:
    import xarray as xr

_ABSENT = "–"
_ONE_BY_ONE = (
    " Each mode is told as if all of the signal were in it: `waveguide arrivals` has their shares."
)
_FORMULA = ("=", "+", "-", "@")
_MOST_NAMED = 3  # inputs that are named as the ones the spread comes from
_LEAST_NAMED = 0.05  # share of the variance below which an input is not worth naming


def plan_table(dataset: xr.Dataset) -> str:
    """What a person wants to read: when to look, what to measure, what the window hangs on.

    Parameters
    ----------
    dataset : xarray.Dataset
        See :mod:`waveguide.report.plan_dataset`.

    Returns
    -------
    str
    """
    rows = [(t, m) for t in range(dataset.sizes["target"]) for m in range(dataset.sizes["mode"])]
    reached = [row for row in rows if dataset["status"].values[row] == "reached"]
    missing = [
        f"  {_name(dataset, row)}: {plain(dataset['status'].values[row])}"
        for row in rows if row not in reached
    ]
    parts = [
        _head(dataset), _when(dataset, reached),
        "\n".join(["Not reached", *missing]) if missing else "",
        _what(dataset, reached), _why(dataset, reached), _notes(dataset), cautions_text(dataset),
    ]  # fmt: skip
    return "\n\n".join(part for part in parts if part)


def _head(dataset: xr.Dataset) -> str:
    attributes = dataset.attrs
    name = plain(attributes["event_name"] or "event", 60)
    ensemble = (
        f"Ensemble  {attributes['members']} members, seed {attributes['seed']}; "
        f"standard deviations: {attributes['standard_deviations']}"
    )
    return (
        f"{plain(attributes['title'], WIDTH)}\n"
        f"Event     {name}, from {attributes['event_start'][:16].replace('T', ' ')} UTC, "
        f"{attributes['event_duration_days']:g} days\n"
        f"{filled(ensemble, 10)}"
    )


def _when(dataset: xr.Dataset, rows: list[tuple[int, int]]) -> str:
    metres = np.isfinite(dataset["peak_m"].values).any()
    size, unit, style = ("peak_m", "m", ".3f") if metres else ("peak_ratio", "ratio", ".2f")
    header = ("Target", "Mode", "Look from (UTC)", "until (UTC)", "Half-height, days",
              "Peak, days", f"Peak, {unit}", "Seen")
    lines = [header]
    for row in rows:
        lines.append((
            plain(dataset["target"].values[row[0]], 24), str(dataset["mode"].values[row[1]]),
            _date(dataset, "look_from_date", row), _date(dataset, "look_until_date", row),
            _spread(dataset, "half_height_days", row, ".1f"),
            _spread(dataset, "peak_days", row, ".1f"), _spread(dataset, size, row, style),
            _percent(dataset["chance_above_threshold"].values[row]),
        ))
    chance, threshold = dataset.attrs["chance_percent"], dataset.attrs["threshold_m"]
    title = (
        f"When to look: with a chance of {chance:g} % this holds the rise to half height and the "
        f"peak. Days are from the start of the event, as P10 P50 P90. Seen: chance of a peak "
        f"above {100 * threshold:g} cm.{_ONE_BY_ONE if dataset.sizes['mode'] > 1 else ''}"
    )
    return filled(title, 0) + "\n" + aligned(lines, right=range(4, 8))


def _what(dataset: xr.Dataset, rows: list[tuple[int, int]]) -> str:
    header = ("Target", "Mode", "Measure first", "Depth, m", "Off, km", "per cm", "Signal/noise",
              "Reach, km", "Gap, days", "Gap, km")
    lines = [header]
    for row in rows:
        first = str(dataset["measure_first"].values[row])
        at = [str(q) for q in dataset["quantity"].values].index(first)
        lines.append((
            plain(dataset["target"].values[row[0]], 24), str(dataset["mode"].values[row[1]]), first,
            _number(dataset["measure_depth_m"].values[row][at], ".0f"),
            _number(dataset["measure_offshore_km"].values[row][at], ".0f"),
            _per_centimetre(first, dataset["measure_per_metre"].values[row][at]),
            _number(dataset["measure_clarity"].values[row][at], ".1f"),
            _number(dataset["reach_km"].values[row], ".0f"),
            _number(dataset["longest_gap_days"].values[row], ".1f"),
            _number(dataset["longest_gap_km"].values[row], ".0f"),
        ))
    known = np.isfinite(dataset["peak_m"].values).any()
    of = "the median peak" if known else "1 cm of sea level, the amplitude being unknown"
    title = (
        "What to measure: where it stands out most from noise (depth, and distance off the shore), "
        "what it shows there per cm of sea level, how far off the guide it reaches (a factor e), "
        "and the gap between samples, in time or along the way, that one signal in ten would fit "
        f"into unseen. Signal/noise is that of {of}."
    )
    return filled(title, 0) + "\n" + aligned(lines, right=range(3, 10))


def _per_centimetre(quantity: str, per_metre: float) -> str:
    if not math.isfinite(per_metre):
        return _ABSENT
    if quantity == "current along the guide":
        return f"{per_metre:.1f} cm/s"
    if quantity == "isopycnal displacement":
        return f"{per_metre / 100.0:.1f} m"
    return f"{per_metre:.2f} cm"


def _why(dataset: xr.Dataset, rows: list[tuple[int, int]]) -> str:
    lines = ["What the spread comes from, as shares of the variance: pin down first what is named "
             "first"]
    for row in rows:
        time, height = (
            _leading(dataset, name, row) for name in ("time_share", "height_share")
        )
        lines.append(filled(f"  {_name(dataset, row)}: time {time}; height {height}", 6))
    return "\n".join(lines)


def _leading(dataset: xr.Dataset, name: str, row: tuple[int, int]) -> str:
    """The inputs with the largest shares."""
    share = dataset[name].values[row]
    order = [i for i in np.argsort(-share)[:_MOST_NAMED] if share[i] >= _LEAST_NAMED]
    named = [f"{dataset['input'].values[i]} {100 * share[i]:.0f} %" for i in order]
    return ", ".join(named) if named else "nothing"


def _notes(dataset: xr.Dataset) -> str:
    error = float(np.nanmax(dataset["sampling_error_days"].values, initial=0.0))
    lines = [
        "Notes",
        f"  Percentiles of times have standard errors of up to {error:.2g} days from the size of "
        "the ensemble, shares of the variance of up to "
        f"{100.0 * share_error(int(dataset.attrs['members'])):.0f} %.",
        "  Noise levels (m, m, m/s, m) are round figures to compare instruments: "
        f"{dataset.attrs['noise']}.",
    ]
    return "\n".join(filled(line, 4) for line in lines)


def _name(dataset: xr.Dataset, row: tuple[int, int]) -> str:
    return f"{plain(dataset['target'].values[row[0]], 28)} mode {dataset['mode'].values[row[1]]}"


def _number(value: float, style: str) -> str:
    return format(float(value), style) if math.isfinite(float(value)) else _ABSENT


def _percent(value: float) -> str:
    return f"{100.0 * float(value):.0f} %" if math.isfinite(float(value)) else _ABSENT


def _spread(dataset: xr.Dataset, name: str, row: tuple[int, int], style: str) -> str:
    return " ".join(_number(value, style) for value in dataset[name].values[row])


def _date(dataset: xr.Dataset, name: str, row: tuple[int, int]) -> str:
    moment = dataset[name].values[row]
    if np.isnat(moment):
        return _ABSENT
    return str(np.datetime_as_string(moment, unit="h")).replace("T", " ") + " h"


def plan_document(dataset: xr.Dataset) -> dict[str, Any]:
    """A plan as nested dictionaries and lists that JSON can hold.

    Parameters
    ----------
    dataset : xarray.Dataset

    Returns
    -------
    dict
        ``rows`` has one entry for each target and mode, reached or not. Missing numbers are None.
    """
    rows = [
        {
            "target": str(target), "mode": int(mode),
            **{name: _plain(dataset, name, (t, m)) for name in _row_names()},
            "cautions": cautions_of(dataset, t, m),
        }
        for t, target in enumerate(dataset["target"].values)
        for m, mode in enumerate(dataset["mode"].values)
    ]
    return {"rows": rows, **{key: plain_value(value) for key, value in dataset.attrs.items()}}


def _row_names() -> list[str]:
    return [name for name, v in PLAN.items() if v.dims[:2] == ("target", "mode")]


def _plain(dataset: xr.Dataset, name: str, row: tuple[int, int]) -> Any:
    """A value, or a dictionary by the third dimension (p10, p50, p90; inputs; quantities)."""
    array = dataset[name]
    if array.ndim == 2:
        return plain_value(array.values[row])
    return {
        _label(array.dims[2], key): plain_value(value)
        for key, value in zip(dataset[array.dims[2]].values, array.values[row], strict=True)
    }


def _label(dimension: Any, key: Any) -> str:
    return f"p{key}" if dimension == "percentile" else str(key)


def write_plan_csv(dataset: xr.Dataset, folder: Path) -> None:
    """Write ``plan.csv``, a line for each target and mode.

    Parameters
    ----------
    dataset : xarray.Dataset
    folder : Path
    """
    document = plan_document(dataset)
    lines = [dict(_flat(row)) for row in document["rows"]]
    with (folder / "plan.csv").open("w", encoding="utf-8", newline="") as out:
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(lines[0])
        writer.writerows([_cell(value) for value in line.values()] for line in lines)


def _flat(row: dict[str, Any]) -> Iterator[tuple[str, Any]]:
    for name, value in row.items():
        if isinstance(value, list):  # of cautions, which `caution` has in words
            continue
        if not isinstance(value, dict):
            yield name, value
            continue
        for key, part in value.items():
            yield f"{name}_{key.replace(' ', '_')}", part


def _cell(value: Any) -> Any:
    if not isinstance(value, str):
        return "" if value is None else value
    text = plain(value, 4000)
    return f"'{text}" if text.startswith(_FORMULA) else text
