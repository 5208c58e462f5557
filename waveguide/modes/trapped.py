"""Long coastal-trapped modes of a cross-shelf section.

For sub-inertial long waves p = F(x, z) φ(s - ct) on a section of depth h(x), stratification
N²(z) and constant f satisfies K(F, q) = (|f|/c) B(F, q) (see :mod:`waveguide.modes.assembly`;
Clarke 1977, Huthnance 1978, J. Phys. Oceanogr. 8, 74; Brink 1982, J. Phys. Oceanogr. 12, 897).
K is positive definite and B symmetric, so the speeds are real on every section; where depth
decreases offshore, B is indefinite and waves of the other direction exist beside these.

Forcing and friction follow by testing the equations with F_n. A downstream wind stress τ drives
an Ekman transport τ/(ρ₀|f|) through the surface corner of the coast and adds f²·τ F_n(0,0)/(ρ₀|f|)
to the balance; a bottom stress ρ₀ r v drives ∂x(r v/f) through the bottom and adds
-r ∫ (dF_n/dx along the bottom)(∂x F_m) dx. Together, with B(F_n, F_n) = 1,

    (1/c) ∂t φ + ∂s φ = F(0,0) τ/ρ₀ - a r φ,   a = (1/|f|) ∫ (dF/dx)_bottom (∂x F) dx.

(Gill & Schumann 1974, J. Phys. Oceanogr. 4, 83; Brink & Allen 1978, J. Phys. Oceanogr. 8, 1008;
the end terms of both integrals by parts cancel, because the bottom layer's transport leaves the
wall at its foot.) The bottom condition gives ∂x F = (dF/dx - λ S² F)/(1 + S²), S = N h_x/f, from
values on the bottom alone.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import GRAVITY
from waveguide.errors import InputError
from waveguide.modes.assembly import (
    OffshoreModes,
    Rotation,
    boundary_product,
    offshore_modes,
    stiffness,
)
from waveguide.modes.eigen import largest_modes
from waveguide.modes.mesh import Mesh, build_mesh, plan_mesh
from waveguide.modes.modeset import ModeSet
from waveguide.modes.profile import Profile, make_profile
from waveguide.modes.section import checked_section

Array = NDArray[np.float64]

TOLERANCE = 0.005
"""Default relative error of phase speeds."""

_FIRST_INTERVALS = 3
_MORE_INTERVALS = 1.5
_FIRST_DEPTH_ERROR = 3.0
"""Intervals per mode, their growth from one solution to the next, and the first relative error of
depth in units of the tolerance (halved each time)."""

_MOST_SOLUTIONS = 7

_RIGID = 1e4
"""A rigid lid is a free surface under this many times g."""


def trapped_modes(
    offshore: ArrayLike,
    depth: ArrayLike,
    n2: ArrayLike,
    n2_depth: ArrayLike,
    f: float,
    *,
    count: int = 3,
    rigid_lid: bool = False,
    tolerance: float = TOLERANCE,
) -> ModeSet:
    """Long coastal-trapped modes of a section.

    Beyond the last point the ocean is taken as flat and unbounded (exactly, without a boundary),
    so the section need only reach the foot of the slope. Solutions of rising resolution are
    compared until all speeds agree within `tolerance`.

    Parameters
    ----------
    offshore : array_like, shape (n,)
        Distance from the coast (m), increasing from 0. Depth is linear in between.
    depth : array_like, shape (n,)
        Water depth (m, positive down). The first value is the depth at the coastal wall; 0 there
        becomes a wall of 1 m.
    n2 : array_like, shape (nz,)
        Buoyancy frequency squared (1/s²) at `n2_depth`, not negative; linear in between, held
        above and below.
    n2_depth : array_like, shape (nz,)
        Depths of `n2` (m, positive down, increasing).
    f : float
        Coriolis parameter (1/s), of either sign but not 0.
    count : int
        Highest mode number: modes 0 … `count`, or 1 … `count` under a rigid lid.
    rigid_lid : bool
        Suppress the surface displacement, and mode 0 with it.
    tolerance : float
        Relative error allowed in the phase speeds.

    Returns
    -------
    ModeSet
        Speeds, couplings and structures. `error` says how far the tolerance was met.

    Raises
    ------
    InputError
        If the section has holes, land, or unsorted distances, stratification is unstable, or
        f is 0.
    """
    x, h = checked_section(offshore, depth)
    profile = make_profile(n2, n2_depth)
    _check_numbers(f, count, tolerance)
    gravity = GRAVITY * (_RIGID if rigid_lid else 1.0)
    intervals, depth_error = float(_FIRST_INTERVALS * (count + 1)), _FIRST_DEPTH_ERROR * tolerance
    speed = np.full(count + 1, np.inf)
    for _ in range(_MOST_SOLUTIONS):
        plan = plan_mesh(x, h, profile, f, round(intervals), depth_error)
        coarse, fine = (
            _solve(build_mesh(plan, refinement), profile, f, gravity, count + 1)
            for refinement in (1, 2)
        )
        last, speed = speed, _limit(coarse.phase_speed, fine.phase_speed)
        error = np.abs(last / speed - 1.0)
        if np.all(error[rigid_lid:] <= tolerance):
            break
        intervals, depth_error = intervals * _MORE_INTERVALS, 0.5 * depth_error
    return _mode_set(coarse, fine, error, slice(int(rigid_lid), None))


def _check_numbers(f: float, count: int, tolerance: float) -> None:
    problems = []
    if f == 0.0 or not np.isfinite(f):
        problems.append(
            f"f is {f}: coastal-trapped modes need the earth's rotation; on the equator the guide "
            "is the equator itself and its modes are the vertical modes of the deep water"
        )
    if count < 1:
        problems.append(f"count is {count}: ask for at least mode 1")
    if not 0.0 < tolerance < 1.0:
        problems.append(f"tolerance is {tolerance}: it must lie between 0 and 1")
    if problems:
        raise InputError(problems)


@dataclass(frozen=True)
class _Solution:
    """Modes on one mesh."""

    mesh: Mesh
    profile: Profile
    f: float
    beyond: OffshoreModes
    eigenvalue: Array
    values: Array
    reverse_speed: float

    @property
    def phase_speed(self) -> Array:
        return abs(self.f) / self.eigenvalue


def _solve(mesh: Mesh, profile: Profile, f: float, gravity: float, count: int) -> _Solution:
    rotation = Rotation(f * f, 0.0, gravity)
    beyond = offshore_modes(mesh, profile, rotation)
    depth = mesh.boundary_depth
    inverse, values, ritz = largest_modes(
        stiffness(mesh, profile, rotation, beyond),
        mesh.boundary,
        boundary_product(depth),
        count,
    )
    rises = bool(np.any(np.diff(depth) < 0.0))
    reverse = max(-float(ritz.min()) * abs(f), 0.0) if rises else 0.0
    return _Solution(mesh, profile, f, beyond, 1.0 / inverse, values, reverse)


def _limit(coarse: Array, fine: Array) -> Array:
    """Richardson: errors are of second order and the fine mesh has half the spacing."""
    return (4.0 * fine - coarse) / 3.0


def _friction(solution: _Solution) -> Array:
    """Decay per metre and unit drag r (s/m²), one per mode; see the module's text."""
    mesh, values, beyond = solution.mesh, solution.values, solution.beyond
    h = mesh.level[mesh.bottom]
    dx = np.diff(mesh.offshore)
    on_bottom = values[:, mesh.start[:-1] + mesh.bottom]
    rise = np.diff(on_bottom) / dx
    middle = 0.5 * (on_bottom[:, 1:] + on_bottom[:, :-1])
    n2 = solution.profile.at(0.5 * (h[1:] + h[:-1]))
    burger = n2 * (np.diff(h) / (dx * solution.f)) ** 2
    p_x = (rise - solution.eigenvalue[:, None] * burger * middle) / (1.0 + burger)
    inside = np.sum(rise * p_x * dx, axis=1)

    k = beyond.decay
    shares = values[:, mesh.start[-2] :] @ beyond.projection * beyond.structure[-1]
    outside = np.einsum("mi,ij,mj->m", shares, np.outer(k, k) / np.add.outer(k, k), shares)
    total: Array = (inside + outside) / abs(solution.f)
    return total


