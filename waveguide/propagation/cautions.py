"""Where the theory behind one answer is out of its depth, in words with numbers."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import BETA_EQUATOR, SECONDS_PER_DAY
from waveguide.network.attach import Ties
from waveguide.propagation.mixed_waves import FULL
from waveguide.propagation.routes import Route
from waveguide.propagation.validity import UPPER_OCEAN, Validity

if TYPE_CHECKING:
    from waveguide.propagation.legs import Leg

Array = NDArray[np.float64]

FASTEST_SHARE_OF_F = 0.3
"""ω/|f| above which a wave is not "low-frequency": the error of the long-wave limit is ω²/f²."""

SHARPEST_COAST = 1.0
"""Radius of curvature in R below which a coast is not straight for the wave."""

NARROWEST_BASIN = 3.0
"""Width in R below which the other shore is felt: there e^(−3) = 5 % of the amplitude is left."""

LARGEST_CHANGE = 1.0 / 3.0
"""Change of ln c over one wavelength/2π above which it is not slow."""

LARGEST_CRITICAL_SHARE = 0.1
"""Share of the coastal way below the critical frequency from which it is worth a word."""

RESOLVED_STRAIT = 20e3
"""Straits narrower than two cells of the 0.1° bathymetry are not resolved by it (m)."""

UPPER_SHARE = 0.15
"""Share of c₁ from the upper ocean above which the season matters (our choice: if seasons change
N there by a third, c₁ changes by a twentieth)."""

FARTHEST_TIE = 1.0
"""Distance of a source or target from the guide in R above which it is told."""

FAINT = 0.01
NORTHERN_ICE, SOUTHERN_ICE = 65.0, -60.0
"""Latitudes poleward of which sea ice is common in winter (MEMORY)."""

COVERED_WIND = 0.99
"""Share of the influence that a wind record covers below which it is told."""

EARLIEST_RISE = 1.0
"""Days by which half-height, less that at the source, may precede the front without a word: T_e
or so (see :mod:`waveguide.propagation.waveform`)."""

LEAST_MIXED = 0.1
"""Share of the event's energy from which mixed waves are told."""

SHORTEST_OCEAN = 1000e3
"""Equator between two coasts that is an ocean (m)."""


@dataclass(frozen=True)
class Kind:
    """One way in which an answer may be out of the depth of the theory.

    Attributes
    ----------
    name : str
    unit : str
        Of the number; "1" for none.
    style : str
        How the number is written.
    text : str
        With ``{}`` where the number stands.
    """

    name: str
    unit: str
    style: str
    text: str


KINDS = (
    Kind("faint signal", "1", ".2g",
         "amplitude ratio {}: faint, and no better known than what friction and straits take on "
         "the way: ten times as much may be left"),
    Kind("early rise", "days", ".1f",
         "from half-height at the source to half-height it takes {} days less than the front: "
         "where a coast slants away from a junction the wave takes a short cut to or from the "
         "equator, and below the critical frequency sea level rises all along a coast; the front "
         "is told along the guide"),
    Kind("uncovered wind", "%", ".0f",
         "the wind record covers {} % of what lies upstream: the rest is taken as calm"),
    Kind("mixed waves", "%", ".0f",
         "{} % of the event's energy is at periods at which mixed Rossby-gravity waves cross the "
         "ocean too, later, with heights known within a factor of two: a peak or half-height may "
         "be theirs"),
    Kind("fast wave", "1", ".2f",
         "ω/|f| reaches {} on the route: the wave is not slow beside the earth's rotation"),
    Kind("sea ice in the north", "°N", ".0f",
         "the route reaches {}°N: sea ice is not accounted for"),
    Kind("sea ice in the south", "°S", ".0f",
         "the route reaches {}°S: sea ice is not accounted for"),
    Kind("unresolved strait", "km", ".0f",
         "a strait {} km wide on the route is not resolved by the 0.1° bathymetry"),
    Kind("narrow basin", "R", ".1f",
         "the water beside the coast is {} R wide on a twentieth of the way: the other shore is "
         "felt"),
    Kind("below the critical frequency", "%", ".0f",
         "{} % of the coastal way is below the critical frequency at the dominant period: sea "
         "level rises there almost at once, fed from the equator, and leaks Rossby waves"),
    Kind("fast change of speed", "%", ".0f",
         "the phase speed changes by {} % over a wavelength/2π: it does not vary slowly, and some "
         "of the wave is reflected or scattered"),
    Kind("source off the guide", "R", ".1f", "the source lies {} R off the guide"),
    Kind("target off the guide", "R", ".1f", "the target lies {} R off the guide"),
    Kind("source on the shelf", "R", ".1f",
         "the source lies {} R shoreward of the guide: the signal on the shelf is taken as that at "
         "the shelf edge"),
    Kind("target on the shelf", "R", ".1f",
         "the target lies {} R shoreward of the guide: the signal on the shelf is taken as that at "
         "the shelf edge"),
    Kind("curved coast", "R", ".1f",
         "the coast bends within {} R on a twentieth of the way: bends shift the phase"),
    Kind("season", "%", ".0f",
         f"{{}} % of the speed comes from the upper {UPPER_OCEAN:.0f} m, and the stratification is "
         "that of the annual mean, whatever the season"),
)  # fmt: skip
"""The most serious first: those that may void an answer, then those that shift or weaken it."""

