"""What a mode does at depth and off the coast, per unit of sea level on the guide.

Over a flat bottom pressure is p = g η p̂(z) P with p̂(0) = 1 and the offshore factor P. Isopycnals
rise by ζ = −p_z/N², the current along the guide is U p̂(z), and a pressure sensor on the bottom
feels p̂(−H) P metres of water per metre of sea level.

On the equator the Kelvin wave has P = exp(−y²/2L_e²) and U = gηP/c, in phase with sea level at
every distance. Off a coast, x offshore, the low-frequency wave of local wavenumber l
(:mod:`waveguide.propagation.dispersion`) has p ∝ exp(κx). No flow through the wall means
∂t v = −p_s there, and v = −p_x/|f| is geostrophic, so iω κ/|f| = −il, hence

    κ = −|f| l/ω,   P = exp(−|f| l x/ω),   U = g η P l/ω.

With l = −iΓ + √(ω²/c² − Γ²) and γ = cΓ/ω = ±ω_c/ω this is κR = iγ − √(1 − γ²), R = c/|f|:

- γ → 0: P = exp(−x/R) and U = gηP/c, in phase with sea level;
- |γ| < 1: trapped within R/√(1 − γ²), and lagging (poleward, γ > 0) or leading (equatorward) sea
  level at the coast by γx/R, because the coastal wave is a pair of Rossby waves, whose phase goes
  westward; the current at the coast leads sea level by arcsin γ;
- |γ| > 1: P has modulus 1: the wave is not trapped but leaves as Rossby waves, long ones
  westward from an eastern boundary and short ones eastward from a western one.

Modes of a cross-shelf section bring their own structure in x and z, for f constant: in phase with
sea level or against it. They are used where γ is small, see `SECTION_LIMIT`.

Depth is best seen where the displacement stands out of that by internal waves, whose amplitude
goes as N^(−1/2): where |ζ| √N is largest.

References
----------
Clarke & Shi (1991), J. Geophys. Res. 96, 10731 (offshore scale and phase near ω_c).
Garrett & Munk (1972), Geophys. Fluid Dyn. 2, 225 (displacement by internal waves ∝ N^(−1/2)).
Gill (1982), Atmosphere-Ocean Dynamics, sections 6.11, 10.4 and 11.5. Academic Press.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.constants import BETA_EQUATOR, GRAVITY
from waveguide.modes.modeset import ModeSet, alongshore_velocity, isopycnal_displacement
from waveguide.modes.vertical import VerticalModes
from waveguide.propagation.dispersion import local_wavenumber

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

SECTION_LIMIT = 0.5
"""ω_c/ω up to which the structure of a section, which knows no β, is used: there β widens the
trapping by 15 % and shifts the phase by 29° at one R."""


class Offshore(NamedTuple):
    """The factors of a flat-bottom mode at a distance from its guide.

    Attributes
    ----------
    pressure : complex
        P, without unit.
    current : complex
        U/η (1/s) at the surface, positive in the direction of travel.
    """

    pressure: complex
    current: complex


@dataclass(frozen=True)
class AtDepth:
    """What instruments see per metre of sea level on the guide.

    Complex numbers have the phase of exp(−iωt): a positive argument is a lag behind sea level on
    the guide.

    Attributes
    ----------
    displacement : ndarray of complex, shape (k,)
        Of isopycnals at the depths asked for, upward (m/m); NaN below the bottom.
    current : ndarray of complex, shape (k,)
        Along the guide, positive in the direction of travel (m/s per m); NaN below the bottom.
    bottom_pressure : complex
        In metres of water (m/m).
    bottom : float
        Depth of the water (m).
    best_depth : float
        Where the displacement stands out most from that by internal waves (m).
    """

    displacement: ComplexArray
    current: ComplexArray
    bottom_pressure: complex
    bottom: float
    best_depth: float


def off_coast(
    distance: float, omega: float, gamma: float, speed: float, coriolis: float
) -> Offshore:
    """Factors off a coast.

    Parameters
    ----------
    distance : float
        x ≥ 0 (m).
    omega : float
        ω > 0 (rad/s).
    gamma : float
        Amplification rate Γ (1/m), positive where the wave travels poleward.
    speed : float
        c (m/s).
    coriolis : float
        |f| (1/s); close to the equator c over the deformation radius.

    Returns
    -------
    Offshore
    """
    wavenumber = complex(local_wavenumber(omega, gamma, speed))
    pressure = complex(np.exp(-coriolis * wavenumber * distance / omega))
    return Offshore(pressure, GRAVITY * wavenumber / omega * pressure)


def off_equator(distance: float, speed: float) -> Offshore:
    """Factors off the equator.

    Parameters
    ----------
    distance : float
        |y| (m).
    speed : float
        c (m/s).

    Returns
    -------
    Offshore
    """
    pressure = float(np.exp(-BETA_EQUATOR * distance**2 / (2.0 * speed)))
    return Offshore(complex(pressure), complex(GRAVITY / speed * pressure))


def flat_bottom_at_depth(
    modes: VerticalModes, row: int, frequency: Array, depths: ArrayLike, offshore: Offshore,
    bottom: float = np.inf,
) -> AtDepth:
    """A flat-bottom mode at depths.

    Parameters
    ----------
    modes : VerticalModes
    row : int
        Which of them.
    frequency : ndarray, shape (nlevel,)
        N at their levels (1/s).
    depths : array_like, shape (k,)
        Positive down (m).
    offshore : Offshore
    bottom : float
        Depth of the water at the mooring (m), which on a slope is less than that of the modes.

    Returns
    -------
    AtDepth
    """
    bottom = min(bottom, float(modes.depth[-1]))
    wanted = np.atleast_1d(np.asarray(depths, float))
    below = wanted > bottom
    pressure = modes.structure[row] / modes.structure[row, 0]
    rise = np.interp(wanted, modes.depth, modes.displacement[row])
    flow = np.interp(wanted, modes.depth, pressure)
    inside = modes.depth <= bottom
    return AtDepth(
        np.where(below, np.nan, rise) * offshore.pressure,
        np.where(below, np.nan, flow) * offshore.current,
        complex(np.interp(bottom, modes.depth, pressure)) * offshore.pressure,
        bottom,
        best_depth(modes.depth[inside], modes.displacement[row, inside], frequency[inside]),
    )


def section_at_depth(modes: ModeSet, row: int, distance: float, depths: ArrayLike) -> AtDepth:
    """A coastal-trapped mode at a distance from the shore and at depths.

    Columns of the section on both sides are interpolated in the vertical by themselves, then with
    each other.

    Parameters
    ----------
    modes : ModeSet
    row : int
        Which of them.
    distance : float
        From the shore (m), no farther than the section reaches.
    depths : array_like, shape (k,)
        Positive down (m).

    Returns
    -------
    AtDepth
    """
    wanted = np.atleast_1d(np.asarray(depths, float))
    rise, flow = isopycnal_displacement(modes)[row], alongshore_velocity(modes)[row]
    first = int(np.clip(np.searchsorted(modes.offshore, distance) - 1, 0, modes.offshore.size - 2))
    span = modes.offshore[first + 1] - modes.offshore[first]
    share = float(np.clip((distance - modes.offshore[first]) / span, 0.0, 1.0))
    weights = ((first, 1.0 - share), (first + 1, share))
    floor = modes.bottom[[first, first + 1]]
    bottom = float(np.dot([1.0 - share, share], modes.depth[floor]))
    at_bottom = modes.structure[row, floor, [first, first + 1]] / modes.structure[row, 0, 0]
    below = wanted > bottom
    displacement, current, whole = (
        sum(weight * _column(modes, field, column, where) for column, weight in weights)
        for field, where in ((rise, wanted), (flow, wanted), (rise, modes.depth))
    )
    inside = modes.depth <= bottom
    frequency = np.sqrt(modes.profile.at(modes.depth[inside]))
    return AtDepth(
        np.where(below, np.nan, displacement) + 0j,
        np.where(below, np.nan, current) + 0j,
        complex(np.dot([1.0 - share, share], at_bottom)),
        bottom,
        best_depth(modes.depth[inside], np.asarray(whole)[inside], frequency),
    )


def _column(modes: ModeSet, field: Array, column: int, depths: Array) -> Array:
    """A field of a section in one column, held below its bottom."""
    levels = slice(0, int(modes.bottom[column]) + 1)
    return np.interp(depths, modes.depth[levels], field[levels, column])


def best_depth(depth: Array, displacement: Array, frequency: Array) -> float:
    """Depth where a displacement stands out most from internal waves, max |ζ| √N.

    Parameters
    ----------
    depth : ndarray, shape (n,)
        m.
    displacement : ndarray, shape (n,)
        Of isopycnals, in any unit.
    frequency : ndarray, shape (n,)
        N (1/s).

    Returns
    -------
    float
        m.

    References
    ----------
    Garrett & Munk (1972), Geophys. Fluid Dyn. 2, 225.
    """
    return float(depth[np.argmax(np.abs(displacement) * np.sqrt(frequency))])


def signed(value: ArrayLike) -> tuple[Array, Array]:
    """Complex numbers as a signed amplitude and a lag within ±90°.

    Parameters
    ----------
    value : array_like of complex

    Returns
    -------
    amplitude : ndarray
        Negative where the quantity goes down as sea level goes up.
    lag : ndarray
        Of the amplitude with its sign (degrees).
    """
    number = np.asarray(value, complex)
    turn = np.angle(number)
    against = np.abs(turn) > 0.5 * np.pi + 1e-9
    amplitude = np.where(against, -np.abs(number), np.abs(number))
    return amplitude, np.degrees(np.where(against, turn - np.copysign(np.pi, turn), turn))
