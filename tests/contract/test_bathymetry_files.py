"""Any CF NetCDF bathymetry is read to the same depths, or refused with the way out."""

from __future__ import annotations

import netCDF4
import numpy as np
import pytest
import xarray as xr

from waveguide.errors import DataError, InputError
from waveguide.ocean.bathymetry import Bathymetry, packaged_bathymetry, read_bathymetry

LON, LAT = np.arange(-90.0, -69.9, 0.5), np.arange(-20.0, -4.9, 0.25)  # the sea off Peru


def peru():
    """Depths (m) of the packaged grid, land and sea in near balance."""
    return packaged_bathymetry().sample(*np.meshgrid(LON, LAT))


def write(path, values, lon=LON, lat=LAT, name="elevation", coordinates=None, **attributes):
    coordinates = coordinates or {
        "lon": ("lon", lon, {"units": "degrees_east", "standard_name": "longitude"}),
        "lat": ("lat", lat, {"units": "degrees_north", "standard_name": "latitude"}),
    }
    dims = tuple(coordinates)[::-1]
    xr.Dataset({name: (dims, values, attributes)}, coordinates).to_netcdf(path)
    return path


def same(read, lon=LON, lat=LAT, depth=None, tolerance=0.01):
    depth = peru() if depth is None else depth
    assert read.depth.dtype == np.float32
    assert np.all(np.diff(read.lon) > 0)
    assert np.all(np.diff(read.lat) > 0)
    found = read.sample(*np.meshgrid(lon, lat))
    assert np.allclose(found, depth, atol=tolerance)


@pytest.mark.parametrize(("name", "sign", "scale", "attributes", "said"), [
    ("elevation", -1, 1, {"units": "m", "standard_name": "height_above_mean_sea_level"}, None),
    ("anything", 1, 1, {"units": "m", "standard_name": "sea_floor_depth_below_geoid"}, None),
    ("deptho", 1, 1, {"units": "metres", "positive": "down"}, None),
    ("depth", -1, 1, {"units": "m", "positive": "up"}, None),
    ("topo", -1, 1, {"units": "meters"}, "by its name"),
    ("Depth", 1, 1, {}, "by its name"),
    ("z", -1, 1, {}, "agrees with the packaged depths"),
    ("Band1", 1, 1, {}, "agrees with the packaged depths"),
    ("bathymetry", 1, 1e-3, {"units": "km", "positive": "down"}, None),
])
def test_sign_and_unit(tmp_path, name, sign, scale, attributes, said):
    path = write(tmp_path / "b.nc", sign * scale * peru(), name=name, **attributes)
    read = read_bathymetry(path)
    same(read)
    assert len(read.notes) == (said is not None)
    assert said is None or said in read.notes[0]


@pytest.mark.parametrize("sign", [-1, 1])
def test_a_file_of_one_sign_is_sea(tmp_path, sign):
    depth = np.clip(peru(), 0.0, None)
    path = write(tmp_path / "b.nc", sign * depth, name="bathymetry")
    read = read_bathymetry(path)
    same(read, depth=depth)
    assert "every value has that sign" in read.notes[0]


def test_depths_called_depth_but_negative_are_turned_and_that_is_said(tmp_path):
    depth = np.clip(peru(), 0.0, None)
    path = write(tmp_path / "b.nc", -depth, name="depth", standard_name="sea_floor_depth")
    read = read_bathymetry(path)
    same(read, depth=depth)
    assert "taken as elevation" in read.notes[0]


@pytest.mark.parametrize("lon_turn", [0.0, 360.0])
@pytest.mark.parametrize("north_up", [False, True])
@pytest.mark.parametrize("swapped", [False, True])
def test_turn_direction_and_order_of_dimensions(tmp_path, lon_turn, north_up, swapped):
    rows = slice(None, None, -1) if north_up else slice(None)
    data = xr.Dataset(
        {"elevation": (("lat", "lon"), -peru()[rows], {"units": "m", "positive": "up"})},
        {"lon": ("lon", LON + lon_turn, {"units": "degrees_east"}),
         "lat": ("lat", LAT[rows], {"units": "degrees_north"})},
    )
    (data.transpose("lon", "lat") if swapped else data).to_netcdf(tmp_path / "b.nc")
    read = read_bathymetry(tmp_path / "b.nc")
    same(read)
    assert read.lon[0] == -90.0


