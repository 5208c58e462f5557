"""The scenario file: TOML in, a checked and frozen :class:`Scenario` out.

This package is the only place that knows the syntax of the file.
"""

from __future__ import annotations

from waveguide.scenario.model import (
    Comparison,
    Event,
    Ocean,
    Output,
    Scenario,
    Target,
    Waves,
    WindScenario,
)
from waveguide.scenario.observed import Compare, Lookout, Observation
from waveguide.scenario.reading import (
    find_scenario,
    read_comparison,
    read_scenario,
    read_wind_scenario,
    scenario_title,
)
from waveguide.scenario.uncertainty import Planning, Uncertainty
from waveguide.scenario.wind import Wind, WindPatch, WindStorm
from waveguide.shipped import shipped_scenarios

__all__ = [
    "Compare",
    "Comparison",
    "Event",
    "Lookout",
    "Observation",
    "Ocean",
    "Output",
    "Planning",
    "Scenario",
    "Target",
    "Uncertainty",
    "Waves",
    "Wind",
    "WindPatch",
    "WindScenario",
    "WindStorm",
    "find_scenario",
    "read_comparison",
    "read_scenario",
    "read_wind_scenario",
    "scenario_title",
    "shipped_scenarios",
]
