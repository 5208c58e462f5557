"""The response at all nodes at once is that of each node as a target."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

from waveguide.forcing.field import chains_of, nodes_response
from waveguide.propagation.step_response import Conditions

sys.path.insert(0, str(Path(__file__).parents[1] / "oracle"))
from forced_guide import at_every_frequency, branched_coast, forcing_of, mode_of, physics_of

DAY = 86400.0
FRICTION = Conditions(friction=1.0 / 3000e3)


@pytest.fixture(scope="module")
def guide():
    network = branched_coast()
    mode = mode_of(network, 2.3, 0.06)
    physics = physics_of(network, mode, decay=1.0 / 3000e3)
    time = np.arange(240) * 0.5 * DAY
    gently = np.sin(np.pi * np.clip(time / (20.0 * DAY), 0.0, 0.5)) ** 2
    phase = np.arange(network.tail.size)[:, None] / 17.0
    stress = np.sin(phase + time / (3.0 * DAY)) + 0.5 * np.cos(2.0 * phase - time / (8.0 * DAY))
    return network, mode, physics, forcing_of(network, stress * gently, 0.5 * DAY)


def test_chains_hold_every_step_once(guide):
    network, _, physics, _ = guide
    chains = chains_of(network, physics)
    assert np.array_equal(np.sort(chains.step), np.arange(network.tail.size))
    assert chains.time.sum() == pytest.approx(physics.time.sum())
    assert chains.loss.sum() == pytest.approx(physics.loss.sum())
    for k in range(chains.tail.size):
        run = chains.step[chains.first[k] : chains.first[k + 1]]
        assert np.array_equal(network.head[run[:-1]], network.tail[run[1:]])
        assert (network.tail[run[0]], network.head[run[-1]]) == (chains.tail[k], chains.head[k])
    # main coast in three pieces, what comes in, what goes off, and the ring
    assert chains.tail.size == 6


def test_every_node_agrees_with_itself_as_a_target(guide):
    network, mode, physics, forcing = guide
    ring = 97 + np.arange(10)
    nodes = np.ones(network.size, bool)
    node, level = nodes_response(network, mode, physics, forcing, nodes, np.inf)
    # Nothing leads to the two nodes where coasts begin.
    assert set(range(network.size)) - set(node.tolist()) <= {0, 61}
    for n in (10, 25, 26, 40, 41, 60, 70, 81, 90, 96):
        alone, _ = at_every_frequency(network, mode, physics, FRICTION, forcing.stress,
                                      forcing.step, n)
        row = int(np.nonzero(node == n)[0][0])
        # Characteristics are interpolated twice, (ωΔ)²/8 or 0.4 % of the fastest signal each; on
        # the branch to the north growth and dispersion are those of 20 days.
        error = np.abs(level[row] - alone)[:-10]
        assert error.max() < 0.02 * np.abs(alone).max(), n
    # A ring without beginning is cut at one node, and the wave followed for one turn.
    assert set(ring.tolist()) & set(node.tolist())


def test_only_the_nodes_asked_for_are_answered(guide):
    network, mode, physics, forcing = guide
    nodes = np.zeros(network.size, bool)
    nodes[[30, 50]] = True
    node, level = nodes_response(network, mode, physics, forcing, nodes, np.inf)
    assert node.tolist() == [30, 50]
    assert level.shape == (2, 240)
    assert level.dtype == np.float32
