"""Units that records come in, and whether values can be in them."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import GRAVITY, REFERENCE_DENSITY
from waveguide.errors import InputError

Array = NDArray[np.float64]

_LENGTH = {"mm": 1e-3, "cm": 1e-2, "dm": 0.1, "m": 1.0, "meter": 1.0, "metre": 1.0, "meters": 1.0,
           "metres": 1.0, "millimeters": 1e-3, "millimetres": 1e-3, "centimeters": 1e-2}
_DYNAMIC = {"dyncm": 0.1 / GRAVITY, "dynm": 10.0 / GRAVITY, "m2s-2": 1.0 / GRAVITY}
_WATER = 1.0 / (REFERENCE_DENSITY * GRAVITY)
_PRESSURE = {"pa": _WATER, "hpa": 100.0 * _WATER, "mbar": 100.0 * _WATER, "kpa": 1e3 * _WATER,
             "dbar": 1e4 * _WATER, "bar": 1e5 * _WATER}
_TEMPERATURE = dict.fromkeys(("degc", "°c", "c", "celsius", "degree_c", "degrees_c", "k"), 1.0)
_VELOCITY = {"m/s": 1.0, "ms-1": 1.0, "cm/s": 1e-2, "cms-1": 1e-2, "mm/s": 1e-3}

FACTORS: dict[str, dict[str, float]] = {
    "sea level": _LENGTH,
    "dynamic height": _LENGTH | _DYNAMIC,
    "temperature": _TEMPERATURE,
    "isopycnal depth": _LENGTH,
    "alongshore velocity": _VELOCITY,
    "bottom pressure": _LENGTH | _PRESSURE,
}
"""SI units per unit, by quantity: metres (of water, of sea level at the same geopotential), °C,
m/s. A dynamic metre is 10 m²/s²."""

WIDEST = {
    "sea level": 5.0, "dynamic height": 5.0, "temperature": 15.0, "isopycnal depth": 500.0,
    "alongshore velocity": 3.0, "bottom pressure": 5.0,
}
"""Robust standard deviations that no record of the quantity has (SI); tides included."""

NARROWEST = 1e-4
"""A tenth of a millimetre, a ten-thousandth of a degree or of a metre per second."""

UNIT_RATIO = 8.0
"""Parts of one record whose level and scatter both differ by this factor are in other units: the
next unit is ten times as large."""

ISLAND_FAR = 4.0
"""A run of values in another unit lies so many robust standard deviations from the median."""

ISLAND_LEAST = 10
"""It has so many values at least: fewer tell no scatter."""


def si_factor(units: str | None, quantity: str, name: str) -> float:
    """SI units in the units of a record.

    Parameters
    ----------
    units : str or None
    quantity : str
    name : str
        Of the record, for the message.

    Returns
    -------
    float

    Raises
    ------
    InputError
        If there are none, or they do not measure the quantity.
    """
    known = FACTORS[quantity]
    wanted = ", ".join(sorted(known))
    if units is None:
        raise InputError(
            f"{name!r}: the file does not say the units of {quantity}; write them in its "
            f'[[observations]] table, as in units = "{next(iter(known))}" (known are {wanted})'
        )
    key = "".join(units.lower().replace("-", " ").replace(".", " ").split())
    spelled = {k.replace("-", ""): factor for k, factor in known.items()}
    if key not in spelled:
        raise InputError(
            f"{name!r}: units {units!r} do not measure {quantity}; known are {wanted}"
        )
    return spelled[key]


def robust_scatter(values: Array) -> float:
    """1.4826 times the median distance from the median, of the values there are."""
    return float(1.4826 * np.nanmedian(np.abs(values - np.nanmedian(values))))


def check_scatter(values: Array, quantity: str, units: str, name: str) -> None:
    """Refuse a record that varies more or less than its quantity can, or changes its unit.

    Parameters
    ----------
    values : ndarray, shape (n,)
        SI, NaN where missing.
    quantity, units, name : str

    Raises
    ------
    InputError
    """
    part = unit_change(values)
    part = unit_island(values) if part is None else part
    if part is not None:
        raise InputError(
            f"{name!r}: level and scatter of {quantity} change {UNIT_RATIO:g}-fold or more about "
            f"value {part + 1} of {values.size}: the units are mixed; bring the record to one unit"
        )
    scatter = robust_scatter(values)
    if scatter > WIDEST[quantity] or scatter < NARROWEST:
        raise InputError(
            f"{name!r}: {quantity} read in {units} varies by {scatter:.3g} SI units, which no "
            "ocean does; correct units in its [[observations]] table, or look whether the record "
            "is a constant"
        )


def unit_change(values: Array, parts: int = 20) -> int | None:
    """Index of the part of a record from which it is in another unit, None if in none."""
    if values.size < 20 * parts:
        return None
    edges = np.linspace(0, values.size, parts + 1).astype(int)
    chunks = [values[a:b] for a, b in pairwise(edges)]
    known = [i for i, chunk in enumerate(chunks) if np.isfinite(chunk).sum() >= 10]
    scatter = np.array([robust_scatter(chunks[i]) for i in known])
    level = np.array([abs(float(np.nanmedian(chunks[i]))) for i in known])
    if len(known) < 2:
        return None
    logs = np.log(np.maximum(np.stack([scatter, level]), 1e-12))
    steps = np.array([
        logs[:, k:].mean(axis=1) - logs[:, :k].mean(axis=1)
        for k in range(1, len(known))
    ])
    both = np.where(np.prod(steps, axis=1) > 0.0, np.abs(steps).min(axis=1), 0.0)
    contrast = both * np.sqrt(np.arange(1, len(known)) * np.arange(len(known) - 1, 0, -1))
    best = int(np.argmax(contrast))
    return int(edges[known[best + 1]]) if both[best] > np.log(UNIT_RATIO) else None


def unit_island(values: Array) -> int | None:
    """First value of a run amid a record that is in another unit, None if there is none.

    Parameters
    ----------
    values : ndarray, shape (n,)
        NaN where missing.

    Returns
    -------
    int or None
    """
    known = np.flatnonzero(np.isfinite(values))
    x = values[known]
    far = np.abs(x - np.median(x)) > ISLAND_FAR * robust_scatter(x)
    edges = np.flatnonzero(np.diff(np.concatenate([[0], far.astype(int), [0]])))
    for first, last in zip(edges[::2], edges[1::2], strict=True):
        if last - first >= ISLAND_LEAST and _other_unit(x[first:last], x[~far]):
            return int(known[first])
    return None


def _other_unit(part: Array, rest: Array) -> bool:
    """Whether level and changes from value to value differ as by a unit, and the same way.

    Few values tell their scatter badly, so half the ratio is enough of it.
    """
    pairs = [(abs(float(np.median(v))), robust_scatter(np.diff(v))) for v in (part, rest)]
    level, scatter = np.diff(np.log(np.maximum(pairs, 1e-12)), axis=0)[0]
    large = abs(level) > np.log(UNIT_RATIO) and abs(scatter) > np.log(0.5 * UNIT_RATIO)
    return bool(large and level * scatter > 0.0)