def test_packed_integers_with_fill_and_a_time_axis(tmp_path):
    depth = peru()
    with netCDF4.Dataset(tmp_path / "b.nc", "w") as data:
        for name, axis, units in (("x", LON, "degrees_east"), ("y", LAT, "degrees_north")):
            data.createDimension(name, axis.size)
            data.createVariable(name, "f4", (name,))[:] = axis
            data[name].units = units
        data.createDimension("time", 1)
        v = data.createVariable("bathy", "i2", ("time", "y", "x"), fill_value=-32768)
        v.setncatts({"scale_factor": 0.5, "units": "m", "positive": "down"})
        v[:] = np.ma.masked_array(depth, depth < 0.0)[None]
    read = read_bathymetry(tmp_path / "b.nc")
    assert np.array_equal(np.isfinite(read.depth), depth >= 0.0)
    assert np.allclose(read.depth[depth >= 0], depth[depth >= 0], atol=0.26)
    assert not read.covers(-71.0, -10.0)  # land, which this file does not know
    assert np.isnan(read.sample(-71.0, -10.0))


def test_a_region_across_the_date_line(tmp_path):
    lon, lat = np.arange(170.0, 190.1, 0.5), np.arange(-25.0, -15.0, 0.5)
    depth = packaged_bathymetry().sample(*np.meshgrid(lon, lat))
    for name, axis in (("on", lon), ("cut", np.where(lon >= 180.0, lon - 360.0, lon))):
        path = write(tmp_path / f"{name}.nc", depth, axis, lat, "deptho", positive="down")
        read = read_bathymetry(path)
        same(read, lon, lat, depth)
        assert read.sample(180.25, -20.0) == pytest.approx(depth[10, 20:22].mean(), rel=1e-6)
        assert not read.covers([0.0, 169.9, -169.9, 90.0], -20.0).any()
        assert read.covers([170.0, 180.0, -180.0, -170.0], -20.0).all()


@pytest.mark.parametrize("lon", [
    np.arange(0.0, 360.1, 10.0), np.arange(0.0, 360.0, 10.0), np.arange(-180.0, 180.1, 10.0),
    np.arange(-175.0, 180.0, 10.0), np.arange(20.5, 380.0, 1.0),
])
def test_a_global_grid_has_no_seam(tmp_path, lon):
    lat = np.arange(-80.0, 81.0, 10.0)
    depth = 2000.0 + 1000.0 * np.cos(np.radians(lon))[None, :] * np.ones((lat.size, 1))
    read = read_bathymetry(write(tmp_path / "b.nc", depth, lon, lat, "deptho", positive="down"))
    at = np.arange(-200.0, 400.0, 1.3)
    exact = 2000.0 + 1000.0 * np.cos(np.radians(at))
    # Error of linear interpolation over 10°: 1000 (10π/180)²/8 = 3.8 m.
    assert np.abs(read.sample(at, 12.3) - exact).max() < 3.9
    assert np.isnan(read.sample(0.0, 85.0))


def test_gmt_grid_without_units(tmp_path):
    coordinates = {"x": ("x", LON, {"long_name": "x"}), "y": ("y", LAT, {"long_name": "y"})}
    path = write(tmp_path / "b.grd", -peru().astype(np.float32), name="z", coordinates=coordinates)
    same(read_bathymetry(path))


@pytest.mark.parametrize("offset", [0, 1])
def test_gmt_grid_of_the_old_kind(tmp_path, offset):
    half = 0.5 * offset
    with netCDF4.Dataset(tmp_path / "b.grd", "w", format="NETCDF3_CLASSIC") as data:
        data.createDimension("side", 2)
        data.createDimension("xysize", LON.size * LAT.size)
        for name, value in (
            ("x_range", [LON[0] - 0.5 * half, LON[-1] + 0.5 * half]),
            ("y_range", [LAT[0] - 0.25 * half, LAT[-1] + 0.25 * half]),
            ("spacing", [0.5, 0.25]),
        ):
            data.createVariable(name, "f8", ("side",))[:] = value
        data.createVariable("dimension", "i4", ("side",))[:] = [LON.size, LAT.size]
        z = data.createVariable("z", "f4", ("xysize",))
        z.node_offset = np.int32(offset)
        z[:] = -peru()[::-1].ravel()
    same(read_bathymetry(tmp_path / "b.grd"))


