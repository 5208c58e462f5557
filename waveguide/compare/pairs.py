"""Two records against the theory of the waves between their places."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from waveguide.compare.lags import Correlation, LagEstimate, cross_correlation, lag_estimate
from waveguide.compare.preparation import anomalies, in_band
from waveguide.compare.regression import Regression, regression
from waveguide.compare.series import Series, align
from waveguide.compare.significance import (
    SCRAMBLED,
    least_shifted_chance,
    scrambled_chance,
    shifted_chance,
)
from waveguide.compare.spectra import CrossSpectrum, cross_spectrum
from waveguide.compare.verdict import Verdict, verdict
from waveguide.propagation.cautions import Caution

Array = NDArray[np.float64]

BLOCK_PERIODS = 3.0
"""Length of a bootstrap block, in longest periods of the band: the products of two series in a
band forget themselves within about one, and the bootstrap's variance is low by memory/block."""

SEGMENT_PERIODS = 3.0
"""Length of a segment of the cross-spectrum, in longest periods of the band."""

LEAST_BLOCKS = 4.0
"""Fewer independent blocks than this give no interval worth the name."""

TURNS = 40
"""Records that hold so many spans of the searched lags are turned for the null test; shorter
ones are scrambled."""

SEED = 20310305
"""Of the bootstrap, so that the same records give the same interval."""


@dataclass(frozen=True)
class Prediction:
    """What theory says of one mode between two places.

    Attributes
    ----------
    mode : int
    status : str
        "reached", or why there is no lag.
    lag : float
        Days by which the second place is later in the middle of the band, NaN if none.
    front : float
        Travel time of the front (days), NaN if none.
    ratio : float
        Amplitude at the second place per amplitude at the first, in the quantities measured
        there; negative where one rises as the other falls; NaN if none.
    cautions : tuple of Caution
        Of the route between them, the most serious first.
    """

    mode: int
    status: str
    lag: float
    front: float
    ratio: float
    cautions: tuple[Caution, ...] = ()


@dataclass(frozen=True)
class PairResult:
    """All that was found for a pair.

    Attributes
    ----------
    first, second : Series
        Prepared, in the band.
    band : (shortest, longest)
        Days.
    estimate : LagEstimate
    correlation : Correlation
    chance : float
        Probability of as high a correlation without a relation.
    least_chance : float
        The smallest that this record can tell.
    null : str
        How unrelated pairs were made, "shifted" or "scrambled".
    spectrum : CrossSpectrum
        Of the anomalies before the band was passed.
    slope : Regression
        Of the second on the first at the lag.
    predictions : tuple of Prediction
    verdicts : tuple of Verdict
        One for each prediction.
    """

    first: Series
    second: Series
    band: tuple[float, float]
    estimate: LagEstimate
    correlation: Correlation
    chance: float
    least_chance: float
    null: str
    spectrum: CrossSpectrum
    slope: Regression
    predictions: tuple[Prediction, ...]
    verdicts: tuple[Verdict, ...]


def compare_pair(
    first: Series, second: Series, band: tuple[float, float],
    predictions: Sequence[Prediction], longest: float | None = None,
) -> PairResult:
    """Measure the lag of one record behind another and judge theory by it.

    Parameters
    ----------
    first, second : Series
        As read; the first is the one upstream.
    band : (shortest, longest)
        Periods (days).
    predictions : sequence of Prediction
    longest : float, optional
        Lags within ± this are searched (days); see `longest_lag`.

    Returns
    -------
    PairResult
    """
    raw = anomalies(first), anomalies(second)
    x, y, _, offset = align(*(in_band(series, band) for series in raw))
    y = y * sign_of(predictions)
    step, reach = raw[0].step, longest or longest_lag(predictions, band)
    generator = np.random.default_rng(SEED)
    block = BLOCK_PERIODS * band[1]
    estimate = shifted_estimate(lag_estimate(x, y, step, reach, block, generator), offset)
    chance, least, null = null_test(x, y, step, reach, generator)
    if estimate.blocks < LEAST_BLOCKS:
        chance = 1.0
    a, b, *_ = align(*raw)
    return PairResult(
        in_band(raw[0], band), in_band(raw[1], band), band, estimate,
        cross_correlation(x, y, step, reach), chance, least, null,
        cross_spectrum(a, b * sign_of(predictions), step, SEGMENT_PERIODS * band[1]),
        regression(x, y, round((estimate.lag - offset) / step)),
        tuple(predictions),
        tuple(verdict(estimate, chance, p.lag, p.status) for p in predictions),
    )


def null_test(
    x: Array, y: Array, step: float, reach: float, generator: np.random.Generator
) -> tuple[float, float, str]:
    """Chance of the pair's correlation, the smallest chance there can be, and how it was told.

    Parameters
    ----------
    x, y : ndarray, shape (n,)
        In one band, NaN where missing.
    step, reach : float
        Days; lags within ± reach are searched.
    generator : numpy.random.Generator

    Returns
    -------
    chance, least : float
    null : {"shifted", "scrambled"}
    """
    if x.size * step > TURNS * 2.0 * reach:
        return (
            shifted_chance(x, y, step, reach), least_shifted_chance(x.size, step, reach), "shifted"
        )
    chance = scrambled_chance(x, y, step, reach, generator)
    return chance, 1.0 / (1.0 + SCRAMBLED), "scrambled"


def sign_of(predictions: Sequence[Prediction]) -> float:
    """−1 where the second record is predicted to fall as the first rises, in the first mode."""
    known = [p.ratio for p in predictions if np.isfinite(p.ratio)]
    return -1.0 if known and known[0] < 0.0 else 1.0


def longest_lag(predictions: Sequence[Prediction], band: tuple[float, float]) -> float:
    """Lags that are searched unless told otherwise (days).

    Half as long again as the slowest prediction, and at least the longest period of the band, so
    that the neighbouring cycles are seen.

    Parameters
    ----------
    predictions : sequence of Prediction
    band : (shortest, longest)
        Days.

    Returns
    -------
    float
    """
    slowest = max((p.lag for p in predictions if np.isfinite(p.lag)), default=0.0)
    return float(max(1.5 * slowest, band[1]))


def shifted_estimate(estimate: LagEstimate, offset: float) -> LagEstimate:
    """An estimate with all lags later by `offset` days."""
    return replace(
        estimate, lag=estimate.lag + offset, low=estimate.low + offset,
        high=estimate.high + offset, rival=estimate.rival + offset,
    )
