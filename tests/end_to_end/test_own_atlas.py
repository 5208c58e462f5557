"""The atlas from own bathymetry: a piece of the packaged one gives the packaged modes."""

from __future__ import annotations

import numpy as np
import pytest
import xarray as xr

from waveguide.coast.section_quality import QualityFlag
from waveguide.errors import InputError
from waveguide.network.packaged import packaged_network
from waveguide.network.trapped_atlas import inside
from waveguide.network.trapped_build import atlas_file
from waveguide.network.trapped_store import ATLAS_FILE, packaged_trapped_atlas
from waveguide.ocean.bathymetry import packaged_bathymetry

HAWAII = (-157.0, 18.5, -154.5, 20.5)


@pytest.fixture
def piece(tmp_path):
    depths = packaged_bathymetry()
    columns = (depths.lon > -165.0) & (depths.lon < -147.0)
    rows = (depths.lat > 12.0) & (depths.lat < 27.0)
    array = xr.DataArray(
        depths.depth[np.ix_(rows, columns)],
        {"lat": ("lat", depths.lat[rows], {"units": "degrees_north"}),
         "lon": ("lon", depths.lon[columns], {"units": "degrees_east"})},
        name="depth", attrs={"units": "m", "positive": "down"},
    )
    path = tmp_path / "mine.nc"
    array.to_netcdf(path)
    return path


def test_a_piece_of_the_packaged_depths_gives_the_packaged_modes(piece, tmp_path):
    path, atlas = atlas_file(tmp_path / "out", HAWAII, bathymetry=piece, workers=1)
    network, _ = packaged_network("baroclinic")
    within = inside(network, HAWAII) & np.isfinite(network.offshore)
    shipped = packaged_trapped_atlas()
    # ranks are followed within the region only, so numbers are compared by rank where they agree
    same = (atlas.rank[1:] == shipped.rank) & within
    assert same.sum() > 10
    np.testing.assert_allclose(
        atlas.phase_speed[1:][same], shipped.phase_speed[same], rtol=5e-3
    )
    assert path.name == ATLAS_FILE
    assert not list((tmp_path / "out").glob(".atlas*"))
    assert not np.any(atlas.flags[within] & int(QualityFlag.NOT_COMPUTED))


def test_what_cannot_be_used_is_said_before_any_work(tmp_path):
    with pytest.raises(InputError, match="no such file"):
        atlas_file(tmp_path / "out", HAWAII, bathymetry=tmp_path / "none.nc", workers=1)
    assert not (tmp_path / "out").exists()
    (tmp_path / "file.txt").write_text("no folder")
    with pytest.raises(InputError, match="cannot be written"):
        atlas_file(tmp_path / "file.txt" / "below", HAWAII, workers=1)
    with pytest.raises(InputError, match="--climatology"):
        atlas_file(tmp_path / "out", HAWAII, temperature="potential", workers=1)


def test_own_depths_elsewhere_are_refused(piece, tmp_path):
    with pytest.raises(InputError, match="give files that cover it"):
        atlas_file(tmp_path / "out", (-82.0, -20.0, -70.0, 0.0), bathymetry=piece, workers=1)
    assert not (tmp_path / "out").exists()
