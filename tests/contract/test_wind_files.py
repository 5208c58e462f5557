"""Wind files of every layout give one stress; what cannot be used is refused with a way out."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest
import xarray as xr

from waveguide.errors import InputError
from waveguide.forcing import wind_file
from waveguide.forcing.drag import wind_stress
from waveguide.forcing.projection import record_forcing
from waveguide.forcing.samples import step_samples
from waveguide.forcing.stations import read_stations
from waveguide.forcing.time_axis import bridged_gaps
from waveguide.forcing.wind_file import open_wind, sampling_matrix
from waveguide.ocean.bathymetry import packaged_bathymetry

sys.path.insert(0, str(Path(__file__).parents[1] / "oracle"))
from forced_guide import line_network

LAW = "Large and Pond 1981"
DAY = 86400.0
LON, LAT = np.arange(180.0, 260.0, 2.0), np.arange(-20.0, 21.0, 2.0)


def _wind(days=10, lon=LON, lat=LAT, u=6.0, v=-3.0) -> xr.Dataset:
    shape = (days, lat.size, lon.size)
    ramp = np.linspace(0.5, 1.0, days)[:, None, None] * np.ones(shape)
    return xr.Dataset(
        {"u10": (("time", "lat", "lon"), u * ramp, {"units": "m s-1"}),
         "v10": (("time", "lat", "lon"), v * ramp, {"units": "m s-1"})},
        {"time": ("time", np.arange(float(days)), {"units": "days since 2000-02-25"}),
         "lat": ("lat", lat, {"units": "degrees_north"}),
         "lon": ("lon", lon, {"units": "degrees_east"})},
    )  # fmt: skip


def _saved(dataset: xr.Dataset, folder: Path, name="wind.nc") -> Path:
    dataset.to_netcdf(folder / name)
    return folder / name


def _open(*paths, **keys):
    return open_wind(list(paths), packaged_bathymetry(), LAW, **keys)


GUIDE = line_network(np.linspace(-160.0, -120.0, 41), np.zeros(41), equatorial=True)


def _stress(record, step=DAY):
    steps = np.arange(40)
    samples = step_samples(GUIDE, np.full(41, 2.5), steps, 0.0)
    return record_forcing(record, GUIDE, samples, steps, (0, record.time.size), step)


@pytest.fixture(scope="module")
def expected():
    return wind_stress(6.0 * np.linspace(0.5, 1.0, 10), -3.0 * np.linspace(0.5, 1.0, 10), LAW)[0]


def _flipped(d):
    return d.isel(lat=slice(None, None, -1))


def _east_to_west(d):
    return d.assign_coords(lon=("lon", d.lon.values - 360.0, d.lon.attrs))


def _transposed(d):
    return d.transpose("lon", "time", "lat")


def _levels(d):
    return d.expand_dims("height", axis=1)


def _knots(d):
    d = d / 0.514444
    for name in ("u10", "v10"):
        d[name].attrs["units"] = "knots"
    return d


def _named(d):
    d = d.rename(u10="a", v10="b")
    d["a"].attrs["standard_name"] = "eastward_wind"
    d["b"].attrs["standard_name"] = "northward_wind"
    return d


def _hours(d):
    return d.assign_coords(time=("time", d.time.values * 24.0,
                                 {"units": "hours since 2000-02-25 00:00:00"}))


def _stress_instead(d):
    x, y = wind_stress(d.u10.values, d.v10.values, LAW)
    return d.drop_vars(["u10", "v10"]).assign(
        taux=(d.u10.dims, 10.0 * x, {"units": "dyn cm-2"}),
        tauy=(d.u10.dims, 10.0 * y, {"units": "dyn cm-2"}),
    )


@pytest.mark.parametrize("change", [lambda d: d, _flipped, _east_to_west, _transposed, _levels,
                                    _knots, _named, _hours, _stress_instead])
def test_every_layout_gives_the_same_stress(tmp_path, change, expected):
    found = _stress(_open(_saved(change(_wind()), tmp_path)))
    assert found.stress == pytest.approx(np.broadcast_to(expected, (40, 10)), rel=2e-4)
    assert found.covered == pytest.approx(np.ones(40))
    assert found.time[0] == np.datetime64("2000-02-25")


def test_files_in_a_row_and_small_pieces_change_nothing(tmp_path, monkeypatch, expected):
    whole = _wind()
    parts = [_saved(whole.isel(time=part), tmp_path, f"{k}.nc")
             for k, part in enumerate((slice(0, 3), slice(3, 4), slice(4, 10)))]
    monkeypatch.setattr(wind_file, "CHUNK_VALUES", 1000)  # one or two records at a time
    found = _stress(_open(*parts))
    assert found.stress == pytest.approx(np.broadcast_to(expected, (40, 10)), rel=2e-4)


def test_a_zarr_store_is_read(tmp_path, expected):
    pytest.importorskip("zarr")
    _wind().to_zarr(tmp_path / "wind.zarr")
    found = _stress(_open(tmp_path / "wind.zarr"))
    assert found.stress == pytest.approx(np.broadcast_to(expected, (40, 10)), rel=2e-4)


def test_variables_can_be_named_with_their_units(tmp_path, expected):
    odd = _wind().rename(u10="one", v10="two")
    for name in ("one", "two"):
        del odd[name].attrs["units"]
    path = _saved(odd, tmp_path)
    found = _stress(_open(path, names=("one", "two"), units="m/s"))
    assert found.stress == pytest.approx(np.broadcast_to(expected, (40, 10)), rel=2e-4)


def test_monthly_values_are_joined_by_straight_lines(tmp_path):
    monthly = _wind(days=3).assign_coords(
        time=("time", [0.0, 31.0, 59.0], {"units": "days since 2001-01-16"}))
    found = _stress(_open(_saved(monthly, tmp_path)), 5.0 * DAY)
    ends = found.stress[0, [0, -1]]
    assert found.time.size == 12
    assert np.all(np.diff(found.stress[0]) > 0.0)
    assert ends[0] == pytest.approx(float(wind_stress(3.0, -1.5, LAW)[0]), rel=1e-4)


def test_land_as_zero_stress_is_land(tmp_path):
    """A model that writes 0 on land must not weaken the wind of the coast beside it."""
    coast = line_network(np.linspace(-79.6, -71.3, 15), np.linspace(-7.5, -18.2, 15))
    lon, lat = np.arange(-100.0, -60.0, 1.0), np.arange(-30.0, 1.0, 1.0)
    d = _wind(lon=lon, lat=lat)
    depths = packaged_bathymetry().sample(*np.meshgrid(lon, lat))
    for name in ("u10", "v10"):
        d[name] = d[name].where(depths > 0.0, 0.0).assign_attrs(units="m s-1")
    record = _open(_saved(d, tmp_path))
    assert not record.sea[depths <= 0.0].any()
    steps = np.arange(14)
    samples = step_samples(coast, np.full(15, 2.5), steps, 60e3)
    matrix, covered = sampling_matrix(record, samples)
    assert covered == pytest.approx(np.ones(14))
    assert np.asarray(matrix.sum(axis=1)).ravel() == pytest.approx(np.ones(14))
    found = record_forcing(record, coast, samples, steps, (0, 10), DAY)
    x, y = wind_stress(6.0, -3.0, LAW)
    along = samples.eastward * x + samples.northward * y
    assert found.stress[:, -1] == pytest.approx(along, rel=2e-4)


def test_missing_values_for_a_few_days_are_bridged_and_told(tmp_path, expected):
    d = _wind()
    d["u10"][4:6] = np.nan
    found = _stress(_open(_saved(d, tmp_path)))
    assert found.bridged == pytest.approx(0.2)
    # a straight line for a part of a parabola
    assert found.stress == pytest.approx(np.broadcast_to(expected, (40, 10)), rel=0.02)


def test_parts_the_record_lacks_are_not_covered(tmp_path):
    record = _open(_saved(_wind(lon=np.arange(180.0, 215.0, 1.0)), tmp_path))
    found = _stress(record)
    east = GUIDE.lon[:-1] > -145.0
    assert found.covered[east] == pytest.approx(np.zeros(east.sum()))
    assert found.covered[GUIDE.lon[:-1] < -146.5] == pytest.approx(1.0)
    narrow = _open(_saved(_wind(lat=np.arange(-4.0, 5.0, 2.0)), tmp_path, "narrow.nc"))
    assert np.all(_stress(narrow).covered < 0.95)  # the Kelvin wave feels more than ±5°


# --- what is refused ----------------------------------------------------------------------


def _no_leap(d):
    d.time.attrs["calendar"] = "noleap"
    return d


def _months(d):
    d.time.attrs["units"] = "months since 2000-01-01"
    return d


def _nonsense_time(d):
    d.time.attrs["units"] = "fortnights since the flood"
    return d


def _furlongs(d):
    d.u10.attrs["units"] = d.v10.attrs["units"] = "furlong/fortnight"
    return d


def _accumulated(d):
    d = _stress_instead(d)
    d.taux.attrs["units"] = d.tauy.attrs["units"] = "N m**-2 s"
    return d


def _stress_called_wind(d):
    d = _stress_instead(d) / 10.0
    d = d.rename(taux="u10", tauy="v10")
    d.u10.attrs["units"] = d.v10.attrs["units"] = "m s-1"
    return d


def _wind_called_stress(d):
    d = d * 2.0
    d.u10.attrs["units"] = d.v10.attrs["units"] = "N m-2"
    return d


def _contradiction(d):
    d = _named(d)
    d["a"].attrs["standard_name"] = "surface_downward_eastward_stress"
    d["b"].attrs["standard_name"] = "surface_downward_northward_stress"
    return d


def _levels_two(d):
    return xr.concat([d, d], "height")


def _backwards(d):
    return d.isel(time=slice(None, None, -1))


def _twice(d):
    return xr.concat([d, d.isel(time=[9])], "time")


def _no_pair(d):
    return d.rename(u10="gust")


def _mixed_units(d):
    d.v10.attrs["units"] = "knots"
    return d


def _all_missing(d):
    return d * np.nan


@pytest.mark.parametrize(("change", "words"), [
    (_no_leap, ("calendar", "noleap", "setcalendar")),
    (_months, ("months since", "do not parse", "days since")),
    (_nonsense_time, ("fortnights", "dimension of time")),
    (_furlongs, ("furlong/fortnight", "units in [wind]")),
    (_accumulated, ("N m**-2 s", "dividing sums")),
    (_stress_called_wind, ("are they stresses?", "units")),
    (_wind_called_stress, ("are they winds", "units")),
    (_contradiction, ("surface_downward_eastward_stress", "units of wind")),
    (_levels_two, ("height", "cut out one level")),
    (_backwards, ("must rise", "sort")),
    (_twice, ("must rise",)),
    (_no_pair, ("no pair", "eastward =")),
    (_mixed_units, ("different units", "convert")),
    (_all_missing, ("no value over sea",)),
])  # fmt: skip
def test_bad_files_are_refused(tmp_path, change, words):
    if change is _nonsense_time:
        words = ("fortnights", "do not parse")
    path = _saved(change(_wind()), tmp_path)
    with pytest.raises(InputError) as caught:
        _open(path)
    for word in words:
        assert word in str(caught.value)
    assert "wind.nc" in str(caught.value)


def test_names_that_are_not_there_are_refused(tmp_path):
    with pytest.raises(InputError, match="no variable 'tx'"):
        _open(_saved(_wind(), tmp_path), names=("tx", "v10"))


def test_grids_of_several_files_must_agree(tmp_path):
    first = _saved(_wind(), tmp_path)
    other = _saved(_wind(lat=LAT + 0.5), tmp_path, "other.nc")
    with pytest.raises(InputError, match="is not that of the first file"):
        _open(first, other)


def test_quantity_of_the_scenario_and_units_of_the_file_must_agree(tmp_path):
    with pytest.raises(InputError, match=r"no pair|a unit of wind"):
        _open(_saved(_wind(), tmp_path), quantity="stress")


def test_long_gaps_are_refused_and_short_ones_told():
    day = np.arange(60)
    times = (np.datetime64("2000-01-01") + day).astype("datetime64[ns]")
    assert bridged_gaps(times) == []
    assert "4 missing" in bridged_gaps(np.delete(times, [20, 21, 22, 23]))[0]
    with pytest.raises(InputError, match="2000-01-21 to 2000-02-02"):
        bridged_gaps(np.delete(times, np.arange(21, 32)))
    months = np.arange("2000-01", "2004-01", dtype="datetime64[M]").astype("datetime64[ns]")
    assert bridged_gaps(months) == []
    with pytest.raises(InputError, match="two at least"):
        bridged_gaps(times[:1])


def test_values_missing_for_long_are_refused(tmp_path):
    d = _wind(days=40)
    d["v10"][10:25] = np.nan
    with pytest.raises(InputError, match=r"2000-03-06 to 2000-03-20"):
        _stress(_open(_saved(d, tmp_path)))


def test_a_rare_missing_value_that_is_not_marked_is_refused(tmp_path):
    d = _wind(days=40)
    d["v10"][10] = -9999.0
    with pytest.raises(InputError, match="_FillValue"):
        _stress(_open(_saved(d, tmp_path)))


# --- stations -----------------------------------------------------------------------------

VALUES = "date,a,b\n2031-01-01,10,-20\n2031-01-02,,5\n2031-01-03,30,5\n"
PLACES = "station,lat,lon\na,30,-119\nb,36,-122\n"


def _station_files(folder, values=VALUES, places=PLACES):
    for name, text in (("values.csv", values), ("places.csv", places)):
        (folder / name).write_text(text, "utf-8")
    return folder / "values.csv", folder / "places.csv"


def test_stations_are_read(tmp_path):
    small = VALUES.replace("0,", "e-2,").replace("-20", "-2e-2").replace("5", "5e-3")
    winds = read_stations(*_station_files(tmp_path, small), "alongshore stress")
    assert winds.name == ["a", "b"]
    assert winds.lon.tolist() == [-119.0, -122.0]
    assert np.isnan(winds.stress[0, 1])
    assert winds.stress[1].tolist() == [-0.02, 0.005, 0.005]
    assert winds.time[1] == np.datetime64("2031-01-02")
    index = read_stations(*_station_files(tmp_path), "upwelling index")
    assert index.stress[1, 0] > 0.0  # onshore transport: wind blows downstream


@pytest.mark.parametrize(("values", "places", "words"), [
    ("time,a\n2031-01-01,1\n", PLACES, "first column"),
    ("date,a,c\n2031-01-01,1,2\n", PLACES, "no position for station"),
    ("date,a\n2031-01-01,much\n", PLACES, "is no number"),
    ("date,a\n01/02/2031,1\n", PLACES, "cannot be read"),
    ("date,a,b\n2031-01-01,1\n", PLACES, "row 2 has 2 values"),
    ("date,a\n2031-01-02,1\n2031-01-01,1\n", PLACES, "must rise"),
    ("date,a\n2031-01-01,9000\n2031-01-02,9000\n", PLACES, "is no upwelling index"),
    (VALUES, "name,lat,lon\na,1,2\n", "no column 'station'"),
    (VALUES, "station,lat,lon\na,-119,30\nb,1,2\n", "are they swapped"),
    ("date,a\n", PLACES, "no rows"),
])  # fmt: skip
def test_bad_station_files_are_refused(tmp_path, values, places, words):
    with pytest.raises(InputError, match=words):
        read_stations(*_station_files(tmp_path, values, places), "upwelling index")


def test_a_station_with_one_value_for_missing_or_no_text_is_refused(tmp_path):
    dates = np.datetime64("2031-01-01") + np.arange(300)
    rows = [f"{day},{-99999 if n == 150 else 5}" for n, day in enumerate(dates)]
    files = _station_files(tmp_path, "\n".join(["date,a", *rows]))
    with pytest.raises(InputError, match="leave its cell empty"):
        read_stations(*files, "upwelling index")
    files[0].write_bytes("date,Á\n2031-01-01,1\n".encode("latin-1"))
    with pytest.raises(InputError, match="save it as CSV in UTF-8"):
        read_stations(*files, "upwelling index")
