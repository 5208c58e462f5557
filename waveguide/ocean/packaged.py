"""Where the packaged data are, and that they are what the manifest says.

In a wheel the files lie in waveguide/_data; in a clone (and an editable install) in
coastlines/data, with the manifest beside that folder.
"""

from __future__ import annotations

import hashlib
import tomllib
from functools import cache
from pathlib import Path

from waveguide.errors import DataError

PACKAGE = Path(__file__).resolve().parents[1]
WIND_RECORD = "monthly_winds.nc"
"""The packaged wind, on which only forced responses rest."""

WAY_OUT = (
    "reinstall the package (pip install --force-reinstall waveguide), or in a clone restore the "
    "file with `git checkout -- coastlines`"
)


def locations() -> tuple[Path, Path]:
    """The data folder and the manifest of this installation.

    Returns
    -------
    folder, manifest : Path

    Raises
    ------
    DataError
        If neither a wheel's nor a clone's data are there.
    """
    wheel, clone = PACKAGE / "_data", PACKAGE.parent / "coastlines"
    for folder, manifest in ((wheel, wheel / "manifest.toml"),
                             (clone / "data", clone / "manifest.toml")):
        if manifest.is_file():
            return folder, manifest
    raise DataError(f"the packaged data are missing: no manifest in {wheel} or {clone}; {WAY_OUT}")


def packaged_file(name: str) -> Path:
    """Path of a packaged data file, checked against the manifest once per process.

    Parameters
    ----------
    name : str
        File name, such as ``bathymetry.nc``.

    Returns
    -------
    Path

    Raises
    ------
    DataError
        If the file is missing, truncated, altered or not in the manifest.
    """
    return checked_file(name, *locations())


@cache
def checked_file(name: str, folder: Path, manifest: Path) -> Path:
    """Path of a file of `folder` whose size and SHA-256 are those of `manifest`.

    Parameters
    ----------
    name : str
        File name.
    folder, manifest : Path
        Data folder and the TOML manifest that describes it.

    Returns
    -------
    Path

    Raises
    ------
    DataError
        If the file is missing, truncated, altered or not in the manifest.
    """
    entry = tomllib.loads(manifest.read_text("utf-8")).get("built", {}).get(name)
    path = folder / name
    if entry is None:
        raise DataError(f"data file {name}: not in the manifest {manifest}; {WAY_OUT}")
    if not path.is_file():
        raise DataError(f"data file {path}: missing; {WAY_OUT}")
    content = path.read_bytes()
    if len(content) != entry["bytes"]:
        raise DataError(
            f"data file {path}: {len(content)} bytes, but the manifest says {entry['bytes']} "
            f"(truncated or replaced); {WAY_OUT}"
        )
    if hashlib.sha256(content).hexdigest() != entry["sha256"]:
        raise DataError(f"data file {path}: altered, its SHA-256 is not the manifest's; {WAY_OUT}")
    return path


def used_files() -> dict[str, str]:
    """SHA-256 of every data file that any answer rests on, by name.

    Returns
    -------
    dict of str
    """
    _, manifest = locations()
    built = tomllib.loads(manifest.read_text("utf-8")).get("built", {})
    return {name: entry["sha256"] for name, entry in built.items()
            if name.endswith(".nc") and name != WIND_RECORD}
