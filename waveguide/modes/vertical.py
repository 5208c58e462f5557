"""Vertical modes over a flat bottom.

The pressure modes obey d/dz(N⁻² dp/dz) + p/c² = 0 with dp/dz = 0 at the bottom and
dp/dz + (N²/g) p = 0 at the surface (Gill 1982, Atmosphere-Ocean Dynamics, section 6.11).
With W the vertical displacement and p = dW/dz the same modes obey

    W'' + (N²/c²) W = 0,   W = 0 at z = -H,   c² W' = g W or (rigid lid) W = 0 at z = 0,

which needs no division by N², so unstratified layers are harmless.

Where N is constant, W = A sin φ and W' = A k cos φ with k = N/c, and the angle φ grows by
exactly k d across a layer of thickness d. W and W' are continuous between layers, hence
tan φ jumps by the ratio of the two N. The angle reached at the surface grows monotonically
with the slowness 1/c (Sturm's oscillation theorem in Prüfer's variables), so the n-th mode is
the one root of "angle at the surface = nπ" (rigid lid) or "= nπ + arctan(N c/g)" (free surface)
and no mode can be missed. N² is taken linear between its depths and each of those intervals
is cut into thin layers that hold their mean N²: the error in c is second order in the layer,
and one Richardson step from two such cuts leaves fourth order.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import GRAVITY
from waveguide.errors import InputError
from waveguide.modes.columns import checked_columns, thin_layers

Array = NDArray[np.float64]

LAYERS_PER_INTERVAL = 3
"""Thin layers between two depths of N² in the coarser of the two cuts; the finer has twice that."""

_TOLERANCE = 1e-10
_MOST_ITERATIONS = 80


@dataclass(frozen=True)
class VerticalModes:
    """Vertical modes of one water column.

    Attributes
    ----------
    mode : ndarray of int, shape (count,)
        Mode numbers; 0 is the barotropic mode, there with a free surface only.
    phase_speed : ndarray, shape (count,)
        c (m/s), fastest first.
    depth : ndarray, shape (nlevel,)
        Depths of the structures (m, positive down), from 0 to the bottom.
    structure : ndarray, shape (count, nlevel)
        p(z), positive at the surface, with ∫ p² dz = 1 (m^-1/2).
    displacement : ndarray, shape (count, nlevel)
        Upward displacement of isopycnals per unit sea level, -g p_z/(N² p(0)), without unit.
    """

    mode: NDArray[np.int_]
    phase_speed: Array
    depth: Array
    structure: Array
    displacement: Array


def barotropic_speed(bottom: ArrayLike) -> Array:
    """Long-wave speed √(g h) of an unstratified column.

    Parameters
    ----------
    bottom : array_like
        Water depth h (m).

    Returns
    -------
    ndarray
        Speed (m/s), same shape.
    """
    return np.sqrt(GRAVITY * np.asarray(bottom, dtype=float))


def phase_speeds(
    n2: ArrayLike,
    depth: ArrayLike,
    bottom: ArrayLike,
    count: int,
    *,
    rigid_lid: bool = False,
) -> Array:
    """Phase speeds of the baroclinic modes 1 … `count` of many columns at once.

    Parameters
    ----------
    n2 : array_like, shape (ncolumn, ndepth)
        Buoyancy frequency squared (1/s²) at `depth`, not negative. Linear in between; the first
        value holds up to the surface and the last one down to the bottom.
    depth : array_like, shape (ndepth,)
        Depths of `n2` (m, positive down, increasing).
    bottom : array_like, shape (ncolumn,)
        Water depth (m); values of `n2` below it are not used.
    count : int
        Number of baroclinic modes.
    rigid_lid : bool
        W = 0 at the surface in place of the free surface (lowers c by about 1e-4).

    Returns
    -------
    ndarray, shape (ncolumn, count)
        Phase speeds (m/s), fastest first.

    Raises
    ------
    InputError
        If a value is missing, N² is negative, or depths are not increasing and positive.

    References
    ----------
    Gill, A. E. (1982): Atmosphere-Ocean Dynamics, section 6.11. Academic Press.
    """
    columns, levels, floor = checked_columns(n2, depth, bottom, count)
    number = np.arange(1, count + 1)
    coarse = thin_layers(columns, levels, floor, LAYERS_PER_INTERVAL)
    fine = thin_layers(columns, levels, floor, 2 * LAYERS_PER_INTERVAL)
    rough = _slowness(*coarse, number, rigid_lid)
    return _extrapolated_speed(rough, _slowness(*fine, number, rigid_lid, start=rough))


def end_values(
    n2: ArrayLike, depth: ArrayLike, bottom: ArrayLike, phase_speed: ArrayLike
) -> tuple[Array, Array]:
    """Pressure at surface and bottom of modes with ∫ p² dz = 1, of many columns at once.

    Parameters
    ----------
    n2, depth, bottom : array_like
        As for `phase_speeds`, shapes (ncolumn, ndepth), (ndepth,) and (ncolumn,).
    phase_speed : array_like, shape (ncolumn, nmode)
        Phase speeds from `phase_speeds` (m/s).

    Returns
    -------
    surface, floor : ndarray, shape (ncolumn, nmode)
        |p(0)| and |p(−H)| (m^-1/2).

    Raises
    ------
    InputError
        As `phase_speeds`.
    """
    slowness = 1.0 / np.asarray(phase_speed, dtype=float)
    columns, levels, floor = checked_columns(n2, depth, bottom, slowness.shape[1])
    thickness, n = thin_layers(columns, levels, floor, 2 * LAYERS_PER_INTERVAL)
    w, p, doubled = np.zeros_like(slowness), np.ones_like(slowness), np.zeros_like(slowness)
    for j in range(thickness.shape[1] - 1, -1, -1):  # from the bottom up
        d, k = thickness[:, j, None], n[:, j, None] * slowness
        s, co = np.sin(k * d), np.cos(k * d)
        # p² + k² W² is constant in the layer, as in `_squared_integral`
        doubled += (p**2 + (k * w) ** 2) * d - p * w
        w, p = w * co + p * s / k, p * co - w * k * s
        doubled += p * w
    scale = 1.0 / np.sqrt(0.5 * doubled)
    return np.abs(p) * scale, scale


def vertical_modes(
    n2: ArrayLike,
    depth: ArrayLike,
    bottom: float,
    count: int,
    *,
    rigid_lid: bool = False,
) -> VerticalModes:
    """Speeds and structures of the vertical modes of one column.

    Parameters
    ----------
    n2 : array_like, shape (ndepth,)
        Buoyancy frequency squared (1/s²) at `depth`; see `phase_speeds`.
    depth : array_like, shape (ndepth,)
        Depths of `n2` (m, positive down, increasing).
    bottom : float
        Water depth (m).
    count : int
        Highest baroclinic mode. With a free surface mode 0 comes first.
    rigid_lid : bool
        W = 0 at the surface in place of the free surface.

    Returns
    -------
    VerticalModes
        Modes 0 … `count` (free surface) or 1 … `count` (rigid lid).

    Raises
    ------
    InputError
        As `phase_speeds`.
    """
    columns, levels, floor = checked_columns(np.atleast_2d(n2), depth, np.atleast_1d(bottom), count)
    number = np.arange(1 if rigid_lid else 0, count + 1)
    rough = _slowness(*thin_layers(columns, levels, floor, LAYERS_PER_INTERVAL), number, rigid_lid)[
        0
    ]
    thickness, n = thin_layers(columns, levels, floor, 2 * LAYERS_PER_INTERVAL)
    slowness = _slowness(thickness, n, number, rigid_lid, start=rough)[0]
    wet = thickness[0] > 0.0
    d, n = thickness[0, wet], n[0, wet]
    w, p = _integrate_upward(d, n, slowness)
    weight = 1.0 / np.sqrt(_squared_integral(w, p, d, n, slowness))
    sign = np.where(p[:, -1] < 0.0, -1.0, 1.0)
    structure = (sign * weight)[:, None] * p
    # p = W' and p' = -(N/c)² W, so -g p'/(N² p(0)) = (g/c²) W/p(0), finite where N = 0.
    displacement = GRAVITY * slowness[:, None] ** 2 * w / p[:, -1:]
    z = np.append(0.0, np.cumsum(d))
    speed = _extrapolated_speed(rough, slowness)
    return VerticalModes(number, speed, z, structure[:, ::-1], displacement[:, ::-1])


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


def _extrapolated_speed(coarse: Array, fine: Array) -> Array:
    """Speed from the slowness on layers of thickness d and d/2, without the error in d²."""
    return 3.0 / (4.0 * fine - coarse)


def _surface_angle(thickness: Array, n: Array, slowness: Array) -> tuple[Array, Array]:
    """Angle φ at the surface and dφ/d(1/c), shape of `slowness` (ncolumn, nmode).

    Across a layer φ grows by N d/c. At an edge tan φ is multiplied by r = N_above/N_below
    within the same half turn, so dφ is multiplied by r/(cos² φ + r² sin² φ).
    """
    angle = np.zeros_like(slowness)
    rate = np.zeros_like(slowness)
    last = thickness.shape[1] - 1
    for j in range(last, -1, -1):  # from the bottom up
        travel = (n[:, j] * thickness[:, j])[:, None]
        angle = angle + travel * slowness
        rate = rate + travel
        if j > 0:
            r = (n[:, j - 1] / n[:, j])[:, None]
            s, co = np.sin(angle), np.cos(angle)
            # change of the angle within its half turn: tan(φ' - φ) from tan φ' = r tan φ
            angle = angle + np.arctan2((r - 1.0) * s * co, co * co + r * s * s)
            rate = rate * r / (co * co + r * r * s * s)
    return angle, rate


def _mismatch(
    thickness: Array, n: Array, slowness: Array, number: NDArray[np.int_], rigid_lid: bool
) -> tuple[Array, Array]:
    """Surface angle minus the one mode `number` needs, and its derivative."""
    angle, rate = _surface_angle(thickness, n, slowness)
    angle = angle - number * np.pi
    if rigid_lid:
        return angle, rate
    # c² W' = g W with W = A sin φ, W' = A (N/c) cos φ gives tan φ = N c/g = a/(1/c).
    a = n[:, :1] / GRAVITY
    return angle - np.arctan2(a, slowness), rate + a / (slowness**2 + a**2)


def _wkb_slowness(thickness: Array, n: Array, number: NDArray[np.int_]) -> Array:
    """WKB value nπ/∫N dz of 1/c (s/m), or 1/√(gH) for mode 0."""
    travel = np.sum(n * thickness, axis=1)[:, None]
    barotropic = 1.0 / barotropic_speed(thickness.sum(axis=1))[:, None]
    return np.where(number > 0, number * np.pi / travel, barotropic)


def _slowness(
    thickness: Array,
    n: Array,
    number: NDArray[np.int_],
    rigid_lid: bool,
    start: Array | None = None,
) -> Array:
    """1/c (s/m) of the modes `number`, shape (ncolumn, nmode), by bracketed Newton steps."""
    x = _wkb_slowness(thickness, n, number) if start is None else np.atleast_2d(start)
    low, high = np.zeros_like(x), np.full_like(x, np.inf)
    for _ in range(_MOST_ITERATIONS):
        miss, rate = _mismatch(thickness, n, x, number, rigid_lid)
        low = np.where(miss < 0.0, x, low)
        high = np.where(miss > 0.0, x, high)
        step = x - miss / rate
        fallback = np.where(np.isfinite(high), 0.5 * (low + np.minimum(high, 4.0 * x)), 2.0 * x)
        new = np.where((step >= low) & (step <= high) & (step < 4.0 * x), step, fallback)
        change = np.max(np.abs(new - x) / x)
        x = new
        if change < _TOLERANCE:
            break
    return x


def _integrate_upward(thickness: Array, n: Array, slowness: Array) -> tuple[Array, Array]:
    """W and W' at the layer edges from the bottom up, shape (nmode, nedge)."""
    w, p = [np.zeros_like(slowness)], [np.ones_like(slowness)]
    for d, frequency in zip(thickness[::-1], n[::-1], strict=True):
        k = frequency * slowness
        s, co = np.sin(k * d), np.cos(k * d)
        w.append(w[-1] * co + p[-1] * s / k)
        p.append(p[-1] * co - w[-2] * k * s)
    return np.stack(w, axis=1), np.stack(p, axis=1)


def _squared_integral(w: Array, p: Array, thickness: Array, n: Array, slowness: Array) -> Array:
    """∫ p² dz of every mode, exact in layers of constant N.

    There p² + k² W² is constant and d(pW)/dz = p² - k² W², so
    2 ∫ p² dz = (p² + k² W²) d + [p W].
    """
    k2 = (n[::-1] * slowness[:, None]) ** 2
    energy = (p[:, 1:] ** 2 + k2 * w[:, 1:] ** 2) * thickness[::-1]
    integral: Array = 0.5 * np.sum(energy + np.diff(p * w, axis=1), axis=1)
    return integral
