"""Figures of a comparison: one for each pair, each event record and each mooring."""

from __future__ import annotations

import re
import textwrap
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.report.colours import MODE_COLOURS, RECORD_COLOURS
from waveguide.report.figures import arranged_figure, fit_for_print, save_for_print
from waveguide.report.text import plain

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from waveguide.compare.events import EventResult
    from waveguide.compare.moorings import MooringResult
    from waveguide.compare.pairs import PairResult, Prediction
    from waveguide.compare.result import ComparisonResult
    from waveguide.compare.series import Array

SHOWN_DAYS = 730.0
"""Length of the stretch of a pair's records that is drawn."""

_UNITS = {
    "sea level": ("cm", 100.0), "dynamic height": ("cm", 100.0), "temperature": ("°C", 1.0),
    "isopycnal depth": ("m", 1.0), "alongshore velocity": ("cm/s", 100.0),
    "bottom pressure": ("cm of water", 100.0),
}
"""Unit drawn for each quantity, and how many are in the SI unit."""


def write_comparison_figures(result: ComparisonResult, folder: Path) -> None:
    """Write ``pair_…``, ``event_…`` and ``mooring_…``, each as PNG and PDF.

    Parameters
    ----------
    result : ComparisonResult
    folder : Path
    """
    figures = {
        f"pair_{_file_name(pair.first.name)}_{_file_name(pair.second.name)}": draw_pair(pair)
        for pair in result.pairs
    } | {
        f"event_{_file_name(event.series.name)}": draw_event(event) for event in result.events
    } | {
        f"mooring_{_file_name(mooring.reference)}": draw_mooring(mooring)
        for mooring in result.moorings
    }  # fmt: skip
    for name, figure in figures.items():
        save_for_print(figure, folder, name, result.title)


def _file_name(text: str) -> str:
    return re.sub(r"[^\w-]+", "-", text).strip("-").lower() or "record"


def _figure(rows: int, columns: int, height: float, title: str) -> tuple[Figure, Any]:
    figure = arranged_figure(height, title)
    return figure, figure.subplots(rows, columns, squeeze=False)


def _head(ax: Axes, title: str, legend: bool = True) -> None:
    """Title above the axes and, between both, the legend, which so covers no data."""
    if legend and ax.get_legend_handles_labels()[1]:
        shown = ax.legend(loc="lower left", bbox_to_anchor=(-0.02, 1.0), ncols=5, frameon=False,
                          fontsize=7, borderaxespad=0.1, handlelength=1.5, columnspacing=0.9)
        shown.set_in_layout(False)  # a wide legend would make the axes narrow
        ax.set_title(title, loc="left", fontsize=8, pad=15)
    else:
        ax.set_title(title, loc="left", fontsize=8)


def draw_pair(pair: PairResult) -> Figure:
    """Records, correlation, coherence and phase of a pair, with the predictions.

    Parameters
    ----------
    pair : PairResult

    Returns
    -------
    matplotlib.figure.Figure
    """
    title = f"{plain(pair.first.name, 30)} to {plain(pair.second.name, 30)}"
    figure, axes = _figure(3, 2, 185.0, title)
    grid = axes[0, 0].get_gridspec()
    for ax in axes[0]:
        ax.remove()
    _draw_records(figure.add_subplot(grid[0, :]), pair)
    _draw_correlation(axes[1, 0], pair)
    _draw_gain(axes[1, 1], pair)
    _draw_coherence(axes[2, 0], pair)
    _draw_phase(axes[2, 1], pair)
    figure.supxlabel(_verdicts(pair), fontsize=7, parse_math=False)
    return fit_for_print(figure)


def _verdicts(result: PairResult | EventResult) -> str:
    """The verdicts as lines that fit below a figure."""
    lines = [
        textwrap.fill(f"mode {p.mode}: {v.word}: {v.reason}", 115)
        for p, v in zip(result.predictions, result.verdicts, strict=True)
    ]
    return "\n".join(lines)


def _draw_records(ax: Axes, pair: PairResult) -> None:
    size = round(SHOWN_DAYS / pair.first.step)
    start = _fullest(pair, size)
    both = (ax, ax if pair.first.quantity == pair.second.quantity else ax.twinx())
    for own, series, colour in zip(both, (pair.first, pair.second), RECORD_COLOURS, strict=True):
        unit, factor = _UNITS[series.quantity]
        inside = (series.times >= start) & (
            series.times <= start + np.timedelta64(round(SHOWN_DAYS * 86400), "s")
        )
        label = f"{plain(series.name, 30)}: {series.quantity} ({unit})"
        values = factor * series.values[inside]
        own.plot(series.times[inside], values, color=colour, lw=1.0)
        ax.plot([], [], color=colour, lw=1.0, label=label)
        most = 1.1 * float(np.max(np.abs(np.nan_to_num(values)), initial=0.0))
        own.set_ylim(*np.sort([min(-most, own.get_ylim()[0]), max(most, own.get_ylim()[1])]))
        own.set_ylabel(unit, fontsize=7.5)
    short, long = pair.band
    ax.axhline(0.0, color="0.8", lw=0.6, zorder=0)
    _head(ax, f"a  records passed {short:g} to {long:g} days (the two fullest years)")


