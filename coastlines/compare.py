"""Compare ETOPO1 at 0.1° with ETOPO5 on shelves, as told in SOURCES.md.

Run it with ``python coastlines/compare.py`` after fetching; it prints the table.
"""

from __future__ import annotations

import netCDF4
import numpy as np
from numpy.typing import NDArray
from packages import (
    CLIMATOLOGY_PACKAGE,
    TOPOGRAPHY_MEMBER,
    TOPOGRAPHY_WHEEL,
    package_member,
    wheel_member,
)

from waveguide.geodesy import wrap_longitude
from waveguide.ocean.bathymetry import Bathymetry

Array = NDArray[np.float64]

SHELVES = {
    "Oregon and Washington": (-126, -123.5, 42, 48),
    "California": (-124.5, -117, 32.5, 41),
    "Peru and northern Chile": (-82, -70, -24, -4),
    "Patagonia": (-70, -55, -54, -36),
    "Agulhas Bank": (17, 27, -37, -33),
    "North-west Australia": (112, 130, -22, -12),
    "South-east Australia": (148, 152, -39, -30),
    "Great Australian Bight": (120, 140, -39, -31),
    "East China Sea": (118, 128, 24, 38),
    "North Sea": (-4, 8, 51, 60),
    "Middle Atlantic Bight": (-76, -69, 36, 41.5),
    "Bering Sea": (-180, -160, 55, 65),
    "Arafura Sea": (130, 142, -12, -5),
    "Amazon": (-52, -44, -1, 6),
    "Antarctic Peninsula": (-68, -50, -70, -62),
    "West India": (68, 77, 8, 23),
    "Gulf of Guinea": (-8, 9, 3, 7),
}
"""West, east, south and north of the boxes, degrees."""

SHELF = 500.0
"""Depth (m) to which the grids are compared."""


def grid(content: bytes, names: tuple[str, str, str], columns: int) -> Bathymetry:
    """A global node-registered grid whose first column is 0° E."""
    with netCDF4.Dataset("raw", memory=content) as raw:
        z = np.asarray(raw[names[2]][:], np.float32)[:, :columns]
    lon = wrap_longitude(np.arange(columns) * 360.0 / columns)  # the file's own are rounded
    order = np.argsort(lon)
    lat = np.linspace(-90.0, 90.0, z.shape[0])
    return Bathymetry(lon[order], lat, np.rint(-z[:, order]))


def inside(axis: Array, low: float, high: float) -> NDArray[np.intp]:
    """Indices of an axis within a range."""
    return np.flatnonzero((axis >= low) & (axis <= high))


def own_shelf(bathymetry: Bathymetry, box: tuple[float, float, float, float]) -> tuple[
    float, float, float
]:
    """Of one grid's shelf cells: number by area (in squared degrees), and two signs of charts.

    The signs are the parts that are whole tens of metres (by chance 0.1) and that equal the
    neighbour to the west to the metre: depths digitised from contours rather than sounded.
    """
    i, j = inside(bathymetry.lon, *box[:2]), inside(bathymetry.lat, *box[2:])
    depth = bathymetry.depth[np.ix_(j, i)]
    shelf = (depth > 0.0) & (depth < SHELF)
    cell = (bathymetry.lon[1] - bathymetry.lon[0]) ** 2
    flat = (np.diff(depth, axis=1) == 0.0) & shelf[:, 1:]
    tens = float(np.mean(depth[shelf] % 10.0 == 0.0))
    return float(shelf.sum() * cell), tens, float(flat.sum() / shelf.sum())


def main() -> None:
    """Print the table."""
    fine = grid(wheel_member(TOPOGRAPHY_WHEEL, TOPOGRAPHY_MEMBER), ("lon", "lat", "z"), 3600)
    member = "./usr/share/ferret-vis/data/etopo5.cdf"
    coarse = grid(package_member(CLIMATOLOGY_PACKAGE, member),
                  ("ETOPO05_X", "ETOPO05_Y", "ROSE"), 4320)
    print("| shelf | points | median depth 1 / 5 (m) | median 5 − 1 (m) | median abs (m) "
          "| relative | whole tens 1 / 5 | flat 1 / 5 | area 5 : 1 |")
    print("|--|--|--|--|--|--|--|--|--|")
    for name, box in SHELVES.items():
        lon, lat = np.meshgrid(fine.lon[inside(fine.lon, *box[:2])],
                               fine.lat[inside(fine.lat, *box[2:])])
        one, five = fine.sample(lon, lat), coarse.sample(lon, lat)
        both = (one > 0) & (one < SHELF) & (five > 0) & (five < SHELF)
        one, five = one[both], five[both]
        area1, tens1, flat1 = own_shelf(fine, box)
        area5, tens5, flat5 = own_shelf(coarse, box)
        print(f"| {name} | {one.size} | {np.median(one):.0f} / {np.median(five):.0f} "
              f"| {np.median(five - one):+.0f} | {np.median(abs(five - one)):.0f} "
              f"| {np.median(abs(five - one) / one):.2f} | {tens1:.2f} / {tens5:.2f} "
              f"| {flat1:.2f} / {flat5:.2f} | {area5 / area1:.2f} |")


if __name__ == "__main__":
    main()
