"""Properties every column must have."""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from waveguide.modes.vertical import phase_speeds, vertical_modes

DEPTH = np.array([5.0, 50.0, 150.0, 400.0, 1000.0, 2500.0, 4500.0])
columns = arrays(float, DEPTH.size, elements=st.floats(1e-8, 1e-3))
bottoms = st.floats(20.0, 6000.0)


@settings(max_examples=40, deadline=None)
@given(columns, bottoms)
def test_modes_are_ordered_and_below_the_bound(n2: np.ndarray, bottom: float) -> None:
    """c_n falls with n and c_n ≤ N_max H/(nπ) under a rigid lid (comparison theorem)."""
    speeds = phase_speeds([n2], DEPTH, [bottom], 4, rigid_lid=True)[0]
    assert np.all(np.diff(speeds) < 0.0)
    bound = np.sqrt(n2.max()) * bottom / (np.pi * np.arange(1, 5))
    assert np.all(speeds <= bound * (1.0 + 1e-9))


@settings(max_examples=30, deadline=None)
@given(columns, bottoms, st.floats(0.2, 5.0))
def test_speed_scales_with_n_and_with_depth(n2: np.ndarray, bottom: float, by: float) -> None:
    base = phase_speeds([n2], DEPTH, [bottom], 3, rigid_lid=True)
    stronger = phase_speeds([n2 * by**2], DEPTH, [bottom], 3, rigid_lid=True)
    deeper = phase_speeds([n2], DEPTH * by, [bottom * by], 3, rigid_lid=True)
    np.testing.assert_allclose(stronger, by * base, rtol=1e-7)
    np.testing.assert_allclose(deeper, by * base, rtol=1e-7)


@settings(max_examples=20, deadline=None)
@given(arrays(float, (3, DEPTH.size), elements=st.floats(0.0, 1e-3)), bottoms)
def test_a_batch_equals_its_columns(n2: np.ndarray, bottom: float) -> None:
    n2 = n2 + 1e-7
    bottom3 = np.array([bottom, 0.5 * bottom, 2.0 * bottom])
    together = phase_speeds(n2, DEPTH, bottom3, 2)
    alone = [vertical_modes(n2[i], DEPTH, bottom3[i], 2).phase_speed[1:] for i in range(3)]
    np.testing.assert_allclose(together, alone, rtol=1e-9)
