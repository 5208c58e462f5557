"""Model output of every kind that is read: grids, times, chunks; and what is refused."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import xarray as xr

from waveguide.compare.cells import guide_cells
from waveguide.compare.extraction import extract
from waveguide.compare.model_grid import model_field, open_model, sound_positions
from waveguide.compare.route_lines import RouteLine
from waveguide.errors import InputError

STANDARD = "sea_surface_height_above_geoid"
START = np.datetime64("2031-03-05T00:00:00")


def equator(west: float = 170.0, span: float = 40.0, speed: float = 2.5) -> RouteLine:
    """A route along the equator."""
    lon = (west + np.linspace(0.0, span, 81) + 180.0) % 360.0 - 180.0
    distance = np.radians(np.linspace(0.0, span, 81)) * 6.378137e6
    return RouteLine(
        "mooring", 1, lon, np.zeros(81), distance, distance / speed, np.ones(81),
        np.zeros(81, int), ("equator",),
    )


def coast(poleward: bool = True) -> RouteLine:
    """A straight meridional eastern boundary in the southern hemisphere, at 80W."""
    lat = np.linspace(-5.0, -25.0, 60)
    distance = np.radians(np.abs(lat - lat[0])) * 6.371e6
    return RouteLine(
        "gauge", 1, np.full(60, -80.0), lat, distance, distance / 2.5, np.ones(60),
        np.zeros(60, int), ("coast",),
    )


def regular(lon, lat, days=30, chunks=None) -> xr.Dataset:
    """Output in which every value says where and when it is."""
    x, y = np.meshgrid(lon, lat)
    values = (np.arange(days)[:, None, None] + 0.001 * x + 0.0 * y).astype("f4")
    dataset = xr.Dataset(
        {"ssh": (("time", "lat", "lon"), values, {"standard_name": STANDARD, "units": "m"})},
        {"time": (START + np.arange(days).astype("timedelta64[D]")).astype("datetime64[ns]"),
         "lat": ("lat", lat, {"units": "degrees_north"}),
         "lon": ("lon", lon, {"units": "degrees_east"})},
    )
    return dataset if chunks is None else dataset.chunk(chunks)


LON, LAT = np.arange(150.0, 231.0), np.arange(-12.0, 13.0)


def test_cells_of_a_regular_grid_lie_in_the_trapping_zone():
    field = model_field(regular(LON, LAT))
    cells = guide_cells([equator()], field.lon, field.lat)
    lat = field.lat.ravel()[cells.cell]
    # √(2c/β) = 467 km or 4.2°: the zone of c = 2.5 m/s
    assert np.abs(lat).max() == 4.0
    lon = field.lon.ravel()[cells.cell] % 360.0
    assert lon.min() >= 169.0
    assert lon.max() <= 211.0


def test_cells_beyond_the_land_are_left_out():
    lon, lat = np.arange(-85.0, -74.9, 0.25), np.arange(-30.0, 0.0, 0.25)
    field = model_field(regular(lon, lat))
    cells = guide_cells([coast()], field.lon, field.lat)
    x = field.lon.ravel()[cells.cell]
    assert x.max() <= -79.4  # 60 km of shelf landward at most
    assert x.min() < -81.0


def test_a_pass_weighs_cells_by_the_structure_of_the_wave():
    field = model_field(regular(LON, LAT))
    line = equator()
    cells = guide_cells([line], field.lon, field.lat)
    taken = extract(field.data, 5, 12, cells)
    assert taken.diagram.shape == (7, cells.bin_distance.size)
    expected = np.interp(cells.bin_distance, line.distance, line.lon % 360.0)
    np.testing.assert_allclose(taken.diagram[0], 5.0 + 0.001 * expected, atol=2e-3)
    np.testing.assert_allclose(np.diff(taken.diagram, axis=0), 1.0, atol=1e-4)


@pytest.mark.parametrize("chunks", [
    {"time": 4}, {"time": 7, "lat": 5, "lon": 10}, {"time": -1, "lat": 9}, {"time": 1},
])  # fmt: skip
def test_chunks_of_dask_change_nothing(chunks):
    pytest.importorskip("dask")
    plain = model_field(regular(LON, LAT))
    cells = guide_cells([equator()], plain.lon, plain.lat)
    one = extract(plain.data, 3, 22, cells)
    many = extract(model_field(regular(LON, LAT, chunks=chunks)).data, 3, 22, cells)
    np.testing.assert_allclose(many.diagram, one.diagram, rtol=1e-12)
    np.testing.assert_array_equal(many.values, one.values)


def test_each_chunk_is_read_once_and_others_not_at_all():
    da = pytest.importorskip("dask.array")
    read: list[tuple[int, ...]] = []

    def make(block_info=None):
        where = block_info[None]["array-location"]
        read.append(tuple(start for start, _ in where))
        return np.ones([stop - start for start, stop in where], "f4")

    chunks = ((5,) * 6, (5,) * 5, (9,) * 9)
    data = da.map_blocks(make, chunks=chunks, dtype="f4", meta=np.empty((0, 0, 0), "f4"))
    dataset = regular(LON, LAT)
    dataset["ssh"] = (("time", "lat", "lon"), data, {"standard_name": STANDARD})
    field = model_field(dataset)
    cells = guide_cells([equator()], field.lon, field.lat)
    taken = extract(field.data, 6, 17, cells)
    assert len(read) == len(set(read)) == taken.chunks
    assert {start for start, _, _ in read} == {5, 10, 15}
    rows = {row for _, row, _ in read}
    assert rows == {5, 10, 15}  # 8°N and 8°S are out of the zone


def test_land_is_left_out_of_the_mean():
    dataset = regular(LON, LAT)
    dataset["ssh"] = dataset["ssh"].where(dataset["lat"] != 0.0)
    field = model_field(dataset)
    cells = guide_cells([equator()], field.lon, field.lat)
    taken = extract(field.data, 0, 3, cells)
    assert np.isfinite(taken.diagram).all()
    assert np.isnan(taken.values[:, np.isin(field.lat.ravel()[cells.cell], 0.0)]).all()


def test_files_along_time_and_zarr(tmp_path):
    pytest.importorskip("dask")
    whole = regular(LON, LAT, 12)
    paths = []
    for part in range(3):
        paths.append(tmp_path / f"day{part}.nc")
        whole.isel(time=slice(4 * part, 4 * part + 4)).to_netcdf(paths[-1])
    field = model_field(open_model(paths[::-1]))
    assert field.times.size == 12
    np.testing.assert_allclose(field.data.values, whole["ssh"].values)
    single = model_field(open_model(paths[:1]))
    np.testing.assert_allclose(single.data.values, whole["ssh"].values[:4])
    pytest.importorskip("zarr")
    whole.to_zarr(tmp_path / "store.zarr")
    stored = model_field(open_model([tmp_path / "store.zarr"]))
    np.testing.assert_allclose(stored.data.values, whole["ssh"].values)


def test_a_single_file_needs_no_dask(tmp_path, monkeypatch):
    from waveguide.compare import extraction, model_grid

    whole = regular(LON, LAT, 12)
    whole.to_netcdf(tmp_path / "a.nc", encoding={"ssh": {"chunksizes": (5, 25, 81)}})
    for module in (model_grid, extraction):
        monkeypatch.setattr(module, "has_dask", lambda: False)
    field = model_field(open_model([tmp_path / "a.nc"]))
    assert field.data.chunks is None
    cells = guide_cells([equator()], field.lon, field.lat)
    expected = extract(model_field(whole).data, 2, 9, cells)
    np.testing.assert_allclose(extract(field.data, 2, 9, cells).diagram, expected.diagram)
    with pytest.raises(InputError, match="joined with dask"):
        open_model([tmp_path / "a.nc", tmp_path / "a.nc"])


def curvilinear(days=3) -> xr.Dataset:
    """A grid turned by twenty degrees about (200E, 0), with a fold, NaN and empty corners."""
    i, j = np.meshgrid(np.arange(-40.0, 41.0), np.arange(-25.0, 26.0))
    turn = np.radians(20.0)
    lon = 200.0 + 0.6 * (i * np.cos(turn) - j * np.sin(turn))
    lat = 0.6 * (i * np.sin(turn) + j * np.cos(turn))
    lon[-1], lat[-1] = lon[-2, ::-1], lat[-2, ::-1]  # the fold repeats the row below
    lon[0, :5], lat[0, :5] = np.nan, np.nan
    lon[1, :4], lat[1, :4] = 0.0, 0.0
    values = np.broadcast_to(0.001 * np.nan_to_num(lon), (days, *lon.shape)).astype("f4")
    return xr.Dataset(
        {"sossheig": (("time_counter", "y", "x"), values,
                      {"standard_name": STANDARD, "units": "m"})},
        {"time_counter": (START + np.arange(days).astype("timedelta64[D]")).astype("M8[ns]"),
         "nav_lon": (("y", "x"), lon, {"units": "degrees_east"}),
         "nav_lat": (("y", "x"), lat, {"units": "degrees_north"})},
    )


def test_a_curvilinear_grid_with_a_fold_and_holes():
    field = model_field(curvilinear())
    assert any("no position" in note for note in field.notes)
    assert any("fold" in note for note in field.notes)
    assert np.isnan(field.lon[1, :4]).all()
    cells = guide_cells([equator(190.0, 20.0)], field.lon, field.lat)
    assert cells.cell.size == np.unique(cells.cell).size > 100
    taken = extract(field.data, 0, 3, cells)
    expected = 190.0 + np.degrees(cells.bin_distance / 6.378137e6)
    np.testing.assert_allclose(taken.diagram[0], 0.001 * expected, atol=1e-3)


def test_positions_that_are_none():
    with pytest.raises(InputError, match="no cell has a longitude"):
        sound_positions(np.full((3, 3), np.nan), np.zeros((3, 3)))
    field = model_field(regular(np.arange(0.0, 20.0), np.arange(40.0, 50.0)))
    with pytest.raises(InputError, match="does not cover"):
        guide_cells([equator()], field.lon, field.lat)


def test_variables_are_found_or_asked_for():
    dataset = regular(LON, LAT)
    other = dataset.rename(ssh="height")
    other["height"].attrs = {}
    with pytest.raises(InputError, match=r"variable = one of height"):
        model_field(other)
    assert model_field(other, "height").data.name == "height"
    with pytest.raises(InputError, match="has no such variable"):
        model_field(other, "ssh")


def test_a_level_is_chosen_by_depth():
    dataset = regular(LON, LAT, 4)
    levels = xr.DataArray([5.0, 50.0, 150.0], dims="depth", attrs={"units": "m"})
    deep = (dataset["ssh"] * 0.0 + levels).assign_coords(depth=levels.values)
    deep.attrs = {"standard_name": STANDARD}
    volume = dataset.drop_vars("ssh").assign(temp=deep.transpose("time", "depth", "lat", "lon"))
    with pytest.raises(InputError, match="write depth_m"):
        model_field(volume, "temp")
    field = model_field(volume, "temp", 120.0)
    assert float(field.data[0, 0, 0]) == 150.0
    assert any("150 m" in note for note in field.notes)


def test_times_that_repeat_or_cannot_be_read():
    dataset = regular(LON, LAT, 4)
    twice = xr.concat([dataset, dataset], "time")
    with pytest.raises(InputError, match="times do not rise"):
        model_field(twice)
    with pytest.raises(InputError, match="axis of times"):
        model_field(dataset.assign_coords(time=np.arange(4)))


def test_calendars_without_leap_years_are_read_and_of_360_days_refused(tmp_path):
    dataset = regular(LON, LAT, 4).drop_vars("time")
    for calendar, day in (("noleap", 58), ("360_day", 58)):
        timed = dataset.assign_coords(time=(
            "time", np.arange(4) + day, {"units": "days since 2031-01-01", "calendar": calendar}
        ))
        timed.to_netcdf(tmp_path / f"{calendar}.nc")
    field = model_field(open_model([tmp_path / "noleap.nc"]))
    assert field.times[0] == np.datetime64("2031-02-28")
    assert any("noleap" in note for note in field.notes)
    with pytest.raises(InputError, match="days that no year has"):
        model_field(open_model([tmp_path / "360_day.nc"]))


def test_missing_files():
    with pytest.raises(InputError, match="no such file"):
        open_model([Path("nowhere.nc")])
