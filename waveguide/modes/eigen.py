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

from waveguide.errors import WaveguideError
from waveguide.modes.assembly import Stiffness
from waveguide.modes.mesh import Indices

Array = NDArray[np.float64]

_RESIDUAL = 3e-4
"""Residual allowed, relative to the eigenvalue; the eigenvalue's own error goes as its square."""

_ROUNDING = 1e-10
"""Residuals, directions and eigenvalues this small relative to the largest are rounding."""

_FIRST_CHECK, _CHECK_EVERY, _MOST_STEPS = 8, 2, 300


class _Solver:
    """K⁻¹ applied to loads on the boundary nodes.

    K's smallest eigenvalue, near the uniform vector 1, is of the size of f²/g where its entries
    are of the size of f²/N², so 1 drowns in their rounding. As in an electric network the first
    node is grounded instead: K' = K + σ e eᵀ is well conditioned, and K p = b means
    p = K'⁻¹ b + α K'⁻¹ e with the α that satisfies 1ᵀK p = 1ᵀ b, in which nothing cancels.
    Under a rigid lid K 1 = 0: loads have no sum, p = K'⁻¹ b + α, and α makes 1ᵀB p = 0.
    """

    def __init__(
        self, stiffness: Stiffness, boundary: Indices, product: Callable[[Array], Array]
    ) -> None:
        grounded = stiffness.band.copy(order="F")
        grounded[0, 0] *= 2.0
        self.factor, fault = lapack.dpbtrf(grounded, lower=1, overwrite_ab=1)
        if fault:
            raise WaveguideError(
                "the stiffness matrix of the section is not positive definite: the section's "
                "depths or N² span too many orders of magnitude"
            )
        self.boundary = boundary
        self.floating = stiffness.floating
        self.row_sum = stiffness.row_sum
        self.uniform = product(np.ones(boundary.size))
        self.ground = self._solve(np.eye(1, self.row_sum.size).T)

    def _solve(self, load: Array) -> Array:
        values: Array = lapack.dpbtrs(self.factor, load, lower=1, overwrite_b=1)[0][:, 0]
        return values

    def __call__(self, load: Array) -> Array:
        """Values at all nodes."""
        full = np.zeros((self.row_sum.size, 1))
        if self.floating:
            full[self.boundary, 0] = load - load.mean()
            values = self._solve(full)
            return values - self.offset(values[self.boundary])
        full[self.boundary, 0] = load
        values = self._solve(full)
        alpha = (load.sum() - self.row_sum @ values) / (self.row_sum @ self.ground)
        values += alpha * self.ground
        return values

    def offset(self, values: Array) -> float:
        """Part of values on the boundary that only a floating solution may not have."""
        return float(self.uniform @ values / self.uniform.sum()) if self.floating else 0.0


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
    inverse : ndarray, shape (m,)
        1/λ, largest first; m < `count` where there are no more (a flat bottom with few levels).
    modes : ndarray, shape (m, nnode)
        p with pᵀBp = 1, positive at the first node.
    ritz : ndarray, shape (k,)
        All Ritz values, descending; the most negative ones are accurate too.
    """
    ritz, modes = _lanczos(_Solver(stiffness, boundary, product), boundary, product, count)
    found = min(count, int(np.sum(ritz > _ROUNDING * ritz[0])))
    inverse, modes = ritz[:found], modes[:found]
    modes /= np.where(modes[:, :1] < 0.0, -1.0, 1.0) * inverse[:, None] ** 1.5
    return inverse, modes, ritz


def _lanczos(
    solve: _Solver,
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
    weight = product(step)
    step = solve(weight)[boundary]
    for j in range(most):
        norm = np.sqrt(step @ weight)
        v[j], k[j] = step / norm, weight / norm
        weight = product(v[j])
        everywhere.append(solve(weight))
        step = everywhere[-1][boundary]
        row = v[: j + 1] @ weight
        step, weight = step - row @ v[: j + 1], weight - row @ k[: j + 1]
        again = k[: j + 1] @ step  # the same product, but it sees the rounding in the solution
        step, weight = step - again @ v[: j + 1], weight - again @ k[: j + 1]
        step -= solve.offset(step)
        projected[j, : j + 1] = row + again
        left = float(np.sqrt(np.maximum(step @ weight, 0.0)))
        exhausted = left <= _ROUNDING * projected[0, 0]
        if exhausted or _due(j, most):
            ritz, s = np.linalg.eigh(projected[: j + 1, : j + 1])
            allowed = np.maximum(_RESIDUAL * np.abs(ritz[-count:]), _ROUNDING * ritz[-1])
            if exhausted or np.all(left * np.abs(s[-1, -count:]) <= allowed):
                break
    return ritz[::-1], s[:, : -count - 1 : -1].T @ np.array(everywhere)


def _due(j: int, most: int) -> bool:
    return j == most - 1 or (j >= _FIRST_CHECK and (j - _FIRST_CHECK) % _CHECK_EVERY == 0)