def _fullest(pair: PairResult, size: int) -> np.datetime64:
    """Start of the stretch in which both records have most values."""
    first, second = pair.first, pair.second
    start = max(first.start, second.start)
    there = []
    for series in (first, second):
        skip = int(np.searchsorted(series.times, start))
        there.append(np.isfinite(series.values[skip:]))
    n = min(map(len, there))
    both = np.concatenate([[0], np.cumsum(there[0][:n] & there[1][:n])])
    if n <= size:
        return start
    best = int(np.argmax(both[size:] - both[:-size]))
    moment: np.datetime64 = first.times[int(np.searchsorted(first.times, start)) + best]
    return moment


def _draw_correlation(ax: Axes, pair: PairResult) -> None:
    estimate, corr = pair.estimate, pair.correlation
    ax.axvspan(estimate.low, estimate.high, color="0.85", lw=0, label="95 %")
    ax.plot(corr.lag, corr.value, color="0.2", lw=1.2)
    ax.plot(estimate.lag, estimate.correlation, "o", ms=4, color="0.2")
    ax.axvline(0.0, color="0.7", lw=0.6)
    ax.axhline(0.0, color="0.7", lw=0.6)
    for prediction in pair.predictions:
        if np.isfinite(prediction.lag):
            ax.axvline(prediction.lag, color=MODE_COLOURS[prediction.mode], lw=1.6, ls="--",
                       label=f"mode {prediction.mode}")
    _head(ax, "b  cross-correlation; dashed: theory")
    ax.set_xlabel("lag of the second record (days)", fontsize=7.5)


def _draw_gain(ax: Axes, pair: PairResult) -> None:
    """Scatter of the second record, at the lag, on the first, with the slope."""
    from waveguide.compare.lags import overlap
    from waveguide.compare.series import align

    x, y, _, offset = align(pair.first, pair.second)
    a, b = overlap(x, y, round((pair.estimate.lag - offset) / pair.first.step))
    (unit_a, fa), (unit_b, fb) = _UNITS[pair.first.quantity], _UNITS[pair.second.quantity]
    ax.plot(fa * a, fb * b, ".", ms=1.6, color="0.55", alpha=0.5, rasterized=True)
    ends = fa * np.array([np.nanmin(a), np.nanmax(a)])
    sign = np.sign(np.nansum(a * b)) or 1.0
    slope = sign * abs(pair.slope.slope) * fb / fa
    ax.plot(ends, slope * ends, color="0.1", lw=1.4, label=f"slope {slope:.2f}")
    for p in pair.predictions:
        if np.isfinite(p.ratio):
            ax.plot(ends, p.ratio * fb / fa * ends, ls="--", lw=1.4, color=MODE_COLOURS[p.mode],
                    label=f"mode {p.mode}: {p.ratio * fb / fa:.2f}")
    _head(ax, "c  amplitude at the lag; dashed: theory")
    ax.set_xlabel(f"{plain(pair.first.name, 30)} ({unit_a})", fontsize=7.5)
    ax.set_ylabel(f"{plain(pair.second.name, 30)} ({unit_b})", fontsize=7.5)


def _draw_coherence(ax: Axes, pair: PairResult) -> None:
    spectrum = pair.spectrum
    shown = spectrum.frequency <= _highest(pair)
    if shown.any():
        ax.plot(spectrum.frequency[shown], spectrum.coherence[shown], color="0.2", lw=1.2)
        ax.axhline(spectrum.significant, color="0.5", lw=0.8, ls=":",
                   label="95 % of unrelated records lie below")
    _draw_band(ax, pair)
    ax.set_ylim(0.0, 1.0)
    _head(ax, "d  squared coherence")
    ax.set_xlabel("frequency (cycles per day)", fontsize=7.5)


def _draw_phase(ax: Axes, pair: PairResult) -> None:
    spectrum = pair.spectrum
    sure = np.isfinite(spectrum.phase_error) & (spectrum.frequency <= _highest(pair))
    ax.errorbar(spectrum.frequency[sure], spectrum.phase[sure], 1.96 * spectrum.phase_error[sure],
                fmt="o", ms=2.5, lw=0.8, color="0.2", label="measured, 95 %")
    f = np.linspace(0.0, _highest(pair), 400)
    for p in pair.predictions:
        if np.isfinite(p.lag):
            ax.plot(f, _wrapped(360.0 * f * p.lag), color=MODE_COLOURS[p.mode], lw=1.4, ls="--",
                    label=f"mode {p.mode}")
    _draw_band(ax, pair)
    ax.set_ylim(-180.0, 180.0)
    ax.set_yticks(np.arange(-180, 181, 90))
    _head(ax, "e  phase by which the second lags (°)")
    ax.set_xlabel("frequency (cycles per day)", fontsize=7.5)


