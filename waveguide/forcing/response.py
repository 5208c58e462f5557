"""Sea level at a target as the sum of what the wind did upstream, each part with its delay.

The sum over steps is done at every frequency (:mod:`waveguide.forcing.transfer`) and turned into a
series by a discrete Fourier transform. The ocean is at rest before the first time of the record:
behind its end the record is filled up with calm for as long as anything upstream takes to arrive,
so that nothing comes round to its beginning. Until the longest delay has passed the response
misses the wind before the record (spin-up); `spin_up` says when 95 % of it is there.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.fft import irfft, next_fast_len, rfft, rfftfreq
from scipy.sparse import csr_array

from waveguide.forcing.influence import Influence
from waveguide.forcing.projection import Forcing
from waveguide.forcing.transfer import WindTransfer, transfer_frequencies
from waveguide.network.graph import Network

Array = NDArray[np.float64]
Index = NDArray[np.int64]
Spectra = NDArray[np.complex64]

SPUN_UP = 0.95
MOST_POSITIONS = 240
"""Positions along a route at which the response is told."""

_ROWS_AT_ONCE = 512


@dataclass(frozen=True)
class RouteResponse:
    """Forcing and response along the main way to a target.

    Attributes
    ----------
    node : ndarray of int, shape (k,)
        Nodes from upstream to the target.
    distance : ndarray, shape (k,)
        Way to the target (m).
    delay : ndarray, shape (k,)
        Time of the energy at the dominant period to the target (s).
    stress : ndarray, shape (k, nt)
        Stress over the step that ends at the node (Pa), NaN where no wind counts.
    sea_level : ndarray, shape (k, nt)
        m.
    """

    node: Index
    distance: Array
    delay: Array
    stress: Array
    sea_level: Array


@dataclass(frozen=True)
class Period:
    """The periodic axis of time of a transform.

    Attributes
    ----------
    step : float
        s.
    times : int
        Of the record.
    count : int
        Of the period; calm fills it up.
    """

    step: float
    times: int
    count: int

    @classmethod
    def of(cls, forcing: Forcing, longest: float) -> Period:
        """Long enough for delays up to `longest` (s) and half as much again."""
        calm = int(np.ceil(1.5 * longest / forcing.step)) + forcing.time.size // 8 + 2
        times = forcing.time.size
        return cls(forcing.step, times, int(next_fast_len(times + calm, real=True)))

    @property
    def omega(self) -> Array:
        """Frequencies of the transform (rad/s), shape (count // 2 + 1,)."""
        return np.asarray(2.0 * np.pi * rfftfreq(self.count, self.step))

    @property
    def few_omega(self) -> Array:
        """Frequencies at which weights are computed (rad/s)."""
        return transfer_frequencies(self.step, self.count)

    def series(self, spectra: NDArray[np.complexfloating]) -> Array:
        """Series of the record's length of spectra (…, nω)."""
        return np.asarray(irfft(spectra, self.count, axis=-1)[..., : self.times], float)


def windy_rows(influence: Influence, forcing: Forcing) -> NDArray[np.bool_]:
    """Rows of an influence over which any wind blows, shape (n,)."""
    at, known = _rows_of_forcing(influence, forcing)
    blows = np.append(np.any(forcing.stress != 0.0, axis=1), False)
    return np.asarray(known & blows[at] & (influence.weight != 0.0))


def contributions(
    transfer: WindTransfer, influence: Influence, forcing: Forcing, period: Period, group: Index,
    count: int,
) -> Spectra:
    """Spectra of sea level at the target by groups of steps.

    Parameters
    ----------
    transfer : WindTransfer
    influence : Influence
        n rows.
    forcing : Forcing
    period : Period
    group : ndarray of int, shape (n,)
        Group of each row, −1 for none.
    count : int
        Number of groups.

    Returns
    -------
    ndarray of complex64, shape (count, nω)
        Of the transform; the sum over groups is the response (m).
    """
    result = np.zeros((count, period.omega.size), np.complex64)
    for rows, part in _parts(transfer, influence, forcing, period):
        of = group[rows]
        used = of >= 0
        chosen = csr_array(
            (np.ones(int(used.sum()), np.float32), (of[used], np.nonzero(used)[0])),
            shape=(count, rows.size),
        )
        result += chosen @ part
    return result


def _parts(
    transfer: WindTransfer, influence: Influence, forcing: Forcing, period: Period
) -> Iterator[tuple[Index, Spectra]]:
    """Some rows at a time with the spectra of what each of them makes."""
    omega, between = period.omega, _between(transfer.omega, period.omega)
    at, _ = _rows_of_forcing(influence, forcing)
    for begin in range(0, transfer.row.size, _ROWS_AT_ONCE):
        part = slice(begin, begin + _ROWS_AT_ONCE)
        rows = transfer.row[part]
        size = np.exp(transfer.log_weight[part].astype(np.float32) @ between)
        lag = transfer.lag[part].astype(np.float32) @ between
        lag += (transfer.delay[part, None] * omega).astype(np.float32)
        # NumPy's transform of real series has exp(+iωt), so a delay is exp(−i lag).
        spectra = np.asarray(rfft(forcing.stress[at[rows]], period.count, axis=1))
        size *= transfer.sign[part, None]
        spectra *= size * (np.cos(lag) - 1j * np.sin(lag))
        yield rows, spectra


def _rows_of_forcing(influence: Influence, forcing: Forcing) -> tuple[Index, NDArray[np.bool_]]:
    """Row of the forcing for every row of an influence, and whether there is one."""
    at = np.minimum(np.searchsorted(forcing.steps, influence.step), forcing.steps.size - 1)
    return at, forcing.steps[at] == influence.step


def _between(few: Array, all_omega: Array) -> NDArray[np.float32]:
    """Matrix (few, all) that interpolates linearly in ln ω; the ends are held."""
    place = np.interp(np.log(np.maximum(all_omega, few[0])), np.log(few), np.arange(few.size))
    left = np.minimum(place.astype(np.int64), few.size - 2)
    share = place - left
    matrix = np.zeros((few.size, all_omega.size), np.float32)
    column = np.arange(all_omega.size)
    matrix[left, column] = 1.0 - share
    matrix[left + 1, column] = share
    return matrix


def spin_up(influence: Influence) -> float:
    """Delay within which 95 % of the influence of a uniform wind lies (s).

    Parameters
    ----------
    influence : Influence

    Returns
    -------
    float
    """
    if not influence.weight.any():
        return 0.0
    order = np.argsort(influence.delay)
    share = np.cumsum(np.abs(influence.weight[order]))
    return float(influence.delay[order][int(np.searchsorted(share, SPUN_UP * share[-1]))])


def covered_share(influence: Influence, forcing: Forcing) -> float:
    """Share of the influence of a uniform wind that the record covers, 0 to 1.

    Parameters
    ----------
    influence : Influence
    forcing : Forcing

    Returns
    -------
    float
    """
    one = np.zeros(influence.step.size, dtype=np.int64)
    return float(covered_by_group(influence, forcing, one, 1)[0])


def covered_by_group(influence: Influence, forcing: Forcing, group: Index, count: int) -> Array:
    """The same for groups of steps, shape (count,).

    Parameters
    ----------
    influence : Influence
        k rows.
    forcing : Forcing
    group : ndarray of int, shape (k,)
        Group of each row, −1 for none.
    count : int

    Returns
    -------
    ndarray, shape (count,)
    """
    rows = np.nonzero((influence.weight != 0.0) & (group >= 0))[0]
    weight, at = np.abs(influence.weight[rows]), np.searchsorted(forcing.steps,
                                                                 influence.step[rows])
    total = np.bincount(group[rows], weight, minlength=count)
    found = np.bincount(group[rows], weight * forcing.covered[at], minlength=count)
    return np.asarray(found / np.maximum(total, 1e-300))


def main_way(influence: Influence) -> Index:
    """Rows of the way upstream along which wind counts most, from the target on.

    Parameters
    ----------
    influence : Influence

    Returns
    -------
    ndarray of int, shape (k,)
    """
    gathered = np.zeros(influence.step.size)
    for row, parent in enumerate(influence.parent.tolist()):
        gathered[row] = abs(influence.weight[row]) + (gathered[parent] if parent >= 0 else 0.0)
    rows, row = [], int(np.argmax(gathered)) if gathered.size else -1
    while row >= 0:
        rows.append(row)
        row = int(influence.parent[row])
    return np.array(rows[::-1], dtype=np.int64)


def route_response(
    network: Network, transfer: WindTransfer, influence: Influence, forcing: Forcing,
    period: Period, told_delay: Array,
) -> RouteResponse:
    """Response along the main way to a target.

    What the wind does at the target, over the gain from a node to the target, is what it does at
    the node. Step by step downstream the node's own part is added to what comes from the one
    before.

    Parameters
    ----------
    network : Network
    transfer : WindTransfer
    influence : Influence
    forcing : Forcing
    period : Period
    told_delay : ndarray, shape (n,)
        Delay that is told for the end of each row's step (s).

    Returns
    -------
    RouteResponse
    """
    way = main_way(influence)
    place = _place_on_way(influence, way)
    kept = np.arange(0, way.size, max(1, -(-way.size // MOST_POSITIONS)))
    shown = way[kept]
    # A node gets what enters at it or upstream of it.
    group = np.searchsorted(kept, place, "right") - 1
    at_node = transfer.seen_from(shown[group[transfer.row]], influence)
    parts = contributions(at_node, influence, forcing, period, group, kept.size)
    gain = transfer.log_gain[shown] + 1j * transfer.gain_lag[shown]
    later = np.diff(influence.head_delay[shown])[:, None] * period.omega
    onward = np.diff(gain, axis=0) @ _between(transfer.omega, period.omega) + 1j * later
    sign = transfer.gain_sign[shown]
    level = np.empty((kept.size, period.times))
    wave = np.zeros(period.omega.size, complex)
    for k in range(kept.size - 1, -1, -1):
        if k < kept.size - 1:
            wave = wave * np.exp(onward[k].real - 1j * onward[k].imag) * sign[k] * sign[k + 1]
        wave = wave + parts[k]
        level[k] = period.series(wave)
    at, known = _rows_of_forcing(influence, forcing)
    return RouteResponse(
        node=network.head[influence.step[shown]][::-1],
        distance=influence.distance[shown][::-1],
        delay=told_delay[shown][::-1],
        stress=np.where(known[shown, None], forcing.stress[at[shown]], np.nan)[::-1].astype(float),
        sea_level=level[::-1],
    )


def _place_on_way(influence: Influence, way: Index) -> Index:
    """For every row the place on the way at which what it sends comes in."""
    place = np.full(influence.step.size, -1, dtype=np.int64)
    place[way] = np.arange(way.size)
    on_way = place >= 0
    for row, parent in enumerate(influence.parent.tolist()):
        if on_way[row]:
            continue
        if parent < 0:
            place[row] = 0
        else:  # a branch joins the way at the tail of the step that it leads into
            place[row] = min(place[parent] + int(on_way[parent]), way.size - 1)
    return place
