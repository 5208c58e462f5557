"""The atlas of section modes in a NetCDF file, and the shipped one."""

from __future__ import annotations

from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.section_quality import QualityFlag
from waveguide.errors import DataError, InputError
from waveguide.network.atlas import Atlas, TrappedAtlas
from waveguide.network.graph import Network
from waveguide.network.packaged import Family, network_file, packaged_network
from waveguide.ocean.packaged import WAY_OUT, packaged_file, used_files

if TYPE_CHECKING:
    import netCDF4

ATLAS_FILE = "atlas_trapped.nc"
"""Name of the file, the shipped one and a person's own."""

NETWORK_HASH = "network_sha256"
"""Attribute that says which network the atlas belongs to."""

MANTISSA_BITS = 11
"""Bits of numbers that are kept: a rounding of 2.4e-4, a twentieth of the error of the modes."""

_OVERLAP_STEP = 0.01

_NODE_VARIABLES = {
    "phase_speed": ("m s-1", "long-wave phase speed"),
    "error": ("1", "relative error of the phase speed"),
    "coastal_value": ("m-0.5", "modal pressure at the coast F(0,0), which is the wind coupling"),
    "decay_per_drag": ("s m-2", "decay per metre and unit linear bottom drag"),
    "dispersion": ("s2", "relative growth of the wavenumber per squared angular frequency"),
    "barotropic_tail": ("1", "squared amplitude of the barotropic part offshore of the section"),
    "trapping_scale": ("m", "offshore trapping scale"),
}


def save_atlas(
    path: Path, network: Network, atlas: TrappedAtlas, attributes: dict[str, str]
) -> None:
    """Write an atlas to a NetCDF-4 file, rounded and compressed.

    Parameters
    ----------
    path : Path
    network : Network
        The atlas' own; its node positions are written too.
    atlas : TrappedAtlas
    attributes : dict of str
        Global attributes: title, inputs and their hashes.
    """
    import netCDF4

    with netCDF4.Dataset(path, "w") as file:
        file.setncatts({"Conventions": "CF-1.11", **attributes})
        for name, size in {
            "mode": atlas.mode.size, "node": network.size, "gap": atlas.gap_share.shape[1],
            "tail_mode": atlas.overlap.shape[0], "head_mode": atlas.overlap.shape[1],
            "step": atlas.overlap.shape[2],
        }.items():
            file.createDimension(name, size)
        _write(file, "lon", ("node",), network.lon.astype("f4"), units="degrees_east",
               standard_name="longitude")
        _write(file, "lat", ("node",), network.lat.astype("f4"), units="degrees_north",
               standard_name="latitude")
        _write(file, "mode", ("mode",), atlas.mode.astype("i1"), units="1",
               long_name="mode number, 0 barotropic")
        for name, (units, meaning) in _NODE_VARIABLES.items():
            _write(file, name, ("mode", "node"), rounded(getattr(atlas, name)), units=units,
                   long_name=meaning)
        _write(file, "depth", ("node",), rounded(atlas.depth), units="m",
               long_name="depth of the adjoining deep water")
        _write(file, "gap_share", ("mode", "gap"), rounded(atlas.gap_share), units="1",
               long_name="share of the mode that clears the sill of a gap")
        _write(file, "rank", ("mode", "node"), atlas.rank.astype("i1"), units="1",
               long_name="rank of the mode by speed on the node's own section")
        _write_flags(file, atlas)
        packed = np.rint(np.nan_to_num(atlas.overlap, nan=-1.28) / _OVERLAP_STEP).astype("i1")
        _write(file, "overlap", ("tail_mode", "head_mode", "step"), packed, units="1",
               scale_factor=_OVERLAP_STEP, missing_value=np.int8(-128),
               long_name="overlap of modes 1 to 3 at the tail of a step with those at its head")


def rounded(values: NDArray[np.floating]) -> NDArray[np.float32]:
    """Single precision with `MANTISSA_BITS` bits of mantissa, so that the rest compresses away."""
    drop = 23 - MANTISSA_BITS
    bits = np.ascontiguousarray(values, dtype=np.float32).view(np.uint32)
    kept = (bits + np.uint32(1 << (drop - 1))) & np.uint32(0xFFFFFFFF << drop & 0xFFFFFFFF)
    return np.where(np.isfinite(values), kept.view(np.float32), np.float32(np.nan))


