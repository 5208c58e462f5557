"""The tables of a scenario file about what is uncertain, and about planning for it."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from waveguide.constants import SECONDS_PER_DAY
from waveguide.propagation.priors import USUAL, Prior, Priors
from waveguide.scenario.fields import Number, Table

MOST_MEMBERS = 1_000_000

Percent = Annotated[Number, Field(ge=0.0, le=100.0)]
Kilometres = Annotated[Number, Field(ge=0.0, le=5000.0)]
Scale = Annotated[Number, Field(ge=1.0, le=40000.0)]


def _percent(size: float) -> float:
    return round(100.0 * size, 6)


class Uncertainty(Table):
    """How uncertain the inputs are: standard deviations, and how far errors along the path reach.

    What a key leaves out is as in :data:`waveguide.propagation.priors.USUAL`, which says where
    the sizes come from.

    Attributes
    ----------
    members : int
        Of the ensemble; rounded up to eight sequences of a power of two.
    seed : int
        The same seed gives the same ensemble.
    stratification_percent, depth_percent : float
        Of the phase speed, and of the depth.
    mean_flow_m_s : float
        Current along the path that the prediction leaves out.
    coast_length_percent : float
        Of the length of the coast that is followed.
    stratification_scale_km, depth_scale_km, mean_flow_scale_km, coast_length_scale_km : float
        Correlation lengths.
    start_days : float
        Of the start of the event.
    position_km : float
        Of its place along the guide.
    duration_percent, height_percent : float
        Of its duration, and of sea level at the source.
    gap_width_km : float
        Of the width of straits and of the water between facing coasts.
    friction_percent : float
        Of bottom friction and interior damping.
    coastal_value_percent : float
        Of the coastal value of a mode at a target on a coast.
    """

    members: Annotated[int, Field(strict=True, ge=1, le=MOST_MEMBERS)] = 8192
    seed: Annotated[int, Field(strict=True, ge=0, le=2**63 - 1)] = 1
    stratification_percent: Percent = _percent(USUAL.stratification.size)
    depth_percent: Percent = _percent(USUAL.depth.size)
    mean_flow_m_s: Annotated[Number, Field(ge=0.0, le=2.0)] = USUAL.mean_flow.size
    coast_length_percent: Percent = _percent(USUAL.coast_length.size)
    stratification_scale_km: Scale = USUAL.stratification.length / 1e3
    depth_scale_km: Scale = USUAL.depth.length / 1e3
    mean_flow_scale_km: Scale = USUAL.mean_flow.length / 1e3
    coast_length_scale_km: Scale = USUAL.coast_length.length / 1e3
    start_days: Annotated[Number, Field(ge=0.0, le=365.0)] = USUAL.source_time / SECONDS_PER_DAY
    position_km: Kilometres = USUAL.source_position / 1e3
    duration_percent: Percent = _percent(USUAL.source_duration)
    height_percent: Percent = _percent(USUAL.source_height)
    gap_width_km: Annotated[Number, Field(ge=0.0, le=500.0)] = USUAL.gap_width / 1e3
    friction_percent: Percent = _percent(USUAL.friction)
    coastal_value_percent: Percent = _percent(USUAL.coastal_value)

    @property
    def priors(self) -> Priors:
        """The same in SI units."""
        return Priors(
            Prior(self.stratification_percent / 100.0, 1e3 * self.stratification_scale_km),
            Prior(self.depth_percent / 100.0, 1e3 * self.depth_scale_km),
            Prior(self.mean_flow_m_s, 1e3 * self.mean_flow_scale_km),
            Prior(self.coast_length_percent / 100.0, 1e3 * self.coast_length_scale_km),
            self.start_days * SECONDS_PER_DAY,
            1e3 * self.position_km,
            self.duration_percent / 100.0,
            self.height_percent / 100.0,
            1e3 * self.gap_width_km,
            self.friction_percent / 100.0,
            self.coastal_value_percent / 100.0,
        )


class Planning(Table):
    """What a plan of observations shall achieve.

    Attributes
    ----------
    chance_percent : float
        With which the signal is to be caught, from its rise to half height to its peak.
    threshold_m : float
        Sea level above which a signal counts as seen.
    """

    chance_percent: Annotated[Number, Field(ge=1.0, le=99.0)] = 80.0
    threshold_m: Annotated[Number, Field(gt=0.0, le=100.0)] = 0.02
