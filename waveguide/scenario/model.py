"""What a scenario file may say: one frozen model for each table of the file.

Every rule a value must obey on its own, or together with its neighbours in the same table,
is here; the sentences a person reads when one is broken are in :mod:`.problems`.
"""

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
    model_validator,
)

HIGHEST_MODE = 3
"""The mode atlas holds the barotropic mode 0 and the baroclinic modes 1 to 3."""

LONGEST_DAYS = 3650.0
"""Ten years: longer than any boundary-trapped signal keeps its identity."""

YEARS = (1800, 2200)
"""Dates are stored to the nanosecond, which ends in 2262; a delay still fits in."""

FASTEST_BAROCLINIC = 10.0
"""Three times the fastest first-mode speed of any ocean (m/s): beyond it the unit is wrong."""

FASTEST_BAROTROPIC = 350.0
"""√(gH) over the deepest trench, 11 km, is 329 m/s."""

Format = Literal["csv", "netcdf", "geojson", "map"]


def _longitude(value: float) -> float:
    """Longitude given as −180..180 or 0..360, as −180..180."""
    if not -180.0 <= value <= 360.0:
        raise ValueError(f"longitude {value:g} is outside −180 to 360")
    return value - 360.0 if value > 180.0 else value


def _latitude(value: float) -> float:
    if not -90.0 <= value <= 90.0:
        raise ValueError(f"latitude {value:g} is outside −90 to 90")
    return value


def _position(value: tuple[float, float]) -> tuple[float, float]:
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


def _storable(value: str) -> str:
    if "\0" in value:
        raise ValueError("a text must not hold the character NUL, which ends it in a NetCDF file")
    return value


def _not_empty(value: tuple[Any, ...]) -> tuple[Any, ...]:
    # Not pydantic's min_length, which counts only the valid members.
    if not value:
        raise ValueError("it must not be empty")
    return value


def _distinct_modes(value: tuple[int, ...]) -> tuple[int, ...]:
    if len(set(value)) < len(value):
        raise ValueError("a mode is given twice")
    return tuple(sorted(value))


Number = Annotated[float, Field(strict=True, allow_inf_nan=False)]
Days = Annotated[float, Field(strict=True, allow_inf_nan=False, gt=0.0, le=LONGEST_DAYS)]
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
Position = Annotated[tuple[Number, Number], AfterValidator(_position)]
Box = Annotated[tuple[Number, Number, Number, Number], AfterValidator(_box)]
Moment = Annotated[datetime, BeforeValidator(_utc)]
DataFile = Annotated[Path, BeforeValidator(_existing_file)]
Mode = Annotated[int, Field(strict=True, ge=0, le=HIGHEST_MODE)]


class _Table(BaseModel):
    """A table of the scenario file: frozen, and closed to keys it does not know."""

    model_config = ConfigDict(frozen=True, extra="forbid")


class Event(_Table):
    """Where, when and for how long the ocean is disturbed.

    Attributes
    ----------
    name : str or None
    position : (lon, lat) or None
        Degrees east and north.
    box : (west, south, east, north) or None
        Degrees; crosses the date line where west is greater than east.
    start : datetime
        UTC.
    duration_days : float
    amplitude_m : float or None
        Sea level at the source (m), negative for a lowering; None where it is unknown.
    """

    name: Name | None = None
    position: Position | None = None
    box: Box | None = None
    start: Moment
    duration_days: Days
    amplitude_m: Annotated[Number, Field(ge=-100.0, le=100.0)] | None = None

    @model_validator(mode="after")
    def _one_place(self) -> Event:
        if (self.position is None) == (self.box is None):
            given = "both are given" if self.box else "neither is given"
            raise ValueError(f"the event needs either position or box, and {given}")
        return self

    @property
    def centre(self) -> tuple[float, float]:
        """Longitude and latitude of the position, or of the middle of the box (degrees)."""
        if self.position is not None:
            return self.position
        assert self.box is not None  # _one_place holds
        west, south, east, north = self.box
        lon = west + (east - west) % 360.0 / 2.0
        return (lon - 360.0 if lon > 180.0 else lon), (south + north) / 2.0