def _trapping_scales(solution: _Solution) -> Array:
    """Distance (m) within which 1 - e⁻² of ∫ v² dx at the surface lies, one per mode."""
    mesh, values, beyond = solution.mesh, solution.values, solution.beyond
    far = np.geomspace(1e-3, 10.0, 200) / beyond.decay[0]
    amplitude = values[:, mesh.start[-2] :] @ beyond.projection * beyond.structure[0]
    outside = amplitude @ np.exp(-np.outer(beyond.decay, far))
    x = np.append(mesh.offshore, mesh.offshore[-1] + far)
    p = np.hstack([values[:, mesh.start[:-1]], outside])
    energy = np.diff(p) ** 2 / np.diff(x)
    after = np.cumsum(energy[:, ::-1], axis=1)[:, ::-1]  # offshore of x
    return np.array([np.interp(2.0, np.log(e[0] / e), x[:-1]) for e in after])


def _mode_set(coarse: _Solution, fine: _Solution, error: Array, kept: slice) -> ModeSet:
    """Numbers extrapolated from two meshes, structures of the finer one."""
    mesh, values = fine.mesh, fine.values[kept]
    level = np.arange(mesh.level.size)[:, None]
    below = level > mesh.bottom
    node = np.where(below, 0, mesh.start[:-1] + level)
    return ModeSet(
        mode=np.arange(error.size)[kept],
        phase_speed=_limit(coarse.phase_speed, fine.phase_speed)[kept],
        error=error[kept],
        coastal_value=_limit(coarse.values[:, 0], fine.values[:, 0])[kept],
        bottom_friction=_limit(_friction(coarse), _friction(fine))[kept],
        trapping_scale=_trapping_scales(fine)[kept],
        reverse_speed=fine.reverse_speed,
        f=fine.f,
        offshore=mesh.offshore,
        depth=mesh.level,
        bottom=mesh.bottom,
        structure=np.where(below, np.nan, values[:, node]),
        boundary_depth=mesh.boundary_depth,
        boundary_structure=values[:, mesh.boundary],
        profile=fine.profile,
    )
