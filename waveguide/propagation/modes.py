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
    detuning : ndarray, shape (n,)
        Difference of slowness 1/c to that of the neighbouring mode (s/m); infinite without one.
    depth : ndarray, shape (n,)
        Of the adjoining deep water (m).
    dispersion, barotropic_tail : ndarray, shape (n,)
        d (s²) and b of :func:`waveguide.modes.modeset.low_frequency_wavenumber`.
    """

    number: int
    speed: Array
    coastal_value: Array
    gap_share: Array
    decay_per_drag: Array
    detuning: Array
    depth: Array
    dispersion: Array
    barotropic_tail: Array

    @property
    def matching(self) -> float:
        """Distance from the equator where a coast takes over, in L_e."""
        return MATCHING if self.number > 0 else BAROTROPIC_MATCHING


def friction_of_steps(network: Network, mode: ModeAtNodes, drag: float) -> Array:
    """Decay by bottom friction along every step (1/m), shape (m,).

    To first order, from the currents of the mode without friction (Brink & Allen), at every
    frequency. Twelve modes coupled by the whole friction of sections keep to it within a factor of
    two in four cases of five, at 5 to 40 days alike (tests/oracle/test_oracle_coupled.py): first
    sea level at the coast falls faster, by a quarter within 0.05 nepers, as water of a few metres
    comes to rest; after some nepers modes that last longer hold it up.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    drag : float
        Coefficient r of the linear bottom stress ρ r v (m/s).

    References
    ----------
    Brink & Allen (1978), J. Phys. Oceanogr. 8, 1008.
    """
    decay = np.nan_to_num(mode.decay_per_drag)
    return np.asarray(drag * 0.5 * (decay[network.tail] + decay[network.head]))


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
        atlas.decay_per_drag[row], _detuning(atlas, mode), atlas.depth, atlas.dispersion[row],
        atlas.barotropic_tail[row],
    )


def _detuning(atlas: Atlas, mode: int) -> Array:
    """Difference of slowness to the next slower mode, for the slowest to the one before it.

    Over a flat bottom with constant N slowness rises in equal steps.
    """
    others = [other for other in (mode + 1, mode - 1) if other in atlas.mode and other > 0]
    row = atlas.row(mode)
    if mode == 0 or not others:
        return np.full(atlas.phase_speed.shape[1], np.inf)
    slowness = 1.0 / atlas.phase_speed[[row, atlas.row(others[0])]]
    return np.asarray(np.nan_to_num(np.abs(slowness[1] - slowness[0]), nan=np.inf))


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
        With the same coastal value everywhere, no sills, no bottom friction and no dispersion.
    """
    return ModeAtNodes(
        mode, np.full(network.size, speed), np.ones(network.size),
        np.ones(network.gap_width.size), np.zeros(network.size), np.full(network.size, np.inf),
        np.full(network.size, np.inf), np.zeros(network.size), np.zeros(network.size),
    )
