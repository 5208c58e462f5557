"""An atlas that `waveguide atlas` made, in a scenario's [ocean]."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

import waveguide
from waveguide.errors import InputError
from waveguide.network.packaged import packaged_network
from waveguide.network.trapped_store import ATLAS_FILE, load_atlas, save_atlas
from waveguide.ocean.packaged import packaged_file

TEXT = """
title = "Along California"
[event]
position = [-120.7, 34.6]
start = 2031-04-01T00:00:00Z
duration_days = 5
[waves]
modes = [1, 2]
period_days = 20
[[targets]]
name = "Crescent City"
position = [-124.18, 41.74]
[ocean]
"""


def arrivals(folder: Path, ocean: str):
    path = folder / "own.toml"
    path.write_text(TEXT + ocean, encoding="utf-8")
    return waveguide.arrivals(waveguide.read_scenario(path))


def changed(folder: Path, attributes: dict | None = None, **fields) -> Path:
    """The shipped atlas with some fields changed."""
    atlas, given = load_atlas(packaged_file(ATLAS_FILE))
    values = {name: change(getattr(atlas, name)) for name, change in fields.items()}
    network, _ = packaged_network("baroclinic")
    path = folder / "changed.nc"
    save_atlas(path, network, replace(atlas, **values), {**given, **(attributes or {})})
    return path


def test_shipped_atlas_as_ones_own_gives_the_shipped_answer(tmp_path):
    own = arrivals(tmp_path, f'atlas = "{packaged_file(ATLAS_FILE)}"')
    usual = arrivals(tmp_path, "")
    for name in ("front_time_days", "peak_time_days", "amplitude_ratio"):
        np.testing.assert_array_equal(own[name].values, usual[name].values)
    assert own.attrs["ocean"] == "own files"


def test_twice_the_speed_takes_half_the_time(tmp_path):
    path = changed(tmp_path, phase_speed=lambda c: 2.0 * c)
    fast, usual = arrivals(tmp_path, f'atlas = "{path.name}"'), arrivals(tmp_path, "")
    np.testing.assert_allclose(
        fast["front_time_days"].values, 0.5 * usual["front_time_days"].values, rtol=1e-3
    )


def test_atlas_that_leaves_out_a_part_of_the_way(tmp_path):
    lat = packaged_network("baroclinic")[0].lat
    path = changed(tmp_path, phase_speed=lambda c: np.where(np.abs(lat - 38.0) < 0.5, np.nan, c))
    with pytest.raises(InputError, match=r"do not cover the route .* latitudes 37\.[5-9].* 38\."):
        arrivals(tmp_path, f'atlas = "{path.name}"')


def test_what_is_no_atlas(tmp_path):
    (tmp_path / "cut.nc").write_bytes(packaged_file(ATLAS_FILE).read_bytes()[:20000])
    with pytest.raises(InputError, match="not a whole atlas"):
        arrivals(tmp_path, 'atlas = "cut.nc"')
    content = packaged_file(ATLAS_FILE).read_bytes()
    half = len(content) // 2
    (tmp_path / "altered.nc").write_bytes(content[:half] + bytes(300) + content[half + 300 :])
    with pytest.raises(InputError, match="not a whole atlas"):
        arrivals(tmp_path, 'atlas = "altered.nc"')
    other = changed(tmp_path, {"network_sha256": "0" * 64})
    with pytest.raises(InputError, match="another network"):
        arrivals(tmp_path, f'atlas = "{other.name}"')


def test_atlas_and_depths_exclude_each_other(tmp_path):
    (tmp_path / "depths.nc").write_bytes(b"")
    with pytest.raises(InputError, match="leave bathymetry and climatology out"):
        arrivals(
            tmp_path, f'atlas = "{packaged_file(ATLAS_FILE)}"\nbathymetry = "depths.nc"'
        )
