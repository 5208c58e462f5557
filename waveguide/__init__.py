"""Arrival times and amplitudes of sea-level signals along coasts and the equator.

>>> import waveguide
>>> scenario = waveguide.read_scenario("peru_burst")
>>> arrivals = waveguide.arrivals(scenario)  # an xarray.Dataset
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from waveguide.pipeline import arrivals
    from waveguide.planning import plan
    from waveguide.records import compare_records, look_out
    from waveguide.scenario import read_comparison, read_scenario, read_wind_scenario
    from waveguide.sections import section
    from waveguide.wind_response import response

__all__ = [
    "arrivals",
    "compare_records",
    "look_out",
    "plan",
    "read_comparison",
    "read_scenario",
    "read_wind_scenario",
    "response",
    "section",
]

_HOME = {
    "arrivals": "waveguide.pipeline",
    "compare_records": "waveguide.records",
    "look_out": "waveguide.records",
    "plan": "waveguide.planning",
    "read_comparison": "waveguide.scenario",
    "read_scenario": "waveguide.scenario",
    "read_wind_scenario": "waveguide.scenario",
    "response": "waveguide.wind_response",
    "section": "waveguide.sections",
}


def __getattr__(name: str) -> Any:
    """Import a public name when it is first used, so that importing the package stays light."""
    if name not in _HOME:
        raise AttributeError(f"module 'waveguide' has no attribute {name!r}")
    from importlib import import_module

    return getattr(import_module(_HOME[name]), name)
