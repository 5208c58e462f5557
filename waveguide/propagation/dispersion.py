"""One local dispersion relation for every coast of the guide.

Convention: fields vary as exp(−iωt), s is the distance in the direction of travel and
η(s) = η(0) exp(i ∫ l ds), so a positive phase is a delay and Im l > 0 is decay.

Derivation. Let x be offshore and take a sub-inertial wave (ω² ≪ f²) whose offshore scale
is much less than its alongshore scale. The vorticity equation of a mode,
∂t(p_xx − f² p/c²) + β_s p_x = 0 with β_s the gradient of f along the coast (written for a
northern eastern boundary with x eastward), has p ∝ exp(ikx) with
ω k² + β_s k + ω f²/c² = 0. No flow through the wall, f p_s = iω p_x = −ωk p, then gives

    p_s/p = Γ − √(Γ² − κ²),   Γ = (1/2|f|) d|f|/ds,   κ = ω/c,

with the root whose energy leaves the coast or is trapped by it. So

    l = −iΓ + √(κ² − Γ²),  Im √ ≥ 0,

positive Γ being poleward travel (an eastern boundary) and negative Γ equatorward travel (a
western one); mirror images give the other hemisphere. Above the critical frequency c|Γ| the
wave is trapped and |η| ∝ √|f|. Below it an eastern boundary sheds long Rossby waves and has
η nearly uniform, and a western one sheds short Rossby waves and has η ∝ |f|.

Damping at a rate r replaces ω by ω + ir. An alongshore mean flow U replaces c by c + U, the
Doppler shift of a zonal coast; where |f| changes along the coast this leaves out a relative
change of amplitude of about (U/2c) ln(|f_B|/|f_A|).

References
----------
Clarke & Shi (1991), J. Geophys. Res. 96, 10731 (critical frequencies of real coasts).
Grimshaw & Allen (1988), J. Phys. Oceanogr. 18, 1124 (eastern boundaries, critical latitude).
Johnson & Marshall (2002), J. Phys. Oceanogr. 32, 1121 (western boundaries, η ∝ |f|).
McCreary (1981), Phil. Trans. R. Soc. A 298, 603 (damping A/c²).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import EARTH_RADIUS
from waveguide.errors import InputError

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def amplification_rate(lat: ArrayLike, azimuth: ArrayLike) -> Array:
    """Half the logarithmic gradient of |f| in the direction of travel, Γ.

    Γ = (1/2|f|) d|f|/ds = cot(lat) cos(azimuth)/(2a): the rate at which a wave of constant
    energy flux grows.

    Parameters
    ----------
    lat : array_like
        Latitude, degrees north; not zero.
    azimuth : array_like
        Direction of travel, degrees clockwise from north; broadcasts with `lat`.

    Returns
    -------
    ndarray
        Γ (1/m), positive towards the pole in both hemispheres.
    """
    slope = np.tan(np.radians(np.asarray(lat, float)))
    return np.asarray(np.cos(np.radians(np.asarray(azimuth, float))) / (2.0 * EARTH_RADIUS * slope))


def critical_frequency(phase_speed: ArrayLike, gamma: ArrayLike) -> Array:
    """Frequency c|Γ| below which a coast sheds Rossby waves.

    Parameters
    ----------
    phase_speed : array_like
        Phase speed c (m/s).
    gamma : array_like
        Amplification rate Γ (1/m), broadcasts.

    Returns
    -------
    ndarray
        ω_c (rad/s).

    References
    ----------
    Clarke & Shi (1991), J. Geophys. Res. 96, 10731.
    """
    return np.asarray(np.asarray(phase_speed, float) * np.abs(np.asarray(gamma, float)))


def critical_period(phase_speed: ArrayLike, lat: ArrayLike, coast_angle: ArrayLike = 0.0) -> Array:
    """Period above which a coast sheds Rossby waves, 4πa tan|lat|/(c cos θ).

    Parameters
    ----------
    phase_speed : array_like
        Phase speed c (m/s).
    lat : array_like
        Latitude, degrees north.
    coast_angle : array_like
        Angle θ of the coast to the meridian, degrees.

    Returns
    -------
    ndarray
        Period (s); infinite along a zonal coast.
    """
    slope = np.tan(np.radians(np.abs(np.asarray(lat, float))))
    meridional = np.abs(np.cos(np.radians(np.asarray(coast_angle, float))))
    with np.errstate(divide="ignore"):
        return np.asarray(
            4.0 * np.pi * EARTH_RADIUS * slope / (np.asarray(phase_speed, float) * meridional)
        )


def critical_latitude(
    phase_speed: ArrayLike, period: ArrayLike, coast_angle: ArrayLike = 0.0
) -> Array:
    """Latitude equatorward of which a coast sheds Rossby waves at a given period.

    Parameters
    ----------
    phase_speed : array_like
        Phase speed c (m/s).
    period : array_like
        Period (s).
    coast_angle : array_like
        Angle θ of the coast to the meridian, degrees.

    Returns
    -------
    ndarray
        Latitude (degrees, 0..90), the inverse of `critical_period`.
    """
    meridional = np.abs(np.cos(np.radians(np.asarray(coast_angle, float))))
    distance = np.asarray(phase_speed, float) * np.asarray(period, float) * meridional
    return np.asarray(np.degrees(np.arctan(distance / (4.0 * np.pi * EARTH_RADIUS))))


def free_wavenumber(
    omega: ArrayLike, phase_speed: ArrayLike, damping: ArrayLike = 0.0, mean_flow: ArrayLike = 0.0
) -> ComplexArray:
    """Wavenumber κ = (ω + ir)/(c + U) of the wave along a coast where f does not change.

    Parameters
    ----------
    omega : array_like
        Angular frequency ω ≥ 0 (rad/s).
    phase_speed : array_like
        Phase speed c > 0 (m/s).
    damping : array_like
        Rate r ≥ 0 of interior damping (1/s).
    mean_flow : array_like
        Alongshore current U (m/s) weighted by the mode, positive in the direction of travel.

    Returns
    -------
    ndarray of complex
        κ (1/m), the arguments broadcast together.

    Raises
    ------
    InputError
        If somewhere the current stops the wave (c + U ≤ 0).
    """
    speed = np.asarray(phase_speed, float) + np.asarray(mean_flow, float)
    if np.any(speed <= 0.0):
        raise InputError(
            f"phase_speed + mean_flow: {np.min(speed):.3g} m/s at least once; it must be positive, "
            "because an opposing current as fast as the wave lets nothing pass. "
            "Check the sign of mean_flow (positive in the direction of travel)."
        )
    return np.asarray((np.asarray(omega, float) + 1j * np.asarray(damping, float)) / speed)


def local_wavenumber(
    omega: ArrayLike,
    gamma: ArrayLike,
    phase_speed: ArrayLike,
    damping: ArrayLike = 0.0,
    mean_flow: ArrayLike = 0.0,
) -> ComplexArray:
    """Complex alongshore wavenumber l(ω, Γ, c, r), finite as Γ → +∞ at the equator.

    For Γ > 0 the difference of two large numbers in l = −iΓ + √(κ² − Γ²) is removed:
    l = −iκ²/(Γ + √(Γ² − κ²)), where √(Γ² − κ²) = −i√(κ² − Γ²). For Γ ≤ 0 the two add.

    Parameters
    ----------
    omega, phase_speed, damping, mean_flow : array_like
        As for `free_wavenumber`.
    gamma : array_like
        Amplification rate Γ (1/m); all broadcast together.

    Returns
    -------
    ndarray of complex
        l (1/m): η(s) = η(0) exp(i ∫ l ds).
    """
    kappa = free_wavenumber(omega, phase_speed, damping, mean_flow)
    steepest = 1e100  # 1/m; stands for the equator itself, and its square is representable
    rate = np.clip(np.asarray(gamma, float), -steepest, steepest)
    kappa, rate = np.broadcast_arrays(kappa, rate)
    root = np.sqrt(kappa**2 - rate**2 + 0j)
    poleward = rate > 0.0
    divisor = np.where(poleward, rate - 1j * root, 1.0)
    return np.asarray(np.where(poleward, -1j * kappa**2 / divisor, root - 1j * rate))


def dispersive_phase_speed(omega: ArrayLike, gamma: ArrayLike, phase_speed: ArrayLike) -> Array:
    """Phase speed along the coast, c/√(1 − ω_c²/ω²); infinite at and below ω_c.

    Parameters
    ----------
    omega : array_like
        Angular frequency (rad/s), > 0.
    gamma : array_like
        Amplification rate Γ (1/m).
    phase_speed : array_like
        Phase speed c where f does not change (m/s).

    Returns
    -------
    ndarray
        Speed (m/s).
    """
    with np.errstate(divide="ignore"):
        return np.asarray(phase_speed, float) / _propagating_part(omega, gamma, phase_speed)


def dispersive_group_speed(omega: ArrayLike, gamma: ArrayLike, phase_speed: ArrayLike) -> Array:
    """Group speed along the coast, c √(1 − ω_c²/ω²); zero at and below ω_c.

    Parameters
    ----------
    omega, gamma, phase_speed : array_like
        As for `dispersive_phase_speed`.

    Returns
    -------
    ndarray
        Speed (m/s).
    """
    return np.asarray(phase_speed, float) * _propagating_part(omega, gamma, phase_speed)


def _propagating_part(omega: ArrayLike, gamma: ArrayLike, phase_speed: ArrayLike) -> Array:
    ratio = critical_frequency(phase_speed, gamma) / np.asarray(omega, float)
    return np.asarray(np.sqrt(np.maximum(1.0 - ratio**2, 0.0)))


def segment_exponent(
    omega: ArrayLike,
    phase_speed: ArrayLike,
    f_start: ArrayLike,
    f_end: ArrayLike,
    length: ArrayLike,
    damping: ArrayLike = 0.0,
    mean_flow: ArrayLike = 0.0,
) -> ComplexArray:
    """Logarithm of η_end/η_start along segments of coast, i ∫ l ds.

    The integral is exact for |f| linear in s and c constant over the segment. With
    |f|' = ±2a and S(f) = √(κ²f² − a²), Im S ≥ 0, the antiderivative is elementary and the
    poleward exponent is

        K = iκ² (f_hi + f_lo) length/(S_hi + S_lo) + ½ ln[(a − iS_hi)/(a − iS_lo)],

    finite when f_lo = 0, where S = ia. Equatorward it is K − ln(f_hi/f_lo), which says that
    the product of the two transfer functions is the ratio of f (reciprocity).

    Parameters
    ----------
    omega, phase_speed, damping, mean_flow : array_like
        As for `free_wavenumber`; constant on each segment.
    f_start, f_end : array_like
        |f| (1/s) at both ends. A segment does not cross the equator.
    length : array_like
        Length of the segment (m). All arguments broadcast together, for example ω as a
        column against rows of segments; sum over the segments to have a leg.

    Returns
    -------
    ndarray of complex
        Real part: log-amplitude (−∞ for a wave that runs into the equator along the coast,
        where it has no amplitude left: end that leg at the junction). Imaginary part: phase
        lag (rad).
    """
    poleward, f_lo, f_hi = _poleward_exponent(
        free_wavenumber(omega, phase_speed, damping, mean_flow), f_start, f_end, length
    )
    returning = np.asarray(f_end, float) < np.asarray(f_start, float)
    with np.errstate(divide="ignore"):
        growth = np.where(returning, np.log(f_hi) - np.log(np.where(returning, f_lo, 1.0)), 0.0)
    return np.asarray(poleward - growth)


def segment_growth(f_start: ArrayLike, f_end: ArrayLike) -> Array:
    """Log-amplitude ½ ln(|f_end|/|f_start|) of a wave that keeps its energy.

    Being a difference of values at the two ends it sums along a route to the values at the
    ends of the route, whatever the way between.

    Parameters
    ----------
    f_start, f_end : array_like
        |f| (1/s) at both ends, > 0.

    Returns
    -------
    ndarray
    """
    return np.asarray(0.5 * (np.log(np.asarray(f_end, float)) - np.log(np.asarray(f_start, float))))


def segment_loss(
    omega: ArrayLike,
    phase_speed: ArrayLike,
    f_start: ArrayLike,
    f_end: ArrayLike,
    length: ArrayLike,
    damping: ArrayLike = 0.0,
    mean_flow: ArrayLike = 0.0,
) -> Array:
    """Amplitude lost to Rossby waves and damping, ∫ Im √(κ² − Γ²) ds ≥ 0.

    ln|η_end/η_start| = `segment_growth` − `segment_loss`, and exp(−2 × loss) is the share of
    the energy flux that stays on the coast. The loss is the same in both directions and never
    negative, so it can be the weight of a shortest-path search.

    Parameters
    ----------
    omega, phase_speed, f_start, f_end, length, damping, mean_flow : array_like
        As for `segment_exponent`.

    Returns
    -------
    ndarray
        Loss (nepers), ≥ 0; infinite if one end lies on the equator.
    """
    poleward, f_lo, f_hi = _poleward_exponent(
        free_wavenumber(omega, phase_speed, damping, mean_flow), f_start, f_end, length
    )
    with np.errstate(divide="ignore"):
        loss = 0.5 * (np.log(f_hi) - np.log(f_lo)) - poleward.real
    return np.asarray(np.maximum(loss, 0.0))  # above ω_c it is zero but for rounding


def _poleward_exponent(
    kappa: ComplexArray, f_start: ArrayLike, f_end: ArrayLike, length: ArrayLike
) -> tuple[ComplexArray, Array, Array]:
    """K of `segment_exponent`, with the smaller and the larger |f|."""
    first, last = np.abs(np.asarray(f_start, float)), np.abs(np.asarray(f_end, float))
    f_lo, f_hi = np.minimum(first, last), np.maximum(first, last)
    distance = np.maximum(np.asarray(length, float), 1e-9)  # m; a segment may have no length
    a = (f_hi - f_lo) / (2.0 * distance)
    root_lo, root_hi = (np.sqrt((kappa * f) ** 2 - a**2 + 0j) for f in (f_lo, f_hi))
    total = root_lo + root_hi
    zonal = total == 0.0  # κ = 0 or f = 0 throughout, and no gradient of f
    mean = np.where(zonal, 1.0, kappa * (f_hi + f_lo) / np.where(zonal, 1.0, total))
    ratio = np.where(zonal, 1.0, (a - 1j * root_hi) / np.where(zonal, 1.0, a - 1j * root_lo))
    return np.asarray(1j * kappa * distance * mean + 0.5 * np.log(ratio)), f_lo, f_hi


def interior_damping_rate(
    phase_speed: ArrayLike, reference_rate: ArrayLike, reference_speed: ArrayLike
) -> Array:
    """Damping rate of each mode, r = A/c², from the rate of one of them.

    Parameters
    ----------
    phase_speed : array_like
        Phase speeds (m/s).
    reference_rate : array_like
        Rate (1/s) of the mode with `reference_speed` (m/s).
    reference_speed : array_like

    Returns
    -------
    ndarray
        Rate (1/s).

    References
    ----------
    McCreary (1981), Phil. Trans. R. Soc. A 298, 603.
    """
    ratio = np.asarray(reference_speed, float) / np.asarray(phase_speed, float)
    return np.asarray(np.asarray(reference_rate, float) * ratio**2)
