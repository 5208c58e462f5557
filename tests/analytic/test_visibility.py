"""Where a mode is best seen: closed forms, and sections against flat bottoms."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.constants import GRAVITY
from waveguide.modes.trapped import trapped_modes
from waveguide.modes.vertical import vertical_modes
from waveguide.modes.visibility import (
    NOISE,
    NOISE_FREQUENCY,
    QUANTITIES,
    clarity,
    view_of_mode,
    view_of_section,
)

DEPTH = np.linspace(0.0, 4000.0, 41)


# DERIVED: for constant N, p = cos(nπz/H): ζ is largest at H/2n, H/2n·3, … with g nπ/(N²H) = g/(cN),
# the current at the surface is g/c, the pressure at the bottom (−1)ⁿ (Gill 1982, section 6.11).
@pytest.mark.parametrize("mode", [1, 2])
def test_constant_stratification(mode: int) -> None:
    n, height = 2e-3, 4000.0
    n2 = np.full(DEPTH.size, n**2)
    view = view_of_mode(vertical_modes(n2, DEPTH, height, 3), mode, n2, DEPTH)
    c = n * height / (mode * np.pi)
    assert_allclose(view.per_metre[0], 1.0)
    assert_allclose(abs(view.per_metre[1]), GRAVITY / (c * n), rtol=2e-3)
    assert_allclose(view.per_metre[2], GRAVITY / c, rtol=2e-3)
    assert_allclose(view.per_metre[3], (-1.0) ** mode, rtol=2e-3)
    nodes = height * (np.arange(mode) + 0.5) / mode
    assert np.abs(view.depth[1] - nodes).min() < 120.0
    assert view.depth[3] == pytest.approx(height)
    assert_allclose(view.noise[1], NOISE[1] * np.sqrt(NOISE_FREQUENCY / n), rtol=1e-6)
    assert_allclose(view.offshore, 0.0)


def test_the_barotropic_mode_is_seen_at_the_bottom_as_at_the_surface() -> None:
    n2 = np.full(DEPTH.size, 4e-6)
    view = view_of_mode(vertical_modes(n2, DEPTH, 4000.0, 1), 0, n2, DEPTH)
    assert_allclose(view.per_metre[3], 1.0, atol=2e-3)
    assert_allclose(view.per_metre[2], GRAVITY / np.sqrt(GRAVITY * 4000.0), rtol=2e-3)
    # a bottom gauge is the quieter of the two
    assert np.argmax(clarity(view, 0.01)) == QUANTITIES.index("bottom pressure")


def test_where_water_is_less_stratified_noise_is_larger_and_the_best_depth_higher() -> None:
    n2 = (5.24e-3 * np.exp(-DEPTH / 1300.0)) ** 2
    modes = vertical_modes(n2, DEPTH, 4000.0, 1)
    view = view_of_mode(modes, 1, n2, DEPTH)
    largest = modes.depth[np.argmax(np.abs(modes.displacement[1]))]
    assert view.depth[1] < largest - 200.0


def test_a_wall_is_seen_like_its_flat_bottom() -> None:
    """A section that is a wall of 4000 m with a flat bottom beyond has the flat bottom's modes."""
    n2 = (5.24e-3 * np.exp(-DEPTH / 1300.0)) ** 2
    section = trapped_modes(
        np.array([0.0, 2e5]), np.array([4000.0, 4000.0]), n2, DEPTH, 1e-4, count=1
    )
    found = view_of_section(section, 1)
    expected = view_of_mode(vertical_modes(n2, DEPTH, 4000.0, 1), 1, n2, DEPTH)
    assert_allclose(found.per_metre, expected.per_metre, rtol=0.05)
    assert abs(found.depth[1] - expected.depth[1]) < 150.0
    assert found.offshore[1] < 2e4
    assert_allclose(found.depth[3], 4000.0)


def test_a_shelf_mode_is_looked_for_on_its_shelf() -> None:
    x = np.array([0.0, 60e3, 100e3, 400e3])
    n2 = (5.24e-3 * np.exp(-DEPTH / 1300.0)) ** 2
    section = trapped_modes(x, np.array([20.0, 150.0, 3000.0, 4000.0]), n2, DEPTH, 1e-4, count=2)
    for rank in (1, 2):
        view = view_of_section(section, rank)
        scale = float(section.trapping_scale[list(section.mode).index(rank)])
        assert np.all(view.offshore <= 2.0 * scale + 1.0)
        assert view.depth[3] >= 50.0
        # pressure at the bottom of the shelf is nearly that of the coast
        assert 0.4 < abs(view.per_metre[3]) <= 1.05


def test_clarity_grows_with_sea_level() -> None:
    n2 = np.full(DEPTH.size, 4e-6)
    view = view_of_mode(vertical_modes(n2, DEPTH, 4000.0, 1), 1, n2, DEPTH)
    assert_allclose(clarity(view, -0.03), 3.0 * clarity(view, 0.01))
    assert_allclose(clarity(view, 0.03)[0], 1.0)
