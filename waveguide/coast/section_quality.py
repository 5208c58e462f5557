"""What is odd about a section, and how far its monotonic version is from the raw one."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntFlag
from typing import Any

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.section_extent import Extents

Array = NDArray[np.float64]

SHELF_EDGE = 200.0
"""The isobath that bounds the shelf (m)."""

SLOPE_FOOT = 0.8
"""The slope ends at this share of the depth at the section's outer end."""

TRENCH_SHARE, TRENCH_DEPTH = 0.2, 500.0
"""A trench is deeper than the fit by this share of it and by this much (m)."""

BANK_SHARE = 0.5
"""A bank is shallower than this share of the fit."""


class QualityFlag(IntFlag):
    """What is odd about a section or about the modes found on it, one bit each."""

    NO_SECTION = 1
    FACING_COAST = 2
    ISLAND = 4
    BANK = 8
    TRENCH = 16
    NO_SHORE = 32
    WIDE_SHELF = 64
    CUT_BY_DATA = 128
    MUCH_ALTERED = 256
    FLAT_BOTTOM = 512
    NOT_CONVERGED = 1024
    NOT_COMPUTED = 2048

    @property
    def words(self) -> str:
        """The flags in words, separated by commas."""
        return ", ".join(
            str(flag.name).lower().replace("_", " ") for flag in type(self) if flag & self
        )


MEANING = {
    QualityFlag.NO_SECTION: "no water along the ray",
    QualityFlag.FACING_COAST: "another coast ends the section; deep water beyond it is assumed",
    QualityFlag.ISLAND: "land seaward of the shore, passed over",
    QualityFlag.BANK: "a rise to less than half the depth around it, levelled",
    QualityFlag.TRENCH: "a deep of 500 m and a fifth below its surroundings, levelled",
    QualityFlag.NO_SHORE: "the inner end is the crest of a bank or sill, taken as a wall",
    QualityFlag.WIDE_SHELF: "no shore within 600 km; the inner end is taken as a wall",
    QualityFlag.CUT_BY_DATA: "the depths end before the section does",
    QualityFlag.MUCH_ALTERED: "the monotonic depth differs by more than a quarter (rms)",
    QualityFlag.FLAT_BOTTOM: "no modes of the section; those of the adjoining flat bottom",
    QualityFlag.NOT_CONVERGED: "the speeds are less accurate than was asked",
    QualityFlag.NOT_COMPUTED: "outside the region that was asked for",
}
"""What each flag says."""

MOST_ALTERED = 0.25
"""Root-mean-square relative change of depth beyond which a section is marked."""

LEAST_DEPTH = 50.0
"""Changes are measured against no less than this depth (m): a beach is not a bad fit."""


@dataclass(frozen=True)
class Change:
    """How far monotonic sections are from the raw ones.

    Attributes
    ----------
    rms, largest : ndarray, shape (n,)
        Difference of depth (m), the first with the weight of the fit.
    rms_share, largest_share : ndarray, shape (n,)
        The same in units of the greater of the two depths, at least `LEAST_DEPTH`.
    flags : ndarray of int, shape (n,)
        ISLAND, BANK, TRENCH and MUCH_ALTERED where they apply.
    """

    rms: Array
    largest: Array
    rms_share: Array
    largest_share: Array
    flags: NDArray[np.int64]


def interpolated_rows(x: Array, y: Array, at: Array) -> Array:
    """Linear interpolation of each row of y(x) at the positions of the same row of `at`.

    Parameters
    ----------
    x, y : ndarray, shape (n, k)
        Increasing x; NaN where not used.
    at : ndarray, shape (n, m)
        NaN gives NaN.

    Returns
    -------
    ndarray, shape (n, m)
        The end values beyond the ends; NaN for rows without points.
    """
    result = np.full(at.shape, np.nan)
    for row in np.flatnonzero(np.isfinite(x).any(axis=1)):
        known = np.isfinite(x[row])
        result[row] = np.interp(at[row], x[row, known], y[row, known])
    return result


def change(raw: Array, fit: Array, weight: Array) -> Change:
    """Compare raw and monotonic depths at the samples of the rays.

    Parameters
    ----------
    raw, fit : ndarray, shape (n, k)
        Depths (m); `raw` is 0 or less on land.
    weight : ndarray, shape (n, k)
        Weight of the samples, 0 outside the section.

    Returns
    -------
    Change
    """
    used = weight > 0.0
    h, g = np.where(used, np.maximum(raw, 0.0), 0.0), np.where(used, fit, 0.0)
    difference = np.abs(h - g)
    share = difference / np.maximum(np.maximum(h, g), LEAST_DEPTH)
    total = np.maximum(weight.sum(axis=1), 1e-30)

    def rms(values: Array) -> Array:
        return np.asarray(np.sqrt((weight * values**2).sum(axis=1) / total))

    rms_share = rms(share)
    island = (used & (raw <= 0.0)).any(axis=1)
    bank = (used & (raw > 0.0) & (h < BANK_SHARE * g) & (g > LEAST_DEPTH)).any(axis=1)
    trench = (used & (h - g > np.maximum(TRENCH_DEPTH, TRENCH_SHARE * g))).any(axis=1)
    flags = combined({
        QualityFlag.ISLAND: island, QualityFlag.BANK: bank, QualityFlag.TRENCH: trench,
        QualityFlag.MUCH_ALTERED: rms_share > MOST_ALTERED,
    })
    return Change(rms(difference), difference.max(axis=1), rms_share, share.max(axis=1), flags)


def combined(marks: dict[QualityFlag, Any]) -> NDArray[np.int64]:
    """Bits of several flags, from masks of shape (n,)."""
    return np.asarray(sum(int(flag) * mask.astype(np.int64) for flag, mask in marks.items()))


def extent_flags(extents: Extents) -> NDArray[np.int64]:
    """Flags that follow from where sections begin and end, shape (n,)."""
    return combined({
        QualityFlag.NO_SECTION: ~extents.found,
        QualityFlag.FACING_COAST: np.isfinite(extents.facing),
        QualityFlag.NO_SHORE: extents.no_shore,
        QualityFlag.WIDE_SHELF: extents.cut_shelf,
        QualityFlag.CUT_BY_DATA: extents.cut_data,
    })


def shelf_and_slope(x: Array, h: Array) -> tuple[Array, Array]:
    """Width of the shelf and mean slope beyond it.

    Parameters
    ----------
    x, h : ndarray, shape (n, k)
        Monotonic sections (m), NaN where not used.

    Returns
    -------
    width : ndarray, shape (n,)
        Distance of the `SHELF_EDGE` isobath (m), 0 where the wall is deeper and the whole section
        where none of it is.
    slope : ndarray, shape (n,)
        Rise over run from there to `SLOPE_FOOT` of the outer depth; NaN without such a slope.
    """
    deepest = np.nanmax(np.where(np.isnan(h), -np.inf, h), axis=1)
    top = np.maximum(SHELF_EDGE, h[:, 0])
    marks = interpolated_rows(h, x, np.column_stack([top, SLOPE_FOOT * deepest]))
    rise, run = SLOPE_FOOT * deepest - top, marks[:, 1] - marks[:, 0]
    steep = (rise > 0.0) & (run > 0.0)
    return marks[:, 0], np.where(steep, rise / np.where(steep, run, 1.0), np.nan)
