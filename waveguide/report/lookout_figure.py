"""Distance–time diagrams with the predicted characteristics drawn on them."""

from __future__ import annotations

import re
from itertools import pairwise
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from waveguide.constants import SECONDS_PER_DAY
from waveguide.report.figures import arranged_figure, fit_for_print, save_for_print
from waveguide.report.text import plain

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from waveguide.compare.lookout_result import Diagram, LookoutResult


def write_diagrams(result: LookoutResult, folder: Path) -> None:
    """Write ``distance_time_…`` for every route, as PNG and PDF.

    Parameters
    ----------
    result : LookoutResult
    folder : Path
    """
    for diagram in result.diagrams:
        place = re.sub(r"[^\w-]+", "-", diagram.line.target).strip("-").lower() or "target"
        name = f"distance_time_{place}_mode{diagram.line.mode}"
        save_for_print(draw_diagram(diagram, result), folder, name, result.title)


def draw_diagram(diagram: Diagram, result: LookoutResult) -> Figure:
    """Anomalies along a route against time, and when the signal is due.

    Parameters
    ----------
    diagram : Diagram
    result : LookoutResult

    Returns
    -------
    matplotlib.figure.Figure
    """
    line, speed = diagram.line, diagram.speed
    figure = arranged_figure(
        130.0, f"{plain(result.title, 60)}: mode {line.mode} to {plain(line.target, 30)}"
    )
    ax = figure.subplots()
    _draw_field(figure, ax, diagram, result.variable)
    _draw_characteristics(ax, diagram, result.duration)
    _draw_legs(ax, diagram)
    ax.set_xlabel(f"distance along the route (km)\n{speed.verdict}: {speed.reason}", fontsize=7.5,
                  parse_math=False)
    start = np.datetime_as_string(result.start, unit="m").replace("T", " ")
    ax.set_ylabel(f"days after {start} UTC", fontsize=7.5)
    figure.legend(loc="outside lower center", ncols=3, frameon=False, fontsize=7)
    return fit_for_print(figure)


def _draw_field(figure: Figure, ax: Axes, diagram: Diagram, variable: str) -> None:
    values = diagram.values - np.nanmedian(diagram.values, axis=0, keepdims=True)
    limit = float(np.nanquantile(np.abs(values), 0.995)) or 1.0
    shown = ax.pcolormesh(
        diagram.distance / 1e3, diagram.days, np.ma.masked_invalid(values), cmap="RdBu_r",
        vmin=-limit, vmax=limit, shading="nearest", rasterized=True,
    )
    ax.set_facecolor("0.85")
    bar = figure.colorbar(shown, ax=ax, extend="both", pad=0.02)
    bar.set_label(f"{plain(variable, 40)}, without its median at each place", fontsize=7.5,
                  parse_math=False)


def _draw_characteristics(ax: Axes, diagram: Diagram, duration: float) -> None:
    """The front, the end of the event, and the front at the speed that was measured."""
    distance = diagram.line.distance / 1e3
    days = diagram.line.time / SECONDS_PER_DAY
    ax.plot(distance, days, color="black", lw=1.8, label="theory: start of the event")
    ax.plot(distance, days + duration, color="black", lw=1.4, ls="--",
            label="theory: end of the event")
    speed = diagram.speed
    if np.isfinite(speed.measured) and speed.verdict != "not resolvable":
        stretch = speed.predicted / speed.measured
        ax.plot(distance, stretch * days + 0.5 * duration, color="#0a8f63", lw=2.0, ls=":",
                label="slope of the measured speed, from the middle of the event")
    ax.set_xlim(0.0, distance[-1])
    ax.set_ylim(diagram.days[0], diagram.days[-1])


def _draw_legs(ax: Axes, diagram: Diagram) -> None:
    """Where the kind of guide changes."""
    line = diagram.line
    edges = [0, *(np.flatnonzero(np.diff(line.leg)) + 1), line.distance.size - 1]
    length = line.distance[-1]
    for first, last in pairwise(edges):
        a, b = line.distance[first] / 1e3, line.distance[last] / 1e3
        if first > 0:
            ax.axvline(a, color="0.3", lw=0.8)
        if (b - a) * 1e3 > 0.07 * length:
            kind = line.kinds[int(line.leg[(first + last) // 2])]
            ax.text(0.5 * (a + b), 1.01, kind, fontsize=7,
                    ha="center", va="bottom", transform=ax.get_xaxis_transform())
