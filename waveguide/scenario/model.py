"""What a scenario file may say: one frozen model for each table of the file.

The rules of single values are in :mod:`.fields`, those between neighbours in the same table here;
the sentences a person reads when one is broken are in :mod:`.problems`.
"""

from __future__ import annotations

import math
from typing import Annotated, Literal, get_args

from pydantic import AfterValidator, Field, field_validator, model_validator

from waveguide.constants import ROTATION_RATE, SECONDS_PER_DAY
from waveguide.scenario.fields import (
    FASTEST_BAROCLINIC,
    FASTEST_BAROTROPIC,
    SLOWEST,
    Box,
    DataFile,
    Days,
    Depths,
    Format,
    Mode,
    Moment,
    Name,
    Number,
    Position,
    Prose,
    Table,
    distinct_modes,
    not_empty,
)
from waveguide.scenario.observed import Compare, Lookout, Observation, check_observations
from waveguide.scenario.uncertainty import Planning, Uncertainty
from waveguide.scenario.wind import Wind


class Event(Table):
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
    shape : {"gaussian", "boxcar", "step"}
        How sea level at the source goes with time: a smooth burst, a flat one, or a rise that
        stays, all within the duration.
    series_file : Path or None
        CSV of sea level at the source (columns time, value), in place of a shape.
    """

    name: Name | None = None
    position: Position | None = None
    box: Box | None = None
    start: Moment
    duration_days: Days
    amplitude_m: Annotated[Number, Field(ge=-100.0, le=100.0)] | None = None
    shape: Literal["gaussian", "boxcar", "step"] = "gaussian"
    series_file: DataFile | None = None

    @model_validator(mode="after")
    def _one_course(self) -> Event:
        if self.series_file is not None and "shape" in self.model_fields_set:
            raise ValueError("a shape and a series_file exclude each other; leave one out")
        return self

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


class Target(Table):
    """A gauge, mooring or any other place where the arrival is wanted.

    Attributes
    ----------
    name : str
    position : (lon, lat)
        Degrees east and north.
    depth_m : tuple of float
        Depths of the instruments of a mooring (m, positive down); none for a gauge.
    offshore_km : float or None
        Distance of the mooring from the shore, or from the equator where it stands on that guide;
        that of the position where None.
    """

    name: Name
    position: Position
    depth_m: Depths = ()
    offshore_km: Annotated[Number, Field(ge=0.0, le=2000.0)] | None = None

    @model_validator(mode="after")
    def _a_mooring_has_depths(self) -> Target:
        if self.offshore_km is not None and not self.depth_m:
            raise ValueError("offshore_km tells where a mooring stands; give its depth_m too")
        return self


class Waves(Table):
    """Which waves are followed.

    Attributes
    ----------
    modes : tuple of int
        0 is the barotropic mode, 1 to 3 the baroclinic ones; in rising order.
    period_days : float
        Dominant period of the signal, more than half a sidereal day: waves of shorter period are
        not slow beside the earth's rotation at any latitude.
    window_days : float or None
        How long after the start waveforms go on; None for as long as the slowest route needs.
    drag_m_s : float
        Coefficient r of the linear bottom stress ρ r v.
    damping_days : float or None
        e-folding time of mode 1 by interior damping, others as c⁻²; None for no damping.
    """

    modes: Annotated[tuple[Mode, ...], AfterValidator(not_empty), AfterValidator(distinct_modes)]
    period_days: Days
    window_days: Days | None = None
    drag_m_s: Annotated[Number, Field(ge=0.0, le=0.01)] = 5e-4
    damping_days: Days | None = None

    @field_validator("period_days")
    @classmethod
    def _slower_than_rotation(cls, days: float) -> float:
        if days * SECONDS_PER_DAY * ROTATION_RATE <= math.pi:
            raise ValueError(
                f"{days:g} days is no period of these waves, which need ω < |f|: more than 0.499 "
                "days at the poles, more the closer to the equator"
            )
        return days


class Ocean(Table):
    """Whose depths and stratification are used; the packaged ones unless told otherwise.

    Attributes
    ----------
    bathymetry, climatology : Path or None
        The user's own CF NetCDF files; None means the packaged data.
    temperature : {"in-situ", "potential", "conservative"} or None
        The kind of temperature in `climatology`; None means that the file says it.
    atlas : Path or None
        Modes of sections that `waveguide atlas` made, in place of the packaged ones.
    phase_speed_m_s : float or None
        One uniform phase speed in place of the real ocean, for idealised work.
    """

    bathymetry: DataFile | None = None
    climatology: DataFile | None = None
    temperature: Literal["in-situ", "potential", "conservative"] | None = None
    atlas: DataFile | None = None
    phase_speed_m_s: Annotated[Number, Field(ge=SLOWEST, le=FASTEST_BAROTROPIC)] | None = None

    @model_validator(mode="after")
    def _one_ocean(self) -> Ocean:
        files = self.bathymetry or self.climatology
        if self.phase_speed_m_s is not None and (files or self.atlas):
            raise ValueError("a uniform phase speed and files of the real ocean exclude each other")
        if self.atlas and files:
            raise ValueError(
                "an atlas has its own depths and stratification: leave bathymetry and climatology "
                "out, or leave atlas out to have flat-bottom modes of those files"
            )
        if self.temperature is not None and self.climatology is None:
            raise ValueError("temperature describes a climatology file, and none is given")
        return self

    @property
    def source(self) -> Literal["packaged", "own files", "uniform"]:
        """Where the speeds come from, in a word."""
        if self.phase_speed_m_s is not None:
            return "uniform"
        own = self.bathymetry or self.climatology or self.atlas
        return "own files" if own else "packaged"


class Output(Table):
    """What is written when an output folder is given.

    Attributes
    ----------
    formats : tuple of str
        Out of `Format`; all unless told otherwise.
    """

    formats: Annotated[tuple[Format, ...], AfterValidator(not_empty)] = get_args(Format)


class Scenario(Table):
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
    observations : tuple of Observation
    compare : Compare or None
    lookout : Lookout
    uncertainty : Uncertainty
    plan : Planning
    wind : Wind or None
        What `response` is driven by.
    """

    name: Name = "scenario"
    title: Name
    description: Prose = ""
    event: Event
    targets: Annotated[tuple[Target, ...], AfterValidator(not_empty)]
    waves: Waves
    ocean: Ocean = Ocean()
    output: Output = Output()
    observations: tuple[Observation, ...] = ()
    compare: Compare | None = None
    lookout: Lookout = Lookout()
    uncertainty: Uncertainty = Uncertainty()
    plan: Planning = Planning()
    wind: Wind | None = None

    @model_validator(mode="after")
    def _sound_observations(self) -> Scenario:
        check_observations(self.observations, self.compare)
        return self

    @model_validator(mode="after")
    def _distinct_names(self) -> Scenario:
        _require_distinct_names(self.targets)
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


