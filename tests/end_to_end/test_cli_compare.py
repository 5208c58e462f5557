"""The command `compare` on the shipped scenarios: what it prints, writes and refuses."""

from __future__ import annotations

import csv
import json

import numpy as np
import pytest
import xarray as xr


def test_gauges_get_lags_verdicts_and_reasons(run, tmp_path, printed_figures):
    status, out, err = run("compare", "peru_gauges", "--json", "--out", tmp_path / "out")
    assert status == 0
    assert "outputs are in" in err
    document = json.loads(out)
    rows = {(row["first"], row["second"]): row for row in document["rows"]}
    first = rows["La Libertad", "Callao"]
    # The invented lag is 3.0 days (scenarios/invent.py).
    assert first["lag_low_days"] <= 3.0 <= first["lag_high_days"]
    assert first["chance"] < 0.05
    assert "below the critical frequency" in first["cautions"][0]
    assert first["verdict"][1] == "too early"  # the second mode would be days later
    assert rows["Antofagasta", "Callao"]["lag_high_days"] < 0.0
    assert rows["Callao", "Talcahuano"]["verdict"] == ["not resolvable"] * 2
    event = rows["western Pacific wind burst", "Callao"]
    assert event["lag_low_days"] <= 59.0 <= event["lag_high_days"]
    assert rows["western Pacific wind burst", "Matarani"]["verdict"] == ["not resolvable"] * 2
    names = {path.name for path in (tmp_path / "out").iterdir()}
    assert {"comparison.csv", "comparison.nc", "records.nc", "event_callao.png",
            "pair_la-libertad_callao.png", "pair_la-libertad_callao.pdf"} <= names  # fmt: skip
    assert len(printed_figures) == 2 * (5 + 5)  # pairs and events, as PNG and PDF
    with (tmp_path / "out" / "comparison.csv").open() as file:
        assert len(list(csv.DictReader(file))) == 2 * len(document["rows"])
    with xr.open_dataset(tmp_path / "out" / "comparison.nc") as stored:
        assert stored["lag_days"].attrs["units"] == "day"
        np.testing.assert_allclose(stored["lag_days"][0], first["lag_days"], rtol=1e-6)


def test_a_mooring_is_judged_by_time_and_structure(run, tmp_path, printed_figures):
    status, out, _ = run("compare", "equator_mooring", "--out", tmp_path / "out")
    assert status == 0
    lines = out.splitlines()
    height = next(line for line in lines if line.startswith("height 170W") and "140W" in line)
    assert height.endswith("consistent")
    assert "Mooring: ratio of each instrument to height 140W" in out
    temperature = next(line for line in lines if line.startswith("temperature 140W   "))
    assert "consistent" in temperature
    assert {"mooring_height-140w.png", "mooring_height-140w.pdf"} <= set(printed_figures)
    assert "warning system" in out


def test_problems_of_all_records_are_told_at_once(run, tmp_path):
    (tmp_path / "a.csv").write_text("time,A\n2031-01-01 00:00,1\n2031-01-02 00:00,2\n")
    (tmp_path / "b.csv").write_text("date,B\n2031-01-01,1\n2031-01-01,2\n2031-01-03,2\n")
    tables = "".join(
        f'[[observations]]\nname = "{name}"\nposition = [{lon}, 0.0]\nfile = "{name.lower()}.csv"\n'
        'units = "m"\n' for name, lon in (("A", -150.0), ("B", -140.0))
    )
    (tmp_path / "bad.toml").write_text(
        'title = "bad"\n[waves]\nmodes = [1]\nperiod_days = 30\n[compare]\nband_days = [10, 60]\n'
        + tables
    )
    status, out, err = run("compare", tmp_path / "bad.toml", "--out", tmp_path / "out")
    assert (status, out) == (2, "")
    assert "'A': the time '2031-01-01 00:00' of value 1 has no zone" in err
    assert "'B': 2031-01-01T12:00:00 is there 2 times" in err
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ('band_days = [60, 10]', "band_days must rise"),
        ('band_days = [10, 60]\npairs = [["A", "C"]]', "names 'C', which is no observation"),
        ('band = [10, 60]', "unknown key in [compare]"),
    ],
)
def test_bad_tables_are_refused_with_a_way_out(run, tmp_path, change, message):
    (tmp_path / "a.csv").write_text("date,A\n")
    (tmp_path / "bad.toml").write_text(
        f'title = "bad"\n[waves]\nmodes = [1]\nperiod_days = 30\n[compare]\n{change}\n'
        '[[observations]]\nname = "A"\nposition = [0.0, 0.0]\nfile = "a.csv"\nunits = "m"\n'
    )
    status, _, err = run("compare", tmp_path / "bad.toml")
    assert status == 2
    assert message in err


def test_a_scenario_without_records_is_refused(run):
    status, _, err = run("compare", "peru_burst")
    assert status == 2
    assert "observations" in err
    assert "[compare]" in err
