"""Plans as datasets, text, JSON and CSV; the tables of a scenario that ask for them."""

from __future__ import annotations

import csv
import json
from pathlib import Path

import numpy as np
import pytest
import xarray as xr

import waveguide
from waveguide.constants import SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.planning import plan
from waveguide.propagation.priors import INPUTS, USUAL
from waveguide.report.plan_dataset import PLAN
from waveguide.report.plan_files import write_plan
from waveguide.report.plan_text import plan_document, plan_table
from waveguide.scenario import Scenario, Uncertainty, read_scenario
from waveguide.schema import REMARKS, VALIDITY

HOSTILE = [
    "=HYPERLINK('x')", "<script>alert(1)</script>", "\u202eevil\u202c", "two\nlines\tand\x1b[31m",
    "n" * 120,
]  # fmt: skip


def question(**changes: object) -> Scenario:
    places = [
        [-77.17, -12.06], [-72.12, -17.01], [-71.64, -33.02], [-70.42, -23.65], [-120.0, -40.0],
    ]  # fmt: skip
    document = {
        "title": "A plan",
        "event": {"position": [-81.3, -5.0], "start": "2031-03-05T00:00:00Z", "duration_days": 6,
                  "amplitude_m": 0.2},
        "waves": {"modes": [1, 2], "period_days": 20},
        "targets": [{"name": n, "position": p} for n, p in zip(HOSTILE, places, strict=True)],
        "uncertainty": {"members": 2048},
    } | changes  # fmt: skip
    return Scenario.model_validate(document)


@pytest.fixture(scope="module")
def answer() -> xr.Dataset:
    return plan(question())


def test_variables_are_those_declared(answer):
    assert {str(name) for name in answer.variables} == set(PLAN)
    for name, variable in PLAN.items():
        assert answer[name].dims == variable.dims
        assert answer[name].attrs.get("units") == variable.units
    assert list(answer["input"].values) == list(INPUTS)


def test_rows_are_consistent(answer):
    reached = answer["status"].values == "reached"
    # the last one lies in the open ocean
    assert list(reached[:, 0]) == [True, True, True, True, False]
    for name in ("front_days", "half_height_days", "peak_days", "duration_days", "peak_m"):
        values = answer[name].values
        assert np.all(np.diff(values[reached], axis=-1) > 0.0), name
        assert np.isnan(values[~reached]).all(), name
    start, stop = answer["look_from_days"].values, answer["look_until_days"].values
    assert np.all(start[reached] < answer["half_height_days"].values[reached][:, 1])
    assert np.all(stop[reached] > answer["peak_days"].values[reached][:, 1])
    first = answer["look_from_date"].values[reached]
    elapsed = (first - np.datetime64("2031-03-05")) / np.timedelta64(1, "s") / SECONDS_PER_DAY
    np.testing.assert_allclose(elapsed, start[reached], atol=1e-6)
    shares = answer["time_share"].values[reached]
    assert np.all(shares.sum(axis=-1) <= 1.02)
    assert np.all(shares.sum(axis=-1) > 0.9)


def test_without_an_amplitude_metres_and_chances_are_missing():
    scenario = question(
        event={"position": [-81.3, -5.0], "start": "2031-03-05T00:00:00Z", "duration_days": 6}
    )
    found = plan(scenario)
    assert np.isnan(found["peak_m"].values).all()
    assert np.isnan(found["chance_above_threshold"].values).all()
    assert np.isfinite(found["peak_ratio"].values[0]).all()


def test_table_is_safe_and_within_a_page(answer):
    text = plan_table(answer)
    assert "\x1b" not in text
    assert "\u202e" not in text
    assert "\n" + "lines" not in text
    assert "chance of 80 %" in text
    assert "Not reached" in text
    assert max(map(len, text.splitlines())) < 150
    assert "warning system" in text


def test_document_is_json_with_every_row(answer):
    document = json.loads(json.dumps(plan_document(answer), allow_nan=False))
    assert len(document["rows"]) == 10
    row = document["rows"][0]
    assert set(row["half_height_days"]) == {"p10", "p50", "p90"}
    assert set(row["time_share"]) == set(INPUTS)
    assert document["rows"][-1]["look_from_date"] is None
    assert document["members"] == 2048


def test_a_plan_says_how_its_answers_stand_to_the_theory(answer):
    arrivals = waveguide.arrivals(question())
    for name in (*VALIDITY, *REMARKS):
        np.testing.assert_array_equal(answer[name].values, arrivals[name].values)
    rows = plan_document(answer)["rows"]
    assert isinstance(rows[0]["coast_radius_radii"], float)
    told = [(c["kind"], c["unit"], c["number"]) for row in rows for c in row["cautions"]]
    names = ("kind", "unit", "number")
    listed = list(zip(*(answer[f"remark_{name}"].values.tolist() for name in names), strict=True))
    assert [one[:2] for one in told] == [one[:2] for one in listed]
    np.testing.assert_allclose([n for *_, n in told], [n for *_, n in listed], rtol=1e-8)
    assert told
    assert "Cautions, the most serious first" in plan_table(answer)


