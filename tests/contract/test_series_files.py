"""Records in every layout that is read, and every way in which one cannot be used."""

from __future__ import annotations

import gzip
from pathlib import Path

import numpy as np
import pytest
import xarray as xr

from waveguide.compare.reading import Record, read_series
from waveguide.compare.units import si_factor, unit_change, unit_island
from waveguide.errors import InputError

DAYS = np.arange("2031-01-01", "2032-01-01", dtype="datetime64[D]")
LEVEL = 1.5 + 0.1 * np.random.default_rng(0).standard_normal(DAYS.size).cumsum() / 5.0


def csv_file(path: Path, times, values, header="time,Callao") -> Path:
    lines = [header, *(f"{t},{v}" for t, v in zip(times, values, strict=True))]
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return path


def read(path: Path, **keys):
    return read_series(Record("Callao", (-77.2, -12.1), path, **{"units": "m", **keys}))


def test_daily_csv_stands_for_noon(tmp_path):
    series = read(csv_file(tmp_path / "a.csv", DAYS, LEVEL))
    assert series.step == 1.0
    assert series.start == np.datetime64("2031-01-01T12:00:00")
    np.testing.assert_allclose(series.values, LEVEL, rtol=1e-12)


def test_compressed_csv_in_millimetres_with_a_gap_and_remarks(tmp_path):
    kept = np.delete(np.arange(DAYS.size), slice(50, 60))
    rows = "\n".join(f"{DAYS[i]},{1000 * LEVEL[i]:.1f},7" for i in kept)
    text = f"# a remark\ndate,sea level,other\n\n{rows}\n"
    path = tmp_path / "a.csv.gz"
    path.write_bytes(gzip.compress(text.encode()))
    series = read(path, units="mm", column="sea level")
    assert np.isnan(series.values[50:60]).all()
    np.testing.assert_allclose(series.values[kept], LEVEL[kept], atol=1e-4)


def test_clock_times_with_zones_become_utc(tmp_path):
    times = [f"{day}T07:00:00-05:00" for day in DAYS]
    series = read(csv_file(tmp_path / "a.csv", times, LEVEL))
    assert series.start == np.datetime64("2031-01-01T12:00:00")


def test_a_zone_in_the_table_stands_for_times_without(tmp_path):
    path = csv_file(tmp_path / "a.csv", [f"{day} 00:00" for day in DAYS], LEVEL)
    with pytest.raises(InputError, match="no zone; write Z"):
        read(path)
    assert read(path, zone="UTC").start == np.datetime64("2031-01-01T00:00:00")


def test_plain_daily_layout(tmp_path):
    rows = [
        f"{d.astype(object).year},{d.astype(object).month:3d},{d.astype(object).day:3d},"
        f"{-32767 if i == 5 else round(1000 * LEVEL[i])}"
        for i, d in enumerate(DAYS)
    ]
    (tmp_path / "d123.csv").write_text("\n".join(rows))
    series = read(tmp_path / "d123.csv", units=None)
    assert np.isnan(series.values[5])
    assert series.start == np.datetime64("2031-01-01T12:00:00")
    np.testing.assert_allclose(np.delete(series.values, 5), np.delete(LEVEL, 5), atol=6e-4)
    assert any("fill" in note for note in series.notes)


def test_plain_hourly_layout(tmp_path):
    hours = np.arange("2031-01-01T00", "2031-02-01T00", dtype="datetime64[h]")
    level = 1.5 + 0.8 * np.cos(2 * np.pi * np.arange(hours.size) / 12.42)
    rows = []
    for moment, value in zip(hours.astype(object), level, strict=True):
        rows.append(f"{moment.year},{moment.month},{moment.day},{moment.hour},{1000 * value:.0f}")
    (tmp_path / "h123.csv").write_text("\n".join(rows))
    series = read(tmp_path / "h123.csv", units=None)
    assert series.step == pytest.approx(1.0 / 24.0)
    assert series.start == np.datetime64("2031-01-01T00:00:00")


def test_plain_monthly_layout(tmp_path):
    month = np.arange(240)
    rows = [
        f" {1958 + (m + 0.5) / 12:.4f}; {-99999 if m == 7 else 7000 + 40 * (m % 5)};00;000"
        for m in month
    ]
    (tmp_path / "123.rlrdata").write_text("\n".join(rows))
    series = read(tmp_path / "123.rlrdata", units=None)
    assert series.values.size == 240
    assert series.step == pytest.approx(30.44, abs=0.01)
    assert np.isnan(series.values[7])
    np.testing.assert_allclose(series.values[:3], [7.0, 7.04, 7.08])


