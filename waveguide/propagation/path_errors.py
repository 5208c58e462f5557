"""How far errors along a path move the time of arrival.

With an error ε(s) of the slowness along the path, normal, with standard deviation σ(s) and
correlation exp(−|s − s′|/L), the error of the travel time ∫(1 + ε) ds/c is normal too, with

    variance = Σᵢ Σⱼ aᵢ aⱼ exp(−|sᵢ − sⱼ|/L),   aᵢ = σᵢ τᵢ,

over the steps of the path, τ being their times. The double sum is run through once: the sum over
all earlier steps, b, obeys bᵢ = (bᵢ₋₁ + aᵢ₋₁) exp(−(sᵢ − sᵢ₋₁)/L).
"""

from __future__ import annotations

from dataclasses import fields
from itertools import accumulate

import numpy as np
from numpy.typing import NDArray

from waveguide.network.graph import Network
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.priors import PATH_INPUTS, Prior, Priors, step_errors
from waveguide.propagation.step_response import STILL, Conditions, step_speeds

Array = NDArray[np.float64]
Index = NDArray[np.int64]


def correlated_sum(size: Array, length: Array, scale: float) -> float:
    """Standard deviation of a sum of errors that are correlated along the path.

    Parameters
    ----------
    size : ndarray, shape (k,)
        Standard deviation of each term, in order of the path.
    length : ndarray, shape (k,)
        Length of the step of each term (m).
    scale : float
        Correlation length (m), > 0.

    Returns
    -------
    float
        In the unit of `size`.

    Examples
    --------
    >>> errors, steps = np.full(4, 0.5), np.full(4, 10.0)
    >>> print(f"{correlated_sum(errors, steps, 1e9):.3f} {correlated_sum(errors, steps, 1e-9):.3f}")
    2.000 1.000
    """
    if not size.size:
        return 0.0
    apart = np.exp(-0.5 * (length[1:] + length[:-1]) / scale)
    pairs = zip(size[:-1].tolist(), apart.tolist(), strict=True)
    earlier = np.array(list(accumulate(pairs, lambda b, p: (b + p[0]) * p[1], initial=0.0)))
    return float(np.sqrt(np.sum(size * (size + 2.0 * earlier))))


def relative_delays(
    network: Network, mode: ModeAtNodes, steps: Index, priors: Priors,
    conditions: Conditions = STILL,
) -> dict[str, float]:
    """Standard deviation of the travel time of a path, as a share of it, by input.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    steps : ndarray of int, shape (k,)
        In order of travel.
    priors : Priors
    conditions : Conditions

    Returns
    -------
    dict of str to float
        For each of `PATH_INPUTS`; zero for a path without steps.
    """
    if not steps.size:
        return dict.fromkeys(PATH_INPUTS, 0.0)
    speed = step_speeds(network, mode, steps, conditions)[1]
    length = network.length[steps]
    time = length / speed
    errors = step_errors(network, mode.number, speed, steps, priors)
    return {
        name: correlated_sum(errors[name] * time, length, scale) / float(time.sum())
        for name, scale in _scales(priors).items()
    }


def _scales(priors: Priors) -> dict[str, float]:
    """Correlation length of each of `PATH_INPUTS` (m)."""
    along = [getattr(priors, field.name) for field in fields(priors)]
    return dict(zip(PATH_INPUTS, (p.length for p in along if isinstance(p, Prior)), strict=True))
