"""Phase speed along a route, measured from its distance–time diagram.

Where the predicted speed changes along the route, what is measured is one number: the factor α by
which all travel times must be stretched so that the signal lines up. For every α the series of
all bins are taken at t + α T(s), T(s) being the predicted time, and added; the semblance

    S(α) = Σ_t (Σ_i x_i)² / Σ_t n Σ_i x_i²

is one if all bins are alike and 1/n if they have nothing in common (Neidell & Taner 1971,
Geophysics 36, 482). Every bin is brought to unit variance first, so that a wave that grows or
decays along its way counts evenly. The α of the highest S is the measured one; leaving out tenths
of the route in turn gives its standard error (the delete-a-group jackknife), and random shifts of
the bins tell whether anything lines up at all.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.fft import next_fast_len
from scipy.stats import t as student

from waveguide.compare.lags import CONFIDENCE

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

STRETCHES = np.geomspace(0.33, 3.0, 221)
"""Factors α that are tried, 1 % apart."""

GROUPS = 10
"""Parts of the route that are left out in turn."""

NULLS = 100
"""Shifted diagrams."""

RIVAL = 0.9
"""A second maximum with this share of the highest semblance leaves the speed open."""

LEAST_FILLED = 0.9
"""Bins need values at this share of the times."""

LEAST_BINS = 6

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
        Share of shifted diagrams that line up as well.
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
    x, s, lag = standardised(diagram[:, kept], days), distance[kept], travel[kept]
    lag = lag - lag[0]
    step = float(days[1] - days[0])
    if not lag[-1] > 2.0 * step:
        return _nothing("the signal is predicted to pass within two time steps of the output")
    stacks, power = group_stacks(x, step, lag)
    curve = semblance(stacks, power)
    best, factor = int(np.argmax(curve)), best_stretch(curve)
    predicted = float((s[-1] - s[0]) / lag[-1] / 86400.0)
    error = _jackknife(stacks, power)
    half = float(student.ppf(0.5 * (1.0 + CONFIDENCE), GROUPS - 1)) * error
    chance = _chance(stacks, power, float(curve.max()))
    low, high = predicted / factor / np.exp(half), predicted / factor * np.exp(half)
    word, reason = _judge(curve, best, chance, predicted, (low, predicted / factor, high))
    return PhaseSpeed(
        predicted, predicted / factor, low, high, float(curve.max()), chance, float(s[-1] - s[0]),
        word, reason,
    )


def standardised(diagram: Array, days: Array) -> Array:
    """Bins without mean and trend, at unit variance, missing values 0; shape (nbin, nt)."""
    x = diagram.T.copy()
    at = (days - days.mean()) / max(float(np.ptp(days)), 1e-9)
    for row in x:
        known = np.isfinite(row)
        row -= np.polyval(np.polyfit(at[known], row[known], 1), at)
    spread = np.nanstd(x, axis=1, keepdims=True)
    return np.asarray(np.nan_to_num(x / np.where(spread > 0.0, spread, 1.0)))


def group_stacks(x: Array, step: float, lag: Array) -> tuple[ComplexArray, Array]:
    """Spectra of the stacks of ten parts of the route, for all `STRETCHES`.

    A series taken α T later has its spectrum times exp(2πi f α T); sums of squares over time are
    sums over frequency (Parseval). The series are padded with zeros for the longest lag, so that
    none runs into the other end. Frequencies above those with 99.9 % of the energy are left out.

    Parameters
    ----------
    x : ndarray, shape (nbin, nt)
    step : float
        Days.
    lag : ndarray, shape (nbin,)
        Predicted lag of each bin (days).

    Returns
    -------
    stacks : ndarray of complex, shape (ngroup, nstretch, nfrequency)
        From frequency zero up.
        With the weight of each frequency in the sum over time.
    power : ndarray, shape (ngroup, 2)
        Number of bins and Σ x² of each group.
    """
    size = next_fast_len(x.shape[1] + int(np.ceil(STRETCHES[-1] * lag[-1] / step)) + 1, real=True)
    frequency = np.fft.rfftfreq(size, step)
    spectrum = np.fft.rfft(x, size, axis=1)
    weight = np.full(frequency.size, 2.0)  # both signs of frequency
    weight[0] = 1.0
    if size % 2 == 0:
        weight[-1] = 1.0
    energy = np.cumsum(np.sum(np.abs(spectrum) ** 2, axis=0))
    loud = np.arange(frequency.size) <= np.searchsorted(energy, 0.999 * energy[-1])
    phase = 2j * np.pi * frequency[loud]
    groups = np.array_split(np.arange(lag.size), min(GROUPS, lag.size))
    stacks = np.empty((len(groups), STRETCHES.size, int(loud.sum())), complex)
    for g, group in enumerate(groups):
        for k, factor in enumerate(STRETCHES):
            turned = np.exp(factor * np.outer(lag[group], phase))
            stacks[g, k] = np.einsum("ij,ij->j", spectrum[group][:, loud], turned)
    power = np.array([[len(group), np.sum(x[group] ** 2)] for group in groups])
    return stacks * np.sqrt(weight[loud] / size), power


def semblance(stacks: ComplexArray, power: Array) -> Array:
    """S(α) for all `STRETCHES` from the stacks of some groups, shape (nstretch,)."""
    count, total = power.sum(axis=0)
    return np.asarray(np.sum(np.abs(stacks.sum(axis=0)) ** 2, axis=1) / (count * total))


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
    n = len(stacks)
    draws = np.array([
        np.log(best_stretch(semblance(np.delete(stacks, g, axis=0), np.delete(power, g, axis=0))))
        for g in range(n)
    ])
    return float(np.sqrt((n - 1.0) / n * np.sum((draws - draws.mean()) ** 2)))


def _chance(stacks: ComplexArray, power: Array, real: float) -> float:
    """Share of diagrams whose groups of bins are shifted at random that line up as well.

    Neighbouring bins share their noise, so whole groups are shifted, on the padded ring of times:
    a shift multiplies a spectrum by exp(2πi f τ), with f counted in steps of the ring.
    """
    generator = np.random.default_rng(SEED)
    number = np.arange(stacks.shape[2])
    count = 0
    for _ in range(NULLS):
        turn = np.exp(2j * np.pi * np.outer(generator.uniform(size=len(stacks)), number))
        shifted = np.einsum("gf,gkf->kf", turn, stacks)
        highest = float(np.sum(np.abs(shifted) ** 2, axis=1).max() / np.prod(power.sum(axis=0)))
        count += highest >= real
    return (1.0 + count) / (1.0 + NULLS)


def _judge(
    curve: Array, best: int, chance: float, predicted: float, measured: tuple[float, float, float]
) -> tuple[str, str]:
    low, middle, high = measured
    told = f"{middle:.2f} [{low:.2f} to {high:.2f}] m/s against {predicted:.2f} ± 10 %"
    if chance > 0.05:
        return "not resolvable", f"bins turned at random line up as well in {chance:.0%} of cases"
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
