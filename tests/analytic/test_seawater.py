"""N² by TEOS-10: published check values, conversions, and convective mixing."""

from __future__ import annotations

import gsw
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from waveguide.ocean.seawater import (
    MINIMUM_N2,
    conservative_temperature_absolute_salinity,
    layer_n2,
    layer_pressures,
    stabilise,
)

# Check values in the documentation of gsw_Nsquared, GSW toolbox 3.06 (McDougall and Barker
# 2011, SCOR/IAPSO WG127): flag MEMORY, all printed digits.
SA = np.array([34.7118, 34.8915, 35.0256, 34.8472, 34.7366, 34.7324])
CT = np.array([28.8099, 28.4392, 22.7862, 10.2262, 6.8272, 4.3236])
PRESSURE = np.array([10.0, 50.0, 125.0, 250.0, 600.0, 1000.0])
LATITUDE = 4.0
N2 = 1e-3 * np.array(
    [0.060843209693499, 0.235723066151305, 0.216599928330380, 0.012941204313372, 0.008434782795209]
)


def column(values):
    return np.asarray(values, float)[:, None, None]


def test_n2_is_that_of_the_published_example():
    n2 = layer_n2(column(CT), column(SA), column(PRESSURE), np.array([LATITUDE]))
    assert n2[:, 0, 0] == pytest.approx(N2, rel=1e-10)


def test_n2_takes_gravity_at_the_latitude_given():
    shape = (6, 3, 1)
    lat = np.array([-80.0, 0.0, 45.0])
    n2 = layer_n2(
        np.broadcast_to(column(CT), shape), np.broadcast_to(column(SA), shape),
        np.broadcast_to(column(PRESSURE), (6, 3, 1)), lat,
    )
    for k, latitude in enumerate(lat):
        assert n2[:, k, 0] == pytest.approx(gsw.Nsquared(SA, CT, PRESSURE, latitude)[0])


@pytest.mark.parametrize(("kind", "convert"), [
    ("in-situ", lambda: gsw.t_from_CT(SA, CT, PRESSURE)),
    ("potential", lambda: gsw.pt_from_CT(SA, CT)),
    ("conservative", lambda: CT),
])
def test_every_kind_of_temperature_gives_the_same_conservative_temperature(kind, convert):
    ct, _ = conservative_temperature_absolute_salinity(
        column(convert()), column(SA), column(PRESSURE), np.array([-150.0]), np.array([LATITUDE]),
        kind, "absolute",
    )
    assert ct[:, 0, 0] == pytest.approx(CT, abs=1e-9)


def test_practical_salinity_becomes_absolute_at_its_place():
    sp = column(gsw.SP_from_SA(SA, PRESSURE, -150.0, LATITUDE))
    _, sa = conservative_temperature_absolute_salinity(
        column(CT), sp, column(PRESSURE), np.array([-150.0]), np.array([LATITUDE]),
        "conservative", "practical",
    )
    assert sa[:, 0, 0] == pytest.approx(SA, abs=1e-9)
    assert np.all(sa - sp > 0.15)  # the two differ by 0.5 %, so mixing them up would show


def test_pressure_is_taken_as_it_is_or_from_depth():
    levels, lat = np.array([0.0, 1000.0]), np.array([0.0, 60.0])
    assert np.all(layer_pressures(levels, lat, "pressure")[1] == 1000.0)
    # p(1000 m): 1006.9 dbar at the equator, more towards the poles with gravity.
    deep = layer_pressures(levels, lat, "depth")[1, :, 0]
    assert deep == pytest.approx(gsw.p_from_z(-1000.0, lat))
    assert deep[1] > deep[0] > 1005.0


def test_mixing_takes_the_mean_buoyancy_of_an_unstable_stack():
    levels = np.array([0.0, 10.0, 20.0, 30.0])  # levels stand for 5, 10, 10 and 5 m
    density = np.array([1.0, 4.0, 2.0, 6.0])  # the two in the middle overturn to 3
    mixed = stabilise(np.diff(density) / 10.0, levels, 1e-9)
    assert mixed == pytest.approx([0.2, 1e-9, 0.3], rel=1e-12)


def test_stable_columns_and_gaps_are_left_alone():
    levels = np.array([0.0, 10.0, 30.0, 60.0])
    n2 = np.array([[1e-4, -1e-5], [2e-5, 3e-5], [np.nan, np.nan]])
    result = stabilise(n2, levels)
    assert np.array_equal(result[:, 0], n2[:, 0], equal_nan=True)
    assert np.isnan(result[2, 1])
    assert np.all(result[:2] >= MINIMUM_N2)


@settings(max_examples=50, deadline=None)
@given(st.lists(st.floats(-1e-3, 1e-3), min_size=2, max_size=12))
def test_mixing_keeps_the_depth_integral_of_buoyancy(layers):
    n2 = np.array(layers)
    levels = np.cumsum(np.r_[0.0, 10.0 + 5.0 * np.arange(n2.size)])
    thickness = np.diff(levels)
    mixed = stabilise(n2, levels, minimum=1e-15)
    before = np.r_[0.0, np.cumsum(n2 * thickness)]
    # The surface takes the smallest mean of the water above any level: that is how far the
    # mixing from above reaches (min-max formula of isotonic regression).
    weights = np.r_[thickness[:1], thickness[:-1] + thickness[1:], thickness[-1:]] / 2.0
    means = np.cumsum(weights * before) / np.cumsum(weights)
    after = means.min() + np.r_[0.0, np.cumsum(mixed * thickness)]
    assert np.all(mixed >= 1e-15)
    assert np.trapezoid(after, levels) == pytest.approx(np.trapezoid(before, levels), abs=1e-8)
