"""What mixed Rossby-gravity waves bring across an ocean beside the Kelvin wave.

The equator guides two waves whose group goes east at periods of a week or two: the Kelvin wave,
symmetric about it, and the mixed Rossby-gravity wave, antisymmetric (u = p ∝ y e^(−y²/2)), with

    k = ω/c − β/ω,   dk/dω = 1/c + β/ω²,

so at ω̂ = ω/√(βc) = 1 with half the speed of the Kelvin wave. A western coast feeds both and at an
eastern one both go poleward. For 1 − √½ < ω̂ < 1 + √½ nothing else leaves (see
:mod:`waveguide.propagation.equator`), and the two waves and the two coasts of a junction are joined
by a unitary matrix: if the Kelvin wave gives the share p of its energy to one coast and 1 − p to
the other, the mixed wave gives 1 − p and p, in phase with the Kelvin wave on the northern coast and
against it on the southern one, but for the phase θ between the antisymmetric and the symmetric
solution of the wall (:mod:`waveguide.propagation.wall`), which is the same on both.

So on a way from a coast W along the equator to a coast E the sea level that the Kelvin wave brings
is multiplied by 1 + ρ,

    ρ = ± √((1 − p_W)/p_W) √((1 − p_E)/p_E) e^(i(θ_W + θ_E) − iβL/ω),

plus if W and E lie in one hemisphere and minus if not; L is the length of the equator between. On
the equator itself the mixed wave has no sea level. At ω̂ < 0.5 its group has less than a fifth of
the Kelvin wave's speed, its waves are shorter than 4.2 L_e and it takes most of a year over the
Pacific: it is faded out between ω̂ = 0.5 and 0.4. Above 1 + √½ (periods below 5.6 days at 2.5 m/s)
walls turn Kelvin waves into inertia-gravity waves first; there ρ is told too small, by a factor of
2 at ω̂ = 1.8 and of 3 at ω̂ = 2 for each of the two coasts.

A shallow-water integration over the real Atlantic (tests/oracle/test_oracle_atlantic.py) has it:
of a burst of 1.5 days down Brazil the mixed wave reaches Africa 27 days after the Kelvin wave, and
higher, since the coast of Brazil slants so that it gives little to the Kelvin wave. Its crests are
within half a day there, and its height within a factor of two: lean is known to first order only.

References
----------
Moore (1968), Planetary-gravity waves in an equatorial ocean, thesis, Harvard.
Matsuno (1966), J. Meteorol. Soc. Japan 44, 25 (the mixed wave).
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import BETA_EQUATOR
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.equator import eastern_wall, eastern_wall_mixed, scaled_frequency
from waveguide.propagation.junctions import JunctionTable
from waveguide.propagation.modes import HIGHEST_SCALED_FREQUENCY, ModeAtNodes, scaled_distance

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Index = NDArray[np.int64]
Mask = NDArray[np.bool_]

FADED, FULL = 0.4, 0.5
"""ω̂ below which the mixed wave is left out, and from which it is whole."""

_GRID = np.linspace(FADED, HIGHEST_SCALED_FREQUENCY, 521)
"""ω̂ at which wall solutions are computed: between them, below 1 + √½, linear to 3e-3."""

_FAR = 6.0  # ŷ where only the wave along the coast is left of the wall solution


class Crossing(NamedTuple):
    """A stretch of equator between a western and an eastern junction.

    Attributes
    ----------
    west, east : int
        Rows of the junctions.
    west_side, east_side : int
        Coasts by which the path comes and goes, 0 north and 1 south.
    length : float
        Of the equator between them (m).
    """

    west: int
    east: int
    west_side: int
    east_side: int
    length: float


def crossings(
    network: Network, table: JunctionTable, steps: Index
) -> list[tuple[int, Crossing]]:
    """Where a path comes along a coast, crosses an ocean on the equator and goes on along a coast.

    Parameters
    ----------
    network : Network
    table : JunctionTable
    steps : ndarray of int, shape (k,)
        Of the path, in order.

    Returns
    -------
    list of (int, Crossing)
        With the number of steps up to the eastern junction.
    """
    equator = network.kind[steps] == StepKind.EQUATOR
    change = np.flatnonzero(np.diff(np.concatenate([[False], equator, [False]])))
    found, at = [], table.junctions.at
    for first, end in change.reshape(-1, 2).tolist():
        if first == 0 or end == steps.size:
            continue
        west, east = int(at[network.tail[steps[first]]]), int(at[network.head[steps[end - 1]]])
        if west < 0 or east < 0 or not table.junctions.eastern[east]:
            continue
        if table.junctions.eastern[west]:
            continue
        came, went = network.tail[steps[first - 1]], network.head[steps[end]]
        sides = int(network.lat[came] < 0.0), int(network.lat[went] < 0.0)
        length = float(network.length[steps[first:end]].sum())
        found.append((end, Crossing(west, east, sides[0], sides[1], length)))
    return found


def gains(
    network: Network, mode: ModeAtNodes, table: JunctionTable, omega: Array,
    ways: Sequence[tuple[Index, Index]], damping: float = 0.0,
) -> list[ComplexArray]:
    """Factors of sea level, 1 + ρ, at several places along each of several paths.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    table : JunctionTable
        At the same frequencies.
    omega : ndarray, shape (nω,)
        Angular frequency (rad/s).
    ways : sequence of (ndarray of int, shape (k,), ndarray of int, shape (legs,))
        Steps of a path in order, and numbers of steps up to the places along it.
    damping : float
        Interior damping (1/s), which acts longer on the slower wave.

    Returns
    -------
    list of ndarray of complex, shape (legs, nω)
        1 where no ocean has been crossed from coast to coast.
    """
    found = [np.ones((ends.size, omega.size), complex) for _, ends in ways]
    if mode.number == 0:
        return found
    ratios: dict[Crossing, ComplexArray] = {}
    near: dict[tuple[int, int], ComplexArray] = {}
    for factor, (steps, ends) in zip(found, ways, strict=True):
        for end, crossing in crossings(network, table, steps):
            carried = _weight(mode, table, omega, crossing) > 0.0
            if crossing not in ratios:
                ratios[crossing] = _ratio(mode, table, omega, carried, crossing, damping)
            for row in np.flatnonzero(ends > end):
                place = crossing.east, int(network.head[steps[ends[row] - 1]])
                if place not in near:
                    near[place] = _near(network, mode, table, omega[carried], *place)
                factor[row, carried] *= 1.0 + ratios[crossing] * near[place]
    return found


def _weight(mode: ModeAtNodes, table: JunctionTable, omega: Array, crossing: Crossing) -> Array:
    """How much of the mixed wave is taken, 0 for slow and 1 for fast waves."""
    rise = (_scaled(mode, table, omega, crossing.west) - FADED) / (FULL - FADED)
    return np.asarray(np.sin(0.5 * np.pi * np.clip(rise, 0.0, 1.0)) ** 2)


def _ratio(
    mode: ModeAtNodes, table: JunctionTable, omega: Array, carried: Mask, crossing: Crossing,
    damping: float,
) -> ComplexArray:
    """ρ far from the equator, at the frequencies that are carried."""
    sign = 1.0 if crossing.west_side == crossing.east_side else -1.0
    ratio = sign * _weight(mode, table, omega, crossing)[carried] + 0j
    omega = omega[carried]
    for row, side in ((crossing.west, crossing.west_side), (crossing.east, crossing.east_side)):
        mine, other = table.energy[row, side, carried], table.energy[row, 1 - side, carried]
        turned = np.angle(_wall_ratios(_FAR))
        share = np.divide(other, mine, out=np.zeros_like(mine), where=mine > 0.0)
        phase = np.interp(_scaled(mode, table, omega, row), _GRID, np.unwrap(turned))
        ratio *= np.sqrt(share) * np.exp(1j * phase)
    later = BETA_EQUATOR * crossing.length / omega
    return np.asarray(ratio * np.exp(-1j * later - damping * later / omega))


def _near(
    network: Network, mode: ModeAtNodes, table: JunctionTable, omega: Array, junction: int,
    node: int,
) -> ComplexArray:
    """What ρ is multiplied by within reach of the equator, where the mixed wave vanishes."""
    place = float(scaled_distance(network, mode, np.array([node]))[0])
    if table.junctions.coast[node] // 2 != junction or place >= mode.matching:
        return np.ones(omega.size, complex)
    shape = _wall_ratios(place) / _wall_ratios(mode.matching)
    return np.asarray(np.interp(_scaled(mode, table, omega, junction), _GRID, shape))


@cache
def _wall_ratios(distance: float) -> ComplexArray:
    """Mixed over Kelvin wave along an eastern wall, on `_GRID`."""
    return eastern_wall_mixed(_GRID, distance) / eastern_wall(_GRID, distance)


def _scaled(mode: ModeAtNodes, table: JunctionTable, omega: Array, row: int) -> Array:
    """ω̂ at a junction, within the range of the wall solution."""
    speed = mode.speed[table.junctions.node[row]]
    return np.minimum(scaled_frequency(omega, speed), HIGHEST_SCALED_FREQUENCY)
