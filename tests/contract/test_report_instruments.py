"""What moorings see at depth, in the scenario file, the table, JSON and CSV."""

from __future__ import annotations

import csv

import numpy as np
import pytest

from waveguide.errors import InputError
from waveguide.propagation.at_depth import AtDepth
from waveguide.propagation.moorings import MooringAnswer
from waveguide.report.csv_files import write_csv
from waveguide.report.document import document
from waveguide.report.instruments import instrument_columns, instruments_text
from waveguide.report.table import table
from waveguide.report.text import columns
from waveguide.scenario import read_scenario

SCENARIO = """
title = "A mooring"
[event]
position = [-81.0, 0.0]
start = 2031-03-05T00:00:00Z
duration_days = 10
[waves]
modes = [1]
period_days = 40
[[targets]]
name = "slope"
position = [-77.4, -12.3]
"""


def read(tmp_path, lines):
    path = tmp_path / "mooring.toml"
    path.write_text(SCENARIO + lines, encoding="utf-8")
    return read_scenario(path).targets[0]


def test_a_mooring_in_the_scenario_file(tmp_path):
    assert read(tmp_path, "").depth_m == ()
    assert read(tmp_path, "depth_m = 150").depth_m == (150.0,)
    mooring = read(tmp_path, "depth_m = [50, 150.5]\noffshore_km = 40")
    assert mooring.depth_m == (50.0, 150.5)
    assert mooring.offshore_km == 40.0


@pytest.mark.parametrize(
    ("lines", "words"),
    [
        ("depth_m = -5", ("target 1 depth_m", "at least 0", "positive down")),
        ("depth_m = [50, 20000]", ("target 1 depth_m", "at most 11000")),
        ("depth_m = true", ("target 1 depth_m", "a list")),
        ('depth_m = "deep"', ("target 1 depth_m", "a list")),
        ("offshore_km = 40", ("target 1", "give its depth_m too")),
        ("depth_m = 5\noffshore_km = -1", ("target 1 offshore_km", "kilometres from the shore")),
    ],
)
def test_a_mooring_that_cannot_be_is_refused_with_a_way_out(tmp_path, lines, words):
    with pytest.raises(InputError) as refused:
        read(tmp_path, lines)
    for word in words:
        assert word in str(refused.value)


def test_numbers_per_centimetre():
    """1 m/m is 0.01 m/cm; 1 (m/s)/m is 1 (cm/s)/cm; a phase beyond 90 degrees turns the sign."""
    view = AtDepth(
        displacement=[-150.0 + 0.0j, complex("nan")], current=[3.0j, complex("nan")],
        bottom_pressure=-0.2 + 0.0j, bottom=800.0, best_depth=120.0,
    )  # fmt: skip
    answers = {(1, 0): MooringAnswer("section", 40e3, 138.0, view)}
    rows = instrument_columns(answers, [(), (100.0, 900.0)], np.array([[1.0], [0.4]]))
    assert rows["instrument_guide_ratio"] == [0.4, 0.4]
    assert rows["instrument_target"] == [1, 1]
    assert rows["instrument_displacement_m_per_cm"][0] == pytest.approx(-1.5)
    assert rows["instrument_displacement_lag_degrees"][0] == pytest.approx(0.0)
    assert rows["instrument_current_cm_s_per_cm"][0] == pytest.approx(3.0)
    assert rows["instrument_current_lag_degrees"][0] == pytest.approx(90.0)
    assert rows["instrument_bottom_pressure_cm_per_cm"] == pytest.approx([-0.2, -0.2])
    assert rows["instrument_structure"] == ["section", "section, below the bottom"]
    missing = MooringAnswer("no route", 0.0, 0.0, None)
    none = instrument_columns({(0, 0): missing}, [(5.0,)], np.array([[np.nan]]))
    assert none["instrument_structure"] == ["no route"]


def test_the_table_tells_moorings_only_where_there_are_any(arrivals):
    text = table(arrivals)
    lines = instruments_text(arrivals).splitlines()
    assert instruments_text(arrivals) in text
    assert max(map(columns, lines)) <= 120
    first = next(line for line in lines if line.startswith("Callao"))
    for cell in ("60", "100", "-1.18 (+9°)", "+3.03 (-41°)", "138", "+0.65 (+9°)", "0.60",
                 "flat bottom"):  # fmt: skip
        assert cell in first
    assert sum("below the bottom" in line for line in lines) == 2
    gauges = arrivals.isel(instrument=[])
    assert instruments_text(gauges) == ""
    assert "At depth" not in table(gauges)


def test_the_peak_on_the_guide_is_in_centimetres_where_the_amplitude_is_known(arrivals):
    known = arrivals.assign_attrs(event_amplitude_m=-0.15)
    text = instruments_text(known)
    assert "in cm in the column Guide" in " ".join(text.split())
    cells = next(line for line in text.splitlines() if line.startswith("Callao")).split()
    assert cells[2] == "-9.0"  # 0.6 of 15 cm
    assert "over that at the source" in " ".join(instruments_text(arrivals).split())


def test_a_mooring_off_the_guide_is_told_the_sea_level_on_it(tmp_path):
    """What instruments see is per sea level on the guide, not at the mooring's distance from it."""
    import waveguide

    path = tmp_path / "mooring.toml"
    away = SCENARIO.replace("[-77.4, -12.3]", "[-77.9, -12.6]")
    path.write_text(away + "depth_m = 150", encoding="utf-8")
    found = waveguide.arrivals(read_scenario(path))
    factor = found["target_factor"].values[0, 0]
    assert factor < 0.95
    assert found["instrument_guide_ratio"].values[0] * factor == pytest.approx(
        found["peak_ratio"].values[0, 0], rel=1e-12
    )


def test_json_and_csv_hold_the_same_instruments(arrivals, tmp_path):
    first, second, *others = document(arrivals)["arrivals"]
    assert [one["depth_m"] for one in first["at_depth"]] == [100.0, 900.0]
    assert first["at_depth"][0]["displacement_m_per_cm"] == -1.18
    assert second["at_depth"][1]["displacement_m_per_cm"] is None
    assert all(row["at_depth"] == [] for row in others)
    write_csv(arrivals, tmp_path)
    with (tmp_path / "moorings.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert [(row["target"], row["mode"]) for row in rows] == [("Callao", "1")] * 2 + [
        ("Callao", "2")
    ] * 2
    assert float(rows[2]["current_cm_s_per_cm"]) == -2.25
    assert rows[1]["displacement_m_per_cm"] == ""
