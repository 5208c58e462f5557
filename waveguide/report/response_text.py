"""A forced response as a table for the terminal and as a JSON document."""

from __future__ import annotations

import textwrap
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.caution_text import cautions_text
from waveguide.report.document import cautions_of, plain_value
from waveguide.report.response_dataset import RESPONSE
from waveguide.report.text import columns, pad, plain

if TYPE_CHECKING:
    import xarray as xr

_WIDTH = 110
_ABSENT = "–"
_SHOWN = 3
"""Stretches told for each target in the table."""


def response_table(dataset: xr.Dataset) -> str:
    """What a person wants to read.

    Parameters
    ----------
    dataset : xarray.Dataset
        As declared in `RESPONSE`.

    Returns
    -------
    str
        Lines of at most about 110 columns.
    """
    parts = [_heading(dataset), _rows(dataset), _causes(dataset), _cautions(dataset)]
    return "\n\n".join(part for part in parts if part)


def _heading(dataset: xr.Dataset) -> str:
    time = dataset["time"].values
    first, last = (np.datetime_as_string(moment, unit="D") for moment in time[[0, -1]])
    a = dataset.attrs
    lines = [
        plain(a["title"], _WIDTH),
        _filled(f"Wind    {plain(a['wind'], 200)}", 8),
        f"Time    {first} to {last}, every {a['step_days']:g} days; at rest before, and peaks "
        "are sought after spin-up",
        f"Waves   delays told for a period of {a['period_days']:g} days, bottom drag "
        f"{a['drag_m_s']:g} m/s, interior damping {_days(a['damping_days'])}",
        f"Ocean   {a['ocean']}",
    ]
    return "\n".join(lines)


def _days(value: float) -> str:
    return f"{value:g} days" if np.isfinite(value) else "none"


def _rows(dataset: xr.Dataset) -> str:
    """A line for each target and mode, and one for the sum."""
    head = [
        ["Target", ""], ["Mode", ""], ["Std dev", "(cm)"], ["Peak", "(cm)"], ["Peak", "(UTC)"],
        ["Spin-up", "(days)"], ["Status", ""],
    ]  # fmt: skip
    lines: list[list[str]] = []
    for t, name in enumerate(dataset["target"].values):
        shown = plain(name, 28)
        for m, mode in enumerate(dataset["mode"].values):
            row = (t, m)
            lines.append([
                shown, str(int(mode)), _centimetres(dataset, "standard_deviation", row),
                _centimetres(dataset, "peak", row), _date(dataset["peak_date"].values[row]),
                _cell(dataset["spin_up_days"].values[row], 1.0, ".0f"),
                plain(dataset["status"].values[row], 28),
            ])
        if dataset.sizes["mode"] > 1:
            lines.append([
                shown, "sum", _centimetres(dataset, "total_standard_deviation", t),
                _centimetres(dataset, "total_peak", t),
                _date(dataset["total_peak_date"].values[t]), "", "",
            ])
    cells = [[*top, *(line[k] for line in lines)] for k, top in enumerate(head)]
    widths = [max(columns(cell) for cell in column) for column in cells]
    text = [
        "  ".join(pad(cell, width, 0 < k < 6) for k, (cell, width) in
                  enumerate(zip(line, widths, strict=True))).rstrip()
        for line in zip(*cells, strict=True)
    ]
    rule = "─" * max(columns(line) for line in text)
    return "\n".join([*text[:2], rule, *text[2:]])


def _centimetres(dataset: xr.Dataset, name: str, row: int | tuple[int, int]) -> str:
    return _cell(dataset[name].values[row], 100.0, ".2f")


def _cell(value: float, factor: float, style: str) -> str:
    return format(factor * value, style) if np.isfinite(value) else _ABSENT


def _date(moment: np.datetime64) -> str:
    return _ABSENT if np.isnat(moment) else str(np.datetime_as_string(moment, unit="D"))


def _causes(dataset: xr.Dataset) -> str:
    """Which wind made each target's peak, the strongest parts first."""
    lines = []
    part = dataset["stretch_at_peak"].values
    for t, name in enumerate(dataset["target"].values):
        rows = np.nonzero(dataset["stretch_target"].values == t)[0]
        if not rows.size or np.isnat(dataset["total_peak_date"].values[t]):
            continue
        order = rows[np.argsort(-np.abs(part[rows]), kind="stable")][:_SHOWN]
        told = "; ".join(_cause(dataset, int(row)) for row in order)
        lines.append(_filled(
            f"  {plain(name, 28)}, {_date(dataset['total_peak_date'].values[t])}, "
            f"{100.0 * dataset['total_peak'].values[t]:.1f} cm: {told}", 6,
        ))
    return "\n".join(["Which wind made the peak", *lines]) if lines else ""


