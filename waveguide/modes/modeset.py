"""The modes of one section, and the fields and numbers that follow from them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import GRAVITY
from waveguide.modes.profile import Profile

Array = NDArray[np.float64]


@dataclass(frozen=True)
class ModeSet:
    """Long coastal-trapped modes of a section.

    Attributes
    ----------
    mode : ndarray of int, shape (nmode,)
        Rank by speed; 0 is the barotropic mode, absent under a rigid lid.
    phase_speed : ndarray, shape (nmode,)
        c (m/s), downstream, fastest first.
    error : ndarray, shape (nmode,)
        Relative error of c: the difference from a solution with half the accuracy of depth and
        two thirds of the resolution.
    coastal_value : ndarray, shape (nmode,)
        F(0, 0) (m^-1/2), positive, with F normalised by B(F, F) = 1. It is the wind coupling too:
        (1/c) ∂t φ + ∂s φ = F(0, 0) τ_s/ρ₀ for p = Σ F φ and sea level p/g.
    bottom_friction : ndarray, shape (nmode,)
        Decay per metre travelled and unit linear drag r: amplitude falls as
        exp(-bottom_friction r s) under a bottom stress ρ₀ r v (s/m²).
    dispersion, barotropic_tail : ndarray, shape (nmode,)
        d (s²) and b (1) of the wavenumber at low frequencies, see `low_frequency_wavenumber`.
    trapping_scale : ndarray, shape (nmode,)
        Distance offshore within which 1 - e⁻² of ∫ v² dx lies (m), v the alongshore velocity at
        the surface; R for a wave of p ∝ e^{-x/R}.
    reverse_speed : float
        Speed of the fastest long wave in the other direction (m/s), held by a slope that rises
        offshore; 0 if there is none. Positive means that B is indefinite.
    f : float
        Coriolis parameter (1/s).
    offshore : ndarray, shape (ncolumn,)
        Columns of the structures (m from the coast).
    depth : ndarray, shape (nlevel,)
        Levels of the structures (m).
    bottom : ndarray of int, shape (ncolumn,)
        Level at the bottom of each column.
    structure : ndarray, shape (nmode, nlevel, ncolumn)
        F (m^-1/2), NaN below the bottom.
    boundary_depth : ndarray, shape (nboundary,)
        Depth (m) of the nodes down the coastal wall and on along the bottom.
    boundary_structure : ndarray, shape (nmode, nboundary)
        F there.
    profile : Profile
        The stratification.
    """

    mode: NDArray[np.int_]
    phase_speed: Array
    error: Array
    coastal_value: Array
    bottom_friction: Array
    dispersion: Array
    barotropic_tail: Array
    trapping_scale: Array
    reverse_speed: float
    f: float
    offshore: Array
    depth: Array
    bottom: NDArray[np.intp]
    structure: Array
    boundary_depth: Array
    boundary_structure: Array
    profile: Profile


def low_frequency_wavenumber(
    omega: ArrayLike, phase_speed: ArrayLike, f: ArrayLike, depth: ArrayLike,
    dispersion: ArrayLike, barotropic_tail: ArrayLike,
) -> Array:
    """Alongshore wavenumber of a trapped wave to first order beyond the long-wave limit.

    l = (ω/c) [1 + dω² + b (c/|f|)(√(κ² + ω²/c²) − κ)],  κ = |f|/√(gH) being the offshore decay of
    the barotropic part of the mode over the deep water. Against the whole problem it is within
    1 % at ω = 0.3 |f| on a shelf of 60 km (tests/analytic/test_low_frequency.py).

    Parameters
    ----------
    omega : array_like
        Angular frequency (rad/s).
    phase_speed : array_like
        Long-wave c (m/s).
    f : array_like
        Coriolis parameter (1/s), not 0.
    depth : array_like
        Of the deep water (m).
    dispersion, barotropic_tail : array_like
        d (s²) and b of `ModeSet`. All broadcast.

    Returns
    -------
    ndarray
        l (1/m).
    """
    omega, c, rotation = np.asarray(omega, float), np.asarray(phase_speed, float), np.abs(f)
    decay = rotation / np.sqrt(GRAVITY * np.asarray(depth, float))
    tail = np.sqrt(decay**2 + (omega / c) ** 2) - decay
    growth = np.asarray(dispersion) * omega**2 + np.asarray(barotropic_tail) * c / rotation * tail
    return np.asarray(omega / c * (1.0 + growth))


def alongshore_velocity(modes: ModeSet) -> Array:
    """Downstream velocity of each mode per unit coastal sea level.

    Geostrophic: v_s = -p_x/|f|, with p = g at the coast.

    Parameters
    ----------
    modes : ModeSet
        Modes of a section.

    Returns
    -------
    ndarray, shape (nmode, nlevel, ncolumn)
        Velocity (m/s per m of sea level), NaN below the bottom.
    """
    slope = _derivative(modes.structure, modes.offshore)
    scale = GRAVITY / (abs(modes.f) * modes.structure[:, 0, 0])
    return -slope * scale[:, None, None]


def isopycnal_displacement(modes: ModeSet) -> Array:
    """Upward displacement of isopycnals of each mode per unit coastal sea level.

    -p_z/N² (z upward), with p = g at the coast; at the coast's surface it is 1.

    Parameters
    ----------
    modes : ModeSet
        Modes of a section.

    Returns
    -------
    ndarray, shape (nmode, nlevel, ncolumn)
        Displacement (m per m of sea level), NaN below the bottom.
    """
    # in the coordinate ∫N² dz the derivative is p_z/N² (depth is downward, hence the sign)
    downward = np.swapaxes(modes.structure, 1, 2)
    flux = np.swapaxes(_derivative(downward, modes.profile.n2_integral(modes.depth)), 1, 2)
    coastal = modes.structure[:, 0, 0][:, None, None]
    displacement = GRAVITY * flux / coastal
    displacement[:, 0] = modes.structure[:, 0] / coastal[:, 0]
    return displacement


def _derivative(values: Array, x: Array) -> Array:
    """Derivative along the last axis: central inside, one-sided beside missing values."""
    rise = np.diff(values, axis=-1) / np.diff(x)
    missing = np.full((*values.shape[:-1], 1), np.nan)
    before = np.concatenate([missing, rise], axis=-1)
    after = np.concatenate([rise, missing], axis=-1)
    step = np.diff(x)
    weight = np.append(step, step[-1]) / (np.append(step, step[-1]) + np.append(step[0], step))
    both = weight * before + (1.0 - weight) * after
    one = np.where(np.isnan(before), after, before)
    return np.where(np.isnan(values), np.nan, np.where(np.isnan(both), one, both))


def overlap(upstream: ModeSet, downstream: ModeSet) -> Array:
    """Projection of the modes of one section on those of the next.

    B is ∫ p q dh along wall and bottom, so with the boundary labelled by its depth the modes are
    orthonormal functions of depth alone, and pressure is handed on along isobaths. Where depth
    decreases offshore the label is not unique and the deepest-so-far part of the boundary counts.

    Parameters
    ----------
    upstream, downstream : ModeSet
        Modes of neighbouring sections.

    Returns
    -------
    ndarray, shape (nupstream, ndownstream)
        ∫ F_up F_down dh: near ±1 for a mode passed on, the rest is scattered.
    """
    depth_a, a = _by_depth(upstream)
    depth_b, b = _by_depth(downstream)
    depth = np.union1d(depth_a, depth_b)
    a = np.array([np.interp(depth, depth_a, F, right=0.0) for F in a])
    b = np.array([np.interp(depth, depth_b, F, right=0.0) for F in b])
    dh = np.diff(depth) / 6.0
    upper = (2.0 * a[:, :-1] + a[:, 1:]) * dh
    lower = (a[:, :-1] + 2.0 * a[:, 1:]) * dh
    product: Array = upper @ b[:, :-1].T + lower @ b[:, 1:].T
    return product


def _by_depth(modes: ModeSet) -> tuple[Array, Array]:
    """Depths along the boundary, strictly increasing, and F there.

    Over a flat stretch F jumps at one depth; its nodes are set apart by a millionth of the depth.
    """
    depth = modes.boundary_depth
    kept = depth >= np.maximum.accumulate(depth)
    apart = 1e-6 * depth[-1] * np.arange(depth.size) / depth.size
    return (depth + apart)[kept], modes.boundary_structure[:, kept]
