"""Coastal values averaged over the distance in which modes get out of step."""

from __future__ import annotations

import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
from numpy.testing import assert_allclose

from waveguide.network.trapped_store import packaged_guide
from waveguide.propagation.adaptation import adaptation_length, adapted, averaged
from waveguide.propagation.modes import atlas_mode

sys.path.insert(0, str(Path(__file__).parents[1] / "oracle"))
from forced_guide import mode_of, zonal_coast

DAY = 86400.0
NODES = 2001
COAST = zonal_coast(20000.0, NODES)
PLACE = np.concatenate([[0.0], np.cumsum(COAST.length)])


def test_single_value_spreads_with_the_kernel_of_a_line() -> None:
    length, middle = 300e3, NODES // 2
    values = np.zeros(NODES)
    values[middle] = 1.0
    found = averaged(COAST, values, np.full(NODES, length))
    distance = np.abs(PLACE - PLACE[middle])
    expected = np.exp(-distance / length) / (2.0 * length) * COAST.length.mean()
    near = distance < 5.0 * length
    # second order in the spacing over L, (10/300)², with a smallest value to divide by
    assert_allclose(found[near], expected[near], rtol=1e-2)


def test_sine_is_damped_by_one_plus_its_wavenumber_squared() -> None:
    """−L²v″ + v = sin ks has v = sin(ks)/(1 + k²L²); ends are kept out of it."""
    length, wavenumber = 200e3, 2.0 * np.pi / 1000e3
    found = averaged(COAST, np.sin(wavenumber * PLACE), np.full(NODES, length))
    inside = np.abs(PLACE - 0.5 * PLACE[-1]) < 0.5 * PLACE[-1] - 10.0 * length
    expected = np.sin(wavenumber * PLACE) / (1.0 + (wavenumber * length) ** 2)
    assert_allclose(found[inside], expected[inside], atol=1e-3)


def test_constants_stay_and_missing_values_part() -> None:
    length = np.full(NODES, 500e3)
    assert_allclose(averaged(COAST, np.full(NODES, 0.03), length), 0.03, rtol=1e-9)
    values = np.where(PLACE < 8e6, 1.0, 3.0)
    values[PLACE.searchsorted(8e6)] = np.nan
    found = averaged(COAST, values, length)
    missing = np.isnan(values)
    assert np.array_equal(np.isnan(found), missing)
    assert_allclose(found[~missing], values[~missing], rtol=1e-9)


def test_slow_waves_see_one_value_and_fast_ones_their_own() -> None:
    value = 0.03 + 0.02 * np.sin(2.0 * np.pi * PLACE / 5e6)
    mode = replace(mode_of(COAST, 3.0, value), detuning=np.full(NODES, 1.0 / 6.0))
    slow, fast = (adapted(COAST, mode, 2.0 * np.pi / (d * DAY)) for d in (3650.0, 0.005))
    # the longest length is twice this coast, so 1 % of the range is left between its ends
    assert np.ptp(slow.coastal_value) < 0.01 * np.ptp(value)
    assert_allclose(fast.coastal_value, value, rtol=1e-3)


def test_mode_without_neighbour_stays_as_it_is() -> None:
    mode = mode_of(COAST, 200.0, np.linspace(0.01, 0.02, NODES), number=0)
    assert adapted(COAST, mode, 1e-6) is mode


def test_length_by_hand() -> None:
    """4 and 2 m/s at 30 days: 1/(2.42e-6 × 0.25) = 1650 km."""
    mode = replace(mode_of(COAST, 4.0, 1.0), detuning=np.full(NODES, 0.25))
    assert_allclose(adaptation_length(mode, 2.0 * np.pi / (30.0 * DAY)), 1650e3, rtol=2e-3)


def test_packaged_coasts_are_averaged_within_what_they_hold() -> None:
    network, atlas = packaged_guide("baroclinic")
    mode = atlas_mode(atlas, 1)
    found = adapted(network, mode, 2.0 * np.pi / (30.0 * DAY)).coastal_value
    known = np.isfinite(mode.coastal_value)
    assert np.array_equal(np.isfinite(found), known)
    assert mode.coastal_value[known].min() <= found[known].min()
    assert found[known].max() <= mode.coastal_value[known].max()
    jumps = [
        np.nanpercentile(np.abs(np.log(v[network.head] / v[network.tail])), 90)
        for v in (mode.coastal_value, found)
    ]
    assert jumps[1] < 0.1 * jumps[0]
