"""What an error in the width of straits and facing coasts does to the amplitude of a route.

The losses of the steps that enter a gap or pass one are computed for widths times exp(ξσ), with σ
the error of the width over the width itself. All gaps of a route are too wide or too narrow
together (a cautious choice: independent ones would partly cancel). Their lags are left out; they
are hours.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from waveguide.network.graph import Network, StepKind
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.near_equator import network_wall_table
from waveguide.propagation.step_response import step_response

Array = NDArray[np.float64]
Index = NDArray[np.int64]

GRID = np.linspace(-3.0, 3.0, 7)
"""Errors, in standard deviations, for which the losses are computed."""

GAPS = ("straits", "facing coasts")
"""The two kinds of gaps; openings count with the facing coasts."""

_WIDEST_ERROR = 0.7  # of ln width: a strait of a few kilometres may be a third as wide, or thrice


def gap_logs(
    network: Network, mode: ModeAtNodes, steps: Index, omega: float, error: float
) -> dict[str, Array]:
    """Change of ln amplitude of a route with the error of widths at `GRID`.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    steps : ndarray of int, shape (k,)
    omega : float
        Dominant angular frequency (rad/s).
    error : float
        Standard deviation of a width (m).

    Returns
    -------
    dict of ndarray, shape (7,)
        For each of `GAPS`, zero in the middle.
    """
    at = steps[(network.gap[steps] >= 0) | (network.passes[steps] >= 0)]
    if not at.size or error == 0.0:
        return {name: np.zeros(GRID.size) for name in GAPS}
    frequency = np.array([omega])
    ends = np.append(network.tail[at], network.head[at])
    table = network_wall_table(network, mode, frequency, ends)
    sigma = np.minimum(error / network.gap_width, _WIDEST_ERROR)
    kept = np.array([
        -step_response(_widened(network, sigma * x), mode, at, frequency, table)
        .nepers.sum(axis=0)[:, 0]
        for x in GRID
    ])
    change = kept - kept[GRID.size // 2]
    strait = _is_strait(network)[np.maximum(network.gap[at], network.passes[at])]
    return {
        name: change[:, kind].sum(axis=1)
        for name, kind in zip(GAPS, (strait, ~strait), strict=True)
    }


def _widened(network: Network, log_factor: Array) -> Network:
    return replace(network, gap_width=network.gap_width * np.exp(log_factor))


def _is_strait(network: Network) -> NDArray[np.bool_]:
    """Whether each gap is a strait, shape (ngap,)."""
    enters = np.flatnonzero(network.gap >= 0)
    result = np.zeros(network.gap_width.size, bool)
    result[network.gap[enters]] = network.kind[enters] == StepKind.STRAIT
    return result