def _highest(pair: PairResult) -> float:
    return min(1.5 / pair.band[0], 0.5 / pair.first.step)


def _draw_band(ax: Axes, pair: PairResult) -> None:
    ax.axvspan(1.0 / pair.band[1], 1.0 / pair.band[0], color="0.93", lw=0, zorder=0)
    ax.set_xlim(0.0, _highest(pair))


def _wrapped(phase: Array) -> Array:
    """Degrees within ±180, NaN where the line jumps."""
    wrapped = (phase + 180.0) % 360.0 - 180.0
    jump = np.abs(np.diff(wrapped, prepend=wrapped[0])) > 180.0
    return np.where(jump, np.nan, wrapped)


def draw_event(event: EventResult) -> Figure:
    """The record about an event and the amplitude that fits at each delay.

    Parameters
    ----------
    event : EventResult

    Returns
    -------
    matplotlib.figure.Figure
    """
    series = event.series
    unit, factor = _UNITS[series.quantity]
    figure, axes = _figure(2, 1, 120.0, f"The event at {plain(series.name, 30)}")
    span = float(event.delay[-1]) if event.delay.size else 120.0
    days = series.days - event.start
    shown = (days > -0.5 * span) & (days < 1.5 * span)
    top, bottom = axes[0, 0], axes[1, 0]
    top.plot(days[shown], factor * series.values[shown], color=RECORD_COLOURS[1], lw=1.2)
    top.set_ylabel(f"{series.quantity} ({unit})", fontsize=7.5)
    bottom.plot(event.delay, factor * event.amplitude, color="0.2", lw=1.2)
    estimate = event.estimate
    if np.isfinite(estimate.high):
        bottom.axvspan(estimate.low, estimate.high, color="0.85", lw=0, label="95 % interval")
    bottom.set_ylabel(f"amplitude that fits ({unit})", fontsize=7.5)
    for ax in (top, bottom):
        ax.axvline(0.0, color="0.6", lw=0.8)
        ax.axhline(0.0, color="0.8", lw=0.6, zorder=0)
        ax.set_xlim(-0.5 * span, 1.5 * span)
        ax.set_xlabel("days after the start of the event", fontsize=7.5)
    _mark(top, event.predictions, 0.5 * event.duration)
    _mark(bottom, event.predictions)
    short, long = event.band
    title = f"a  record passed {short:g} to {long:g} days; dashed: middle of the event by theory"
    _head(top, title, legend=False)
    _head(bottom, "b  amplitude of the event at each delay; dashed: theory")
    figure.supxlabel(_verdicts(event), fontsize=7, parse_math=False)
    return fit_for_print(figure)


def _mark(ax: Axes, predictions: tuple[Prediction, ...], later: float = 0.0) -> None:
    for p in predictions:
        if np.isfinite(p.lag):
            ax.axvline(p.lag + later, color=MODE_COLOURS[p.mode], lw=1.6, ls="--",
                       label=f"mode {p.mode}")


def draw_mooring(mooring: MooringResult) -> Figure:
    """Measured and predicted ratios of a mooring's instruments.

    Parameters
    ----------
    mooring : MooringResult

    Returns
    -------
    matplotlib.figure.Figure
    """
    parts = sorted(mooring.instruments, key=lambda part: part.series.depth)
    figure, axes = _figure(1, 1, 40.0 + 14.0 * len(parts),
                           f"Mooring: ratios to {plain(mooring.reference, 30)}")
    ax = axes[0, 0]
    place = np.arange(len(parts))[::-1]
    for y, part in zip(place, parts, strict=True):
        scale = max(abs(part.slope.slope), *np.abs(part.predicted))
        low, high = part.slope.low / scale, part.slope.high / scale
        ax.plot([low, high], [y, y], color="0.2", lw=4, solid_capstyle="butt",
                label="measured, 95 %" if y == place[0] else None)
        for mode, value in zip(mooring.modes, part.predicted, strict=True):
            ax.plot(value / scale, y, "D", color=MODE_COLOURS[int(mode)], ms=7,
                    label=f"theory, mode {mode}" if y == place[0] else None)
    ax.set_yticks(place, [
        f"{plain(part.series.name, 30)}\n{part.series.quantity}, {part.series.depth:g} m"
        for part in parts
    ], fontsize=8)
    ax.set_ylim(-0.6, len(parts) - 0.4)
    ax.axvline(0.0, color="0.6", lw=0.8)
    ax.set_xlabel("ratio, in units of the largest of each row", fontsize=7.5)
    explained = ", ".join(
        f"mode {m} {100 * v:.0f} %" for m, v in zip(mooring.modes, mooring.explained, strict=True)
    )
    _head(ax, f"variance explained: {explained}")
    return fit_for_print(figure)
