"""The arrivals as a map: routes by mode, travel-time ticks, source and targets."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.geodesy import wrap_longitude
from waveguide.report.colours import MODE_COLOURS
from waveguide.report.figures import (
    GREY,
    LARGE,
    MILLIMETRES,
    NORMAL,
    PAGE,
    SMALL,
    new_figure,
    save_figure,
)
from waveguide.report.map_labels import LabelPlacer
from waveguide.report.map_view import Bounds, View, choose_view, draw_graticule, draw_land, extent
from waveguide.report.routes import leg_line, legs_of, split_at_date_line, vertices_of
from waveguide.report.text import plain

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from waveguide.geodesy import Array

_MOST_IN_LINE = 6  # entries of the legend

_TICK_STEPS = np.array([0.05, 0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0, 200.0])
"""Intervals of the travel-time ticks (days)."""


@dataclass(frozen=True)
class _Line:
    """A leg as drawn: pieces of (n, 2) map coordinates (m), its mode, width and dashes."""

    pieces: list[Array]
    mode: int
    width: float
    dashes: str


def write_map(dataset: xr.Dataset, folder: Path) -> None:
    """Write ``map.png`` and ``map.pdf``.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals that pass :func:`waveguide.schema.check`.
    folder : Path
    """
    save_figure(draw_map(dataset), folder, "map", dataset)


def draw_map(dataset: xr.Dataset) -> Figure:
    """A figure with the routes of the arrivals.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals that pass :func:`waveguide.schema.check`.

    Returns
    -------
    matplotlib.figure.Figure
    """
    lon, lat = _all_positions(dataset)
    view = choose_view(lon, lat)
    bounds = extent(view, *view.place(lon, lat))
    figure, axes = _frame(dataset, bounds)
    draw_land(axes, view, bounds)
    draw_graticule(axes, view, bounds)
    lines = [_line(dataset, leg, view) for leg in range(dataset.sizes["leg"])]
    for line in lines:
        _draw_line(axes, line)
    labels = LabelPlacer(axes, _pixels(axes, lines))
    labels.keep_texts_clear()
    _draw_places(axes, dataset, view, labels)
    _draw_ticks(axes, dataset, view, labels)
    _draw_legend(figure, axes, dataset)
    return figure


def _all_positions(dataset: xr.Dataset) -> tuple[Array, Array]:
    lon, lat = (
        np.concatenate(
            [
                [dataset.attrs[f"source_{axis}"]],
                *(dataset[f"{what}_{axis}"].values for what in ("target", "leg_from", "leg_to")),
                dataset[f"vertex_{axis}"].values,
            ]
        )
        for axis in ("longitude", "latitude")
    )
    return lon, lat


def _frame(dataset: xr.Dataset, bounds: Bounds) -> tuple[Figure, Axes]:
    """A figure of the shape of the map, with room for title and legend outside the axes."""
    shape = (bounds[3] - bounds[2]) / (bounds[1] - bounds[0])
    left, right, below, above = 0.55, 0.2, 0.95, 0.55  # inches
    width = min(PAGE / MILLIMETRES - left - right, 6.4 / shape)
    height = width * shape
    figure = new_figure((height + below + above) * MILLIMETRES)
    full = figure.get_size_inches()
    inset = (full[0] - width - left - right) / 2.0 + left
    axes = figure.add_axes(
        (inset / full[0], below / full[1], width / full[0], height / full[1]),
        xlim=bounds[:2],
        ylim=bounds[2:],
        facecolor="white",
    )
    attributes = dataset.attrs
    subtitle = (
        f"event {attributes['event_start'][:16].replace('T', ' ')} UTC, "
        f"{attributes['event_duration_days']:g} days; "
        f"dominant period {attributes['period_days']:g} days; times in days from its start"
    )
    style: dict[str, Any] = {"ha": "center", "parse_math": False}
    title = plain(attributes["title"], 80)
    figure.text(0.5, 1.0 - 0.2 / full[1], title, fontsize=LARGE, weight="bold", **style)
    figure.text(0.5, 1.0 - 0.4 / full[1], subtitle, fontsize=NORMAL, color="#4a4a4a", **style)
    return figure, axes


def _line(dataset: xr.Dataset, leg: int, view: View) -> _Line:
    route = int(dataset["leg_route"].values[leg])
    mode = int(dataset["mode"].values[dataset["route_mode"].values[route]])
    alternative = dataset["route_kind"].values[route] == "alternative"
    attachment = dataset["leg_kind"].values[leg] == "attachment"
    dashes = ":" if attachment else "--" if alternative else "-"
    lon, lat = leg_line(dataset, leg)
    pieces = split_at_date_line(lon - view.middle, lat)
    width = _widths(dataset)[mode] if dashes == "-" else 1.2
    lines = [np.column_stack(view.project(*_fine(*piece))) for piece in pieces]
    return _Line(lines, mode, width, dashes)


def _widths(dataset: xr.Dataset) -> dict[int, float]:
    """Line widths (points): the lower the mode the wider, so that each shows beneath the next."""
    modes = sorted(dataset["mode"].values.tolist(), reverse=True)
    return {mode: 2.0 + 1.6 * rank for rank, mode in enumerate(modes)}


def _fine(lon: Array, lat: Array) -> tuple[Array, Array]:
    """A line with a vertex at every degree at least, so that it curves as the map does."""
    steps = np.maximum(np.ceil(np.maximum(np.abs(np.diff(lon)), np.abs(np.diff(lat)))), 1.0)
    place = np.concatenate([[0.0], np.cumsum(steps)])
    every = np.arange(place[-1] + 1.0)
    return np.interp(every, place, lon), np.interp(every, place, lat)


def _draw_line(axes: Axes, line: _Line) -> None:
    above = 0.05 if line.dashes == "-" else 0.0
    for piece in line.pieces:
        axes.plot(
            *piece.T,
            color=MODE_COLOURS[line.mode],
            linewidth=line.width,
            linestyle=line.dashes,
            solid_capstyle="round",
            zorder=3.0 + 0.1 * line.mode + above,
        )


def _pixels(axes: Axes, lines: list[_Line]) -> Array:
    """Points along all lines, in pixels, a few pixels apart."""
    points = [np.empty((0, 2))]
    for line in lines:
        for piece in line.pieces:
            pixels = axes.transData.transform(piece)
            steps = np.maximum(np.hypot(*np.diff(pixels, axis=0).T) / 4.0, 0.01)
            place = np.concatenate([[0.0], np.cumsum(steps)])
            every = np.linspace(0.0, place[-1], int(place[-1]) + 2)
            points.append(np.column_stack([np.interp(every, place, c) for c in pixels.T]))
    return np.concatenate(points)


def _draw_places(axes: Axes, dataset: xr.Dataset, view: View, labels: LabelPlacer) -> None:
    """Source and targets; a target that no mode reaches is hollow."""
    sx, sy = view.place(dataset.attrs["source_longitude"], dataset.attrs["source_latitude"])
    tx, ty = view.place(dataset["target_longitude"].values, dataset["target_latitude"].values)
    reached = (dataset["status"].values == "reached").any(axis=1)
    for chosen, face in ((reached, "black"), (~reached, "white")):
        axes.scatter(tx[chosen], ty[chosen], s=22, c=face, edgecolors="black", zorder=6)
    axes.scatter([sx], [sy], s=150, marker="*", c="#ffd23f", edgecolors="black", zorder=7)
    _draw_box(axes, dataset, view)
    labels.keep_clear(float(sx), float(sy), 7.0)
    for x, y in zip(tx, ty, strict=True):
        labels.keep_clear(float(x), float(y), 3.0)
    names = [plain(dataset.attrs["event_name"] or "event", 32)]
    names += [plain(name, 28) for name in dataset["target"].values]
    for name, x, y in zip(names, np.append(sx, tx), np.append(sy, ty), strict=True):
        labels.place(name, float(x), float(y), (5, 12, 22, 36, 52, 70), True, fontsize=NORMAL,
                     zorder=8)


def _draw_box(axes: Axes, dataset: xr.Dataset, view: View) -> None:
    """Outline of an event that is a box."""
    box = dataset.attrs.get("event_box_west_south_east_north")
    if box is None:
        return
    west, south, east, north = box
    share = np.linspace(0.0, 1.0, 50)
    along = np.concatenate([share, 0 * share + 1, share[::-1], 0 * share])
    lon = west + ((east - west) % 360.0) * along
    lat = south + (north - south) * np.concatenate([0 * share, share, 0 * share + 1, share[::-1]])
    x, y = view.place(wrap_longitude(lon), lat)
    axes.plot(x, y, color="#8a6d00", lw=1.0, ls=(0, (4, 2)), zorder=6)


def _draw_ticks(axes: Axes, dataset: xr.Dataset, view: View, labels: LabelPlacer) -> None:
    """Marks at round travel times along the earliest routes, labelled where there is room."""
    near = np.ptp(axes.get_xlim()) / 80.0  # closer ticks of the same time are one
    widths, steps = _widths(dataset), _tick_steps(dataset)
    drawn: dict[tuple[int, int], list[complex]] = {}
    for route in np.flatnonzero(dataset["route_kind"].values == "earliest"):
        mode = int(dataset["mode"].values[dataset["route_mode"].values[route]])
        for number, x, y, along in _tick_places(dataset, int(route), view, steps[mode]):
            same = drawn.setdefault((mode, number), [])
            if any(abs(complex(x, y) - other) < near for other in same):
                continue
            same.append(complex(x, y))
            axes.plot(
                x,
                y,
                marker=(2, 0, along),
                markersize=9.0 + widths[mode],
                markeredgecolor=MODE_COLOURS[mode],
                markeredgewidth=1.4,
                zorder=5,
            )
            style: dict[str, Any] = {"fontsize": SMALL, "color": MODE_COLOURS[mode], "zorder": 7.5}
            labels.place(f"{number * steps[mode]:g} d", x, y, (6.0, 10.0), False, **style)


def _tick_steps(dataset: xr.Dataset) -> dict[int, float]:
    """Interval of the ticks of each mode (days): at most eight on its longest route."""
    times = dataset["route_front_time_days"].values
    modes = dataset["route_mode"].values
    longest = [float(np.max(times[modes == i], initial=0.0)) for i in range(dataset.sizes["mode"])]
    steps = _TICK_STEPS[np.searchsorted(_TICK_STEPS[:-1], np.array(longest) / 8.0)]
    return dict(zip(dataset["mode"].values.tolist(), steps.tolist(), strict=True))


def _tick_places(
    dataset: xr.Dataset, route: int, view: View, step: float
) -> list[tuple[int, float, float, float]]:
    """Number of the tick, map coordinates and direction of travel (degrees) along a route."""
    legs = legs_of(dataset, route)
    index = [vertex for leg in legs for vertex in vertices_of(dataset, leg)]
    if len(index) < 2:
        return []
    time = dataset["vertex_time_days"].values[index]
    x, y = view.place(
        dataset["vertex_longitude"].values[index], dataset["vertex_latitude"].values[index]
    )
    numbers = np.arange(1, int(np.floor(time[-1] / step)) + 1)
    before = np.clip(np.searchsorted(time, numbers * step) - 1, 0, time.size - 2)
    share = (numbers * step - time[before]) / np.maximum(time[before + 1] - time[before], 1e-12)
    px, py = (v[before] + share * (v[before + 1] - v[before]) for v in (x, y))
    angle = np.degrees(np.arctan2(y[before + 1] - y[before], x[before + 1] - x[before]))
    return [
        (int(n), float(a), float(b), float(c))
        for n, a, b, c in zip(numbers, px, py, angle, strict=True)
    ]


def _draw_legend(figure: Figure, axes: Axes, dataset: xr.Dataset) -> None:
    """What the lines and marks mean, below the map, and the caution."""
    from matplotlib.lines import Line2D

    widths = _widths(dataset)
    present = sorted({int(dataset["mode"].values[i]) for i in dataset["route_mode"].values})
    handles = [
        Line2D([], [], color=MODE_COLOURS[m], lw=widths[m], label=_mode_name(m)) for m in present
    ]
    if (dataset["leg_kind"].values == "attachment").any():
        handles.append(Line2D([], [], color="#3b3b3b", lw=1.2, ls=":", label="to the guide"))
    if (dataset["route_kind"].values == "alternative").any():
        handles.append(Line2D([], [], color="#3b3b3b", lw=1.2, ls="--", label="alternative route"))
    mark: dict[str, Any] = {"ls": "", "mec": "black"}
    handles.append(Line2D([], [], marker="*", mfc="#ffd23f", ms=12, label="event", **mark))
    reached = (dataset["status"].values == "reached").any(axis=1)
    if reached.any():
        handles.append(Line2D([], [], marker="o", mfc="black", ms=5, label="target", **mark))
    if not reached.all():
        handles.append(
            Line2D([], [], marker="o", mfc="white", ms=5, label="target not reached", **mark)
        )
    height = float(figure.get_figheight())
    figure.legend(
        handles=handles,
        loc="lower center",
        bbox_to_anchor=(0.5, 0.22 / height),
        ncols=len(handles) if len(handles) <= _MOST_IN_LINE else -(-len(handles) // 2),
        columnspacing=1.4,
        fontsize=NORMAL,
        frameon=False,
    )
    note = dataset.attrs["caution"].split("; ")[0].split(": ")[0]
    figure.text(0.5, 0.08 / height, note + ".", ha="center", fontsize=SMALL, color=GREY)


def _mode_name(mode: int) -> str:
    return "mode 0 (barotropic)" if mode == 0 else f"mode {mode}"
