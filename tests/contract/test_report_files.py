"""The files of a run: readable by others, and whole or not at all."""

from __future__ import annotations

import csv
import json
import os
from typing import get_args

import numpy as np
import pytest
import shapely
import xarray as xr

from waveguide.errors import InputError
from waveguide.report.files import output_folder, write_outputs, written
from waveguide.scenario.fields import Format
from waveguide.schema import check

ALL = get_args(Format)
FILES = [
    "arrivals.csv", "arrivals.nc", "budget.csv", "distance_time.pdf", "distance_time.png",
    "legs.csv", "map.pdf", "map.png", "moorings.csv", "routes.geojson", "waveforms.csv",
    "waveforms.pdf",
    "waveforms.png",
]  # fmt: skip


def test_every_format_is_written(arrivals, tmp_path):
    with output_folder(tmp_path / "new" / "out") as folder:
        write_outputs(arrivals, folder, ALL)
    assert sorted(os.listdir(tmp_path / "new" / "out")) == FILES
    assert os.listdir(tmp_path) == ["new"]


def test_nothing_is_left_when_the_work_fails(tmp_path):
    def fail(out):
        with output_folder(out) as folder:
            (folder / "arrivals.csv").write_text("half", encoding="utf-8")
            raise RuntimeError("in the middle")

    (tmp_path / "old").mkdir()
    (tmp_path / "old" / "arrivals.csv").write_text("before", encoding="utf-8")
    for name in ("new/out", "old"):
        with pytest.raises(RuntimeError, match="in the middle"):
            fail(tmp_path / name)
    assert os.listdir(tmp_path) == ["old"]
    assert os.listdir(tmp_path / "old") == ["arrivals.csv"]
    assert (tmp_path / "old" / "arrivals.csv").read_text() == "before"


def test_a_second_run_replaces_its_files_and_keeps_others(arrivals, tmp_path):
    (tmp_path / "notes.txt").write_text("mine", encoding="utf-8")
    (tmp_path / "arrivals.csv").write_text("before", encoding="utf-8")
    with output_folder(tmp_path) as folder:
        write_outputs(arrivals, folder, ["csv"])
    names = ["arrivals.csv", "legs.csv", "moorings.csv", "notes.txt"]
    assert sorted(os.listdir(tmp_path)) == names
    assert (tmp_path / "arrivals.csv").read_text().startswith("target,")


def test_a_folder_that_cannot_be_written_is_refused_before_the_work(tmp_path):
    file = tmp_path / "file"
    file.write_text("", encoding="utf-8")
    for out in (file, file / "below"):
        with (
            pytest.raises(InputError, match="choose a folder you may write with --out"),
            output_folder(out),
        ):
            pytest.fail("the work was begun")


@pytest.mark.skipif(os.name != "posix" or os.geteuid() == 0, reason="root may write anywhere")
def test_a_folder_without_permission_is_refused(tmp_path):
    tmp_path.chmod(0o500)
    with pytest.raises(InputError, match="Permission"), output_folder(tmp_path / "out"):
        pytest.fail("the work was begun")


def test_a_folder_in_the_way_of_a_file_stops_all_files(arrivals, tmp_path):
    (tmp_path / "legs.csv").mkdir()
    with pytest.raises(InputError, match=r"legs\.csv is a folder"), output_folder(tmp_path) as f:
        write_outputs(arrivals, f, ["csv"])
    assert os.listdir(tmp_path) == ["legs.csv"]


@pytest.mark.parametrize(
    ("error", "reason"),
    [
        (OSError(28, "No space left on device"), "No space left on device"),
        (RuntimeError("NetCDF: HDF error"), "NetCDF: HDF error"),  # a full disk too
    ],
)
def test_a_full_disk_is_told(error, reason):
    said = rf"cannot be written \({reason}\); free some space"
    with pytest.raises(InputError, match=said), written():
        raise error


def test_other_errors_while_writing_stay_defects():
    with pytest.raises(RuntimeError, match="ours"), written():
        raise RuntimeError("ours")