class Target(_Table):
    """A gauge, mooring or any other place where the arrival is wanted.

    Attributes
    ----------
    name : str
    position : (lon, lat)
        Degrees east and north.
    """

    name: Name
    position: Position


class Waves(_Table):
    """Which waves are followed.

    Attributes
    ----------
    modes : tuple of int
        0 is the barotropic mode, 1 to 3 the baroclinic ones; in rising order.
    period_days : float
        Dominant period of the signal.
    """

    modes: Annotated[tuple[Mode, ...], AfterValidator(_not_empty), AfterValidator(_distinct_modes)]
    period_days: Days


class Ocean(_Table):
    """Whose depths and stratification are used; the packaged ones unless told otherwise.

    Attributes
    ----------
    bathymetry, climatology : Path or None
        The user's own CF NetCDF files; None means the packaged data.
    temperature : {"in-situ", "potential", "conservative"} or None
        The kind of temperature in `climatology`; None means that the file says it.
    phase_speed_m_s : float or None
        One uniform phase speed in place of the real ocean, for idealised work.
    """

    bathymetry: DataFile | None = None
    climatology: DataFile | None = None
    temperature: Literal["in-situ", "potential", "conservative"] | None = None
    phase_speed_m_s: Annotated[Number, Field(gt=0.0, le=FASTEST_BAROTROPIC)] | None = None

    @model_validator(mode="after")
    def _one_ocean(self) -> Ocean:
        if self.phase_speed_m_s is not None and (self.bathymetry or self.climatology):
            raise ValueError("a uniform phase speed and files of the real ocean exclude each other")
        if self.temperature is not None and self.climatology is None:
            raise ValueError("temperature describes a climatology file, and none is given")
        return self

    @property
    def source(self) -> Literal["packaged", "own files", "uniform"]:
        """Where the speeds come from, in a word."""
        if self.phase_speed_m_s is not None:
            return "uniform"
        return "own files" if self.bathymetry or self.climatology else "packaged"


class Output(_Table):
    """What is written when an output folder is given.

    Attributes
    ----------
    formats : tuple of {"csv", "netcdf", "geojson", "map"}
    """

    formats: Annotated[tuple[Format, ...], AfterValidator(_not_empty)] = (
        "csv",
        "netcdf",
        "geojson",
        "map",
    )


class Scenario(_Table):
    """A worked question: an event, the targets, the waves and the ocean they cross.

    Attributes
    ----------
    name : str
        A short name; the name of the file where none is given.
    title, description : str
    event : Event
    targets : tuple of Target
        In the order of the file, the ones of a targets file last; names are distinct.
    waves : Waves
    ocean : Ocean
    output : Output
    """

    name: Name = "scenario"
    title: Name
    description: Prose = ""
    event: Event
    targets: Annotated[tuple[Target, ...], AfterValidator(_not_empty)]
    waves: Waves
    ocean: Ocean = Ocean()
    output: Output = Output()

    @model_validator(mode="after")
    def _distinct_names(self) -> Scenario:
        names = [target.name for target in self.targets]
        twice = sorted({name for name in names if names.count(name) > 1})
        if twice:
            raise ValueError(
                f"the targets need distinct names, and {', '.join(map(repr, twice))} is given twice"
            )
        return self

    @model_validator(mode="after")
    def _speed_fits_mode(self) -> Scenario:
        speed = self.ocean.phase_speed_m_s
        if speed is None:
            return self
        if len(self.waves.modes) > 1:
            raise ValueError("a uniform phase speed belongs to one mode; give one in waves.modes")
        if self.waves.modes[0] > 0 and speed > FASTEST_BAROCLINIC:
            raise ValueError(
                f"phase_speed_m_s = {speed:g} is faster than any baroclinic mode; is it in m/s?"
            )
        return self
