"""Writing the outputs of a run, whole or not at all."""

from __future__ import annotations

import os
import shutil
import tempfile
import warnings
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager
from importlib import import_module
from pathlib import Path
from typing import TYPE_CHECKING

from waveguide.errors import InputError

if TYPE_CHECKING:
    import xarray as xr


def write_outputs(dataset: xr.Dataset, folder: Path, formats: Iterable[str]) -> None:
    """Write the arrivals in some formats.

    Parameters
    ----------
    dataset : xarray.Dataset
        Arrivals that pass :func:`waveguide.schema.check`.
    folder : Path
        An existing folder; see :func:`output_folder` for outputs that are whole or absent.
    formats : iterable of str
        Out of the formats that a scenario may ask for.

    Raises
    ------
    InputError
        Where the files cannot be written, for example because the disk is full.
    """
    with written(), warnings.catch_warnings():
        # Letters that the font of the figures lacks are boxes; README says so.
        warnings.filterwarnings("ignore", r"Glyph .* missing from font")
        for name in formats:
            _writer(name)(dataset, folder)


@contextmanager
def written() -> Iterator[None]:
    """Around the writing of outputs: a disk that does not take them is told in words.

    Raises
    ------
    InputError
        Where they cannot be written, for example because the disk is full.
    """
    try:
        yield
    except (OSError, RuntimeError) as error:
        # A full disk reaches us from the library of NetCDF as RuntimeError("NetCDF: HDF error").
        if isinstance(error, RuntimeError) and not str(error).startswith("NetCDF"):
            raise
        reason = getattr(error, "strerror", None) or error
        raise InputError(
            f"the outputs cannot be written ({reason}); free some space, or choose another folder "
            "with --out"
        ) from None


_WRITERS = {
    "csv": ("csv_files", "write_csv"),
    "netcdf": ("netcdf", "write_netcdf"),
    "geojson": ("geojson", "write_geojson"),
    "map": ("map", "write_map"),
    "waveforms": ("waveforms", "write_waveforms"),
    "distance-time": ("distance_time", "write_distance_time"),
    "budget": ("budget", "write_budget"),
}
"""Module of this package and function in it that write each format."""


def _writer(name: str) -> Callable[[xr.Dataset, Path], None]:
    """The function that writes a format; each is imported only when it is asked for."""
    module, function = _WRITERS[name]
    writer: Callable[[xr.Dataset, Path], None] = getattr(
        import_module(f"waveguide.report.{module}"), function
    )
    return writer


@contextmanager
def output_folder(out: Path) -> Iterator[Path]:
    """A folder to write in, whose files appear in `out` only when all of them are written.

    Files are written beside their final place and moved at the end, which on one file system
    is a change of names. When the work fails or is interrupted nothing is left.

    Parameters
    ----------
    out : Path
        Made when the work succeeds, if it is not there.

    Yields
    ------
    Path

    Raises
    ------
    InputError
        At once, before any work, where `out` cannot be written.
    """
    staging = _staging_folder(out)
    try:
        yield staging
        _move(staging, out)
    finally:
        shutil.rmtree(staging, ignore_errors=True)


def _staging_folder(out: Path) -> Path:
    """A hidden folder in `out`, or in the nearest folder above it that exists."""
    place = out
    while not os.path.lexists(place) and place != place.parent:
        place = place.parent
    try:
        return Path(tempfile.mkdtemp(prefix=".waveguide-", dir=place))
    except OSError as error:
        raise _unwritable(out, error) from None


def _move(staging: Path, out: Path) -> None:
    files = sorted(staging.iterdir())
    blocked = [file.name for file in files if (out / file.name).is_dir()]
    if blocked:
        raise InputError(
            f"output folder {str(out)!r}: {', '.join(blocked)} is a folder there and cannot be "
            "overwritten; choose another folder with --out"
        )
    try:
        out.mkdir(parents=True, exist_ok=True)
        for file in files:
            os.replace(file, out / file.name)
    except OSError as error:
        raise _unwritable(out, error) from None


def _unwritable(out: Path, error: OSError) -> InputError:
    return InputError(
        f"output folder {str(out)!r}: it cannot be written ({error.strerror}); "
        "choose a folder you may write with --out"
    )
