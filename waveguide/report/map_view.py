"""What a map shows: the projection, its extent, land and graticule."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np

from waveguide.coast.shoreline import LAKE, Ring, shoreline
from waveguide.geodesy import wrap_longitude

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from pyproj import Proj

    from waveguide.geodesy import Array

Bounds = tuple[float, float, float, float]
"""Left, right, bottom and top of a map, in map coordinates (m)."""

LAND_COLOUR = "#dcd8cf"
LINE_COLOUR = "#c4ccd2"

_HIGHEST_LATITUDE = 84.0
"""Where a cylindrical map ends (degrees): towards the pole it grows without bound."""

_NICE_STEPS = np.array([0.5, 1.0, 2.0, 5.0, 10.0, 15.0, 20.0, 30.0, 45.0, 60.0])
"""Intervals of the graticule (degrees)."""


@dataclass(frozen=True)
class View:
    """A projection about a central meridian.

    Attributes
    ----------
    middle : float
        Central meridian, degrees east.
    pole : {-1, 0, 1}
        The pole a polar map is centred on; 0 for a cylindrical map.
    name : str
        The projection, as PROJ names it.
    """

    middle: float
    pole: int
    name: str

    @cached_property
    def _proj(self) -> Proj:
        from pyproj import Proj

        # over: longitudes are relative to the middle and may run past ±180 without a jump
        return Proj(proj=self.name, lat_0=90.0 * self.pole, over=True, ellps="WGS84")

    def project(self, east: Array, lat: Array) -> tuple[Array, Array]:
        """Map coordinates (m) of positions.

        Parameters
        ----------
        east, lat : ndarray
            Degrees east of the central meridian and degrees north.
        """
        lat = np.asarray(lat, float)
        if self.pole:  # beyond 60° on the far side the map is not shown, and grows without bound
            lat = self.pole * np.maximum(self.pole * lat, -60.0)
        else:
            lat = np.clip(lat, -_HIGHEST_LATITUDE, _HIGHEST_LATITUDE)
        x, y = self._proj(np.asarray(east, float), lat)
        return np.asarray(x), np.asarray(y)

    def place(self, lon: Array | float, lat: Array | float) -> tuple[Array, Array]:
        """Map coordinates (m) of separate positions, on the turn of longitude that is shown."""
        return self.project(wrap_longitude(np.asarray(lon) - self.middle), np.asarray(lat))


def choose_view(lon: Array, lat: Array) -> View:
    """A view that does not cut what lies at the given positions.

    The central meridian stands opposite the widest gap in longitude. What goes round a pole, or
    close to it, is seen from above the pole; the rest by Mercator, which keeps the shapes of
    coasts, or by Miller where it reaches latitudes that Mercator blows up.

    Parameters
    ----------
    lon, lat : ndarray, shape (n,)
        Degrees.

    Returns
    -------
    View
    """
    east = np.sort(wrap_longitude(lon))
    gaps = np.diff(east, append=east[0] + 360.0)
    widest = int(np.argmax(gaps))
    middle = float(wrap_longitude(east[widest] + gaps[widest] / 2.0 + 180.0))
    furthest, nearest = float(np.abs(lat).max()), float(np.abs(lat).min())
    one_side = bool(np.all(lat > 0.0) or np.all(lat < 0.0))
    if one_side and nearest > 40.0 and (gaps[widest] < 180.0 or furthest > 75.0):
        return View(middle, 1 if lat[0] > 0.0 else -1, "stere")
    return View(middle, 0, "merc" if furthest <= 65.0 else "mill")


def extent(view: View, x: Array, y: Array) -> Bounds:
    """Bounds with a margin, and not too slim for a figure.

    Parameters
    ----------
    view : View
    x, y : ndarray
        Map coordinates (m) of all that must be seen.
    """
    if view.pole:
        x, y = np.append(x, 0.0), np.append(y, 0.0)
    middle = np.array([x.min() + x.max(), y.min() + y.max()]) / 2.0
    half = np.array([np.ptp(x), np.ptp(y)]) / 2.0
    half = np.maximum(half * 1.12, 300e3)
    half = np.maximum(half, half[::-1] * np.array([0.8, 0.42]))
    (left, bottom), (right, top) = middle - half, middle + half
    return float(left), float(right), float(bottom), float(top)


def draw_land(axes: Axes, view: View, bounds: Bounds) -> None:
    """Land, and lakes on it, under everything else."""
    from matplotlib.collections import PolyCollection

    rings = _rings_shown(view, bounds)
    for is_lake, colour in ((False, LAND_COLOUR), (True, "white")):
        outlines = [
            outline
            for ring in rings
            if (ring.level == LAKE) == is_lake
            for outline in _outlines(ring, view, bounds)
        ]
        axes.add_collection(
            PolyCollection(outlines, facecolor=colour, edgecolor=colour, linewidth=0.3, zorder=1),
            autolim=False,
        )


def _rings_shown(view: View, bounds: Bounds) -> list[Ring]:
    """The rings large enough to be seen, on the latitudes of the map."""
    width = bounds[1] - bounds[0]
    smallest = (width / 1e3 / 700.0) ** 2  # km²: two pixels by two
    if view.pole:
        south, north = sorted((20.0 * view.pole, 90.0 * view.pole))
    else:
        south, north = (_latitude(view, y) for y in bounds[2:])
    return [
        ring
        for ring in shoreline("low" if width > 8e6 else "intermediate")
        if ring.area >= smallest and ring.lat.max() >= south and ring.lat.min() <= north
    ]


def _outlines(ring: Ring, view: View, bounds: Bounds) -> list[Array]:
    """A ring on each turn of longitude on which the map shows some of it."""
    left, right, bottom, top = bounds
    found = []
    for turn in (0.0,) if view.pole else (-360.0, 0.0, 360.0):
        x, y = view.project(ring.lon - view.middle + turn, ring.lat)
        if x.max() > left and x.min() < right and y.max() > bottom and y.min() < top:
            found.append(np.column_stack([x, y]))
    return found


def draw_graticule(axes: Axes, view: View, bounds: Bounds) -> None:
    """Meridians and parallels with their degrees."""
    if view.pole:
        _polar_graticule(axes, view, bounds)
        return
    west, east = (_relative_longitude(view, x) for x in bounds[:2])
    south, north = (_latitude(view, y) for y in bounds[2:])
    easts = _nice_degrees(west + view.middle, east + view.middle, 9) - view.middle
    norths = _nice_degrees(south, north, 8)
    axes.set_xticks(view.project(easts, np.zeros_like(easts))[0])
    axes.set_xticklabels([_degrees(lon, "EW") for lon in wrap_longitude(easts + view.middle)])
    axes.set_yticks(view.project(np.zeros_like(norths), norths)[1])
    axes.set_yticklabels([_degrees(lat, "NS") for lat in norths])
    axes.tick_params(length=0, labelsize=7, colors="#4a4a4a")
    axes.set_axisbelow(True)
    axes.grid(color=LINE_COLOUR, linewidth=0.5, zorder=0)


def _relative_longitude(view: View, x: float) -> float:
    one_degree = float(view.project(np.array(1.0), np.array(0.0))[0])
    return x / one_degree


def _latitude(view: View, y: float) -> float:
    lat = np.linspace(-_HIGHEST_LATITUDE, _HIGHEST_LATITUDE, 1681)
    return float(np.interp(y, view.project(np.zeros_like(lat), lat)[1], lat))


def _nice_degrees(low: float, high: float, most: int) -> Array:
    enough = _NICE_STEPS[(high - low) / _NICE_STEPS <= most]
    step = enough[0] if enough.size else _NICE_STEPS[-1]
    return np.asarray(np.arange(np.ceil(low / step), np.floor(high / step) + 1.0) * step)


def _degrees(value: float, sides: str) -> str:
    if abs(value) < 1e-9 or abs(abs(value) - 180.0) < 1e-9:
        return f"{abs(value):g}°"
    return f"{abs(value):g}°{sides[0] if value > 0.0 else sides[1]}"


def _polar_graticule(axes: Axes, view: View, bounds: Bounds) -> None:
    axes.set_xticks([])
    axes.set_yticks([])
    style: dict[str, Any] = {"color": LINE_COLOUR, "linewidth": 0.5, "zorder": 0.5}
    around = np.linspace(-180.0, 180.0, 361)
    for lat in view.pole * np.arange(40.0, 90.0, 10.0):
        axes.plot(*view.project(around, np.full_like(around, lat)), **style)
        _edge_label(axes, view, bounds, np.array([0.0]), np.array([lat]), _degrees(lat, "NS"))
    outward = view.pole * np.linspace(89.0, 30.0, 600)
    for lon in np.arange(-150.0, 181.0, 30.0):
        east = np.full_like(outward, lon - view.middle)
        axes.plot(*view.project(east, outward), **style)
        _edge_label(axes, view, bounds, east, outward, _degrees(lon, "EW"))


def _edge_label(
    axes: Axes,
    view: View,
    bounds: Bounds,
    east: Array,
    lat: Array,
    text: str,
) -> None:
    """A label at the last position of a line that is well inside the map."""
    x, y = view.project(east, lat)
    inner = 0.96
    middle_x, middle_y = (bounds[0] + bounds[1]) / 2.0, (bounds[2] + bounds[3]) / 2.0
    inside = (np.abs(x - middle_x) < inner * (bounds[1] - middle_x)) & (
        np.abs(y - middle_y) < inner * (bounds[3] - middle_y)
    )
    if inside.any():
        last = np.flatnonzero(inside)[-1]
        style: dict[str, Any] = {"ha": "center", "va": "center", "zorder": 0.6}
        axes.text(x[last], y[last], text, fontsize=7, color="#6a6a6a", **style)
