"""Phase speed along a route, measured from its distance–time diagram.

Where the predicted speed changes along the route, what is measured is one number: the factor α by
which all travel times must be stretched so that the signal lines up. For every α the series of
all bins are taken at t + α T(s), T(s) being the predicted time, and added; the semblance

    S(α) = Σ_t (Σ_i x_i)² / Σ_t n Σ_i x_i²

is one if all bins are alike and 1/n if they have nothing in common (Neidell & Taner 1971,
Geophysics 36, 482). Every bin is brought to unit variance first, so that a wave that grows or
decays along its way counts evenly. The α of the highest S is the measured one; leaving out tenths
of the route in turn gives its standard error (the delete-a-group jackknife). Whether anything runs
along the route at all is told by how often noise without direction, alike in all else and tried at
the same α, reaches the same S (`waveguide.compare.standing_null`).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.fft import next_fast_len
from scipy.stats import t as student

from waveguide.compare.lags import CONFIDENCE
from waveguide.compare.standing_null import unit_anomalies, without_direction

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

STRETCHES = np.geomspace(1.0 / 3.0, 3.0, 221)
"""Factors α that are tried, 1 % apart."""

GROUPS = 10
"""Parts of the route that are left out in turn."""

NULLS = 199
"""Diagrams of noise without direction; the smallest chance that can be told is one in 200."""

BATCH = 50
"""Of them are held in memory at once."""

RIVAL = 0.9
"""A second maximum with this share of the highest semblance leaves the speed open."""

LEAST_FILLED = 0.9
"""Bins need values at this share of the times."""

LEAST_BINS = 6

MOST_BINS = 40
"""More bins than this are averaged with their neighbours before they are lined up."""

SEED = 20310305


@dataclass(frozen=True)
class PhaseSpeed:
    """Measured against predicted speed of a route.

    Attributes
    ----------
    predicted : float
        Mean phase speed (m/s): length by predicted time.
    measured, low, high : float
        m/s, with the interval of `CONFIDENCE`; NaN if nothing lines up.
    semblance : float
        0 to 1.
    chance : float
        Share of diagrams of noise without direction that line up as well.
    length : float
        Of the route that bins with values cover (m).
    verdict : str
        "consistent", "faster", "slower" or "not resolvable".
    reason : str
    """

    predicted: float
    measured: float
    low: float
    high: float
    semblance: float
    chance: float
    length: float
    verdict: str
    reason: str


def phase_speed(diagram: Array, days: Array, distance: Array, travel: Array) -> PhaseSpeed:
    """Measure the speed of what runs along a route.

    Parameters
    ----------
    diagram : ndarray, shape (nt, nbin)
        NaN where missing.
    days : ndarray, shape (nt,)
        Equally spaced.
    distance : ndarray, shape (nbin,)
        m along the route.
    travel : ndarray, shape (nbin,)
        Predicted travel time (days), rising.

    Returns
    -------
    PhaseSpeed
    """
    kept = np.isfinite(diagram).mean(axis=0) >= LEAST_FILLED
    if kept.sum() < LEAST_BINS:
        return _nothing(f"only {int(kept.sum())} bins of the route have values")
    s, lag = distance[kept], travel[kept]
    spent, step = float(lag[-1] - lag[0]), float(days[1] - days[0])
    if not spent > 2.0 * step:
        return _nothing("the signal is predicted to pass within two time steps of the output")
    filled, lag = thinned(without_holes(diagram[:, kept]), lag - lag[0])
    x = unit_anomalies(filled)
    stacker = Stacker.of(x, step, lag)
    stacks, power = stacker.stacks(x), stacker.power(x)
    curve = semblance(stacks.sum(axis=0), power)
    best, factor = int(np.argmax(curve)), best_stretch(curve)
    predicted = float((s[-1] - s[0]) / spent / 86400.0)
    error = _jackknife(stacks, power)
    half = float(student.ppf(0.5 * (1.0 + CONFIDENCE), GROUPS - 1)) * error
    chance = _chance(filled, stacker, float(curve.max()))
    low, high = predicted / factor / np.exp(half), predicted / factor * np.exp(half)
    word, reason = _judge(curve, best, chance, predicted, (low, predicted / factor, high))
    return PhaseSpeed(
        predicted, predicted / factor, low, high, float(curve.max()), chance, float(s[-1] - s[0]),
        word, reason,
    )


def without_holes(diagram: Array) -> Array:
    """Every bin with its own straight line where values are missing.

    Parameters
    ----------
    diagram : ndarray, shape (nt, nbin)
        Equally spaced in time, NaN where missing.

    Returns
    -------
    ndarray, shape (nbin, nt)
    """
    x = diagram.T.copy()
    at = np.linspace(-1.0, 1.0, x.shape[1])
    for row in x:
        known = np.isfinite(row)
        if not known.all():
            line = np.polyval(np.polyfit(at[known], row[known], 1), at)
            row[~known] = line[~known]
    return x


def thinned(x: Array, lag: Array) -> tuple[Array, Array]:
    """Neighbouring bins averaged to `MOST_BINS`, and their mean lag; shapes (k, nt) and (k,)."""
    groups = np.array_split(np.arange(lag.size), min(MOST_BINS, lag.size))
    return (
        np.array([x[group].mean(axis=0) for group in groups]),
        np.array([lag[group].mean() for group in groups]),
    )


@dataclass(frozen=True)
class Stacker:
    """Adds up parts of the route at every stretch, for any series at the same places.

    A series taken α T later has its spectrum times exp(2πi f α T); sums of squares over time are
    sums over frequency (Parseval). Series are padded with zeros for the longest lag, so that
    none runs into the other end.

    Attributes
    ----------
    size : int
        Of the padded series.
    turns : ndarray of complex, shape (nfrequency, nstretch, nbin)
        exp(2πi f α T) with the weight of each frequency in a sum over time.
    groups : ndarray of int, shape (ngroup,)
        First bin of each part of the route.
    """

    size: int
    turns: ComplexArray
    groups: NDArray[np.intp]

    @classmethod
    def of(cls, x: Array, step: float, lag: Array) -> Stacker:
        """Lay out the turns for series of given places and length.

        Parameters
        ----------
        x : ndarray, shape (nbin, nt)
            Sets the length, and the frequencies: those up to which 99.9 % of its energy lie.
        step : float
            Days.
        lag : ndarray, shape (nbin,)
            Predicted lag of each bin (days).

        Returns
        -------
        Stacker
        """
        pad = int(np.ceil(STRETCHES[-1] * lag[-1] / step)) + 1
        size = next_fast_len(x.shape[1] + pad, real=True)
        frequency = np.fft.rfftfreq(size, step)
        energy = np.cumsum(np.sum(np.abs(np.fft.rfft(x, size, axis=1)) ** 2, axis=0))
        used = int(np.searchsorted(energy, 0.999 * energy[-1])) + 1
        weight = np.full(frequency.size, 2.0 / size)  # both signs of frequency
        weight[0] /= 2.0
        if size % 2 == 0:
            weight[-1] /= 2.0
        phase = 2j * np.pi * frequency[:used, None, None] * STRETCHES[:, None] * lag
        groups = np.array_split(np.arange(lag.size), min(GROUPS, lag.size))
        first = np.array([group[0] for group in groups])
        return cls(size, np.exp(phase) * np.sqrt(weight[:used, None, None]), first)

    def curves(self, x: Array) -> Array:
        """S(α) of many diagrams at once.

        Parameters
        ----------
        x : ndarray, shape (n, nbin, nt)

        Returns
        -------
        ndarray, shape (n, nstretch)
        """
        spectrum = np.fft.rfft(x, self.size)
        total = np.zeros((self.turns.shape[1], len(x)))
        for f, turn in enumerate(self.turns):
            stack = turn @ spectrum[..., f].T
            total += stack.real**2 + stack.imag**2
        return np.asarray(total.T / (x.shape[1] * np.sum(x**2, axis=(1, 2)))[:, None])

    def stacks(self, x: Array) -> ComplexArray:
        """Spectrum of the sum over each part of the route, shape (ngroup, nfrequency, nstretch)."""
        spectrum = np.fft.rfft(x, self.size, axis=1)[:, : len(self.turns)].T[..., None]
        ends = [*self.groups[1:], len(x)]
        return np.array([
            (self.turns[..., first:last] @ spectrum[:, first:last])[..., 0]
            for first, last in zip(self.groups, ends, strict=True)
        ])

    def power(self, x: Array) -> Array:
        """Number of bins and Σ x² of each part, shape (ngroup, 2)."""
        total = np.add.reduceat(np.sum(x**2, axis=1), self.groups)
        return np.stack([np.diff(np.append(self.groups, len(x))), total], axis=1)


def semblance(stack: ComplexArray, power: Array) -> Array:
    """S(α) for all `STRETCHES`.

    Parameters
    ----------
    stack : ndarray of complex, shape (nfrequency, nstretch)
        Sum over all bins.
    power : ndarray, shape (ngroup, 2)
        Number of bins and Σ x² of each part.

    Returns
    -------
    ndarray, shape (nstretch,)
    """
    count, total = power.sum(axis=0)
    return np.asarray(np.sum(np.abs(stack) ** 2, axis=0) / (count * total))


def best_stretch(curve: Array) -> float:
    """α of the highest semblance, by a parabola in ln α."""
    at = int(np.clip(np.argmax(curve), 1, curve.size - 2))
    before, here, after = curve[at - 1 : at + 2]
    bend = before - 2.0 * here + after
    offset = 0.5 * (before - after) / bend if bend < 0.0 else 0.0
    step = np.log(STRETCHES[1] / STRETCHES[0])
    return float(STRETCHES[at] * np.exp(np.clip(offset, -1.0, 1.0) * step))


def _jackknife(stacks: ComplexArray, power: Array) -> float:
    """Standard error of ln α from leaving out parts of the route in turn."""
    n, whole = len(stacks), stacks.sum(axis=0)
    draws = np.array([
        np.log(best_stretch(semblance(whole - stacks[g], np.delete(power, g, axis=0))))
        for g in range(n)
    ])
    return float(np.sqrt((n - 1.0) / n * np.sum((draws - draws.mean()) ** 2)))


def _chance(filled: Array, stacker: Stacker, real: float) -> float:
    """Share of diagrams of noise without direction that line up as well at their best α."""
    generator = np.random.default_rng(SEED)
    highest = [
        stacker.curves(without_direction(filled, len(batch), generator)).max(axis=1)
        for batch in np.array_split(np.arange(NULLS), NULLS // BATCH + 1)
    ]
    return float((1.0 + np.sum(np.concatenate(highest) >= real)) / (1.0 + NULLS))


def _judge(
    curve: Array, best: int, chance: float, predicted: float, measured: tuple[float, float, float]
) -> tuple[str, str]:
    low, middle, high = measured
    told = f"{middle:.2f} [{low:.2f} to {high:.2f}] m/s against {predicted:.2f} ± 10 %"
    if chance > 0.05:
        return "not resolvable", (
            f"noise without direction lines up as well in {chance:.0%} of cases"
        )
    if best in (0, curve.size - 1):
        return "not resolvable", "the best speed lies at the edge of a third to three times theory"
    inner = np.flatnonzero((curve[1:-1] > curve[:-2]) & (curve[1:-1] >= curve[2:])) + 1
    rivals = inner[(inner != best) & (curve[inner] >= RIVAL * curve[best])]
    if rivals.size:
        other = predicted / STRETCHES[rivals[0]]
        return "not resolvable", f"{middle:.2f} and {other:.2f} m/s line up almost as well"
    if low > 1.1 * predicted:
        return "faster", told
    return ("slower", told) if high < predicted / 1.1 else ("consistent", told)


def _nothing(reason: str) -> PhaseSpeed:
    nan = float("nan")
    return PhaseSpeed(nan, nan, nan, nan, nan, 1.0, 0.0, "not resolvable", reason)
