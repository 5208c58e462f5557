"""The two shipped networks with their atlases, and how they are built from the shipped data."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from pathlib import Path
from typing import Literal

import numpy as np

from waveguide.network.atlas import Atlas
from waveguide.network.graph import Network
from waveguide.network.store import load_network, save_network
from waveguide.ocean.packaged import packaged_file

Family = Literal["baroclinic", "barotropic"]

TYPICAL_BAROTROPIC_SPEED = 200.0
"""√(gh) over 4000 m (m/s): sets the reach of facing coasts."""


def family_of(mode: int) -> Family:
    """The family of a mode.

    Parameters
    ----------
    mode : int
        0 for the barotropic mode, 1, 2, 3 … for baroclinic ones.

    Returns
    -------
    {"baroclinic", "barotropic"}
    """
    return "barotropic" if mode == 0 else "baroclinic"


def network_file(family: Family) -> str:
    """Name of the shipped file of a family.

    Parameters
    ----------
    family : {"baroclinic", "barotropic"}

    Returns
    -------
    str
    """
    return f"network_{family}.nc"


@cache
def packaged_network(family: Family) -> tuple[Network, Atlas]:
    """The shipped network of a family and its mode atlas.

    Parameters
    ----------
    family : {"baroclinic", "barotropic"}

    Returns
    -------
    Network
    Atlas
    """
    return load_network(packaged_file(network_file(family)))


def build_packaged(folder: Path, report: Callable[[str], None] = lambda stage: None) -> list[Path]:
    """Build both networks from the packaged shoreline, bathymetry and climatology.

    Parameters
    ----------
    folder : Path
        Where the files go.
    report : callable, optional
        Told what is being done.

    Returns
    -------
    list of Path
        The files written.
    """
    from waveguide.coast.raster import GlobalGrid
    from waveguide.coast.shoreline import land_mask
    from waveguide.constants import deformation_radius
    from waveguide.network.atlas import barotropic_atlas, flat_bottom_atlas
    from waveguide.network.build import baroclinic_rule, barotropic_rule, build_network
    from waveguide.network.latitude import typical_ocean
    from waveguide.ocean.bathymetry import packaged_bathymetry
    from waveguide.ocean.stratification import packaged_climatology

    depths, climatology = packaged_bathymetry(), packaged_climatology()
    grid = GlobalGrid(depths.lon, depths.lat)
    report("land mask")
    land = land_mask(depths.lon, depths.lat)
    typical = typical_ocean(climatology)
    rule = baroclinic_rule(typical.lat, typical.phase_speed, typical.sill_depth)
    attributes = {"title": "baroclinic wave-guide network with its flat-bottom mode atlas"}
    network, _ = build_network(grid, depths.depth, land, rule, typical.phase_speed, report)
    report("modes of the baroclinic nodes")
    radius = deformation_radius(
        np.interp(network.lat, typical.lat, typical.phase_speed), network.lat
    )
    atlas = flat_bottom_atlas(network, depths, climatology, radius)
    written = [folder / network_file("baroclinic"), folder / network_file("barotropic")]
    save_network(written[0], network, atlas, attributes)
    rule = barotropic_rule(typical.lat)
    speed = np.full(typical.lat.size, TYPICAL_BAROTROPIC_SPEED)
    network, _ = build_network(grid, depths.depth, land, rule, speed, report)
    report("modes of the barotropic nodes")
    attributes = {"title": "barotropic wave-guide network with its mode atlas"}
    save_network(written[1], network, barotropic_atlas(network, depths), attributes)
    return written
