"""A lookout as text for the terminal, as a JSON document and as CSV."""

from __future__ import annotations

import csv
import math
import textwrap
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.caution_text import cautions_text
from waveguide.report.document import cautions_of, plain_value
from waveguide.report.text import columns, pad, plain
from waveguide.schema import CAUTION

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.compare.lookout_result import Diagram, LookoutResult
    from waveguide.compare.windows import Window

_WIDTH = 110


def window_rows(result: LookoutResult) -> list[dict[str, Any]]:
    """One dictionary for each window, with dates and the expected signal.

    Parameters
    ----------
    result : LookoutResult

    Returns
    -------
    list of dict
    """
    return [_window_row(result, window) for window in result.windows]


def _window_row(result: LookoutResult, window: Window) -> dict[str, Any]:
    height = window.amplitude_ratio * result.amplitude
    return {
        "mode": window.mode,
        "kind": window.kind,
        "from_longitude": window.start_position[0], "from_latitude": window.start_position[1],
        "to_longitude": window.end_position[0], "to_latitude": window.end_position[1],
        "from_distance_km": window.start_distance / 1e3,
        "to_distance_km": window.end_distance / 1e3,
        "opens": _moment(result, window.opens), "closes": _moment(result, window.closes),
        "opens_days": window.opens, "closes_days": window.closes,
        "trapping_width_km": window.width / 1e3,
        "amplitude_ratio": window.amplitude_ratio,
        "sea_level_m": height,
        "quantity": window.quantity,
        "depth_m": window.depth,
        "isopycnal_displacement_m": (
            height * window.response if window.depth > 0.0 else float("nan")
        ),
    }


def _moment(result: LookoutResult, days: float) -> np.datetime64:
    return result.start + np.timedelta64(round(86400.0 * days), "s")


def lookout_table(result: LookoutResult) -> str:
    """What a person wants to read: windows, and what the model shows in them.

    Parameters
    ----------
    result : LookoutResult

    Returns
    -------
    str
    """
    start = np.datetime_as_string(result.start, unit="m").replace("T", " ")
    head = f"{plain(result.title, _WIDTH)}\nEvent   from {start} UTC, {result.duration:g} days"
    parts = [head, _windows(result), _speeds(result)]
    if result.subset is not None:
        sizes = result.subset.sizes
        parts.append(
            f"Subset  {sizes['cell']} cells at {sizes['time']} times, from {result.chunks} chunks "
            "of the output, each read once"
        )
    parts.append(cautions_text(result.arrivals, [plain(note, 400) for note in result.notes]))
    return "\n\n".join(part for part in parts if part)


def _windows(result: LookoutResult) -> str:
    header = ("Mode", "Guide", "From", "To", "Opens", "Closes", "Width, km", "Ratio",
              "Sea level, m", "Look at", "Depth, m", "Isopycnals, m")
    lines: list[Sequence[str]] = [header]
    for row in window_rows(result):
        lines.append((
            str(row["mode"]), row["kind"],
            _position(row["from_longitude"], row["from_latitude"]),
            _position(row["to_longitude"], row["to_latitude"]),
            str(row["opens"])[:10], str(row["closes"])[:10], f"{row['trapping_width_km']:.0f}",
            _number(row["amplitude_ratio"], ".2f"), _number(row["sea_level_m"], "+.3f"),
            "sea level" if row["depth_m"] == 0.0 else "temperature",
            f"{row['depth_m']:.0f}", _number(row["isopycnal_displacement_m"], "+.0f"),
        ))
    return "Windows\n" + _aligned(lines, {6, 7, 8, 10, 11})


def _speeds(result: LookoutResult) -> str:
    """Measured against predicted speed of every route."""
    if not result.diagrams:
        return ""
    header = ("Route to", "Mode", "Theory, m/s", "Measured, m/s", "95 %", "Semblance", "Chance",
              "Verdict")
    lines: list[Sequence[str]] = [header]
    for diagram in result.diagrams:
        speed = diagram.speed
        lines.append((
            plain(diagram.line.target, 28), str(diagram.line.mode),
            _number(speed.predicted, ".2f"), _number(speed.measured, ".2f"),
            f"{_number(speed.low, '.2f')} to {_number(speed.high, '.2f')}",
            _number(speed.semblance, ".2f"), _number(speed.chance, ".3f"), speed.verdict,
        ))
    why = [
        _filled(f"  {plain(d.line.target, 28)}, mode {d.line.mode}: {d.speed.reason}", 6)
        for d in result.diagrams
    ]
    return f"Speed along the routes in {plain(result.variable, 40)}\n" + "\n".join(
        [_aligned(lines, {1, 2, 3, 4, 5, 6}), *why]
    )


