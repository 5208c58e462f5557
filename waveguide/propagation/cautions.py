"""Where the theory behind one answer is out of its depth, in words with numbers."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import SECONDS_PER_DAY, coriolis
from waveguide.network.attach import Ties
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.equator import equatorial_radius
from waveguide.propagation.losses import critical_share
from waveguide.propagation.modes import ModeAtNodes
from waveguide.propagation.routes import Route

Array = NDArray[np.float64]

FASTEST_SHARE_OF_F = 0.3
"""ω/|f| above which a wave is not "low-frequency": the error of the long-wave limit is ω²/f²."""

RESOLVED_STRAIT = 20e3
"""Straits narrower than two cells of the 0.1° bathymetry are not resolved by it (m)."""

FAINT = 0.01
ICE_LATITUDE = 65.0


def route_cautions(
    network: Network, mode: ModeAtNodes, omega: float, route: Route, source: Ties, target: Ties
) -> list[str]:
    """Cautions that belong to one target and mode.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    omega : float
        Dominant angular frequency (rad/s).
    route : Route
    source, target : Ties

    Returns
    -------
    list of str
    """
    found = [
        _fast(network, mode, omega, route),
        _simultaneous(network, mode, omega, route),
        _unresolved(network, route),
        _icy(network, route),
        _tied("source", source, route.start),
        _tied("target", target, route.end),
    ]
    if route.amplitude < FAINT:
        found.append(f"amplitude ratio {route.amplitude:.2g}: too faint to be told from noise")
    return [caution for caution in found if caution]


def _fast(network: Network, mode: ModeAtNodes, omega: float, route: Route) -> str:
    coast = route.steps[network.kind[route.steps] == StepKind.COAST]
    f = np.abs(coriolis(network.step_lat[coast]))
    trapped = f > 2.0e-11 * equatorial_radius(mode.speed[network.tail[coast]])
    ratio = float(omega / f[trapped].min()) if trapped.any() else 0.0
    if ratio <= FASTEST_SHARE_OF_F:
        return ""
    return (
        f"ω/|f| reaches {ratio:.2f} on the route: the wave is not slow beside the earth's rotation"
    )


def _simultaneous(network: Network, mode: ModeAtNodes, omega: float, route: Route) -> str:
    share = critical_share(network, route.steps, mode.speed, omega)
    if share < 0.1:
        return ""
    days = 2.0 * np.pi / omega / SECONDS_PER_DAY
    return (
        f"{100 * share:.0f} % of the coastal way is below the critical frequency at {days:g} days: "
        "sea level rises there almost at once, fed from the equator, and leaks Rossby waves"
    )


def _unresolved(network: Network, route: Route) -> str:
    gap = network.gap[route.steps]
    gap = gap[(gap >= 0) & (network.kind[route.steps] == StepKind.STRAIT)]
    narrow = network.gap_width[gap] < RESOLVED_STRAIT
    if not narrow.any():
        return ""
    width = network.gap_width[gap][narrow].min() / 1e3
    return f"a strait {width:.0f} km wide on the route is not resolved by the 0.1° bathymetry"


def _icy(network: Network, route: Route) -> str:
    if not route.steps.size:
        return ""
    highest = float(np.abs(network.lat[network.head[route.steps]]).max())
    if highest < ICE_LATITUDE:
        return ""
    return f"the route reaches {highest:.0f}° of latitude: sea ice is not accounted for"


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
