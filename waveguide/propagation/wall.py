"""Equatorial waves at a wall: the series that both junctions rest on.

Scales are L_e = √(c/β) and T_e = 1/√(βc); ω̂ = ωT_e and ŷ = y/L_e. Convention exp(−iωt).

Derivation (Moore 1968; Clarke 1983). With q = p + u and r = p − u a free wave of meridional
mode n ≥ 1 has v = aψ_n, q = i√(2(n+1)) aψ_{n+1}/(ω̂ − k), r = −i√(2n) aψ_{n−1}/(ω̂ + k), where
ψ are normalised Hermite functions and ω̂² − k² − k/ω̂ = 2n + 1; the Kelvin wave has q = 2ψ_0,
r = 0. At a meridional wall u = 0 makes q = r, so the wall pressure is p = Σ q_m ψ_m, and
matching ψ_m between the modes n = m − 1 and n = m + 1 leaves a recurrence of two terms,

    q_{m+2} = ρ_m q_m,   ρ_m = −√((m+2)/(m+1)) (ω̂ + k_{m+1})/(ω̂ − k_{m+1}).

k is the root that carries energy away from the wall, or decays away from it: at an eastern
wall the long Rossby root, at a western wall the short one. The sum over m does not converge
absolutely (its tail is the coastal wave at large ŷ), but at given ŷ its terms alternate once
√(2m) > ŷ, so a smooth taper sums it: 200 terms give four figures for |ŷ| ≤ 8 and ω̂ ≤ 3.

References
----------
Moore (1968), Planetary-gravity waves in an equatorial ocean, thesis, Harvard.
Clarke (1983), J. Phys. Oceanogr. 13, 1193.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

TERMS = 200
SLOWEST = 1e-4
"""ω̂ that stands for zero; the wall amplitude is uniform to 1e-6 there."""


def hermite_functions(count: int, y: ArrayLike) -> Array:
    """Normalised Hermite functions ψ_0 … ψ_{count−1}.

    Parameters
    ----------
    count : int
        How many, at least 2.
    y : array_like, shape T
        ŷ.

    Returns
    -------
    ndarray, shape (count,) + T
        ∫ψ_m ψ_n dy = δ_mn.
    """
    y = np.asarray(y, float)
    psi = np.empty((count, *y.shape))
    psi[0] = np.pi**-0.25 * np.exp(-0.5 * y * y)
    psi[1] = np.sqrt(2.0) * y * psi[0]
    for m in range(1, count - 1):
        psi[m + 1] = (np.sqrt(2.0) * y * psi[m] - np.sqrt(m) * psi[m - 1]) / np.sqrt(m + 1.0)
    return psi


def wall_wavenumber(frequency: Array, mode: Array, eastern: bool) -> ComplexArray:
    """Root k of ω̂² − k² − k/ω̂ = 2n + 1 that leaves an eastern or a western wall.

    Parameters
    ----------
    frequency, mode : ndarray
        ω̂ > 0 and n ≥ 1, broadcast together.
    eastern : bool

    Returns
    -------
    ndarray of complex
        Of two real roots the one with outward group velocity, else the one that decays.
    """
    half = 0.5 / frequency
    square = half**2 + frequency**2 - (2.0 * mode + 1.0)
    lower = -half - np.sqrt(square + 0j)
    upper = (2.0 * mode + 1.0 - frequency**2) / lower  # product of the roots, no cancellation
    rossby = (square >= 0.0) & (frequency**2 < mode + 0.5)
    return np.asarray(np.where(rossby == eastern, upper, lower))


def wall_coefficients(
    frequency: ArrayLike, terms: int, parity: int, eastern: bool
) -> ComplexArray:
    """Coefficients q_m of the wall pressure, starting from q_parity = 2.

    Parameters
    ----------
    frequency : array_like, shape S
        ω̂ > 0.
    terms : int
        Largest m, exclusive.
    parity : int
        0 for a solution symmetric about the equator (whose Kelvin wave has amplitude ψ_0),
        1 for an antisymmetric one.
    eastern : bool

    Returns
    -------
    ndarray of complex, shape (n,) + S
        For m = parity, parity + 2, … < terms.
    """
    omega = np.asarray(frequency, float)
    order = _orders(terms - 2, parity, omega)
    start = np.full((1, *omega.shape), 2.0 + 0j)
    return np.cumprod(np.concatenate([start, _ratio(omega, order, eastern)]), axis=0)


def wall_sum(coefficients: ComplexArray, distance: ArrayLike, parity: int) -> ComplexArray:
    """Σ q_m ψ_m(ŷ) with a tapered tail, divided by ψ_0(0).

    Parameters
    ----------
    coefficients : ndarray of complex, shape (n,) + S
        For m = parity, parity + 2, …
    distance : array_like, shape T
        ŷ, within ±8.
    parity : int

    Returns
    -------
    ndarray of complex, shape S + T
    """
    places = np.asarray(distance, float)
    weights = _weights(len(coefficients), parity, tuple(places.ravel().tolist()))
    weights = weights.reshape(len(coefficients), *places.shape)
    return np.asarray(np.tensordot(np.moveaxis(coefficients, 0, -1), weights, axes=(-1, 0)))


def oblique_asymmetry(frequency: ArrayLike, distance: float) -> ComplexArray:
    """How a leaning eastern wall favours one hemisphere: ln(p(ŷ)/p(−ŷ)) per unit tan(lean).

    Perturbation of a wall x = y tan θ about the meridional one, to first order in t = tan θ.
    No flow through it is u − t v = 0 at x = ty, hence u₁ = F = v₀ − y ∂u₀/∂x at x = 0, which
    is antisymmetric. Its coefficients on ψ_m, m odd, follow from those of v₀ and ∂u₀/∂x, and
    with r_m = q_m − 2F_m the recurrence q_{m+2} = ρ_m r_m starts from q_1 = 0, since the mixed
    Rossby-gravity wave cannot leave an eastern wall. Wall pressure changes by p₁ + y ∂p₀/∂x,
    where ∂p₀/∂x = y v₀.

    Parameters
    ----------
    frequency : array_like, shape S
        ω̂ > 0.
    distance : float
        ŷ > 0.

    Returns
    -------
    ndarray of complex, shape S
    """
    omega = np.asarray(frequency, float)
    odd = _orders(TERMS, 1, omega)
    k = wall_wavenumber(omega, odd, True)
    base = wall_coefficients(omega, TERMS, 0, True)
    q = base * _taper(len(base))[(...,) + (None,) * omega.ndim]
    before = np.concatenate([omega[None], k])[: len(q)]
    slope = 0.5j * (before - k[: len(q)]) * q  # ∂u₀/∂x on ψ_m, m even
    higher = np.concatenate([q[1:], np.zeros_like(q[:1])])
    current = higher * (omega - k) / (1j * np.sqrt(2.0 * (odd + 1.0)))  # v₀ on ψ_m, m odd
    lift = np.concatenate([slope[1:], np.zeros_like(q[:1])])
    forcing = current - np.sqrt(odd / 2.0) * slope - np.sqrt((odd + 1.0) / 2.0) * lift
    ratio = _ratio(omega, odd, True)
    change, arriving = np.empty_like(q), np.zeros(omega.shape, complex)
    for i in range(len(q)):
        change[i] = arriving - forcing[i]
        arriving = ratio[i] * (arriving - 2.0 * forcing[i])
    wall = wall_sum(change, distance, 1) + distance**2 * _untapered_sum(current, distance)
    return np.asarray(2.0 * wall / wall_sum(base, distance, 0))


def _untapered_sum(coefficients: ComplexArray, distance: float) -> ComplexArray:
    psi = hermite_functions(2 * len(coefficients) + 1, distance)[1::2] * np.pi**0.25
    return np.asarray(np.tensordot(np.moveaxis(coefficients, 0, -1), psi, axes=(-1, 0)))


@lru_cache(maxsize=64)
def _weights(count: int, parity: int, places: tuple[float, ...]) -> Array:
    """Tapered ψ_m(ŷ)/ψ_0(0), m = parity, parity + 2, …, which many frequencies share."""
    psi = hermite_functions(2 * count + parity, np.array(places))[parity::2] * np.pi**0.25
    return np.asarray(psi * _taper(count)[:, None])


def _orders(stop: int, first: int, omega: Array) -> Array:
    """Orders first, first + 2, … < stop, along a new leading axis."""
    return np.arange(float(first), stop, 2.0)[(...,) + (None,) * omega.ndim]


def _ratio(omega: Array, order: Array, eastern: bool) -> ComplexArray:
    """ρ_m of the module's recurrence."""
    k = wall_wavenumber(omega, order + 1.0, eastern)
    return np.asarray(-np.sqrt((order + 2.0) / (order + 1.0)) * (omega + k) / (omega - k))


def _taper(count: int) -> Array:
    """1 for the first sixth of the terms, then smoothly to 0."""
    x = np.clip((np.arange(count) / count - 1.0 / 6.0) * 1.2, 0.0, 1.0)
    return np.asarray(1.0 - x**3 * (10.0 - 15.0 * x + 6.0 * x * x))
