"""Dispersion of coastal-trapped waves whose frequency is not small against f.

For given wavenumber l and frequency ω < |f| the section problem of
:mod:`waveguide.modes.assembly` has eigenvalues κ_n(l, ω) of K(l, ω) p = κ B p; a free wave
satisfies κ_n(l, ω) = |f| l/ω. So the quadratic eigenproblem in l at given ω is solved by one
symmetric eigenproblem per step of a scalar equation. K grows with l², hence κ_n too: its curve
leaves the origin's tangent |f| l/ω = κ_n(0) upward, meets the straight line |f| l/ω first at the
long wave, where group and phase travel downstream, again at the short wave, whose group travels
upstream, and not at all above the frequency where the two merge: the wave stops there
(Buchwald & Adams 1968, Proc. R. Soc. A 305, 235; Huthnance 1978, J. Phys. Oceanogr. 8, 74).
Strong stratification can keep the group downstream at every frequency below |f|.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import GRAVITY, SECONDS_PER_DAY
from waveguide.errors import InputError
from waveguide.modes.assembly import Rotation
from waveguide.modes.barotropic import refined, solve_depth_averaged
from waveguide.modes.profile import make_profile
from waveguide.modes.section import checked_section
from waveguide.modes.trapped import (
    TOLERANCE,
    check_numbers,
    converged_solutions,
    extrapolated,
    solve_on_mesh,
)

Array = NDArray[np.float64]

_HIGHEST = 0.99
"""Highest frequency tried, relative to |f|: at |f| the vertical term vanishes."""

_ROOT = 1e-7
_MOST_STEPS = 40
_PROBE = 1e-2
"""Relative accuracy of l, steps to it, and relative step of numerical derivatives."""


@dataclass(frozen=True)
class Guide:
    """A section as the dispersion relation sees it.

    Attributes
    ----------
    f : float
        Coriolis parameter (1/s).
    mode : ndarray of int, shape (nmode,)
        Mode numbers.
    eigenvalues : callable
        (l, ω) ↦ κ_n (1/m), at least `nmode` of them, increasing.
    """

    f: float
    mode: NDArray[np.int_]
    eigenvalues: Callable[[float, float], Array]


@dataclass(frozen=True)
class Dispersion:
    """Free waves of one frequency.

    Attributes
    ----------
    mode : ndarray of int, shape (nmode,)
        Mode numbers.
    wavenumber : ndarray, shape (nmode,)
        Alongshore wavenumber l of the long wave (1/m), NaN where the mode has stopped.
    phase_speed, group_speed : ndarray, shape (nmode,)
        ω/l and dω/dl (m/s), downstream.
    """

    mode: NDArray[np.int_]
    wavenumber: Array
    phase_speed: Array
    group_speed: Array


def stratified_guide(
    offshore: ArrayLike,
    depth: ArrayLike,
    n2: ArrayLike,
    n2_depth: ArrayLike,
    f: float,
    *,
    count: int = 3,
    rigid_lid: bool = False,
    tolerance: float = TOLERANCE,
) -> Guide:
    """Guide of a stratified section.

    Parameters
    ----------
    offshore, depth, n2, n2_depth, f, count, rigid_lid, tolerance
        As for `waveguide.modes.trapped.trapped_modes`; the mesh is the one that gives the long
        waves within `tolerance`.

    Returns
    -------
    Guide
        For `dispersion` and `cutoff`.

    Raises
    ------
    InputError
        As `trapped_modes`.
    """
    x, h = checked_section(offshore, depth)
    profile = make_profile(n2, n2_depth)
    check_numbers(f, count, tolerance)
    gravity = np.inf if rigid_lid else GRAVITY
    long_waves = Rotation(f * f, 0.0, gravity)
    pair = converged_solutions(x, h, profile, f, long_waves, count, tolerance)[:2]

    def solve(rotation: Rotation, modes: int) -> Array:
        coarse, fine = (
            solve_on_mesh(solution.mesh, profile, f, rotation, modes).eigenvalue
            for solution in pair
        )
        return extrapolated(coarse, fine)

    return _guide(solve, f, count, gravity)


def barotropic_guide(
    offshore: ArrayLike,
    depth: ArrayLike,
    f: float,
    *,
    count: int = 3,
    rigid_lid: bool = False,
) -> Guide:
    """Guide of an unstratified section.

    Parameters
    ----------
    offshore, depth, f, count, rigid_lid
        As for `waveguide.modes.barotropic.barotropic_modes`.

    Returns
    -------
    Guide
        For `dispersion` and `cutoff`.

    Raises
    ------
    InputError
        As `barotropic_modes`.
    """
    x, h = checked_section(offshore, depth)
    check_numbers(f, count, TOLERANCE)
    grids = [refined(x, h, refinement) for refinement in (2, 4)]

    def solve(rotation: Rotation, modes: int) -> Array:
        coarse, fine = (1.0 / solve_depth_averaged(*grid, rotation, modes)[0] for grid in grids)
        return extrapolated(coarse, fine)

    return _guide(solve, f, count, np.inf if rigid_lid else GRAVITY)


def _guide(solve: Callable[[Rotation, int], Array], f: float, count: int, gravity: float) -> Guide:
    """Under a rigid lid the first eigenvalue of l > 0 is that of ω = |f|, and is left out."""
    first = int(np.isinf(gravity))

    def eigenvalues(wavenumber: float, frequency: float) -> Array:
        rotation = Rotation(f * f - frequency**2, wavenumber, gravity)
        found = solve(rotation, count) if rotation.floating else solve(rotation, count + 1)[first:]
        # a nearly flat bottom holds fewer modes; the missing ones have no speed at all
        return np.pad(found, (0, count + 1 - first - found.size), constant_values=np.inf)

    modes = int(np.isfinite(eigenvalues(0.0, 0.0)).sum())
    return Guide(f, first + np.arange(modes), eigenvalues)


def dispersion(guide: Guide, frequency: float) -> Dispersion:
    """Wavenumber, phase and group speed of every mode at one frequency.

    Parameters
    ----------
    guide : Guide
        From `stratified_guide` or `barotropic_guide`.
    frequency : float
        Angular frequency ω (1/s), 0 < ω < |f|.

    Returns
    -------
    Dispersion
        NaN for modes that have stopped below this frequency.

    Raises
    ------
    InputError
        If ω is not between 0 and |f|.
    """
    if not 0.0 < frequency < abs(guide.f):
        raise InputError(
            f"frequency is {frequency:.3g} 1/s: coastal-trapped waves have frequencies between 0 "
            f"and |f| = {abs(guide.f):.3g} 1/s; give a period longer than "
            f"{2.0 * np.pi / abs(guide.f) / SECONDS_PER_DAY:.4g} days"
        )
    modes = range(guide.mode.size)
    wavenumber = np.array([_wavenumber(guide, n, frequency) for n in modes])
    group = np.array([_group_speed(guide, n, wavenumber[n], frequency) for n in modes])
    return Dispersion(guide.mode, wavenumber, frequency / wavenumber, group)


def _wavenumber(guide: Guide, n: int, frequency: float) -> float:
    """First root of κ_n(l, ω) = |f| l/ω, NaN if there is none.

    The difference of the two sides starts positive and is convex (but for avoided crossings of
    two modes), so secants approach the root from the left; once one has passed it, the root is
    bracketed. Where the difference rises while it is still positive there is no root.
    """
    from scipy.optimize import brentq  # here, because most answers never need it

    steepness = abs(guide.f) / frequency

    def excess(wavenumber: float) -> float:
        return float(guide.eigenvalues(wavenumber, frequency)[n]) - steepness * wavenumber

    previous, here = 0.0, float(guide.eigenvalues(0.0, frequency)[n]) / steepness
    before, now = steepness * here, excess(here)
    for _ in range(_MOST_STEPS):
        if now <= 0.0:
            return float(brentq(excess, previous, here, rtol=_ROOT))
        if now >= before:
            break
        following = here - now * (here - previous) / (now - before)
        if following - here <= _ROOT * following:
            return following
        previous, before, here = here, now, following
        now = excess(here)
    return np.nan


def _group_speed(guide: Guide, n: int, wavenumber: float, frequency: float) -> float:
    """dω/dl along ω κ_n(l, ω) = |f| l, with derivatives of κ_n by central differences."""
    if np.isnan(wavenumber):
        return np.nan
    up, down = 1.0 + _PROBE, 1.0 - _PROBE

    def value(a: float, b: float) -> float:
        return float(guide.eigenvalues(a * wavenumber, b * frequency)[n])

    here = abs(guide.f) * wavenumber / frequency
    by_wavenumber = (value(up, 1.0) - value(down, 1.0)) / (2.0 * _PROBE * wavenumber)
    by_frequency = (value(1.0, up) - value(1.0, down)) / (2.0 * _PROBE * frequency)
    return (abs(guide.f) - frequency * by_wavenumber) / (here + frequency * by_frequency)


def free_frequency(guide: Guide, n: int, wavenumber: float) -> float:
    """Frequency of a free wave of given wavenumber.

    Parameters
    ----------
    guide : Guide
        From `stratified_guide` or `barotropic_guide`.
    n : int
        Index of the mode in `guide.mode`.
    wavenumber : float
        Alongshore wavenumber l (1/m), positive.

    Returns
    -------
    float
        ω (1/s); NaN where it would exceed 0.99 |f|.
    """
    from scipy.optimize import brentq  # as in `_wavenumber`

    def excess(frequency: float) -> float:
        kappa = float(guide.eigenvalues(wavenumber, frequency)[n])
        return frequency * kappa - abs(guide.f) * wavenumber

    highest = _HIGHEST * abs(guide.f)
    if excess(highest) < 0.0:
        return np.nan
    return float(brentq(excess, 0.0, highest, rtol=1e-6))


def cutoff(guide: Guide, n: int) -> tuple[float, float]:
    """Highest frequency of a mode, and its wavenumber.

    Parameters
    ----------
    guide : Guide
        From `stratified_guide` or `barotropic_guide`.
    n : int
        Index of the mode in `guide.mode`.

    Returns
    -------
    frequency : float
        ω (1/s) above which the mode does not travel downstream, within 0.25 %; |f| if it does
        at all sub-inertial frequencies (up to 0.99 |f|).
    wavenumber : float
        l (1/m) there, NaN in the second case.
    """
    travels, stops = 0.0, _HIGHEST * abs(guide.f)
    if not np.isnan(_wavenumber(guide, n, stops)):
        return abs(guide.f), np.nan
    wavenumber = 0.0
    while stops - travels > TOLERANCE * stops:
        middle = 0.5 * (travels + stops)
        found = _wavenumber(guide, n, middle)
        if np.isnan(found):
            stops = middle
        else:
            travels, wavenumber = middle, found
    return 0.5 * (travels + stops), wavenumber
