"""The scenario file: what it may say, and that every problem is told at once."""

from __future__ import annotations

from datetime import UTC, datetime
from pathlib import Path

import pytest
from pydantic import ValidationError

from waveguide.errors import InputError
from waveguide.scenario import find_scenario, read_scenario

GOOD = {
    "": 'title = "A test"',
    "event": "position = [-120.0, 30.0]\nstart = 2031-03-05T02:00:00+02:00\nduration_days = 3",
    "waves": "modes = [2, 1]\nperiod_days = 20",
    "[targets]": 'name = "San Diego"\nposition = [-117.28, 32.68]',
}


@pytest.fixture
def scenario(tmp_path):
    """Write a scenario file from its tables, changed or added to, and give its path."""

    def write(**changed: str) -> Path:
        tables = GOOD | {"" if k == "top" else k.replace("targets", "[targets]"): v
                         for k, v in changed.items()}  # fmt: skip
        path = tmp_path / "case.toml"
        path.write_text(
            "\n".join(f"[{name}]\n{text}" if name else text for name, text in tables.items()),
            encoding="utf-8",
        )
        return path

    return write


def problems(path: Path) -> list[str]:
    with pytest.raises(InputError) as caught:
        read_scenario(path)
    return caught.value.problems


def test_a_good_file_is_read(scenario):
    result = read_scenario(scenario())
    assert result.name == "case"
    assert result.event.start == datetime(2031, 3, 5, tzinfo=UTC)
    assert result.event.centre == (-120.0, 30.0)
    assert result.waves.modes == (1, 2)
    assert result.ocean.source == "packaged"
    assert result.output.formats == (
        "csv", "netcdf", "geojson", "map", "waveforms", "distance-time", "budget",
    )  # fmt: skip
    assert [(t.name, t.position) for t in result.targets] == [("San Diego", (-117.28, 32.68))]


def test_a_scenario_is_frozen(scenario):
    result = read_scenario(scenario())
    with pytest.raises(ValidationError, match="frozen"):
        result.event.duration_days = 4.0


def test_longitudes_from_0_to_360_are_wrapped(scenario):
    text = GOOD["event"].replace("[-120.0, 30.0]", "[240.0, 30.0]")
    assert read_scenario(scenario(event=text)).event.position == (-120.0, 30.0)


@pytest.mark.parametrize(
    ("box", "centre"),
    [
        ([170.0, -2.0, -170.0, 2.0], (180.0, 0.0)),
        ([170.0, -4.0, 200.0, 2.0], (-175.0, -1.0)),
        ([-30.0, 0.0, -20.0, 2.0], (-25.0, 1.0)),
    ],
)
def test_the_centre_of_a_box_knows_the_date_line(scenario, box, centre):
    text = GOOD["event"].replace("position = [-120.0, 30.0]", f"box = {box}")
    assert read_scenario(scenario(event=text)).event.centre == centre


def test_all_problems_are_told_at_once(scenario):
    found = problems(
        scenario(
            top='titel = "x"',
            event='position = [-12, 277]\nstart = "soon"\nduration_days = -3',
            waves="modes = [7]\nperiod_days = 0",
            targets='name = ""\nposition = [1]',
        )
    )
    starts = ["title:", "titel =", "event.position =", "event.start =", "event.duration_days ="]
    starts += ["waves.modes = 7", "waves.period_days = 0", "target 1 name", "target 1 position"]
    for start in starts:
        assert sum(line.startswith(f"case.toml: {start}") for line in found) == 1, start
    assert len(found) == len(starts)


