"""Modes from the user's own bathymetry and climatology, on the packaged guides."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from waveguide.constants import deformation_radius
from waveguide.network.atlas import Atlas, barotropic_atlas, flat_bottom_atlas
from waveguide.network.packaged import Family, family_of, packaged_network
from waveguide.ocean.bathymetry import Bathymetry, packaged_bathymetry, read_bathymetry
from waveguide.ocean.stratification import Climatology, packaged_climatology, read_climatology
from waveguide.propagation.modes import packaged_mode

if TYPE_CHECKING:
    from waveguide.propagation.losses import ModeAtNodes
    from waveguide.scenario.model import Ocean


def own_mode(ocean: Ocean, mode: int, say: Callable[[str], None]) -> ModeAtNodes:
    """A mode computed from the files a scenario names.

    The guides stay the packaged ones; depths and stratification along them are the user's. Where
    one kind of file is not given the packaged one is used.

    Parameters
    ----------
    ocean : Ocean
    mode : int
    say : callable
        Told what is being done.

    Returns
    -------
    ModeAtNodes
        NaN at nodes that the files do not cover.

    Raises
    ------
    InputError
        If a file cannot be read as what it should be.
    """
    family = family_of(mode)
    say(f"own depths and stratification along the {family} guide")
    atlas = _own_atlas(family, ocean.bathymetry, ocean.climatology, ocean.temperature)
    return packaged_mode(atlas, mode)


@cache
def _own_atlas(
    family: Family, bathymetry: Path | None, climatology: Path | None, temperature: str | None
) -> Atlas:
    network, packaged = packaged_network(family)
    depths = packaged_bathymetry() if bathymetry is None else read_bathymetry(bathymetry)
    if family == "barotropic":
        return _where_covered(barotropic_atlas(network, depths), depths, network.lon, network.lat)
    columns = _columns(climatology, temperature)
    speed = packaged.phase_speed[0]
    typical = np.interp(
        np.abs(network.lat), *_by_latitude(np.abs(network.lat), speed)
    )
    atlas = flat_bottom_atlas(
        network, depths, columns, deformation_radius(typical, network.lat)
    )
    return _where_covered(atlas, depths, network.lon, network.lat)


def _columns(climatology: Path | None, temperature: str | None) -> Climatology:
    if climatology is None:
        return packaged_climatology()
    return read_climatology(climatology, temperature=temperature)  # type: ignore[arg-type]


def _by_latitude(lat: np.ndarray, speed: np.ndarray) -> tuple[np.ndarray, np.ndarray]:  # type: ignore[type-arg]
    """Median packaged speed by 5° of latitude: how far out deep water is sought."""
    centres = np.arange(2.5, 90.0, 5.0)
    medians = np.array([
        np.nanmedian(np.append(speed[np.abs(lat - centre) <= 2.5], np.nan))
        if np.isfinite(speed[np.abs(lat - centre) <= 2.5]).any() else np.nan
        for centre in centres
    ])
    known = np.isfinite(medians)
    return centres[known], medians[known]


def _where_covered(atlas: Atlas, depths: Bathymetry, lon: np.ndarray, lat: np.ndarray) -> Atlas:  # type: ignore[type-arg]
    """The atlas with NaN at nodes outside the bathymetry."""
    covered = depths.covers(lon, lat)
    return replace(atlas, phase_speed=np.where(covered, atlas.phase_speed, np.nan))
