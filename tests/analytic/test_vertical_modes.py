"""Flat-bottom vertical modes against closed forms.

All closed forms are DERIVED: standard solutions (Gill 1982, Atmosphere-Ocean Dynamics,
Academic Press, section 6) evaluated independently with g = 9.81 m/s², and again here by mpmath.
"""

from __future__ import annotations

import mpmath
import numpy as np
import pytest

from waveguide.constants import GRAVITY
from waveguide.errors import InputError
from waveguide.modes.vertical import barotropic_speed, phase_speeds, vertical_modes

FINE = np.linspace(0.0, 5000.0, 501)


def exponential(n0: float, scale: float, depth: np.ndarray = FINE) -> np.ndarray:
    return np.asarray((n0 * np.exp(-depth / scale)) ** 2)


def bessel_speeds(n0: float, scale: float, bottom: float, count: int) -> list[float]:
    """c from J0(s) Y0(s e^{-H/b}) = Y0(s) J0(s e^{-H/b}), s = N0 b/c (rigid lid)."""
    ratio = mpmath.e ** (-bottom / scale)

    def cross(s: float) -> object:
        return mpmath.besselj(0, s) * mpmath.bessely(0, s * ratio) - mpmath.bessely(
            0, s
        ) * mpmath.besselj(0, s * ratio)

    spacing = np.pi / (1.0 - float(ratio))
    return [
        n0 * scale / float(mpmath.findroot(cross, (n - 0.2) * spacing)) for n in range(1, count + 1)
    ]


@pytest.mark.parametrize(
    ("n0", "bottom", "rigid", "expected"),
    [
        (2e-3, 4000.0, True, [2.54648, 1.27324, 0.84883]),  # N H/nπ
        (2e-3, 4000.0, False, [198.14473, 2.54606, 1.27319, 0.84881]),
        (1e-3, 5000.0, False, [221.49116, 1.59147, 0.79576, 0.53051]),
    ],
)
def test_constant_stratification(
    n0: float, bottom: float, rigid: bool, expected: list[float]
) -> None:
    modes = vertical_modes([n0**2, n0**2], [0.0, 6000.0], bottom, 3, rigid_lid=rigid)
    np.testing.assert_allclose(modes.phase_speed, expected, atol=6e-6)


def test_constant_stratification_satisfies_the_transcendental_equation() -> None:
    n0, bottom = mpmath.mpf("2e-3"), 4000
    guesses = [198.1, 2.546, 1.273, 0.8488]
    roots = [
        float(
            mpmath.findroot(
                lambda c: (
                    n0 * c * mpmath.cos(n0 * bottom / c) - GRAVITY * mpmath.sin(n0 * bottom / c)
                ),
                guess,
            )
        )
        for guess in guesses
    ]
    modes = vertical_modes([4e-6], [0.0], 4000.0, 3)
    np.testing.assert_allclose(modes.phase_speed, roots, rtol=1e-10)


@pytest.mark.parametrize(
    ("n0", "scale", "bottom", "expected"),
    [
        (5.24e-3, 1300.0, 4000.0, [2.23826, 1.06595, 0.70092]),
        (5.24e-3, 1300.0, 5000.0, [2.35389, 1.10750, 0.72506]),
        (1e-2, 800.0, 4000.0, [2.89328, 1.34247, 0.87440]),
    ],
)
def test_exponential_stratification(
    n0: float, scale: float, bottom: float, expected: list[float]
) -> None:
    """Linear interpolation at 10 m of a convex N² is high by (10 m/b)²/6 < 3e-5."""
    speeds = phase_speeds([exponential(n0, scale)], FINE, [bottom], 3, rigid_lid=True)[0]
    np.testing.assert_allclose(speeds, expected, rtol=4e-5)
    np.testing.assert_allclose(speeds, bessel_speeds(n0, scale, bottom, 3), rtol=3e-5)


def test_two_layers() -> None:
    """√(g' h1 h2/(h1 + h2)) = 2.081166 m/s as the interface becomes thin.

    An interface of thickness d lowers c by d/(12·150 m) to first order; here d = 0.1 m.
    """
    half = 0.05
    depth = [0.0, 150 - half, 150 - half + 1e-6, 150 + half, 150 + half + 1e-6, 4000.0]
    n2 = [0.0, 0.0, 0.3, 0.3, 0.0, 0.0]
    speed = phase_speeds([n2], depth, [4000.0], 1, rigid_lid=True)
    assert speed[0, 0] == pytest.approx(2.081166 * (1.0 - 0.1 / 1800.0), rel=1e-5)


