"""Depth-averaged modes: the Kelvin wave slowed by a shelf, and barotropic shelf waves.

Without stratification p does not depend on z and the section problem of
:mod:`waveguide.modes.assembly`, integrated over depth, becomes

    (h p_x)_x - (D/g + l² h) p + λ h_x p = 0,   h p_x + λ h p = 0 at the coast,   λ = |f| l/ω,

D = f² - ω². Long waves have l = 0, D = f² and λ = |f|/c. Weak form K(q, p) = λ B(q, p) with

    K = ∫ (h q_x p_x + (D/g + l² h) q p) dx + κ h q p at the last point,
    B = ∫ q p dh + h q p at the coast,

κ² = l² + D/(g h) being the decay over the flat ocean beyond. Wind coupling, friction and
normalisation are those of :mod:`waveguide.modes.trapped`.

References
----------
Gill, A. E. & Schumann, E. H. (1974): J. Phys. Oceanogr. 4, 83.
Miles, J. W. (1972): J. Fluid Mech. 55, 113.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import GRAVITY
from waveguide.errors import InputError
from waveguide.modes.assembly import (
    Rotation,
    Stiffness,
    boundary_product,
)
from waveguide.modes.eigen import largest_modes
from waveguide.modes.section import checked_section

Array = NDArray[np.float64]

_INTERVALS = 100
"""Least number of intervals of the coarsest of three grids; the finest has four times as many."""


@dataclass(frozen=True)
class BarotropicModes:
    """Long depth-averaged modes of a section.

    Attributes
    ----------
    mode : ndarray of int, shape (nmode,)
        0 for the Kelvin wave (free surface only), then the shelf modes.
    phase_speed : ndarray, shape (nmode,)
        c (m/s), downstream, fastest first.
    error : ndarray, shape (nmode,)
        Relative error of c, estimated from three meshes.
    coastal_value : ndarray, shape (nmode,)
        F(0) (m^-1/2), also the wind coupling, as in `ModeSet`.
    bottom_friction : ndarray, shape (nmode,)
        Decay per metre and unit linear drag (s/m²), as in `ModeSet`.
    offshore : ndarray, shape (ncolumn,)
        Distance from the coast (m).
    structure : ndarray, shape (nmode, ncolumn)
        F (m^-1/2), normalised by B(F, F) = 1.
    """

    mode: NDArray[np.int_]
    phase_speed: Array
    error: Array
    coastal_value: Array
    bottom_friction: Array
    offshore: Array
    structure: Array


def barotropic_modes(
    offshore: ArrayLike,
    depth: ArrayLike,
    f: float,
    *,
    count: int = 3,
    rigid_lid: bool = False,
) -> BarotropicModes:
    """Long barotropic modes of a section.

    Parameters
    ----------
    offshore : array_like, shape (n,)
        Distance from the coast (m), increasing from 0. Depth is linear in between, and flat
        beyond the last point.
    depth : array_like, shape (n,)
        Water depth (m, positive down).
    f : float
        Coriolis parameter (1/s), not 0.
    count : int
        Highest mode: modes 0 … `count`, or 1 … `count` under a rigid lid; fewer where there are
        no more (over a flat bottom only mode 0 exists).
    rigid_lid : bool
        Suppress the surface displacement, and mode 0 with it.

    Returns
    -------
    BarotropicModes
        Speeds, couplings and structures.

    Raises
    ------
    InputError
        If the section has holes, land, or unsorted distances, or f is 0.
    """
    x, h = checked_section(offshore, depth)
    if f == 0.0 or not np.isfinite(f):
        raise InputError(
            f"f is {f}: barotropic coastal modes need the earth's rotation; on the equator use the "
            "equatorial guide"
        )
    rotation = Rotation(f * f, 0.0, np.inf if rigid_lid else GRAVITY)
    first = int(rigid_lid)
    grids = [refined(x, h, refinement) for refinement in (1, 2, 4)]
    solutions = [solve_depth_averaged(*grid, rotation, count + 1 - first) for grid in grids]
    found = min(inverse.size for inverse, _ in solutions)
    coarse, middle, fine = (abs(f) * inverse[:found] for inverse, _ in solutions)
    speed = _limit(middle, fine)
    values = [values[:found] for _, values in solutions[1:]]
    friction = [_friction(*grid, f, rotation, p) for grid, p in zip(grids[1:], values, strict=True)]
    return BarotropicModes(
        mode=first + np.arange(found),
        phase_speed=speed,
        error=np.abs(_limit(coarse, middle) / speed - 1.0),
        coastal_value=_limit(values[0][:, 0], values[1][:, 0]),
        bottom_friction=_limit(*friction),
        offshore=grids[2][0],
        structure=values[1],
    )


def _limit(coarse: Array, fine: Array) -> Array:
    """Richardson: errors are of second order and the fine grid has half the spacing."""
    return (4.0 * fine - coarse) / 3.0


def refined(offshore: Array, depth: Array, refinement: int) -> tuple[Array, Array]:
    """Grid with all given points, closer where the waves of a shelf are shorter.

    Parameters
    ----------
    offshore, depth : ndarray, shape (n,)
        The section (m).
    refinement : int
        Factor on the number of intervals between any two given points.

    Returns
    -------
    offshore, depth : ndarray
        Grid (m).
    """
    dx = np.diff(offshore)
    relative_rise = np.abs(np.diff(depth)) / (0.5 * (depth[1:] + depth[:-1]))
    wanted = np.sqrt(relative_rise * dx / offshore[-1]) + dx / offshore[-1]
    parts = refinement * np.ceil(_INTERVALS * wanted / wanted.sum()).astype(int)
    start = np.repeat(offshore[:-1], parts)
    number = np.arange(parts.sum()) - np.repeat(np.cumsum(parts) - parts, parts)
    x = np.append(start + number * np.repeat(dx / parts, parts), offshore[-1])
    return x, np.interp(x, offshore, depth)


def solve_depth_averaged(
    offshore: Array, depth: Array, rotation: Rotation, count: int
) -> tuple[Array, Array]:
    """Solutions of K p = λ B p on a grid.

    Parameters
    ----------
    offshore, depth : ndarray, shape (n,)
        Grid (m).
    rotation : Rotation
        D, l and g.
    count : int
        How many.

    Returns
    -------
    inverse : ndarray, shape (count,)
        1/λ (m), largest first.
    modes : ndarray, shape (count, n)
        p with B(p, p) = 1.
    """
    return largest_modes(
        _stiffness(offshore, depth, rotation),
        np.arange(offshore.size),
        _coastal_and_slope_product(depth),
        count,
    )[:2]


def _stiffness(x: Array, h: Array, rotation: Rotation) -> Stiffness:
    """K with linear elements; h is linear over each, so the integrals are exact."""
    dx = np.diff(x)
    gradient = 0.5 * (h[1:] + h[:-1]) / dx
    surface = rotation.inertia / rotation.gravity
    square = rotation.wavenumber**2
    # ∫ h φ_i φ_j over an element of depths a and b: (3a + b, a + b, a + 3b) dx/12
    left = dx * (surface / 3.0 + square * (3.0 * h[:-1] + h[1:]) / 12.0)
    right = dx * (surface / 3.0 + square * (h[:-1] + 3.0 * h[1:]) / 12.0)
    both = dx * (surface / 6.0 + square * (h[:-1] + h[1:]) / 12.0)

    mass = np.append(left, 0.0) + np.append(0.0, right)
    mass[-1] += decay_beyond(h[-1], rotation) * h[-1]
    row_sum = mass + np.append(both, 0.0) + np.append(0.0, both)
    diagonal = mass + np.append(gradient, 0.0) + np.append(0.0, gradient)
    band = np.array([diagonal, np.append(both - gradient, 0.0)])
    return Stiffness(np.asfortranarray(band), row_sum, rotation.floating)


def decay_beyond(depth: float, rotation: Rotation) -> float:
    """Decay κ (1/m) of a depth-averaged wave over a flat ocean.

    Parameters
    ----------
    depth : float
        Water depth (m).
    rotation : Rotation
        D, l and g.

    Returns
    -------
    float
        √(l² + D/(g h)).
    """
    return float(np.sqrt(rotation.wavenumber**2 + rotation.inertia / (rotation.gravity * depth)))


def _coastal_and_slope_product(depth: Array) -> Callable[[Array], Array]:
    """B as a function of nodal values."""
    slope = boundary_product(depth)

    def product(values: Array) -> Array:
        result = slope(values)
        result[0] += depth[0] * values[0]
        return result

    return product


def _friction(x: Array, h: Array, f: float, rotation: Rotation, values: Array) -> Array:
    """(1/|f|) ∫ (∂x F)² dx, with the flat ocean beyond (s/m²)."""
    inside = np.sum(np.diff(values) ** 2 / np.diff(x), axis=1)
    outside = 0.5 * decay_beyond(h[-1], rotation) * values[:, -1] ** 2
    total: Array = (inside + outside) / abs(f)
    return total
