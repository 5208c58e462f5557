"""How far a wave goes before its mode takes the shape of the local section.

The long waves of a coast obey p_s = (iω/|f|) B⁻¹K p (:mod:`waveguide.modes.trapped`) with pressure
labelled by the depth of the boundary, so that B is the same on every section and only K changes
along the coast. Where K changes, mode n hands on to the others: with modes orthonormal in B,

    ∂s φ_m = i k_m φ_m − Σ C_mn φ_n,   C_mn = ∫ F_m ∂s F_n dh,   k_m = ω/c_m.

To first order in C, sea level at the coast per unit φ_n is, with ∂s F_n(0,0) = Σ_m F_m C_mn and
one difference k for all k_m − k_n,

    F_n(s) − ∫ ∂s F_n e^(ik(s − s')) ds' = −ik ∫ F_n(s') e^(ik(s − s')) ds',

upstream values of the coastal value, averaged over 1/k. So

- where F changes over less than 1/k, what mode n hands on keeps step with it, and their sum goes
  on as it was: as ω → 0 pressure is uniform along every isobath and the coast (J(p, h) = 0);
- only where it changes over more than 1/k is the wave a mode of the local section.

1/k = 1/(ω |1/c_{n+1} − 1/c_n|) is 400 km at 10 days and 1300 km at a month off California, where F
of mode 1 goes up and down fourfold within 300 km. Here F is averaged over 1/k at the dominant
frequency, on both sides alike: the kernels of many modes m dephase, which leaves a decay in place
of the oscillation, and a network has no upstream of its own. On a line it is exp(−|s|/L)/2L with
L = 1/k; at junctions and straits it branches, as −∇·(L²∇F) + F on the network.

Against twelve modes coupled along five coasts by the sections alone, bottom friction and all
(tests/oracle/test_oracle_coupled.py), sea level so told is within a factor of 1.31 in the median;
with the local F it is off by 1.60, and by 3 to either side of a wide shelf. One F for all of a
coast does as well there (1.25): over these 1000 to 1600 km nothing changes over more than 1/k. The
kernel of upstream values alone has 1.37, and is a little better without friction; the symmetric one
is kept because it needs no path.

The barotropic mode has its slow neighbours at 1/k of 350 km at 10 days, and changes over longer
distances: its coastal value is left as it is.

References
----------
Wilkin & Chapman (1987), J. Phys. Oceanogr. 17, 713 (shelf waves scattered where sections
change; MEMORY: not read for this).
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csc_array, diags_array
from scipy.sparse.linalg import splu

from waveguide.constants import EARTH_RADIUS
from waveguide.network.graph import Network
from waveguide.propagation.modes import ModeAtNodes

Array = NDArray[np.float64]

LONGEST = 2.0 * np.pi * EARTH_RADIUS
"""Longest distance averaged over (m): farther than round the earth there is nothing."""


def adapted(network: Network, mode: ModeAtNodes, omega: float) -> ModeAtNodes:
    """A mode with the coastal values that a wave of one frequency takes up.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    omega : float
        Angular frequency (rad/s), > 0.

    Returns
    -------
    ModeAtNodes
        With F averaged along the network over `adaptation_length`.
    """
    length = adaptation_length(mode, omega)
    if not np.any(length > 0.0):
        return mode
    return replace(mode, coastal_value=averaged(network, mode.coastal_value, length))


def adaptation_length(mode: ModeAtNodes, omega: float) -> Array:
    """Distance in which a mode gets out of step with its neighbour by one radian, 1/k.

    Parameters
    ----------
    mode : ModeAtNodes
    omega : float
        Angular frequency (rad/s), > 0.

    Returns
    -------
    ndarray, shape (n,)
        Metres, at most `LONGEST`; 0 for modes without neighbours.
    """
    with np.errstate(divide="ignore"):
        return np.minimum(1.0 / (omega * mode.detuning), LONGEST)


def averaged(network: Network, values: Array, length: Array) -> Array:
    """Values at nodes averaged along the network over distances.

    Parameters
    ----------
    network : Network
    values : ndarray, shape (n,)
        NaN where there are none: nothing is averaged across such nodes.
    length : ndarray, shape (n,)
        Distance L (m).

    Returns
    -------
    ndarray, shape (n,)
        Solution of −∂s(L² ∂s v) + v = values. On a line with one L it is the mean with weight
        exp(−|s|/L)/2L; constant values stay as they are.
    """
    tail, head = network.tail, network.head
    known = np.isfinite(values)
    joined = known[tail] & known[head] & (network.length > 0.0)
    tail, head, distance = tail[joined], head[joined], network.length[joined]
    span = np.bincount(np.concatenate([tail, head]), np.tile(0.5 * distance, 2), network.size)
    alone = span == 0.0
    span[alone] = 1.0
    pull = (0.5 * (length[tail] + length[head])) ** 2 / distance
    rows, columns = np.concatenate([tail, head]), np.concatenate([head, tail])
    size = (network.size, network.size)
    between = csc_array((np.tile(pull, 2), (rows, columns)), shape=size)
    system = diags_array(span + between.sum(axis=0)) - between
    mean = splu(csc_array(system)).solve(span * np.where(known, values, 0.0))
    return np.where(known, mean, np.nan)
