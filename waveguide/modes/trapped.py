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
    frequency_terms,
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

MOST_MODES = 20
"""Highest mode number: beyond it the eigenvalues drown in the rounding of mode 0."""

_FIRST_INTERVALS = 3
_MORE_INTERVALS = 1.5
_FIRST_DEPTH_ERROR = 3.0
"""Intervals per mode, their growth from one solution to the next, and the first relative error of
depth in units of the tolerance (halved each time)."""

_MOST_SOLUTIONS = 7

_ASYMPTOTIC = 0.2
"""Largest error of the fine mesh, in units of the square root of the tolerance: extrapolation
leaves about its square, unless the mesh is too coarse to extrapolate from at all."""


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
    check_numbers(f, count, tolerance)
    rotation = Rotation(f * f, 0.0, np.inf if rigid_lid else GRAVITY)
    coarse, fine, error = converged_solutions(x, h, profile, f, rotation, count, tolerance)
    return _mode_set(coarse, fine, error, rotation, first=int(rigid_lid))


def converged_solutions(
    x: Array,
    h: Array,
    profile: Profile,
    f: float,
    rotation: Rotation,
    count: int,
    tolerance: float,
) -> tuple[Solution, Solution, Array]:
    """Solutions on two nested meshes whose extrapolated speeds are converged.

    Parameters
    ----------
    x, h : ndarray, shape (n,)
        Checked section (m).
    profile : Profile
        Stratification.
    f : float
        Coriolis parameter (1/s).
    rotation : Rotation
        D, l and g.
    count : int
        Highest mode number.
    tolerance : float
        Relative error allowed in the phase speeds.

    Returns
    -------
    coarse, fine : Solution
        On meshes of which the second has half the spacing.
    error : ndarray, shape (nmode,)
        Relative change of the extrapolated speeds from the previous pair.
    """
    modes = count if rotation.floating else count + 1
    intervals, depth_error = float(_FIRST_INTERVALS * (count + 1)), _FIRST_DEPTH_ERROR * tolerance
    speed = np.full(modes, np.inf)
    for _ in range(_MOST_SOLUTIONS):
        plan = plan_mesh(x, h, profile, f, round(intervals), depth_error)
        coarse, fine = (
            solve_on_mesh(build_mesh(plan, refinement), profile, f, rotation, modes)
            for refinement in (1, 2)
        )
        last, speed = speed, extrapolated(coarse.phase_speed, fine.phase_speed)
        error = np.abs(last / speed - 1.0)
        rough = np.abs(fine.phase_speed / speed - 1.0)
        if np.all(error <= tolerance) and np.all(rough <= _ASYMPTOTIC * np.sqrt(tolerance)):
            break
        intervals, depth_error = intervals * _MORE_INTERVALS, 0.5 * depth_error
    return coarse, fine, error


def check_numbers(f: float, count: int, tolerance: float) -> None:
    """Refuse numbers the section problem has no answer for.

    Parameters
    ----------
    f : float
        Coriolis parameter (1/s).
    count : int
        Highest mode number.
    tolerance : float
        Relative error allowed.

    Raises
    ------
    InputError
        With every problem found.
    """
    problems = []
    if f == 0.0 or not np.isfinite(f):
        problems.append(
            f"f is {f}: coastal-trapped modes need the earth's rotation; on the equator the guide "
            "is the equator itself and its modes are the vertical modes of the deep water"
        )
    if not 1 <= count <= MOST_MODES:
        problems.append(f"count is {count}: ask for modes up to a number from 1 to {MOST_MODES}")
    if not 0.0 < tolerance < 1.0:
        problems.append(f"tolerance is {tolerance}: it must lie between 0 and 1")
    if problems:
        raise InputError(problems)


@dataclass(frozen=True)
class Solution:
    """Modes on one mesh.

    Attributes
    ----------
    mesh : Mesh
        The mesh.
    profile : Profile
        The stratification.
    f : float
        Coriolis parameter (1/s).
    beyond : OffshoreModes
        Vertical modes of the flat ocean beyond.
    eigenvalue : ndarray, shape (nmode,)
        λ (1/m), smallest first.
    values : ndarray, shape (nmode, nnode)
        p at the nodes, B(p, p) = 1.
    reverse_speed : float
        As in `ModeSet`.
    """

    mesh: Mesh
    profile: Profile
    f: float
    beyond: OffshoreModes
    eigenvalue: Array
    values: Array
    reverse_speed: float

    @property
    def phase_speed(self) -> Array:
        """|f|/λ (m/s), c of long waves."""
        return abs(self.f) / self.eigenvalue


