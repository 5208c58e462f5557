"""One mode at the nodes of a network, from an atlas or uniform."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import BETA_EQUATOR, coriolis
from waveguide.network.atlas import Atlas
from waveguide.network.graph import Network, StepKind

Array = NDArray[np.float64]
Index = NDArray[np.int64]

MATCHING = 2.0
"""Distance from the equator, in L_e, where a coast takes over from a junction."""

BAROTROPIC_MATCHING = 1.0
"""The same for the barotropic mode, whose L_e of 3000 km leaves no room for two."""

HIGHEST_SCALED_FREQUENCY = 3.0
"""ω̂ up to which the wall solution holds."""


@dataclass(frozen=True)
class ModeAtNodes:
    """One mode at the nodes and gaps of a network.

    Attributes
    ----------
    number : int
    speed, coastal_value : ndarray, shape (n,)
        Phase speed (m/s) and F(0,0) (m^-1/2), NaN where the mode does not exist.
    gap_share : ndarray, shape (k,)
        Share of the mode that clears the sill of each gap.
    decay_per_drag : ndarray, shape (n,)
        Decay by bottom friction per metre and unit linear drag (s/m²).
    """

    number: int
    speed: Array
    coastal_value: Array
    gap_share: Array
    decay_per_drag: Array

    @property
    def matching(self) -> float:
        """Distance from the equator where a coast takes over, in L_e."""
        return MATCHING if self.number > 0 else BAROTROPIC_MATCHING


SHELF_DEPTH = 100.0
"""Depth (m) that stands for the shelf where bottom friction acts, half a shelf break (chosen)."""


def arrested_share(drag: float, omega: float) -> float:
    """Share of the first-order bottom friction that is left where friction is fast.

    Brink & Allen's decay takes the currents of the wave without friction, which needs r/(ωh) ≪ 1.
    Under a wave of momentum balance (−iω + r/h) v = …, currents over a depth h fall by
    1/|1 + i r/(ωh)| and what they dissipate by 1/(1 + (r/ωh)²): water in which friction is faster
    than the wave is at rest and rubs nothing off. With h = `SHELF_DEPTH` this is no more than an
    order of magnitude; at 10 days and r = 5e-4 m/s it is 0.68, at 60 days 0.06.

    Parameters
    ----------
    drag : float
        r (m/s).
    omega : float
        Angular frequency (rad/s), > 0.

    Returns
    -------
    float
        0 to 1.
    """
    return 1.0 / (1.0 + (drag / (omega * SHELF_DEPTH)) ** 2)


def friction_of_steps(
    network: Network, mode: ModeAtNodes, drag: float, omega: float
) -> Array:
    """Decay by bottom friction along every step (1/m), shape (m,).

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    drag : float
        Coefficient r of the linear bottom stress ρ r v (m/s).
    omega : float
        Dominant angular frequency (rad/s): see `arrested_share`.
    """
    decay = np.nan_to_num(mode.decay_per_drag)
    first_order = drag * 0.5 * (decay[network.tail] + decay[network.head])
    return first_order * arrested_share(drag, omega)


def stretch_lengths(network: Network) -> Array:
    """Length of the equatorial stretch that each step belongs to (m), 0 off the equator."""
    equator = network.kind == StepKind.EQUATOR
    inner = np.where(network.equatorial[network.head], network.head, network.tail)
    line = np.where(equator & network.equatorial[inner], network.line[inner], -1)
    total = np.bincount(line + 1, weights=network.length, minlength=1)
    return np.where(line >= 0, total[line + 1], np.where(equator, network.length, 0.0))


def scaled_distance(network: Network, mode: ModeAtNodes, nodes: Index) -> Array:
    """Distance of nodes from the equator, ŷ = |f|/√(βc).

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    nodes : ndarray of int, shape (k,)

    Returns
    -------
    ndarray, shape (k,)
    """
    c = known_speed(mode)[nodes]
    return np.asarray(np.abs(coriolis(network.lat[nodes])) / np.sqrt(BETA_EQUATOR * c))


def poleward_nodes(network: Network) -> NDArray[np.bool_]:
    """Coast nodes from which the signal travels towards the pole: an eastern boundary."""
    coast = network.kind == StepKind.COAST
    tail, head = network.tail[coast], network.head[coast]
    poleward = np.zeros(network.size, dtype=bool)
    poleward[tail] = np.abs(network.lat[head]) > np.abs(network.lat[tail])
    return poleward


def known_speed(mode: ModeAtNodes) -> Array:
    """Phase speed at nodes (m/s), 1 where the mode does not exist, so that arrays stay finite."""
    return np.where(np.isfinite(mode.speed), mode.speed, 1.0)


def atlas_mode(atlas: Atlas, mode: int) -> ModeAtNodes:
    """A mode of an atlas.

    Parameters
    ----------
    atlas : Atlas
    mode : int
        A mode that the atlas holds.

    Returns
    -------
    ModeAtNodes
    """
    row = atlas.row(mode)
    return ModeAtNodes(
        mode, atlas.phase_speed[row], atlas.coastal_value[row], atlas.gap_share[row],
        atlas.decay_per_drag[row],
    )


def uniform_mode(network: Network, mode: int, speed: float) -> ModeAtNodes:
    """A mode with one phase speed (m/s) everywhere, for idealised work.

    Parameters
    ----------
    network : Network
    mode : int
    speed : float
        m/s.

    Returns
    -------
    ModeAtNodes
        With the same coastal value everywhere, no sills and no bottom friction.
    """
    return ModeAtNodes(
        mode, np.full(network.size, speed), np.ones(network.size),
        np.ones(network.gap_width.size), np.zeros(network.size),
    )
