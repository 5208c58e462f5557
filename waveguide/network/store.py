"""Networks and mode atlases in NetCDF files."""

from __future__ import annotations

from dataclasses import fields
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from waveguide.network.atlas import Atlas
from waveguide.network.graph import Network

_DIMENSION = {
    "tail": "step", "head": "step", "kind": "step", "length": "step", "gap": "step",
    "passes": "step", "gap_width": "gap", "gap_length": "gap", "gap_sill": "gap",
}
_UNITS = {
    "lon": "degrees_east", "lat": "degrees_north", "offshore": "degree", "length": "m",
    "gap_width": "m", "gap_length": "m", "gap_sill": "m", "depth": "m",
    "phase_speed": "m s-1", "coastal_value": "m-0.5",
    "decay_per_drag": "s m-2",
}
_MEANING = {
    "lon": "longitude of node",
    "lat": "latitude of node",
    "line": "coast ring or equatorial stretch of node",
    "equatorial": "node lies on the equatorial guide",
    "offshore": "azimuth of the seaward normal, clockwise from north",
    "basin": "connected body of water",
    "tail": "node a step leads from",
    "head": "node a step leads to",
    "kind": "0 coast, 1 equator, 2 strait, 3 facing coast, 4 opening",
    "length": "geodesic length of step",
    "gap": "row of the gap table a step crosses, -1 for none",
    "passes": "row of the gap whose mouth a step passes, -1 for none",
    "gap_width": "narrowest width of gap",
    "gap_length": "length of passage through gap",
    "gap_sill": "sill depth of gap",
    "depth": "depth of the adjoining deep water",
    "phase_speed": "long-wave phase speed",
    "coastal_value": "modal pressure at the coast, F(0,0)",
    "decay_per_drag": "decay by bottom friction per metre and unit linear drag",
    "gap_share": "share of the mode that clears the sill of a gap",
}


def save_network(path: Path, network: Network, atlas: Atlas, attributes: dict[str, str]) -> None:
    """Write a network and its mode atlas to a NetCDF-4 file.

    Parameters
    ----------
    path : Path
    network : Network
    atlas : Atlas
    attributes : dict of str
        Global attributes (inputs and their hashes).
    """
    import netCDF4

    with netCDF4.Dataset(path, "w") as file:
        file.setncatts({"Conventions": "CF-1.11", **attributes})
        file.createDimension("node", network.size)
        file.createDimension("step", network.tail.size)
        file.createDimension("gap", network.gap_width.size)
        file.createDimension("mode", atlas.mode.size)
        for field in fields(Network):
            values = np.asarray(getattr(network, field.name))
            _write(file, field.name, (_DIMENSION.get(field.name, "node"),), values)
        _write(file, "mode", ("mode",), atlas.mode)
        _write(file, "depth", ("node",), atlas.depth)
        _write(file, "phase_speed", ("mode", "node"), atlas.phase_speed)
        _write(file, "coastal_value", ("mode", "node"), atlas.coastal_value)
        _write(file, "gap_share", ("mode", "gap"), atlas.gap_share)
        _write(file, "decay_per_drag", ("mode", "node"), atlas.decay_per_drag)


def _write(file: object, name: str, dimensions: tuple[str, ...], values: NDArray[np.generic]
           ) -> None:
    """Write one variable: positions and lengths as double, other reals as single precision."""
    if values.dtype == bool:
        kind = "i1"
    elif np.issubdtype(values.dtype, np.integer):
        kind = "i4"
    else:
        kind = "f8" if name in ("lon", "lat", "length") else "f4"
    variable = file.createVariable(  # type: ignore[attr-defined]
        name, kind, dimensions, zlib=True, complevel=6, shuffle=True
    )
    if name in _UNITS:
        variable.units = _UNITS[name]
    if name in _MEANING:
        variable.long_name = _MEANING[name]
    variable[:] = values


def load_network(path: Path) -> tuple[Network, Atlas]:
    """Read what `save_network` wrote.

    Parameters
    ----------
    path : Path

    Returns
    -------
    Network
    Atlas
    """
    import netCDF4

    with netCDF4.Dataset(path) as file:
        file.set_auto_mask(False)
        read = {name: np.asarray(variable[:]) for name, variable in file.variables.items()}
    values = {}
    for field in fields(Network):
        raw = read[field.name]
        if field.name == "equatorial":
            values[field.name] = raw.astype(bool)
        elif np.issubdtype(raw.dtype, np.integer):
            values[field.name] = raw.astype(np.int64)
        else:
            values[field.name] = raw.astype(float)
    flat = np.zeros(read["phase_speed"].shape)
    atlas = Atlas(
        mode=read["mode"].astype(np.int64),
        depth=read["depth"].astype(float),
        phase_speed=read["phase_speed"].astype(float),
        coastal_value=read["coastal_value"].astype(float),
        gap_share=read["gap_share"].astype(float),
        decay_per_drag=read["decay_per_drag"].astype(float),
        dispersion=flat,
        barotropic_tail=flat,
    )
    return Network(**values), atlas
