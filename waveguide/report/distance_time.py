"""Distance–time diagrams: how the signal moves along each way, and where its energy goes.

Distance along the headline routes is the upright axis, so that targets can be named beside it.
Fronts are drawn solid where the dominant period is above the critical frequency and dotted where
it is below, so that sea level rises almost at once and the front is no wave to be followed. The
critical latitude is that of a coast along the meridian.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from waveguide.report.colours import FATE_COLOURS, KIND_COLOURS, MODE_COLOURS
from waveguide.report.figures import (
    GREY,
    MILLIMETRES,
    NORMAL,
    SMALL,
    add_axes,
    event_start,
    mode_name,
    new_figure,
    save_figure,
    write_heading,
)
from waveguide.report.fronts import front_of
from waveguide.report.text import plain
from waveguide.report.ways import Way, guided_legs, guided_vertices, ways

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]

_BELOW, _CRITICAL = (0, (1.0, 1.4)), (0, (6.0, 2.0, 1.0, 2.0))
"""Dashes of a front below the critical frequency, and of a critical latitude."""

_LABEL_PLACES = (0.85, 0.15, 0.5, 0.7, 0.3)
"""Where a critical latitude may be named, in widths of the axes."""

_TOP, _BOTTOM, _BETWEEN = 17.0, 28.0, 17.0
_STRIP, _MAIN, _ENERGY = (18.0, 3.0), (22.0, 70.0), (127.0, 40.0)
"""Left edge and width of the parts of a row (mm)."""


def write_distance_time(dataset: xr.Dataset, folder: Path) -> None:
    """Write ``distance_time.png`` and ``distance_time.pdf``.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals that pass :func:`waveguide.schema.check`.
    folder : Path
    """
    save_figure(draw_distance_time(dataset), folder, "distance_time", dataset)


def draw_distance_time(dataset: xr.Dataset) -> Figure:
    """A row for each way, with fronts, half-heights and peaks beside the budget of energy.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals that pass :func:`waveguide.schema.check`.

    Returns
    -------
    matplotlib.figure.Figure
    """
    found = ways(dataset)
    heights = [_row_height(dataset, way) for way in found]
    full = _TOP + sum(heights) + _BETWEEN * (len(found) - 1) + _BOTTOM
    figure = new_figure(full)
    top = full - _TOP
    for way, height in zip(found, heights, strict=True):
        _draw_row(figure, dataset, way, top - height, height)
        top -= height + _BETWEEN
    write_heading(
        figure, dataset,
        f"dominant period {dataset.attrs['period_days']:g} days; "
        f"time from {event_start(dataset)}, the start of the event",
    )
    _draw_legend(figure, dataset)
    return figure


def _row_height(dataset: xr.Dataset, way: Way) -> float:
    """Of the axes (mm): enough to name every target."""
    return max(46.0, 4.0 * len(_stations(dataset, way)))


def _stations(dataset: xr.Dataset, way: Way) -> dict[int, float]:
    """Targets on a way and their distance along it (km), that of the lowest mode."""
    target, length = dataset["route_target"].values, dataset["route_length_km"].values
    by_mode = sorted(way.routes, key=lambda route: -int(dataset["route_mode"].values[route]))
    return {int(target[route]): float(length[route]) for route in by_mode}


def _draw_row(figure: Figure, dataset: xr.Dataset, way: Way, bottom: float, height: float) -> None:
    stations = _stations(dataset, way)
    longest = 1.04 * max(*dataset["route_length_km"].values[way.routes], 1.0)
    main = add_axes(figure, _MAIN[0], bottom, _MAIN[1], height)
    main.set_ylim(0.0, longest)
    main.set_yticks([])
    main.set_xlim(0.0, _last_time(dataset, way))
    main.set_xlabel("Time (days)", fontsize=NORMAL, labelpad=2.0)
    main.spines[["top", "right"]].set_visible(False)
    far = plain(dataset["target"].values[max(stations, key=lambda t: stations[t])], 34)
    main.set_title(f"Towards {far}", loc="left", fontsize=NORMAL, weight="bold", parse_math=False)
    modes = [m for m in range(dataset.sizes["mode"]) if way.longest(dataset, m) is not None]
    _draw_kinds(add_axes(figure, _STRIP[0], bottom, _STRIP[1], height), dataset, way, longest)
    for mode in modes:
        _draw_mode(main, dataset, way, mode)
    _draw_critical(main, dataset, way, modes, height)
    _draw_names(main, dataset, stations, height)
    width = _ENERGY[1] / len(modes)
    for place, mode in enumerate(modes):
        axes = add_axes(figure, _ENERGY[0] + place * width, bottom, width - 2.0, height)
        _draw_energy(axes, dataset, way, mode, longest)


def _last_time(dataset: xr.Dataset, way: Way) -> float:
    """When the last peak, or front where there is none, has passed (days)."""
    times = [float(dataset.attrs["event_duration_days"])]
    for route in way.routes:
        row = int(dataset["route_target"][route]), int(dataset["route_mode"][route])
        times += [
            float(dataset[f"{name}_time_days"].values[row])
            for name in ("front", "half_height", "peak")
        ]
    return 1.05 * float(np.nanmax(times))


def _draw_kinds(axes: Axes, dataset: xr.Dataset, way: Way, longest: float) -> None:
    """The legs of the longest route by their kind, with the axis of distance."""
    axes.set_xlim(0.0, 1.0)
    axes.set_ylim(0.0, longest)
    axes.set_xticks([])
    axes.spines[["top", "right", "bottom"]].set_visible(False)
    axes.set_ylabel("Distance (km)", fontsize=NORMAL, labelpad=2.0)
    start, shortest = 0.0, longest / 60.0  # a strait is to be seen
    for leg in guided_legs(dataset, way.routes[0]):
        length = float(dataset["leg_length_km"].values[leg])
        kind = str(dataset["leg_kind"].values[leg])
        gap = kind not in ("coast", "equator")
        axes.barh(
            start + 0.5 * length, 1.0, max(length, shortest) if gap else length,
            color=KIND_COLOURS[kind], ec="white", lw=0.4, zorder=3 if gap else 2,
        )
        start += length


def _draw_mode(axes: Axes, dataset: xr.Dataset, way: Way, mode: int) -> None:
    """Front of a mode along its longest route, half-height and peak at every target."""
    route = way.longest(dataset, mode)
    assert route is not None  # the modes of a way have a route
    number = int(dataset["mode"].values[mode])
    colour, front = MODE_COLOURS[number], front_of(dataset, route)
    slow = front.below[1:] | front.below[:-1]
    for chosen, style in ((~slow, "-"), (slow, _BELOW)):
        # a line for each run of segments: NaN parts them
        starts = np.flatnonzero(chosen)
        x, y = (
            np.column_stack([v[starts], v[starts + 1], np.full(starts.size, np.nan)]).ravel()
            for v in (front.time, front.distance)
        )
        axes.plot(*_joined(x, y), color=colour, lw=1.1, ls=style, zorder=3)
    mark: dict[str, Any] = {"ls": "", "mec": colour, "mew": 0.8, "ms": 3.6, "zorder": 5,
                            "clip_on": False}
    for other in way.routes:
        if int(dataset["route_mode"].values[other]) != mode:
            continue
        row = int(dataset["route_target"].values[other]), mode
        place = float(dataset["route_length_km"].values[other])
        for name, face in (("half_height", "white"), ("peak", colour)):
            when = float(dataset[f"{name}_time_days"].values[row])
            axes.plot(when, place, marker="o", mfc=face, **mark)


def _joined(x: Array, y: Array) -> tuple[Array, Array]:
    """Segments (start, end, NaN) as lines without the gaps between those that meet."""
    keep = np.ones(x.size, dtype=bool)
    meets = np.flatnonzero((x[1:-2:3] == x[3::3]) & (y[1:-2:3] == y[3::3]))
    keep[3 * meets + 2] = False
    return x[keep], y[keep]


def _draw_critical(
    axes: Axes, dataset: xr.Dataset, way: Way, modes: list[int], height: float
) -> None:
    """Lines at the critical latitudes of the modes, named between the fronts."""
    fronts = {mode: front_of(dataset, route) for mode in modes
              if (route := way.longest(dataset, mode)) is not None}
    found = [(mode, *one) for mode, front in fronts.items() for one in front.critical]
    scale = float(axes.get_ylim()[1]) / height  # km in a mm
    level = spread([place for _, place, _ in found], 3.4 * scale, 2.2 * scale)
    late = float(dataset.attrs["event_duration_days"]) / 2.0  # of a peak behind its front
    for (mode, place, latitude), y in zip(found, level, strict=True):
        colour = MODE_COLOURS[int(dataset["mode"].values[mode])]
        axes.axhline(place, color=colour, lw=0.6, ls=_CRITICAL, zorder=2)
        times = np.array([np.interp(place, f.distance, f.time) for f in fronts.values()])
        taken = np.concatenate([times, times + late]) / axes.get_xlim()[1]
        axes.text(
            max(_LABEL_PLACES, key=lambda x: float(np.abs(taken - x).min())), y,
            f"critical {abs(latitude):.1f}°{'N' if latitude > 0.0 else 'S'}", color=colour,
            ha="center", va="center", fontsize=SMALL, zorder=4,
            transform=axes.get_yaxis_transform(), bbox={"fc": "white", "ec": "none", "pad": 0.6},
        )


def _draw_names(
    axes: Axes, dataset: xr.Dataset, stations: dict[int, float], height: float
) -> None:
    """Names of the targets at the right, level with their places or led to from there."""
    scale = float(axes.get_ylim()[1]) / height
    order = sorted(stations, key=lambda target: stations[target])
    places = [stations[target] for target in order]
    for target, place, y in zip(order, places, spread(places, 3.4 * scale), strict=True):
        axes.axhline(place, color="#d8d8d8", lw=0.5, zorder=1)
        axes.annotate(
            plain(dataset["target"].values[target], 22), (1.0, place), (1.045, y),
            xycoords=axes.get_yaxis_transform(), textcoords=axes.get_yaxis_transform(),
            fontsize=SMALL, va="center", annotation_clip=False, parse_math=False,
            arrowprops={"arrowstyle": "-", "lw": 0.5, "color": "#9a9a9a", "shrinkA": 1.0,
                        "shrinkB": 0.0},
        )


def spread(places: list[float], gap: float, lowest: float = -np.inf) -> list[float]:
    """Places moved apart so that neighbours keep a gap, as little as may be.

    Neighbours that are too close become a group about the middle of their wishes (the pool of
    adjacent violators).

    Parameters
    ----------
    places : list of float
    gap : float
    lowest : float
        No place is moved below it.

    Returns
    -------
    list of float
        In the order given.

    Examples
    --------
    >>> spread([0.0, 10.0, 10.5], 1.0)
    [0.0, 9.75, 10.75]
    """
    order = sorted(range(len(places)), key=lambda i: places[i])
    groups: list[list[float]] = []  # the sum of the wishes for the lowest place, and how many
    for rank, i in enumerate(order):
        groups.append([places[i] - rank * gap, 1.0])
        while len(groups) > 1 and groups[-2][0] / groups[-2][1] > groups[-1][0] / groups[-1][1]:
            total, count = groups.pop()
            groups[-1][0] += total
            groups[-1][1] += count
    level = [total / count for total, count in groups for _ in range(int(count))]
    moved = [0.0] * len(places)
    for rank, i in enumerate(order):
        moved[i] = max(level[rank] + rank * gap, lowest + rank * gap)
    return moved


def _draw_energy(axes: Axes, dataset: xr.Dataset, way: Way, mode: int, longest: float) -> None:
    """What is still on its way, and what has become of the rest, along the longest route."""
    route = way.longest(dataset, mode)
    assert route is not None  # as above
    index = guided_vertices(dataset, route)
    taken = dataset["vertex_taken"].values[index]
    distance = dataset["vertex_distance_km"].values[index]
    edge = 1.0 - taken.sum(axis=1)
    for fate, share in zip(dataset["fate_name"].values, taken.T, strict=True):
        axes.fill_betweenx(distance, 100.0 * edge, 100.0 * (edge + share), lw=0.0,
                           color=FATE_COLOURS[str(fate)])
        edge = edge + share
    number = int(dataset["mode"].values[mode])
    axes.plot(100.0 * (1.0 - taken.sum(axis=1)), distance, color=MODE_COLOURS[number], lw=1.1)
    axes.set_xlim(0.0, 100.0)
    axes.set_ylim(0.0, longest)
    axes.set_yticks([])
    first, last = axes.set_xticks([0.0, 100.0], ["0", "100"])
    first.label1.set_horizontalalignment("left")
    last.label1.set_horizontalalignment("right")
    axes.set_title(f"mode {number}", fontsize=SMALL, pad=3.0)
    axes.set_xlabel("Energy (%)", fontsize=SMALL, labelpad=2.0)


def _draw_legend(figure: Figure, dataset: xr.Dataset) -> None:
    """What lines, marks and colours mean, below the rows."""
    from matplotlib.lines import Line2D
    from matplotlib.patches import Patch

    modes = sorted({int(dataset["mode"].values[i]) for i in dataset["route_mode"].values})
    handles: list[Any] = [
        Line2D([], [], color=MODE_COLOURS[m], lw=1.1, label=mode_name(m)) for m in modes
    ]
    line: dict[str, Any] = {"color": GREY, "lw": 1.1}
    mark: dict[str, Any] = {"marker": "o", "ls": "", "mec": GREY, "mew": 0.8, "ms": 3.6}
    fronts = [front_of(dataset, route) for way in ways(dataset) for route in way.routes]
    if any(front.below.any() for front in fronts):
        handles.append(Line2D([], [], ls=_BELOW, label="below critical frequency", **line))
    if any(front.critical for front in fronts):
        line["lw"] = 0.6
        handles.append(Line2D([], [], ls=_CRITICAL, label="critical latitude", **line))
    handles += [
        Line2D([], [], mfc="white", label="half-height", **mark),
        Line2D([], [], mfc=GREY, label="peak", **mark),
    ]
    kinds = set(dataset["leg_kind"].values.tolist())
    handles += [Patch(color=c, label=kind) for kind, c in KIND_COLOURS.items() if kind in kinds]
    lost = dataset["vertex_taken"].values.max(axis=0, initial=0.0)
    handles += [
        Patch(color=FATE_COLOURS[str(fate)], label=f"energy: {fate}")
        for fate, share in zip(dataset["fate_name"].values, lost, strict=True) if share > 5e-3
    ]
    height = figure.get_figheight() * MILLIMETRES
    figure.legend(
        handles=handles, loc="lower center", bbox_to_anchor=(0.5, 3.5 / height), ncols=4,
        fontsize=SMALL, frameon=False, columnspacing=1.3, handlelength=1.8, labelspacing=0.3,
    )
