"""Independent reference: the section problem by scikit-fem, on a terrain-following grid.

Shares nothing with the package but the equations: quadrilaterals whose lines follow the bottom, a
wide domain closed by ∂x p = 0 in place of the exact ocean beyond, sparse LU and ARPACK in place
of the band solver. B is -∫ p q n_x ds over wall and bottom, n the outward normal.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.sparse.linalg import LinearOperator, eigsh, splu
from skfem import Basis, BilinearForm, ElementQuad1, ElementQuad2, FacetBasis, MeshQuad

GRAVITY = 9.81


@dataclass(frozen=True)
class Case:
    """A section: corners of the depth profile, N² at depths, Coriolis parameter (SI)."""

    offshore: tuple[float, ...]
    depth: tuple[float, ...]
    n2: tuple[float, ...]
    n2_depth: tuple[float, ...]
    f: float


TROPICS = (1.0e-4, 5e-4, 3e-4, 1e-4, 3e-5, 1e-5, 3e-6, 8e-7)
TEMPERATE = (2.0e-5, 2e-4, 9e-5, 3e-5, 1.5e-5, 7e-6, 2e-6, 5e-7)
POLAR = (5.0e-5, 4e-5, 2e-5, 1e-5, 5e-6, 2e-6, 6e-7, 2e-7)
N2_DEPTH = (0.0, 60.0, 120.0, 250.0, 500.0, 1000.0, 2000.0, 5000.0)

CASES = {
    "narrow shelf, 36 S": Case(
        (0, 8e3, 22e3, 34e3, 52e3, 75e3, 110e3),
        (35, 110, 180, 900, 2800, 4300, 4900),
        TEMPERATE, N2_DEPTH, -8.57e-5,
    ),
    "wide shelf, 45 N": Case(
        (0, 30e3, 90e3, 150e3, 175e3, 210e3, 280e3),
        (15, 60, 85, 140, 900, 2200, 3000),
        TEMPERATE, N2_DEPTH, 1.03e-4,
    ),
    "steep slope, 12 S": Case(
        (0, 20e3, 35e3, 60e3, 110e3, 160e3),
        (40, 130, 700, 2300, 4600, 5000),
        TROPICS, N2_DEPTH, -3.03e-5,
    ),
    "steep slope, 5 N": Case(
        (0, 12e3, 25e3, 60e3, 90e3),
        (25, 90, 900, 2600, 3400),
        TROPICS, N2_DEPTH, 1.27e-5,
    ),
    "weak stratification, 62 N": Case(
        (0, 25e3, 60e3, 95e3, 125e3, 200e3),
        (40, 150, 230, 500, 1500, 2500),
        POLAR, N2_DEPTH, 1.29e-4,
    ),
}  # fmt: skip


def _columns(case: Case, nx: int) -> np.ndarray:
    """Distances spread evenly in x, in depth and in the logarithm of depth; graded beyond."""
    x, h = np.array(case.offshore), np.array(case.depth)
    fine = np.linspace(0.0, x[-1], 4001)
    depth = np.interp(fine, x, h)
    measure = fine / x[-1] + depth / depth.max() + np.log(depth / depth.min()) / np.log(100.0)
    columns = np.interp(np.linspace(measure[0], measure[-1], nx + 1), measure, fine)
    width = 8.0 * np.sqrt(GRAVITY * h[-1]) / abs(case.f)
    return np.append(columns, x[-1] + np.geomspace(columns[-1] - columns[-2], width, 25))


def _levels(case: Case, bottom: float, sigma: np.ndarray) -> np.ndarray:
    """Depths at fractions `sigma` of ∫N dz, mixed with 15 % of even spacing."""
    z = np.linspace(0.0, bottom, 1001)
    n = np.sqrt(np.interp(z, case.n2_depth, case.n2))
    share = np.append(0.0, np.cumsum(n[1:] + n[:-1]))
    return np.interp(sigma, 0.85 * share / share[-1] + 0.15 * z / bottom, z)


def terrain_following(case: Case, nx: int, nz: int) -> MeshQuad:
    """Mesh with named boundaries coast, surface and bottom."""
    columns = _columns(case, nx)
    sigma = np.linspace(0.0, 1.0, nz + 1)
    bottom = np.interp(columns, case.offshore, case.depth)
    depth = np.array([_levels(case, foot, sigma) for foot in bottom])
    mesh = MeshQuad.init_tensor(np.arange(columns.size, dtype=float), np.arange(nz + 1.0))
    i, k = np.rint(mesh.p).astype(int)
    boundaries = {
        name: mesh.facets_satisfying(test, boundaries_only=True)
        for name, test in {
            "coast": lambda p: p[0] < 1e-6,
            "surface": lambda p: p[1] < 1e-6,
            "bottom": lambda p: p[1] > nz - 1e-6,
        }.items()
    }
    moved = MeshQuad(np.vstack([columns[i], -depth[i, k]]), mesh.t)
    return moved.with_boundaries(boundaries)


def section_speeds(
    case: Case, count: int, *, nx: int = 60, nz: int = 24, quadratic: bool = True
) -> np.ndarray:
    """Phase speeds (m/s) of modes 0 … count."""
    mesh = terrain_following(case, nx, nz)
    element = ElementQuad2() if quadratic else ElementQuad1()
    order = 4 if quadratic else 2

    @BilinearForm
    def interior(p, q, w):  # type: ignore[no-untyped-def]
        inverse = case.f**2 / np.interp(-w.x[1], case.n2_depth, case.n2)
        return p.grad[0] * q.grad[0] + inverse * p.grad[1] * q.grad[1]

    @BilinearForm
    def surface(p, q, w):  # type: ignore[no-untyped-def]
        return case.f**2 / GRAVITY * p * q

    @BilinearForm
    def guide(p, q, w):  # type: ignore[no-untyped-def]
        return -p * q * w.n[0]

    line = np.union1d(mesh.boundaries["coast"], mesh.boundaries["bottom"])
    top = FacetBasis(mesh, element, facets=mesh.boundaries["surface"], intorder=order)
    stiff = interior.assemble(Basis(mesh, element, intorder=order)) + surface.assemble(top)
    right = guide.assemble(FacetBasis(mesh, element, facets=line, intorder=order))
    factor = splu(stiff.tocsc(), permc_spec="MMD_AT_PLUS_A", options={"SymmetricMode": True})
    inverse = LinearOperator(stiff.shape, matvec=factor.solve, dtype=float)
    theta = eigsh(
        right, k=count + 1, M=stiff, Minv=inverse, which="LA", tol=1e-6, return_eigenvectors=False
    )
    return np.sort(theta)[::-1] * abs(case.f)