def solve_on_mesh(
    mesh: Mesh, profile: Profile, f: float, rotation: Rotation, count: int
) -> Solution:
    """Solve K p = λ B p on a mesh.

    Parameters
    ----------
    mesh : Mesh
        The mesh.
    profile : Profile
        Stratification.
    f : float
        Coriolis parameter (1/s).
    rotation : Rotation
        D, l and g.
    count : int
        How many modes.

    Returns
    -------
    Solution
        The modes of smallest positive λ.

    Raises
    ------
    InputError
        If there are fewer.
    """
    beyond = offshore_modes(mesh, profile, rotation)
    depth = mesh.boundary_depth
    inverse, values, ritz = largest_modes(
        stiffness(mesh, profile, rotation, beyond),
        mesh.boundary,
        boundary_product(depth),
        count,
    )
    if inverse.size < count:
        raise InputError(
            f"count asks for {count} modes but the section holds only {inverse.size} at this "
            "resolution: ask for fewer"
        )
    rises = bool(np.any(np.diff(depth) < 0.0))
    reverse = max(-float(ritz.min()) * abs(f), 0.0) if rises else 0.0
    return Solution(mesh, profile, f, beyond, 1.0 / inverse, values, reverse)


def extrapolated(coarse: Array, fine: Array) -> Array:
    """Limit of second-order values from two meshes (Richardson).

    Parameters
    ----------
    coarse, fine : ndarray
        Values on meshes of which the second has half the spacing.

    Returns
    -------
    ndarray
        Values without the error of second order.
    """
    return (4.0 * fine - coarse) / 3.0


def _friction(solution: Solution) -> Array:
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
    pairs = np.outer(k, k) / np.maximum(np.add.outer(k, k), np.finfo(float).tiny)
    outside = np.einsum("mi,ij,mj->m", shares, pairs, shares)
    total: Array = (inside + outside) / abs(solution.f)
    return total


def _dispersion(solution: Solution, rotation: Rotation) -> tuple[Array, Array]:
    """`ModeSet.dispersion` and `ModeSet.barotropic_tail`.

    To first order in the small terms K(l, ω) = K + l² M − ω² S + b(√(κ² + l²) − κ), with M, S and
    b of `frequency_terms` and the slowest decay κ kept whole, since l exceeds it from a month
    downward. So |f| l/ω = λ + l² M − ω² S + …, with l = ω/c on the right. Over a flat bottom the
    terms cancel: such a wave has no dispersion.
    """
    area, vertical, tail = frequency_terms(
        solution.mesh, solution.profile, rotation, solution.beyond, solution.values
    )
    spread = (area / solution.phase_speed**2 - vertical) / solution.eigenvalue
    return spread, tail


def _trapping_scales(solution: Solution) -> Array:
    """Distance (m) within which 1 - e⁻² of ∫ v² dx at the surface lies, one per mode."""
    mesh, values, beyond = solution.mesh, solution.values, solution.beyond
    far = np.geomspace(1e-3, 10.0, 200) / beyond.decay[beyond.decay > 0.0][0]
    amplitude = values[:, mesh.start[-2] :] @ beyond.projection * beyond.structure[0]
    outside = amplitude @ np.exp(-np.outer(beyond.decay, far))
    x = np.append(mesh.offshore, mesh.offshore[-1] + far)
    p = np.hstack([values[:, mesh.start[:-1]], outside])
    energy = np.diff(p) ** 2 / np.diff(x)
    after = np.cumsum(energy[:, ::-1], axis=1)[:, ::-1]  # offshore of x
    return np.array([np.interp(2.0, np.log(e[0] / e), x[:-1]) for e in after])


def _mode_set(
    coarse: Solution, fine: Solution, error: Array, rotation: Rotation, first: int
) -> ModeSet:
    """Numbers extrapolated from two meshes, structures of the finer one."""
    mesh, values = fine.mesh, fine.values
    level = np.arange(mesh.level.size)[:, None]
    below = level > mesh.bottom
    dispersion, tail = (
        extrapolated(*pair)
        for pair in zip(_dispersion(coarse, rotation), _dispersion(fine, rotation), strict=True)
    )
    node = np.where(below, 0, mesh.start[:-1] + level)
    return ModeSet(
        mode=first + np.arange(error.size),
        phase_speed=extrapolated(coarse.phase_speed, fine.phase_speed),
        error=error,
        coastal_value=extrapolated(coarse.values[:, 0], fine.values[:, 0]),
        bottom_friction=extrapolated(_friction(coarse), _friction(fine)),
        dispersion=dispersion,
        barotropic_tail=tail,
        trapping_scale=_trapping_scales(fine),
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