def _write_flags(file: netCDF4.Dataset, atlas: TrappedAtlas) -> None:
    _write(file, "flags", ("node",), atlas.flags.astype("i2"),
           long_name="quality of the section and of its modes",
           flag_masks=np.array([int(flag) for flag in QualityFlag], dtype="i2"),
           flag_meanings=" ".join(str(flag.name).lower() for flag in QualityFlag))


def _write(
    file: netCDF4.Dataset, name: str, dimensions: tuple[str, ...], values: NDArray[np.generic],
    **attributes: Any,
) -> None:
    variable = file.createVariable(
        name, values.dtype.str, dimensions, zlib=True, complevel=9, shuffle=True
    )
    variable.set_auto_maskandscale(False)
    variable.setncatts(attributes)
    variable[...] = values


def load_atlas(path: Path) -> tuple[TrappedAtlas, dict[str, str]]:
    """Read what `save_atlas` wrote.

    Parameters
    ----------
    path : Path

    Returns
    -------
    atlas : TrappedAtlas
    attributes : dict of str
        The global attributes.
    """
    import netCDF4

    with netCDF4.Dataset(path) as file:
        file.set_auto_maskandscale(False)
        read = {name: np.asarray(variable[:]) for name, variable in file.variables.items()}
        attributes = {name: str(file.getncattr(name)) for name in file.ncattrs()}
    overlap = np.where(read["overlap"] == -128, np.nan, read["overlap"] * _OVERLAP_STEP)
    values: dict[str, Any] = {
        name: read[name].astype(float) for name in (*_NODE_VARIABLES, "depth", "gap_share")
    }
    values |= {name: read[name].astype(np.int64) for name in ("mode", "rank", "flags")}
    return TrappedAtlas(**values, overlap=overlap), attributes


def own_trapped_atlas(path: Path) -> TrappedAtlas:
    """An atlas of section modes 1 to 3 that a person has made.

    Parameters
    ----------
    path : Path
        As `waveguide atlas` writes it.

    Returns
    -------
    TrappedAtlas

    Raises
    ------
    InputError
        If the file is no such atlas, or was made for another network.
    """
    way_out = "make it with `waveguide atlas` of this version"
    try:
        atlas, attributes = load_atlas(path)
    except (OSError, RuntimeError, KeyError, ValueError, TypeError) as error:
        raise InputError(
            f"atlas {str(path)!r}: not a whole atlas of section modes ({error}); {way_out}"
        ) from None
    if attributes.get(NETWORK_HASH) != used_files()[network_file("baroclinic")]:
        raise InputError(
            f"atlas {str(path)!r}: it was made for another network than the shipped one; {way_out}"
        )
    return atlas.of_modes(1)


@cache
def packaged_trapped_atlas() -> TrappedAtlas:
    """The shipped atlas of section modes 1 to 3 on the shipped baroclinic network.

    Returns
    -------
    TrappedAtlas
        Fields that the flat-bottom atlas has too mean the same.

    Raises
    ------
    DataError
        If the file is missing or altered, or belongs to another network.
    """
    atlas, attributes = load_atlas(packaged_file(ATLAS_FILE))
    name = network_file("baroclinic")
    if attributes.get(NETWORK_HASH) != used_files()[name]:
        raise DataError(
            f"data file {ATLAS_FILE}: it was made for another {name}; {WAY_OUT}, or make it anew "
            "with `python coastlines/build.py atlas`"
        )
    return atlas.of_modes(1)


def packaged_guide(family: Family) -> tuple[Network, Atlas]:
    """The shipped network of a family with the best atlas there is for it.

    Parameters
    ----------
    family : {"baroclinic", "barotropic"}

    Returns
    -------
    Network
    Atlas
        Of sections for the baroclinic family, of depth-averaged water for the barotropic one.
    """
    network, atlas = packaged_network(family)
    return network, packaged_trapped_atlas() if family == "baroclinic" else atlas
