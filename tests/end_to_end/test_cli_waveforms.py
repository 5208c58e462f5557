"""From the shell to waveforms, budgets, diagrams and moorings, on the real ocean."""

from __future__ import annotations

import csv
import json
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
import xarray as xr

COMMAND = "from waveguide.cli import main; main()"
SLOW_EVENT = """
title = "A rise of two years off Ecuador"
[event]
position = [-85.0, 0.0]
start = 2031-03-05T00:00:00Z
duration_days = 720
amplitude_m = 0.10
[waves]
modes = [1, 2]
period_days = 720
[[targets]]
name = "Callao"
position = [-77.17, -12.06]
[[targets]]
name = "Matarani"
position = [-72.12, -17.01]
[[targets]]
name = "slope"
position = [-77.9, -12.4]
depth_m = [100, 300, 9000]
[[targets]]
name = "equator"
position = [-83.0, 0.0]
depth_m = 100
"""


@pytest.fixture(scope="module")
def answer(tmp_path_factory):
    """Standard output and the folder of one run with every format."""
    folder = tmp_path_factory.mktemp("waveforms")
    (folder / "slow.toml").write_text(SLOW_EVENT, encoding="utf-8")
    done = subprocess.run(
        [sys.executable, "-c", COMMAND, "arrivals", "slow.toml", "--budget", "--out", "out"],
        cwd=folder, capture_output=True, text=True, encoding="utf-8",
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    return done.stdout, folder / "out"


def rows_of(path: Path) -> list[dict[str, str]]:
    with path.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def test_slow_events_are_quasi_simultaneous(answer):
    text, _ = answer
    joined = " ".join(text.split())
    assert "quasi-simultaneous, critical period" in joined
    callao = next(line for line in text.splitlines() if line.startswith("Callao"))
    assert "at once" in callao  # in place of a speed: 720 days is far below the critical frequency
    equator = next(line for line in text.splitlines() if line.startswith("equator"))
    assert "at once" not in equator


def test_the_same_at_all_gauges_of_a_slow_event(answer):
    """Below the critical frequency sea level rises along the coast almost at once.

    A wave of 2.6 m/s needs 3.5 days from Callao to Matarani; the peaks are a seventh of that apart
    and less. (A burst of four months, whose spectrum reaches up to the critical frequencies of
    this coast, still peaks some two days later there.)
    """
    with xr.open_dataset(answer[1] / "arrivals.nc") as stored:
        peaks = stored["peak_time_days"].values[:2, 0]
        fronts = stored["front_time_days"].values[:2, 0]
    assert fronts[1] - fronts[0] > 3.0
    assert abs(peaks[1] - peaks[0]) < 0.5


def test_waveforms_add_up_and_peak_where_the_table_says(answer):
    _, out = answer
    rows = rows_of(out / "waveforms.csv")
    days = np.array([float(row["time_days"]) for row in rows])
    level = np.array([float(row["Callao mode 1 (m)"]) for row in rows])
    first = next(row for row in rows_of(out / "arrivals.csv") if row["target"] == "Callao")
    at_peak = np.interp(float(first["peak_time_days"]), days, level)
    assert at_peak == pytest.approx(level.max(), abs=2e-6)  # six decimals are written
    assert level.max() == pytest.approx(float(first["amplitude_m"]), rel=1e-3)
    name = next(name for name in rows[0] if name.startswith("Callao sum"))
    shares = [float(part.split(" x ")[0]) for part in name.split("= ")[1].split(" + ")]
    assert sum(shares) == pytest.approx(1.0, abs=0.001)
    second = np.array([float(row["Callao mode 2 (m)"]) for row in rows])
    total = np.array([float(row[name]) for row in rows])
    scale = 1e-3 * np.abs(total).max()  # shares are printed with three decimals
    assert np.abs(shares[0] * level + shares[1] * second - total).max() < scale


def test_budgets_sum_to_one(answer):
    text, out = answer
    wholes = [row for row in rows_of(out / "budget.csv") if row["leg"] == "all"]
    assert len(wholes) >= 8
    for row in wholes:
        parts = ("arrives", "rossby_waves", "bottom_friction", "damping", "scattered", "other_ways")
        assert sum(float(row[part]) for part in parts) == pytest.approx(1.0, abs=1e-8)
    assert "Energy on every leg" in text


def test_moorings_in_table_and_file(answer):
    text, out = answer
    assert "At depth, per centimetre" in text
    rows = rows_of(out / "moorings.csv")
    assert [row["depth_m"] for row in rows[:3]] == ["100.0", "300.0", "9000.0"]
    assert rows[2]["structure"].endswith("below the bottom")
    assert rows[2]["displacement_m_per_cm"] == ""
    equator = [row for row in rows if row["target"] == "equator"]
    assert {row["structure"] for row in equator} == {"equator"}
    # DERIVED: ζ = −g h₁/c² of two layers is −1.5 to −2.5 m/cm for mode 1 over a thermocline at
    # 100 m; the thermocline off Ecuador is shallower, so that half of it and less is below 100 m
    assert -3.0 < float(equator[0]["displacement_m_per_cm"]) < -0.8
    assert 2.0 < float(equator[0]["current_cm_s_per_cm"]) < 5.0  # g/c at the surface is 3.8
    assert float(equator[0]["towards_degrees"]) == pytest.approx(90.0, abs=2.0)
    # far below the critical frequency the current off the coast leads sea level by almost 90°
    slope = next(row for row in rows if row["target"] == "slope")
    assert slope["structure"] == "flat bottom"
    assert abs(float(slope["current_lag_degrees"])) > 45.0


def test_figures_are_written(answer):
    _, out = answer
    for name in ("waveforms", "distance_time"):
        assert (out / f"{name}.png").read_bytes().startswith(b"\x89PNG")
        assert (out / f"{name}.pdf").read_bytes().startswith(b"%PDF")


def test_only_what_is_asked_for(tmp_path):
    (tmp_path / "slow.toml").write_text(
        SLOW_EVENT + '\n[output]\nformats = ["budget"]\n', encoding="utf-8"
    )
    done = subprocess.run(
        [sys.executable, "-c", COMMAND, "arrivals", "slow.toml", "--json", "--out", "out"],
        cwd=tmp_path, capture_output=True, text=True, encoding="utf-8", check=True,
    )  # fmt: skip
    assert [path.name for path in (tmp_path / "out").iterdir()] == ["budget.csv"]
    rows = json.loads(done.stdout)["arrivals"]
    for key in ("half_height_time_days", "peak_time_days", "centroid_time_days", "front_time_days"):
        assert isinstance(rows[0][key], float)
    assert [one["depth_m"] for one in rows[4]["at_depth"]] == [100.0, 300.0, 9000.0]


def test_a_format_that_does_not_exist_is_refused(tmp_path):
    (tmp_path / "slow.toml").write_text(
        SLOW_EVENT + '\n[output]\nformats = ["distance_time"]\n', encoding="utf-8"
    )
    done = subprocess.run(
        [sys.executable, "-c", COMMAND, "arrivals", "slow.toml", "--out", "out"],
        cwd=tmp_path, capture_output=True, text=True, encoding="utf-8",
    )  # fmt: skip
    assert done.returncode == 2
    assert "distance-time" in done.stderr
    assert not (tmp_path / "out").exists()


def test_a_uniform_speed_has_no_structure_at_depth(tmp_path):
    import waveguide

    text = SLOW_EVENT.replace("modes = [1, 2]", "modes = [1]")
    (tmp_path / "slow.toml").write_text(
        text + "\n[ocean]\nphase_speed_m_s = 2.5\n", encoding="utf-8"
    )
    found = waveguide.arrivals(waveguide.read_scenario(tmp_path / "slow.toml"))
    assert set(found["instrument_structure"].values) == {"a uniform speed has none"}
    assert not np.isfinite(found["instrument_current_cm_s_per_cm"].values).any()
