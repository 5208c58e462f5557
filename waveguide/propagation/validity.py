"""Where the theory behind an answer holds: one number for each of its assumptions.

The theory is linear and takes a slow wave (ω ≪ |f|), trapped against a coast that is straight over
a deformation radius R and has open water beside it, in an ocean that changes little over the
wavelength/2π. Each number says how far a route is from that; :mod:`waveguide.propagation.cautions`
says in words which of them are too far.

Numbers that one bad node would decide (radius of the coast, width of the basin, change of the
speed) are those beyond which the worst 5 % of the way lie.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import coriolis, deformation_radius
from waveguide.geodesy import destination, wrap_longitude
from waveguide.network.graph import Network, StepKind
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.ocean.stratification import Climatology
from waveguide.propagation.losses import critical_share
from waveguide.propagation.modes import ModeAtNodes, scaled_distance

Array = NDArray[np.float64]
Index = NDArray[np.int64]

FARTHEST_SHORE = 5.0
"""Basins wider than this many R are not measured: they count as this wide."""

UPPER_OCEAN = 100.0
"""Depth (m) to which seasons change the stratification."""

_ORDINARY = 0.05  # share of the way that may be worse than the number given
_NODES = 40  # of a route, at which the sea is looked at
_COARSEST = 40e3  # m; over less than two nodes of a coast its curvature is not known


@dataclass(frozen=True)
class Validity:
    """How far a route is from what the theory assumes; NaN where a number does not apply.

    Attributes
    ----------
    frequency_over_f : float
        Largest ω/|f| on the coasts, beyond the reach of the equator.
    coast_radius : float
        Radius of curvature of the coast in R.
    basin_width : float
        Distance from the coast to the shore facing it, in R, at most `FARTHEST_SHORE`.
    speed_change : float
        Relative change of c over one wavelength/2π.
    critical_share : float
        Share of the coastal way that is poleward and below the critical frequency.
    narrowest_strait : float
        Width of the narrowest strait on the way (m).
    northernmost, southernmost : float
        Latitudes (degrees).
    upper_share : float
        Share of ∫N dz, which is πc₁, that lies in the upper ocean, where seasons change it.
    """

    frequency_over_f: float
    coast_radius: float
    basin_width: float
    speed_change: float
    critical_share: float
    narrowest_strait: float
    northernmost: float
    southernmost: float
    upper_share: float


class Survey:
    """Looks at the routes of one mode; what it finds at a node serves every route.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    omega : float
        Dominant angular frequency (rad/s).
    depths : Bathymetry
    climatology : Climatology or None
        None where the phase speed is not that of a real ocean.
    """

    def __init__(
        self, network: Network, mode: ModeAtNodes, omega: float, depths: Bathymetry,
        climatology: Climatology | None,
    ) -> None:
        self._network, self._mode, self._omega = network, mode, omega
        self._depths, self._climatology = depths, climatology
        self._width: dict[int, float] = {}
        self._upper: dict[int, float] = {}

    def of(self, steps: Index) -> Validity:
        """The numbers of a route.

        Parameters
        ----------
        steps : ndarray of int, shape (k,)
            In order of travel.

        Returns
        -------
        Validity
            All NaN for a route without steps.
        """
        if not steps.size:
            return Validity(*([float("nan")] * 9))
        network, mode = self._network, self._mode
        nodes = np.concatenate([network.tail[steps[:1]], network.head[steps]])
        coast = steps[network.kind[steps] == StepKind.COAST]
        lat = network.lat[nodes]
        return Validity(
            fastest(network, mode, coast, self._omega),
            coast_radius(network, mode, steps),
            self._basin(network.tail[coast]),
            speed_change(mode.speed[nodes], network.length[steps], self._omega),
            critical_share(network, steps, mode.speed, self._omega),
            _narrowest_strait(network, steps),
            float(lat.max()), float(lat.min()),
            self._upper_share(nodes),
        )

    def _basin(self, nodes: Index) -> float:
        """Width of the basin beside coast nodes (R)."""
        # every n-th node of the network, so that routes look at the same ones
        known = nodes[nodes % max(1, nodes.size // _NODES) == 0] if nodes.size else nodes
        new = np.array([n for n in known.tolist() if n not in self._width], dtype=np.int64)
        if new.size:
            found = basin_width(self._network, self._mode, new, self._depths)
            self._width.update(zip(new.tolist(), found.tolist(), strict=True))
        widths = [self._width[n] for n in known.tolist()]
        return float(np.quantile(widths, _ORDINARY)) if widths else float("nan")

    def _upper_share(self, nodes: Index) -> float:
        """Mean share of ∫N dz in the upper ocean along a route; NaN for the barotropic mode."""
        if self._climatology is None or self._mode.number == 0:
            return float("nan")
        known = nodes[:: max(1, nodes.size // _NODES)]
        new = np.array([n for n in known.tolist() if n not in self._upper], dtype=np.int64)
        found = upper_share(self._climatology, self._network.lon[new], self._network.lat[new])
        self._upper.update(zip(new.tolist(), found.tolist(), strict=True))
        shares = np.array([self._upper[n] for n in known.tolist()])
        return float(np.nanmean(shares)) if np.isfinite(shares).any() else float("nan")


def fastest(network: Network, mode: ModeAtNodes, coast: Index, omega: float) -> float:
    """Largest ω/|f| on coast steps beyond the matching distance from the equator.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    coast : ndarray of int, shape (k,)
    omega : float

    Returns
    -------
    float
        0 where there is no such coast.
    """
    beyond = coast[scaled_distance(network, mode, network.tail[coast]) > mode.matching]
    f = np.abs(coriolis(network.step_lat[beyond]))
    return float(omega / f.min()) if f.size else 0.0


def coast_radius(network: Network, mode: ModeAtNodes, steps: Index) -> float:
    """Radius of curvature of the coast along a route in R, smaller on 5 % of its length.

    It is the length of the window, R or two steps if that is more, over the angle by which the
    coast turns within it.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    steps : ndarray of int, shape (k,)

    Returns
    -------
    float
        NaN for a route without coasts.
    """
    coast = network.kind[steps] == StepKind.COAST
    if not coast.any():
        return float("nan")
    tail, head = network.tail[steps], network.head[steps]
    east = wrap_longitude(network.lon[head] - network.lon[tail])
    east = east * np.cos(np.radians(network.step_lat[steps]))
    heading = np.unwrap(np.arctan2(network.lat[head] - network.lat[tail], east))
    length = network.length[steps]
    middle = np.cumsum(length) - 0.5 * length
    radius = deformation_radius(mode.speed[tail], network.step_lat[steps])
    window = np.maximum(radius, _COARSEST)
    ends = [np.interp(middle + sign * window, middle, heading) for sign in (-0.5, 0.5)]
    turn = np.maximum(np.abs(ends[1] - ends[0]), 1e-6)
    ratio = (window / turn / radius)[coast]
    order = np.argsort(ratio)
    below = np.cumsum(length[coast][order]) / length[coast].sum()
    return float(ratio[order][np.searchsorted(below, _ORDINARY)])


def basin_width(network: Network, mode: ModeAtNodes, nodes: Index, depths: Bathymetry) -> Array:
    """Distance from coast nodes along their normals to the next land, in R.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    nodes : ndarray of int, shape (k,)
        On coasts.
    depths : Bathymetry

    Returns
    -------
    ndarray, shape (k,)
        At most `FARTHEST_SHORE`.
    """
    radius = deformation_radius(mode.speed[nodes], network.lat[nodes])
    share = np.linspace(0.0, FARTHEST_SHORE, 101)[1:]
    lon, lat = destination(
        network.lon[nodes, None], network.lat[nodes, None], network.offshore[nodes, None],
        radius[:, None] * share,
    )
    wet = depths.sample(lon, lat) > 0.0
    shore = np.maximum.accumulate(wet, axis=1) & ~wet
    return np.where(shore.any(axis=1), share[np.argmax(shore, axis=1)], FARTHEST_SHORE)


def speed_change(speed: Array, length: Array, omega: float) -> float:
    """Relative change of c over one wavelength/2π, c/ω, larger on 5 % of a path.

    Parameters
    ----------
    speed : ndarray, shape (k + 1,)
        At the nodes (m/s).
    length : ndarray, shape (k,)
        Of the steps between them (m).
    omega : float

    Returns
    -------
    float
        |ln c(s + c/ω) − ln c(s)|; over the whole path where that is shorter.
    """
    place = np.concatenate([[0.0], np.cumsum(length)])
    log = np.log(speed)
    ahead = place + speed / omega
    change = np.abs(np.interp(ahead, place, log) - log)[ahead <= max(place[-1], ahead[0])]
    return float(np.quantile(change, 1.0 - _ORDINARY))


def upper_share(climatology: Climatology, lon: ArrayLike, lat: ArrayLike) -> Array:
    """Share of ∫N dz within the upper ocean in the best known column near positions.

    Parameters
    ----------
    climatology : Climatology
    lon, lat : array_like, shape S
        Degrees.

    Returns
    -------
    ndarray, shape S
        NaN where no column within two cells is known.
    """
    x, y = (np.asarray(at, float)[..., None] for at in (lon, lat))
    row = np.argmin(np.abs(climatology.lat - y), axis=-1)
    column = np.argmin(np.abs(wrap_longitude(climatology.lon - x)), axis=-1)
    south, west = (side.ravel() for side in np.mgrid[-2:3, -2:3])
    rows = np.clip(row[..., None] + south, 0, climatology.lat.size - 1)
    columns = (column[..., None] + west) % climatology.lon.size
    n2 = climatology.n2[:, rows, columns]
    best = np.argmax(np.isfinite(n2).sum(axis=0), axis=-1)
    n2 = np.take_along_axis(n2, best[None, ..., None], axis=-1)[..., 0]
    edge = np.concatenate([[0.0], 0.5 * (climatology.depth[1:] + climatology.depth[:-1])])
    thickness = np.diff(np.append(edge, climatology.depth[-1]))
    upper = np.clip(UPPER_OCEAN - edge, 0.0, thickness)
    n = np.sqrt(np.where(np.isfinite(n2), n2, 0.0))
    whole = np.tensordot(thickness, n, 1)
    share = np.full(whole.shape, np.nan)
    np.divide(np.tensordot(upper, n, 1), whole, out=share, where=whole > 0.0)
    return share


def _narrowest_strait(network: Network, steps: Index) -> float:
    """Width of the narrowest strait that a route enters (m), NaN if none."""
    strait = (network.gap[steps] >= 0) & (network.kind[steps] == StepKind.STRAIT)
    width = network.gap_width[network.gap[steps][strait]]
    return float(width.min()) if width.size else float("nan")
