"""Too slow to have a speed, too fast for the theory: the limits of frequency along a route.

Where a coast leads poleward and the frequency is below c|Γ| (see
:mod:`waveguide.propagation.dispersion`), energy leaves as long Rossby waves, the phase speed is
infinite and sea level rises along the coast almost at once. A leg of which more than half, by
length, is such is called quasi-simultaneous: its travel time divided into its length is no speed.

At the other end long coastal waves need ω ≪ |f|; their relative error is about ω²/f².

References
----------
Clarke & Shi (1991), J. Geophys. Res. 96, 10731.
Grimshaw & Allen (1988), J. Phys. Oceanogr. 18, 1124.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import coriolis
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.cautions import FASTEST_SHARE_OF_F
from waveguide.propagation.dispersion import critical_frequency
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.near_equator import floored_coriolis
from waveguide.propagation.step_response import step_speeds

Array = NDArray[np.float64]
Index = NDArray[np.int64]


class Criticality(NamedTuple):
    """Critical periods of a leg.

    Attributes
    ----------
    shortest, longest : float
        Critical period (s) that 5 % and 95 % of the poleward part of the leg, by length, stay
        below; NaN where no part of it leads poleward along a coast.
    share : float
        Share of the leg's length that lies below the critical frequency.
    """

    shortest: float
    longest: float
    share: float

    @property
    def typical(self) -> float:
        """Geometric mean of the shortest and the longest (s)."""
        return float(np.sqrt(self.shortest * self.longest))

    @property
    def quasi_simultaneous(self) -> bool:
        """Whether sea level rises along most of the leg almost at once."""
        return self.share > 0.5


def leg_criticality(
    network: Network, mode: ModeAtNodes, steps: Index, omega: float
) -> Criticality:
    """Critical periods of the steps of a leg.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    steps : ndarray of int, shape (k,)
    omega : float
        Dominant angular frequency of the signal (rad/s).

    Returns
    -------
    Criticality
    """
    first, last = (
        np.abs(coriolis(network.lat[node[steps]])) for node in (network.tail, network.head)
    )
    poleward = (network.kind[steps] == StepKind.COAST) & (last > first)
    if not poleward.any():
        return Criticality(np.nan, np.nan, 0.0)
    whole = network.length[steps].sum()
    steps, first, last = steps[poleward], first[poleward], last[poleward]
    length = network.length[steps]
    gamma = (last - first) / ((last + first) * length)
    limit = critical_frequency(step_speeds(network, mode, steps)[0], gamma)
    shortest, longest = _weighted_quantiles(2.0 * np.pi / limit, length, (0.05, 0.95))
    return Criticality(shortest, longest, float(length[omega < limit].sum() / whole))


def fast_share(
    network: Network, mode: ModeAtNodes, steps: Index, omega: Array, power: Array
) -> float:
    """Share of the source's energy that is too fast for the theory somewhere along a route.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    steps : ndarray of int, shape (k,)
    omega, power : ndarray, shape (nω,)
        Frequencies (rad/s) and energy spectrum of the source.

    Returns
    -------
    float
        Of energy at ω > 0.3 |f|, with the smallest |f| of the coasts of the route; |f| counts no
        less than at the matching distance, within which the equatorial solution holds.
    """
    coast = steps[network.kind[steps] == StepKind.COAST]
    if not coast.size:
        return 0.0
    speed = step_speeds(network, mode, coast)[0]
    f = floored_coriolis(network.lat[network.tail[coast]], speed, mode.matching)
    return float(power[omega > FASTEST_SHARE_OF_F * f.min()].sum() / power.sum())


def _weighted_quantiles(
    values: Array, weight: Array, shares: tuple[float, float]
) -> tuple[float, float]:
    """Values below which given shares of the weight lie."""
    order = np.argsort(values)
    middle = np.cumsum(weight[order]) - 0.5 * weight[order]
    low, high = np.interp(shares, middle / weight.sum(), values[order])
    return float(low), float(high)
