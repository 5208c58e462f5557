"""Matrices of the section problem on a mesh.

With p ∝ exp i(l s - ωt), s downstream, the inviscid hydrostatic equations on a section of
constant f reduce to

    ∂xx p - l² p + D ∂z(N⁻² ∂z p) = 0,          D = f² - ω²,
    ∂z p + (N²/g) p = 0                          at the surface,
    (D/N²) ∂z p + h_x (∂x p + λ p) = 0           at the bottom z = -h(x),
    ∂x p + λ p = 0                               at the coastal wall,    λ = |f| l/ω,

because u = -(∂xt p + f ∂y p)/(f² + ∂tt) has no component through the bottom or the wall. Long
waves have ω, l → 0 with l/ω = 1/c. Multiplied by a test function q and integrated by parts the
terms on the boundary combine into the weak form K(q, p) = λ B(q, p),

    K = ∫∫ (q_x p_x + (D/N²) q_z p_z + l² q p) dx dz + (D/g) ∫ q p dx at the surface,
    B = ∫ q p dz down the wall + ∫ q p dh along the bottom.

K is symmetric and positive definite for ω < |f|. B is symmetric; it is positive semidefinite
where depth increases offshore and indefinite where it does not.

Beyond the last column the ocean is flat and unbounded: there p = Σ a_n ψ_n(z) e^{-κ_n x} with
the vertical modes of the last column, and -∂x p adds Σ κ_n (q, ψ_n)(ψ_n, p) to K, exactly on
the mesh. So neither a wide domain nor a choice of outer boundary condition is needed, and mode 0
comes out of the same problem.

Elements: bilinear in rectangles, linear in triangles; D/N² is D Δz/∫N²dz over a layer, which is
exact for the flux of a layer in place of dominated by its least stratified part.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import scipy.linalg
from numpy.typing import NDArray

from waveguide.constants import GRAVITY
from waveguide.modes.mesh import Indices, Mesh
from waveguide.modes.profile import Profile

Array = NDArray[np.float64]
Entries = tuple[Indices, Indices, Array]


@dataclass(frozen=True)
class Rotation:
    """What the waves feel apart from the section.

    Attributes
    ----------
    inertia : float
        D = f² - ω² (1/s²), f² for long waves.
    wavenumber : float
        Alongshore wavenumber l (1/m), 0 for long waves.
    gravity : float
        g (m/s²); infinite for a rigid lid.
    """

    inertia: float
    wavenumber: float = 0.0
    gravity: float = GRAVITY

    @property
    def floating(self) -> bool:
        """A uniform pressure does nothing: long waves under a rigid lid."""
        return np.isinf(self.gravity) and self.wavenumber == 0.0


@dataclass(frozen=True)
class OffshoreModes:
    """Vertical modes of the flat ocean beyond the last column, on its nodes.

    Attributes
    ----------
    decay : ndarray, shape (n,)
        κ (1/m), increasing.
    structure : ndarray, shape (n, n)
        ψ at the nodes (m^-1/2), one mode per column, orthonormal with `projection`.
    projection : ndarray, shape (n, n)
        Its transpose times nodal values gives the amplitudes a_n.
    """

    decay: Array
    structure: Array
    projection: Array


def offshore_modes(mesh: Mesh, profile: Profile, rotation: Rotation) -> OffshoreModes:
    """Vertical modes beyond the section: D (N⁻² ψ')' = (l² - κ²) ψ on the last column's nodes.

    Parameters
    ----------
    mesh : Mesh
        The section's mesh.
    profile : Profile
        Stratification.
    rotation : Rotation
        D, l and g.

    Returns
    -------
    OffshoreModes
        Slowest decay first.
    """
    z = mesh.level[: mesh.bottom[-1] + 1]
    dz = np.diff(z)
    stiff = rotation.inertia / np.diff(profile.n2_integral(z))
    a = _tridiagonal(stiff, stiff, -stiff)
    a[0, 0] += rotation.inertia / rotation.gravity
    mass = _tridiagonal(dz / 3.0, dz / 3.0, dz / 6.0)
    psi = scipy.linalg.eigh(a, mass, check_finite=False)[1]
    # the eigenvalues again by Rayleigh's quotient: mode 0 would drown in the rounding of the rest
    surface = rotation.inertia / rotation.gravity * psi[0] ** 2
    square = stiff @ np.diff(psi, axis=0) ** 2 + surface
    square[0] *= not rotation.floating
    return OffshoreModes(np.sqrt(square + rotation.wavenumber**2), psi, mass @ psi)


def _tridiagonal(upper: Array, lower: Array, off: Array) -> Array:
    """Symmetric matrix assembled from one 2 x 2 block per interval."""
    diagonal = np.append(upper, 0.0) + np.append(0.0, lower)
    return np.asarray(np.diag(diagonal) + np.diag(off, 1) + np.diag(off, -1))


@dataclass(frozen=True)
class Stiffness:
    """The matrix K.

    Attributes
    ----------
    band : ndarray, shape (bandwidth + 1, nnode), in Fortran order
        K as a lower band matrix, K[i, j] in row i - j of column j (LAPACK).
    row_sum : ndarray, shape (nnode,)
        K times the vector of ones, without the gradients that cancel: of the size of f²/g where
        the entries of `band` are of the size of f²/N², it could not be had from them.
    floating : bool
        K times the vector of ones is 0 exactly.
    """

    band: Array
    row_sum: Array
    floating: bool


def stiffness(
    mesh: Mesh, profile: Profile, rotation: Rotation, offshore: OffshoreModes
) -> Stiffness:
    """Assemble K.

    Parameters
    ----------
    mesh : Mesh
        The section's mesh.
    profile : Profile
        Stratification.
    rotation : Rotation
        D, l and g.
    offshore : OffshoreModes
        From `offshore_modes`, of the same arguments.

    Returns
    -------
    Stiffness
        K.
    """
    gradients = _rectangles(mesh, profile, rotation) + _triangles(mesh, profile, rotation)
    others = [*_surface(mesh, rotation), _beyond(mesh, offshore)]
    if rotation.wavenumber != 0.0:
        others += _mass(mesh, rotation)
    nodes = int(mesh.start[-1])
    return Stiffness(_band(gradients + others, nodes), _row_sum(others, nodes), rotation.floating)


def frequency_terms(
    mesh: Mesh, profile: Profile, rotation: Rotation, offshore: OffshoreModes, values: Array
) -> tuple[Array, Array, Array]:
    """What p'Kp gains per l² and per D, for long waves.

    Parameters
    ----------
    mesh : Mesh
        The section's mesh.
    profile : Profile
        Stratification.
    rotation : Rotation
        Of long waves: l = 0, D = f².
    offshore : OffshoreModes
        From `offshore_modes`, of the same arguments.
    values : ndarray, shape (nmode, nnode)
        p at the nodes.

    Returns
    -------
    by_wavenumber, by_inertia : ndarray, shape (nmode,)
        ∫∫ p² and ∫∫ p_z²/N² + ∫p²/g at the surface, those of the ocean beyond included: there
        κ_n grows by 1/2κ_n per l² and by κ_n/2D per D. But for the slowest decay, which l soon
        exceeds: its part of the first is left out.
    tail : ndarray, shape (nmode,)
        That part of p'Kp over its κ, to be taken with √(κ² + l²).
    """
    still, unit = Rotation(0.0, 0.0, rotation.gravity), Rotation(0.0, 1.0, rotation.gravity)
    section = [*_rectangles(mesh, profile, rotation), *_triangles(mesh, profile, rotation),
               *_surface(mesh, rotation)]
    across = [*_rectangles(mesh, profile, still), *_triangles(mesh, profile, still)]
    vertical = (_quadratic(section, values) - _quadratic(across, values)) / rotation.inertia
    beyond = (values[:, mesh.start[-2] :] @ offshore.projection) ** 2
    area = _quadratic(_mass(mesh, unit), values) + beyond[:, 1:] @ (0.5 / offshore.decay[1:])
    vertical += beyond @ (0.5 * offshore.decay / rotation.inertia)
    return area, vertical, beyond[:, 0]


def _quadratic(parts: list[Entries], values: Array) -> Array:
    """The form p'Ap of every row of p, A being the symmetric matrix whose lower half is given."""
    total = np.zeros(values.shape[0])
    for row, column, value in parts:
        twice = np.where(row == column, value, 2.0 * value)
        total += (values[:, row] * values[:, column]) @ twice
    return total


def _band(parts: list[Entries], nodes: int) -> Array:
    row = np.concatenate([np.maximum(p[0], p[1]) for p in parts])
    column = np.concatenate([np.minimum(p[0], p[1]) for p in parts])
    value = np.concatenate([p[2] for p in parts])
    height = int(np.max(row - column)) + 1
    flat = np.bincount(column * height + (row - column), value, minlength=nodes * height)
    return flat.astype(float, copy=False).reshape(nodes, height).T


def _row_sum(parts: list[Entries], nodes: int) -> Array:
    """Row sums of the symmetric matrix whose lower half is given."""
    total = np.zeros(nodes)
    for row, column, value in parts:
        total += np.bincount(row, value, minlength=nodes)
        total += np.bincount(column, np.where(row == column, 0.0, value), minlength=nodes)
    return total


def _numbered(count: Indices) -> tuple[Indices, Indices]:
    """For each group i and each of its count[i] members: i and the member's number."""
    group = np.repeat(np.arange(count.size), count)
    return group, np.arange(group.size) - np.repeat(np.cumsum(count) - count, count)


def _rectangles(mesh: Mesh, profile: Profile, rotation: Rotation) -> list[Entries]:
    """Bilinear elements: products of the one-dimensional mass and stiffness matrices."""
    i, k = _numbered(np.minimum(mesh.bottom[:-1], mesh.bottom[1:]))
    dx, dz = np.diff(mesh.offshore)[i], np.diff(mesh.level)[k]
    across = dz / (6.0 * dx)
    along = rotation.inertia * dx / (6.0 * np.diff(profile.n2_integral(mesh.level))[k])
    corner, diagonal = 2.0 * (across + along), -across - along
    vertical, horizontal = across - 2.0 * along, along - 2.0 * across
    near, far = mesh.start[i] + k, mesh.start[i + 1] + k
    return [
        (near, near, corner),
        (near + 1, near + 1, corner),
        (far, far, corner),
        (far + 1, far + 1, corner),
        (near + 1, near, vertical),
        (far + 1, far, vertical),
        (far, near, horizontal),
        (far + 1, near + 1, horizontal),
        (far + 1, near, diagonal),
        (far, near + 1, diagonal),
    ]


def _triangle_nodes(mesh: Mesh) -> tuple[Indices, Indices, Array, tuple[Indices, Indices, Indices]]:
    """Triangles between a bottom node (apex) and a layer of the deeper column beside it.

    Returns the gap i between columns, the layer k, the depth of the apex and the three nodes.
    """
    start, bottom = mesh.start, mesh.bottom
    i, k = _numbered(np.abs(np.diff(bottom)))
    shallow, deep = np.where(bottom[i + 1] > bottom[i], (i, i + 1), (i + 1, i))
    k = k + bottom[shallow]
    apex = mesh.level[bottom[shallow]]
    return i, k, apex, (start[shallow] + bottom[shallow], start[deep] + k, start[deep] + k + 1)


def _triangles(mesh: Mesh, profile: Profile, rotation: Rotation) -> list[Entries]:
    """Linear elements along the bottom."""
    i, k, apex, node = _triangle_nodes(mesh)
    top, low = mesh.level[k], mesh.level[k + 1]
    dx, dz = np.diff(mesh.offshore)[i], low - top
    fall = (apex - top) / dz  # p at the apex's depth on the deep side is p1 + fall (p2 - p1)
    p_x = (-1.0 / dx, (1.0 - fall) / dx, fall / dx)
    p_z = (np.zeros_like(dz), -1.0 / dz, 1.0 / dz)
    area = 0.5 * dx * dz
    inverse_n2 = (low - apex) / (profile.n2_integral(low) - profile.n2_integral(apex))
    weight = rotation.inertia * inverse_n2
    return [
        (node[a], node[b], area * (p_x[a] * p_x[b] + weight * p_z[a] * p_z[b]))
        for a in range(3)
        for b in range(a + 1)
    ]


def _mass(mesh: Mesh, rotation: Rotation) -> list[Entries]:
    """The term l² ∫∫ q p of both kinds of element."""
    square = rotation.wavenumber**2
    i, k = _numbered(np.minimum(mesh.bottom[:-1], mesh.bottom[1:]))
    cell = square * np.diff(mesh.offshore)[i] * np.diff(mesh.level)[k] / 36.0
    near, far = mesh.start[i] + k, mesh.start[i + 1] + k
    corners = (near, near + 1, far, far + 1)
    common = (4.0, 2.0, 2.0, 1.0)  # by the number of coordinates in which two corners differ
    parts = [(corners[a], corners[b], common[a ^ b] * cell) for a in range(4) for b in range(a + 1)]
    i, k, _, node = _triangle_nodes(mesh)
    area = square * np.diff(mesh.offshore)[i] * np.diff(mesh.level)[k] / 24.0
    return parts + [
        (node[a], node[b], area * (2.0 if a == b else 1.0)) for a in range(3) for b in range(a + 1)
    ]


def _surface(mesh: Mesh, rotation: Rotation) -> list[Entries]:
    near, far = mesh.start[:-2], mesh.start[1:-1]
    value = rotation.inertia / rotation.gravity * np.diff(mesh.offshore)
    return [
        (near, near, value / 3.0),
        (far, far, value / 3.0),
        (far, near, value / 6.0),
    ]


def _beyond(mesh: Mesh, offshore: OffshoreModes) -> Entries:
    """The flat ocean beyond the last column: Σ κ (projection)(projection)ᵀ."""
    block = (offshore.projection * offshore.decay) @ offshore.projection.T
    row, column = np.tril_indices(block.shape[0])
    first = mesh.start[-2]
    return first + row, first + column, block[row, column]


def boundary_product(depth: Array) -> Callable[[Array], Array]:
    """B as a function of nodal values along the boundary line.

    Parameters
    ----------
    depth : ndarray, shape (n,)
        Depth of the boundary nodes (m), from the surface down the wall and along the bottom.

    Returns
    -------
    callable
        Takes p at the nodes and returns ∫ q_i p dh for the piecewise linear q_i of every node.
    """
    side = np.diff(depth) / 6.0
    middle = 2.0 * (np.append(side, 0.0) + np.append(0.0, side))

    def product(values: Array) -> Array:
        result: Array = middle * values
        result[:-1] += side * values[1:]
        result[1:] += side * values[:-1]
        return result

    return product
