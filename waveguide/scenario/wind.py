"""The [wind] table of a scenario: a record of wind, winds at stations, or invented ones."""

from __future__ import annotations

import os
from datetime import datetime
from itertools import pairwise
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import AfterValidator, BeforeValidator, Field, ValidationInfo, model_validator

from waveguide.scenario.fields import (
    DataFile,
    Days,
    Moment,
    Name,
    Number,
    Position,
    Table,
    checked_position,
)

DragLaw = Literal["Large and Pond 1981", "Trenberth et al. 1990"]
Azimuth = Annotated[Number, Field(ge=0.0, le=360.0)]


def _paths(value: object, info: ValidationInfo) -> tuple[Path, ...]:
    """One name or a list of names, each of a file or of a Zarr store (a folder)."""
    names = [value] if isinstance(value, str | Path) else value
    if not isinstance(names, list | tuple) or not names:
        raise ValueError("this is neither the name of a file nor a list of names")
    folder = (info.context or {}).get("folder", "")
    paths = []
    for name in names:
        if not isinstance(name, str | Path):
            raise ValueError("this is not the name of a file")
        path = Path(folder) / name
        if not os.path.exists(path):
            raise ValueError(f"there is no file {name!s}, seen from the folder of the scenario")
        paths.append(path)
    return tuple(paths)


def _on_earth(point: tuple[float, float, datetime]) -> tuple[float, float, datetime]:
    lon, lat, when = point
    return *checked_position((lon, lat)), when


def _rising(track: tuple[Any, ...]) -> tuple[Any, ...]:
    if len(track) < 2:
        raise ValueError("a track needs two points at least")
    if any(later[2] <= earlier[2] for earlier, later in pairwise(track)):
        raise ValueError("the times of a track must rise")
    return track


Files = Annotated[tuple[Path, ...], BeforeValidator(_paths)]
TrackPoint = Annotated[tuple[Number, Number, Moment], AfterValidator(_on_earth)]


class WindPatch(Table):
    """A patch of stress of one direction that stands or travels, such as a westerly burst.

    Attributes
    ----------
    name : str or None
    position : (lon, lat)
        Centre at the start, degrees.
    start : datetime
        UTC.
    duration_days : float
        Strongest half-way (sin²).
    length_km, width_km : float
        From the centre to where stress is 1/e of the strongest, along the wind and across it.
    stress_pa : float
        Strongest stress.
    towards_degrees : float
        Azimuth to which the wind blows: 90 for a westerly.
    speed_m_s : float
        At which the patch travels.
    heading_degrees : float or None
        Azimuth to which it travels; that of the wind where None.
    """

    name: Name | None = None
    position: Position
    start: Moment
    duration_days: Days
    length_km: Annotated[Number, Field(gt=0.0, le=20000.0)]
    width_km: Annotated[Number, Field(gt=0.0, le=20000.0)]
    stress_pa: Annotated[Number, Field(gt=0.0, le=5.0)]
    towards_degrees: Azimuth
    speed_m_s: Annotated[Number, Field(ge=0.0, le=100.0)] = 0.0
    heading_degrees: Azimuth | None = None


class WindStorm(Table):
    """A cyclone on its track.

    Attributes
    ----------
    name : str or None
    track : tuple of (lon, lat, datetime)
        Degrees and UTC, in the order of time.
    max_wind_m_s : float
    radius_km : float
        Of the strongest wind.
    """

    name: Name | None = None
    track: Annotated[tuple[TrackPoint, ...], AfterValidator(_rising)]
    max_wind_m_s: Annotated[Number, Field(gt=0.0, le=120.0)]
    radius_km: Annotated[Number, Field(gt=0.0, le=1000.0)]


class Wind(Table):
    """The wind that drives a response.

    Attributes
    ----------
    record : {"monthly 1982-1992"} or None
        The packaged record.
    file : tuple of Path or None
        NetCDF files or Zarr stores on one grid, in the order of time; or one CSV of alongshore
        winds at stations.
    quantity : str or None
        What the values are, where the file does not say it.
    eastward, northward : str or None
        Names of the variables, where their attributes do not tell them.
    units : str or None
        Their units, where the file has none or wrong ones.
    stations : Path or None
        CSV of the positions of stations.
    drag_law : str
    unresolved_m_s : float
        Standard deviation of each component of the wind within the averaging time of the record.
    remove : {"nothing", "mean", "annual cycle"}
        What is taken off the stress before it acts.
    start, end : datetime or None
        Period that is used; all of the record where None.
    step_hours : float or None
        Interval of the response; that of the record where None, a day at most.
    patches : tuple of WindPatch
    storms : tuple of WindStorm
    """

    record: Literal["monthly 1982-1992"] | None = None
    file: Files | None = None
    quantity: Literal["wind", "stress", "alongshore stress", "upwelling index"] | None = None
    eastward: Name | None = None
    northward: Name | None = None
    units: Name | None = None
    stations: DataFile | None = None
    drag_law: DragLaw = "Large and Pond 1981"
    unresolved_m_s: Annotated[Number, Field(ge=0.0, le=20.0)] = 0.0
    remove: Literal["nothing", "mean", "annual cycle"] = "nothing"
    start: Moment | None = None
    end: Moment | None = None
    step_hours: Annotated[Number, Field(ge=0.1, le=240.0)] | None = None
    patches: tuple[WindPatch, ...] = ()
    storms: tuple[WindStorm, ...] = ()

    @property
    def invented(self) -> bool:
        """Whether the wind is made of patches and storms."""
        return bool(self.patches or self.storms)

    @model_validator(mode="after")
    def _one_source(self) -> Wind:
        given = [self.record is not None, self.file is not None, self.invented]
        if sum(given) != 1:
            raise ValueError(
                "the wind needs exactly one of record, file, and patches with storms; "
                f"{sum(given)} of them are given"
            )
        return self

    @model_validator(mode="after")
    def _station_keys(self) -> Wind:
        along = self.quantity in ("alongshore stress", "upwelling index")
        if along != (self.stations is not None):
            raise ValueError(
                "stations and a quantity of 'alongshore stress' or 'upwelling index' belong "
                "together; give both or neither"
            )
        if not along and any(path.suffix.lower() == ".csv" for path in self.file or ()):
            raise ValueError(
                "a CSV file holds winds at stations; name the file of their positions in stations "
                "and what the values are in quantity"
            )
        if along and (self.file is None or len(self.file) > 1):
            raise ValueError("winds at stations come in one CSV file; name it in file")
        return self

    @model_validator(mode="after")
    def _keys_of_a_grid(self) -> Wind:
        if (self.eastward is None) != (self.northward is None):
            raise ValueError("eastward and northward come together; give both or neither")
        named = self.eastward or self.units
        if named and (self.file is None or self.stations is not None):
            raise ValueError("eastward, northward and units describe a file on a grid")
        return self

    @model_validator(mode="after")
    def _period(self) -> Wind:
        if self.start is not None and self.end is not None and self.start >= self.end:
            raise ValueError("the end is not after the start")
        if self.invented and self.end is None:
            raise ValueError("an invented wind needs an end, up to which the response is told")
        return self
