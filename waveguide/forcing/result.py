"""All that a wind did at the targets of a scenario."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from waveguide.forcing.answers import RESPONDS, ModeResponse
from waveguide.forcing.structure import MooringRatios
from waveguide.forcing.time_axis import Times
from waveguide.network.graph import Network
from waveguide.propagation.cautions import Caution
from waveguide.propagation.validity import Validity

Array = NDArray[np.float64]


@dataclass(frozen=True)
class ResponseResult:
    """Forced response of all modes at all targets.

    Attributes
    ----------
    target : list of str
    lon, lat : ndarray, shape (targets,)
        Degrees.
    time : ndarray of datetime64[ns], shape (nt,)
        Equidistant.
    networks : dict of int to Network
        By mode.
    answers : dict of int to ModeResponse
        By mode.
    ratios : dict of (int, int) to MooringRatios
        By target and mode, for targets on the equator.
    validity : dict of (int, int) to Validity
        By target and mode, of the main way of those that respond.
    cautions : dict of (int, int) to list of Caution
        By target and mode.
    notes : list of str
        On the wind.
    attributes : dict
        The question, the software and the data.
    calm_before : bool
        Whether there is known to be no wind before the first time, so that nothing is missed.
    """

    target: list[str]
    lon: Array
    lat: Array
    time: Times
    networks: dict[int, Network]
    answers: dict[int, ModeResponse]
    ratios: dict[tuple[int, int], MooringRatios]
    validity: dict[tuple[int, int], Validity]
    cautions: dict[tuple[int, int], list[Caution]]
    notes: list[str]
    attributes: dict[str, str | float]
    calm_before: bool

    @property
    def modes(self) -> list[int]:
        """Mode numbers, rising."""
        return list(self.answers)

    def total(self, target: int) -> Array:
        """Sea level at a target summed over the modes that respond (m), NaN if none does."""
        series = [
            answer.targets[target].sea_level
            for answer in self.answers.values()
            if answer.targets[target].status == RESPONDS
        ]
        return np.sum(series, axis=0) if series else np.full(self.time.size, np.nan)

    def spun_up(self, target: int) -> int:
        """First time at which 95 % of the influence of every mode lies within the record."""
        if self.calm_before:
            return 0
        days = [
            answer.targets[target].spin_up
            for answer in self.answers.values()
            if answer.targets[target].status == RESPONDS
        ]
        step = float((self.time[1] - self.time[0]) / np.timedelta64(1, "s"))
        first = int(np.ceil(max(days, default=0.0) / step))
        return first if first < self.time.size else 0
