"""On the shipped network the wind's influence is the free wave's transfer function."""

from __future__ import annotations

import numpy as np
import pytest

from waveguide.forcing.influence import influence
from waveguide.forcing.transfer import Place, wind_transfer
from waveguide.network.attach import point_box, tie
from waveguide.network.packaged import packaged_network
from waveguide.network.search import Origin, Searcher
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.propagation.losses import step_physics
from waveguide.propagation.modes import atlas_mode, friction_of_steps
from waveguide.propagation.step_response import Conditions
from waveguide.propagation.transfer import Path, route_transfers

DAY = 86400.0


@pytest.fixture(scope="module")
def guide():
    network, atlas = packaged_network("baroclinic")
    mode = atlas_mode(atlas, 1)
    damping, drag = 1.0 / (365.0 * DAY), 5e-4
    physics = step_physics(network, mode, 2.0 * np.pi / (40.0 * DAY), damping, drag)
    friction = friction_of_steps(network, mode, drag)
    return network, mode, physics, Conditions(friction, damping)


def _node(network, mode, lon, lat):
    return int(tie(network, mode.speed, point_box(lon, lat), packaged_bathymetry()).node[0])


@pytest.mark.parametrize("target", [(-77.15, -12.05), (-117.2, 32.7), (-110.0, 0.0)])
def test_gain_and_delay_are_those_of_the_strongest_route(guide, target):
    network, mode, physics, _ = guide
    node, start = _node(network, mode, *target), _node(network, mode, -175.0, 0.0)
    found = influence(network, mode, physics, node, 1.0, np.inf)
    row = int(np.nonzero(network.head[found.step] == start)[0][0])
    reach = Searcher.of(network).reach(physics.loss, Origin(np.array([start]), np.zeros(1)))
    steps = reach.steps_to(node, network)
    ratio = physics.potential[node] / physics.potential[start]
    free = ratio * np.exp(-physics.loss[steps].sum())
    assert found.gain[row] == pytest.approx(free, rel=1e-9)
    assert found.head_delay[row] == pytest.approx(physics.time[steps].sum(), rel=1e-9)


def test_impulse_response_is_the_transfer_function_of_the_free_wave(guide):
    """From the equator at 175°W to Callao, junction and coast at every frequency."""
    network, mode, physics, conditions = guide
    node, start = _node(network, mode, -77.15, -12.05), _node(network, mode, -175.0, 0.0)
    found = influence(network, mode, physics, node, 1.0, np.inf)
    row = int(np.nonzero(network.head[found.step] == start)[0][0])
    way, at = [], int(found.parent[row])
    while at >= 0:
        way.append(int(found.step[at]))
        at = int(found.parent[at])
    omega = 2.0 * np.pi / (np.array([200.0, 90.0, 40.0, 20.0, 10.0]) * DAY)[np.newaxis].ravel()
    windy = np.ones(found.step.size, bool)
    told = wind_transfer(network, mode, conditions, found, Place(node, 1.0), windy, omega)
    gain = told.gain_sign[row] * np.exp(
        told.log_gain[row] + 1j * (told.gain_lag[row] + omega * found.head_delay[row])
    )
    path = Path(np.array(way), np.array([len(way)]), start, 0, 1.0, 1.0)
    free = route_transfers(network, mode, [path], omega, conditions)[0].response
    assert gain == pytest.approx(free, rel=1e-9)
    # A stress over the step adds F² ds/(ρ₀ g √2) to sea level there, half a step before its end.
    place = int(np.nonzero(told.row == row)[0][0])
    step = int(found.step[row])
    added = mode.coastal_value[start] ** 2 * network.length[step] / (np.sqrt(2.0) * 1025.0 * 9.81)
    assert np.exp(told.log_weight[place]) == pytest.approx(added * np.abs(free), rel=5e-3)


def test_every_step_is_had_once_and_follows_its_parent(guide):
    network, mode, physics, _ = guide
    found = influence(network, mode, physics, _node(network, mode, -122.5, 37.8), 1.0, np.inf)
    assert np.unique(found.step).size == found.step.size
    inner = found.parent >= 0
    assert np.all(found.parent[inner] < np.nonzero(inner)[0])
    assert np.array_equal(network.head[found.step[inner]],
                          network.tail[found.step[found.parent[inner]]])
    assert np.all(found.weight >= 0.0)  # the first mode has one sign
