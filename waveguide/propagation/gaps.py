"""Straits, capes and openings: where a wave meets a second coast.

Convention exp(−iωt), as in :mod:`waveguide.propagation.dispersion`.

Derivation of one formula for every width. A wave follows coast A; coast B faces it at
distance W over a length L, on the water side (a strait into which A turns, or a cape of
another landmass). In the passage two Kelvin waves exist: one along A, going in, that reaches
B with E = exp(−W/R) of its amplitude, and one along B, going out. With amplitudes a (along A,
at the entrance) and b (along B, at the exit), φ = ωL/c, and pressure continuous along each
coast round its corner,

- coast A at the entrance keeps what arrived:    a + E b e^{iφ} = 1,
- coast B at the exit, where nothing arrives:    b + E a e^{iφ} = 0,

so that beyond the passage coast A carries, and coast B (on the side the wave came from) gets,

    through = e^{iφ} (1 − E²)/(1 − E² e^{2iφ}),   across = E (1 − e^{2iφ})/(1 − E² e^{2iφ}),

and |through|² + |across|² = 1. Limits:

- W ≪ R: through → 1/(1 − iωL/(|f|W)), across → 1 − through: geostrophic control;
- ω → 0: all goes through, however narrow (transport is conserved);
- W ≫ R: through → e^{iφ}: the wave turns in with its coast;
- before anything can return from the far end: across = E, the front's share.

The water that moves beyond the two mouths adds inertia, as if the passage were longer. Close
to a mouth the flow is potential flow out of a slot into a half plane (conformal map): over a
distance r it costs a length (W/π) ln(πer/2W). Further out the sub-inertial pressure obeys
∇²p = p/R² and steps by fQ along the wall at a mouth of discharge Q; integrating the wall
condition ∂p/∂x = −(iω/f) ∂p/∂y, with the step's ∂p/∂y = −fQ/R [½ + h(x/R)],
h = ½ + (1/π)∫ K₁(t)/t dt, ends the logarithm at r = 2R exp(−γ−1), γ being Euler's constant.
So both mouths together add

    (2W/π) ln(π e^(−γ) R/W)   (nothing for W above 1.76 R),

which is W itself, the usual estimate, for W = 0.37 R. The shallow-water integrations in
tests/oracle confirm it.

References
----------
Garrett & Toulany (1982), J. Geophys. Res. 87, 4197 (geostrophic control).
Toulany & Garrett (1984), J. Phys. Oceanogr. 14, 649 (the same, with inertia).
Johnson & Garrett (2006), J. Phys. Oceanogr. 36, 945 (all passes as ω → 0).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.errors import InputError

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


class Passage(NamedTuple):
    """Amplitudes beyond a passage per unit amplitude arriving along coast A.

    Attributes
    ----------
    through : ndarray of complex
        On coast A, past the passage.
    across : ndarray of complex
        On coast B, on the side from which the wave came.
    lost : ndarray
        Share of the energy handed to other modes at the sill.
    """

    through: ComplexArray
    across: ComplexArray
    lost: Array


def passage(
    omega: ArrayLike,
    width: ArrayLike,
    length: ArrayLike,
    coriolis: ArrayLike,
    phase_speed: ArrayLike,
    sill_share: ArrayLike = 1.0,
) -> Passage:
    """What goes through a strait, or past a facing coast, and what crosses to the far coast.

    Parameters
    ----------
    omega : array_like
        Angular frequency ω ≥ 0 (rad/s).
    width, length : array_like
        Width W and length L of the passage (m), > 0.
    coriolis : array_like
        f (1/s), of either sign, not zero.
    phase_speed : array_like
        Phase speed c of the mode (m/s).
    sill_share : array_like
        Share of the mode that clears the sill (`sill_share`), 0..1. Above the sill the
        pressure of the mode passes, and its projection on the mode beyond is this share: so
        through → share × through, and the far coast gets the rest of the way across in the
        same proportion, share × across + (1 − share). Energy 2 share (1 − share) times
        (1 − Re across) goes to other modes. All arguments broadcast together.

    Returns
    -------
    Passage

    Raises
    ------
    InputError
        If a width or length is not positive, or f is zero.

    References
    ----------
    See the module; the two-wave solution is derived there.
    """
    w, f = np.asarray(width, float), np.abs(np.asarray(coriolis, float))
    extent, share = np.asarray(length, float), np.asarray(sill_share, float)
    _require_positive("width", w)
    _require_positive("length", extent)
    _require_positive("coriolis", f)
    speed = np.asarray(phase_speed, float)
    direct = facing_coast_share(w, speed / f)
    extent = extent + end_correction(w, speed / f)
    lag = np.exp(1j * np.asarray(omega, float) * extent / speed)
    ring = 1.0 - direct**2 * lag**2
    through = lag * (1.0 - direct**2) / ring
    across = direct * (1.0 - lag**2) / ring
    lost = 2.0 * share * (1.0 - share) * (1.0 - across.real)
    return Passage(*np.broadcast_arrays(share * through, share * across + 1.0 - share, lost))


def end_correction(width: ArrayLike, radius: ArrayLike) -> Array:
    """Length that the water moving beyond both mouths adds to a passage.

    Parameters
    ----------
    width : array_like
        Width W (m), > 0.
    radius : array_like
        Deformation radius R (m).

    Returns
    -------
    ndarray
        (2W/π) ln(π e^(−γ) R/W) (m), not below zero.
    """
    w = np.asarray(width, float)
    ratio = np.pi * np.exp(-np.euler_gamma) * np.asarray(radius, float) / w
    return np.asarray(2.0 / np.pi * w * np.log(np.maximum(ratio, 1.0)))


def facing_coast_share(width: ArrayLike, radius: ArrayLike) -> Array:
    """Amplitude exp(−W/R) that first appears on a coast facing the wave's own.

    The front's share: `passage` says what remains once signals have gone to and fro.

    Parameters
    ----------
    width : array_like
        Distance W between the coasts (m).
    radius : array_like
        Deformation radius R (m).

    Returns
    -------
    ndarray
    """
    return np.asarray(np.exp(-np.asarray(width, float) / np.asarray(radius, float)))


def _require_positive(name: str, value: Array) -> None:
    if np.any(~(value > 0.0)):
        raise InputError(
            f"{name}: {np.min(value):.3g} at least once; a passage needs a positive one. "
            "Leave out passages of no size and those on the equator, where no coast guides."
        )
