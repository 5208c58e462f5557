"""Depth-averaged modes against closed forms (DERIVED from the theory named beside each)."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest
from scipy.special import jn_zeros

from waveguide.constants import GRAVITY
from waveguide.errors import InputError
from waveguide.modes.barotropic import BarotropicModes, barotropic_modes

F = 8.2e-5
WIDTH = 80e3


def exponential(b_width: float, points: int = 801) -> tuple[np.ndarray, np.ndarray]:
    x = np.linspace(0.0, WIDTH, points)
    return x, 50.0 * np.exp(2.0 * b_width * x / WIDTH)


def shelf_speed(b_width: float, n: int) -> float:
    """c/(fL) of mode n, with mpmath's root of b sin m + m cos m = 0 between (n - ½)π and nπ."""
    root = mpmath.findroot(
        lambda m: b_width * mpmath.sin(m) + m * mpmath.cos(m),
        ((n - 0.5) * np.pi, n * np.pi),
        solver="anderson",
    )
    return float(2.0 * b_width / (root**2 + b_width**2))


@pytest.mark.parametrize(
    ("b_width", "expected"),
    [
        (0.5, [0.27601, 0.04266, 0.01589, 0.00819]),
        (1.0, [0.39094, 0.07956, 0.03093, 0.01614]),
        (2.0, [0.43294, 0.13388, 0.05751, 0.03105]),
        (3.0, [0.39920, 0.16491, 0.07862, 0.04422]),
    ],
)
def test_exponential_shelf_long_waves(b_width: float, expected: list[float]) -> None:
    """c/(fL) = 2 bL/((mL)² + (bL)²), tan mL = -m/b: long-wave limit of Buchwald & Adams (1968,
    Proc. R. Soc. A 305, 235)."""
    modes = barotropic_modes(*exponential(b_width), F, count=4, rigid_lid=True)
    np.testing.assert_allclose(modes.phase_speed / (F * WIDTH), expected, rtol=5e-4)
    exact = [shelf_speed(b_width, n) for n in range(1, 5)]
    np.testing.assert_allclose(modes.phase_speed / (F * WIDTH), exact, rtol=2e-5)


def deep_shelf(count: int = 3) -> BarotropicModes:
    x = np.linspace(0.0, WIDTH, 1601)
    h = 20.0 * np.exp(np.log(200.0) * x / WIDTH)
    return barotropic_modes(x, h, F, count=count, rigid_lid=True)


def test_exponential_shelf_coupling_and_friction() -> None:
    """h0 20 m, hL 4000 m, L 80 km, f 8.2e-5 1/s, r 5e-4 m/s: Gill & Schumann (1974, J. Phys.
    Oceanogr. 4, 83), Brink & Allen (1978, J. Phys. Oceanogr. 8, 1008)."""
    modes = deep_shelf()
    np.testing.assert_allclose(modes.phase_speed, [2.7154, 1.0253, 0.4714], rtol=1e-4)
    np.testing.assert_allclose(modes.coastal_value, [0.124465, 0.107217, 0.079226], rtol=1e-4)
    lengths = 1.0 / (5e-4 * modes.bottom_friction)
    np.testing.assert_allclose(lengths, [482.3e3, 162.1e3, 83.1e3], atol=51.0)  # as printed


def test_wind_driven_sea_level_of_mode_1() -> None:
    """Uniform 0.1 Pa: 15.41 cm per 1000 km without friction, 7.431 cm far downstream with it."""
    modes = deep_shelf()
    value, decay = modes.coastal_value[0], modes.bottom_friction[0] * 5e-4
    growth = value**2 * 0.1 / 1025.0 / GRAVITY
    assert growth * 1e6 == pytest.approx(0.1541, rel=5e-4)
    assert growth / decay == pytest.approx(0.07431, rel=5e-4)


def test_couplings_are_complete() -> None:
    """Σ F_n(0)² → 1/h0 - 1/hL under a rigid lid: the expansion of a unit pulse at the coast
    (mode 0, uniform, has the share 1/hL)."""
    sums = np.cumsum(deep_shelf(count=60).coastal_value ** 2)
    exact = 1.0 / 20.0 - 1.0 / 4000.0
    assert sums[-1] == pytest.approx(exact, rel=0.02)
    assert sums[29] < sums[-1] < exact * 1.001


