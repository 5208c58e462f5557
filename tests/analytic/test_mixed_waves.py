"""Mixed Rossby-gravity waves at walls and from coast to coast."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.constants import BETA_EQUATOR
from waveguide.network.graph import Network
from waveguide.propagation import mixed_waves
from waveguide.propagation.equator import eastern_wall, eastern_wall_mixed
from waveguide.propagation.mixed_waves import FADED, FULL, crossings, gains
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.near_equator import network_wall_table

C = 2.5
T_E = 1.0 / np.sqrt(BETA_EQUATOR * C)


def ocean(guides: SimpleNamespace, width: float, north: bool = True) -> Network:
    """Down a western coast from 20° N, along the equator, and away along an eastern coast."""
    end = 20.0 if north else -20.0
    return guides.chain([
        (guides.COAST, [(0.0, 20.0), (0.0, 0.0)]), (guides.EQUATOR, [(0.0, 0.0), (width, 0.0)]),
        (guides.COAST, [(width, 0.0), (width, end)]),
    ])  # fmt: skip


def brought(network: Network, mode: ModeAtNodes, omega: np.ndarray, ends: list[int]) -> np.ndarray:
    nodes = np.arange(network.size)
    table = network_wall_table(network, mode, omega, nodes).junctions
    return gains(network, mode, table, omega, [(np.arange(network.tail.size), np.array(ends))])[0]


@pytest.mark.parametrize("frequency", [0.4, 0.7, 1.0, 1.4])
def test_wall_is_odd_and_hands_all_energy_to_the_coasts(frequency: float) -> None:
    """As the Kelvin wave does in this band (Moore 1968), so both make the same wave far off."""
    walls = eastern_wall_mixed, eastern_wall
    mixed, kelvin = (wall(frequency, [-6.0, 0.0, 6.0]) for wall in walls)
    assert_allclose(mixed[0], -mixed[2], rtol=1e-12)
    assert mixed[1] == 0.0
    assert_allclose(abs(mixed[2]), abs(kelvin[2]), rtol=0.02)  # four figures each, less at 6


def test_between_meridional_coasts_both_waves_bring_the_same(guides: SimpleNamespace) -> None:
    omega = np.array([0.6, 0.8, 1.0, 1.3]) / T_E
    north, south = ocean(guides, 60.0), ocean(guides, 60.0, north=False)
    end = [north.tail.size]
    ratio = [brought(n, guides.uniform(n, C), omega, end)[0] - 1.0 for n in (north, south)]
    assert_allclose(np.abs(ratio[0]), 1.0, rtol=1e-6)
    assert_allclose(ratio[1], -ratio[0], rtol=1e-9)


def test_they_come_later_by_beta_length_over_squared_frequency(guides: SimpleNamespace) -> None:
    omega = np.linspace(0.7, 1.3, 25) / T_E
    near, far = ocean(guides, 50.0), ocean(guides, 60.0)
    ratio = [brought(n, guides.uniform(n, C), omega, [n.tail.size])[0] - 1.0 for n in (near, far)]
    more = far.length.sum() - near.length.sum()
    turned = np.angle(ratio[1] / ratio[0] * np.exp(1j * BETA_EQUATOR * more / omega))
    assert_allclose(turned, 0.0, atol=1e-9)
    # at ω̂ = 1 that is the time of the Kelvin wave once more
    assert_allclose(BETA_EQUATOR * more * T_E**2, more / C, rtol=1e-12)


def test_nothing_on_the_equator_nor_at_slow_waves(guides: SimpleNamespace) -> None:
    network = ocean(guides, 60.0)
    mode, last = guides.uniform(network, C), network.tail.size
    on_equator = int(np.flatnonzero(network.kind == guides.EQUATOR)[-1]) + 1
    omega = np.array([0.0, 0.2, FADED, FULL]) / T_E
    found = brought(network, mode, omega, [on_equator, last])
    assert np.all(found[0] == 1.0)
    assert np.all(found[1, :3] == 1.0)
    assert found[1, 3] != 1.0


def test_they_grow_from_nothing_along_the_coast(guides: SimpleNamespace) -> None:
    network = ocean(guides, 60.0)
    omega = np.array([1.0]) / T_E
    junction = int(np.flatnonzero(network.kind == guides.EQUATOR)[-1]) + 1
    ends = [junction + n for n in (1, 5, 15, 40)]
    size = np.abs(brought(network, guides.uniform(network, C), omega, ends)[:, 0] - 1.0)
    assert size[0] < 0.15
    assert np.all(np.diff(size) > 0.0)
    assert_allclose(size[-1], 1.0, rtol=1e-6)


def test_an_ocean_is_crossed_from_coast_to_coast(guides: SimpleNamespace) -> None:
    network = ocean(guides, 60.0)
    mode, omega = guides.uniform(network, C), np.array([1.0]) / T_E
    table = network_wall_table(network, mode, omega, np.arange(network.size)).junctions
    steps = np.arange(network.tail.size)
    found = crossings(network, table, steps)
    assert len(found) == 1
    end, crossing = found[0]
    equator = network.kind == guides.EQUATOR
    assert end == int(np.flatnonzero(equator)[-1]) + 1
    assert_allclose(crossing.length, network.length[equator].sum(), rtol=1e-12)
    assert (crossing.west_side, crossing.east_side) == (0, 0)
    assert crossings(network, table, steps[equator]) == []
    assert crossings(network, table, steps[int(np.flatnonzero(equator)[0]):]) == []


@pytest.mark.parametrize("place", [0.5, 2.0, 6.0])
def test_wall_solutions_between_the_frequencies_computed(place: float) -> None:
    frequency = np.sort(np.random.default_rng(0).uniform(FADED, 1.7, 300))
    direct = eastern_wall_mixed(frequency, place) / eastern_wall(frequency, place)
    found = np.interp(frequency, mixed_waves._GRID, mixed_waves._wall_ratios(place))
    assert_allclose(found, direct, rtol=3e-3)
