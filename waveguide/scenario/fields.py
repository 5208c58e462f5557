"""The values a scenario file may hold, each with the rule it must obey."""

from __future__ import annotations

import os
from datetime import UTC, date, datetime
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import (
    AfterValidator,
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Field,
    StringConstraints,
    ValidationInfo,
)

HIGHEST_MODE = 3
"""The mode atlas holds the barotropic mode 0 and the baroclinic modes 1 to 3."""

SHORTEST_DAYS = 0.01
"""A quarter of an hour: far below the day or more at which the theory of long waves holds."""

LONGEST_DAYS = 3650.0
"""Ten years: longer than any boundary-trapped signal keeps its identity."""

YEARS = (1800, 2200)
"""Dates are stored to the nanosecond, which ends in 2262; a delay still fits in."""

SLOWEST = 0.01
"""A tenth of the slowest third mode over a shelf (m/s)."""

FASTEST_BAROCLINIC = 10.0
"""Three times the fastest first-mode speed of any ocean (m/s): beyond it the unit is wrong."""

FASTEST_BAROTROPIC = 350.0
"""√(gH) over the deepest trench, 11 km, is 329 m/s."""

DEEPEST = 11000.0
"""Depth of the deepest trench (m)."""

Format = Literal["csv", "netcdf", "geojson", "map", "waveforms", "distance-time", "budget"]


def _longitude(value: float) -> float:
    """Longitude given as −180..180 or 0..360, as −180..180."""
    if not -180.0 <= value <= 360.0:
        raise ValueError(f"longitude {value:g} is outside −180 to 360")
    return value - 360.0 if value > 180.0 else value


def _latitude(value: float) -> float:
    if not -90.0 <= value <= 90.0:
        raise ValueError(f"latitude {value:g} is outside −90 to 90")
    return value


def checked_position(value: tuple[float, float]) -> tuple[float, float]:
    """Longitude and latitude that lie on the earth, longitude as −180..180."""
    lon, lat = value
    if not -90.0 <= lat <= 90.0 and -90.0 <= lon <= 90.0:
        raise ValueError(
            f"latitude {lat:g} is outside −90 to 90; are longitude and latitude swapped?"
        )
    return _longitude(lon), _latitude(lat)


def _box(value: tuple[float, float, float, float]) -> tuple[float, float, float, float]:
    west, south, east, north = value
    if _latitude(south) >= _latitude(north):
        raise ValueError(f"south {south:g} is not south of north {north:g}")
    west, east = _longitude(west), _longitude(east)
    if not 0.0 < (east - west) % 360.0 <= 180.0:
        raise ValueError("east must lie 0 to 180 degrees east of west; are west and east swapped?")
    return west, south, east, north


def _utc(value: object) -> datetime:
    """A moment with its zone, as UTC; TOML dates and ISO 8601 strings are read."""
    if isinstance(value, str):
        try:
            value = datetime.fromisoformat(value)
        except ValueError:
            raise ValueError("this is not a date and time") from None
    if not isinstance(value, date):
        raise ValueError("this is not a date and time")
    if not isinstance(value, datetime):
        raise ValueError("the time of day and the time zone are missing")
    if value.tzinfo is None:
        raise ValueError("the time zone is missing")
    if not YEARS[0] <= value.year <= YEARS[1]:
        raise ValueError(f"the year must lie between {YEARS[0]} and {YEARS[1]}")
    return value.astimezone(UTC)


def _existing_file(value: object, info: ValidationInfo) -> Path:
    """A file named relative to the folder of the scenario."""
    if not isinstance(value, str | Path):
        raise ValueError("this is not the name of a file")
    path = Path((info.context or {}).get("folder", "")) / value
    if not os.path.isfile(path):
        raise ValueError("there is no such file, seen from the folder of the scenario")
    return path


def _listed(value: object) -> object:
    """One number as a list of one."""
    return (value,) if isinstance(value, int | float) and not isinstance(value, bool) else value


def _storable(value: str) -> str:
    if "\0" in value:
        raise ValueError("a text must not hold the character NUL, which ends it in a NetCDF file")
    return value


def not_empty(value: tuple[Any, ...]) -> tuple[Any, ...]:
    """Refuse a list without members."""
    # Not pydantic's min_length, which counts only the valid members.
    if not value:
        raise ValueError("it must not be empty")
    return value


def distinct_modes(value: tuple[int, ...]) -> tuple[int, ...]:
    """Modes in rising order, none twice."""
    if len(set(value)) < len(value):
        raise ValueError("a mode is given twice")
    return tuple(sorted(value))


Number = Annotated[float, Field(strict=True, allow_inf_nan=False)]
Days = Annotated[float, Field(strict=True, allow_inf_nan=False, ge=SHORTEST_DAYS, le=LONGEST_DAYS)]
Name = Annotated[
    str,
    StringConstraints(strict=True, strip_whitespace=True, min_length=1, max_length=120),
    AfterValidator(_storable),
]
Prose = Annotated[
    str,
    StringConstraints(strict=True, strip_whitespace=True, max_length=4000),
    AfterValidator(_storable),
]
Position = Annotated[tuple[Number, Number], AfterValidator(checked_position)]
Box = Annotated[tuple[Number, Number, Number, Number], AfterValidator(_box)]
Moment = Annotated[datetime, BeforeValidator(_utc)]
Depths = Annotated[
    tuple[Annotated[Number, Field(ge=0.0, le=DEEPEST)], ...], BeforeValidator(_listed)
]
DataFile = Annotated[Path, BeforeValidator(_existing_file)]
Mode = Annotated[int, Field(strict=True, ge=0, le=HIGHEST_MODE)]


class Table(BaseModel):
    """A table of the scenario file: frozen, and closed to keys it does not know."""

    model_config = ConfigDict(frozen=True, extra="forbid")