def test_a_variable_can_be_named(tmp_path):
    coordinates = {"lon": ("lon", LON), "lat": ("lat", LAT)}
    data = xr.Dataset({name: (("lat", "lon"), peru(), {"positive": "down"})
                       for name in ("first", "second")}, coordinates)
    data.to_netcdf(tmp_path / "b.nc")
    with pytest.raises(InputError, match=r"no depth or elevation.*first, second.*`variable`"):
        read_bathymetry(tmp_path / "b.nc")
    same(read_bathymetry(tmp_path / "b.nc", variable="second"))
    with pytest.raises(InputError, match=r"no variable 'third'.*first, second"):
        read_bathymetry(tmp_path / "b.nc", variable="third")


def test_two_depths_that_could_be_meant_are_refused(tmp_path):
    coordinates = {"lon": ("lon", LON), "lat": ("lat", LAT)}
    xr.Dataset({name: (("lat", "lon"), peru()) for name in ("depth", "elevation")},
               coordinates).to_netcdf(tmp_path / "b.nc")
    with pytest.raises(InputError, match="depth could be depth or elevation"):
        read_bathymetry(tmp_path / "b.nc")


def test_a_curvilinear_grid_is_refused(tmp_path):
    lon, lat = np.meshgrid(LON, LAT)
    data = xr.Dataset({"depth": (("y", "x"), peru())},
                      {"nav_lon": (("y", "x"), lon, {"units": "degrees_east"}),
                       "nav_lat": (("y", "x"), lat, {"units": "degrees_north"})})
    data.to_netcdf(tmp_path / "b.nc")
    with pytest.raises(InputError, match=r"nav_lon has 2 dimensions.*regular"):
        read_bathymetry(tmp_path / "b.nc")


@pytest.mark.parametrize(("change", "message"), [
    ({"lat": np.r_[LAT[:5], LAT[4], LAT[6:]]}, "latitude is not monotonic"),
    ({"lon": np.r_[LON[:5], np.nan, LON[6:]]}, "longitude must have at least 2 finite"),
    ({"lat": LAT * 10.0}, "not degrees on the earth"),
    ({"values": np.full((LAT.size, LON.size), np.nan)}, "every value of elevation is missing"),
    ({"units": "fathoms"}, "no length known here"),
    ({"units": "km"}, "deepest trench"),
    ({"values": np.where(LAT[:, None] > LAT[2], 1e300, 0.0 * LON)}, "deepest trench"),
])
def test_unusable_content_is_refused(tmp_path, change, message):
    path = write(tmp_path / "b.nc", **{"values": -peru(), "units": "m", **change})
    with pytest.raises(InputError, match=message):
        read_bathymetry(path)


def test_a_file_without_axes_is_refused(tmp_path):
    xr.Dataset({"depth": (("a", "b"), peru())}).to_netcdf(tmp_path / "b.nc")
    with pytest.raises(InputError, match=r"no longitude axis among depth.*standard_name"):
        read_bathymetry(tmp_path / "b.nc")


def test_missing_truncated_and_foreign_files_are_refused(tmp_path):
    with pytest.raises(InputError, match="no such file"):
        read_bathymetry(tmp_path / "none.nc")
    path = write(tmp_path / "b.nc", -peru())
    content = path.read_bytes()
    for part in (content[: len(content) // 2], b"lon lat depth\n1 2 3\n", b""):
        path.write_bytes(part)
        with pytest.raises(DataError, match="cannot be read as NetCDF"):
            read_bathymetry(path)


@pytest.mark.parametrize("arguments", [
    (LON, LAT, np.zeros((LON.size, LAT.size), np.float32)),
    (LON[::-1], LAT, np.zeros((LAT.size, LON.size), np.float32)),
])
def test_a_bathymetry_must_be_in_order(arguments):
    with pytest.raises(InputError, match="bathymetry"):
        Bathymetry(*arguments)


def test_sampling_is_bilinear_and_unknown_outside():
    sea = Bathymetry(np.array([0.0, 1.0]), np.array([0.0, 2.0]),
                     np.array([[0, 10], [20, np.nan]], np.float32))
    assert sea.sample([0.0, 0.5, 0.0, 1.0], [0.0, 0.0, 1.0, 0.0]) == pytest.approx([0, 5, 10, 10])
    assert np.isnan(sea.sample([0.5, 1.0, -0.1, 0.5, np.nan], [1.0, 2.0, 0.0, 2.1, 0.0])).all()
    assert sea.sample(0.0, [[0.0], [2.0]]).shape == (2, 1)
