"""Speed of the mode kernels, beside scikit-fem in the same run.

Run with: python -m pytest tests/benchmark/test_bench_modes.py -o addopts="" --benchmark-only
The comparison prints, for each section, errors and times; scikit-fem gets the quickest of a
ladder of meshes.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from waveguide.modes.modeset import ModeSet
from waveguide.modes.trapped import trapped_modes
from waveguide.modes.vertical import phase_speeds

sys.path.insert(0, str(Path(__file__).parents[1] / "oracle"))
from finite_elements import CASES, Case, section_speeds

LADDER = [
    *[(nx, nz, False) for nx, nz in ((40, 12), (60, 18), (90, 27), (200, 60))],
    *[(nx, nz, True) for nx, nz in ((20, 8), (30, 12), (45, 18), (70, 28), (120, 40))],
]


def solve(case: Case, tolerance: float = 0.005) -> ModeSet:
    return trapped_modes(
        case.offshore, case.depth, case.n2, case.n2_depth, case.f, tolerance=tolerance
    )


def best_time(run: Callable[[], Any], rounds: int) -> float:
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        run()
        times.append(time.perf_counter() - start)
    return min(times)


def test_bench_sections(benchmark: Any) -> None:
    """Five sections, modes 0 to 3 at 0.5 %; sections per second = 5/mean."""
    benchmark(lambda: [solve(case) for case in CASES.values()])


def test_bench_12000_columns(benchmark: Any) -> None:
    """Flat-bottom modes 1 to 3 of 12 000 columns of 19 depths."""
    depth = np.array(
        [5, 15, 25, 40, 62.5, 87.5, 112.5, 137.5, 175, 225, 275, 350, 450, 550, 700, 900, 1250,
         2250, 4500.0]
    )  # fmt: skip
    random = np.random.default_rng(1)
    n2 = 3e-5 * np.exp(-2.0 * depth / 1300.0) * random.uniform(0.5, 1.5, (12000, depth.size))
    bottom = random.uniform(20.0, 6000.0, 12000)
    benchmark.pedantic(phase_speeds, (n2, depth, bottom, 3), rounds=2)


def reference_runs(case: Case, exact: np.ndarray) -> list[tuple[float, float]]:
    """Error and time (s) of scikit-fem on every mesh of the ladder."""
    runs = []
    for nx, nz, quadratic in LADDER:

        def run(nx: int = nx, nz: int = nz, quadratic: bool = quadratic) -> np.ndarray:
            return section_speeds(case, 3, nx=nx, nz=nz, quadratic=quadratic)

        runs.append((float(np.max(np.abs(run() / exact - 1.0))), best_time(run, 2)))
    return runs


@pytest.mark.parametrize("name", CASES)
def test_bench_against_scikit_fem(name: str, benchmark: Any) -> None:
    """The quickest mesh as accurate as the package's default run (or 0.1 %), and within 0.5 %."""
    case = CASES[name]
    exact = solve(case, 2e-4).phase_speed
    ours = float(np.max(np.abs(solve(case).phase_speed / exact - 1.0)))
    benchmark.pedantic(solve, (case,), rounds=10, warmup_rounds=1)
    seconds = best_time(lambda: solve(case), 10)
    runs = reference_runs(case, exact)
    equal = min(time for error, time in runs if error <= max(ours, 0.001))
    loose = min(time for error, time in runs if error <= 0.005)
    print(
        f"\n{name}: {1e3 * seconds:.1f} ms with an error of {100 * ours:.2f} %; scikit-fem as "
        f"accurate {1e3 * equal:.0f} ms ({equal / seconds:.0f} times), within 0.5 % "
        f"{1e3 * loose:.0f} ms ({loose / seconds:.0f} times)"
    )
