"""Rules that ensembles keep for any sizes, lengths and seeds."""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from waveguide.propagation.ensemble import chance_window
from waveguide.propagation.path_errors import correlated_sum
from waveguide.propagation.sampling import SCRAMBLES, normal_sample, percentiles, sample_size
from waveguide.report.page_data import _steps, _thousandths

sizes = arrays(float, st.integers(1, 40), elements=st.floats(0.0, 1e6))
scales = st.floats(1.0, 1e9)


@given(sizes, st.floats(1.0, 1e6), scales)
def test_correlated_sum_lies_between_independent_and_fully_correlated(size, step, scale):
    found = correlated_sum(size, np.full(size.size, step), scale)
    assert found >= np.sqrt(np.sum(size**2)) * (1.0 - 1e-9)
    assert found <= size.sum() * (1.0 + 1e-9)


@given(sizes, st.floats(1.0, 1e6), scales, st.floats(1.0, 100.0))
def test_longer_correlation_never_gives_less(size, step, scale, factor):
    length = np.full(size.size, step)
    less, more = (correlated_sum(size, length, s) for s in (scale, factor * scale))
    assert more >= less * (1.0 - 1e-9)


@given(sizes, st.floats(1.0, 1e6), scales)
def test_a_way_back_is_as_uncertain_as_the_way_there(size, step, scale):
    length = step * (1.0 + np.arange(size.size) % 3)
    there = correlated_sum(size, length, scale)
    back = correlated_sum(size[::-1], length[::-1], scale)
    np.testing.assert_allclose(there, back, rtol=1e-9, atol=1e-12)


@given(st.integers(1, 100_000))
def test_sample_size_is_enough_and_less_than_twice_or_eight(members):
    size = sample_size(members)
    assert size >= members
    assert size < max(2 * members, SCRAMBLES + 1) + SCRAMBLES
    assert (size // SCRAMBLES).bit_count() == 1


@settings(max_examples=30, deadline=None)
@given(st.integers(0, 2**63 - 1), st.integers(1, 600), st.integers(1, 11))
def test_every_seed_gives_finite_values_spread_over_both_signs(seed, members, inputs):
    x = normal_sample(members, inputs, seed)
    assert np.isfinite(x).all()
    assert x.shape == (sample_size(members), inputs)
    if members > 64:
        assert np.all(x.min(axis=0) < 0.0)
        assert np.all(x.max(axis=0) > 0.0)


@settings(max_examples=50, deadline=None)
@given(
    arrays(float, 512, elements=st.floats(-1e3, 1e3)),
    arrays(float, 512, elements=st.floats(0.0, 100.0)),
    st.floats(0.05, 0.95),
)
def test_a_window_holds_at_least_the_chance_asked_for(first, later, chance):
    last = first + later
    start, stop = chance_window(first, last, chance)
    assert start <= stop
    assert np.mean((first >= start) & (last <= stop)) >= chance - 1.0 / 512


@given(arrays(float, 64, elements=st.floats(-1e6, 1e6)))
def test_percentiles_rise_and_their_errors_are_not_negative(values):
    found = percentiles(values, np.array([0.1, 0.5, 0.9]))
    assert np.all(np.diff(found.value) >= 0.0)
    assert np.all(found.error >= 0.0)


series = arrays(float, st.integers(1, 200), elements=st.floats(-1e4, 1e4))


@given(series, st.sampled_from([10.0, 1e3]))
def test_steps_add_up_to_the_values(values, scale):
    np.testing.assert_allclose(np.cumsum(_steps(values, scale)) / scale, values, atol=0.51 / scale)


@given(series)
def test_waves_keep_a_thousandth_of_their_height(values):
    packed = _thousandths(values)
    top = float(np.abs(values).max())
    back = np.array(packed["values"] or np.zeros(values.size)) * packed["top"] / 1e3
    np.testing.assert_allclose(back, values, atol=6e-4 * top)
