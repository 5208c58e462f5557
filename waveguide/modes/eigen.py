"""Eigenvalues of K p = λ B p where B lives on few boundary nodes.

K = Lᵀ L is symmetric positive definite and B symmetric, so p = (1/λ)⁻¹ K⁻¹ B p is a symmetric
problem in the inner product of K: all 1/λ are real, whatever the sign of B. B sees only the
boundary, hence K times any Krylov vector K⁻¹ B v is known without a product (it is B v) and
both stay on the boundary: the Lanczos process runs on the condensed problem, and one banded
solve per step is all the work (Parlett 1980, The Symmetric Eigenvalue Problem, chapter 15).
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import lapack

from waveguide.errors import InputError, WaveguideError
from waveguide.modes.assembly import Stiffness
from waveguide.modes.mesh import Indices

Array = NDArray[np.float64]

_RESIDUAL = 3e-5
"""Residual allowed, relative to the eigenvalue; the eigenvalue's own error goes as its square."""

_EXHAUSTED = 1e-9
"""A new direction smaller than this, relative to the first eigenvalue, is rounding."""

_FIRST_CHECK, _CHECK_EVERY, _MOST_STEPS = 11, 3, 300


class _Solver:
    """K⁻¹ applied to loads on the boundary nodes.

    K's smallest eigenvalue, near the uniform vector 1, is of the size of f²/g where its entries
    are of the size of f²/N², so 1 drowns in their rounding. As in an electric network the first
    node is grounded instead: K' = K + σ e eᵀ is well conditioned, and K p = b means
    p = K'⁻¹ b + α K'⁻¹ e with the α that satisfies 1ᵀK p = 1ᵀ b, in which nothing cancels.
    """

    def __init__(self, stiffness: Stiffness, boundary: Indices) -> None:
        grounded = stiffness.band.copy(order="F")
        grounded[0, 0] *= 2.0
        self.factor, fault = lapack.dpbtrf(grounded, lower=1, overwrite_ab=1)
        if fault:
            raise WaveguideError(
                "the stiffness matrix of the section is not positive definite: the section's "
                "depths or N² span too many orders of magnitude"
            )
        self.boundary = boundary
        self.row_sum = stiffness.row_sum
        self.ground = self._solve(np.eye(1, self.row_sum.size).T)
        self.total = self.row_sum @ self.ground

    def _solve(self, load: Array) -> Array:
        values: Array = lapack.dpbtrs(self.factor, load, lower=1, overwrite_b=1)[0][:, 0]
        return values

    def __call__(self, load: Array) -> Array:
        """Values at all nodes."""
        full = np.zeros((self.row_sum.size, 1))
        full[self.boundary, 0] = load
        values = self._solve(full)
        values += (load.sum() - self.row_sum @ values) / self.total * self.ground
        return values


def largest_modes(
    stiffness: Stiffness,
    boundary: Indices,
    product: Callable[[Array], Array],
    count: int,
) -> tuple[Array, Array, Array]:
    """Solutions of K p = λ B p with the largest positive 1/λ.

    Parameters
    ----------
    stiffness : Stiffness
        K.
    boundary : ndarray of int, shape (nboundary,)
        The nodes on which B acts.
    product : callable
        B times values on the boundary nodes.
    count : int
        How many.

    Returns
    -------
    inverse : ndarray, shape (count,)
        1/λ, largest first.
    modes : ndarray, shape (count, nnode)
        p with pᵀBp = 1, positive at the first node.
    ritz : ndarray, shape (k,)
        All Ritz values, descending; the most negative ones are accurate too.
    """
    ritz, modes = _lanczos(_Solver(stiffness, boundary), boundary, product, count)
    inverse = ritz[:count]
    if inverse.size < count or inverse[-1] <= 0.0:
        raise InputError(
            f"count asks for {count} modes but the section holds {int(np.sum(ritz > 0.0))} at this "
            "resolution: ask for fewer"
        )
    modes /= np.where(modes[:, :1] < 0.0, -1.0, 1.0) * inverse[:, None] ** 1.5
    return inverse, modes, ritz


def _lanczos(
    solve: Callable[[Array], Array],
    boundary: Indices,
    product: Callable[[Array], Array],
    count: int,
) -> tuple[Array, Array]:
    """Ritz values, descending, and K⁻¹B times the first `count` K-orthonormal Ritz vectors.

    Kept on the boundary: v, and k = K v. The new direction w = K⁻¹ B v has K w = B v, so
    (v_i, w)_K = v_i · B v.
    """
    size = boundary.size
    most = min(size, _MOST_STEPS)
    v, k = np.empty((most, size)), np.empty((most, size))
    everywhere: list[Array] = []
    projected = np.zeros((most, most))
    weight = product(1.0 + 0.5 * np.cos(2.4 * np.arange(size)))  # contains every mode
    step = solve(weight)[boundary]
    for j in range(most):
        norm = np.sqrt(step @ weight)
        v[j], k[j] = step / norm, weight / norm
        weight = product(v[j])
        everywhere.append(solve(weight))
        step = everywhere[-1][boundary]
        row = v[: j + 1] @ weight
        step, weight = step - row @ v[: j + 1], weight - row @ k[: j + 1]
        again = v[: j + 1] @ weight  # orthogonalise twice: once loses accuracy
        step, weight = step - again @ v[: j + 1], weight - again @ k[: j + 1]
        projected[j, : j + 1] = row + again
        left = float(np.sqrt(np.maximum(step @ weight, 0.0)))
        if _due(j, most) or left <= _EXHAUSTED * abs(projected[0, 0]):
            ritz, s = np.linalg.eigh(projected[: j + 1, : j + 1])
            if left * np.max(np.abs(s[-1, -count:] / ritz[-count:])) < _RESIDUAL:
                break
    return ritz[::-1], s[:, : -count - 1 : -1].T @ np.array(everywhere)


def _due(j: int, most: int) -> bool:
    return j == most - 1 or (j >= _FIRST_CHECK and (j - _FIRST_CHECK) % _CHECK_EVERY == 0)