def test_wedge() -> None:
    """h = αx to L: c = 4fL/j₁ₙ² flat beyond, 4fL/j₀ₙ² over deep water beyond (Robinson 1964,
    J. Geophys. Res. 69, 367); for any α, so a steep one keeps the 1 m at the coast harmless."""
    x = np.append(0.0, np.geomspace(1e-5, 1.0, 400)) * WIDTH
    flat = barotropic_modes(x, 0.5 * x, F, rigid_lid=True)
    np.testing.assert_allclose(flat.phase_speed, 4.0 * F * WIDTH / jn_zeros(1, 3) ** 2, rtol=2e-4)
    deep = barotropic_modes(np.append(x, WIDTH + 1.0), np.append(0.5 * x, 4e8), F, rigid_lid=True)
    np.testing.assert_allclose(deep.phase_speed, 4.0 * F * WIDTH / jn_zeros(0, 3) ** 2, rtol=5e-4)


def test_step_shelf() -> None:
    """Long waves on a step, γ = h1/h2: ω/f = (1 - γ) kL in the limit kL → 0, so c = f L (1 - γ)."""
    modes = barotropic_modes(
        [0.0, WIDTH, WIDTH + 1.0, WIDTH + 1e3], [100.0, 100.0, 1000.0, 1000.0], F, count=1,
        rigid_lid=True,
    )  # fmt: skip
    assert modes.phase_speed[0] == pytest.approx(F * WIDTH * 0.9, rel=1e-4)


def test_flat_bottom_kelvin_wave() -> None:
    """c = √(gH), F(0) = H^(-1/2), decay r/(2 H c); the section may be as short as one likes."""
    modes = barotropic_modes([0.0, 10e3], [4000.0, 4000.0], -F, count=1)
    speed = np.sqrt(GRAVITY * 4000.0)
    assert modes.phase_speed[0] == pytest.approx(speed, rel=1e-9)
    assert modes.coastal_value[0] == pytest.approx(4000.0**-0.5, rel=1e-9)
    assert modes.bottom_friction[0] == pytest.approx(1.0 / (8000.0 * speed), rel=1e-6)


def test_a_narrow_shelf_slows_the_kelvin_wave() -> None:
    """A shelf of width L and depth h1 beside depth H: c = c₀/(1 + L(1 - h1/H)/R) for L ≪ R.

    On the shelf u = 0, so p_x = -λp and p(L) = p(0)(1 - λL); h p_x is continuous but for the
    source λ p dh of the step, which leaves (H p_x)(L+) = -λ p(0)(h1 + (H - h1)(1 - λL)) to first
    order, to be matched to -p(L) H/R. Miles (1972, J. Fluid Mech. 55, 113) finds 2 to 8 %.
    """
    x, depth, speed = np.array([0.0, 40e3, 40.001e3]), 4000.0, np.sqrt(GRAVITY * 4000.0)
    modes = barotropic_modes(x, np.array([200.0, 200.0, depth]), F, count=0)
    expected = speed / (1.0 + 40e3 * (1.0 - 200.0 / depth) * F / speed)
    assert modes.phase_speed[0] == pytest.approx(expected, rel=2e-3)
    assert 0.92 < modes.phase_speed[0] / speed < 0.99


@pytest.mark.parametrize("sampling", [(101, 201, 401)])
def test_observed_order_of_accuracy(sampling: tuple[int, ...]) -> None:
    """Second order in the sampling of h."""
    exact = shelf_speed(2.0, 1)
    errors = [
        barotropic_modes(*exponential(2.0, n), F, rigid_lid=True).phase_speed[0] / (F * WIDTH)
        - exact
        for n in sampling
    ]
    order = np.log2(np.array(errors[:-1]) / np.array(errors[1:]))
    np.testing.assert_allclose(order, 2.0, atol=0.1)


def test_error_estimate_is_small_and_honest() -> None:
    modes = barotropic_modes([0.0, 60e3, 100e3, 130e3], [20.0, 120.0, 1500.0, 3500.0], F)
    assert np.all(modes.error < 2e-3)
    fine_x = np.linspace(0.0, 130e3, 4001)
    fine = barotropic_modes(
        fine_x, np.interp(fine_x, [0.0, 60e3, 100e3, 130e3], [20.0, 120.0, 1500.0, 3500.0]), F
    )
    assert np.all(np.abs(modes.phase_speed / fine.phase_speed - 1.0) <= modes.error + 1e-6)


def test_no_rotation_is_refused() -> None:
    with pytest.raises(InputError, match="equatorial guide"):
        barotropic_modes([0.0, 1e4], [100.0, 100.0], 0.0)
