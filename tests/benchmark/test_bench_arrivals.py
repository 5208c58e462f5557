"""How long the main job takes. Run with `pytest tests/benchmark`; nothing here asserts a time."""

from __future__ import annotations

import resource
import subprocess
import sys

import numpy as np
import pytest

from waveguide.network.packaged import build_packaged, packaged_network
from waveguide.network.search import Origin, Searcher
from waveguide.propagation.losses import step_physics
from waveguide.propagation.modes import atlas_mode

COMMAND = "from waveguide.cli import main; main()"


def test_a_shipped_scenario_cold_from_the_shell(benchmark):
    """Includes the interpreter and every import; peak memory is reported beside it."""

    def run() -> None:
        subprocess.run(
            [sys.executable, "-c", COMMAND, "arrivals", "mindanao_chain"],
            check=True, capture_output=True,
        )  # fmt: skip

    benchmark.pedantic(run, rounds=5, warmup_rounds=1)
    peak = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss / 1024.0
    benchmark.extra_info["peak_memory_MB"] = round(peak)


def test_one_source_to_every_node_warm(benchmark):
    network, atlas = packaged_network("baroclinic")
    searcher = Searcher.of(network)
    physics = step_physics(network, atlas_mode(atlas, 1), 2.0 * np.pi / (60.0 * 86400.0))
    start = np.argmin(np.hypot(network.lon - 126.7, network.lat - 8.6))  # off Mindanao
    origin = Origin(np.array([start]), np.zeros(1))
    reach = benchmark(searcher.reach, physics.time, origin)
    benchmark.extra_info["nodes"] = network.size
    benchmark.extra_info["reached"] = int(np.isfinite(reach.cost).sum())
    assert np.isfinite(reach.cost).sum() > network.size / 2


@pytest.mark.slow
def test_networks_and_flat_bottom_atlas_rebuilt(benchmark, tmp_path):
    benchmark.pedantic(build_packaged, args=(tmp_path,), rounds=1)
