"""How long ensembles and pages take. Run with `pytest tests/benchmark`; no time is asserted."""

from __future__ import annotations

import os
import subprocess
import sys
import time

import numpy as np
import pytest

from waveguide.pipeline import study
from waveguide.planning import _row
from waveguide.propagation.priors import INPUTS
from waveguide.propagation.sampling import normal_sample
from waveguide.scenario import Scenario

COMMAND = "from waveguide.cli import main; main()"
PLACES = {
    "Galápagos": (-90.31, -0.76), "La Libertad": (-80.93, -2.20), "Callao": (-77.17, -12.06),
    "Matarani": (-72.12, -17.01), "Antofagasta": (-70.42, -23.65), "Valparaíso": (-71.64, -33.02),
    "Balboa": (-79.57, 8.96), "Acapulco": (-99.92, 16.82), "Manzanillo": (-104.3, 19.05),
    "San Diego": (-117.28, 32.68),
}  # fmt: skip

HEAD = """
title = "Ten targets, four modes"
[event]
box = [155.0, -2.0, 175.0, 2.0]
start = 2031-03-05T00:00:00Z
duration_days = 15
amplitude_m = 0.1
[waves]
modes = [0, 1, 2, 3]
period_days = 40
[output]
formats = ["csv"]
"""


@pytest.fixture(scope="module")
def ten_targets_four_modes() -> Scenario:
    return Scenario.model_validate({
        "title": "Ten targets, four modes",
        "event": {"box": [155.0, -2.0, 175.0, 2.0], "start": "2031-03-05T00:00:00Z",
                  "duration_days": 15, "amplitude_m": 0.1},
        "waves": {"modes": [0, 1, 2, 3], "period_days": 40},
        "targets": [{"name": name, "position": place} for name, place in PLACES.items()],
        "uncertainty": {"members": 10_000},
    })  # fmt: skip


def test_ten_thousand_members_ten_targets_four_modes(benchmark, ten_targets_four_modes):
    """The ensemble alone; what it is about has been computed."""
    scenario = ten_targets_four_modes
    done = study(scenario)

    def run() -> int:
        sample = normal_sample(10_000, len(INPUTS), 1)
        count = 0
        for mode, answer in done.answers.items():
            for target, arrival in enumerate(answer.arrivals):
                if arrival.routes:
                    _row(scenario, done, mode, target, scenario.uncertainty.priors, sample)
                    count += 1
        return count

    count = benchmark.pedantic(run, rounds=3, warmup_rounds=1)
    benchmark.extra_info["rows"] = count
    assert count > 30


def test_members_against_exact_recomputation(benchmark, ten_targets_four_modes):
    """CPU time of one member of one row, against that of computing the answer anew."""
    scenario = ten_targets_four_modes
    start = time.process_time()
    done = study(scenario)
    exact = time.process_time() - start
    sample = normal_sample(10_000, len(INPUTS), 1)
    rows = [
        (mode, target) for mode, answer in done.answers.items()
        for target, arrival in enumerate(answer.arrivals) if arrival.routes
    ]  # fmt: skip

    def run() -> None:
        for mode, target in rows:
            _row(scenario, done, mode, target, scenario.uncertainty.priors, sample)

    start = time.process_time()
    benchmark.pedantic(run, rounds=1)
    each = (time.process_time() - start) / len(sample)
    benchmark.extra_info["exact_seconds_per_member"] = round(exact, 2)
    benchmark.extra_info["ratio"] = round(exact / each)


def test_page_of_ten_targets_and_four_modes_cold_from_the_shell(benchmark, tmp_path):
    """Interpreter, routes, waveforms, ensemble and page; size of the page beside it."""
    scenario = tmp_path / "ten.toml"
    targets = "".join(
        f'[[targets]]\nname = "{name}"\nposition = {list(place)}\n'
        for name, place in PLACES.items()
    )
    scenario.write_text(HEAD + targets, encoding="utf-8")

    def run() -> None:
        subprocess.run(
            [sys.executable, "-c", COMMAND, "arrivals", str(scenario), "--page", "--out",
             str(tmp_path / "out")],
            check=True, capture_output=True, env=os.environ,
        )  # fmt: skip

    benchmark.pedantic(run, rounds=3, warmup_rounds=1)
    page = tmp_path / "out" / "page.html"
    benchmark.extra_info["page_kB"] = round(page.stat().st_size / 1e3)


def test_sobol_percentiles_against_random_ones(benchmark):
    """Members that random numbers would need for the same error of P10."""
    weights = np.linspace(0.2, 1.0, len(INPUTS))

    def sobol_error() -> float:
        found = [
            np.quantile(normal_sample(8192, len(INPUTS), seed) @ weights, 0.1) for seed in range(24)
        ]
        return float(np.std(found))

    error = benchmark.pedantic(sobol_error, rounds=1)
    generator = np.random.default_rng(0)
    random = np.std([
        np.quantile(generator.normal(size=(8192, len(INPUTS))) @ weights, 0.1) for _ in range(24)
    ])
    benchmark.extra_info["members_saved_factor"] = round(float((random / error) ** 2), 1)
