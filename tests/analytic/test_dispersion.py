"""The local dispersion relation: published values and every limit it has to contain."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad

from waveguide.constants import SECONDS_PER_DAY, coriolis
from waveguide.errors import InputError
from waveguide.propagation.dispersion import (
    amplification_rate,
    critical_frequency,
    critical_latitude,
    critical_period,
    dispersive_group_speed,
    dispersive_phase_speed,
    interior_damping_rate,
    local_wavenumber,
    segment_exponent,
    segment_growth,
    segment_loss,
)

C = 2.5
F_LOW, F_HIGH = 1e-5, 9e-5
LENGTH = 3.5e6
GAMMA_MEAN = (F_HIGH - F_LOW) / LENGTH / (F_HIGH + F_LOW)


# DERIVED from Clarke & Shi (1991, J. Geophys. Res. 96, 10731) and
# Grimshaw & Allen (1988, J. Phys. Oceanogr. 18, 1124): T = 4πa tan(lat)/(c cos θ).
@pytest.mark.parametrize(
    ("days", "angle", "latitude"),
    [
        (60, 0, 9.20),
        (120, 0, 17.94),
        (182.625, 0, 26.23),
        (365.25, 0, 44.58),
        (365.25, 30, 40.48),
        (365.25, 45, 34.87),
        (365.25, 60, 26.23),
    ],
)
def test_critical_latitude_published(days: float, angle: float, latitude: float) -> None:
    found = critical_latitude(C, days * SECONDS_PER_DAY, angle)
    assert_allclose(found, latitude, atol=0.005)  # printed to two decimals
    assert_allclose(critical_period(C, found, angle) / SECONDS_PER_DAY, days, rtol=1e-12)


def test_critical_frequency_is_the_critical_period() -> None:
    gamma = amplification_rate(30.0, 40.0)
    omega = critical_frequency(C, gamma)
    assert_allclose(2 * np.pi / omega, critical_period(C, 30.0, 40.0), rtol=1e-12)


def test_amplification_has_one_sign_rule_for_both_hemispheres() -> None:
    # poleward is north in the north and south in the south; a zonal coast has none
    rate = amplification_rate([30.0, -30.0, 30.0, -30.0, 45.0], [0.0, 180.0, 180.0, 0.0, 90.0])
    assert rate[0] == pytest.approx(rate[1])
    assert rate[2] == pytest.approx(-rate[0])
    assert rate[3] == pytest.approx(-rate[0])
    assert abs(rate[4]) < 1e-20


# DERIVED: amplitude ∝ √|f| of a wave that keeps its energy flux
# (Grimshaw & Allen 1988, J. Phys. Oceanogr. 18, 1124).
@pytest.mark.parametrize(("start", "end", "ratio"), [(5, 45, 2.8484), (10, 30, 1.6969)])
def test_amplitude_grows_as_root_f(start: float, end: float, ratio: float) -> None:
    f = np.abs(coriolis(np.array([start, end])))
    length = (end - start) * 111e3
    exponent = segment_exponent(2 * np.pi / (4 * SECONDS_PER_DAY), C, f[0], f[1], length)
    assert_allclose(np.exp(exponent.real), ratio, atol=5e-5)
    assert_allclose(np.exp(segment_growth(f[0], f[1])), ratio, atol=5e-5)


def test_high_frequency_limit_is_the_phase_speed() -> None:
    omega = 60 * C * GAMMA_MEAN
    wavenumber = local_wavenumber(omega, np.array([-1, 0, 1]) * GAMMA_MEAN, C)
    assert_allclose(wavenumber.real, omega / C, rtol=1.5 / 60**2 / 2)  # next term: Γ²/2κ²
    assert_allclose(wavenumber.imag, np.array([1, 0, -1]) * GAMMA_MEAN, rtol=1e-12)


def test_dispersion_just_above_the_critical_frequency() -> None:
    omega_c = critical_frequency(C, GAMMA_MEAN)
    omega = 1.3 * omega_c
    factor = np.sqrt(1 - 1 / 1.3**2)
    assert_allclose(dispersive_phase_speed(omega, GAMMA_MEAN, C), C / factor, rtol=1e-12)
    assert_allclose(dispersive_group_speed(omega, GAMMA_MEAN, C), C * factor, rtol=1e-12)
    wavenumber = local_wavenumber(omega * np.array([1 - 1e-6, 1, 1 + 1e-6]), GAMMA_MEAN, C).real
    assert_allclose(omega / wavenumber[1], C / factor, rtol=1e-12)
    group = 2e-6 * omega / (wavenumber[2] - wavenumber[0])
    assert_allclose(group, C * factor, rtol=1e-8)


def test_no_speed_below_the_critical_frequency() -> None:
    omega = 0.9 * critical_frequency(C, GAMMA_MEAN)
    assert dispersive_phase_speed(omega, GAMMA_MEAN, C) == np.inf
    assert dispersive_group_speed(omega, GAMMA_MEAN, C) == 0.0
    assert local_wavenumber(omega, GAMMA_MEAN, C).real == 0.0


def test_low_frequency_eastern_boundary_is_uniform() -> None:
    # next term of the expansion: ∫ κ²/2Γ ds, of the order of (ω/ω_c)²
    omega = 0.01 * critical_frequency(C, (F_HIGH - F_LOW) / LENGTH / (2 * F_HIGH))
    assert abs(segment_exponent(omega, C, F_LOW, F_HIGH, LENGTH)) < 1e-4


def test_low_frequency_western_boundary_keeps_transport() -> None:
    # Johnson & Marshall (2002, J. Phys. Oceanogr. 32, 1121): η ∝ |f|
    omega = 0.01 * critical_frequency(C, (F_HIGH - F_LOW) / LENGTH / (2 * F_HIGH))
    exponent = segment_exponent(omega, C, F_HIGH, F_LOW, LENGTH)
    assert_allclose(exponent.real, np.log(F_LOW / F_HIGH), atol=1e-4)
    assert exponent.imag == 0.0


def test_finite_at_the_equator() -> None:
    exponent = segment_exponent(np.array([0.0, 1e-8, 1e-6]), C, 0.0, F_HIGH, LENGTH)
    assert np.all(np.isfinite(exponent))
    assert exponent[0] == 0.0
    far = local_wavenumber(1e-6, np.array([1e3, 1e12, np.inf]), C)
    assert np.all(np.abs(far) < 1e-12)
    assert np.all(np.isfinite(local_wavenumber(1e-6, -1e3, C)))


def test_nothing_is_left_where_the_coast_runs_into_the_equator() -> None:
    exponent = segment_exponent(1e-6, C, F_HIGH, 0.0, LENGTH)
    assert np.exp(exponent.real) == 0.0
    assert segment_loss(1e-6, C, F_HIGH, 0.0, LENGTH) == np.inf


@pytest.mark.parametrize("damping", [0.0, 3e-8])
@pytest.mark.parametrize("omega", [2e-8, 2e-7, 1e-6, 5e-6])
@pytest.mark.parametrize(("start", "end"), [(F_LOW, F_HIGH), (F_HIGH, F_LOW)])
def test_segment_is_the_integral_of_the_local_wavenumber(
    start: float, end: float, omega: float, damping: float
) -> None:
    def slope(s: float) -> complex:
        f = start + (end - start) * s / LENGTH
        return 1j * complex(local_wavenumber(omega, (end - start) / LENGTH / (2 * f), C, damping))

    turning = C * abs(end - start) / LENGTH / (2 * omega)  # |f| at the critical latitude
    breaks = [abs(turning - start) / abs(end - start) * LENGTH]
    real = quad(lambda s: slope(s).real, 0, LENGTH, points=breaks, limit=300)[0]
    imag = quad(lambda s: slope(s).imag, 0, LENGTH, points=breaks, limit=300)[0]
    exponent = segment_exponent(omega, C, start, end, LENGTH, damping)
    assert_allclose([exponent.real, exponent.imag], [real, imag], atol=1e-7)


def test_segments_add_up_whatever_the_cuts() -> None:
    omega = np.array([1e-8, 3e-7, 8e-7, 4e-6])[:, None]
    f = np.linspace(F_LOW, F_HIGH, 38)
    pieces = segment_exponent(omega, C, f[:-1], f[1:], LENGTH / 37, 1e-8)
    whole = segment_exponent(omega[:, 0], C, F_LOW, F_HIGH, LENGTH, 1e-8)
    assert_allclose(pieces.sum(axis=1), whole, rtol=1e-11)


def test_sphere_needs_only_short_segments() -> None:
    # |f| = 2Ω sin(lat) is not linear in s: one degree at a time the error is below 1e-4
    def leg(n: int) -> complex:
        lat = np.linspace(8.0, 48.0, n + 1)
        f = coriolis(lat)
        return complex(segment_exponent(8e-7, C, f[:-1], f[1:], 40 * 111e3 / n).sum())

    assert abs(leg(40) - leg(4000)) < 1e-4


def test_reciprocity_of_the_two_directions() -> None:
    omega = np.geomspace(1e-8, 1e-5, 9)
    there = segment_exponent(omega, C, F_LOW, F_HIGH, LENGTH, 2e-8)
    back = segment_exponent(omega, C, F_HIGH, F_LOW, LENGTH, 2e-8)
    assert_allclose(there - back, np.full(9, np.log(F_HIGH / F_LOW)) + 0j, atol=1e-12)


def test_amplitude_is_growth_less_a_loss_that_is_never_negative() -> None:
    random = np.random.default_rng(7)
    start, end = 1.4e-4 * random.random((2, 2000)) + 1e-9
    length = 10 ** random.uniform(3, 6.5, 2000)
    omega = 10 ** random.uniform(-9, -4.5, 2000)
    damping = np.where(random.random(2000) < 0.5, 0.0, 10 ** random.uniform(-9, -6, 2000))
    loss = segment_loss(omega, C, start, end, length, damping)
    exponent = segment_exponent(omega, C, start, end, length, damping)
    assert np.all(loss >= 0.0)
    assert np.count_nonzero(loss > 1e-6) > 200
    assert_allclose(segment_growth(start, end) - loss, exponent.real, atol=1e-9)


@pytest.mark.parametrize("end", [5e-5, 5e-5 * (1 + 1e-13)])
def test_zonal_coast_without_cancellation(end: float) -> None:
    exponent = segment_exponent(2e-6, C, 5e-5, end, 1e6, 3e-8)
    assert_allclose(exponent, 1j * (2e-6 + 3e-8j) * 1e6 / C, atol=1e-12)
    assert segment_exponent(0.0, C, 5e-5, end, 1e6).real == pytest.approx(0.0, abs=1e-12)


def test_segment_of_no_length_changes_nothing() -> None:
    exponent = segment_exponent([0.0, 2e-6], C, [5e-5, 4e-5], [5e-5, 4e-5], 0.0)
    assert_allclose(exponent, 0.0, atol=1e-12)


def test_mean_flow_shifts_the_speed() -> None:
    exponent = segment_exponent(2e-6, C, 5e-5, 5e-5, 1e6, mean_flow=[0.5, -0.5])
    assert_allclose(exponent.imag, 2e-6 * 1e6 / np.array([3.0, 2.0]), rtol=1e-12)


def test_mean_flow_that_stops_the_wave_is_refused() -> None:
    with pytest.raises(InputError, match="mean_flow"):
        segment_exponent(2e-6, C, 5e-5, 5e-5, 1e6, mean_flow=-2.5)


def test_damping_follows_the_inverse_square_of_the_speed() -> None:
    # READ "about 5 months" in the supplement of Suresh et al. (2013, Geophys. Res. Lett.):
    # 12 months for mode 1 at 2.52 m/s are 4.54 months for mode 2 at 1.55 m/s.
    rate = interior_damping_rate([2.52, 1.55], 1 / 12.0, 2.52)
    assert_allclose(1 / rate, [12.0, 4.54], atol=0.005)


def test_damping_decay_along_a_zonal_coast() -> None:
    rate = 1 / (180 * SECONDS_PER_DAY)
    exponent = segment_exponent(2e-6, C, 5e-5, 5e-5, 4e6, rate)
    assert_allclose(exponent.real, -rate * 4e6 / C, rtol=1e-9)
