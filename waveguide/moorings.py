"""What the targets of a scenario that are moorings see at depth."""

from __future__ import annotations

from typing import TYPE_CHECKING

from waveguide.network.packaged import family_of
from waveguide.network.trapped_store import packaged_guide
from waveguide.ocean.bathymetry import packaged_bathymetry, read_bathymetry
from waveguide.ocean.stratification import packaged_climatology
from waveguide.propagation.moorings import (
    UNIFORM,
    MooringAnswer,
    Water,
    mooring_answer,
    no_structure,
    section_rank,
)

if TYPE_CHECKING:
    from waveguide.network.graph import Network
    from waveguide.propagation.arrivals import Arrival
    from waveguide.propagation.modes import ModeAtNodes
    from waveguide.scenario import Scenario


def mooring_views(
    scenario: Scenario, guides: dict[int, tuple[Network, ModeAtNodes]],
    found: dict[int, list[Arrival]], omega: float,
) -> dict[tuple[int, int], MooringAnswer]:
    """What moorings see of every mode.

    Parameters
    ----------
    scenario : Scenario
    guides : dict of int to (Network, ModeAtNodes)
        By mode.
    found : dict of int to list of Arrival
        By mode, one for each target.
    omega : float
        Dominant angular frequency (rad/s).

    Returns
    -------
    dict of (target, mode) to MooringAnswer
        By the indices of both.
    """
    named = [(t, target) for t, target in enumerate(scenario.targets) if target.depth_m]
    answers = {}
    for column, (number, (network, mode)) in enumerate(guides.items()):
        water = _water(scenario, number)
        for place, target in named:
            if water is None:
                answers[place, column] = no_structure(UNIFORM)
                continue
            distance = None if target.offshore_km is None else 1e3 * target.offshore_km
            answers[place, column] = mooring_answer(
                network, mode, found[number][place], omega, water, distance, target.depth_m
            )
    return answers


def _water(scenario: Scenario, mode: int) -> Water | None:
    """Depths and stratification below the network of a mode, None for a uniform speed."""
    ocean = scenario.ocean
    if ocean.phase_speed_m_s is not None:
        return None
    depths, columns = packaged_bathymetry(), packaged_climatology()
    network, packaged = packaged_guide(family_of(mode))
    if ocean.source == "packaged":
        return Water(depths, columns, packaged.depth, section_rank(network, packaged, mode))
    from waveguide.network.own import own_atlas
    from waveguide.ocean.hydrography import read_climatology

    atlas = own_atlas(family_of(mode), ocean.bathymetry, ocean.climatology, ocean.temperature)
    if ocean.bathymetry is not None:
        depths = read_bathymetry(ocean.bathymetry)
    if ocean.climatology is not None:
        columns = read_climatology(ocean.climatology, temperature=ocean.temperature)
    return Water(depths, columns, atlas.depth, section_rank(network, atlas, mode))
