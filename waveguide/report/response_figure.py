"""Figures of a forced response: the series, and for each target which wind made its peak."""

from __future__ import annotations

import re
from itertools import pairwise
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import SECONDS_PER_DAY
from waveguide.forcing.answers import RESPONDS, TargetResponse
from waveguide.network.graph import Network, StepKind
from waveguide.report.colours import MODE_COLOURS
from waveguide.report.figures import arranged_figure, fit_for_print, save_for_print
from waveguide.report.response_text import place
from waveguide.report.text import plain

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure, SubFigure

    from waveguide.forcing.result import ResponseResult

Array = NDArray[np.float64]

MOST_TARGETS = 12
"""Targets drawn; the files have them all."""

_BARS = 10
_LEAST_BAR = 0.02  # of the longest
_NOTE = "#6a6a6a"


def write_response_figures(result: ResponseResult, dataset: xr.Dataset, folder: Path) -> None:
    """Write ``sea_level`` and a ``cause_…`` for each target, as PNG and PDF.

    Parameters
    ----------
    result : ResponseResult
    dataset : xarray.Dataset
        As declared in `RESPONSE`.
    folder : Path
    """
    title = str(dataset.attrs["title"])
    save_for_print(draw_series(dataset), folder, "sea_level", title)
    for target, name in enumerate(result.target[:MOST_TARGETS]):
        figure = draw_cause(result, dataset, target)
        if figure is not None:
            slug = re.sub(r"[^\w-]+", "-", plain(name, 60)).strip("-").lower() or "target"
            save_for_print(figure, folder, f"cause_{target + 1:02d}_{slug}", title)


def _figure(height: float, title: str, note: str) -> Figure:
    """An empty figure of a height in mm."""
    figure = arranged_figure(height, title)
    if note:
        figure.supxlabel(note, fontsize=7, color=_NOTE, parse_math=False)
    return figure


def _caution(dataset: xr.Dataset) -> str:
    return str(dataset.attrs["caution"]).split(": ")[0] + "."


def draw_series(dataset: xr.Dataset) -> Figure:
    """Sea level at every target, each mode and the sum.

    Parameters
    ----------
    dataset : xarray.Dataset

    Returns
    -------
    matplotlib.figure.Figure
    """
    count = min(dataset.sizes["target"], MOST_TARGETS)
    figure = _figure(
        25.0 + 24.0 * count, plain(dataset.attrs["title"], 85), _caution(dataset)
    )
    axes = figure.subplots(count, 1, sharex=True, squeeze=False)[:, 0]
    for target, axis in enumerate(axes):
        _draw_target(axis, dataset, target)
    axes[0].legend(loc="lower right", bbox_to_anchor=(1.0, 0.97), ncols=6, fontsize=8,
                   frameon=False)
    return fit_for_print(figure)


def _draw_target(axis: Axes, dataset: xr.Dataset, target: int) -> None:
    time = dataset["time"].values
    for m, mode in enumerate(dataset["mode"].values.tolist()):
        level = 100.0 * dataset["sea_level"].values[target, m]
        axis.plot(time, level, color=MODE_COLOURS[mode], lw=1.0, label=f"mode {mode}")
    total = 100.0 * dataset["total_sea_level"].values[target]
    if dataset.sizes["mode"] > 1:
        axis.plot(time, total, color="black", lw=1.3, label="sum")
    moment = dataset["total_peak_date"].values[target]
    if not np.isnat(moment):
        axis.plot(moment, 100.0 * dataset["total_peak"].values[target], "v", ms=5, color="#c22f2f",
                  label="peak")
    axis.axhline(0.0, color="#b0b0b0", lw=0.6, zorder=0)
    axis.set_ylabel("cm", fontsize=8)
    axis.set_title(plain(dataset["target"].values[target], 40), loc="left", fontsize=9,
                   parse_math=False)
    axis.tick_params(labelsize=8)
    axis.margins(x=0.01)