def _cause(dataset: xr.Dataset, row: int) -> str:
    mode = int(dataset["mode"].values[dataset["stretch_mode"].values[row]])
    height = f"{100.0 * dataset['stretch_at_peak'].values[row]:+.1f} cm in mode {mode}"
    kind = str(dataset["stretch_kind"].values[row])
    if kind == "elsewhere":
        return f"{height} from all other stretches"
    start, end = (_date(dataset[f"stretch_wind_{which}"].values[row]) for which in ("start", "end"))
    ends = [
        place(*(float(dataset[f"stretch_{which}_{axis}"].values[row])
                for axis in ("longitude", "latitude")))
        for which in ("from", "to")
    ]
    dates = start if start == end else f"{start} to {end}"
    return f"{height} from the {kind} {ends[0]} to {ends[1]}, wind of {dates}"


def place(lon: float, lat: float) -> str:
    """A position in words, to a tenth of a degree."""
    return f"{abs(lat):.1f}°{'N' if lat >= 0 else 'S'} {abs(lon):.1f}°{'E' if lon >= 0 else 'W'}"


def _cautions(dataset: xr.Dataset) -> str:
    """Each kind of caution once; notes on the wind; what is left out."""
    notes = [plain(note, 300) for note in filter(None, dataset.attrs["notes"].split("; "))]
    left_out = (
        "only what the wind does along coasts and the equator is computed: no Rossby waves of the "
        "interior, no reflections at western boundaries, no inverse barometer"
    )
    return cautions_text(dataset, [*notes, left_out])


def _filled(text: str, indent: int) -> str:
    return textwrap.fill(text, _WIDTH, subsequent_indent=" " * indent, break_on_hyphens=False)


def response_document(dataset: xr.Dataset) -> dict[str, Any]:
    """The response as nested dictionaries and lists that JSON can hold.

    Parameters
    ----------
    dataset : xarray.Dataset
        As declared in `RESPONSE`.

    Returns
    -------
    dict
        ``responses`` has one entry for each target and mode, with its stretches; ``sums`` one for
        each target, with the series. Missing numbers are None.
    """
    rows = [(t, m) for t in range(dataset.sizes["target"]) for m in range(dataset.sizes["mode"])]
    keys = ("scenario", "title", "summary", "wind", "initial_condition", "period_days", "drag_m_s",
            "damping_days", "step_days", "ocean", "source", "data_sha256", "notes", "caution")
    return {
        "time": [plain_value(moment) for moment in dataset["time"].values],
        "sums": [_sum(dataset, t) for t in range(dataset.sizes["target"])],
        "responses": [_response(dataset, *row) for row in rows],
        **{key: plain_value(dataset.attrs[key]) for key in keys},
    }


def _sum(dataset: xr.Dataset, target: int) -> dict[str, Any]:
    names = [n for n, v in RESPONSE.items() if v.dims in (("target",), ("target", "time"))]
    return {name: _listed(dataset[name].values[target]) for name in names}


def _response(dataset: xr.Dataset, target: int, mode: int) -> dict[str, Any]:
    names = [n for n, v in RESPONSE.items() if v.dims == ("target", "mode")]
    mine = (dataset["stretch_target"].values == target) & (dataset["stretch_mode"].values == mode)
    parts = [n for n, v in RESPONSE.items() if v.dims == ("stretch",)]
    return {
        "target": plain_value(dataset["target"].values[target]),
        "mode": int(dataset["mode"].values[mode]),
        **{name: plain_value(dataset[name].values[target, mode]) for name in names},
        "cautions": cautions_of(dataset, target, mode),
        "sea_level": _listed(dataset["sea_level"].values[target, mode]),
        "stretches": [
            {name.removeprefix("stretch_"): plain_value(dataset[name].values[row])
             for name in parts if name not in ("stretch_target", "stretch_mode")}
            for row in np.nonzero(mine)[0]
        ],
    }


def _listed(value: Any) -> Any:
    return [plain_value(v) for v in value] if np.ndim(value) else plain_value(value)
