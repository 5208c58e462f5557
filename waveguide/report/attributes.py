"""The global attributes every result carries: the question, the software and the data."""

from __future__ import annotations

import math
from collections.abc import Mapping
from importlib.metadata import PackageNotFoundError, version
from typing import TYPE_CHECKING, Any

from waveguide.schema import CAUTION

if TYPE_CHECKING:
    from waveguide.scenario import Scenario


def software_version() -> str:
    """The version of the installed package."""
    try:
        return version("waveguide")
    except PackageNotFoundError:
        return "not installed"


def arrivals_attributes(scenario: Scenario, data_sha256: Mapping[str, str]) -> dict[str, Any]:
    """Global attributes of the arrivals of a scenario.

    Parameters
    ----------
    scenario : Scenario
    data_sha256 : mapping of str to str
        SHA-256 of every data file used, by the name of the file.

    Returns
    -------
    dict
        With the keys of :data:`waveguide.schema.ARRIVALS_ATTRIBUTES`.
    """
    event = scenario.event
    lon, lat = event.centre
    box = {} if event.box is None else {"event_box_west_south_east_north": list(event.box)}
    return {
        "Conventions": "CF-1.11",
        "title": scenario.title,
        "summary": " ".join(scenario.description.split()),
        "scenario": scenario.name,
        "event_name": event.name or "",
        "event_start": event.start.strftime("%Y-%m-%dT%H:%M:%SZ"),
        "event_duration_days": event.duration_days,
        "event_amplitude_m": math.nan if event.amplitude_m is None else event.amplitude_m,
        "source_longitude": lon,
        "source_latitude": lat,
        "period_days": scenario.waves.period_days,
        "ocean": scenario.ocean.source,
        "source": f"waveguide {software_version()}",
        "history": f"waveguide arrivals {scenario.name}",
        "data_sha256": "; ".join(f"{name} {digest}" for name, digest in data_sha256.items()),
        "caution": CAUTION,
        **box,
    }