def draw_cause(result: ResponseResult, dataset: xr.Dataset, target: int) -> Figure | None:
    """Forcing and response along the main way to a target, and the stretches behind its peak.

    Parameters
    ----------
    result : ResponseResult
    dataset : xarray.Dataset
    target : int

    Returns
    -------
    matplotlib.figure.Figure or None
        None where the target does not respond.
    """
    mode = _leading_mode(result, target)
    if mode is None:
        return None
    answer, network = result.answers[mode].targets[target], result.networks[mode]
    peak = dataset["total_peak_date"].values[target]
    title = (
        f"{plain(result.target[target], 40)}: which wind made the "
        f"{100.0 * float(dataset['total_peak'].values[target]):+.1f} cm of "
        f"{np.datetime_as_string(peak, unit='D')}"
    )
    figure = _figure(150.0, title.replace(" -", " −"), "")
    parts: Any = figure.subfigures(2, 1, height_ratios=(1.7, 1.0))
    above, below = parts
    left, right = above.subplots(1, 2, sharey=True)
    shown = _Shown(answer, network, result.time, peak)
    for axis, values, what in (
        (left, shown.stress, f"Stress in the direction of travel (Pa), mode {mode}"),
        (right, 100.0 * shown.level, f"Sea level (cm), mode {mode}"),
    ):
        _draw_hovmoller(above, axis, shown, values)
        axis.set_title(what, fontsize=9)
    years = np.unique(shown.time.astype("datetime64[Y]").astype(str))[[0, -1]]
    left.set_ylabel("–".join(dict.fromkeys(years)), fontsize=8)
    _draw_bars(below.subplots(), dataset, target)
    below.supxlabel(_caution(dataset), fontsize=7, color=_NOTE)
    return fit_for_print(figure)


def _leading_mode(result: ResponseResult, target: int) -> int | None:
    """The mode with the largest response."""
    spread = {
        mode: float(answer.targets[target].sea_level.std())
        for mode, answer in result.answers.items()
        if answer.targets[target].status == RESPONDS
    }
    return max(spread, key=lambda mode: spread[mode]) if spread else None


class _Shown:
    """The part of the way, and of time, that is drawn.

    Upstream as far as 95 % of the influence lies, in time from before the wind that made the
    peak to somewhat after it.
    """

    def __init__(
        self, answer: TargetResponse, network: Network, time: NDArray[np.datetime64],
        peak: np.datetime64,
    ) -> None:
        way = answer.way
        assert way is not None  # the target responds
        near = way.delay <= 1.05 * answer.spin_up
        span = max(answer.spin_up, 30.0 * SECONDS_PER_DAY)
        first = peak - np.timedelta64(round(1.3 * span), "s")
        last = peak + np.timedelta64(round(0.5 * span), "s")
        when = (time >= first) & (time <= last)
        self.distance = -way.distance[near] / 1e6
        self.node, self.network, self.peak = way.node[near], network, peak
        self.time = time[when]
        self.stress, self.level = way.stress[near][:, when], way.sea_level[near][:, when]
        self.path = peak - (way.delay[near] * 1e9).astype("timedelta64[ns]")


def _draw_hovmoller(figure: SubFigure, axis: Axes, shown: _Shown, values: Array) -> None:
    """Distance to the target across, time upward, the characteristic that ends at the peak."""
    from matplotlib.dates import AutoDateLocator, ConciseDateFormatter

    limit = _limit(values)
    style: dict[str, Any] = {"cmap": "RdBu_r", "shading": "nearest", "rasterized": True}
    mesh = axis.pcolormesh(
        shown.distance, shown.time, values.T, vmin=-limit, vmax=limit, **style
    )
    figure.colorbar(mesh, ax=axis, location="bottom", shrink=0.9, pad=0.02).ax.tick_params(
        labelsize=7
    )
    axis.set_facecolor("#e6e3dc")  # straits and hops, where no wind counts
    axis.plot(shown.distance, shown.path, color="black", lw=1.2, ls="--")
    axis.plot(0.0, shown.peak, "v", ms=6, color="#c22f2f", clip_on=False)
    axis.set_ylim(shown.time[0], shown.time[-1])
    locator = AutoDateLocator()
    axis.yaxis.set_major_locator(locator)
    axis.yaxis.set_major_formatter(ConciseDateFormatter(locator, show_offset=False))
    axis.set_xlabel("Distance to the target (1000 km)", fontsize=8)
    axis.tick_params(labelsize=8)
    _mark_kinds(axis, shown)


