"""The sentences a person reads when a scenario file cannot be used.

Each names the key, the value, the rule that was broken and the way out.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import date
from difflib import get_close_matches
from typing import TYPE_CHECKING, Any, get_args

from waveguide.scenario.fields import Format
from waveguide.scenario.model import Event, Ocean, Output, Scenario, Target, Waves
from waveguide.scenario.observed import Compare, Lookout, Observation
from waveguide.scenario.uncertainty import Planning, Uncertainty
from waveguide.scenario.wind import Wind, WindPatch, WindStorm

if TYPE_CHECKING:
    from pydantic_core import ErrorDetails

_KEYS: dict[str, tuple[str, ...]] = {
    "": (*Scenario.model_fields, "targets_file"),
    "event": tuple(Event.model_fields),
    "targets": tuple(Target.model_fields),
    "waves": tuple(Waves.model_fields),
    "ocean": tuple(Ocean.model_fields),
    "output": tuple(Output.model_fields),
    "observations": tuple(Observation.model_fields),
    "compare": tuple(Compare.model_fields),
    "lookout": tuple(Lookout.model_fields),
    "uncertainty": tuple(Uncertainty.model_fields),
    "plan": tuple(Planning.model_fields),
    "wind": tuple(Wind.model_fields),
    "wind.patches": tuple(WindPatch.model_fields),
    "wind.storms": tuple(WindStorm.model_fields),
}

_WAY_OUT = {
    "name": "write a name of 1 to 120 characters, in quotes",
    "title": 'write a title of 1 to 120 characters, as in title = "Wind burst on the equator"',
    "description": "write a text of at most 4000 characters, in quotes",
    "event": "write an [event] table with start, duration_days and position or box",
    "event.name": "write a name of 1 to 120 characters, in quotes, or leave it out",
    "event.position": "write position = [longitude, latitude], in degrees east and north",
    "event.box": "write box = [west, south, east, north], in degrees east and north",
    "event.start": "write date, time and zone, as in start = 2031-03-05T00:00:00Z",
    "event.duration_days": "write the duration in days, as in duration_days = 10",
    "event.amplitude_m": "write sea level in metres, or leave the key out where it is unknown",
    "targets": "write a [[targets]] table for each target, or targets_file at the top of the file",
    "targets.name": 'write a name of 1 to 120 characters, as in name = "Callao"',
    "targets.position": "write position = [longitude, latitude], in degrees east and north",
    "targets.depth_m": "write depths in metres, positive down, as in depth_m = [50, 150]",
    "targets.offshore_km": "write kilometres from the shore, as in offshore_km = 40",
    "waves": "write a [waves] table with modes and period_days",
    "waves.modes": "write a list of 0 (barotropic) and 1 to 3 (baroclinic), as in modes = [1, 2]",
    "waves.period_days": "write the dominant period in days, as in period_days = 20",
    "ocean": "write an [ocean] table, or leave it out to use the packaged ocean",
    "ocean.bathymetry": "name a NetCDF file, or leave the key out to use the packaged depths",
    "ocean.climatology": "name a NetCDF file, or leave the key out to use the packaged one",
    "ocean.temperature": 'write "in-situ", "potential" or "conservative"',
    "ocean.atlas": "name a file that `waveguide atlas` made, or leave the key out",
    "ocean.phase_speed_m_s": "write a speed in m/s, as in phase_speed_m_s = 2.5",
    "output": "write an [output] table, or leave it out to get every format",
    "output.formats": "write a list of " + ", ".join(f'"{word}"' for word in get_args(Format)),
    "observations": "write an [[observations]] table for each record",
    "observations.name": 'write a name of 1 to 120 characters, as in name = "Callao"',
    "observations.position": "write position = [longitude, latitude], in degrees east and north",
    "observations.file": 'name a CSV or NetCDF file, as in file = "gauges.csv"',
    "observations.units": 'write the units, as in units = "mm"',
    "observations.depth_m": "write the depth in metres, positive down, as in depth_m = 150",
    "observations.zone": 'write zone = "UTC" after converting the times, or leave it out',
    "compare": "write a [compare] table with band_days",
    "compare.band_days": "write the shortest and longest period, as in band_days = [15, 60]",
    "compare.pairs": 'write pairs of observations, as in pairs = [["Callao", "Arica"]]',
    "compare.longest_lag_days": "write days, as in longest_lag_days = 30, or leave it out",
    "lookout": "write a [lookout] table, or leave it out to look at sea level",
    "uncertainty": "write an [uncertainty] table, or leave it out to take the usual errors",
    "uncertainty.members": "write how many members the ensemble has, as in members = 8192",
    "uncertainty.seed": "write a whole number of 0 or more, as in seed = 1",
    "uncertainty.mean_flow_m_s": "write a current in m/s, as in mean_flow_m_s = 0.2",
    "uncertainty.start_days": "write days, as in start_days = 0.5",
    "plan": "write a [plan] table, or leave it out",
    "plan.chance_percent": "write the chance of catching the signal, as in chance_percent = 80",
    "plan.threshold_m": "write sea level in metres, as in threshold_m = 0.02",
    **{
        f"uncertainty.{key}": f"write a {what}, as in {key} = {field.default:g}"
        for what, ends in (
            ("standard deviation", ("_percent", "position_km", "width_km")),
            ("correlation length", "_scale_km"),
        )
        for key, field in Uncertainty.model_fields.items()
        if key.endswith(ends)
    },
    "wind": "write a [wind] table with a record, a file, or patches and storms",
    "wind.file": 'name a NetCDF file or a list of them, as in file = "winds.nc"',
    "wind.stations": 'name a CSV of positions, as in stations = "stations.csv"',
    "wind.start": "write date, time and zone, as in start = 1990-01-01T00:00:00Z",
    "wind.end": "write date, time and zone, as in end = 1999-12-31T00:00:00Z",
    "wind.patches.position": "write position = [longitude, latitude], in degrees east and north",
    "wind.patches.start": "write date, time and zone, as in start = 2031-03-05T00:00:00Z",
    "wind.patches.duration_days": "write the duration in days, as in duration_days = 10",
    "wind.patches.length_km": "write kilometres along the wind, as in length_km = 1500",
    "wind.patches.width_km": "write kilometres across the wind, as in width_km = 400",
    "wind.patches.stress_pa": "write the strongest stress, as in stress_pa = 0.1",
    "wind.patches.towards_degrees": "write where the wind blows to, 90 for a westerly",
    "wind.storms.track": "write points [longitude, latitude, time], as in "
    "track = [[120.0, 10.0, 2031-08-01T00:00:00Z], [115.0, 14.0, 2031-08-03T00:00:00Z]]",
    "wind.storms.max_wind_m_s": "write the strongest wind, as in max_wind_m_s = 40",
    "wind.storms.radius_km": "write the radius of the strongest wind, as in radius_km = 50",
}

_LISTS = ("targets", "observations", "wind.patches", "wind.storms")
"""Tables that may come many times."""

_RULES = {
    "missing": "it is missing",
    "finite_number": "it must be a finite number",
    "float_type": "it must be a number",
    "int_type": "it must be a whole number",
    "int_from_float": "it must be a whole number",
    "string_type": "it must be a text in quotes",
    "string_too_short": "it must not be empty",
    "string_too_long": "it must have at most {max_length} characters",
    "greater_than": "it must be greater than {gt:g}",
    "greater_than_equal": "it must be at least {ge:g}",
    "less_than_equal": "it must be at most {le:g}",
    "too_long": "it has too many values",
    "tuple_type": "it must be a list",
    "model_type": "it must be a table",
    "literal_error": "it must be one of {expected}",
}


def problem_lines(errors: Sequence[ErrorDetails], target_labels: Sequence[str]) -> list[str]:
    """One line for each thing the models refused.

    Parameters
    ----------
    errors : sequence of ErrorDetails
        As given by ``pydantic.ValidationError.errors()``.
    target_labels : sequence of str
        What a person calls each target, for example ``"gauges.csv row 3"``.

    Returns
    -------
    list of str
        Without repetition, in the order of the errors.
    """
    return list(dict.fromkeys(_line(error, target_labels) for error in errors))


def unknown_key(table: str, key: str) -> str:
    """The rule and the way out for a key that `table` ("" for the top) does not know."""
    keys = _KEYS[table]
    where = _heading(table)
    home = next((t for t, known in _KEYS.items() if key in known and t != table), None)
    if home is not None:
        above = "" if home else ", above the first [table]"
        return f"this key belongs {_heading(home)}{above}, not {where}"
    near = get_close_matches(key.lower(), keys, n=1)
    meant = f"did you mean {near[0]}? " if near else ""
    return f"unknown key {where}; {meant}the keys there are {', '.join(keys)}"


def shown(value: object) -> str:
    """A value as one short line, whatever it holds."""
    text = str(value) if isinstance(value, date) else repr(value)
    return text if len(text) <= 60 else text[:57] + "..."


def _heading(table: str) -> str:
    if not table:
        return "at the top of the file"
    return f"in a [[{table}]] table" if table in _LISTS else f"in [{table}]"


def _line(error: ErrorDetails, target_labels: Sequence[str]) -> str:
    loc = error["loc"]
    words = [str(part) for part in loc if isinstance(part, str)]
    value = error["input"]
    subject = _subject(loc, words, target_labels)
    if not isinstance(value, Mapping):  # a whole table is not printed
        subject = f"{subject} = {shown(value)}"
    if error["type"] == "extra_forbidden":
        return f"{subject}: {unknown_key('.'.join(words[:-1]), words[-1])}"
    advice = "; ".join(filter(None, (_rule(error), _WAY_OUT.get(".".join(words)))))
    return f"{subject}: {advice}".removeprefix(": ")


def _subject(loc: tuple[int | str, ...], words: list[str], target_labels: Sequence[str]) -> str:
    """The key as a person would point at it: ``event.start``, ``gauges.csv row 3 position``."""
    if len(loc) > 1 and loc[0] == "targets" and isinstance(loc[1], int):
        return " ".join([target_labels[loc[1]], *words[1:]])
    if len(loc) > 1 and loc[0] == "observations" and isinstance(loc[1], int):
        return " ".join([f"observation {loc[1] + 1}", *words[1:]])
    if len(loc) > 2 and loc[0] == "wind" and isinstance(loc[2], int):
        one = "patch" if loc[1] == "patches" else "storm"
        return " ".join([f"wind {one} {loc[2] + 1}", *words[2:]])
    return ".".join(words)


def _rule(error: ErrorDetails) -> str:
    context: dict[str, Any] = error.get("ctx", {})
    if error["type"] == "value_error":
        return str(context["error"])
    if error["type"] == "missing" and isinstance(error["loc"][-1], int):
        return "it has too few values"
    template = _RULES.get(error["type"])
    return template.format(**context) if template else error["msg"]
