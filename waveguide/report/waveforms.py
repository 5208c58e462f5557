"""Waveforms at the targets as a table and as a figure.

Modes are drawn with their shares in the sea level at the source, so that the lines of a panel add
up to its sum; the table has each mode as if all sea level at the source were in it, as the other
files have, and the sum with the shares in its heading.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from waveguide.report.colours import MODE_COLOURS
from waveguide.report.csv_files import write_rows
from waveguide.report.figures import (
    GREY,
    MILLIMETRES,
    NORMAL,
    PAGE,
    SMALL,
    add_axes,
    event_start,
    mode_name,
    new_figure,
    save_figure,
    write_heading,
)
from waveguide.report.text import plain

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]

_DECIMALS = 6
"""Of sea level in the table, of which the transform leaves five significant at best."""

_FAINT = 0.02
"""Of the peak at a target: time axes end where all is below it."""

_PANEL = 32.0  # mm, height
_BETWEEN = 11.0
_TOP, _BOTTOM = 17.0, 24.0
_LEFT, _GAP, _RIGHT = 15.0, 17.0, 3.0


class Unit(NamedTuple):
    """The unit that sea level is told in, and how much of it the peak at the source is."""

    name: str
    source: float


def sea_level_unit(dataset: xr.Dataset) -> Unit:
    """Metres where the amplitude of the event is known, else its ratio to that at the source."""
    amplitude = float(dataset.attrs["event_amplitude_m"])
    return Unit("m", amplitude) if math.isfinite(amplitude) else Unit("ratio", 1.0)


def write_waveforms(dataset: xr.Dataset, folder: Path) -> None:
    """Write ``waveforms.csv``, ``waveforms.png`` and ``waveforms.pdf``.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals that pass :func:`waveguide.schema.check`.
    folder : Path
    """
    write_rows(folder / "waveforms.csv", *_table(dataset))
    save_figure(draw_waveforms(dataset), folder, "waveforms", dataset)


def _table(dataset: xr.Dataset) -> tuple[list[str], Iterator[list[Any]]]:
    """Heading and rows: time, date, source, every target in every mode, and its sum."""
    unit = sea_level_unit(dataset)
    modes = dataset["mode"].values
    shares = " + ".join(
        f"{share:.3f} x mode {mode}"
        for mode, share in zip(modes, dataset["mode_share"].values, strict=True)
    )
    heading = ["time_days", "date", f"source ({unit.name})"]
    columns = [dataset["source_waveform"].values * unit.source]
    for t, target in enumerate(dataset["target"].values):
        heading += [f"{target} mode {mode} ({unit.name})" for mode in modes]
        heading.append(f"{target} sum = {shares} ({unit.name})")
        columns += [*dataset["waveform"].values[t] * unit.source]
        columns.append(dataset["waveform_sum"].values[t] * unit.source)
    days, dates = dataset["time_days"].values, dataset["time"].values
    numbers = np.round(np.stack(columns, axis=1), _DECIMALS) + 0.0  # no minus before a zero
    rows = ([day, date, *row] for day, date, row in zip(days, dates, numbers, strict=True))
    return heading, rows


def draw_waveforms(dataset: xr.Dataset) -> Figure:
    """Sea level at the source and every target that is reached.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals that pass :func:`waveguide.schema.check`.

    Returns
    -------
    matplotlib.figure.Figure
        A panel for the source and for each target, with the modes, their sum, and the times of
        front, half-height and peak.
    """
    reached = np.flatnonzero((dataset["status"].values == "reached").any(axis=1))
    rows = -(-(reached.size + 1) // 2)
    figure = new_figure(_TOP + _BOTTOM + rows * _PANEL + (rows - 1) * _BETWEEN)
    unit, last = sea_level_unit(dataset), _last_day(dataset)
    panels = [
        _panel(figure, place, rows, place >= reached.size - 1) for place in range(reached.size + 1)
    ]
    for axes in panels:
        axes.set_xlim(0.0, last)
        axes.axhline(0.0, color="#b0b0b0", lw=0.5, zorder=1)
    _draw_source(panels[0], dataset, unit)
    for axes, target in zip(panels[1:], reached, strict=True):
        _draw_target(axes, dataset, int(target), unit)
    named = "sea level" if unit.name == "m" else "sea level over its peak at the source"
    shares = ", modes by their shares in the source" if dataset.sizes["mode"] > 1 else ""
    write_heading(figure, dataset, f"{named}{shares}; days from {event_start(dataset)}")
    _draw_legend(figure, dataset)
    return figure


def _panel(figure: Figure, place: int, rows: int, lowest: bool) -> Axes:
    """Axes of one of the panels, two in a row."""
    width = (PAGE - _LEFT - _GAP - _RIGHT) / 2.0
    row, column = divmod(place, 2)
    bottom = _BOTTOM + (rows - 1 - row) * (_PANEL + _BETWEEN)
    axes = add_axes(figure, _LEFT + column * (width + _GAP), bottom, width, _PANEL)
    axes.spines[["top", "right"]].set_visible(False)
    if lowest:
        axes.set_xlabel("Time (days)", fontsize=NORMAL, labelpad=2.0)
    return axes


def _last_day(dataset: xr.Dataset) -> float:
    """When the last target has become quiet (days)."""
    waves = np.concatenate([
        dataset["source_waveform"].values[None, :],
        dataset["waveform"].values.reshape(-1, dataset.sizes["time"]),
    ])
    loud = np.abs(waves) > _FAINT * np.abs(waves).max(axis=1, keepdims=True)
    days = dataset["time_days"].values
    return float(min(1.03 * days[np.flatnonzero(loud.any(axis=0))[-1]], days[-1]))


def _draw_source(axes: Axes, dataset: xr.Dataset, unit: Unit) -> None:
    unit = _readable(unit, dataset["source_waveform"].values)
    level = dataset["source_waveform"].values * unit.source
    axes.plot(dataset["time_days"].values, level, color=GREY, lw=1.2)
    _name(axes, dataset.attrs["event_name"] or "Source", unit, "source")


def _draw_target(axes: Axes, dataset: xr.Dataset, target: int, unit: Unit) -> None:
    days, share = dataset["time_days"].values, dataset["mode_share"].values
    levels = dataset["waveform"].values[target] * share[:, None]
    unit = _readable(unit, levels)
    for m, mode in enumerate(dataset["mode"].values):
        if dataset["status"].values[target, m] == "reached":
            colour = MODE_COLOURS[int(mode)]
            axes.plot(days, levels[m] * unit.source, color=colour, lw=1.1, zorder=3)
            _mark_times(axes, dataset, (target, m), levels[m] * unit.source, colour)
    if dataset.sizes["mode"] > 1:
        total = dataset["waveform_sum"].values[target] * unit.source
        axes.plot(days, total, color="black", lw=0.7, ls=(0, (3, 1.2)), zorder=4)
    _name(axes, dataset["target"].values[target], unit, "")


def _readable(unit: Unit, levels: Array) -> Unit:
    """Centimetres or millimetres in place of metres where all of a panel is small."""
    if unit.name != "m":
        return unit
    height = float(np.abs(levels * unit.source).max())
    name, factor = ("m", 1.0) if height >= 0.1 else ("cm", 1e2) if height >= 1e-3 else ("mm", 1e3)
    return Unit(name, factor * unit.source)


def _mark_times(
    axes: Axes, dataset: xr.Dataset, row: tuple[int, int], level: Array, colour: str
) -> None:
    """Front on the line of zero, half-height and peak on the curve."""
    days = dataset["time_days"].values
    style: dict[str, Any] = {"ls": "", "mec": colour, "mew": 0.8, "zorder": 5, "clip_on": False}
    for name, marker, face in (("half_height", "o", "white"), ("peak", "o", colour)):
        when = float(dataset[f"{name}_time_days"].values[row])
        axes.plot(when, np.interp(when, days, level), marker=marker, mfc=face, ms=3.4, **style)
    front = float(dataset["front_time_days"].values[row])
    axes.plot(front, 0.0, marker="|", ms=8.0, **style | {"mew": 1.3})


def _name(axes: Axes, name: str, unit: Unit, what: str) -> None:
    """The name of a place above its panel, with the unit."""
    style: dict[str, Any] = {"fontsize": NORMAL, "parse_math": False, "pad": 3.0}
    axes.set_title(plain(name, 34), loc="left", weight="bold", **style)
    axes.set_title(what, loc="right", color=GREY, **style | {"fontsize": SMALL})
    label = "Ratio" if unit.name == "ratio" else f"Sea level ({unit.name})"
    axes.set_ylabel(label, fontsize=NORMAL)
    axes.yaxis.set_label_coords(-0.15, 0.5)
    axes.locator_params(axis="y", nbins=5)
    axes.margins(y=0.08)


def _draw_legend(figure: Figure, dataset: xr.Dataset) -> None:
    """What the lines and marks mean, below the panels."""
    from matplotlib.lines import Line2D

    several = dataset.sizes["mode"] > 1
    handles = [
        Line2D([], [], color=MODE_COLOURS[int(mode)], lw=1.1, label=mode_name(int(mode))
               + (f", {100 * share:.0f} % of the source" if several else ""))
        for mode, share in zip(dataset["mode"].values, dataset["mode_share"].values, strict=True)
    ]
    if several:
        handles.append(Line2D([], [], color="black", lw=0.7, ls=(0, (3, 1.2)), label="sum"))
    mark: dict[str, Any] = {"ls": "", "mec": GREY, "mew": 0.8, "ms": 3.4}
    handles += [
        Line2D([], [], marker="|", label="front", **mark | {"ms": 8.0, "mew": 1.3}),
        Line2D([], [], marker="o", mfc="white", label="half-height", **mark),
        Line2D([], [], marker="o", mfc=GREY, label="peak", **mark),
    ]
    height = figure.get_figheight() * MILLIMETRES
    figure.legend(
        handles=handles, loc="lower center", bbox_to_anchor=(0.5, 4.0 / height), ncols=4,
        fontsize=SMALL, frameon=False, columnspacing=1.4, handlelength=2.0,
    )
