"""Straits, facing coasts and openings on a route: both ways add up to the whole."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.constants import SECONDS_PER_DAY, coriolis
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.gaps import passage
from waveguide.propagation.losses import step_physics
from waveguide.propagation.modes import ModeAtNodes, uniform_mode
from waveguide.propagation.transfer import (
    Path,
    independent_paths,
    leg_budget,
    route_transfers,
)

C, LAT = 2.5, 40.0
WIDTH, LENGTH = 6e3, 15e3
OMEGA = 2.0 * np.pi / (np.array([365.0, 60.0, 20.0, 5.0]) * SECONDS_PER_DAY)
THROUGH, PAST = np.array([0, 3, 4, 2]), np.array([0, 1, 2])


def fork(kind: StepKind) -> Network:
    """A zonal coast 0-1-2-3 with a gap at node 1 that leads to node 2 by way of node 4.

    Steps: 0 (0→1), 1 (1→2, passing the mouth), 2 (2→3), 3 (1→4, entering the gap), 4 (4→2).
    """
    lon = np.array([0.0, 1.0, 2.0, 3.0, 1.5])
    lat = np.full(5, LAT)
    kinds = np.array([0, 0, 0, kind, kind])
    none = np.full(5, -1)
    return Network(
        lon, lat, np.zeros(5, dtype=np.int64), np.zeros(5, dtype=bool), np.full(5, 90.0),
        np.zeros(5, dtype=np.int64), np.array([0, 1, 2, 1, 4]), np.array([1, 2, 3, 4, 2]), kinds,
        np.array([85e3, 85e3, 85e3, 40e3, 45e3]), np.where(np.arange(5) == 3, 0, none),
        np.where(np.arange(5) == 1, 0, none), np.array([WIDTH]), np.array([LENGTH]),
        np.array([np.inf]),
    )  # fmt: skip


def ways(steps: np.ndarray) -> Path:
    return Path(steps, np.array([steps.size]), 0, 0, 1.0, 1.0)


def mode_of(network: Network, share: float = 1.0) -> ModeAtNodes:
    return replace(uniform_mode(network, 1, C), gap_share=np.array([share]))


def expected_factors(kind: StepKind, omega: float, share: float) -> tuple[complex, complex]:
    """What crosses a gap and what stays, from the passage formula or the front's share."""
    beyond = passage(omega, WIDTH, LENGTH, coriolis(LAT), C, share)
    if kind == StepKind.STRAIT:
        return complex(beyond.through), complex(beyond.across)
    if kind == StepKind.FACING_COAST:
        return complex(beyond.across), complex(beyond.through)
    direct = np.exp(-WIDTH * abs(coriolis(LAT)) / C)
    return direct, 1.0 - direct**2


@pytest.mark.parametrize("kind", [StepKind.STRAIT, StepKind.FACING_COAST, StepKind.OPENING])
@pytest.mark.parametrize("share", [1.0, 0.6])
def test_amplitudes_are_those_of_the_path_search(kind: StepKind, share: float) -> None:
    network = fork(kind)
    mode = mode_of(network, share)
    through, past = route_transfers(network, mode, [ways(THROUGH), ways(PAST)], OMEGA)
    for one, omega in enumerate(OMEGA):
        loss = step_physics(network, mode, omega).loss
        assert_allclose(abs(through.response[one]), np.exp(-loss[THROUGH].sum()), rtol=1e-9)
        assert_allclose(abs(past.response[one]), np.exp(-loss[PAST].sum()), rtol=1e-9)
        crossing, passing = expected_factors(kind, omega, share)
        assert_allclose(abs(through.response[one]), abs(crossing), rtol=1e-9)
        assert_allclose(abs(past.response[one]), abs(passing), rtol=1e-9)


def test_lags_are_those_of_the_passage_with_the_way_of_the_network() -> None:
    network = fork(StepKind.STRAIT)
    through, past = route_transfers(network, mode_of(network), [ways(THROUGH), ways(PAST)], OMEGA)
    beyond = passage(OMEGA, WIDTH, LENGTH, coriolis(LAT), C)
    extra = through.front_time - LENGTH / C  # the passage has its own length already
    assert_allclose(through.response, beyond.through * np.exp(1j * OMEGA * extra), rtol=1e-9)
    assert_allclose(past.response, beyond.across * np.exp(1j * OMEGA * past.front_time), rtol=1e-9)


