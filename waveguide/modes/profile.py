"""One stratification profile N²(z) and its depth integrals, used by the section problems."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.errors import InputError

Array = NDArray[np.float64]

LEAST_N2 = 1e-10
"""Stand-in for smaller N² (1/s²). It would give 4000 m of water c₁ = 0.013 m/s, so it changes
no oceanic speed by 1e-4, and keeps the sections' matrices well conditioned."""


@dataclass(frozen=True)
class Profile:
    """N² linear between its depths, held above the first and below the last.

    Attributes
    ----------
    depth : ndarray, shape (n,)
        Depths (m, positive down, increasing), the first one 0.
    n2 : ndarray, shape (n,)
        Buoyancy frequency squared there (1/s²), at least `LEAST_N2`.
    n2_above : ndarray, shape (n,)
        ∫ N² from the surface down to each depth (m/s²).
    n_above : ndarray, shape (n,)
        ∫ N from the surface down to each depth (m/s).
    """

    depth: Array
    n2: Array
    n2_above: Array
    n_above: Array

    def at(self, depth: Array) -> Array:
        """N² (1/s²) at depths (m)."""
        return np.interp(depth, self.depth, self.n2)

    def n2_integral(self, depth: Array) -> Array:
        """∫ N² dz from the surface down to depths (m); exact, result in m/s²."""
        i, below = self._locate(depth)
        result: Array = self.n2_above[i] + 0.5 * (self.n2[i] + self.at(depth)) * below
        return result

    def n_integral(self, depth: Array) -> Array:
        """∫ N dz from the surface down to depths (m); exact, result in m/s."""
        i, below = self._locate(depth)
        result: Array = self.n_above[i] + _mean_n(self.n2[i], self.at(depth)) * below
        return result

    def _locate(self, depth: Array) -> tuple[NDArray[np.intp], Array]:
        i = np.searchsorted(self.depth, depth, side="right") - 1
        return i, depth - self.depth[i]


def _mean_n(upper: Array, lower: Array) -> Array:
    """Mean of N between two depths of linear N²: (2/3)(a² + ab + b²)/(a + b), a and b the two N."""
    a, b = np.sqrt(upper), np.sqrt(lower)
    mean: Array = (2.0 / 3.0) * (a * a + a * b + b * b) / (a + b)
    return mean


def make_profile(n2: ArrayLike, depth: ArrayLike) -> Profile:
    """Check a profile and integrate it.

    Parameters
    ----------
    n2 : array_like, shape (n,)
        Buoyancy frequency squared (1/s²), not negative.
    depth : array_like, shape (n,)
        Depths of `n2` (m, positive down, increasing).

    Returns
    -------
    Profile
        With a value at the surface, and values below `LEAST_N2` raised to it.

    Raises
    ------
    InputError
        If values are missing or negative, or depths are not increasing.
    """
    values, levels = _checked(n2, depth)
    if levels[0] > 0.0:
        levels, values = np.append(0.0, levels), np.append(values[0], values)
    values = np.maximum(values, LEAST_N2)
    step = np.diff(levels)
    n2_above = np.append(0.0, np.cumsum(0.5 * (values[1:] + values[:-1]) * step))
    n_above = np.append(0.0, np.cumsum(_mean_n(values[:-1], values[1:]) * step))
    return Profile(levels, values, n2_above, n_above)


def _checked(n2: ArrayLike, depth: ArrayLike) -> tuple[Array, Array]:
    values = np.asarray(n2, dtype=float)
    levels = np.asarray(depth, dtype=float)
    if values.ndim != 1 or values.shape != levels.shape or values.size == 0:
        raise InputError(
            f"n2 has shape {values.shape} and its depths {levels.shape}: give one value per depth"
        )
    problems = []
    if not np.all(np.isfinite(values)):
        problems.append(
            "n2 has missing values: fill them, or repeat the deepest known value further down"
        )
    if np.any(values < 0.0):
        problems.append(
            f"n2 reaches {np.nanmin(values):.3g} 1/s²: stratification must be stable; sort or "
            "smooth the density profile, or set negative values to 0"
        )
    if not (np.all(np.diff(levels) > 0.0) and levels[0] >= 0.0 and np.isfinite(levels[-1])):
        problems.append(
            "depths of n2 must increase downward from 0 or more, without duplicates or holes"
        )
    if problems:
        raise InputError(problems)
    return values, levels