def test_csv_has_a_line_for_each_row_and_runs_no_formula(answer, tmp_path):
    write_plan(answer, tmp_path, ("csv", "netcdf"))
    with (tmp_path / "plan.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.reader(file))
    assert len(rows) == 11
    assert "half_height_days_p90" in rows[0]
    assert "time_share_mean_flow" in rows[0]
    assert rows[1][0].startswith("'=")
    assert len({len(row) for row in rows}) == 1


def test_netcdf_comes_back(answer, tmp_path):
    write_plan(answer, tmp_path, ("netcdf",))
    assert [path.name for path in tmp_path.iterdir()] == ["plan.nc"]
    with xr.open_dataset(tmp_path / "plan.nc") as stored:
        np.testing.assert_allclose(stored["peak_days"].values, answer["peak_days"].values)
        difference = stored["look_from_date"].values - answer["look_from_date"].values
        assert np.nanmax(np.abs(difference[:4].astype("timedelta64[us]").astype(float))) < 1e6


def test_a_seed_reproduces_a_plan_and_another_one_does_not():
    plans = [
        plan(s)
        for s in (question(), question(), question(uncertainty={"members": 2048, "seed": 9}))
    ]
    one, again, other = (p["half_height_days"].values[:4] for p in plans)
    np.testing.assert_array_equal(one, again)
    assert np.abs(one - other).max() > 0.0


def test_defaults_are_the_usual_errors():
    assert Uncertainty().priors == USUAL


# Bad input: all problems at once, each with key, value, rule and way out


BAD = """
title = "bad"
[event]
position = [-81.3, -5.0]
start = 2031-03-05T00:00:00Z
duration_days = 5
[waves]
modes = [1]
period_days = 20
[[targets]]
name = "T"
position = [-77.15, -12.05]
"""


def problems(folder: Path, more: str) -> list[str]:
    path = folder / "bad.toml"
    path.write_text(BAD + more)
    with pytest.raises(InputError) as caught:
        read_scenario(path)
    return caught.value.problems


@pytest.mark.parametrize(
    ("line", "words"),
    [
        ("members = 0", "uncertainty.members = 0: it must be at least 1"),
        ("members = 2.5", "it must be a whole number"),
        ("members = 100000000", "it must be at most 1e+06"),
        ("seed = 1.5", "uncertainty.seed = 1.5: it must be a whole number"),
        ('seed = "one"', "uncertainty.seed = 'one': it must be"),
        ("seed = true", "uncertainty.seed = True: it must be"),
        ("seed = -1", "uncertainty.seed = -1: it must be at least 0"),
        ("stratification_percent = -6", "it must be at least 0; write a standard deviation"),
        ("stratification_percent = 600", "it must be at most 100"),
        ("depth_percent = nan", "it must be a finite number"),
        ("mean_flow_m_s = inf", "it must be a finite number; write a current in m/s"),
        ("mean_flow_m_s = 20", "it must be at most 2"),
        ("coast_length_scale_km = 0", "it must be at least 1; write a correlation length"),
        ("start_days = -1", "it must be at least 0; write days"),
        ('friction_percent = "much"', "it must be a number"),
        ("friction = 50", "unknown key in [uncertainty]; did you mean friction_percent?"),
    ],
)
def test_impossible_priors_are_refused(tmp_path, line, words):
    (problem,) = problems(tmp_path, f"[uncertainty]\n{line}\n")
    assert words in problem


def test_impossible_plans_are_refused_all_at_once(tmp_path):
    found = problems(tmp_path, "[plan]\nchance_percent = 100\nthreshold_m = 0\n")
    assert len(found) == 2
    assert "plan.chance_percent = 100: it must be at most 99" in found[0]
    assert "plan.threshold_m = 0: it must be greater than 0" in found[1]


def test_modes_that_overtake_each_other_are_found_by_their_rank():
    from waveguide.network.trapped_store import packaged_guide
    from waveguide.planning import _mode_of_section, _view
    from waveguide.propagation.moorings import section_rank

    network, atlas = packaged_guide("baroclinic")
    rank = section_rank(network, atlas, 3)
    assert (rank > 3).any()
    for node in np.flatnonzero(rank > 3)[:: max(1, np.sum(rank > 3) // 4)]:
        section, found = _mode_of_section(3, int(node))
        assert section is not None
        assert found == rank[node]
        assert np.isfinite(_view(3, int(node)).per_metre).all()
