"""What each step of a network does to a wave at many frequencies: its lag and its losses.

With η = aP (see :mod:`waveguide.propagation.losses`) a step multiplies a by exp(−n + iφ), where φ
is a delay and the nepers n ≥ 0 tell by their kind (`FATES`) where the energy a² goes:

- coast: −n + iφ is the exponent of :func:`waveguide.propagation.dispersion.segment_exponent`
  without its growth ½ ln(|f_B|/|f_A|), which is in P. Below the critical frequency it sheds
  Rossby waves; what damping adds to n is damping's;
- coast within the matching distance of the equator: the lag of the wall solution
  (:mod:`waveguide.propagation.near_equator`); its losses are those of the junction;
- equator: φ = ωs/c, the Kelvin wave having no dispersion;
- junctions: the amplitude of :mod:`waveguide.propagation.equator`, with the lean of either coast
  (:mod:`waveguide.propagation.junctions`). The step of the equator keeps the share of the coast
  that gets, or gives, more; that of the other coast at the junction loses the rest. The lag
  between the equator and the matching latitude is that of the coast, the rest is the equator's;
- gaps: the complex factors of :mod:`waveguide.propagation.gaps`. The lag that they hold for the
  length of the passage is taken out, since the steps of the network have it: so the phase at
  high frequency is ω times the travel time of the front, and the modulus is untouched;
- coast beyond the matching distance: what the wavenumber of a section grows by at finite ω
  (:func:`waveguide.modes.modeset.low_frequency_wavenumber`) times the length;
- bottom friction exp(−γs), with γ for example `flat_bottom_friction`;
- scattering where the section changes: the overlap of the modes on both sides.

References
----------
Brink & Allen (1978), J. Phys. Oceanogr. 8, 1008 (bottom friction of trapped waves).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import coriolis
from waveguide.modes.modeset import low_frequency_wavenumber
from waveguide.network.graph import Network, StepKind
from waveguide.propagation.dispersion import segment_exponent, segment_growth
from waveguide.propagation.gaps import facing_coast_share, passage
from waveguide.propagation.junctions import JunctionTable, coasts_of_steps, excess_lengths
from waveguide.propagation.modes import ModeAtNodes, scaled_distance
from waveguide.propagation.near_equator import (
    WallTable,
    floored_coriolis,
    wall_lag,
)

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Index = NDArray[np.int64]

FATES = ("Rossby waves", "bottom friction", "interior damping", "scattered", "other ways")
"""Where energy goes that does not reach the end of a leg. "Other ways" is what other coasts get
at junctions and gaps: it is not lost to the ocean, but to this route."""

_ROSSBY, _FRICTION, _DAMPING, _SCATTERED, _OTHER = range(len(FATES))

BOTTOM_DRAG = 5e-4
"""Coefficient r of linear bottom stress ρr v (m/s) usual for shelves.

