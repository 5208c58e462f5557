"""Speed of waveforms: the full job from the shell, and beside the oracle in one run.

Run with: python -m pytest tests/benchmark/test_bench_waveforms.py -o addopts="" -s
Goals: the full job under 5 s; a thousand times less CPU time than the integration of the same
route at three cells per deformation radius. Nothing here asserts a time.
"""

from __future__ import annotations

import importlib.util
import json
import resource
import subprocess
import sys
import time
from functools import partial
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

from waveguide.constants import SECONDS_PER_DAY
from waveguide.network.packaged import packaged_network
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.propagation.answers import mode_answer
from waveguide.propagation.arrivals import mode_arrivals
from waveguide.propagation.modes import uniform_mode
from waveguide.propagation.sources import gaussian_burst
from waveguide.propagation.step_response import Conditions
from waveguide.propagation.waveform import mode_waveforms

HERE = Path(__file__).parent
sys.path.insert(0, str(HERE.parent / "oracle"))
COMMAND = "from waveguide.cli import main; main()"
TARGETS = {
    "Santa Cruz": (-90.31, -0.76), "La Libertad": (-80.93, -2.20), "Callao": (-77.17, -12.06),
    "Matarani": (-72.12, -17.01), "Antofagasta": (-70.42, -23.65), "Valparaíso": (-71.64, -33.02),
    "Acapulco": (-99.92, 16.82), "San Diego": (-117.28, 32.68), "Crescent City": (-124.21, 41.73),
    "Sitka": (-135.40, 57.03),
}  # fmt: skip
# 8 days make the time step 8 d/32 = 6 h
SCENARIO = """
title = "Ten targets, four modes, one year at 6 h"
[event]
position = [165.0, 0.0]
start = 2031-03-05T00:00:00Z
duration_days = 8
[waves]
modes = [0, 1, 2, 3]
period_days = 60
window_days = 365
"""


def child_seconds() -> float:
    """CPU time of the processes that have ended so far (s)."""
    usage = resource.getrusage(resource.RUSAGE_CHILDREN)
    return usage.ru_utime + usage.ru_stime


def test_full_job_cold_from_the_shell(benchmark: Any, tmp_path: Path) -> None:
    """Ten targets, four modes, one year at 6 h: interpreter, imports and all, to printed JSON."""
    named = "".join(
        f'[[targets]]\nname = "{name}"\nposition = [{lon}, {lat}]\n'
        for name, (lon, lat) in TARGETS.items()
    )
    (tmp_path / "year.toml").write_text(SCENARIO + named, encoding="utf-8")

    def run() -> str:
        return subprocess.run(
            [sys.executable, "-c", COMMAND, "arrivals", "year.toml", "--json"],
            cwd=tmp_path, check=True, capture_output=True, text=True,
        ).stdout  # fmt: skip

    rows = json.loads(run())["arrivals"]  # once to warm the disk's cache
    assert len(rows) == 40
    assert sum(isinstance(row["peak_time_days"], float) for row in rows) >= 25
    before = child_seconds()
    benchmark.pedantic(run, rounds=3)
    benchmark.extra_info["cpu_seconds"] = round((child_seconds() - before) / 3.0, 2)
    print(f"\nfull job: {benchmark.stats.stats.min:.2f} s, CPU {benchmark.extra_info}")


def cpu_time(run: Any, rounds: int = 5) -> float:
    """Least CPU time of several runs (s)."""
    times = []
    for _ in range(rounds):
        start = time.process_time()
        run()
        times.append(time.process_time() - start)
    return min(times)


def tell(benchmark: Any, name: str, oracle: float, parts: dict[str, float]) -> None:
    """Print how many times less CPU time each part takes."""
    told = ", ".join(
        f"{part} {1e3 * seconds:.0f} ms ({oracle / seconds:.0f} times less)"
        for part, seconds in parts.items()
    )
    print(f"\n{name}: integration {oracle:.1f} s of CPU; {told}")
    benchmark.extra_info |= {part: round(oracle / seconds) for part, seconds in parts.items()}


@pytest.mark.slow
def test_basin_beside_the_integration(benchmark: Any) -> None:
    """Straight coasts to 30°, three cells in the least deformation radius, eight gauges."""
    from basin import integrate_basin

    spec = importlib.util.spec_from_file_location("guides", HERE.parent / "analytic/conftest.py")
    assert spec is not None
    assert spec.loader is not None
    guides = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(guides)
    setup = json.loads((HERE.parent / "oracle/route_results.json").read_text())["setup"]
    _, gauges = integrate_basin(**setup)
    network = guides.chain([
        (guides.COAST, [(0.0, 26.0), (0.0, 0.0)]), (guides.EQUATOR, [(0.0, 0.0), (60.0, 0.0)]),
        (guides.COAST, [(60.0, 0.0), (60.0, 30.0)]),
    ])
    mode = guides.uniform(network, setup["speed"])
    ends = [np.argmin(np.hypot(network.lon - x, network.lat - abs(y)))
            for x, y in zip(gauges.lon, gauges.lat, strict=True)]
    arrivals = [guides.arrival(network, mode, [np.arange(end)]) for end in ends]
    source = gaussian_burst(6.0 * setup["burst_days"] * SECONDS_PER_DAY)

    def waveforms() -> None:
        mode_waveforms(network, mode, arrivals, source, setup["days"] * SECONDS_PER_DAY)

    parts = {"waveforms at eight gauges": cpu_time(waveforms)}
    benchmark.pedantic(waveforms, rounds=3)
    tell(benchmark, "basin", gauges.cpu_seconds, parts)


@pytest.mark.slow
def test_atlantic_beside_the_integration(benchmark: Any) -> None:
    """The real coasts of the tropical Atlantic at 0.1°, from Brazil to Luanda."""
    from make_atlantic_results import (
        GAUGES,
        RUNS,
        SOURCE,
        SPEED,
        burst,
        edge_sponge,
        patch,
        real_coast,
        whole_route,
    )

    domain = real_coast()
    days, deviation = RUNS["atlantic_results.json"]
    gauges = whole_route(
        domain, SPEED, patch(domain, *SOURCE, 1.0), partial(burst, deviation=deviation),
        list(GAUGES.values()), days * SECONDS_PER_DAY,
        sponge=edge_sponge(domain, 4.0, 4e-5, "NSW"), viscosity=10.0,
    )
    network, _ = packaged_network("baroclinic")
    mode, omega = uniform_mode(network, 1, SPEED), 2.0 * np.pi / (25.0 * SECONDS_PER_DAY)
    source, window = gaussian_burst(6.0 * deviation * SECONDS_PER_DAY), days * SECONDS_PER_DAY
    case = SimpleNamespace()

    def search() -> None:
        case.arrivals = mode_arrivals(
            network, mode, packaged_bathymetry(), (*SOURCE, *SOURCE), SOURCE, [GAUGES["Luanda"]],
            omega,
        )

    def waveforms() -> None:
        mode_waveforms(network, mode, case.arrivals, source, window)

    def whole() -> None:
        search()
        mode_answer(network, mode, case.arrivals, source, window, omega, Conditions())

    parts = {"search": cpu_time(search), "waveform": cpu_time(waveforms),
             "search, waveform and budget": cpu_time(whole)}  # fmt: skip
    benchmark.pedantic(waveforms, rounds=3)
    tell(benchmark, "Atlantic", gauges.cpu_seconds, parts)
