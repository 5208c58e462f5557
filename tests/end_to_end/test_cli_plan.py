"""`waveguide plan` and `waveguide arrivals --page` from the shell."""

from __future__ import annotations

import json
import os
import subprocess
import sys

import pytest

SCENARIO = """
title = "Down the coast of Peru"
[event]
position = [-81.3, -5.0]
start = 2031-03-05T00:00:00Z
duration_days = 6
amplitude_m = 0.2
[waves]
modes = [1, 2]
period_days = 20
[[targets]]
name = "Callao"
position = [-77.15, -12.05]
[[targets]]
name = "Antofagasta"
position = [-70.42, -23.65]
[uncertainty]
members = 1024
"""


def shell(*arguments: object) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-c", "from waveguide.cli import main; main()", *map(str, arguments)],
        capture_output=True, text=True, env=os.environ, check=False,
    )  # fmt: skip


@pytest.fixture
def scenario(tmp_path):
    path = tmp_path / "peru.toml"
    path.write_text(SCENARIO)
    return path


def test_plan_prints_windows_instruments_and_what_they_hang_on(scenario, tmp_path):
    done = shell("plan", scenario, "--out", tmp_path / "out")
    assert done.returncode == 0, done.stderr
    for words in ("When to look", "Callao", "Antofagasta", "What to measure", "Gap, days",
                  "What the spread comes from", "mean flow", "warning system"):  # fmt: skip
        assert words in done.stdout
    assert sorted(p.name for p in (tmp_path / "out").iterdir()) == ["plan.csv", "plan.nc"]
    assert "outputs are in" in done.stderr


def test_plan_as_json_is_reproducible(scenario):
    first, second = (shell("plan", scenario, "--json") for _ in range(2))
    assert first.returncode == 0, first.stderr
    assert first.stdout == second.stdout
    document = json.loads(first.stdout)
    rows = {(row["target"], row["mode"]): row for row in document["rows"]}
    near, far = rows["Callao", 1], rows["Antofagasta", 1]
    width = [row["half_height_days"]["p90"] - row["half_height_days"]["p10"] for row in (near, far)]
    assert 0.5 < width[0] < width[1]  # farther away the window is wider
    assert near["look_from_days"] < near["half_height_days"]["p50"] < near["look_until_days"]


def test_a_higher_chance_asks_for_a_longer_look(scenario):
    lengths = []
    for chance in (50, 80, 95):
        scenario.write_text(SCENARIO + f"[plan]\nchance_percent = {chance}\n")
        row = json.loads(shell("plan", scenario, "--json").stdout)["rows"][0]
        lengths.append(row["look_until_days"] - row["look_from_days"])
    assert lengths == sorted(lengths)
    assert lengths[2] > 1.5 * lengths[0]


def test_an_ocean_known_better_gives_narrower_windows(scenario):
    def width(more: str) -> float:
        scenario.write_text(SCENARIO + more)
        row = json.loads(shell("plan", scenario, "--json").stdout)["rows"][0]
        return row["half_height_days"]["p90"] - row["half_height_days"]["p10"]

    usual = width("")
    assert width("mean_flow_m_s = 0\ndepth_percent = 0\n") < 0.95 * usual
    assert width("mean_flow_m_s = 0.4\n") > 1.05 * usual


def test_bad_uncertainty_is_refused_before_anything_is_written(scenario, tmp_path):
    scenario.write_text(SCENARIO.replace("members = 1024", "members = 0\nseed = 0.5"))
    done = shell("plan", scenario, "--out", tmp_path / "out")
    assert done.returncode == 2
    assert "uncertainty.members = 0: it must be at least 1" in done.stderr
    assert "uncertainty.seed = 0.5: it must be a whole number" in done.stderr
    assert "Traceback" not in done.stderr
    assert not (tmp_path / "out").exists()


def test_page_is_written_beside_the_other_outputs(scenario, tmp_path):
    scenario.write_text(SCENARIO + '[output]\nformats = ["csv"]\n')
    done = shell("arrivals", scenario, "--page", "--out", tmp_path / "out")
    assert done.returncode == 0, done.stderr
    page = tmp_path / "out" / "page.html"
    assert page.stat().st_size < 5_000_000
    assert page.read_text(encoding="utf-8").startswith("<!doctype html>")
    assert (tmp_path / "out" / "arrivals.csv").exists()
    # with a page or without one, the printed answer is the same
    assert done.stdout == shell("arrivals", scenario).stdout


def test_a_page_without_a_folder_is_refused(scenario):
    done = shell("arrivals", scenario, "--page")
    assert done.returncode == 2
    assert "--page: there is no folder" in done.stderr
    assert "--out" in done.stderr
