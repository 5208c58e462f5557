"""Temperature and salinity of any kind and layout give the same N², or a clear refusal."""

from __future__ import annotations

import gsw
import numpy as np
import pytest
import xarray as xr

from waveguide.errors import DataError, InputError
from waveguide.ocean.hydrography import read_climatology
from waveguide.ocean.stratification import Climatology

DEPTH = np.array([0.0, 50.0, 100.0, 200.0, 400.0, 800.0, 1500.0])
LAT = np.arange(-12.0, -7.9, 1.0)
LON = np.arange(-85.0, -79.9, 1.0)
SHAPE = (DEPTH.size, LAT.size, LON.size)
PRESSURE = gsw.p_from_z(-DEPTH[:, None, None], LAT[None, :, None])
# A thermocline that tilts with longitude, stable everywhere.
CT = 4.0 + 18.0 * np.exp(-DEPTH[:, None, None] / 150.0) + 0.2 * np.arange(LON.size) * np.exp(
    -DEPTH[:, None, None] / 300.0) + np.zeros(SHAPE)
SA = 34.8 + 0.3 * DEPTH[:, None, None] / 1500.0 + np.zeros(SHAPE)
SEA = np.arange(DEPTH.size)[:, None, None] <= 2 + np.arange(LON.size)[::-1]  # shoals eastward
CT, SA = np.where(SEA, CT, np.nan), np.where(SEA, SA, np.nan)
POSITION = (LON[None, None, :], LAT[None, :, None])

TEMPERATURES = {
    "in-situ": ("sea_water_temperature", gsw.t_from_CT(SA, CT, PRESSURE)),
    "potential": ("sea_water_potential_temperature", gsw.pt_from_CT(SA, CT)),
    "conservative": ("sea_water_conservative_temperature", CT),
}
SALINITIES = {
    "practical": ("sea_water_practical_salinity", gsw.SP_from_SA(SA, PRESSURE, *POSITION)),
    "absolute": ("sea_water_absolute_salinity", SA),
}


def expected():
    """N² by GSW, one column at a time."""
    n2 = np.full((DEPTH.size - 1, LAT.size, LON.size), np.nan)
    for j in range(LAT.size):
        for i in range(LON.size):
            n2[:, j, i] = gsw.Nsquared(SA[:, j, i], CT[:, j, i], PRESSURE[:, j, 0], LAT[j])[0]
    return n2


def dataset(t_kind="conservative", s_kind="absolute", stated=True, **depth):
    t_name, t = TEMPERATURES[t_kind]
    s_name, s = SALINITIES[s_kind]
    t_attributes = {"units": "degC"} | ({"standard_name": t_name} if stated else {})
    s_attributes = {"units": "1"} | ({"standard_name": s_name} if stated else {})
    return xr.Dataset(
        {"temp": (("depth", "lat", "lon"), t, t_attributes),
         "salt": (("depth", "lat", "lon"), s, s_attributes)},
        {"depth": ("depth", DEPTH, {"units": "m", "positive": "down", **depth}),
         "lat": ("lat", LAT, {"units": "degrees_north"}),
         "lon": ("lon", LON, {"units": "degrees_east"})},
    )


def read(data, tmp_path, **arguments):
    data.to_netcdf(tmp_path / "ts.nc")
    return read_climatology(tmp_path / "ts.nc", **arguments)


def same(climatology, relative=1e-6):
    assert np.array_equal(climatology.lon, LON)
    assert np.array_equal(climatology.lat, LAT)
    assert climatology.n2 == pytest.approx(expected(), rel=relative, nan_ok=True)


@pytest.mark.parametrize("t_kind", TEMPERATURES)
@pytest.mark.parametrize("s_kind", SALINITIES)
@pytest.mark.parametrize("stated", [True, False])
def test_every_kind_gives_the_same_n2(tmp_path, t_kind, s_kind, stated):
    told = {} if stated else {"temperature": t_kind, "salinity": s_kind}
    climatology = read(dataset(t_kind, s_kind, stated), tmp_path, **told)
    same(climatology)
    assert climatology.depth == pytest.approx([25.0, 75.0, 150.0, 300.0, 600.0, 1150.0])
    assert climatology.notes == ()
    assert t_kind in climatology.source


def test_kinds_matter(tmp_path):
    wrong = read(dataset("in-situ", stated=False), tmp_path, temperature="conservative",
                 salinity="absolute")
    # The adiabatic gradient, 1e-4 K/m against 1e-3 K/m of the deepest layer, must show.
    assert np.nanmin(np.abs(wrong.n2[-1, :, 0] / expected()[-1, :, 0] - 1.0)) > 0.02


