"""A mode atlas from the user's own bathymetry and climatology, on the packaged guides."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np

from waveguide.constants import deformation_radius
from waveguide.network.atlas import Atlas, barotropic_atlas, flat_bottom_atlas
from waveguide.network.latitude import typical_ocean
from waveguide.network.packaged import Family, packaged_network
from waveguide.network.trapped_store import own_trapped_atlas
from waveguide.ocean.bathymetry import packaged_bathymetry, read_bathymetry
from waveguide.ocean.hydrography import read_climatology
from waveguide.ocean.seawater import TemperatureKind
from waveguide.ocean.stratification import packaged_climatology


@cache
def own_atlas(
    family: Family,
    bathymetry: Path | None,
    climatology: Path | None,
    temperature: TemperatureKind | None,
    atlas: Path | None = None,
) -> Atlas:
    """The modes of a family from files that a person brings.

    The guides stay the packaged ones; depths and stratification along them are the user's. Where
    one kind of file is not given the packaged one is used.

    Parameters
    ----------
    family : {"baroclinic", "barotropic"}
    bathymetry, climatology : Path or None
        CF NetCDF files.
    temperature : {"in-situ", "potential", "conservative"} or None
        The kind of temperature in the climatology; None where the file says it.
    atlas : Path or None
        Modes of sections in place of those of a flat bottom over the depths, for the baroclinic
        family.

    Returns
    -------
    Atlas
        With NaN at nodes that the files do not cover.

    Raises
    ------
    InputError
        If a file cannot be read as what it should be.
    """
    if atlas is not None and family == "baroclinic":
        return own_trapped_atlas(atlas)
    network, _ = packaged_network(family)
    depths = packaged_bathymetry() if bathymetry is None else read_bathymetry(bathymetry)
    if family == "barotropic":
        found = barotropic_atlas(network, depths)
    else:
        typical = typical_ocean(packaged_climatology())
        speed = np.interp(network.lat, typical.lat, typical.phase_speed)
        columns = (
            packaged_climatology()
            if climatology is None
            else read_climatology(climatology, temperature=temperature)
        )
        found = flat_bottom_atlas(
            network, depths, columns, deformation_radius(speed, network.lat)
        )
    covered = depths.covers(network.lon, network.lat)
    return replace(found, phase_speed=np.where(covered, found.phase_speed, np.nan))
