"""The command `response`, from the file to the files."""

from __future__ import annotations

import csv
import json
import subprocess
import sys

import numpy as np
import pytest
import xarray as xr

import waveguide
from waveguide.scenario import Scenario
from waveguide.schema import VALIDITY

BURST = """
title = "Burst"
[wind]
start = 2031-03-01T00:00:00Z
end = 2031-06-01T00:00:00Z
[[wind.patches]]
position = [-150.0, 0.0]
start = 2031-03-05T00:00:00Z
duration_days = 20
length_km = 800
width_km = 400
stress_pa = 0.1
towards_degrees = 90
[waves]
modes = [1]
period_days = 40
[[targets]]
name = "0N 110W"
position = [-110.0, 0.0]
[[targets]]
name = "=Callao"
position = [-77.15, -12.05]
[[targets]]
name = "Mid-gyre"
position = [-150.0, 35.0]
"""


@pytest.fixture(scope="module")
def scenario(tmp_path_factory):
    path = tmp_path_factory.mktemp("scenario") / "burst.toml"
    path.write_text(BURST, "utf-8")
    return path


def test_the_answer_is_a_table(run, scenario):
    status, out, _ = run("response", scenario)
    assert status == 0
    for word in ("Which wind made the peak", "0N 110W", "Callao", "target off the guide",
                 "no Rossby waves", "no warning system"):
        assert word in out
    assert max(map(len, out.splitlines())) <= 112
    # No target is without its row, and one that is off the guide has no numbers.
    row = next(line for line in out.splitlines() if "Mid-gyre" in line)
    assert row.count("–") == 4


def test_json_tells_when_how_much_and_which_wind(run, scenario):
    status, out, _ = run("response", scenario, "--json")
    assert status == 0
    answer = json.loads(out)
    equator, coast, gyre = answer["responses"]
    assert gyre["status"] == "target off the guide"
    assert gyre["peak"] is None
    # From 150°W the front of mode 1 takes some 18 days to 110°W; the burst peaks on 15 March.
    assert equator["peak_date"][:10] in {f"2031-03-{day}" for day in range(30, 32)} | {
        f"2031-04-0{day}" for day in range(1, 6)}
    # F² τ √π ℓ/(√2 ρg) (1 + 2L²/w²)^(−1/2) is 2.4 cm for F² = 0.0037/m, before losses on the way
    assert 0.01 < equator["peak"] < 0.024
    assert coast["peak_date"] > equator["peak_date"]
    parts = [stretch["at_peak"] for stretch in coast["stretches"]]
    assert sum(parts) == pytest.approx(answer["sums"][1]["total_peak"], rel=1e-6)
    first = max(coast["stretches"], key=lambda stretch: stretch["at_peak"])
    assert first["kind"] == "equator"
    assert "2031-03-05" <= first["wind_start"] < first["wind_end"] <= "2031-03-26"
    assert len(answer["time"]) == len(coast["sea_level"])
    assert len(answer["sums"][0]["dynamic_height"]) == len(answer["time"])
    assert all(value is None for value in answer["sums"][1]["dynamic_height"])


def test_every_response_says_how_its_way_stands_to_the_theory(run, scenario):
    _, out, _ = run("response", scenario, "--json")
    rows = {row["target"]: row for row in json.loads(out)["responses"]}
    callao, off = rows["=Callao"], rows["Mid-gyre"]
    for name in VALIDITY:
        applies = name != "narrowest_strait_km"  # there is none on this way
        assert isinstance(callao[name], float) == applies, name
        assert off[name] is None
    assert off["cautions"] == []
    # The way comes along the equator and turns to Callao, as that of a free wave does.
    told = {caution["kind"]: caution["number"] for caution in callao["cautions"]}
    assert told["below the critical frequency"] == pytest.approx(100.0 * callao["critical_share"])
    free = waveguide.arrivals(Scenario.model_validate({
        "title": "free", "waves": {"modes": [1], "period_days": 40},
        "event": {"position": [-150.0, 0.0], "start": "2031-03-05T00:00:00Z", "duration_days": 20},
        "targets": [{"name": "Callao", "position": [-77.15, -12.05]}],
    }))  # fmt: skip
    expected = free["critical_share"].item()
    assert callao["critical_share"] == pytest.approx(expected, abs=0.05)  # a step more or less
    assert -12.5 < callao["southernmost_latitude"] < -11.5
    assert "the coastal way is below the critical frequency" in callao["caution"]
    _, text, _ = run("response", scenario)
    assert "Cautions, the most serious first" in text


