"""The [wind] table: what it may say, and that all its problems are told at once."""

from __future__ import annotations

import pytest

from waveguide.errors import InputError
from waveguide.scenario import read_scenario, read_wind_scenario, scenario_title, shipped_scenarios

HEAD = """
title = "A test"
[waves]
modes = [1]
period_days = 20
[[targets]]
name = "Callao"
position = [-77.15, -12.05]
"""
PATCH = """
[wind]
end = 2031-06-01T00:00:00Z
[[wind.patches]]
position = [170.0, 0.0]
start = 2031-03-01T00:00:00Z
duration_days = 10
length_km = 1000
width_km = 300
stress_pa = 0.1
towards_degrees = 90
"""


def _read(tmp_path, text):
    path = tmp_path / "wind.toml"
    path.write_text(HEAD + text, "utf-8")
    return read_wind_scenario(path)


def _problems(tmp_path, text):
    with pytest.raises(InputError) as caught:
        _read(tmp_path, text)
    return caught.value.problems


def test_a_patch_is_read(tmp_path):
    wind = _read(tmp_path, PATCH).wind
    assert wind.invented
    assert wind.patches[0].stress_pa == 0.1
    assert wind.patches[0].heading_degrees is None
    assert wind.drag_law == "Large and Pond 1981"


def test_a_storm_and_files_are_read(tmp_path):
    storm = _read(tmp_path, """
[wind]
end = 2031-09-01T00:00:00Z
[[wind.storms]]
track = [[130.0, 15.0, 2031-08-01T00:00:00Z], [125.0, 20.0, 2031-08-03T00:00:00Z]]
max_wind_m_s = 45
radius_km = 40
""").wind.storms[0]
    assert storm.track[1][0] == 125.0
    for name in ("a.nc", "b.nc"):
        (tmp_path / name).write_bytes(b"")
    (tmp_path / "store.zarr").mkdir()
    assert len(_read(tmp_path, '[wind]\nfile = ["a.nc", "b.nc"]').wind.file) == 2
    assert _read(tmp_path, '[wind]\nfile = "store.zarr"').wind.file[0].name == "store.zarr"


@pytest.mark.parametrize(("text", "words"), [
    ("", ("wind", "write a [wind] table")),
    ("[wind]\n", ("exactly one of record, file",)),
    ('[wind]\nfile = "none.nc"', ("wind.file", "there is no file none.nc")),
    ('[wind]\nrecord = "hourly"', ("wind.record", "monthly 1982-1992")),
    ('[wind]\nrecord = "monthly 1982-1992"\nquantity = "upwelling index"', ("stations",)),
    ('[wind]\nrecord = "monthly 1982-1992"\nunits = "m/s"', ("describe a file",)),
    ('[wind]\nrecord = "monthly 1982-1992"\nstart = 1990-01-01T00:00:00Z\n'
     "end = 1989-01-01T00:00:00Z", ("not after the start",)),
    ('[wind]\nrecord = "monthly 1982-1992"\ndrag_law = "mine"', ("drag_law", "Large and Pond")),
    ('[wind]\nrecord = "monthly 1982-1992"\nfrom = 1990', ("unknown key", "wind")),
    (PATCH.replace("end = 2031-06-01T00:00:00Z\n", ""), ("needs an end",)),
    (PATCH.replace("width_km = 300\n", ""), ("wind patch 1 width_km", "across the wind")),
    (PATCH.replace("0.1", "50"), ("wind patch 1 stress_pa", "at most 5")),
    (PATCH + "speed = 1.0\n", ("wind patch 1 speed", "speed_m_s")),
    (PATCH + "[ocean]\nphase_speed_m_s = 2.5\n", ("how wind couples",)),
])  # fmt: skip
def test_problems_are_told(tmp_path, text, words):
    told = "\n".join(_problems(tmp_path, text))
    for word in words:
        assert word in told


def test_all_problems_come_at_once(tmp_path):
    text = PATCH.replace("0.1", "-1").replace("1000", '"far"').replace("= 90", "= 400")
    problems = _problems(tmp_path, text.replace("position", "place", 1))
    told = "\n".join(problems)
    assert len(problems) >= 4
    for key in ("stress_pa", "length_km", "towards_degrees", "place"):
        assert key in told


def test_a_track_must_rise_in_time(tmp_path):
    told = _problems(tmp_path, """
[wind]
end = 2031-09-01T00:00:00Z
[[wind.storms]]
track = [[130.0, 15.0, 2031-08-03T00:00:00Z], [125.0, 20.0, 2031-08-01T00:00:00Z]]
max_wind_m_s = 45
radius_km = 40
""")
    assert "must rise" in told[0]


def test_a_track_with_latitude_first_is_refused(tmp_path):
    told = _problems(tmp_path, """
[wind]
end = 2031-09-01T00:00:00Z
[[wind.storms]]
track = [[15.0, 130.0, 2031-08-01T00:00:00Z], [20.0, 125.0, 2031-08-03T00:00:00Z]]
max_wind_m_s = 45
radius_km = 40
""")
    assert len(told) == 2
    assert "latitude 130" in told[0]
    assert "swapped" in told[0]


def test_a_csv_of_winds_needs_its_stations(tmp_path):
    (tmp_path / "winds.csv").write_text("time,a\n", "utf-8")
    told = _problems(tmp_path, '[wind]\nfile = "winds.csv"')
    assert "name the file of their positions in stations" in told[0]


def test_a_file_without_an_event_says_so_to_arrivals(tmp_path):
    path = tmp_path / "wind.toml"
    path.write_text(HEAD + PATCH, "utf-8")
    with pytest.raises(InputError, match="event: it is missing"):
        read_scenario(path)
    assert scenario_title(path) == "A test"


def test_shipped_winds():
    names = [name for name, path in shipped_scenarios().items() if "[wind]" in path.read_text()]
    assert set(names) >= {"pacific_winds", "westerly_burst"}
    for name in names:
        assert read_wind_scenario(name).targets
    assert read_scenario("westerly_burst").wind is not None  # serves both commands


def test_a_scenario_may_hold_the_tables_of_every_command(tmp_path):
    from waveguide.scenario import Scenario, WindScenario
    from waveguide.shipped import shipped_scenarios

    assert set(WindScenario.model_fields) == set(Scenario.model_fields)
    path = tmp_path / "all.toml"
    path.write_text(shipped_scenarios()["westerly_burst"].read_text(encoding="utf-8")
                    + "\n[uncertainty]\nmembers = 64\n[plan]\nchance_percent = 50\n")  # fmt: skip
    assert read_wind_scenario(path).wind == read_scenario(path).wind