def _limit(values: Array) -> float:
    """Ends of a colour scale: the largest value, or less where a few stand out."""
    known = np.abs(values[np.isfinite(values)])
    if not known.size:
        return 1.0
    return max(float(np.percentile(known, 99.5)), 0.6 * float(known.max()), 1e-6)


def _mark_kinds(axis: Axes, shown: _Shown) -> None:
    """Lines where coast and equator meet, with their names along the top."""
    network = shown.network
    into = {int(head): int(kind) for head, kind in zip(network.head, network.kind, strict=True)}
    kind = np.array([
        int(StepKind.EQUATOR) if network.equatorial[node] else into.get(int(node), 0)
        for node in shown.node
    ])
    bounds = np.concatenate([[0], np.nonzero(np.diff(kind))[0] + 1, [kind.size]])
    extent = float(np.ptp(shown.distance)) if shown.distance.size > 1 else 1.0
    for a, b in pairwise(bounds.tolist()):
        start, end = shown.distance[a], shown.distance[b - 1]
        if a > 0:
            axis.axvline(start, color="#3b3b3b", lw=0.6, ls=":")
        if end - start > 0.15 * extent:
            label = StepKind(int(kind[a])).label
            axis.text(0.5 * (start + end), shown.time[-1], label, fontsize=7, ha="center",
                      va="top", bbox={"fc": "white", "ec": "none", "pad": 1.0, "alpha": 0.7})


def _draw_bars(axis: Axes, dataset: xr.Dataset, target: int) -> None:
    """The stretches that made the peak, the strongest first, coloured by mode."""
    rows = np.nonzero(dataset["stretch_target"].values == target)[0]
    part = 100.0 * dataset["stretch_at_peak"].values[rows]
    order = np.argsort(-np.abs(part), kind="stable")[:_BARS]
    order = order[np.abs(part[order]) >= _LEAST_BAR * np.abs(part).max()]
    modes = dataset["mode"].values[dataset["stretch_mode"].values[rows[order]]].tolist()
    height = np.arange(order.size)
    axis.barh(height, part[order], color=[MODE_COLOURS[mode] for mode in modes], height=0.7)
    axis.set_yticks(height, [_bar_label(dataset, int(rows[k])) for k in order], fontsize=7)
    axis.invert_yaxis()
    axis.axvline(0.0, color="#3b3b3b", lw=0.6)
    axis.set_xlabel("Part of the peak (cm)", fontsize=8)
    axis.tick_params(axis="x", labelsize=8)
    for mode in sorted(set(modes)):
        axis.bar(0.0, 0.0, color=MODE_COLOURS[mode], label=f"mode {mode}")
    axis.legend(fontsize=7, frameon=False, loc="best")


def _bar_label(dataset: xr.Dataset, row: int) -> str:
    """Kind and ends of a stretch, with the dates of its wind."""
    kind = str(dataset["stretch_kind"].values[row])
    if kind == "elsewhere":
        return "all other stretches"
    ends = [
        place(*(float(dataset[f"stretch_{which}_{axis}"].values[row])
                for axis in ("longitude", "latitude")))
        for which in ("from", "to")
    ]
    if kind == "equator":
        ends = [end.split(" ")[1] for end in ends]
    dates = [
        np.datetime_as_string(dataset[f"stretch_wind_{which}"].values[row], unit="D")
        for which in ("start", "end")
    ]
    return f"{kind} {ends[0]} to {ends[1]}, {dates[0]} to {dates[1]}"
