"""Properties that modes of every section must have."""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from waveguide.modes.mesh import simplified
from waveguide.modes.modeset import overlap
from waveguide.modes.section import monotonic_depth
from waveguide.modes.trapped import trapped_modes

DISTANCE = np.array([0.0, 15e3, 30e3, 60e3, 90e3, 120e3, 180e3])
N2_DEPTH = np.array([20.0, 100.0, 300.0, 1000.0, 4000.0])
rises = arrays(float, DISTANCE.size - 1, elements=st.floats(0.0, 1.2))
profiles = arrays(float, N2_DEPTH.size, elements=st.floats(1e-7, 3e-4))
rotation = st.floats(1e-5, 1.4e-4)


def section(shallowest: float, rises: np.ndarray) -> np.ndarray:
    """Depth growing offshore by factors up to e^1.2, at most 4 km or so."""
    return np.minimum(shallowest * np.exp(np.append(0.0, np.cumsum(rises))), 5000.0)


@settings(max_examples=15, deadline=None)
@given(st.floats(15.0, 200.0), rises, profiles, rotation)
def test_speeds_are_ordered_and_modes_orthonormal(
    shallowest: float, rises: np.ndarray, n2: np.ndarray, f: float
) -> None:
    h = section(shallowest, rises)
    modes = trapped_modes(DISTANCE, h, n2, N2_DEPTH, f, count=2, tolerance=0.02)
    assert np.all(modes.phase_speed > 0.0)
    assert np.all(np.diff(modes.phase_speed) < 0.0)
    assert np.all(modes.coastal_value > 0.0)
    assert modes.reverse_speed == 0.0
    np.testing.assert_allclose(overlap(modes, modes), np.eye(3), atol=2e-3)


@settings(max_examples=10, deadline=None)
@given(st.floats(15.0, 200.0), rises, profiles, rotation, st.floats(1.2, 4.0))
def test_more_stratification_makes_every_mode_faster(
    shallowest: float, rises: np.ndarray, n2: np.ndarray, f: float, factor: float
) -> None:
    """K falls as N² grows and B does not change, so every c_n grows (minimax principle)."""
    h = section(shallowest, rises)
    weak = trapped_modes(DISTANCE, h, n2, N2_DEPTH, f, count=2)
    strong = trapped_modes(DISTANCE, h, factor * n2, N2_DEPTH, f, count=2)
    margin = 1.0 - weak.error - strong.error
    assert np.all(strong.phase_speed >= weak.phase_speed * margin)


@settings(max_examples=10, deadline=None)
@given(st.floats(15.0, 200.0), rises, profiles, rotation)
def test_mirror_hemisphere(shallowest: float, rises: np.ndarray, n2: np.ndarray, f: float) -> None:
    h = section(shallowest, rises)
    north = trapped_modes(DISTANCE, h, n2, N2_DEPTH, f, count=1, tolerance=0.02)
    south = trapped_modes(DISTANCE, h, n2, N2_DEPTH, -f, count=1, tolerance=0.02)
    np.testing.assert_array_equal(north.phase_speed, south.phase_speed)
    np.testing.assert_array_equal(north.bottom_friction, south.bottom_friction)


@settings(max_examples=50, deadline=None)
@given(arrays(float, 40, elements=st.floats(1.0, 6000.0)), st.floats(0.001, 0.2))
def test_polygon_stays_within_its_error(depth: np.ndarray, error: float) -> None:
    x = np.linspace(0.0, 1e5, depth.size)
    keep = simplified(x, depth, error)
    polygon = np.interp(x, x[keep], depth[keep])
    assert np.all(np.abs(polygon - depth) <= error * depth * (1.0 + 1e-12))


@settings(max_examples=50, deadline=None)
@given(arrays(float, 30, elements=st.floats(1.0, 6000.0)))
def test_monotonic_depth_is_monotonic_idempotent_and_within_range(depth: np.ndarray) -> None:
    x = np.linspace(0.0, 1e5, depth.size)
    once = monotonic_depth(x, depth)
    assert np.all(np.diff(once) >= 0.0)
    assert once.min() >= depth.min() * (1.0 - 1e-9)
    assert once.max() <= depth.max() * (1.0 + 1e-9)
    np.testing.assert_allclose(monotonic_depth(x, once), once, rtol=1e-9)