# Johnson & Garrett (2006), J. Phys. Oceanogr. 36, 945: all goes through as ω → 0.
def test_steady_signal_goes_through_and_both_ways_add_to_the_whole() -> None:
    network = fork(StepKind.STRAIT)
    steady = np.zeros(1)
    through, past = route_transfers(network, mode_of(network), [ways(THROUGH), ways(PAST)], steady)
    assert_allclose(through.response, 1.0, rtol=1e-12)
    assert_allclose(past.response, 0.0, atol=1e-100)
    assert independent_paths([ways(THROUGH), ways(PAST)]) == [0, 1]


def test_energy_of_both_ways_and_of_the_sill_sums_to_one() -> None:
    network = fork(StepKind.STRAIT)
    paths = [ways(THROUGH), ways(PAST)]
    for share in (1.0, 0.6):
        through, past = route_transfers(network, mode_of(network, share), paths, OMEGA)
        for one in np.eye(OMEGA.size):
            budgets = [leg_budget(transfer, one) for transfer in (through, past)]
            first, second = (budget.arrives[-1] for budget in budgets)
            taken = [budget.taken.sum(axis=0) for budget in budgets]
            assert_allclose([first + taken[0].sum(), second + taken[1].sum()], 1.0, rtol=1e-12)
            sill = taken[0][3]
            assert_allclose(first + second + sill, 1.0, rtol=1e-9)
            assert_allclose(taken[0][4], second, atol=1e-9)  # what is lost to the other way
            assert_allclose(taken[1][3], sill, atol=1e-9)
            assert (sill > 1e-3) == (share < 1.0)


def test_a_way_within_another_is_not_added_again() -> None:
    whole = ways(np.array([0, 1, 2]))
    later = ways(np.array([1, 2]))  # the source is tied to nodes 0 and 1
    shorter = ways(np.array([0, 1]))  # the target is tied to nodes 2 and 3
    other = ways(np.array([0, 3, 4, 2]))
    assert independent_paths([whole, later, other]) == [0, 2]
    assert independent_paths([shorter, whole]) == [0]
    faint = Path(later.steps, later.leg_ends, 1, 0, 0.9, 1.0)
    assert independent_paths([faint, whole]) == [1]
    at_source = Path(np.zeros(0, dtype=np.int64), np.zeros(0, dtype=np.int64), 0, 0, 1.0, 1.0)
    assert independent_paths([at_source, other]) == [0]


def test_target_at_the_source() -> None:
    network = fork(StepKind.STRAIT)
    here = Path(np.zeros(0, dtype=np.int64), np.zeros(0, dtype=np.int64), 0, 0, 0.5, 0.5)
    transfer = route_transfers(network, mode_of(network), [here], OMEGA)[0]
    assert_allclose(transfer.response, 0.25)
    assert transfer.front_time == 0.0
    assert transfer.leg_nepers.shape == (5, 0, OMEGA.size)


def test_target_next_to_the_source() -> None:
    network = fork(StepKind.STRAIT)
    near = Path(np.zeros(0, dtype=np.int64), np.zeros(1, dtype=np.int64), 1, 0, 1.0, 1.0, 1e3, 9e3)
    along = Path(PAST, np.array([3]), 0, 0, 1.0, 1.0, 1e3, -2e3)
    mode = mode_of(network)
    for paths in ([near], [near, along]):
        transfers = route_transfers(network, mode, paths, OMEGA)
        assert_allclose(transfers[0].response, np.exp(1j * OMEGA * 8e3 / C), rtol=1e-12)
        assert transfers[0].front_time == pytest.approx(8e3 / C)
        budget = leg_budget(transfers[0], np.ones(OMEGA.size))
        assert_allclose(budget.arrives, 1.0)
    assert transfers[1].front_time == pytest.approx((3 * 85e3 - 3e3) / C)
    assert [steps.size for steps in near.leg_steps] == [0]
    assert np.array_equal(along.leg_steps[0], PAST)
