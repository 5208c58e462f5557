"""Straits that charts know and a 0.1° bathymetry closes.

A grid takes the mean depth of a cell, so a channel one cell wide is shallower on it than on a
chart. A strait is added here only if the rule of the effective coast would keep it with its
charted depth: it must be deeper than the sill depth of its latitude and must not be open or found
as a strait already (as it is on a finer grid). All others stay as the grid has them.

Widths and depths are rounded from charts and the papers named (flag MEMORY, ± 10 %).

References
----------
Armi & Farmer (1988), Prog. Oceanogr. 21, 1 (Gibraltar: sill of 284 m at Camarinal, narrowest
14 km at Tarifa).
Werner & Lange (1975), Geol. Jahrb. D 13, 125 (Bab el Mandeb: sill of 137 m off Hanish).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from waveguide.coast.effective import CoastRule, EffectiveCoast, is_water
from waveguide.coast.gaps import Strait, strait_along
from waveguide.geodesy import arc, unit_vectors

SAME_MOUTH = 60e3
"""A strait of the grid with both ends this close to the charted ones is the same (m)."""


@dataclass(frozen=True)
class ChartedStrait:
    """A strait on the chart.

    Attributes
    ----------
    name : str
    lon, lat : tuple of float
        Middle of the strait from mouth to mouth, degrees.
    width : tuple of float
        Width there (m).
    sill_depth : float
        Greatest depth that the whole strait offers (m).
    """

    name: str
    lon: tuple[float, ...]
    lat: tuple[float, ...]
    width: tuple[float, ...]
    sill_depth: float


CHARTED_STRAITS = (
    ChartedStrait(
        "Strait of Gibraltar",
        lon=(-6.10, -5.75, -5.60, -5.45, -5.20),
        lat=(35.95, 35.92, 35.95, 35.98, 36.05),
        width=(40e3, 22e3, 14e3, 15e3, 24e3),
        sill_depth=284.0,
    ),
    ChartedStrait(
        "Bab el Mandeb",
        lon=(42.20, 42.75, 43.15, 43.35, 43.60),
        lat=(14.60, 13.70, 13.00, 12.65, 12.35),
        width=(110e3, 50e3, 35e3, 20e3, 60e3),
        sill_depth=137.0,
    ),
)


def charted_straits(
    coast: EffectiveCoast, rule: CoastRule, found: list[Strait]
) -> list[Strait]:
    """Straits deep enough for the mode that the grid has closed.

    Parameters
    ----------
    coast : EffectiveCoast
    rule : CoastRule
    found : list of Strait
        Those of the grid.

    Returns
    -------
    list of Strait
    """
    return [
        strait_along(
            np.array(charted.lon), np.array(charted.lat), np.array(charted.width),
            charted.sill_depth,
        )
        for charted in CHARTED_STRAITS
        if charted.sill_depth > np.interp(np.mean(charted.lat), rule.lat, rule.sill_depth)
        and not _is_open(coast, charted)
        and not any(_same(charted, strait) for strait in found)
    ]


def _is_open(coast: EffectiveCoast, charted: ChartedStrait) -> bool:
    """Whether the effective ocean reaches through the strait."""
    return bool(is_water(coast, np.array(charted.lon), np.array(charted.lat)).all())


def _same(charted: ChartedStrait, strait: Strait) -> bool:
    """Whether a strait has the ends of the charted one."""
    ours = unit_vectors([charted.lon[0], charted.lon[-1]], [charted.lat[0], charted.lat[-1]])
    theirs = unit_vectors(strait.lon[[0, -1]], strait.lat[[0, -1]])
    apart = [
        float(arc(np.linalg.norm(ours - way, axis=1)).max()) for way in (theirs, theirs[::-1])
    ]
    return min(apart) < SAME_MOUTH