def test_csv(arrivals, tmp_path):
    write_outputs(arrivals, tmp_path, ["csv"])
    with (tmp_path / "arrivals.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert len(rows) == 6
    assert float(rows[0]["front_time_days"]) == pytest.approx(
        float(arrivals["front_time_days"][0, 0]), rel=1e-8
    )
    assert rows[3]["front_time_days"] == rows[3]["front_date"] == ""
    assert rows[4]["target"] == r"'=Lima\x0a$x_1$ \u202eevil"  # no formula, no line break
    with (tmp_path / "legs.csv").open(encoding="utf-8", newline="") as file:
        legs = list(csv.DictReader(file))
    assert len(legs) == arrivals.sizes["leg"]
    assert [leg["leg"] for leg in legs[:4]] == ["1", "2", "3", "1"]


def test_netcdf_comes_back_the_same(arrivals, tmp_path):
    write_outputs(arrivals, tmp_path, ["netcdf"])
    with xr.open_dataset(tmp_path / "arrivals.nc") as stored:
        back = stored.load().set_index(target="target_name")
    check(back)
    others = arrivals.drop_vars("front_date")
    xr.testing.assert_allclose(back.drop_vars("front_date"), others, rtol=0, atol=1e-12)
    assert back.attrs == arrivals.attrs | {"event_amplitude_m": back.attrs["event_amplitude_m"]}
    assert np.isnan(back.attrs["event_amplitude_m"])
    moved = (back["front_date"] - arrivals["front_date"]).values
    assert np.array_equal(np.isnat(moved), np.isnat(arrivals["front_date"].values))
    # Half a unit in the last place of 22 000 days held as float64 is 157 ns.
    assert np.nanmax(np.abs(moved)) < np.timedelta64(200, "ns")


def test_netcdf_follows_cf(arrivals, tmp_path):
    write_outputs(arrivals, tmp_path, ["netcdf"])
    with xr.open_dataset(tmp_path / "arrivals.nc", decode_cf=False) as stored:
        assert stored.attrs["Conventions"] == "CF-1.11"
        for name, variable in stored.variables.items():
            assert variable.attrs["long_name"], name
            if variable.dtype.kind == "f":
                assert variable.attrs["units"], name
        # Section 2.5.1 and 6: what has the name of its dimension is numeric, and without fill.
        for dim in stored.dims:
            if dim in stored.variables:
                assert stored[dim].dtype.kind in "if"
                assert "_FillValue" not in stored[dim].attrs
        named = stored["status"].attrs["coordinates"].split()
        assert set(named) == {"target_name", "target_longitude", "target_latitude"}


def test_geojson(arrivals, tmp_path):
    write_outputs(arrivals, tmp_path, ["geojson"])
    text = (tmp_path / "routes.geojson").read_text(encoding="utf-8")
    features = json.loads(text)["features"]
    legs = [f for f in features if f["properties"]["feature"] == "leg"]
    assert len(legs) == arrivals.sizes["leg"]
    assert len(features) == len(legs) + 1 + arrivals.sizes["target"]
    for feature in features:
        shape = shapely.from_geojson(json.dumps(feature["geometry"]))
        assert shape.is_valid
        west, _, east, _ = shape.bounds
        assert -180.0 <= west <= east <= 180.0
    crossing = [f for f in legs if f["geometry"]["type"] == "MultiLineString"]
    assert [f["properties"]["kind"] for f in crossing] == ["equator"] * 4
    first = legs[1]["properties"]
    assert (first["target"], first["mode"], first["leg"]) == ("Callao", 1, 2)
    assert first["to_time_days"] - first["from_time_days"] == pytest.approx(first["time_days"])


def test_outputs_are_the_same_bytes_each_time(arrivals, tmp_path):
    for name in ("a", "b"):
        (tmp_path / name).mkdir()
        write_outputs(arrivals, tmp_path / name, ["csv", "geojson", "budget"])
    for name in ("arrivals.csv", "legs.csv", "routes.geojson", "budget.csv"):
        assert (tmp_path / "a" / name).read_bytes() == (tmp_path / "b" / name).read_bytes()
