"""Arrivals follow the dispersion of sections where it matters."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.testing import assert_allclose

from waveguide.constants import coriolis
from waveguide.modes.modeset import low_frequency_wavenumber
from waveguide.network.graph import Network
from waveguide.network.trapped_store import packaged_guide
from waveguide.propagation.modes import ModeAtNodes, atlas_mode
from waveguide.propagation.near_equator import network_wall_table
from waveguide.propagation.step_response import LARGEST_GROWTH, step_response, step_speeds

DAYS = np.array([40.0, 20.0, 10.0, 5.0, 3.0])
OMEGA = 2.0 * np.pi / (DAYS * 86400.0)


def some_coast(network: Network) -> np.ndarray:
    """A hundred steps from 30° N along western North America."""
    near = (np.abs(network.lon + 116.0) < 1.5) & (np.abs(network.lat - 30.0) < 0.3)
    node = int(np.flatnonzero(near & np.isfinite(network.offshore))[0])
    coast = np.flatnonzero(network.kind == 0)
    leaving = dict(zip(network.tail[coast].tolist(), coast.tolist(), strict=True))
    steps = []
    while len(steps) < 100:
        steps.append(leaving[node])
        node = int(network.head[steps[-1]])
    return np.array(steps)


def lags(network: Network, mode: ModeAtNodes, steps: np.ndarray) -> np.ndarray:
    nodes = np.union1d(network.tail[steps], network.head[steps])
    table = network_wall_table(network, mode, OMEGA, nodes)
    return step_response(network, mode, steps, OMEGA, table).lag


def test_lag_beyond_long_waves_is_that_of_the_sections() -> None:
    network, atlas = packaged_guide("baroclinic")
    mode, steps = atlas_mode(atlas, 1), some_coast(network)
    long_waves = replace(
        mode, dispersion=np.zeros(network.size), barotropic_tail=np.zeros(network.size)
    )
    beyond = lags(network, mode, steps) - lags(network, long_waves, steps)
    ends = network.tail[steps], network.head[steps]
    f = np.abs(coriolis(0.5 * (network.lat[ends[0]] + network.lat[ends[1]])))
    middle = [0.5 * (v[ends[0]] + v[ends[1]]) for v in
              (mode.depth, mode.dispersion, mode.barotropic_tail)]
    speed = step_speeds(network, mode, steps)[0]
    for column in range(3):
        wavenumber = low_frequency_wavenumber(OMEGA[column], speed, f, *middle)
        growth = wavenumber * speed / OMEGA[column] - 1.0
        held = np.clip(growth, -LARGEST_GROWTH, LARGEST_GROWTH)
        expected = held * OMEGA[column] * network.length[steps] / speed
        assert_allclose(beyond[:, column], expected, rtol=1e-9, atol=1e-12)
    # 2 % at some period of the table, or nobody would need it
    share = beyond.sum(axis=0) / (OMEGA * (network.length[steps] / speed).sum())
    assert share[0] < 0.02 < share[3]
    assert np.all(np.diff(share) > 0.0)
