"""Errors of the width of straits and facing coasts against losses computed for other widths."""

from __future__ import annotations

from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from waveguide.constants import SECONDS_PER_DAY
from waveguide.network.graph import StepKind
from waveguide.propagation.gap_errors import GAPS, GRID, gap_logs
from waveguide.propagation.losses import step_physics

OMEGA = 2.0 * np.pi / (20.0 * SECONDS_PER_DAY)


def coast_past_a_mouth(guides: SimpleNamespace, kind: StepKind, width: float):
    """A coast along 40°N whose step 5 passes the mouth of a gap that the last step enters."""
    network = guides.chain([(guides.COAST, [(0.0, 40.0), (3.0, 40.0)])])
    m = network.tail.size
    return replace(
        network,
        tail=np.append(network.tail, 5), head=np.append(network.head, 2),
        kind=np.append(network.kind, int(kind)), length=np.append(network.length, 80e3),
        gap=np.append(np.full(m, -1), 0), passes=np.append(np.where(np.arange(m) == 5, 0, -1), -1),
        gap_width=np.array([width]), gap_length=np.array([60e3]), gap_sill=np.array([np.inf]),
    )  # fmt: skip


@pytest.mark.parametrize("kind", [StepKind.STRAIT, StepKind.FACING_COAST, StepKind.OPENING])
@pytest.mark.parametrize("steps", [np.arange(15), np.array([15])])
def test_logs_are_the_losses_for_wider_and_narrower_gaps(
    guides: SimpleNamespace, kind: StepKind, steps: np.ndarray
) -> None:
    width, error = 12e3, 4e3
    network = coast_past_a_mouth(guides, kind, width)
    mode = guides.uniform(network, 2.5)
    found = gap_logs(network, mode, steps, OMEGA, error)
    losses = [
        step_physics(
            replace(network, gap_width=np.array([width * np.exp(x * error / width)])), mode, OMEGA
        ).loss[steps].sum()
        for x in GRID
    ]  # fmt: skip
    mine, other = GAPS if kind is StepKind.STRAIT else GAPS[::-1]
    assert_allclose(found[mine], losses[len(GRID) // 2] - np.array(losses), atol=1e-9)
    assert np.ptp(found[mine]) > 0.01
    assert_array_equal(found[other], 0.0)


def test_a_wider_strait_lets_more_through_and_less_past(guides: SimpleNamespace) -> None:
    network = coast_past_a_mouth(guides, StepKind.STRAIT, 12e3)
    mode = guides.uniform(network, 2.5)
    enters = gap_logs(network, mode, np.array([15]), OMEGA, 4e3)["straits"]
    passes = gap_logs(network, mode, np.arange(15), OMEGA, 4e3)["straits"]
    assert np.all(np.diff(enters) > 0.0)
    assert np.all(np.diff(passes) < 0.0)


def test_without_gaps_or_errors_nothing_changes(guides: SimpleNamespace) -> None:
    network = coast_past_a_mouth(guides, StepKind.STRAIT, 12e3)
    mode = guides.uniform(network, 2.5)
    for steps, error in ((np.arange(5), 4e3), (np.arange(15), 0.0)):
        for logs in gap_logs(network, mode, steps, OMEGA, error).values():
            assert_array_equal(logs, 0.0)