@pytest.mark.parametrize(("drop", "told", "message"), [
    ("temp", {}, r"temp does not say which temperature.*'in-situ' or 'potential' or 'cons"),
    ("salt", {}, r"salt does not say which salinity.*'practical' or 'absolute'"),
    (None, {"temperature": "warm"}, r"temperature = 'warm'.*must be one of in-situ"),
])
def test_a_kind_that_nobody_says_is_asked_for(tmp_path, drop, told, message):
    data = dataset()
    if drop:
        del data[drop].attrs["standard_name"]
    with pytest.raises(InputError, match=message):
        read(data, tmp_path, **told)


def test_the_user_goes_before_the_file_and_that_is_said(tmp_path):
    data = dataset("potential")
    data.temp.attrs["standard_name"] = "sea_water_temperature"
    climatology = read(data, tmp_path, temperature="potential")
    same(climatology)
    assert "taken as potential as told, though the file says in-situ" in climatology.notes[0]


def test_kelvin_north_up_deep_first_and_east_longitudes(tmp_path):
    data = dataset()
    data["temp"] = data.temp + 273.15
    data.temp.attrs.update(units="K", standard_name="sea_water_conservative_temperature")
    data = data.isel(lat=slice(None, None, -1), depth=slice(None, None, -1))
    data = data.assign_coords(lon=("lon", LON + 360.0, {"units": "degrees_east"}))
    same(read(data.transpose("lon", "depth", "lat"), tmp_path))


def test_salinity_in_kilograms_per_kilogram(tmp_path):
    data = dataset()
    data["salt"] = (data.salt * 1e-3).assign_attrs(data.salt.attrs, units="kg kg-1")
    same(read(data, tmp_path))


@pytest.mark.parametrize(("factor", "attributes"), [
    (-1.0, {"units": "m", "positive": "up"}), (1e-3, {"units": "km"}), (100.0, {"units": "cm"}),
])
def test_other_depth_axes(tmp_path, factor, attributes):
    data = dataset()
    data = data.assign_coords(depth=("depth", DEPTH * factor, attributes))
    same(read(data, tmp_path))


@pytest.mark.parametrize(("factor", "units"), [(1.0, "dbar"), (1e4, "Pa"), (0.1, "bar")])
def test_a_pressure_axis(tmp_path, factor, units):
    data = dataset()
    pressure = gsw.p_from_z(-DEPTH, -10.0)
    data = data.assign_coords(depth=("depth", pressure * factor, {"units": units}))
    climatology = read(data, tmp_path)
    # Levels differ by the latitude at which pressure was made: below 1e-4 here.
    same(climatology, relative=1e-3)
    # Depth by the latitude 45°, 0.3 % from that of the equator.
    assert climatology.depth == pytest.approx([25, 75, 150, 300, 600, 1150], rel=3e-3)


def test_twelve_months_are_averaged_and_that_is_said(tmp_path):
    season = xr.DataArray(np.cos(2 * np.pi * np.arange(12) / 12), dims="month")
    data = dataset()
    data["temp"] = (data.temp + season * np.exp(-data.depth / 30.0)).assign_attrs(data.temp.attrs)
    climatology = read(data, tmp_path)
    same(climatology, relative=1e-5)
    assert climatology.notes == ("temp: mean of 12 values along month",)


def test_months_without_data_are_left_out_of_the_mean(tmp_path):
    data = dataset().expand_dims(time=3).copy(deep=True)
    data.temp[1, :, 2, 2] = np.nan
    same(read(data, tmp_path))


def test_temperature_and_salinity_in_two_files(tmp_path):
    data = dataset("in-situ", "practical")
    data[["salt"]].to_netcdf(tmp_path / "s.nc")
    climatology = read(data[["temp"]], tmp_path, salinity_path=tmp_path / "s.nc")
    same(climatology)
    data[["salt"]].isel(lat=slice(1, None)).to_netcdf(tmp_path / "other.nc")
    with pytest.raises(InputError, match="not on the same grid"):
        read(data[["temp"]], tmp_path, salinity_path=tmp_path / "other.nc")


def test_statistics_beside_the_mean_do_not_confuse(tmp_path):
    data = dataset("in-situ", "practical").rename(temp="t_an", salt="s_an")
    for name in ("t_mn", "t_sd", "s_mn", "s_sd"):
        data[name] = 0.1 * data[f"{name[0]}_an"]
        data[name].attrs = data[f"{name[0]}_an"].attrs
    same(read(data, tmp_path))