KIND = {kind.name: kind for kind in KINDS}


@dataclass(frozen=True)
class Caution:
    """A caution that belongs to one target and mode.

    Attributes
    ----------
    kind : str
        Name of one of `KINDS`.
    number : float
        In the unit of its kind.
    """

    kind: str
    number: float

    @property
    def text(self) -> str:
        """The caution in words."""
        return KIND[self.kind].text.format(format(self.number, KIND[self.kind].style))


def route_cautions(
    validity: Validity, route: Route, source: Ties, target: Ties
) -> list[Caution]:
    """Cautions that belong to one target and mode.

    Parameters
    ----------
    validity : Validity
        Of the route.
    route : Route
    source, target : Ties

    Returns
    -------
    list of Caution
        The most serious first.
    """
    return _raised({
        "faint signal": (route.amplitude < FAINT, route.amplitude),
        **_assumptions(validity),
        **_tied("source", source, route.start),
        **_tied("target", target, route.end),
    })


def response_cautions(validity: Validity, covered: float) -> list[Caution]:
    """Cautions that belong to what a wind drives at one target in one mode.

    Parameters
    ----------
    validity : Validity
        Of the way upstream along which wind counts most.
    covered : float
        Share of the influence that the wind record covers.

    Returns
    -------
    list of Caution
        The most serious first.
    """
    return _raised({
        "uncovered wind": (covered < COVERED_WIND, 100.0 * covered), **_assumptions(validity),
    })  # fmt: skip


Found = dict[str, tuple[bool, float]]
"""Whether a number is beyond its limit, and the number, by kind of caution."""


def _assumptions(validity: Validity) -> Found:
    return {
        "fast wave": (
            validity.frequency_over_f > FASTEST_SHARE_OF_F, validity.frequency_over_f),
        "sea ice in the north": (validity.northernmost > NORTHERN_ICE, validity.northernmost),
        "sea ice in the south": (validity.southernmost < SOUTHERN_ICE, -validity.southernmost),
        "unresolved strait": (
            validity.narrowest_strait < RESOLVED_STRAIT, validity.narrowest_strait / 1e3),
        "narrow basin": (validity.basin_width < NARROWEST_BASIN, validity.basin_width),
        "below the critical frequency": (
            validity.critical_share >= LARGEST_CRITICAL_SHARE, 100.0 * validity.critical_share),
        "fast change of speed": (
            validity.speed_change > LARGEST_CHANGE, 100.0 * validity.speed_change),
        "curved coast": (validity.coast_radius < SHARPEST_COAST, validity.coast_radius),
        "season": (validity.upper_share > UPPER_SHARE, 100.0 * validity.upper_share),
    }  # fmt: skip


def _tied(what: str, ties: Ties, at: int) -> Found:
    """How far an end of a route lies off the guide, or on the shelf inshore of it."""
    where = f"{what} on the shelf" if ties.inshore[at] else f"{what} off the guide"
    return {where: (bool(ties.radii[at] > FARTHEST_TIE), float(ties.radii[at]))}


def _raised(found: Found) -> list[Caution]:
    """The numbers beyond their limits, the most serious first."""
    raised = {name: float(number) for name, (beyond, number) in found.items() if beyond}
    return [Caution(kind.name, raised[kind.name]) for kind in KINDS if kind.name in raised]


def rise_cautions(front: float, half_height: float, at_source: float) -> list[Caution]:
    """The caution of a waveform that does not wait for the front.

    Parameters
    ----------
    front : float
        Travel time of the front (s).
    half_height, at_source : float
        Half-height at the target and at the source, from the start of the event (s).

    Returns
    -------
    list of Caution
        None or one.
    """
    early = (front - (half_height - at_source)) / SECONDS_PER_DAY
    return [Caution("early rise", early)] if early > EARLIEST_RISE else []


def mixed_cautions(legs: Sequence[Leg], omega: Array, power: Array) -> list[Caution]:
    """The caution of an event so short that mixed waves cross an ocean beside the Kelvin wave.

    Parameters
    ----------
    legs : sequence of Leg
        Of the route.
    omega, power : ndarray, shape (nω,)
        Frequencies of the source (rad/s) and its energy spectrum, with sum 1.

    Returns
    -------
    list of Caution
        None or one.
    """
    guided = [leg for leg in legs if leg.kind != "attachment"]
    crossed = [
        leg for before, leg, after in zip(guided, guided[1:], guided[2:], strict=False)
        if (before.kind, leg.kind, after.kind) == ("coast", "equator", "coast")
        and leg.distance[-1] > SHORTEST_OCEAN
    ]
    if not crossed:
        return []
    speed = crossed[0].distance[-1] / crossed[0].time[-1]
    share = float(power[omega > FULL * np.sqrt(BETA_EQUATOR * speed)].sum())
    return [Caution("mixed waves", 100.0 * share)] if share > LEAST_MIXED else []


def by_seriousness(cautions: list[Caution]) -> list[Caution]:
    """Cautions in the order of `KINDS`."""
    order = [kind.name for kind in KINDS]
    return sorted(cautions, key=lambda caution: order.index(caution.kind))
