"""Where the energy of a source goes on its way, step by step.

A budget of a leg as a whole (:func:`waveguide.propagation.transfer.leg_budget`) deals out what the
leg takes as if all fates acted side by side along it. In truth an ocean crossed along the equator
loses to friction first and to the junction at its end. So budgets are taken of single steps, and
legs are sums over them.

The energy spectrum of the source is represented by frequencies between which equal shares of its
energy lie; with `FREQUENCIES` of them shares of energy are right to about 0.001.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from waveguide.network.graph import Network
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.near_equator import network_wall_table
from waveguide.propagation.step_response import FATES, STILL, Conditions, step_response
from waveguide.propagation.transfer import LegBudget, Path, energy_budget

Array = NDArray[np.float64]
Index = NDArray[np.int64]

FREQUENCIES = 64
"""How many frequencies stand for the spectrum of a source."""


def equal_energy_frequencies(omega: Array, power: Array, count: int = FREQUENCIES) -> Array:
    """Frequencies in the middle of parts of a spectrum that hold equal shares of its energy.

    Parameters
    ----------
    omega : ndarray, shape (nω,)
        Angular frequency, rising (rad/s).
    power : ndarray, shape (nω,)
        Energy spectrum.
    count : int

    Returns
    -------
    ndarray, shape (min(count, nω),)
        Rising (rad/s).
    """
    count = min(count, omega.size)
    share = power / power.sum()
    return np.interp((np.arange(count) + 0.5) / count, np.cumsum(share) - 0.5 * share, omega)


def step_budgets(
    network: Network, mode: ModeAtNodes, paths: Sequence[Path], omega: Array, power: Array,
    conditions: Conditions = STILL,
) -> list[LegBudget]:
    """Where the energy goes on every step of several paths.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    paths : sequence of Path
    omega, power : ndarray, shape (nω,)
        Frequencies (rad/s) and energy spectrum of the source.
    conditions : Conditions

    Returns
    -------
    list of LegBudget
        One for each path, with its steps in place of legs.
    """
    if not paths:
        return []
    steps, row = np.unique(np.concatenate([path.steps for path in paths]), return_inverse=True)
    frequencies = equal_energy_frequencies(omega, power)
    ends = np.append(network.tail[steps], network.head[steps])
    table = network_wall_table(network, mode, frequencies, ends)
    nepers = step_response(network, mode, steps, frequencies, table, conditions).nepers
    alike = np.ones(frequencies.size)
    bounds = np.cumsum([path.steps.size for path in paths])[:-1]
    return [energy_budget(nepers[:, mine], alike) for mine in np.split(row, bounds)]


def budget_of_legs(steps: LegBudget, leg_ends: Index) -> LegBudget:
    """Sum the budget of steps over legs.

    Parameters
    ----------
    steps : LegBudget
        Of single steps.
    leg_ends : ndarray of int, shape (legs,)
        Number of steps up to the end of each leg.

    Returns
    -------
    LegBudget
    """
    taken = taken_up_to(steps)[leg_ends]
    arrives = np.concatenate([[1.0], steps.arrives])[leg_ends]
    return LegBudget(arrives, np.diff(taken, axis=0, prepend=np.zeros((1, len(FATES)))))


def taken_up_to(steps: LegBudget) -> Array:
    """Energy taken between the source and every node of a path.

    Parameters
    ----------
    steps : LegBudget
        Of single steps.

    Returns
    -------
    ndarray, shape (steps + 1, 5)
        Shares of the source's energy by fate, in the order of `FATES`.
    """
    return np.concatenate([np.zeros((1, len(FATES))), np.cumsum(steps.taken, axis=0)])