class Comparison(Table):
    """A scenario as `compare` reads it: records come first, and an event need not be there.

    Attributes
    ----------
    name, title, description, waves, ocean, output, targets, lookout, uncertainty, plan
        As in a `Scenario`; targets, uncertainty and plan are not looked at.
    event : Event or None
        Its arrival is looked for in every record.
    observations : tuple of Observation
    compare : Compare
    """

    name: Name = "comparison"
    title: Name
    description: Prose = ""
    event: Event | None = None
    targets: tuple[Target, ...] = ()
    waves: Waves
    ocean: Ocean = Ocean()
    output: Output = Output()
    observations: Annotated[tuple[Observation, ...], AfterValidator(not_empty)]
    compare: Compare
    lookout: Lookout = Lookout()
    uncertainty: Uncertainty = Uncertainty()
    plan: Planning = Planning()
    wind: Wind | None = None

    @model_validator(mode="after")
    def _sound_observations(self) -> Comparison:
        check_observations(self.observations, self.compare)
        return self


class WindScenario(Table):
    """A scenario as `response` reads it: wind comes first, and an event need not be there.

    Attributes
    ----------
    name, title, description, targets, waves, ocean, output
        As in a `Scenario`.
    wind : Wind
    event, observations, compare, lookout, uncertainty, plan
        As in a `Scenario`; they are not looked at.
    """

    name: Name = "response"
    title: Name
    description: Prose = ""
    targets: Annotated[tuple[Target, ...], AfterValidator(not_empty)]
    waves: Waves
    ocean: Ocean = Ocean()
    output: Output = Output()
    wind: Wind
    event: Event | None = None
    observations: tuple[Observation, ...] = ()
    compare: Compare | None = None
    lookout: Lookout = Lookout()
    uncertainty: Uncertainty = Uncertainty()
    plan: Planning = Planning()

    @model_validator(mode="after")
    def _distinct_names(self) -> WindScenario:
        _require_distinct_names(self.targets)
        return self

    @model_validator(mode="after")
    def _real_ocean(self) -> WindScenario:
        if self.ocean.phase_speed_m_s is not None:
            raise ValueError(
                "a uniform phase speed does not say how wind couples to the mode; leave "
                "phase_speed_m_s out of [ocean]"
            )
        return self


def _require_distinct_names(targets: tuple[Target, ...]) -> None:
    names = [target.name for target in targets]
    twice = sorted({name for name in names if names.count(name) > 1})
    if twice:
        raise ValueError(
            f"the targets need distinct names, and {', '.join(map(repr, twice))} is given twice"
        )
