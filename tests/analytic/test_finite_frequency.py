"""Dispersion at finite frequency against closed forms (DERIVED from the theory named)."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import brentq, minimize_scalar

from waveguide.constants import GRAVITY
from waveguide.errors import InputError
from waveguide.modes.finite_frequency import (
    Guide,
    barotropic_guide,
    cutoff,
    dispersion,
    free_frequency,
    stratified_guide,
)
from waveguide.modes.vertical import vertical_modes

F = 8.2e-5
WIDTH = 80e3
N2_DEPTH = np.array([0.0, 100.0, 200.0, 500.0, 1000.0, 2000.0, 5000.0])
N2 = np.array([5e-5, 2e-4, 8e-5, 2e-5, 8e-6, 2e-6, 5e-7])


def exponential_guide(b_width: float, count: int = 2) -> Guide:
    x = np.linspace(0.0, WIDTH, 401)
    return barotropic_guide(
        x, 50.0 * np.exp(2.0 * b_width * x / WIDTH), F, count=count, rigid_lid=True
    )


def exact_frequency(b: float, k: float, n: int = 1) -> float:
    """ω/f = 2bk/(m² + k² + b²), tan m = -m/(b + k), all times L (Buchwald & Adams 1968)."""
    m = brentq(lambda m: (b + k) * np.sin(m) + m * np.cos(m), (n - 0.5) * np.pi, n * np.pi)
    return float(2.0 * b * k / (m * m + k * k + b * b))


@pytest.mark.parametrize(
    ("b", "k", "expected"),
    [
        (1.0, 0.1, [0.038038, 0.007895]),
        (1.0, 1.0, [0.276274, 0.071743]),
        (1.0, 2.0, [0.362641, 0.123519]),
        (2.0, 1.0, [0.362641, 0.123519]),
    ],
)
def test_exponential_shelf_at_finite_wavenumber(b: float, k: float, expected: list[float]) -> None:
    """Buchwald & Adams (1968, Proc. R. Soc. A 305, 235)."""
    guide = exponential_guide(b)
    found = [free_frequency(guide, n, k / WIDTH) / F for n in range(2)]
    np.testing.assert_allclose(found, expected, rtol=1e-4)


def test_exponential_shelf_cutoff() -> None:
    best = minimize_scalar(lambda k: -exact_frequency(1.0, k), bounds=(0.5, 6.0), method="bounded")
    frequency, wavenumber = cutoff(exponential_guide(1.0), 0)
    assert frequency / F == pytest.approx(-best.fun, rel=2.5e-3)
    assert wavenumber * WIDTH == pytest.approx(best.x, rel=0.1)


def test_group_speed_changes_sign_at_the_cutoff() -> None:
    guide = exponential_guide(1.0)
    highest = cutoff(guide, 0)[0]
    below, above = dispersion(guide, 0.97 * highest), dispersion(guide, 1.03 * highest)
    assert 0.0 < below.group_speed[0] < 0.5 * below.phase_speed[0]
    assert np.isnan([above.wavenumber[0], above.phase_speed[0], above.group_speed[0]]).all()


@pytest.mark.parametrize("share", [0.1, 0.5, 0.8])
def test_exponential_shelf_phase_and_group_speed(share: float) -> None:
    """At given ω, and dω/dl from the closed form."""
    k = brentq(lambda k: exact_frequency(1.0, k) - share * 0.36, 1e-3, 2.0)
    step = 1e-5
    group = (exact_frequency(1.0, k + step) - exact_frequency(1.0, k - step)) / (2.0 * step)
    waves = dispersion(exponential_guide(1.0), share * 0.36 * F)
    assert waves.wavenumber[0] * WIDTH == pytest.approx(k, rel=5e-4)
    assert waves.phase_speed[0] == pytest.approx(share * 0.36 * F * WIDTH / k, rel=5e-4)
    assert waves.group_speed[0] == pytest.approx(group * F * WIDTH, rel=5e-3)


@pytest.mark.parametrize("k", [0.2, 1.0, 3.0])
def test_step_shelf(k: float) -> None:
    """ω/f = (1 - γ) tanh kL/(1 + γ tanh kL), γ = h1/h2 (Larsen 1969, J. Mar. Res. 27, 1)."""
    guide = barotropic_guide(
        [0.0, 0.5 * WIDTH, WIDTH, WIDTH + 0.1, 1.2 * WIDTH, 3.0 * WIDTH],
        [200.0, 200.0, 200.0, 1000.0, 1000.0, 1000.0],
        F, count=1, rigid_lid=True,
    )  # fmt: skip
    exact = 0.8 * np.tanh(k) / (1.0 + 0.2 * np.tanh(k))
    assert free_frequency(guide, 0, k / WIDTH) / F == pytest.approx(exact, rel=1e-3)


def test_flat_bottom_kelvin_waves_are_not_dispersive() -> None:
    """p = ψ(z) e^{-|f|x/c} travels at c_n at every frequency, and so does its group."""
    guide = stratified_guide([0.0, 60e3], [4000.0, 4000.0], N2, N2_DEPTH, F, tolerance=1e-3)
    exact = vertical_modes(N2, N2_DEPTH, 4000.0, 3).phase_speed
    waves = dispersion(guide, 0.6 * F)
    np.testing.assert_allclose(waves.phase_speed, exact, rtol=2e-3)
    np.testing.assert_allclose(waves.group_speed, exact, rtol=5e-3)


def test_barotropic_kelvin_wave() -> None:
    guide = barotropic_guide([0.0, 50e3, 100e3], [4000.0, 4001.0, 4002.0], F, count=1)
    waves = dispersion(guide, 0.5 * F)
    assert waves.phase_speed[0] == pytest.approx(np.sqrt(GRAVITY * 4000.0), rel=1e-3)
    assert waves.group_speed[0] == pytest.approx(np.sqrt(GRAVITY * 4000.0), rel=2e-3)


def test_low_frequencies_give_the_long_waves_and_high_ones_are_slower() -> None:
    x = np.array([0.0, 60e3, 100e3, 140e3])
    h = np.array([30.0, 140.0, 1500.0, 3500.0])
    guide = stratified_guide(x, h, N2, N2_DEPTH, F)
    long_wave = abs(F) / guide.eigenvalues(0.0, 0.0)
    low = dispersion(guide, 0.01 * F)
    np.testing.assert_allclose(low.phase_speed, long_wave, rtol=5e-3)
    np.testing.assert_allclose(low.group_speed, long_wave, rtol=2e-2)
    high = dispersion(guide, 0.3 * F)
    assert high.group_speed[1] < high.phase_speed[1] < low.phase_speed[1]


def test_weak_stratification_gives_the_barotropic_shelf_waves() -> None:
    x, h = np.array([0.0, 60e3, 100e3, 140e3]), np.array([50.0, 140.0, 1500.0, 3500.0])
    weak = stratified_guide(x, h, [1e-10], [0.0], F, count=2)
    barotropic = barotropic_guide(x, h, F, count=2)
    a, b = dispersion(weak, 0.2 * F), dispersion(barotropic, 0.2 * F)
    np.testing.assert_allclose(a.wavenumber, b.wavenumber, rtol=5e-3)


@pytest.mark.parametrize("frequency", [0.0, F, -1e-6])
def test_frequencies_outside_the_range_are_named(frequency: float) -> None:
    with pytest.raises(InputError, match="between 0 and"):
        dispersion(exponential_guide(1.0), frequency)
