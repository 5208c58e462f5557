"""Energy budgets step by step: exact sums, the order of what happens, and the spectrum's stand-in.

No outside numbers: closed forms of this file, DERIVED.
"""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.constants import SECONDS_PER_DAY
from waveguide.propagation.answers import mode_answer
from waveguide.propagation.budgets import (
    budget_of_legs,
    equal_energy_frequencies,
    step_budgets,
    taken_up_to,
)
from waveguide.propagation.sources import gaussian_burst
from waveguide.propagation.step_response import FATES, Conditions
from waveguide.propagation.transfer import leg_budget, paths_of_arrival, route_transfers

C = 2.5
ROSSBY, FRICTION = FATES.index("Rossby waves"), FATES.index("bottom friction")
DAYS = np.array([400.0, 60.0, 5.0])
OMEGA = 2.0 * np.pi / (DAYS * SECONDS_PER_DAY)
POWER = np.array([0.5, 0.3, 0.2])


@pytest.fixture
def case(guides: SimpleNamespace) -> SimpleNamespace:
    """Along the equator, and poleward along an eastern boundary."""
    network = guides.chain([
        (guides.EQUATOR, [(0.0, 0.0), (40.0, 0.0)]), (guides.COAST, [(40.0, 0.0), (40.0, 35.0)]),
    ])
    return SimpleNamespace(
        network=network, mode=guides.uniform(network, C), path=guides.path(network)
    )


def test_steps_sum_to_one_and_to_the_legs(case: SimpleNamespace) -> None:
    conditions = Conditions(friction=2e-8, damping=2e-8)
    (steps,) = step_budgets(case.network, case.mode, [case.path], OMEGA, POWER, conditions)
    legs = budget_of_legs(steps, case.path.leg_ends)
    assert legs.taken.shape == (2, 5)
    assert_allclose(legs.taken.sum(axis=0), steps.taken.sum(axis=0), rtol=1e-12)
    assert_allclose(legs.arrives[-1] + legs.taken.sum(), 1.0, rtol=1e-12)
    assert_allclose(legs.arrives, steps.arrives[case.path.leg_ends - 1], rtol=1e-12)
    assert_allclose(taken_up_to(steps)[-1], legs.taken.sum(axis=0), rtol=1e-12)


def test_friction_of_the_ocean_crossed_comes_before_the_junction(case: SimpleNamespace) -> None:
    """On the equator friction alone acts up to the last step, where the junction takes its part."""
    friction = 5e-8
    (steps,) = step_budgets(
        case.network, case.mode, [case.path], OMEGA[:1], POWER[:1], Conditions(friction=friction)
    )
    length = case.network.length[: case.path.leg_ends[0]].sum()
    rubbed = steps.taken[: case.path.leg_ends[0], FRICTION].sum()
    last = float(case.network.length[case.path.leg_ends[0] - 1])
    before = 1.0 - np.exp(-2.0 * friction * (length - last))
    assert before < rubbed < 1.0 - np.exp(-2.0 * friction * length)
    assert np.all(steps.taken[: case.path.leg_ends[0] - 1, ROSSBY] == 0.0)
    # a leg as a whole deals friction a smaller share than it has before the junction takes any
    (whole,) = route_transfers(
        case.network, case.mode, [case.path], OMEGA[:1], Conditions(friction=friction)
    )
    assert leg_budget(whole, np.ones(1)).taken[0, FRICTION] < 0.9 * before


def test_a_path_without_steps_takes_nothing(guides: SimpleNamespace, case: SimpleNamespace) -> None:
    nowhere = guides.replace(
        case.path, steps=np.zeros(0, np.int64), leg_ends=np.zeros(1, np.int64)
    )
    (steps,) = step_budgets(case.network, case.mode, [nowhere], OMEGA, POWER)
    legs = budget_of_legs(steps, nowhere.leg_ends)
    assert legs.arrives.tolist() == [1.0]
    assert legs.taken.tolist() == [[0.0] * 5]


def test_frequencies_of_equal_energy() -> None:
    omega = np.linspace(0.0, 1.0, 1001)
    found = equal_energy_frequencies(omega, np.ones(1001), 4)
    assert_allclose(found, [0.125, 0.375, 0.625, 0.875], atol=1e-3)
    assert_allclose(equal_energy_frequencies(omega[:2], np.ones(2), 64).size, 2)
    narrow = equal_energy_frequencies(omega, np.exp(-(((omega - 0.3) / 0.01) ** 2)), 64)
    assert np.all(np.abs(narrow - 0.3) < 0.03)


def test_few_frequencies_stand_for_a_burst(guides: SimpleNamespace, case: SimpleNamespace) -> None:
    """What arrives by 64 frequencies is what arrives by all of the burst's, to 0.002."""
    way = case.path.steps
    arrival = guides.arrival(case.network, case.mode, [way])
    answer = mode_answer(
        case.network, case.mode, [arrival], gaussian_burst(20.0 * SECONDS_PER_DAY),
        200.0 * SECONDS_PER_DAY, float(OMEGA[1]), Conditions(),
    )
    (whole,) = route_transfers(
        case.network, case.mode, paths_of_arrival(arrival), answer.waveforms.omega
    )
    exact = leg_budget(whole, answer.waveforms.power)
    assert answer.waveforms.omega.size > 64
    assert_allclose(answer.budgets[0][0].arrives, exact.arrives, atol=2e-3)


def test_vertices_tell_what_was_taken_before_them(
    guides: SimpleNamespace, case: SimpleNamespace
) -> None:
    arrival = guides.arrival(case.network, case.mode, [case.path.steps])
    answer = mode_answer(
        case.network, case.mode, [arrival], gaussian_burst(20.0 * SECONDS_PER_DAY),
        200.0 * SECONDS_PER_DAY, float(OMEGA[1]), Conditions(friction=2e-8),
    )
    taken, budget = answer.vertex_taken[0][0], answer.budgets[0][0]
    legs = arrival.legs[0]
    assert taken.shape == (sum(leg.lon.size for leg in legs), 5)
    assert_allclose(taken[0], 0.0)
    assert_allclose(taken[legs[0].lon.size - 1], budget.taken[0], rtol=1e-9)
    assert_allclose(taken[-1], budget.taken.sum(axis=0), rtol=1e-9)
    assert np.all(np.diff(taken, axis=0) >= -1e-15)
    assert [c.quasi_simultaneous for c in answer.criticality[0][0]] == [False, False]
    assert answer.criticality[0][0][1].typical > 0.0