def test_wkb_limits() -> None:
    """c_n → ∫N dz/(nπ) for high modes; for mode 1 the WKB value is low by 7.6 % and 9.9 %."""
    n0, scale = 5.24e-3, 1300.0
    low = []
    for bottom in (4000.0, 5000.0):
        wkb = n0 * scale * (1.0 - np.exp(-bottom / scale)) / (np.pi * np.arange(1, 31))
        speeds = phase_speeds([exponential(n0, scale)], FINE, [bottom], 30, rigid_lid=True)[0]
        low.append(1.0 - wkb[0] / speeds[0])
        assert wkb[-1] == pytest.approx(speeds[-1], rel=1e-3)
    np.testing.assert_allclose(low, [0.076, 0.099], atol=6e-4)


def test_observed_order_of_accuracy_in_the_sampling_of_n2() -> None:
    exact = np.array(bessel_speeds(5.24e-3, 1300.0, 4000.0, 3))
    errors = []
    for step in (100.0, 50.0, 25.0):
        depth = np.arange(0.0, 4000.0 + step, step)
        n2 = exponential(5.24e-3, 1300.0, depth)
        errors.append(phase_speeds([n2], depth, [4000.0], 3, rigid_lid=True)[0] / exact - 1.0)
    order = np.log2(np.array(errors[:-1]) / np.array(errors[1:]))
    np.testing.assert_allclose(order, 2.0, atol=0.02)


def test_cutting_a_coarse_profile_finer_changes_little() -> None:
    """Nineteen depths against the same piecewise-linear N² given at 40 times as many."""
    depth = np.array(
        [5, 15, 25, 40, 62.5, 87.5, 112.5, 137.5, 175, 225, 275, 350, 450, 550, 700, 900, 1250,
         2250, 4500.0]
    )  # fmt: skip
    n2 = exponential(5.24e-3, 1300.0, depth) + 2e-4 * np.exp(-(((depth - 100.0) / 60.0) ** 2))
    finer = np.interp(np.arange(0, 18.001, 0.025), np.arange(19), depth)
    bottom = [40.0, 180.0, 1000.0, 4000.0, 6000.0]
    coarse = phase_speeds(np.tile(n2, (5, 1)), depth, bottom, 3)
    exact = phase_speeds(np.tile(np.interp(finer, depth, n2), (5, 1)), finer, bottom, 3)
    np.testing.assert_allclose(coarse, exact, rtol=3e-4)


def test_structure_is_orthonormal_and_solves_the_bottom_and_surface_conditions() -> None:
    modes = vertical_modes(exponential(5.24e-3, 1300.0), FINE, 4000.0, 4)
    gram = np.trapezoid(modes.structure[:, None] * modes.structure[None], modes.depth, axis=-1)
    np.testing.assert_allclose(gram, np.eye(5), atol=2e-4)
    assert np.all(modes.structure[:, 0] > 0.0)
    np.testing.assert_allclose(modes.displacement[:, -1], 0.0, atol=1e-9)
    # displacement per unit sea level is 1 at a free surface
    np.testing.assert_allclose(modes.displacement[:, 0], 1.0, rtol=1e-4)
    zero_crossings = np.sum(np.diff(np.sign(modes.structure), axis=1) != 0, axis=1)
    np.testing.assert_array_equal(zero_crossings, modes.mode)


def test_barotropic_speed() -> None:
    """√(gH): 171.55 m/s at 3000 m and 198.09 m/s at 4000 m (DERIVED)."""
    np.testing.assert_allclose(barotropic_speed([3000.0, 4000.0]), [171.55, 198.09], atol=6e-3)


@pytest.mark.parametrize(
    ("n2", "depth", "bottom", "words"),
    [
        ([[1e-6, np.nan]], [0, 100], [100], "missing values in 1 of 1"),
        ([[1e-6, -1e-7]], [0, 100], [100], "stable"),
        ([[1e-6, 1e-6]], [100, 0], [100], "increase downward"),
        ([[1e-6, 1e-6]], [-100, 0], [100], "increase downward"),
        ([[1e-6, 1e-6]], [0, 0], [100], "duplicates"),
        ([[1e-6, 1e-6]], [0, 100], [-100], "positive down"),
        ([[0.0, 0.0]], [0, 100], [100], "without stratification"),
        ([1e-6, 1e-6], [0, 100], [100], "one row for each bottom"),
    ],
)
def test_bad_input_is_named(
    n2: list[object], depth: list[float], bottom: list[float], words: str
) -> None:
    with pytest.raises(InputError, match=words):
        phase_speeds(n2, depth, bottom, 1)
