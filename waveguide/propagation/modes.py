"""One mode at the nodes of a network, from an atlas or uniform."""

from __future__ import annotations

import numpy as np

from waveguide.network.atlas import Atlas
from waveguide.network.graph import Network
from waveguide.propagation.losses import ModeAtNodes


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
        mode, atlas.phase_speed[row], atlas.coastal_value[row], atlas.gap_share[row]
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
        With the same coastal value everywhere and no sills.
    """
    return ModeAtNodes(
        mode, np.full(network.size, speed), np.ones(network.size),
        np.ones(network.gap_width.size),
    )