def netcdf(path: Path, stations=("Callao", "Arica"), **attributes) -> Path:
    values = np.stack([LEVEL + k for k in range(len(stations))])
    name = "sea_surface_height_above_geoid"
    dataset = xr.Dataset(
        {"zeta": (("station", "time"), 100.0 * values,
                  {"units": "cm", "standard_name": name, **attributes}),
         "station_name": ("station", list(stations), {"cf_role": "timeseries_id"})},
        {"time": DAYS.astype("datetime64[ns]") + np.timedelta64(12, "h")},
        {"Conventions": "CF-1.11", "featureType": "timeSeries"},
    )
    dataset.to_netcdf(path, encoding={"zeta": {"_FillValue": -9e9}})
    return path


def test_cf_time_series_by_station(tmp_path):
    path = netcdf(tmp_path / "a.nc")
    np.testing.assert_allclose(read(path, units=None).values, LEVEL, rtol=1e-9)
    np.testing.assert_allclose(read(path, units=None, column="Arica").values, LEVEL + 1, rtol=1e-9)
    with pytest.raises(InputError, match=r"holds Callao, Arica"):
        read(path, units=None, column="Iquique")
    single = netcdf(tmp_path / "b.nc", ("only",))
    np.testing.assert_allclose(read(single, units=None, column="zeta").values, LEVEL, rtol=1e-9)


def test_the_inverse_barometer_is_added(tmp_path):
    pressure = 1010.0 + 10.0 * np.sin(np.arange(DAYS.size) / 9.0)
    static = -(pressure - pressure.mean()) * 100.0 / (1025.0 * 9.81)
    lines = ["time,Callao,hpa"]
    rows = zip(DAYS, LEVEL + static, pressure, strict=True)
    lines += [f"{t},{v},{p}" for t, v, p in rows]
    (tmp_path / "a.csv").write_text("\n".join(lines))
    series = read(tmp_path / "a.csv", pressure_column="hpa")
    np.testing.assert_allclose(series.values, LEVEL, atol=1e-9)


# ---- what cannot be used ----


def test_times_that_repeat(tmp_path):
    days = np.insert(DAYS, 10, DAYS[10])
    path = csv_file(tmp_path / "a.csv", days, np.insert(LEVEL, 10, 1.5))
    with pytest.raises(InputError, match=r"2031-01-11.* is there 2 times"):
        read(path)


def test_times_that_go_back(tmp_path):
    days = DAYS.copy()
    days[[20, 30]] = days[[30, 20]]
    with pytest.raises(InputError, match="go back at value"):
        read(csv_file(tmp_path / "a.csv", days, LEVEL))


def test_times_without_a_step(tmp_path):
    rng = np.random.default_rng(1)
    minutes = np.cumsum(rng.integers(500, 2500, 300)).astype("timedelta64[m]")
    times = [f"{t}Z" for t in np.datetime64("2031-01-01T00:00") + minutes]
    with pytest.raises(InputError, match="keep no step"):
        read(csv_file(tmp_path / "a.csv", times, LEVEL[:300]))


@pytest.mark.parametrize("text", ["05/03/2031", "2031-13-45", "yesterday"])
def test_times_that_cannot_be_read(tmp_path, text):
    times = [str(day) for day in DAYS]
    times[3] = text
    with pytest.raises(InputError, match="Callao"):
        read(csv_file(tmp_path / "a.csv", times, LEVEL))


def test_missing_columns_and_numbers(tmp_path):
    path = csv_file(tmp_path / "a.csv", DAYS, LEVEL, "time,Arica")
    with pytest.raises(InputError, match=r"no column 'Callao'.*Arica"):
        read(path)
    path = csv_file(tmp_path / "b.csv", DAYS, LEVEL, "when,Callao")
    with pytest.raises(InputError, match="no column of times"):
        read(path)
    values = [f"{v:.3f}" for v in LEVEL]
    values[4] = "1;5"
    with pytest.raises(InputError, match=r"'1;5' in row 6 is not a number"):
        read(csv_file(tmp_path / "c.csv", DAYS, values))
    (tmp_path / "d.csv").write_text("")
    with pytest.raises(InputError, match="empty"):
        read(tmp_path / "d.csv")


def test_units_must_be_told_and_fit(tmp_path):
    path = csv_file(tmp_path / "a.csv", DAYS, LEVEL)
    with pytest.raises(InputError, match="does not say the units"):
        read(path, units=None)
    with pytest.raises(InputError, match="do not measure sea level"):
        read(path, units="furlong")
    millimetres = csv_file(tmp_path / "b.csv", DAYS, 1000.0 * LEVEL)
    with pytest.raises(InputError, match="no ocean does"):
        read(millimetres, units="m")
    with pytest.raises(InputError, match="no ocean does"):
        read(csv_file(tmp_path / "c.csv", DAYS, np.full(DAYS.size, 1.5)))


