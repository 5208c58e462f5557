"""A curvilinear model grid of an open package, read and mapped.

Three months of sea surface temperature on a tripolar grid of one degree, from iris-sample-data (Met
Office, Open Government Licence). At the equator its cells are three times as long along it as
across it, so that bins by the nearest neighbour would be empty every other time.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from waveguide.compare.cells import guide_cells
from waveguide.compare.extraction import extract
from waveguide.compare.model_grid import model_field, open_model
from waveguide.compare.route_lines import RouteLine

sample = pytest.importorskip("iris_sample_data", reason="iris-sample-data is not installed")
FILES = sorted((Path(sample.path) / "NEMO").glob("nemo_1m_*_grid-T.nc"))


@pytest.fixture(scope="module")
def field():
    pytest.importorskip("dask")
    return model_field(open_model(FILES), "tos")


def route(lon, lat, kind):
    lon, lat = np.asarray(lon, float), np.asarray(lat, float)
    distance = np.concatenate([[0.0], np.cumsum(
        6.371e6 * np.radians(np.hypot(np.diff(lon) * np.cos(np.radians(lat[1:])), np.diff(lat)))
    )])
    return RouteLine("end", 1, (lon + 180.0) % 360.0 - 180.0, lat, distance, distance / 2.5,
                     np.ones(lon.size), np.zeros(lon.size, int), (kind,))


def test_the_grid_is_read_with_its_times(field):
    assert field.lon.shape == (330, 360)
    assert [str(t)[:7] for t in field.times] == ["2015-01", "2015-02", "2015-03"]
    assert any("360_day" in note for note in field.notes)
    known = np.isfinite(field.lon)
    assert known.mean() > 0.95
    assert np.nanmin(field.lat) < -75.0
    assert np.nanmax(field.lat) > 85.0
    # in the Arctic the grid is no longer one of meridians and parallels
    assert np.nanstd(field.lat[-20]) > 1.0


def values_of(field, cells):
    """The field at the cells, picked without chunks."""
    return field.data.values.reshape(len(field.times), -1)[:, cells.cell]


def test_the_pacific_equator_is_mapped(field):
    line = route(np.linspace(165.0, 275.0, 221), np.zeros(221), "equator")
    cells = guide_cells([line], field.lon, field.lat)
    assert 3.5 < np.abs(field.lat.ravel()[cells.cell]).max() < 4.5
    taken = extract(field.data, 0, 3, cells)
    np.testing.assert_array_equal(taken.values, values_of(field, cells).astype("f4"))
    assert np.isfinite(taken.diagram).mean() > 0.95
    west, east = np.nanmean(taken.diagram[:, :10]), np.nanmean(taken.diagram[:, -10:])
    assert 27.0 < west < 31.0  # the warm pool
    assert east < west  # the cold tongue, at its warmest from January to March


def test_a_coast_near_the_pole_is_mapped_on_its_sea_side_only(field):
    # Norway, on the right of a poleward wave; R is small, so the zone is one cell and a half.
    lat = np.linspace(62.0, 70.0, 81)
    line = route(np.linspace(5.0, 18.0, 81), lat, "coast")
    cells = guide_cells([line], field.lon, field.lat)
    lon, north = field.lon.ravel()[cells.cell], field.lat.ravel()[cells.cell]
    along = np.interp(north, lat, np.linspace(5.0, 18.0, 81))
    assert cells.cell.size > 10
    assert np.all(lon < along + 3.0)
    taken = extract(field.data, 0, 3, cells)
    np.testing.assert_array_equal(taken.values, values_of(field, cells).astype("f4"))
    assert 0.0 < np.nanmean(taken.values) < 10.0
