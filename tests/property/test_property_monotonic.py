"""The monotonic section is the closest one, checked against a slow and plain construction."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from waveguide.coast.monotonic import LEAST_STEP, isobaths


def least_deviation(depth, weight):
    """Least Σ w |h − fit| of a non-decreasing fit: dynamic programming over the values present."""
    values = np.unique(depth)
    best = np.zeros(values.size)
    for h, w in zip(depth, weight, strict=True):
        best = np.minimum.accumulate(best) + w * np.abs(h - values)
    return best.min()


@given(
    st.lists(st.integers(6, 400), min_size=4, max_size=12),
    st.integers(0, 2**32 - 1),
)
def test_no_monotonic_section_is_closer(depths, number):
    h = np.array(depths, float)
    x = np.cumsum(np.full(h.size, 10e3))
    w = np.random.default_rng(number).uniform(0.5, 1.0, h.size)
    distance, level = isobaths(x, h[None, :], w[None, :])
    # depth of the fit at each sample: the deepest isobath inshore of it
    fit = np.array([level[0, distance[0] <= at].max(initial=5.0) for at in x])
    assert np.all(np.diff(fit) >= 0.0)
    ratio = (max(h.max(), 10.0) / 5.0) ** (1.0 / (level.shape[1] - 1)) - 1.0
    rounding = np.sum(w * np.maximum(h, fit)) * ratio  # an isobath's distance from the next
    assert np.sum(w * np.abs(h - fit)) <= least_deviation(h, w) + rounding


@given(st.lists(st.floats(6.0, 5000.0), min_size=3, max_size=20))
def test_a_section_that_deepens_is_kept(depths):
    h = np.sort(np.array(depths))
    x = np.arange(h.size) * 10e3
    distance, level = isobaths(x, h[None, :], np.ones((1, h.size)))
    inside = np.isfinite(distance[0])
    at = np.interp(distance[0, inside], x, h)
    apart = LEAST_STEP * level.shape[1] / 10e3 * np.ptp(h)  # isobaths moved off each other
    np.testing.assert_allclose(at, level[0, inside], rtol=1e-6, atol=apart + 1e-6)
