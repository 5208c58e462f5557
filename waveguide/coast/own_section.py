"""A section from a person's own profile of offshore distance and depth."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.coast.monotonic import isobaths
from waveguide.coast.section import Sections
from waveguide.coast.section_quality import change, interpolated_rows, shelf_and_slope
from waveguide.errors import InputError
from waveguide.modes.section import checked_section

Array = NDArray[np.float64]

_SAMPLES = 400
"""Samples of a profile that has to be made monotonic, besides its own points."""


def own_section(
    offshore: ArrayLike, depth: ArrayLike, lon: float, lat: float, name: str = "profile"
) -> Sections:
    """One section from a profile; kept point by point where it deepens all the way.

    Parameters
    ----------
    offshore : array_like, shape (n,)
        Distance from the shore (m), increasing from 0.
    depth : array_like, shape (n,)
        Depth (m), positive down.
    lon, lat : float
        Position, degrees.
    name : str
        Where the profile is from, for the messages.

    Returns
    -------
    Sections
        One row.

    Raises
    ------
    InputError
        With every problem: holes, land in the middle, depth positive up, distances unsorted,
        duplicate or not from 0.
    """
    try:
        x, h = checked_section(offshore, depth)
    except InputError as error:
        raise InputError([f"{name}: {problem}" for problem in error.problems]) from None
    fit_x, fit_h = (x, h) if np.all(np.diff(h) >= 0.0) else _fitted(x, h)
    weight = np.gradient(x)[None]
    changed = change(h[None], interpolated_rows(fit_x[None], fit_h[None], x[None]), weight)
    width, slope = shelf_and_slope(fit_x[None], fit_h[None])
    one, nan = np.ones(1), np.full(1, np.nan)
    return Sections(
        lon=lon * one, lat=lat * one, azimuth=nan, inshore=nan, wall=h[:1],
        offshore=fit_x[None], depth=fit_h[None], raw_offshore=x[None], raw_depth=h[None],
        coverage=one, rms_change=changed.rms, max_change=changed.largest,
        rms_share=changed.rms_share, max_share=changed.largest_share,
        shelf_width=width, slope=slope, facing=nan, flags=changed.flags,
    )


def _fitted(x: Array, h: Array) -> tuple[Array, Array]:
    """The closest section that deepens all the way, every metre of the profile counting alike."""
    at = np.union1d(x, np.linspace(0.0, x[-1], _SAMPLES))
    depth = np.interp(at, x, h)
    distance, level = isobaths(at, depth[None], np.gradient(at)[None])
    inshore = np.isneginf(distance[0])
    known = np.isfinite(distance[0]) & (distance[0] > 0.0) & (distance[0] < x[-1])
    wall = level[0, inshore].max(initial=min(h[0], level[0, 0]))
    beyond = level[0, np.isposinf(distance[0])].min(initial=depth.max())
    deepest = level[0, ~np.isposinf(distance[0])].max(initial=wall)
    outer = np.clip(np.median(depth[at > distance[0, known].max(initial=0.0)]), deepest, beyond)
    return (
        np.concatenate([[0.0], distance[0, known], x[-1:]]),
        np.concatenate([[wall], level[0, known], [outer]]),
    )
