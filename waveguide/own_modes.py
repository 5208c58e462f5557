"""The modes of the ocean that a scenario describes by a person's own files."""

from __future__ import annotations

from waveguide.network.atlas import Atlas
from waveguide.network.own import own_atlas
from waveguide.network.packaged import family_of
from waveguide.scenario import Ocean


def own_modes(ocean: Ocean, mode: int) -> Atlas:
    """The atlas that a mode is in, from the files a person names.

    Parameters
    ----------
    ocean : Ocean
        Whose source is "own files".
    mode : int

    Returns
    -------
    Atlas
    """
    return own_atlas(
        family_of(mode), ocean.bathymetry, ocean.climatology, ocean.temperature, ocean.atlas
    )
