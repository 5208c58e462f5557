"""Where the theory behind one answer is out of its depth, in words with numbers."""

from __future__ import annotations

import numpy as np

from waveguide.constants import SECONDS_PER_DAY
from waveguide.network.attach import Ties
from waveguide.propagation.routes import Route
from waveguide.propagation.validity import UPPER_OCEAN, Validity

FASTEST_SHARE_OF_F = 0.3
"""ω/|f| above which a wave is not "low-frequency": the error of the long-wave limit is ω²/f²."""

SHARPEST_COAST = 1.0
"""Radius of curvature in R below which a coast is not straight for the wave."""

NARROWEST_BASIN = 3.0
"""Width in R below which the other shore is felt: there e^(−3) = 5 % of the amplitude is left."""

LARGEST_CHANGE = 1.0 / 3.0
"""Change of ln c over one wavelength/2π above which it is not slow."""

RESOLVED_STRAIT = 20e3
"""Straits narrower than two cells of the 0.1° bathymetry are not resolved by it (m)."""

UPPER_SHARE = 0.15
"""Share of c₁ from the upper ocean above which the season matters (our choice: if seasons change
N there by a third, c₁ changes by a twentieth)."""

FAINT = 0.01
NORTHERN_ICE, SOUTHERN_ICE = 65.0, -60.0
"""Latitudes poleward of which sea ice is common in winter (MEMORY)."""


def route_cautions(
    validity: Validity, omega: float, route: Route, source: Ties, target: Ties
) -> list[str]:
    """Cautions that belong to one target and mode.

    Parameters
    ----------
    validity : Validity
        Of the route.
    omega : float
        Dominant angular frequency (rad/s).
    route : Route
    source, target : Ties

    Returns
    -------
    list of str
    """
    days = 2.0 * np.pi / omega / SECONDS_PER_DAY
    icy = _icy(validity)
    found = [
        (validity.frequency_over_f > FASTEST_SHARE_OF_F,
         f"ω/|f| reaches {validity.frequency_over_f:.2f} on the route: the wave is not slow beside "
         "the earth's rotation"),
        (validity.critical_share >= 0.1,
         f"{100 * validity.critical_share:.0f} % of the coastal way is below the critical "
         f"frequency at {days:g} days: sea level rises there almost at once, fed from the equator, "
         "and leaks Rossby waves"),
        (validity.coast_radius < SHARPEST_COAST,
         f"the coast bends within {validity.coast_radius:.1f} R on a twentieth of the way: bends "
         "shift the phase"),
        (validity.basin_width < NARROWEST_BASIN,
         f"the water beside the coast is {validity.basin_width:.1f} R wide on a twentieth of the "
         "way: the other shore is felt"),
        (validity.speed_change > LARGEST_CHANGE,
         f"the phase speed changes by {100 * validity.speed_change:.0f} % over a wavelength/2π: it "
         "does not vary slowly, and some of the wave is reflected or scattered"),
        (validity.narrowest_strait < RESOLVED_STRAIT,
         f"a strait {validity.narrowest_strait / 1e3:.0f} km wide on the route is not resolved by "
         "the 0.1° bathymetry"),
        (bool(icy), f"the route reaches {icy}: sea ice is not accounted for"),
        (validity.upper_share > UPPER_SHARE,
         f"{100 * validity.upper_share:.0f} % of the speed comes from the upper {UPPER_OCEAN:.0f} "
         "m, and the stratification is that of the annual mean, whatever the season"),
        (route.amplitude < FAINT,
         f"amplitude ratio {route.amplitude:.2g}: too faint to be told from noise"),
    ]  # fmt: skip
    told = [text for raised, text in found if raised]
    ends = [_tied("source", source, route.start), _tied("target", target, route.end)]
    return told + [text for text in ends if text]


def _icy(validity: Validity) -> str:
    """The latitude that a route reaches where there is ice in winter, or nothing."""
    if validity.northernmost > NORTHERN_ICE:
        return f"{validity.northernmost:.0f}°N"
    if validity.southernmost < SOUTHERN_ICE:
        return f"{-validity.southernmost:.0f}°S"
    return ""


def _tied(what: str, ties: Ties, at: int) -> str:
    kilometres, radii = ties.distance[at] / 1e3, ties.radii[at]
    if ties.inshore[at] and radii > 1.0:
        return (
            f"{what} {kilometres:.0f} km shoreward of the guide ({radii:.1f} R): the signal on the "
            "shelf is taken as that at the shelf edge"
        )
    if not ties.inshore[at] and radii > 1.0:
        return f"{what} {kilometres:.0f} km off the guide ({radii:.1f} R)"
    return ""
