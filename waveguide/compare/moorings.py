"""Several instruments at one place against the vertical structure of the modes.

Per metre of sea level at the surface a mode of pressure structure p(z) has, with the displacement
ζ = −g p_z/(N² p(0)) of isopycnals (upward),

- sea level and dynamic height: 1;
- pressure at depth, as metres of water: p(z)/p(0);
- current along the guide, downstream positive: (g/c) p(z)/p(0), geostrophic on the coast itself
  and the Kelvin wave's own on the equator;
- depth of an isopycnal: −ζ;
- temperature at a fixed depth: −ζ T_z, T_z the cooling downward. Where nobody measured it,
  T_z = N²/(gα) with α = 2·10⁻⁴ 1/K, which leaves salinity out.

Every instrument is regressed on one of them, the reference; the slopes are the measured structure
in units of the reference, and what one mode explains of all instruments together says which mode
the mooring has seen.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from waveguide.compare.preparation import anomalies, in_band
from waveguide.compare.regression import Regression, regression
from waveguide.compare.series import Series, align
from waveguide.constants import GRAVITY
from waveguide.errors import InputError
from waveguide.modes.vertical import VerticalModes

Array = NDArray[np.float64]

EXPANSION = 2.0e-4
"""Thermal expansion (1/K) of sea water near 15 °C; Gill (1982), appendix 3."""

STRUCTURE_ERROR = 0.25
"""Relative error of a predicted ratio that is allowed for: stratification of a climatology against
that of the day (our choice, MEMORY: interannual changes of N² in the thermocline)."""

Word = Literal["consistent", "too weak", "too strong", "wrong sign", "not resolvable"]


@dataclass(frozen=True)
class InstrumentResult:
    """One instrument of a mooring.

    Attributes
    ----------
    series : Series
        In the band.
    slope : Regression
        On the reference; SI units per SI unit.
    predicted : ndarray, shape (nmode,)
        The same ratio for each mode.
    words : tuple of str
        One for each mode: consistent, too weak, too strong, wrong sign, not resolvable.
    """

    series: Series
    slope: Regression
    predicted: Array
    words: tuple[Word, ...]


@dataclass(frozen=True)
class MooringResult:
    """A mooring.

    Attributes
    ----------
    reference : str
        Name of the record all are regressed on.
    instruments : tuple of InstrumentResult
        The others, in the order given.
    modes : ndarray of int, shape (nmode,)
    explained : ndarray, shape (nmode,)
        Share of the variance of all instruments (each in units of its own) that a mode's
        structure explains alone, with an amplitude free at every time.
    pattern_variance : float
        Share that the best structure of all would explain: the first empirical mode.
    """

    reference: str
    instruments: tuple[InstrumentResult, ...]
    modes: NDArray[np.int_]
    explained: Array
    pattern_variance: float


def responses(
    quantity: str, depth: float, modes: VerticalModes, gradient: float | None = None
) -> Array:
    """What an instrument measures per metre of sea level in each mode.

    Parameters
    ----------
    quantity : str
        See `Series`.
    depth : float
        Of the instrument (m).
    modes : VerticalModes
    gradient : float, optional
        Cooling downward (°C/m), needed for temperature.

    Returns
    -------
    ndarray, shape (nmode,)
        SI units per metre.

    Raises
    ------
    InputError
        If the instrument lies below the bottom.
    """
    if depth > modes.depth[-1]:
        raise InputError(
            f"depth_m = {depth:g}: the water there is {modes.depth[-1]:.0f} m deep; correct the "
            "depth or the position"
        )
    pressure = _at(depth, modes, modes.structure) / modes.structure[:, 0]
    if quantity == "bottom pressure":
        return pressure
    if quantity == "alongshore velocity":
        return np.asarray(GRAVITY / modes.phase_speed * pressure)
    if quantity == "isopycnal depth":
        return -_at(depth, modes, modes.displacement)
    if quantity == "temperature":
        assert gradient is not None
        return np.asarray(-gradient * _at(depth, modes, modes.displacement))
    return np.ones(modes.mode.size)


def gradient_from_n2(n2: float) -> float:
    """Cooling downward N²/(gα) (°C/m) of water stratified by temperature alone, N² in 1/s²."""
    return n2 / (GRAVITY * EXPANSION)


def _at(depth: float, modes: VerticalModes, structure: Array) -> Array:
    return np.array([np.interp(depth, modes.depth, row) for row in structure])


def compare_mooring(
    records: Sequence[Series], response: Array, modes: NDArray[np.int_], band: tuple[float, float]
) -> MooringResult:
    """Measured against predicted structure.

    Parameters
    ----------
    records : sequence of Series
        Of one place; the first is the reference.
    response : ndarray, shape (nrecord, nmode)
        From `responses`.
    modes : ndarray of int, shape (nmode,)
    band : (shortest, longest)
        Days.

    Returns
    -------
    MooringResult
    """
    banded = [in_band(anomalies(series), band) for series in records]
    found = []
    for series, row in zip(banded[1:], response[1:], strict=True):
        x, y, *_ = align(banded[0], series)
        slope = regression(x, y, 0)
        predicted = np.asarray(row / response[0])
        words = tuple(structure_word(slope, float(value)) for value in predicted)
        found.append(InstrumentResult(series, slope, predicted, words))
    explained, best = explained_variance(_matrix(banded), response)
    return MooringResult(banded[0].name, tuple(found), modes, explained, best)


def structure_word(slope: Regression, predicted: float) -> Word:
    """What a measured ratio says of a predicted one.

    Parameters
    ----------
    slope : Regression
    predicted : float

    Returns
    -------
    str
    """
    sign = 1.0 if predicted >= 0.0 else -1.0
    low, high = sorted((sign * slope.low, sign * slope.high))
    weak = (1.0 - STRUCTURE_ERROR) * abs(predicted)
    strong = (1.0 + STRUCTURE_ERROR) * abs(predicted)
    if low <= 0.0 <= high:
        return "not resolvable" if high >= weak else "too weak"
    if high < 0.0:
        return "wrong sign"
    if high < weak:
        return "too weak"
    return "too strong" if low > strong else "consistent"


def explained_variance(values: Array, response: Array) -> tuple[Array, float]:
    """Share of variance that each structure explains, and the share of the best one of all.

    Every instrument is divided by its standard deviation, so that degrees and metres count alike.
    With an amplitude free at every time a structure g explains |d·g|²/|g|² of |d|²; the most that
    any can is the largest eigenvalue of the correlation matrix over the number of instruments.

    Parameters
    ----------
    values : ndarray, shape (nrecord, n)
        At times when all are there.
    response : ndarray, shape (nrecord, nmode)

    Returns
    -------
    explained : ndarray, shape (nmode,)
    best : float
    """
    if values.shape[1] < 3:
        return np.full(response.shape[1], np.nan), float("nan")
    scale = values.std(axis=1, keepdims=True)
    unit = values / scale
    structure = response / scale
    structure = structure / np.linalg.norm(structure, axis=0)
    total = float(np.sum(unit**2))
    explained = np.sum((structure.T @ unit) ** 2, axis=1) / total
    best = float(np.linalg.eigvalsh(unit @ unit.T)[-1]) / total
    return np.asarray(explained), best


def _matrix(records: Sequence[Series]) -> Array:
    """Values at the times when all records have one, shape (nrecord, n)."""
    start = max(series.start for series in records)
    rows = []
    for series in records:
        skip = round(float((start - series.start) / np.timedelta64(1, "s")) / 86400.0 / series.step)
        rows.append(series.values[max(skip, 0) :])
    size = max(min(row.size for row in rows), 0)
    stacked = np.stack([row[:size] for row in rows])
    return np.asarray(stacked[:, np.isfinite(stacked).all(axis=0)])
