"""The ends of the equatorial guide: Kelvin wave to coast and coast to Kelvin wave.

Scales are L_e = √(c/β) and T_e = 1/√(βc); ω̂ = ωT_e and ŷ = y/L_e. Convention exp(−iωt).

Derivation (Moore 1968; Clarke 1983). With q = p + u and r = p − u a free wave of meridional
mode n ≥ 1 has v = ψ_n, q = i√(2(n+1)) ψ_{n+1}/(ω̂ − k), r = −i√(2n) ψ_{n−1}/(ω̂ + k), where
ψ are normalised Hermite functions and ω̂² − k² − k/ω̂ = 2n + 1; the Kelvin wave has q = 2ψ_0,
r = 0. At a meridional wall u = 0 makes q = r, so the wall pressure is p = Σ q_m ψ_m, and
matching ψ_m between the modes n = m − 1 and n = m + 1 leaves a recurrence of two terms,

    q_{m+2} = −√((m+2)/(m+1)) (ω̂ + k_{m+1})/(ω̂ − k_{m+1}) q_m.

k is the root that carries energy away from the wall, or decays away from it: at an eastern
wall the long Rossby root, at a western wall the short one. Consequences:

- the share of the energy in mode n is |q_{n−1}² − q_{n+1}²|/4, and for modes that decay
  |q| is constant: what is left, P = |q_∞|²/4, goes poleward, half to each side;
- ω̂ → 0: q_m are the coefficients of a constant, √2 times the incident equatorial amplitude;
- the sum over m does not converge absolutely (its tail is the coastal wave at large ŷ), but
  the terms at given ŷ alternate once √(2m) > ŷ, so a smooth taper sums it: with 200 terms
  the result is converged to four figures for |ŷ| ≤ 8 and ω̂ ≤ 3.

Reversing time and mirroring x turns the eastern wall into the western one, so the scattering
matrix of the one is the transpose of the other. Per hemisphere, with the coastal amplitude
taken at ŷ, η_K/η_coast = (η_coast/η_K of the eastern wall)/(2√π ŷ). Hence ω̂ → 0 gives
1/(√(2π) ŷ), transport conserved. For ω̂ > 1 − √½ it gives (4√π ŷ)^(−1/2): the Kelvin wave
takes half the energy that one hemisphere delivers and the antisymmetric mixed Rossby-gravity
wave the other half.

References
----------
Moore (1968), Planetary-gravity waves in an equatorial ocean, thesis, Harvard.
Cane & Sarachik (1977), J. Mar. Res. 35, 395 (√2).
Clarke (1983), J. Phys. Oceanogr. 13, 1193 (energy of the reflected waves).
Moore, Durland & Hristova (2014) (all goes poleward for 1 − √½ < ω̂ < 1 + √½).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import BETA_EQUATOR, ROTATION_RATE
from waveguide.errors import InputError
from waveguide.propagation.dispersion import segment_exponent

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

MATCHING_DISTANCE = 2.0
"""Default distance (in L_e) at which the coast takes over: beyond it section 4's local
relation follows the wall solution within 3 % in amplitude and 2° in phase for ω̂ ≤ 1.4."""

_TERMS = 200
_FAR = 6.0  # ŷ where the local relation has become exact, used to fix the junction factor
_SLOWEST = 1e-4  # ω̂ that stands for zero; the wall amplitude is uniform to 1e-6 there
_FASTEST = 3.0  # ω̂ beyond which less than 0.2 % of the energy follows the coast


@dataclass(frozen=True)
class JunctionResponse:
    """What a junction of equator and coast does to a wave.

    Attributes
    ----------
    amplitude : ndarray of complex
        Sea level leaving per unit sea level arriving: at the matching latitude on the coast
        and on the equator at the wall. Positive phase is a delay.
    latitude : ndarray
        Matching latitude (degrees, positive); it serves both hemispheres.
    energy_out : ndarray
        Share of the arriving energy that leaves along the guide: on each of the two coasts
        at an eastern junction, as equatorial Kelvin wave at a western one.
    energy_rossby : ndarray
        Share that leaves as Rossby waves (at a western junction including the mixed
        Rossby-gravity wave, above ω̂ = 1 + √½ also as inertia-gravity waves).
    """

    amplitude: ComplexArray
    latitude: Array
    energy_out: Array
    energy_rossby: Array


def equatorial_radius(phase_speed: ArrayLike) -> Array:
    """Equatorial deformation radius L_e = √(c/β) (m) of phase speeds c (m/s).

    Parameters
    ----------
    phase_speed : array_like
        Phase speed c (m/s).

    Returns
    -------
    ndarray
    """
    return np.asarray(np.sqrt(np.asarray(phase_speed, float) / BETA_EQUATOR))


def scaled_frequency(omega: ArrayLike, phase_speed: ArrayLike) -> Array:
    """Frequency in the equatorial scale, ω̂ = ω/√(βc).

    Parameters
    ----------
    omega : array_like
        Angular frequency (rad/s).
    phase_speed : array_like
        Phase speed c (m/s); broadcasts.

    Returns
    -------
    ndarray
    """
    rate = np.sqrt(BETA_EQUATOR * np.asarray(phase_speed, float))
    return np.asarray(np.asarray(omega, float) / rate)


def eastern_junction(
    omega: ArrayLike, phase_speed: ArrayLike, matching: float = MATCHING_DISTANCE
) -> JunctionResponse:
    """Equatorial Kelvin wave in, coastal waves out, at an eastern boundary.

    The amplitude is that of the wall solution at ŷ = 6, carried back to the matching latitude
    with the local relation of :mod:`waveguide.propagation.dispersion`. So a leg that starts
    there has the exact amplitude, phase and energy from a few L_e onwards at every ω̂.

    Parameters
    ----------
    omega : array_like
        Angular frequency ω ≥ 0 (rad/s).
    phase_speed : array_like
        Phase speed c of the mode at the wall (m/s); broadcasts with `omega`.
    matching : float
        Distance from the equator where the coast takes over, in L_e, 1 to 4.

    Returns
    -------
    JunctionResponse
        Per unit equatorial amplitude; both coasts have the same.

    Raises
    ------
    InputError
        If the matching distance is out of range, or reaches the pole.

    References
    ----------
    Moore (1968); Clarke (1983), J. Phys. Oceanogr. 13, 1193.
    """
    frequency = scaled_frequency(omega, phase_speed)
    speed = np.broadcast_to(np.asarray(phase_speed, float), frequency.shape)
    latitude = _matching_latitude(speed, matching)
    slow = np.clip(frequency, _SLOWEST, _FASTEST)
    onward = segment_exponent(slow, 1.0, matching, _FAR, _FAR - matching)
    amplitude = eastern_wall(slow, np.array(_FAR)) * np.exp(-onward)
    amplitude = np.where(frequency > _FASTEST, 0.0, amplitude)
    energy = np.abs(amplitude) ** 2 / (2.0 * np.sqrt(np.pi) * matching)
    return JunctionResponse(amplitude, latitude, energy, 1.0 - 2.0 * energy)


def western_junction(
    omega: ArrayLike, phase_speed: ArrayLike, matching: float = MATCHING_DISTANCE
) -> JunctionResponse:
    """Coastal wave of one hemisphere in, equatorial Kelvin wave out, at a western boundary.

    Follows from `eastern_junction` by reciprocity (see the module). Waves that arrive from
    both hemispheres add up in amplitude.

    Parameters
    ----------
    omega, phase_speed, matching
        As for `eastern_junction`.

    Returns
    -------
    JunctionResponse
        Per unit coastal amplitude at the matching latitude.

    Raises
    ------
    InputError
        If the matching distance is out of range, or reaches the pole.
    """
    east = eastern_junction(omega, phase_speed, matching)
    amplitude = east.amplitude / (2.0 * np.sqrt(np.pi) * matching)
    return JunctionResponse(amplitude, east.latitude, east.energy_out, 1.0 - east.energy_out)


def eastern_wall(frequency: ArrayLike, distance: ArrayLike) -> ComplexArray:
    """Sea level along an eastern wall per unit incident equatorial amplitude.

    Parameters
    ----------
    frequency : array_like, shape S
        ω̂, 0..3.
    distance : array_like, shape T
        ŷ, −8..8.

    Returns
    -------
    ndarray of complex, shape S + T
        The incident Kelvin wave has amplitude 1 and phase 0 on the equator at the wall.
    """
    return _wall_sum(frequency, distance, parity=0, eastern=True)


def western_wall(frequency: ArrayLike, distance: ArrayLike) -> ComplexArray:
    """Sea level along a western wall per unit equatorial Kelvin amplitude sent out.

    The wave arrives along the coast of the northern hemisphere (ŷ > 0) alone: the sum of a
    symmetric and an antisymmetric solution that cancel along the southern coast.

    Parameters
    ----------
    frequency : array_like, shape S
        ω̂, 0..3.
    distance : array_like, shape T
        ŷ, −8..8.

    Returns
    -------
    ndarray of complex, shape S + T
    """
    symmetric = _wall_sum(frequency, distance, parity=0, eastern=False)
    mixed = _wall_sum(frequency, distance, parity=1, eastern=False)
    far = np.array(_FAR)
    ratio = _wall_sum(frequency, far, 0, False) / _wall_sum(frequency, far, 1, False)
    return symmetric + ratio[(...,) + (None,) * np.ndim(distance)] * mixed


def rossby_share(frequency: ArrayLike, modes: int) -> Array:
    """Share of an incident Kelvin wave's energy reflected as each Rossby wave.

    Parameters
    ----------
    frequency : array_like, shape S
        ω̂ > 0.
    modes : int
        How many of the meridional modes n = 1, 3, 5, …

    Returns
    -------
    ndarray, shape S + (modes,)
        Zero for modes that do not propagate at this frequency.
    """
    energy = np.abs(_wall_coefficients(frequency, 2 * modes + 1, parity=0, eastern=True)) ** 2 / 4.0
    return np.asarray(np.moveaxis(np.maximum(energy[:-1] - energy[1:], 0.0), 0, -1))


def poleward_share(frequency: ArrayLike) -> Array:
    """Share of an incident Kelvin wave's energy that goes poleward along both coasts.

    The product over the modes that propagate (the others leave the energy as it is), so it is
    taken over as many as there are: about 1/(8ω̂²) of them.

    Parameters
    ----------
    frequency : array_like
        ω̂, 0.005 or more.

    Returns
    -------
    ndarray
        1 between ω̂ = 1 − √½ and 1 + √½, proportional to ω̂ far below.

    References
    ----------
    Moore (1968); Moore, Durland & Hristova (2014).
    """
    slowest = float(np.min(np.asarray(frequency, float)))
    terms = max(_TERMS, int(0.25 / slowest**2) + 3)
    return np.asarray(np.abs(_wall_coefficients(frequency, terms, 0, True)[-1]) ** 2 / 4.0)


def equatorial_growth(speed_start: ArrayLike, speed_end: ArrayLike) -> Array:
    """Log-amplitude ¼ ln(c_end/c_start) of a Kelvin wave that keeps its energy.

    For the modal amplitude φ (p = φF with ∫F² dz = 1) the flux is φ² c⁻¹ √(πc/β), so φ ∝ c^¼.
    Sea level also has the ratio of F at the surface: in a layer of thickness ∝ c² that is
    1/c, which makes the well-known η ∝ c^(−3/4).

    Parameters
    ----------
    speed_start, speed_end : array_like
        Phase speeds (m/s) at both ends of an equatorial leg.

    Returns
    -------
    ndarray
    """
    return np.asarray(
        0.25 * np.log(np.asarray(speed_end, float) / np.asarray(speed_start, float))
    )


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


def _matching_latitude(speed: Array, matching: float) -> Array:
    sine = matching * np.sqrt(BETA_EQUATOR * speed) / (2.0 * ROTATION_RATE)
    if not 1.0 <= matching <= 4.0 or np.any(sine >= 1.0):
        raise InputError(
            f"matching: {matching:g} equatorial radii at c = {np.max(speed):.4g} m/s; it must be "
            "1 to 4 and end short of the pole. Use 1 for the barotropic mode."
        )
    return np.asarray(np.degrees(np.arcsin(sine)))


def _wavenumber(frequency: Array, mode: int, eastern: bool) -> ComplexArray:
    """Root k of ω̂² − k² − k/ω̂ = 2n + 1 that leaves an eastern or a western wall."""
    half = 0.5 / frequency
    square = half**2 + frequency**2 - (2 * mode + 1)
    lower = -half - np.sqrt(square + 0j)
    upper = (2 * mode + 1 - frequency**2) / lower  # the product of the roots, no cancellation
    rossby = (square >= 0.0) & (frequency**2 < mode + 0.5)
    return np.asarray(np.where(rossby == eastern, upper, lower))


def _wall_coefficients(
    frequency: ArrayLike, terms: int, parity: int, eastern: bool
) -> ComplexArray:
    """Coefficients q_m, m = parity, parity + 2, … < terms, per unit Kelvin amplitude."""
    omega = np.asarray(frequency, float)
    q = np.empty(((terms - parity + 1) // 2, *omega.shape), complex)
    q[0] = 2.0
    for i in range(len(q) - 1):
        m = parity + 2 * i
        k = _wavenumber(omega, m + 1, eastern)
        q[i + 1] = -np.sqrt((m + 2.0) / (m + 1.0)) * (omega + k) / (omega - k) * q[i]
    return q


def _wall_sum(
    frequency: ArrayLike, distance: ArrayLike, parity: int, eastern: bool
) -> ComplexArray:
    """Σ q_m ψ_m(ŷ) with a tapered tail, divided by the Kelvin amplitude ψ_0(0) on the equator."""
    slow = np.maximum(np.asarray(frequency, float), _SLOWEST)
    q = _wall_coefficients(slow, _TERMS + 1, parity, eastern)
    order = np.arange(parity, _TERMS + 1, 2)
    x = np.clip((order / _TERMS - 1.0 / 6.0) * 1.2, 0.0, 1.0)
    taper = 1.0 - x**3 * (10.0 - 15.0 * x + 6.0 * x * x)
    psi = hermite_functions(_TERMS + 1, distance)[order] * np.pi**0.25
    weights = psi * taper[(...,) + (None,) * np.ndim(distance)]
    return np.asarray(np.tensordot(np.moveaxis(q, 0, -1), weights, axes=(-1, 0)))
