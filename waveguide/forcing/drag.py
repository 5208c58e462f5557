"""Stress of the wind on the sea.

τ = ρ_a C(|w|) |w| w, with C by a published law. A wind that is a mean over days or a month has
lost the gusts that the square of its speed would keep: with fluctuations of standard deviation σ
in each component, isotropic and normal, the mean of |w| w is close to √(W² + 4σ²) W for the mean
wind W. (For W → 0 it is exactly 1.5 √(π/2) σ W, 6 % less; for W ≫ σ it is W² + 1.5 σ², where the
formula has W² + 2σ².)

References
----------
Large & Pond (1981), J. Phys. Oceanogr. 11, 324.
Trenberth, Large & Olson (1990), J. Phys. Oceanogr. 20, 1742.
Wright & Thompson (1983), J. Phys. Oceanogr. 13, 341 (time-averaged stress).
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]

AIR_DENSITY = 1.22
"""Density of air at the sea surface (kg/m³), the value of Large & Pond (1981)."""

STRONGEST = 25.0
"""Fastest wind of the measurements behind both laws (m/s); beyond it the coefficient stays."""


def large_pond(speed: ArrayLike) -> Array:
    """Drag coefficient of Large & Pond (1981) for neutral air, at 10 m height.

    Parameters
    ----------
    speed : array_like
        Wind speed (m/s).

    Returns
    -------
    ndarray
        1.2e-3 below 11 m/s, (0.49 + 0.065 U)e-3 above; constant beyond 25 m/s.
    """
    u = np.minimum(np.asarray(speed, float), STRONGEST)
    return np.asarray(np.where(u < 11.0, 1.2e-3, (0.49 + 0.065 * u) * 1e-3))


def trenberth(speed: ArrayLike) -> Array:
    """Drag coefficient of Trenberth, Large & Olson (1990), who let it rise in light winds.

    Parameters
    ----------
    speed : array_like
        Wind speed (m/s).

    Returns
    -------
    ndarray
        (0.62 + 1.56/U)e-3 up to 3 m/s, 1.14e-3 up to 10, (0.49 + 0.065 U)e-3 above; constant
        beyond 25 m/s and below 0.1 m/s.
    """
    u = np.clip(np.asarray(speed, float), 0.1, STRONGEST)
    strong = np.where(u < 10.0, 1.14, 0.49 + 0.065 * u)
    return np.asarray(np.where(u <= 3.0, 0.62 + 1.56 / u, strong) * 1e-3)


LAWS: dict[str, Callable[[ArrayLike], Array]] = {
    "Large and Pond 1981": large_pond,
    "Trenberth et al. 1990": trenberth,
}
"""Drag laws by the name a scenario gives them."""


def wind_stress(
    eastward: ArrayLike, northward: ArrayLike, law: str, unresolved: float = 0.0
) -> tuple[Array, Array]:
    """Stress of a wind.

    Parameters
    ----------
    eastward, northward : array_like
        Wind at 10 m (m/s), of one shape.
    law : str
        One of `LAWS`.
    unresolved : float
        Standard deviation of each component about the given mean wind (m/s).

    Returns
    -------
    eastward, northward : ndarray
        Stress (Pa).

    References
    ----------
    See the module.
    """
    u, v = np.asarray(eastward, float), np.asarray(northward, float)
    speed = np.sqrt(u**2 + v**2 + 4.0 * unresolved**2)
    factor = AIR_DENSITY * LAWS[law](speed) * speed
    return factor * u, factor * v
