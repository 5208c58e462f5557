"""What the wind over each step does at a target, at every frequency.

The weight of a step, F² ds/(ρ₀ g) · (P_target/P) e^(−n + iφ), has losses n, lags φ and potentials P
that change with frequency (:mod:`waveguide.propagation.step_response`): below the critical
frequency a coast responds almost at once and nearly alike all along, and a junction passes less.
They are computed at some frequencies and interpolated between them in the logarithm of frequency:
modulus by its logarithm, lag by what it differs from ω times the delay of the long wave.

In a closed equatorial basin (tests/analytic/test_forced_basin.py) a burst of zonal wind then
raises the eastern coast as a shallow-water integration has it, within 2 % of the peak and 0.3 days
from the equator to 18° N; with losses of one dominant period it is up to a third off.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import GRAVITY, REFERENCE_DENSITY
from waveguide.forcing.influence import Influence, lifted_near_equator
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.near_equator import network_wall_table, potential
from waveguide.propagation.step_response import (
    Conditions,
    step_response,
    step_speeds,
)

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Index = NDArray[np.int64]

_NOTHING = 1e-12  # stands for a potential of zero

PER_DECADE = 30
"""Frequencies at which weights are computed."""


@dataclass(frozen=True)
class WindTransfer:
    """Weights and gains of all that lies upstream of a target.

    Attributes
    ----------
    omega : ndarray, shape (nω,)
        Angular frequency (rad/s), rising.
    row : ndarray of int, shape (k,)
        Rows of the influence on which wind counts.
    sign : ndarray, shape (k,)
        1, or −1 where F has another sign than at the target.
    log_weight, lag : ndarray, shape (k, nω)
        ln of sea level at the target per stress (m/Pa); lag beyond ω × `delay` (rad).
    delay : ndarray, shape (k,)
        Of the long wave (s).
    gain_sign : ndarray, shape (n,)
    log_gain, gain_lag : ndarray, shape (n, nω)
        For every row of the influence, ln of sea level at the target over that at the end of the
        step, and its lag beyond ω × its head_delay (rad).
    """

    omega: Array
    row: Index
    sign: Array
    log_weight: Array
    lag: Array
    delay: Array
    gain_sign: Array
    log_gain: Array
    gain_lag: Array

    def seen_from(self, downstream: Index, influence: Influence) -> WindTransfer:
        """The weights for the ends of other steps, shape (k,), in place of the target."""
        return replace(
            self,
            sign=self.sign * self.gain_sign[downstream],
            log_weight=self.log_weight - self.log_gain[downstream],
            lag=self.lag - self.gain_lag[downstream],
            delay=self.delay - influence.head_delay[downstream],
        )


def transfer_frequencies(step: float, count: int) -> Array:
    """Frequencies that cover those of a series, equidistant in their logarithm.

    Parameters
    ----------
    step : float
        Interval of time (s).
    count : int
        Number of times.

    Returns
    -------
    ndarray, shape (nω,)
        rad/s.
    """
    lowest, highest = 2.0 * np.pi / (step * count), np.pi / step
    number = int(np.ceil(PER_DECADE * np.log10(highest / lowest))) + 1
    return np.geomspace(lowest, highest, max(number, 2))


@dataclass(frozen=True)
class Place:
    """Where on the guide a target is.

    Attributes
    ----------
    node : int
        Node it is tied to.
    factor : float
        Share of the node's amplitude that it feels.
    beyond : float
        Time of the long wave from the node to it (s); negative upstream.
    """

    node: int
    factor: float
    beyond: float = 0.0


def wind_transfer(
    network: Network, mode: ModeAtNodes, conditions: Conditions, influence: Influence,
    place: Place, windy: NDArray[np.bool_], omega: Array,
) -> WindTransfer:
    """Weights at many frequencies.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    conditions : Conditions
        Friction and damping.
    influence : Influence
        Which steps lie upstream, and by which way.
    place : Place
        The target.
    windy : ndarray of bool, shape (n,)
        Rows of `influence` whose wind is wanted.
    omega : ndarray, shape (nω,)
        rad/s, > 0.

    Returns
    -------
    WindTransfer
    """
    steps = influence.step
    nodes = np.unique(np.concatenate([[place.node], network.tail[steps], network.head[steps]]))
    table = network_wall_table(network, mode, omega, nodes)
    response = step_response(network, mode, steps, omega, table, conditions)
    exponent = 1j * response.lag - response.nepers.sum(axis=0)
    at_head = _gathered(influence, exponent) + 1j * omega * place.beyond
    log_potential = np.log(np.maximum(np.abs(potential(network, mode, nodes, table)), _NOTHING))
    target = log_potential[np.searchsorted(nodes, place.node)] + np.log(place.factor)
    head = log_potential[np.searchsorted(nodes, network.head[steps])]
    row = np.nonzero(windy & (influence.weight != 0.0))[0]
    value = mode.coastal_value
    weight = at_head[row] + target + _increments(
        network, mode, steps[row], exponent[row], nodes, log_potential, omega
    )
    return WindTransfer(
        omega, row, np.sign(influence.weight[row]), weight.real,
        weight.imag - omega * influence.delay[row, None], influence.delay[row],
        np.sign(value[place.node] * value[network.head[steps]]),
        at_head.real + target - head,
        at_head.imag - omega * influence.head_delay[:, None],
    )


def group_delays(transfer: WindTransfer, influence: Influence, omega: float) -> Influence:
    """The influence with delays of the energy at a frequency in place of those of the long wave.

    Parameters
    ----------
    transfer : WindTransfer
    influence : Influence
    omega : float
        rad/s.

    Returns
    -------
    Influence
        Delays are the slope of the lag between two thirds and one and a half times `omega`, from
        nothing to that of the long wave.
    """
    ends = np.clip([omega / 1.5, omega * 1.5], transfer.omega[0], transfer.omega[-1])
    lag = [
        np.array([np.interp(end, transfer.omega, row) for row in transfer.gain_lag])
        for end in ends
    ]
    slope = (lag[1] - lag[0]) / max(ends[1] - ends[0], 1e-30)
    head = np.clip(influence.head_delay + slope, 0.0, influence.head_delay)
    return replace(
        influence, head_delay=head, delay=head + influence.delay - influence.head_delay
    )


def _gathered(influence: Influence, exponent: ComplexArray) -> ComplexArray:
    """Exponents from the end of every step to the node of the target."""
    total = np.zeros_like(exponent)
    for row, parent in enumerate(influence.parent.tolist()):
        if parent >= 0:
            total[row] = total[parent] + exponent[parent]
    return total


def _increments(
    network: Network, mode: ModeAtNodes, steps: Index, exponent: ComplexArray, nodes: Index,
    log_potential: Array, omega: Array,
) -> ComplexArray:
    """Logarithm of what a stress of 1 Pa over each step adds to η/P at its end.

    As :func:`waveguide.forcing.influence.step_increment` has it at one frequency.
    """
    tail, head = network.tail[steps], network.head[steps]
    here = [np.searchsorted(nodes, ends) for ends in (tail, head)]
    lift = np.log(lifted_near_equator(network, mode))
    coast = network.kind[steps] == StepKind.COAST
    value = mode.coastal_value
    flux = np.mean([
        log_potential[at] + (lift[ends] - np.log(np.abs(value[ends])))[:, None]
        for at, ends in zip(here, (tail, head), strict=True)
    ], axis=0)
    middle = np.abs(0.5 * (value[tail] + value[head]))
    along = np.log(middle)[:, None] - flux + 0.5 * exponent
    inner = np.where(network.equatorial[head], here[1], here[0])
    at_equator = np.where(network.equatorial[head], value[head], value[tail])
    half = 0.5j * omega * (network.length[steps] / step_speeds(network, mode, steps)[0])[:, None]
    after = np.where(network.equatorial[tail][:, None], exponent - half, half)
    zonal = np.log(at_equator**2 / np.sqrt(2.0))[:, None] - log_potential[inner] + after
    length = np.log(network.length[steps] / (REFERENCE_DENSITY * GRAVITY))[:, None]
    return np.asarray(np.where(coast[:, None], along, zonal) + length)