def _position(lon: float, lat: float) -> str:
    return (
        f"{abs(lat):.1f}°{'N' if lat >= 0 else 'S'} {abs(lon):.1f}°{'E' if lon >= 0 else 'W'}"
    )


def _number(value: float, style: str) -> str:
    return format(value, style) if math.isfinite(value) else "–"


def _aligned(lines: Sequence[Sequence[str]], right: set[int]) -> str:
    widths = [max(columns(line[i]) for line in lines) for i in range(len(lines[0]))]
    text = [
        "  ".join(pad(cell, widths[i], i in right) for i, cell in enumerate(line)).rstrip()
        for line in lines
    ]
    return "\n".join([text[0], "─" * max(map(columns, text)), *text[1:]])


def _filled(text: str, indent: int) -> str:
    return textwrap.fill(text, _WIDTH, subsequent_indent=" " * indent, break_on_hyphens=False)


def lookout_document(result: LookoutResult) -> dict[str, Any]:
    """A lookout as nested dictionaries and lists that JSON can hold.

    Parameters
    ----------
    result : LookoutResult

    Returns
    -------
    dict
    """
    return {
        "scenario": result.name,
        "title": result.title,
        "event_start": plain_value(result.start),
        "event_duration_days": result.duration,
        "windows": [
            {key: plain_value(value) for key, value in row.items()} for row in window_rows(result)
        ],
        "variable": result.variable,
        "routes": [route_row(diagram) for diagram in result.diagrams],
        "chunks_read": result.chunks,
        "notes": list(result.notes),
        "cautions": _cautions(result.arrivals),
        "caution": CAUTION,
    }


def _cautions(arrivals: xr.Dataset) -> list[dict[str, Any]]:
    """Cautions of every answer that has some."""
    rows = [
        {"target": str(name), "mode": int(mode), "cautions": cautions_of(arrivals, t, m)}
        for t, name in enumerate(arrivals["target"].values)
        for m, mode in enumerate(arrivals["mode"].values)
    ]
    return [row for row in rows if row["cautions"]]


def route_row(diagram: Diagram) -> dict[str, Any]:
    """Measured against predicted speed of one route, as JSON can hold it.

    Parameters
    ----------
    diagram : Diagram

    Returns
    -------
    dict
        None for NaN.
    """
    speed = diagram.speed
    return {
        "target": diagram.line.target,
        "mode": diagram.line.mode,
        "predicted_speed_m_s": plain_value(speed.predicted),
        "measured_speed_m_s": plain_value(speed.measured),
        "measured_speed_low_m_s": plain_value(speed.low),
        "measured_speed_high_m_s": plain_value(speed.high),
        "semblance": plain_value(speed.semblance),
        "chance": plain_value(speed.chance),
        "length_km": plain_value(speed.length / 1e3),
        "verdict": speed.verdict,
        "reason": speed.reason,
    }


def write_lookout_csv(result: LookoutResult, folder: Path) -> None:
    """Write ``windows.csv``, and ``speeds.csv`` where a model was looked at.

    Parameters
    ----------
    result : LookoutResult
    folder : Path
    """
    _write(folder / "windows.csv", window_rows(result))
    if result.diagrams:
        _write(folder / "speeds.csv", [route_row(diagram) for diagram in result.diagrams])


def _write(path: Path, rows: Sequence[dict[str, Any]]) -> None:
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(rows[0])
        writer.writerows([_cell(value) for value in row.values()] for row in rows)


def _cell(value: Any) -> Any:
    value = plain_value(value)
    if isinstance(value, str):
        text = plain(value, 1000)
        return f"'{text}" if text.startswith(("=", "+", "-", "@")) else text
    return "" if value is None else value
