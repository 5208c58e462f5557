"""A section drawn: depths, stratification, and the pressure of the modes."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from waveguide.report.figures import LARGE, fit_for_print, new_figure
from waveguide.report.text import plain

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Array = NDArray[np.float64]

_GROUND, _RAW, _DEPTH, _N2 = "#d9cfc1", "#8a8a8a", "#7a4a1d", "#0b5c8a"
_LEVELS = np.round(np.arange(-1.0, 1.01, 0.1), 1)
_MOST_PANELS = 3
_DEPTH_TICKS = np.array([20.0, 50.0, 100.0, 200.0, 500.0, 1000.0, 2000.0, 3000.0, 4000.0,
                         6000.0, 8000.0, 10000.0])


def draw_section(dataset: xr.Dataset) -> Figure:
    """A figure of a section and its baroclinic modes.

    Parameters
    ----------
    dataset : xarray.Dataset
        From :func:`waveguide.report.section_dataset.section_dataset`.

    Returns
    -------
    matplotlib.figure.Figure
        Depths and N² above, pressure of up to three modes below.
    """
    figure = new_figure(130.0)
    rows = figure.add_gridspec(
        2, 12, height_ratios=(1.0, 1.05), left=0.08, right=0.90, top=0.90, bottom=0.09,
        hspace=0.42, wspace=1.2,
    )
    _draw_depths(figure.add_subplot(rows[0, :8]), dataset)
    _draw_stratification(figure.add_subplot(rows[0, 9:]), dataset)
    shown = np.flatnonzero(dataset["mode"].values > 0)[:_MOST_PANELS]
    panels: list[Axes] = []
    for place, row in enumerate(shown):
        axes = figure.add_subplot(rows[1, 4 * place : 4 * place + 4])
        colours = _draw_mode(axes, dataset, int(row), first=place == 0)
        panels.append(axes)
    _draw_scale(figure, panels, colours)
    figure.suptitle(_title(dataset), x=0.08, y=0.975, ha="left", fontsize=LARGE)
    return fit_for_print(figure)


def _title(dataset: xr.Dataset) -> str:
    a = dataset.attrs
    east, north = "E" if a["longitude"] >= 0.0 else "W", "N" if a["latitude"] >= 0.0 else "S"
    place = f"{abs(a['latitude']):.2f}°{north} {abs(a['longitude']):.2f}°{east}"
    quality = "" if a["quality"] == "no flags" else f"  ({plain(a['quality'], 70)})"
    return f"Cross-shelf section at {place}{quality}"


def _reach(dataset: xr.Dataset) -> float:
    """Distance (km) that is drawn: the slope's foot and twice the widest trapping scale."""
    x, h = dataset["section_offshore_km"].values, dataset["section_depth_m"].values
    foot = float(x[np.argmax(h >= 0.9 * h[-1])])
    baroclinic = dataset["mode"].values > 0
    widest = float(dataset["trapping_scale_km"].values[baroclinic].max(initial=0.0))
    return float(min(x[-1], max(1.3 * foot, 2.0 * widest)))


def _depth_axis(axes: Axes, deepest: float, top: float = 0.0, labelled: bool = True) -> None:
    """Depth downward on a square-root scale, which gives shelf and deep sea room both."""
    axes.set_yscale("function", functions=(_signed_root, _signed_square))
    axes.set_ylim(deepest, top)
    kept = [0.0]
    for tick in _DEPTH_TICKS[deepest >= _DEPTH_TICKS]:
        if np.sqrt(tick) - np.sqrt(kept[-1]) > 0.09 * np.sqrt(deepest):
            kept.append(float(tick))
    axes.set_yticks(kept, [f"{tick:g}" for tick in kept])
    if labelled:
        axes.set_ylabel("Depth (m)")
    else:
        axes.tick_params(labelleft=False)


def _signed_root(depth: Array) -> Array:
    return np.asarray(np.sign(depth) * np.sqrt(np.abs(depth)))


def _signed_square(root: Array) -> Array:
    return np.asarray(np.sign(root) * root**2)


