"""Packaged files are used only if they are those of the manifest, and build repeatably."""

from __future__ import annotations

import hashlib
import importlib.util
import subprocess
import sys
import tomllib
from pathlib import Path

import numpy as np
import pytest

from waveguide.errors import DataError
from waveguide.ocean import packaged
from waveguide.ocean.packaged import checked_file, locations, packaged_file

CLONE = Path(__file__).resolve().parents[2] / "coastlines"


@pytest.fixture
def shipped(tmp_path):
    """A data folder with one file and its manifest."""
    content = bytes(range(256)) * 10
    (tmp_path / "grid.nc").write_bytes(content)
    manifest = tmp_path / "manifest.toml"
    manifest.write_text(
        f'[built."grid.nc"]\nbytes = {len(content)}\n'
        f'sha256 = "{hashlib.sha256(content).hexdigest()}"\n'
        '[built."gone.nc"]\nbytes = 1\nsha256 = "00"\n'
    )
    return tmp_path, manifest


def test_an_untouched_file_passes(shipped):
    folder, manifest = shipped
    assert checked_file("grid.nc", folder, manifest) == folder / "grid.nc"


def test_a_truncated_file_is_refused(shipped):
    folder, manifest = shipped
    path = folder / "grid.nc"
    path.write_bytes(path.read_bytes()[:-1])
    with pytest.raises(DataError, match=r"2559 bytes, but the manifest says 2560.*reinstall"):
        checked_file("grid.nc", folder, manifest)


def test_an_altered_file_is_refused(shipped):
    folder, manifest = shipped
    content = bytearray((folder / "grid.nc").read_bytes())
    content[100] ^= 1
    (folder / "grid.nc").write_bytes(content)
    with pytest.raises(DataError, match=r"altered.*reinstall"):
        checked_file("grid.nc", folder, manifest)


@pytest.mark.parametrize(("name", "message"), [
    ("gone.nc", "missing"), ("other.nc", "not in the manifest"),
])
def test_a_file_that_is_not_there_is_refused(shipped, name, message):
    with pytest.raises(DataError, match=message):
        checked_file(name, *shipped)


def test_an_installation_without_data_says_so(tmp_path, monkeypatch):
    monkeypatch.setattr(packaged, "PACKAGE", tmp_path / "waveguide")
    with pytest.raises(DataError, match=r"no manifest.*reinstall"):
        locations()


def test_a_wheel_s_own_data_go_first(tmp_path, monkeypatch):
    inside = tmp_path / "waveguide" / "_data"
    inside.mkdir(parents=True)
    (inside / "manifest.toml").touch()
    monkeypatch.setattr(packaged, "PACKAGE", tmp_path / "waveguide")
    assert locations() == (inside, inside / "manifest.toml")


@pytest.mark.parametrize("name", ["shoreline.nc", "bathymetry.nc", "stratification.nc"])
def test_the_packaged_files_are_those_of_the_manifest(name):
    assert packaged_file(name).is_file()


def test_shipped_files_are_within_their_size():
    _, manifest = locations()
    built = tomllib.loads(manifest.read_text("utf-8"))["built"]
    assert sum(entry["bytes"] for entry in built.values()) < 20e6


def test_the_ocean_is_imported_without_heavy_libraries():
    code = (
        "import sys, waveguide.ocean, waveguide.coast.shoreline;"
        "print([m for m in ('netCDF4', 'xarray', 'gsw', 'scipy') if m in sys.modules])"
    )
    out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert out.stdout.strip() == "[]"


@pytest.fixture(scope="module")
def build():
    """The builder as a module; it is a script outside the package."""
    if not (CLONE / "build.py").is_file():
        pytest.skip("the builder is in the clone only")
    spec = importlib.util.spec_from_file_location("coastline_build", CLONE / "build.py")
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    sys.path.insert(0, str(CLONE))  # its neighbour packages.py, as when it is run
    try:
        spec.loader.exec_module(module)
    finally:
        sys.path.remove(str(CLONE))
    return module


def test_written_files_repeat_byte_for_byte(build, tmp_path, monkeypatch):
    monkeypatch.setattr(build, "DATA", tmp_path)

    def fill(dataset):
        build.add(dataset, "depth", ("lat", "lon"), np.arange(600, dtype=np.int16).reshape(20, 30),
                  units="m")

    contents = []
    for _ in range(2):
        build.write_dataset("small.nc", {"title": "small"}, fill)
        contents.append((tmp_path / "small.nc").read_bytes())
    assert contents[0] == contents[1]
    assert [path.name for path in tmp_path.iterdir()] == ["small.nc"]


def test_a_file_that_fails_half_way_is_not_left_behind(build, tmp_path, monkeypatch):
    monkeypatch.setattr(build, "DATA", tmp_path)

    def fail(dataset):
        raise RuntimeError("half way")

    with pytest.raises(RuntimeError, match="half way"):
        build.write_dataset("small.nc", {}, fail)
    assert not (tmp_path / "small.nc").exists()


def test_bit_rounding_keeps_the_stated_relative_precision(build):
    values = np.geomspace(1e-8, 1e-2, 10_000)
    rounded = build.bit_rounded(values, build.MANTISSA_BITS)
    # Half a unit in the last kept bit, and float32 itself.
    assert np.abs(rounded / values - 1.0).max() < 2.0**-12 + 2.0**-23
    assert np.array_equal(build.bit_rounded(rounded.astype(float), build.MANTISSA_BITS), rounded)
    assert np.isnan(build.bit_rounded(np.array([np.nan]), build.MANTISSA_BITS)).all()


def test_rings_come_out_closed_anticlockwise_and_without_repeated_vertices(build):
    ring = build.Ring(1, 1.0, np.array([0.0, 0.0, 0.00001, 1.0, 1.0, 0.0]),
                      np.array([0.0, 1.0, 1.0, 1.0, 0.0, 0.0]))
    steps = build.rounded(ring)
    assert steps.tolist() == [[0, 0], [10000, 0], [10000, 10000], [0, 10000], [0, 0]]


def test_the_builder_and_the_manifest_agree_on_the_shipped_files(build):
    build.verify()