def test_unknown_names_are_listed_and_can_be_given(tmp_path):
    data = dataset(stated=False).rename(temp="warmth", salt="brine")
    with pytest.raises(InputError, match=r"no temperature.*warmth.*temperature_variable"):
        read(data, tmp_path)
    same(read(data, tmp_path, temperature="conservative", salinity="absolute",
              temperature_variable="warmth", salinity_variable="brine"))


@pytest.mark.parametrize(("change", "message"), [
    (lambda d: d.temp.attrs.update(units="degF"), "convert it to degC or K"),
    (lambda d: d.temp.attrs.update(units="K"), "beyond -5..45 of sea water"),
    (lambda d: d.update({"salt": (d.salt * 1e-3).assign_attrs(d.salt.attrs)}), "fresh water"),
    (lambda d: d.update({"salt": (d.salt + 1e4).assign_attrs(d.salt.attrs)}), "unit and its fill"),
    (lambda d: d.update({"temp": (d.temp * np.nan).assign_attrs(d.temp.attrs)}), "is missing"),
    (lambda d: d.depth.attrs.update(standard_name="ocean_sigma_coordinate"), "levels of depth"),
    (lambda d: d.depth.attrs.update(units="level"), "no length known"),
])
def test_content_that_is_no_sea_water_is_refused(tmp_path, change, message):
    data = dataset()
    change(data)
    with pytest.raises(InputError, match=message):
        read(data, tmp_path)


def test_one_level_is_too_few(tmp_path):
    with pytest.raises(InputError, match="at least 2 levels"):
        read(dataset().isel(depth=[0]), tmp_path)


def test_a_truncated_file_is_refused(tmp_path):
    dataset().to_netcdf(tmp_path / "ts.nc")
    content = (tmp_path / "ts.nc").read_bytes()
    (tmp_path / "ts.nc").write_bytes(content[: len(content) // 2])
    with pytest.raises(DataError, match="cannot be read as NetCDF"):
        read_climatology(tmp_path / "ts.nc")


def basin():
    """Two seas side by side, a wall of land between them; only the western one is deep."""
    lon, lat, depth = np.arange(0.5, 10.0), np.arange(-2.5, 3.0), np.array([5.0, 50.0, 500.0])
    n2 = np.full((3, lat.size, lon.size), np.nan, np.float32)
    n2[:, :, :4] = np.array([3e-4, 2e-4, 1e-5])[:, None, None]
    n2[:2, :, 6:] = np.array([6e-4, 5e-4])[:, None, None]
    n2[2, :, 3] = np.nan  # a shelf beside the wall
    return Climatology(lon, lat, depth, n2)


def test_a_shelf_takes_its_own_water_and_deeper_values_from_offshore():
    columns = basin().profiles(3.5, 0.5)
    assert columns.n2[0] == pytest.approx([3e-4, 2e-4, 1e-5])
    assert columns.distance[0] == pytest.approx(0.0, abs=1.0)
    assert columns.depth_reached[0] == 500.0


def test_a_deep_column_is_sought_by_water_and_its_distance_given():
    columns = basin().profiles(3.5, 0.5, 500.0)
    assert columns.distance[0] == pytest.approx(111.2e3, rel=2e-3)  # one degree


def test_no_deep_column_beyond_the_wall():
    columns = basin().profiles([6.5, 6.5], 0.5, [500.0, 50.0])
    assert np.isnan(columns.n2[0]).all()
    # With 50 m enough, the deepest value is held, since no water of this sea is deeper.
    assert columns.n2[1] == pytest.approx([6e-4, 5e-4, 5e-4])
    assert columns.depth_reached[1] == 50.0


def test_nothing_far_from_the_data_or_below_them():
    assert np.isnan(basin().profiles(60.0, 0.0).n2).all()
    assert np.isnan(basin().profiles(1.5, 0.5, 501.0).n2).all()


def test_a_position_that_is_none_is_refused():
    with pytest.raises(InputError, match="must be finite"):
        basin().profiles([1.0, np.nan], 0.5)


@pytest.mark.parametrize(("change", "message"), [
    ({"n2": np.ones((2, 2, 2), np.float32)}, "give n2 as"),
    ({"lat": np.array([1.0, 0.0])}, "lat must ascend"),
])
def test_a_climatology_must_be_in_order(change, message):
    arguments = {"lon": np.array([0.0, 1.0]), "lat": np.array([0.0, 1.0]),
                 "depth": np.array([5.0]), "n2": np.ones((1, 2, 2), np.float32)}
    with pytest.raises(InputError, match=message):
        Climatology(**(arguments | change))
