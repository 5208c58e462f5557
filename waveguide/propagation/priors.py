"""How wrong the inputs of a prediction may be, before anything is observed.

Every prior is a standard deviation, of a normal error unless said otherwise. Errors along the
path are correlated as exp(−|s − s′|/L), L being given beside each. Where the sizes come from:

- stratification, 6 % of c over 1000 km: against the first-mode speeds of Chelton et al. (1998)
  nine cells in ten of our atlas lie within 10 %, which is 1.645 × 6 %. Along coasts the
  correlation of the departures falls to a third within 500 km and keeps a tail beyond 1500 km;
- depth, 15 % over 500 km: sections of the shipped depths off Peru give 2.8 to 3.3 m/s where 2.3
  (Smith 1978) and 2.9 m/s (Quispe and Rojas 2017) were observed. How a speed answers to depth is
  `depth_exponent`;
- mean flow, 0.2 m/s over 2000 km: the speeds observed along the equator depart from the path
  mean of Chelton's c₁ by 0.26 m/s in the median (Kessler et al. 1995, Delcroix et al. 1991, Katz
  1997 twice, Iskandar et al.), errors of measurement included;
- length of the effective coast, 5 % over 500 km: between neighbouring tide gauges of NOAA CO-OPS
  from La Jolla to Yakutat our path is 1 % shorter to 27 % longer (behind the Channel Islands) than
  the straight line, 6 % in the median, and the straight line is a bound from below;
- source: half a day, 80 km (half a cell of a 2.5° wind analysis, which is uniform), 20 % of the
  duration and 30 % of the height: our choice, for an event read off a weather analysis;
- width of straits and facing coasts, 5 km: two walls on a grid of 11 km, each wrong by up to half
  a cell (uniform);
- coastal value, a factor e^±0.4 of sea level at a target on a coast: of the coasts along which
  twelve modes are coupled (tests/oracle/test_oracle_coupled.py) half the heights of mode 1 are off
  by more than a factor of 1.31, which is e^(0.674 × 0.4). Half of those of mode 2 are off by more
  than 1.79: higher modes have `HIGHER_MODES` times the error;
- bottom friction and damping, a factor e^±0.5: linear drags in use for shelves go from 2e-4 to
  1e-3 m/s (MEMORY), which is two of these about the usual 5e-4.

What these windows hold: of oceans made to err as the priors say 75 ± 6 % (tests/oracle), of the
lags between neighbouring moorings and from San Diego to San Francisco six of six, of all fifteen
pairs of moorings twelve, once the error of the observed lag is counted (tests/open_data).

References
----------
Chelton, deSzoeke, Schlax, El Naggar and Siwertz (1998), J. Phys. Oceanogr. 28, 433.
Delcroix, Picaut and Eldin (1991), J. Geophys. Res. 96, 3249.
Katz (1997), J. Phys. Oceanogr. 27, 2536.
Kessler, McPhaden and Weickmann (1995), J. Geophys. Res. 100, 10613.
Quispe and Rojas (2017), Rev. Inv. Fis. 19.
Smith (1978), J. Geophys. Res. 83, 6083.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.constants import SECONDS_PER_DAY
from waveguide.network.graph import Network, StepKind

Array = NDArray[np.float64]
Index = NDArray[np.int64]

INPUTS = (
    "stratification",
    "depth",
    "mean flow",
    "coast length",
    "source time",
    "source position",
    "source duration",
    "source height",
    "straits",
    "facing coasts",
    "friction",
    "coastal value",
)
"""What a prediction depends on, in the order of the columns of a sample."""

PATH_INPUTS = INPUTS[:4]
"""Those whose errors add up along the path."""


HIGHER_MODES = 2.0
"""Error of the coastal value of modes from 2 upward, over that of mode 1."""


@dataclass(frozen=True)
class Prior:
    """Size and correlation length of an error along the path.

    Attributes
    ----------
    size : float
        Standard deviation, relative unless said otherwise.
    length : float
        Correlation length (m).
    """

    size: float
    length: float


@dataclass(frozen=True)
class Priors:
    """Standard deviations of all errors; none unless given.

    Attributes
    ----------
    stratification : Prior
        Of the phase speed, relative.
    depth : Prior
        Of the depth, relative.
    mean_flow : Prior
        Current along the path, size in m/s.
    coast_length : Prior
        Of the length of the coast that is followed, relative.
    source_time : float
        s.
    source_position : float
        Along the guide (m).
    source_duration, source_height : float
        Logarithmic.
    gap_width : float
        Width of straits and of the water between facing coasts (m).
    friction : float
        Of bottom friction and interior damping, logarithmic.
    coastal_value : float
        Of the coastal value of a mode at a target on a coast, logarithmic.
    """

    stratification: Prior = Prior(0.0, 1.0)
    depth: Prior = Prior(0.0, 1.0)
    mean_flow: Prior = Prior(0.0, 1.0)
    coast_length: Prior = Prior(0.0, 1.0)
    source_time: float = 0.0
    source_position: float = 0.0
    source_duration: float = 0.0
    source_height: float = 0.0
    gap_width: float = 0.0
    friction: float = 0.0
    coastal_value: float = 0.0


USUAL = Priors(
    stratification=Prior(0.06, 1000e3),
    depth=Prior(0.15, 500e3),
    mean_flow=Prior(0.2, 2000e3),
    coast_length=Prior(0.05, 500e3),
    source_time=0.5 * SECONDS_PER_DAY,
    source_position=80e3,
    source_duration=0.2,
    source_height=0.3,
    gap_width=5e3,
    friction=0.5,
    coastal_value=0.4,
)
"""Sizes with the evidence given by the module."""


def depth_exponent(mode: int, coast: NDArray[np.bool_]) -> Array:
    """How the phase speed answers to depth, d ln c/d ln H.

    Barotropic ½, c being √(gH). A baroclinic mode of a flat bottom hardly feels the depth of the
    deep ocean: exponential stratification (5.24e-3 s⁻¹, scale 1300 m) has 2.238 m/s over 4000 m
    and 2.354 m/s over 5000 m, which is 0.23. On a coast the shelf and slope matter too, and the
    speed of a shelf wave is the width of the shelf times f: for it 1 is taken, as a bound.

    Parameters
    ----------
    mode : int
    coast : ndarray of bool, shape (k,)
        Whether each step runs along a coast.

    Returns
    -------
    ndarray, shape (k,)
    """
    if mode == 0:
        return np.full(coast.shape, 0.5)
    return np.where(coast, 1.0, 0.23)


def step_errors(
    network: Network, mode: int, speed: Array, steps: Index, priors: Priors
) -> dict[str, Array]:
    """Relative standard deviation of the travel time of each step, for each of `PATH_INPUTS`.

    Travel time is ∫ds/(c + U), so a relative error of c and one of the length count alike, and a
    current counts as U/c.

    Parameters
    ----------
    network : Network
    mode : int
    speed : ndarray, shape (k,)
        Phase speed on the steps (m/s).
    steps : ndarray of int, shape (k,)
    priors : Priors

    Returns
    -------
    dict of ndarray, shape (k,)
    """
    coast = network.kind[steps] == StepKind.COAST
    one = np.ones(steps.size)
    return {
        "stratification": priors.stratification.size * (one if mode > 0 else 0.0 * one),
        "depth": priors.depth.size * depth_exponent(mode, coast),
        "mean flow": priors.mean_flow.size / speed,
        "coast length": priors.coast_length.size * coast,
    }