def _draw_depths(axes: Axes, dataset: xr.Dataset) -> None:
    x, h = dataset["section_offshore_km"].values, dataset["section_depth_m"].values
    raw_x, raw_h = dataset["raw_offshore_km"].values, dataset["raw_depth_m"].values
    deepest = 1.05 * max(h.max(), raw_h.max())
    axes.fill_between(x, h, deepest, color=_GROUND, lw=0.0)
    axes.plot(raw_x, raw_h, color=_RAW, lw=1.2, label="raw depths")
    axes.plot(x, h, color=_DEPTH, lw=1.6, label="monotonic section")
    axes.set_xlim(0.0, _reach(dataset))
    _depth_axis(axes, deepest, min(0.0, 1.05 * raw_h.min()))
    axes.set_xlabel("Distance from the shore (km)")
    axes.legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=2, frameon=False, fontsize=9,
                borderaxespad=0.2)


def _draw_stratification(axes: Axes, dataset: xr.Dataset) -> None:
    depth, n2 = dataset["n2_depth_m"].values, dataset["n2"].values
    deepest = float(dataset["section_depth_m"].values.max())
    reached = float(dataset.attrs["stratification_reaches_m"])
    known = depth <= reached
    axes.plot(n2[known], depth[known], color=_N2, marker=".", ms=4, lw=1.4)
    if (~known).any():
        from_last = np.flatnonzero(~known)[0] - 1
        axes.plot(n2[from_last:], depth[from_last:], color=_N2, lw=1.0, ls=":")
    axes.set_xscale("log")
    _depth_axis(axes, 1.05 * deepest)
    axes.set_xlabel("N² (s$^{-2}$)")


def _draw_mode(axes: Axes, dataset: xr.Dataset, row: int, first: bool) -> Any:
    """Pressure of one mode relative to that at the coast's surface."""
    x, z = dataset["column_offshore_km"].values, dataset["level_depth_m"].values
    pressure = dataset["pressure"].values[row]
    section_x, section_h = dataset["section_offshore_km"].values, dataset["section_depth_m"].values
    largest = float(np.nanmax(np.abs(pressure)))
    scale = 1.0 if largest <= 1.05 else largest
    filled = _filled_below(pressure) / scale
    colours = axes.contourf(x, z, np.clip(filled, -1.0, 1.0), levels=_LEVELS, cmap="RdBu_r")
    axes.contour(x, z, filled, levels=[0.0], colors="#303030", linewidths=1.0)
    deepest = 1.05 * section_h.max()
    axes.fill_between(section_x, section_h, deepest, color=_GROUND, lw=0.0, zorder=3)
    axes.plot(section_x, section_h, color=_DEPTH, lw=1.2, zorder=4)
    axes.set_xlim(0.0, _reach(dataset))
    _depth_axis(axes, deepest, labelled=first)
    axes.set_xlabel("Distance from the shore (km)")
    number, speed = int(dataset["mode"].values[row]), dataset["phase_speed_m_s"].values[row]
    times = "" if scale == 1.0 else f"\npressure / {scale:.2g}"
    axes.set_title(f"Mode {number}: {speed:.2f} m/s, "
                   f"{dataset['phase_speed_km_day'].values[row]:.0f} km/day{times}", fontsize=9.5)
    return colours


def _filled_below(pressure: Array) -> Array:
    """The field with the bottom value repeated below it, so that colours reach the bottom."""
    level = np.arange(pressure.shape[0])[:, None]
    last = np.maximum.accumulate(np.where(np.isfinite(pressure), level, 0), axis=0)
    return np.asarray(np.take_along_axis(pressure, last, axis=0))


def _draw_scale(figure: Figure, panels: list[Axes], colours: Any) -> None:
    box = panels[-1].get_position()
    scale = figure.colorbar(colours, cax=figure.add_axes((0.915, box.y0, 0.014, box.height)))
    scale.set_label("Pressure relative to the coast's surface", fontsize=7)
    scale.set_ticks([-1.0, -0.5, 0.0, 0.5, 1.0])