def test_out_writes_files_that_hold_together(run, scenario, tmp_path, printed_figures):
    out = tmp_path / "out"
    status, _, err = run("response", scenario, "--out", out)
    assert status == 0
    assert str(out) in err
    assert {path.name for path in out.iterdir()} == {
        "sea_level.csv", "responses.csv", "stretches.csv", "response.nc", "along_guide.nc",
        *printed_figures,
    }  # fmt: skip
    assert printed_figures == [
        f"{name}.{ending}" for name in ("sea_level", "cause_01_0n-110w", "cause_02_callao")
        for ending in ("png", "pdf")
    ]
    with (out / "sea_level.csv").open(newline="") as file:
        rows = list(csv.reader(file))
    assert rows[0][:3] == ["time", "0N 110W mode 1 (m)", "0N 110W (m)"]
    assert rows[0][3] == "'=Callao mode 1 (m)"  # no formula for a spreadsheet
    assert rows[1][-1] == ""  # missing
    with xr.open_dataset(out / "response.nc") as stored:
        assert stored.attrs["featureType"] == "timeSeries"
        assert stored["station_name"].attrs["cf_role"] == "timeseries_id"
        assert stored["total_sea_level"].dims == ("station", "time")
        assert stored["total_sea_level"].attrs["units"] == "m"
        peak = float(stored["sea_level_mode_1"][0].max())
        written = max(float(row[1]) for row in rows[1:])
        assert peak == pytest.approx(written, rel=1e-6)
        assert np.datetime_as_string(stored["time"].values[0], unit="s") == "2031-03-01T00:00:00"
    with xr.open_dataset(out / "along_guide.nc") as along:
        last = along.isel(place=np.nonzero(along["way_target"].values == 0)[0][-1])
        assert float(last["way_distance"]) < 30e3
        assert float(last["way_sea_level"].max()) == pytest.approx(peak, rel=0.01)


def test_formats_of_the_scenario_are_kept_to(run, scenario, tmp_path):
    few = tmp_path / "few.toml"
    few.write_text(BURST + '[output]\nformats = ["csv"]\n', "utf-8")
    assert run("response", few, "--out", tmp_path / "out")[0] == 0
    assert {path.suffix for path in (tmp_path / "out").iterdir()} == {".csv"}


@pytest.mark.parametrize(("change", "words"), [
    (("stress_pa = 0.1", "stress_pa = -1"), "stress_pa"),
    (("end = 2031-06-01", "end = 2031-03-02"), "wind.end"),
    (("[-77.15, -12.05]", "[-60.0, -10.0]"), "from the sea"),
])  # fmt: skip
def test_bad_input_ends_with_2_and_leaves_nothing(run, tmp_path, change, words):
    bad = tmp_path / "bad.toml"
    bad.write_text(BURST.replace(*change), "utf-8")
    status, out, err = run("response", bad, "--out", tmp_path / "out")
    assert (status, out) == (2, "")
    assert words in err
    assert not (tmp_path / "out").exists()


def test_a_target_nothing_reaches_ends_with_2(run, tmp_path):
    lost = tmp_path / "lost.toml"
    lost.write_text(BURST.replace("[-110.0, 0.0]", "[-150.0, 33.0]").replace(
        "[-77.15, -12.05]", "[-150.0, 31.0]"), "utf-8")
    status, _, err = run("response", lost)
    assert status == 2
    assert "no target responds in any mode" in err
    assert err.count("target off the guide") == 3


def test_winds_that_miss_the_guide_are_refused_with_the_part(run, tmp_path):
    lon, lat = np.arange(250.0, 290.0, 2.0), np.arange(-30.0, 31.0, 2.0)
    blow = np.full((40, lat.size, lon.size), 6.0)
    xr.Dataset(
        {name: (("time", "lat", "lon"), blow, {"units": "m s-1"}) for name in ("u10", "v10")},
        {"time": ("time", np.arange(40.0), {"units": "days since 2031-01-01"}),
         "lat": ("lat", lat, {"units": "degrees_north"}),
         "lon": ("lon", lon, {"units": "degrees_east"})},
    ).to_netcdf(tmp_path / "east.nc")  # fmt: skip
    narrow = tmp_path / "narrow.toml"
    start = BURST.index("[wind]")
    narrow.write_text(BURST[:start] + '[wind]\nfile = "east.nc"\n' + BURST[BURST.index("[waves]"):],
                      "utf-8")
    status, _, err = run("response", narrow)
    assert status == 2
    assert "% of what lies upstream of '0N 110W'" in err
    assert "the equator from" in err


def test_a_scenario_without_wind_is_refused(run):
    status, _, err = run("response", "peru_burst")
    assert status == 2
    assert "write a [wind] table" in err


def test_the_table_needs_no_plotting_library(scenario):
    code = (
        "import sys; sys.argv = ['waveguide', 'response', sys.argv[1]]\n"
        "from waveguide.cli import main\n"
        "try: main()\n"
        "except SystemExit: pass\n"
        "print('matplotlib' in sys.modules)"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, scenario], capture_output=True, text=True, check=True
    )
    assert done.stdout.splitlines()[-1] == "False"


def test_the_shipped_record_runs_and_repeats_itself(run):
    """Monthly winds of 1982 to 1992: the warm events raise the eastern Pacific, the cold lower."""
    status, out, _ = run("response", "pacific_winds", "--json")
    assert status == 0
    answer = json.loads(out)
    month = np.array([moment[:7] for moment in answer["time"]])
    east = np.array(answer["sums"][2]["total_sea_level"])
    assert answer["sums"][2]["target"] == "0N 110W"
    warm, cold = east[month == "1983-01"].mean(), east[month == "1988-10"].mean()
    assert warm > 0.05
    assert cold < -0.05
    assert "monthly_winds.nc" in answer["data_sha256"]
    assert run("response", "pacific_winds", "--json")[1] == out
