"""The ends of the equatorial guide: Kelvin wave to coast and coast to Kelvin wave.

Scales are L_e = √(c/β) and T_e = 1/√(βc); ω̂ = ωT_e and ŷ = y/L_e. Convention exp(−iωt).
The wall series is that of :mod:`waveguide.propagation.wall`, with coefficients q_m.

Eastern boundary:

- the share of the energy that returns in Rossby wave n is (|q_{n−1}|² − |q_{n+1}|²)/4, and
  for modes that decay |q| is constant: what is left, P = |q_∞|²/4, goes poleward, half to
  each side, and far from the equator η = η_K √(P √π ŷ);
- ω̂ → 0: q_m are the coefficients of a constant, √2 times the incident equatorial amplitude;
  the local coastal relation carried on from there gives P = 2e ω̂/√π, within 2 % of the
  series for ω̂ < 0.2.

Western boundary: reversing time and mirroring x turns the eastern wall into the western one,
so the scattering matrix of the one is the transpose of the other. Per hemisphere, with the
coastal amplitude taken at ŷ, η_K/η_coast = (η_coast/η_K of the eastern wall)/(2√π ŷ). Hence
ω̂ → 0 gives 1/(√(2π) ŷ), transport conserved. For ω̂ > 1 − √½ it gives (4√π ŷ)^(−1/2): the
Kelvin wave takes half the energy that one hemisphere delivers and the antisymmetric mixed
Rossby-gravity wave the other half (so it is √½ of what conservation of energy in the Kelvin
wave alone would give).

A coast that leans: lean is the angle to the meridian, positive where the coast leads on past
the meridian as it leaves the equator (eastward at an eastern boundary). Two things change.

- On each coast Γ shrinks by cos(lean): the local relation is that of a meridional coast at
  ω̂/cos(lean), and the wall series is taken there (not above ω̂ = 1, where all goes poleward
  anyway and the series would start to shed inertia-gravity waves too soon).
- The wave prefers the coast that leads on. To first order in the lean, the ratio of the two
  coastal amplitudes is exp(−κ (tan lean − tan other)/2) with complex κ(ω̂) from
  `wall.oblique_asymmetry`: its real part is about 1.1, 1.5, 1.6 at ω̂ = 0.4, 0.6, 0.8. Below
  ω̂ = 0.4 a first order theory holds for small angles only, since the frequencies at which
  Rossby waves appear move with the angle; there κ ∝ ω̂² joins κ(0.4) to the uniform wall of
  ω̂ → 0. The lag of either coast, half of Im κ, is taken times cos(lean) on the favoured
  coast and by it on the other, which integration shows and first order cannot tell.

Against shallow-water integrations along straight coasts leaning up to 70° the amplitude on
the favoured coast is within 9 % and its phase within 10° up to 30°, 18° at 45°, 35° at 60°
and 47° at 70°. What the other coast gets is within 12 % of what it would have without lean
(27 % at 70°), with a phase that fails beyond 60°. What lean a real coast has is said in
:mod:`waveguide.propagation.junctions`.

References
----------
Moore (1968), Planetary-gravity waves in an equatorial ocean, thesis, Harvard.
Cane & Sarachik (1977), J. Mar. Res. 35, 395 (√2).
Clarke (1983), J. Phys. Oceanogr. 13, 1193 (energy of the reflected waves).
Moore, Durland & Hristova (2014) (all goes poleward for 1 − √½ < ω̂ < 1 + √½).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import BETA_EQUATOR, ROTATION_RATE
from waveguide.errors import InputError
from waveguide.propagation.dispersion import segment_exponent
from waveguide.propagation.wall import (
    SLOWEST,
    TERMS,
    oblique_asymmetry,
    wall_coefficients,
    wall_sum,
)

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

MATCHING_DISTANCE = 2.0
"""Default distance (in L_e) at which the coast takes over: beyond it the local
relation of coasts follows the wall solution within 3 % in amplitude and 2° in phase for ω̂ ≤ 1.4."""

STEEPEST_LEAN = 70.0
"""Largest lean of a coast (degrees) that has been checked by integration."""

_FAR = 6.0  # ŷ where the local relation has become exact, used to fix the junction factor
_FASTEST = 3.0  # ω̂ beyond which less than 0.2 % of the energy follows the coast
_THRESHOLD = 0.4  # ω̂ above which the asymmetry of a leaning coast is that of first order


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
        Share of the arriving energy that leaves along the guide: on this coast at an eastern
        junction, as equatorial Kelvin wave at a western one.
    energy_rossby : ndarray
        Share that leaves along neither coast, as Rossby waves (at a western junction including
        the mixed Rossby-gravity wave, above ω̂ = 1 + √½ also as inertia-gravity waves).
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
    omega: ArrayLike,
    phase_speed: ArrayLike,
    matching: float = MATCHING_DISTANCE,
    lean: ArrayLike = 0.0,
    other_lean: ArrayLike = 0.0,
) -> JunctionResponse:
    """Equatorial Kelvin wave in, coastal wave out, at an eastern boundary.

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
    lean, other_lean : array_like
        Angle (degrees) to the meridian of this coast and of that of the other hemisphere,
        positive where the coast leads on eastward away from the equator; both broadcast.
        Beyond ±70° they count as 70°.

    Returns
    -------
    JunctionResponse
        Per unit equatorial amplitude, for the coast with `lean`. Without lean both coasts
        have the same.

    Raises
    ------
    InputError
        If the matching distance is out of range, or reaches the pole.

    References
    ----------
    Moore (1968); Clarke (1983), J. Phys. Oceanogr. 13, 1193.
    """
    frequency = scaled_frequency(omega, phase_speed)
    here, there = (
        np.clip(np.asarray(v, float), -STEEPEST_LEAN, STEEPEST_LEAN) for v in (lean, other_lean)
    )
    frequency, here, there = np.broadcast_arrays(frequency, here, there)
    speed = np.broadcast_to(np.asarray(phase_speed, float), frequency.shape)
    latitude = _matching_latitude(speed, matching)
    amplitude = coastal_amplitude(frequency, matching, here, there)
    alike = np.array_equal(here, there)
    other = amplitude if alike else coastal_amplitude(frequency, matching, there, here)
    energy, spent = (np.abs(a) ** 2 / (2.0 * np.sqrt(np.pi) * matching) for a in (amplitude, other))
    return JunctionResponse(amplitude, latitude, energy, 1.0 - energy - spent)


def western_junction(
    omega: ArrayLike,
    phase_speed: ArrayLike,
    matching: float = MATCHING_DISTANCE,
    lean: ArrayLike = 0.0,
    other_lean: ArrayLike = 0.0,
) -> JunctionResponse:
    """Coastal wave of one hemisphere in, equatorial Kelvin wave out, at a western boundary.

    Follows from `eastern_junction` by reciprocity (see the module). Waves that arrive from
    both hemispheres add up in amplitude.

    Parameters
    ----------
    omega, phase_speed, matching
        As for `eastern_junction`.
    lean, other_lean : array_like
        Angle (degrees) to the meridian of the coast the wave comes along and of that of the
        other hemisphere, positive where the coast lies further west away from the equator.

    Returns
    -------
    JunctionResponse
        Per unit coastal amplitude at the matching latitude.

    Raises
    ------
    InputError
        If the matching distance is out of range, or reaches the pole.
    """
    east = eastern_junction(omega, phase_speed, matching, lean, other_lean)
    amplitude = east.amplitude / (2.0 * np.sqrt(np.pi) * matching)
    return JunctionResponse(amplitude, east.latitude, east.energy_out, 1.0 - east.energy_out)


def coastal_amplitude(
    frequency: ArrayLike, matching: float, lean: ArrayLike, other_lean: ArrayLike
) -> ComplexArray:
    """Sea level on an eastern coast at the matching distance per unit equatorial amplitude.

    Parameters
    ----------
    frequency : array_like
        ω̂ ≥ 0.
    matching : float
        ŷ, 1 to 4.
    lean, other_lean : array_like
        As for `eastern_junction`, within ±70°; all broadcast.

    Returns
    -------
    ndarray of complex
    """
    frequency, here, there = (np.asarray(v, float) for v in (frequency, lean, other_lean))
    cosine = np.cos(np.radians(here))
    along = np.minimum(frequency, _FASTEST) / cosine
    used = np.clip(np.minimum(along, np.maximum(frequency, 1.0)), SLOWEST, _FASTEST)
    onward = segment_exponent(used, 1.0, matching, _FAR, _FAR - matching)
    near = [segment_exponent(w, 1.0, 0.0, matching, matching).imag for w in (along, used)]
    upright = eastern_wall(used, np.array(_FAR)) * np.exp(1j * (near[0] - near[1]) - onward)
    tangent = 0.5 * (np.tan(np.radians(here)) - np.tan(np.radians(there)))
    kappa = _asymmetry(frequency)
    favour = np.sqrt(2.0 / (1.0 + np.exp(-2.0 * kappa.real * tangent)))
    lag = 0.5 * kappa.imag * tangent * cosine ** np.sign(tangent)
    return np.asarray(np.where(frequency > _FASTEST, 0.0, favour * upright * np.exp(1j * lag)))


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
    return wall_sum(_coefficients(frequency, 0, True), distance, 0)


def eastern_wall_mixed(frequency: ArrayLike, distance: ArrayLike) -> ComplexArray:
    """Sea level along an eastern wall under an incident mixed Rossby-gravity wave.

    Parameters
    ----------
    frequency : array_like, shape S
        ω̂, 0..3.
    distance : array_like, shape T
        ŷ, −8..8.

    Returns
    -------
    ndarray of complex, shape S + T
        For a wave with the energy flux of a Kelvin wave of amplitude 1; odd in ŷ, and of phase 0
        where the wave reaches the wall.
    """
    return wall_sum(_coefficients(frequency, 1, True), distance, 1)


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
    series = [_coefficients(frequency, parity, False) for parity in (0, 1)]
    symmetric, mixed = (wall_sum(q, distance, parity) for parity, q in enumerate(series))
    far = [wall_sum(q, _FAR, parity) for parity, q in enumerate(series)]
    return symmetric + (far[0] / far[1])[(...,) + (None,) * np.ndim(distance)] * mixed


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
    energy = np.abs(wall_coefficients(frequency, 2 * modes + 1, 0, True)) ** 2 / 4.0
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
    terms = max(TERMS, int(0.25 / slowest**2) + 3)
    return np.asarray(np.abs(wall_coefficients(frequency, terms, 0, True)[-1]) ** 2 / 4.0)


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


def _matching_latitude(speed: Array, matching: float) -> Array:
    sine = matching * np.sqrt(BETA_EQUATOR * speed) / (2.0 * ROTATION_RATE)
    if not 1.0 <= matching <= 4.0 or np.any(sine >= 1.0):
        raise InputError(
            f"matching: {matching:g} equatorial radii at c = {np.max(speed):.4g} m/s; it must be "
            "1 to 4 and end short of the pole. Use 1 for the barotropic mode."
        )
    return np.asarray(np.degrees(np.arcsin(sine)))


def _asymmetry(frequency: Array) -> ComplexArray:
    """κ of the module's last section."""
    grid, kappa = _asymmetry_table()
    slow = np.minimum(frequency / _THRESHOLD, 1.0) ** 2
    return np.asarray(slow * np.interp(frequency, grid, kappa))


@cache
def _asymmetry_table() -> tuple[Array, ComplexArray]:
    grid = np.linspace(_THRESHOLD, 1.6, 25)
    return grid, oblique_asymmetry(grid, _FAR)


def _coefficients(frequency: ArrayLike, parity: int, eastern: bool) -> ComplexArray:
    slow = np.maximum(np.asarray(frequency, float), SLOWEST)
    return wall_coefficients(slow, TERMS + 1, parity, eastern)