MEMORY: the value of Chapman (1987), J. Geophys. Res. 92, 1798, off California.
"""

FASTEST_DISPERSION = 0.3
"""ω/|f| up to which dispersion is followed; above it stays in proportion."""

LARGEST_GROWTH = 0.5
"""Relative growth of the wavenumber at which the first order is held: about there a shelf mode
reaches its cut-off, which the first order does not have. A wavenumber so held is not quite causal:
a short burst has up to a tenth of its peak in the day before the front (mode 2 off south China)."""

_MOST_NEPERS = 300.0  # stands for "nothing is left": exp(−2·300) is above the smallest double


@dataclass(frozen=True)
class Conditions:
    """What acts on a wave on its way beside the network itself. Nothing, unless given.

    Attributes
    ----------
    friction : ndarray, shape (m,), or float
        Decay γ of the amplitude by bottom friction along every step (1/m).
    damping : float
        Rate of interior damping (1/s); see `interior_damping_rate` for r = A/c².
    mean_flow : ndarray, shape (m,), or float
        Current along every step in the direction of travel (m/s).
    overlap : ndarray, shape (m,), or float
        Share of the amplitude that stays in the mode where the section changes, 0 to 1.
    """

    friction: Array | float = 0.0
    damping: float = 0.0
    mean_flow: Array | float = 0.0
    overlap: Array | float = 1.0


STILL = Conditions()
"""Neither friction nor damping, current or scattering."""


@dataclass(frozen=True)
class StepResponse:
    """Lag and losses of steps.

    Attributes
    ----------
    lag : ndarray, shape (k, nω)
        φ (rad).
    nepers : ndarray, shape (5, k, nω)
        Losses of amplitude by fate, in the order of `FATES`.
    """

    lag: Array
    nepers: Array


def flat_bottom_friction(drag: ArrayLike, bottom_value: ArrayLike, speed: ArrayLike) -> Array:
    """Decay of amplitude by bottom friction over a flat bottom, r F(−H)²/(2c).

    Off a wall a mode has v = φF e^(−x/R)/c at the bottom, loses r ∫v² dx = rφ²F²/(2c|f|) and
    carries φ²/(2|f|); on the equator both integrals have √(πc/β) instead, with the same ratio.
    The barotropic mode, F² = 1/H, decays as exp(−rs/(2Hc)).

    Parameters
    ----------
    drag : array_like
        r (m/s), for example `BOTTOM_DRAG`.
    bottom_value : array_like
        F at the bottom with ∫F² dz = 1 (m^-1/2).
    speed : array_like
        Phase speed c (m/s).

    Returns
    -------
    ndarray
        γ (1/m).

    References
    ----------
    Brink & Allen (1978), J. Phys. Oceanogr. 8, 1008.
    """
    value = np.asarray(bottom_value, float)
    return np.asarray(np.asarray(drag, float) * value**2 / (2.0 * np.asarray(speed, float)))


def step_speeds(
    network: Network, mode: ModeAtNodes, steps: Index, conditions: Conditions = STILL
) -> tuple[Array, Array]:
    """Phase speed of the mode and speed of its front, with the current, along steps.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    steps : ndarray of int, shape (k,)
    conditions : Conditions

    Returns
    -------
    speed, front_speed : ndarray, shape (k,)
        Harmonic means of both ends (m/s), NaN where the mode does not exist.
    """
    ends = mode.speed[network.tail[steps]], mode.speed[network.head[steps]]
    speed = 2.0 / (1.0 / ends[0] + 1.0 / ends[1])
    return speed, speed + _of_steps(conditions.mean_flow, steps)


def step_response(
    network: Network, mode: ModeAtNodes, steps: Index, omega: Array, table: WallTable,
    conditions: Conditions = STILL,
) -> StepResponse:
    """Lag and losses of steps at every frequency.

    Parameters
    ----------
    network : Network
    mode : ModeAtNodes
    steps : ndarray of int, shape (k,)
        Steps on which the mode exists.
    omega : ndarray, shape (nω,)
        Angular frequency ≥ 0 (rad/s).
    table : WallTable
        At the same frequencies.
    conditions : Conditions

    Returns
    -------
    StepResponse
    """
    lag = np.zeros((steps.size, omega.size))
    nepers = np.zeros((len(FATES), steps.size, omega.size))
    along = network.kind[steps] == StepKind.COAST
    coast, other = np.nonzero(along)[0], np.nonzero(~along)[0]
    lag[coast], nepers[_ROSSBY, coast], nepers[_DAMPING, coast] = _coast(
        network, mode, steps[coast], omega, table, conditions
    )
    time = network.length[steps[other]] / step_speeds(network, mode, steps[other], conditions)[1]
    lag[other] = time[:, None] * omega
    nepers[_DAMPING, other] = conditions.damping * time[:, None]
    friction = _of_steps(conditions.friction, steps) * network.length[steps]
    nepers[_FRICTION] = friction[:, None]
    nepers[_SCATTERED] = _nepers(_of_steps(conditions.overlap, steps))[:, None]
    _add_junctions(network, steps, table, lag, nepers)
    _add_gaps(network, mode, steps, omega, lag, nepers)
    return StepResponse(lag, nepers)


def _of_steps(value: Array | float, steps: Index) -> Array:
    """Values at steps of an array over the network or of one number."""
    values = np.asarray(value, float)
    return values[steps] if values.ndim else np.full(steps.size, values)


def _nepers(amplitude: Array | ComplexArray) -> Array:
    """−ln of an amplitude that is at most 1, bounded where nothing is left."""
    smallest = np.exp(-_MOST_NEPERS)
    return np.asarray(np.maximum(-np.log(np.maximum(np.abs(amplitude), smallest)), 0.0))


def _coast(
    network: Network, mode: ModeAtNodes, steps: Index, omega: Array, table: WallTable,
    conditions: Conditions,
) -> tuple[Array, Array, Array]:
    """Lag, loss to Rossby waves and loss to damping of coast steps, each (k, nω)."""
    c = step_speeds(network, mode, steps)[0]
    flow = _of_steps(conditions.mean_flow, steps)
    start, end = (
        floored_coriolis(network.lat[node[steps]], c, mode.matching)[:, None]
        for node in (network.tail, network.head)
    )
    segment = (c[:, None], start, end, network.length[steps, None])
    growth = segment_growth(start, end)
    exponent = segment_exponent(omega, *segment, conditions.damping, flow[:, None])
    lag, loss = exponent.imag, np.maximum(growth - exponent.real, 0.0)
    lag = lag + _dispersive_lag(network, mode, steps, omega, c)
    rossby = loss
    if conditions.damping > 0.0:
        undamped = segment_exponent(omega, *segment, 0.0, flow[:, None])
        rossby = np.minimum(np.maximum(growth - undamped.real, 0.0), loss)
    lag = _near_equator(network, mode, steps, omega, table, c + flow, lag)
    return lag, rossby, loss - rossby


def _dispersive_lag(
    network: Network, mode: ModeAtNodes, steps: Index, omega: Array, speed: Array
) -> Array:
    """Lag beyond that of long waves, to first order in ω²/f²."""
    ends = network.tail[steps], network.head[steps]
    spread, tail, depth = (
        0.5 * (values[ends[0]] + values[ends[1]])[:, None]
        for values in (mode.dispersion, mode.barotropic_tail, mode.depth)
    )
    lag = np.zeros((steps.size, omega.size))
    if not (spread.any() or tail.any()):
        return lag
    f = np.abs(coriolis(0.5 * (network.lat[ends[0]] + network.lat[ends[1]])))[:, None]
    known = np.isfinite(spread * tail * depth * f)[:, 0] & (f[:, 0] > 0.0)
    c, f = speed[known, None], f[known]
    slow = np.minimum(omega, FASTEST_DISPERSION * f)
    wavenumber = low_frequency_wavenumber(slow, c, f, depth[known], spread[known], tail[known])
    growth = np.divide(wavenumber * c, slow, out=np.ones_like(slow), where=slow > 0.0) - 1.0
    growth = np.clip(growth, -LARGEST_GROWTH, LARGEST_GROWTH)
    lag[known] = growth * omega * (network.length[steps][known, None] / c)
    return lag


def _near_equator(
    network: Network, mode: ModeAtNodes, steps: Index, omega: Array, table: WallTable,
    speed: Array, lag: Array,
) -> Array:
    """Lags with those of the wall solution where a step lies within the matching distance."""
    first, last = (
        scaled_distance(network, mode, node[steps]) for node in (network.tail, network.head)
    )
    near = np.nonzero(np.maximum(first, last) < mode.matching)[0]
    excess = excess_lengths(network, mode, steps[near])
    lag[near] = wall_lag(table, first[near], last[near]) + (excess / speed[near])[:, None] * omega
    return lag + _eastern_lag(network, mode, steps, table)


def _eastern_lag(network: Network, mode: ModeAtNodes, steps: Index, table: WallTable) -> Array:
    """What lean does to the lag along the coasts of eastern junctions."""
    found = table.junctions.junctions
    lag = np.zeros((steps.size, table.lag.shape[1]))
    coast = coasts_of_steps(network, found.coast, steps)
    at = np.nonzero((coast >= 0) & np.append(found.eastern, False)[coast // 2])[0]
    owner, side = coast[at] // 2, coast[at] % 2
    excess = excess_lengths(network, mode, steps[at]) / np.maximum(found.excess[owner, side], 1.0)
    lag[at] = excess[:, None] * table.junctions.lag[owner, side]
    return lag


def _add_junctions(
    network: Network, steps: Index, table: WallTable, lag: Array, nepers: Array
) -> None:
    """Add what happens where the equator meets its coasts.

    One coast delivers to the equator the share that it gets from it (reciprocity). Of the two
    shares the step of the equator keeps the larger, so no step of a coast ever gains.
    """
    found = table.junctions
    equator, coast = (network.kind[steps] == k for k in (StepKind.EQUATOR, StepKind.COAST))
    inner, outer = network.head[steps], network.tail[steps]
    for eastern in (True, False):
        at, row = _touching(found, equator, inner, eastern)
        lost, elsewhere = _equator_losses(found.energy[row], eastern)
        nepers[_OTHER, at] += elsewhere * lost
        nepers[_ROSSBY, at] += (1.0 - elsewhere) * lost
        lag[at] += found.upright[row] - table.lag[-1]
        at, row = _touching(found, coast, outer, eastern)
        side = (network.lat[inner[at]] < 0.0).astype(np.int64)
        most = found.energy[row].max(axis=1)
        share = np.divide(found.energy[row, side], most, out=np.ones_like(most), where=most > 0.0)
        nepers[_OTHER if eastern else _ROSSBY, at] += _nepers(np.sqrt(share))
        lag[at] += 0.0 if eastern else found.lag[row, side]
        inner, outer = outer, inner


def _touching(
    table: JunctionTable, along: NDArray[np.bool_], ends: Index, eastern: bool
) -> tuple[Index, Index]:
    """Which of some steps end at a junction of an eastern or a western coast, and at which."""
    row = table.junctions.at[ends]
    of_kind = np.append(table.junctions.eastern == eastern, False)
    at = np.nonzero(along & of_kind[row])[0]
    return at, row[at]


def _equator_losses(energy: Array, eastern: bool) -> tuple[Array, Array]:
    """Nepers at the equator's end of junctions and the share of them that is other coasts'."""
    most, least = energy.max(axis=1), energy.min(axis=1)
    given = least if eastern else np.zeros_like(least)
    return _nepers(np.sqrt(most)), given / np.maximum(1.0 - most, np.maximum(given, 1e-300))


def _add_gaps(
    network: Network, mode: ModeAtNodes, steps: Index, omega: Array, lag: Array, nepers: Array
) -> None:
    """Add what happens where a step enters a gap or passes its mouth."""
    for column, which in ((network.gap, 0), (network.passes, 1)):
        at = np.nonzero(column[steps] >= 0)[0]
        factor, sill = _gap_factors(network, mode, column[steps[at]], omega)[which]
        nepers_here = _nepers(factor)
        given = np.maximum(1.0 - np.abs(factor) ** 2, 1e-12)
        scattered = np.clip(sill / given, 0.0, 1.0)
        nepers[_SCATTERED, at] += scattered * nepers_here
        nepers[_OTHER, at] += (1.0 - scattered) * nepers_here
        lag[at] += np.angle(factor)


def _gap_factors(
    network: Network, mode: ModeAtNodes, rows: Index, omega: Array
) -> tuple[tuple[ComplexArray, Array], tuple[ComplexArray, Array]]:
    """Factors of crossing and of passing gaps, each with the energy lost at the sill, (k, nω)."""
    entry = np.zeros(network.gap_width.size, dtype=np.int64)
    enters = np.nonzero(network.gap >= 0)[0]
    entry[network.gap[enters]] = enters
    step = entry[rows]
    c = mode.speed[network.tail[step], None]
    # closer to the equator than the matching distance no coast guides: |f| is that at its end
    f = floored_coriolis(network.lat[network.tail[step]], c[:, 0], mode.matching)[:, None]
    width = network.gap_width[rows, None]
    length = np.maximum(network.gap_length[rows], 1e3)[:, None]
    beyond = passage(omega, width, length, f, c, mode.gap_share[rows, None])
    through = beyond.through * np.exp(-1j * omega * length / c)
    across, lost = beyond.across, beyond.lost
    kind = network.kind[step, None]
    strait, opening = kind == StepKind.STRAIT, kind == StepKind.OPENING
    direct = facing_coast_share(width, c / f) + 0j
    crossing = np.where(strait, through, np.where(opening, direct, across))
    passing = np.where(strait, across, np.where(opening, 1.0 - direct**2, through))
    lost = np.where(opening, 0.0, lost)
    return (crossing, lost), (passing, lost)
