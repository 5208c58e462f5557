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

The water that moves beyond the two mouths adds inertia of about half a width at each, so L is
the length of the passage plus its width.

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
    direct = np.exp(-w * f / speed)
    lag = np.exp(1j * np.asarray(omega, float) * (extent + w) / speed)
    ring = 1.0 - direct**2 * lag**2
    through = lag * (1.0 - direct**2) / ring
    across = direct * (1.0 - lag**2) / ring
    lost = 2.0 * share * (1.0 - share) * (1.0 - across.real)
    return Passage(*np.broadcast_arrays(share * through, share * across + 1.0 - share, lost))


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


def sill_share(depth: ArrayLike, structure: ArrayLike, sill_depth: ArrayLike) -> Array:
    """Share of a mode above a sill, ∫φ² dz over the sill by ∫φ² dz over the whole depth.

    Parameters
    ----------
    depth : array_like, shape (nz,)
        Depths (m), increasing from the surface to the bottom.
    structure : array_like, shape (..., nz)
        Pressure structure φ of each mode, linear between the depths.
    sill_depth : array_like, shape S
        Depth of the sill (m); beyond the bottom counts as no sill.

    Returns
    -------
    ndarray, shape (...) + S
        0 for a closed strait, 1 for one without sill.

    Raises
    ------
    InputError
        If the depths do not increase.
    """
    z, phi = np.asarray(depth, float), np.asarray(structure, float)
    if z.ndim != 1 or np.any(np.diff(z) <= 0.0):
        raise InputError(
            f"depth: {z.size} values that do not increase everywhere; give depths positive down, "
            "from the surface to the bottom, in increasing order."
        )
    sill = np.clip(np.asarray(sill_depth, float), z[0], z[-1])
    cell = np.clip(np.searchsorted(z, sill, side="right") - 1, 0, z.size - 2)
    step, upper, lower = np.diff(z), phi[..., :-1], phi[..., 1:]
    whole = np.concatenate(
        [np.zeros((*phi.shape[:-1], 1)), np.cumsum(_square(upper, lower) * step, axis=-1)], axis=-1
    )
    part = (sill - z[cell]) / step[cell]
    at_sill = upper[..., cell] + part * (lower[..., cell] - upper[..., cell])
    above = whole[..., cell] + _square(upper[..., cell], at_sill) * part * step[cell]
    total = whole[..., -1].reshape(phi.shape[:-1] + (1,) * sill.ndim)
    return np.asarray(above / total)


def _square(first: Array, last: Array) -> Array:
    """Mean square of a function that is linear from `first` to `last`."""
    return np.asarray((first**2 + first * last + last**2) / 3.0)


def _require_positive(name: str, value: Array) -> None:
    if np.any(~(value > 0.0)):
        raise InputError(
            f"{name}: {np.min(value):.3g} at least once; a passage needs a positive one. "
            "Leave out passages of no size and those on the equator, where no coast guides."
        )
