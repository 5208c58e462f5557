"""Building the atlas of section modes from files: the shipped ones or a person's own."""

from __future__ import annotations

import hashlib
import shutil
from collections.abc import Callable
from pathlib import Path

import numpy as np

from waveguide.constants import deformation_radius
from waveguide.errors import InputError
from waveguide.network.atlas import Atlas, TrappedAtlas, flat_bottom_atlas
from waveguide.network.graph import Network
from waveguide.network.latitude import typical_ocean
from waveguide.network.packaged import network_file, packaged_network
from waveguide.network.trapped_atlas import Region, build_trapped_atlas, inside
from waveguide.network.trapped_store import ATLAS_FILE, NETWORK_HASH, save_atlas
from waveguide.ocean.bathymetry import Bathymetry, packaged_bathymetry, read_bathymetry
from waveguide.ocean.hydrography import read_climatology
from waveguide.ocean.packaged import used_files
from waveguide.ocean.seawater import TemperatureKind
from waveguide.ocean.stratification import Climatology, packaged_climatology

PARTS = ".atlas-parts"
"""Folder beside the result where finished parts wait for the rest."""


def atlas_file(
    out: Path,
    region: Region | None = None,
    bathymetry: Path | None = None,
    climatology: Path | None = None,
    temperature: TemperatureKind | None = None,
    workers: int = 2,
    report: Callable[[int, int], None] = lambda done, total: None,
) -> tuple[Path, TrappedAtlas]:
    """Compute the atlas of section modes and write it.

    Finished parts are kept in the folder until the whole is written, so that a run which was
    interrupted goes on where it stopped.

    Parameters
    ----------
    out : Path
        Folder of the result, made if need be.
    region : (west, south, east, north), optional
        Degrees; the whole globe if not given.
    bathymetry, climatology : Path, optional
        CF NetCDF files; the packaged data if not given.
    temperature : {"in-situ", "potential", "conservative"}, optional
        Kind of temperature in the climatology, where the file does not say it.
    workers : int
        Processes.
    report : callable, optional
        Told how many parts of how many are done.

    Returns
    -------
    path : Path
        The file.
    atlas : TrappedAtlas
        Modes 0 to 3.

    Raises
    ------
    InputError
        If a file cannot be used, the region is none or has no coast, or `out` cannot be written.
    """
    network, packaged = packaged_network("baroclinic")
    check_region(network, region)
    if temperature is not None and climatology is None:
        raise InputError(
            f"--temperature {temperature}: it says what a climatology of your own holds; name that "
            "file with --climatology, or leave --temperature out"
        )
    depths = packaged_bathymetry() if bathymetry is None else read_bathymetry(bathymetry)
    columns = (
        packaged_climatology() if climatology is None
        else read_climatology(climatology, temperature=temperature)
    )
    flat = packaged
    if bathymetry is not None or climatology is not None:
        flat = _own_flat_bottom(network, depths, columns)
        _require_cover(network, flat, region)
    parts = _parts_folder(out)
    atlas = build_trapped_atlas(
        network, flat, depths, columns, parts, region, workers, report
    )
    path = out / ATLAS_FILE
    part = out / f".{ATLAS_FILE}.part"
    save_atlas(part, network, atlas, _attributes(depths, columns, bathymetry, climatology, region))
    part.replace(path)
    shutil.rmtree(parts)
    return path, atlas


def check_region(network: Network, region: Region | None) -> None:
    """Refuse a region that is none, or in which no guide runs.

    Parameters
    ----------
    network : Network
    region : (west, south, east, north) or None

    Raises
    ------
    InputError
    """
    if region is None:
        return
    west, south, east, north = region
    stated = f"region {west:g} {south:g} {east:g} {north:g}"
    if not all(np.isfinite(region)) or max(abs(south), abs(north)) > 90.0:
        raise InputError(f"{stated}: give west, south, east, north in degrees, latitudes -90..90")
    if max(abs(west), abs(east)) > 360.0:
        raise InputError(f"{stated}: longitudes must lie within -360..360 degrees")
    if south >= north:
        raise InputError(f"{stated}: south must be less than north; give west south east north")
    if east <= west:
        raise InputError(
            f"{stated}: east must be more than west; across the date line write it as "
            f"{west:g} {south:g} {east + 360.0:g} {north:g}"
        )
    if not (inside(network, region) & np.isfinite(network.offshore)).any():
        raise InputError(f"{stated}: no coast of the guide lies in it; make it larger")


def _require_cover(network: Network, flat: Atlas, region: Region | None) -> None:
    """Refuse files of one's own that reach no node of the region."""
    wanted = np.ones(network.size, bool) if region is None else inside(network, region)
    if not (wanted & np.isfinite(flat.phase_speed[flat.row(1)])).any():
        raise InputError(
            "the files given hold no deep water with stratification along the guide"
            f"{'' if region is None else ' in the region'}; give files that cover it, or leave "
            "them out to use the packaged data"
        )


def _parts_folder(out: Path) -> Path:
    parts = out / PARTS
    try:
        parts.mkdir(parents=True, exist_ok=True)
        (parts / ".writable").touch()
    except OSError as error:
        raise InputError(
            f"output folder {str(out)!r}: it cannot be written ({error.strerror}); "
            "choose a folder you may write with --out"
        ) from None
    return parts


def _own_flat_bottom(network: Network, depths: Bathymetry, columns: Climatology) -> Atlas:
    """Flat-bottom modes of a person's own data."""
    typical = typical_ocean(packaged_climatology())
    speed = np.interp(network.lat, typical.lat, typical.phase_speed)
    return flat_bottom_atlas(network, depths, columns, deformation_radius(speed, network.lat))


def _attributes(
    depths: Bathymetry, columns: Climatology, bathymetry: Path | None, climatology: Path | None,
    region: Region | None,
) -> dict[str, str]:
    """Global attributes: what the atlas was made from."""
    shipped = used_files()
    return {
        "title": "long coastal-trapped modes of cross-shelf sections at the nodes of the guide",
        "bathymetry": depths.source,
        "bathymetry_sha256": _sha256(bathymetry) or shipped["bathymetry.nc"],
        "climatology": columns.source,
        "climatology_sha256": _sha256(climatology) or shipped["stratification.nc"],
        NETWORK_HASH: shipped[network_file("baroclinic")],
        "region": "globe" if region is None else " ".join(f"{value:g}" for value in region),
    }


def _sha256(path: Path | None) -> str:
    if path is None:
        return ""
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()
