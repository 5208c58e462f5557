"""Transfer functions of coasts: every limit of the local relation, friction and damping."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad

from waveguide.constants import (
    EARTH_RADIUS,
    GRAVITY,
    REFERENCE_DENSITY,
    SECONDS_PER_DAY,
    coriolis,
)
from waveguide.propagation.dispersion import (
    amplification_rate,
    critical_period,
    interior_damping_rate,
    local_wavenumber,
)
from waveguide.propagation.frequency_limits import fast_share, leg_criticality
from waveguide.propagation.step_response import Conditions, flat_bottom_friction
from waveguide.propagation.transfer import leg_budget, route_transfers

C = 2.5
DAYS = np.array([4.0, 30.0, 90.0, 365.25])
OMEGA = 2.0 * np.pi / (DAYS * SECONDS_PER_DAY)


def meridional(guides: SimpleNamespace, first: float, last: float) -> SimpleNamespace:
    network = guides.chain([(guides.COAST, [(0.0, first), (0.0, last)])], 0.1)
    return SimpleNamespace(
        network=network, mode=guides.uniform(network, C), path=guides.path(network)
    )


def respond(case: SimpleNamespace, omega: np.ndarray, conditions: Conditions | None = None):
    return route_transfers(
        case.network, case.mode, [case.path], omega, conditions or Conditions()
    )[0]


# The local relation integrated with quad along the true meridian; a step of 0.1° takes |f| as
# linear, which is good to 1e-5 here.
@pytest.mark.parametrize(("first", "last"), [(8.0, 50.0), (-8.0, -50.0), (50.0, 8.0)])
def test_coast_is_the_integral_of_the_local_relation(
    guides: SimpleNamespace, first: float, last: float
) -> None:
    found = respond(meridional(guides, first, last), OMEGA).response
    azimuth = 0.0 if last > first else 180.0

    def rate(lat: float, omega: float, part: str) -> float:
        gamma = amplification_rate(lat, azimuth)
        return float(getattr(1j * local_wavenumber(omega, gamma, C), part))

    metres = EARTH_RADIUS * np.pi / 180.0
    for omega, response in zip(OMEGA, found, strict=True):
        limits = sorted((first, last))
        real, imag = (
            quad(rate, *limits, (omega, part), limit=400)[0] * metres for part in ("real", "imag")
        )
        assert_allclose(response, np.exp(real + 1j * imag), rtol=3e-4)


# DERIVED: amplitude ∝ √|f| of a wave that keeps its energy flux
# (Grimshaw & Allen 1988, J. Phys. Oceanogr. 18, 1124).
@pytest.mark.parametrize(("first", "last", "ratio"), [(10, 30, 1.6969), (-10, -30, 1.6969)])
def test_fast_signal_grows_as_root_f_and_lags_by_the_front_time(
    guides: SimpleNamespace, first: float, last: float, ratio: float
) -> None:
    case = meridional(guides, first, last)
    omega = 2.0 * np.pi / (np.array([4.0, 1.0]) * SECONDS_PER_DAY)
    transfer = respond(case, omega)
    assert_allclose(np.abs(transfer.response), ratio, atol=5e-5)
    assert transfer.front_time == pytest.approx(20.0 * np.pi / 180.0 * EARTH_RADIUS / C)
    # the lag falls short of the front's by about ω_c²/2ω²: 1/(2·16²) at 4 days and 10°
    lag = np.angle(transfer.response * np.exp(-1j * omega * transfer.front_time))
    assert_allclose(lag / (omega * transfer.front_time), 0.0, atol=1.5e-3)
    assert abs(lag[1]) < abs(lag[0])


def test_steady_signal_is_uniform_along_an_eastern_boundary(guides: SimpleNamespace) -> None:
    case = meridional(guides, 10.0, 50.0)
    assert_allclose(respond(case, np.zeros(1)).response, 1.0, rtol=1e-12)


# Transport conserved: Johnson & Marshall (2002), J. Phys. Oceanogr. 32, 1121.
def test_steady_signal_goes_as_f_along_a_western_boundary(guides: SimpleNamespace) -> None:
    case = meridional(guides, 50.0, 10.0)
    ratio = coriolis(10.0) / coriolis(50.0)
    assert_allclose(respond(case, np.zeros(1)).response, ratio, rtol=1e-12)


def test_slow_signal_has_no_lag_where_it_is_below_critical(guides: SimpleNamespace) -> None:
    case = meridional(guides, 10.0, 40.0)  # critical latitude at a year: 44.6°
    response = respond(case, OMEGA[3:]).response
    assert_allclose(np.angle(response), 0.0, atol=1e-10)
    assert 0.9 < abs(response[0]) < np.sqrt(coriolis(40.0) / coriolis(10.0))


def test_coastal_values_scale_sea_level(guides: SimpleNamespace) -> None:
    case = meridional(guides, 10.0, 30.0)
    value = np.linspace(1.0, 3.0, case.network.size)
    scaled = SimpleNamespace(**{**vars(case), "mode": guides.replace(
        case.mode, coastal_value=value)})  # fmt: skip
    assert_allclose(respond(scaled, OMEGA).response, 3.0 * respond(case, OMEGA).response)


def test_attachments_multiply(guides: SimpleNamespace) -> None:
    case = meridional(guides, 10.0, 30.0)
    off = guides.replace(case.path, source_factor=0.5, target_factor=0.4)
    tied = route_transfers(case.network, case.mode, [off], OMEGA)[0]
    assert_allclose(tied.response, 0.2 * respond(case, OMEGA).response)
    assert_allclose(tied.leg_response[-1], 0.5 * respond(case, OMEGA).response)


def zonal(guides: SimpleNamespace, east: float = 40.0) -> SimpleNamespace:
    network = guides.chain([(guides.COAST, [(0.0, -35.0), (east, -35.0)])])
    return SimpleNamespace(
        network=network, mode=guides.uniform(network, C), path=guides.path(network, None, True)
    )


def test_mean_flow_carries_the_wave(guides: SimpleNamespace) -> None:
    case = zonal(guides)
    flow = np.full(case.network.tail.size, 0.5)
    transfer = respond(case, OMEGA, Conditions(mean_flow=flow))
    time = case.network.length.sum() / (C + 0.5)
    assert transfer.front_time == pytest.approx(time)
    assert_allclose(transfer.response, np.exp(1j * OMEGA * time), atol=1e-9)


# Brink & Allen (1978), J. Phys. Oceanogr. 8, 1008, barotropic over a flat bottom.
def test_barotropic_friction_over_a_flat_bottom(guides: SimpleNamespace) -> None:
    depth, drag = 4000.0, 5e-4
    speed = np.sqrt(GRAVITY * depth)
    decay = flat_bottom_friction(drag, depth**-0.5, speed)
    assert_allclose(decay, drag / (2.0 * depth * speed), rtol=1e-12)
    case = zonal(guides)
    transfer = respond(case, OMEGA, Conditions(friction=float(decay)))
    assert_allclose(np.abs(transfer.response), np.exp(-decay * case.network.length.sum()))


# DERIVED (Gill & Schumann 1974, J. Phys. Oceanogr. 4, 83; Brink & Allen 1978): exponential shelf,
# mode 1, wind coupling .124465 m^-1/2, friction 1/(482.3 km), 0.1 Pa along the whole coast:
# 15.41 cm per 1000 km without friction, 7.431 cm far downstream with it.
def test_wind_along_a_coast_with_friction(guides: SimpleNamespace) -> None:
    case = zonal(guides, 70.0)
    rate = 0.124465**2 * 0.1 / (REFERENCE_DENSITY * GRAVITY)
    length = case.network.length
    steady = np.zeros(1)

    def raised(friction: float) -> float:
        reach = respond(case, steady, Conditions(friction=friction)).leg_response[:, 0].real
        reach = np.concatenate([[1.0], reach])
        return float((0.5 * (reach[1:] + reach[:-1]) * length).sum() * rate)

    assert_allclose(raised(0.0) / length.sum() * 1e6, 0.1541, atol=5e-5)
    # 6000 km leave 4e-6 of what is further up; the sum over 18 km steps is good to 1e-4
    assert_allclose(raised(1.0 / 482.3e3), 0.07431, rtol=3e-4)


# READ: Suresh et al. (2013), Geophys. Res. Lett., damping ∝ c⁻²: 12 months for mode 1 at
# 2.52 m/s mean "about 5" for mode 2 at 1.55 m/s, 4.54 exactly.
def test_interior_damping(guides: SimpleNamespace) -> None:
    month = 365.25 / 12.0 * SECONDS_PER_DAY
    rate = float(interior_damping_rate(1.55, 1.0 / (12.0 * month), 2.52))
    assert 1.0 / rate / month == pytest.approx(4.54, abs=0.005)
    case = zonal(guides)
    case.mode = guides.uniform(case.network, 1.55)
    transfer = respond(case, OMEGA, Conditions(damping=rate))
    assert_allclose(np.abs(transfer.response), np.exp(-rate * transfer.front_time), rtol=1e-9)


def test_energy_budget_sums_to_one_with_everything_at_work(guides: SimpleNamespace) -> None:
    case = meridional(guides, 5.0, 50.0)
    case.path = guides.path(case.network, None, True)
    overlap = np.ones(case.network.tail.size)
    overlap[100] = 0.8
    conditions = Conditions(friction=2e-8, damping=3e-8, mean_flow=0.1, overlap=overlap)
    transfer = respond(case, OMEGA, conditions)
    for weight in (*np.eye(4), np.ones(4)):
        budget = leg_budget(transfer, weight)
        assert np.all(budget.taken >= 0.0)
        assert_allclose(budget.arrives[-1] + budget.taken.sum(), 1.0, rtol=1e-12)
        before = np.concatenate([[1.0], budget.arrives[:-1]])
        assert_allclose(before, budget.arrives + budget.taken.sum(axis=1), rtol=1e-10, atol=1e-12)
    slow, fast = (leg_budget(transfer, w).taken.sum(axis=0) for w in np.eye(4)[[3, 0]])
    assert slow[0] > 0.5 > 1e-6 > fast[0]  # Rossby waves below and above the critical frequency
    assert_allclose(fast[3], 0.36 * leg_budget(transfer, np.eye(4)[0]).arrives[99], rtol=0.01)


def test_energy_is_that_of_the_amplitude(guides: SimpleNamespace) -> None:
    case = meridional(guides, 8.0, 50.0)
    transfer = respond(case, OMEGA)
    for one in range(OMEGA.size):
        kept = leg_budget(transfer, np.eye(OMEGA.size)[one]).arrives[-1]
        energy = np.abs(transfer.response[one]) ** 2 * coriolis(8.0) / coriolis(50.0)
        assert kept == pytest.approx(energy, rel=1e-9)


def test_critical_periods_of_a_leg(guides: SimpleNamespace) -> None:
    case = meridional(guides, 10.0, 30.0)
    found = leg_criticality(case.network, case.mode, case.path.steps, OMEGA[3])
    wanted = critical_period(C, np.array([11.0, 29.0]))  # 5 and 95 % of the way
    assert_allclose([found.shortest, found.longest], wanted, rtol=0.01)
    assert found.quasi_simultaneous
    assert found.share == 1.0
    quick = leg_criticality(case.network, case.mode, case.path.steps, OMEGA[0])
    assert not quick.quasi_simultaneous
    back = meridional(guides, 30.0, 10.0)  # a western boundary has no such legs
    assert np.isnan(leg_criticality(back.network, back.mode, back.path.steps, OMEGA[3]).shortest)


def test_energy_too_fast_for_the_theory(guides: SimpleNamespace) -> None:
    case = meridional(guides, 10.0, 30.0)
    days = np.array([1.0, 2.0, 20.0])  # 0.3 |f| at 10° is a period of 9.6 days
    omega = 2.0 * np.pi / (days * SECONDS_PER_DAY)
    share = fast_share(case.network, case.mode, case.path.steps, omega, np.array([1.0, 2.0, 7.0]))
    assert share == pytest.approx(0.3)