@pytest.mark.parametrize(
    ("table", "old", "new", "words"),
    [
        ("event", "[-120.0, 30.0]", "[-12.0, 97.0]", ("latitude 97", "swapped")),
        ("event", "[-120.0, 30.0]", "[-190.0, 30.0]", ("longitude -190", "−180 to 360")),
        ("event", "[-120.0, 30.0]", "[nan, 30.0]", ("nan", "finite")),
        ("event", "[-120.0, 30.0]", "[true, 30.0]", ("True", "number")),
        ("event", "[-120.0, 30.0]", "[1, 2, 3]", ("too many", "[longitude, latitude]")),
        ("event", "[-120.0, 30.0]", '"here"', ("'here'", "list")),
        ("event", "position = [-120.0, 30.0]", "", ("position or box", "neither")),
        ("event", "start", "box = [0, 0, 1, 1]\nstart", ("position or box", "both")),
        ("event", "position = [-120.0, 30.0]", "box = [0, 3, 1, 1]", ("south 3", "north 1")),
        ("event", "position = [-120.0, 30.0]", "box = [9, 0, 1, 1]", ("west and east swapped",)),
        ("event", "+02:00", "", ("time zone", "2031-03-05T00:00:00Z")),
        ("event", "T02:00:00+02:00", "", ("time of day", "2031-03-05T00:00:00Z")),
        ("event", "2031-03-05T02:00:00+02:00", '"someday"', ("'someday'", "not a date")),
        ("event", "2031-03-05T02:00:00+02:00", "20310305", ("20310305", "not a date")),
        ("event", "2031-03", "9999-12", ("year", "1800 and 2200")),
        ("event", "duration_days = 3", "duration_days = 0", ("= 0", "at least 0.01")),
        ("event", "duration_days = 3", "duration_days = 1e-300", ("at least 0.01",)),
        ("event", "duration_days = 3", "duration_days = -inf", ("-inf", "finite")),
        ("event", "duration_days = 3", 'duration_days = "3"', ("'3'", "number")),
        ("event", "duration_days = 3", "", ("event.duration_days", "missing")),
        ("event", "duration_days", "duration", ("duration = 3", "did you mean duration_days")),
        ("event", "start", "modes = [1]\nstart", ("event.modes", "belongs in [waves]")),
        ("event", "start", "targets_file = 'g.csv'\nstart", ("above the first [table]",)),
        ("waves", "[2, 1]", "[1, 1]", ("[1, 1]", "twice")),
        ("waves", "[2, 1]", "[]", ("must not be empty", "modes = [1, 2]")),
        ("waves", "[2, 1]", "[1.0]", ("1.0", "whole number")),
        ("waves", "[2, 1]", "[4]", ("waves.modes = 4", "at most 3")),
        ("waves", "[2, 1]", "[-1]", ("waves.modes = -1", "at least 0")),
        ("waves", "period_days = 20", "period_days = 0.3", ("0.3 days", "ω < |f|", "0.499")),
        ("waves", "period_days = 20", "period_days = -20", ("-20", "at least 0.01")),
        ("waves", "period_days = 20", "period_days = nan", ("nan", "period_days = 20")),
        ("[targets]", "name =", "nam =", ("did you mean name",)),
        ("[targets]", "-117.28, 32.68", "32.68, -117.28", ("target 1 position", "swapped")),
        ("[targets]", '"San Diego"', f'"{"x" * 121}"', ("at most 120 characters",)),
    ],
)  # fmt: skip
def test_one_problem_one_line(scenario, table, old, new, words):
    assert old in GOOD[table]
    name = table.strip("[]")
    lines = problems(scenario(**{name: GOOD[table].replace(old, new)}))
    telling = [line for line in lines if all(word in line for word in words)]
    assert len(telling) == 1, lines
    assert not [line for line in lines if "\n" in line]


@pytest.mark.parametrize(
    ("ocean", "words"),
    [
        ('bathymetry = "none.nc"', ("ocean.bathymetry = 'none.nc'", "no such file")),
        ("climatology = 3", ("ocean.climatology = 3", "name a NetCDF file")),
        ("phase_speed_m_s = -1", ("at least 0.01", "phase_speed_m_s = 2.5")),
        ("phase_speed_m_s = 250", ("250", "m/s")),
        ('temperature = "potential"', ("climatology", "none is given")),
        ('temperature = "warm"', ("'warm'", "potential")),
        ('bathymetry = "case.toml"\nphase_speed_m_s = 2', ("exclude each other",)),
        ('sorce = "embedded"', ("unknown key in [ocean]", "bathymetry")),
    ],
)
def test_problems_of_the_ocean(scenario, ocean, words):
    lines = problems(scenario(ocean=ocean, waves="modes = [1]\nperiod_days = 20"))
    assert any(all(word in line for word in words) for line in lines), lines


def test_a_uniform_speed_belongs_to_one_mode(scenario):
    assert "one mode" in problems(scenario(ocean="phase_speed_m_s = 2.5"))[0]
    waves = "modes = [1]\nperiod_days = 20"
    result = read_scenario(scenario(ocean="phase_speed_m_s = 2.5", waves=waves))
    assert result.ocean.source == "uniform"


def test_data_files_are_found_beside_the_scenario(scenario, tmp_path, monkeypatch):
    (tmp_path / "depths.nc").write_bytes(b"")
    monkeypatch.chdir("/")
    result = read_scenario(scenario(ocean='bathymetry = "depths.nc"'))
    assert result.ocean.bathymetry == tmp_path / "depths.nc"
    assert result.ocean.source == "own files"


def test_two_targets_of_one_name(scenario):
    text = GOOD["[targets]"]
    lines = problems(scenario(targets=f"{text}\n[[targets]]\n{text}"))
    assert "distinct" in lines[0]
    assert "'San Diego'" in lines[0]


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"title = ", "not a TOML file"),
        (b"\xff\xfe\x00", "not a TOML file"),
        (b"event.start = 2031-02-30T00:00:00Z", "not a TOML file"),
        (b"a = " + b"[" * 5000, "not a TOML file"),
        (b"event = 3", "[event] table"),
        (b"targets = 3", "[[targets]] table for each target"),
        (b"[targets]\nname = 'x'", "[[targets]] table for each target"),
        (b"", "title: it is missing"),
    ],
)
def test_files_that_are_no_scenario(tmp_path, content, words):
    path = tmp_path / "case.toml"
    path.write_bytes(content)
    assert any(words in line for line in problems(path))


def test_neither_file_nor_shipped_name(tmp_path):
    assert "did you mean peru_burst" in problems(Path("peru_brust"))[0]
    assert "no such file" in problems(tmp_path)[0]  # a folder


def test_a_path_comes_before_a_shipped_name(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    assert find_scenario("peru_burst").name == "peru_burst.toml"
    Path("peru_burst").write_text("", encoding="utf-8")
    assert find_scenario("peru_burst") == Path("peru_burst")