@pytest.mark.parametrize("factor", [10.0, 100.0, 1000.0])
def test_units_that_change_within_a_record(tmp_path, factor):
    days = np.arange("2031-01-01", "2034-01-01", dtype="datetime64[D]")
    level = 1.5 + 0.05 * np.random.default_rng(2).standard_normal(days.size)
    level[700:] *= factor
    path = csv_file(tmp_path / "a.csv", days, level)
    with pytest.raises(InputError, match="units are mixed"):
        read(path)
    assert unit_change(level) == pytest.approx(700, abs=110)
    level[700:] /= factor
    assert unit_change(level) is None


@pytest.mark.parametrize("factor", [1000.0, 100.0, 10.0, 0.1, 0.01])
@pytest.mark.parametrize(("first", "last"), [(400, 500), (1000, 1030)])
def test_a_stretch_amid_the_record_in_other_units(tmp_path, factor, first, last):
    days = np.arange("2031-01-01", "2034-01-01", dtype="datetime64[D]")
    level = 1.5 + 0.05 * np.random.default_rng(2).standard_normal(days.size)
    assert unit_island(level) is None
    level[first:last] *= factor
    assert unit_island(level) == first
    with pytest.raises(InputError, match="units are mixed"):
        read(csv_file(tmp_path / "a.csv", days, level))


def test_a_season_far_above_all_others_is_no_change_of_unit(tmp_path):
    days = np.arange("2031-01-01", "2034-01-01", dtype="datetime64[D]")
    level = 0.05 * np.random.default_rng(2).standard_normal(days.size)  # anomalies, without datum
    level += 0.5 * np.exp(-(((np.arange(days.size) - 600.0) / 40.0) ** 2))
    np.testing.assert_allclose(read(csv_file(tmp_path / "a.csv", days, level)).values, level)


def test_a_fill_value_that_nobody_knows_is_asked_about(tmp_path):
    level = LEVEL.copy()
    level[100:120] = 77.77
    path = csv_file(tmp_path / "a.csv", DAYS, level)
    with pytest.raises(InputError, match=r"77.77 comes 20 times.*fill = 77.77"):
        read(path)
    assert np.isnan(read(path, fill=77.77).values[100:120]).all()


def test_all_missing(tmp_path):
    with pytest.raises(InputError, match="all values are missing"):
        read(csv_file(tmp_path / "a.csv", DAYS, np.full(DAYS.size, -9999)))


def test_too_few_values_and_rows_without_a_time(tmp_path):
    with pytest.raises(InputError, match="2 of 2 values are there"):
        read(csv_file(tmp_path / "a.csv", DAYS[:2], LEVEL[:2]))
    times = [str(day) for day in DAYS]
    times[7] = ""
    with pytest.raises(InputError, match="value 8 has no time"):
        read(csv_file(tmp_path / "b.csv", times, LEVEL))


def test_net_cdf_times_that_are_missing_repeat_or_go_back(tmp_path):
    for change, message in (
        ((9, np.datetime64("NaT")), "value 10 has no time"),
        ((9, DAYS[8]), "is there 2 times"),
        ((9, DAYS[30]), "go back at value"),
    ):
        times = DAYS.astype("datetime64[ns]")
        times[change[0]] = change[1]
        xr.Dataset(
            {"Callao": ("time", LEVEL, {"units": "m"})}, {"time": times}
        ).to_netcdf(tmp_path / "a.nc")
        with pytest.raises(InputError, match=message):
            read(tmp_path / "a.nc", units=None, column="Callao")


def test_files_that_are_none(tmp_path):
    (tmp_path / "a.nc").write_bytes(b"no netcdf")
    with pytest.raises(InputError, match="cannot be read as NetCDF"):
        read(tmp_path / "a.nc")
    (tmp_path / "a.csv.gz").write_bytes(b"no gzip")
    with pytest.raises(InputError, match="cannot be read as text"):
        read(tmp_path / "a.csv.gz")


@pytest.mark.parametrize(
    ("units", "quantity", "factor"),
    [
        ("mm", "sea level", 1e-3), ("cm", "sea level", 1e-2),
        ("dyn-cm", "dynamic height", 0.010194), ("dyn. cm", "dynamic height", 0.010194),
        ("dbar", "bottom pressure", 0.99452),
        ("m s-1", "alongshore velocity", 1.0), ("cm/s", "alongshore velocity", 0.01),
        ("degC", "temperature", 1.0), ("degree_C", "temperature", 1.0),
    ],
)  # fmt: skip
def test_units(units, quantity, factor):
    assert si_factor(units, quantity, "x") == pytest.approx(factor, rel=1e-4)
