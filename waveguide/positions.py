"""Whether positions lie where a signal can be looked for."""

from __future__ import annotations

import numpy as np

from waveguide.errors import InputError
from waveguide.network.attach import distance_to_water
from waveguide.ocean.bathymetry import packaged_bathymetry

FAR_INLAND = 50e3
"""Positions farther from the sea than this are refused (m)."""


def check_places(places: list[tuple[str, tuple[float, float]]]) -> None:
    """Refuse positions far inland.

    Parameters
    ----------
    places : list of (name, (lon, lat))
        What a person calls each, and degrees.

    Raises
    ------
    InputError
        Naming every such position, and the swapped one where that is at sea.
    """
    problems = [problem for name, place in places if (problem := _inland(name, *place))]
    if problems:
        raise InputError(problems)


def _inland(name: str, lon: float, lat: float) -> str:
    """What is wrong with a position, or nothing."""
    away = distance_to_water(lon, lat, packaged_bathymetry(), 4.0 * FAR_INLAND)
    if away <= FAR_INLAND:
        return ""
    far = f"{away / 1e3:.0f} km" if np.isfinite(away) else f"over {4 * FAR_INLAND / 1e3:.0f} km"
    return (
        f"{name}: [{lon:g}, {lat:g}] lies {far} from the sea; positions are [longitude, latitude] "
        f"in degrees, at sea or on a coast, at most {FAR_INLAND / 1e3:.0f} km inland"
        f"{swapped((lon, lat))}"
    )


def swapped(position: tuple[float, float]) -> str:
    """A question, where the position with longitude and latitude exchanged is at sea.

    Parameters
    ----------
    position : (lon, lat)
        Degrees.

    Returns
    -------
    str
        Empty where it is not.
    """
    lon, lat = position
    if abs(lon) > 90.0:
        return ""
    if distance_to_water(lat, lon, packaged_bathymetry(), FAR_INLAND) > FAR_INLAND:
        return ""
    return f" (are longitude and latitude swapped? [{lat:g}, {lon:g}] is at sea)"
