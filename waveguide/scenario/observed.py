"""The tables of a scenario file that name records and model output, and how to look at them."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Annotated, Literal

from pydantic import Field, model_validator

from waveguide.scenario.fields import DEEPEST, DataFile, Days, Name, Number, Position, Table

Quantity = Literal[
    "sea level",
    "dynamic height",
    "temperature",
    "isopycnal depth",
    "alongshore velocity",
    "bottom pressure",
]


class Observation(Table):
    """A record at one place, in a file.

    Attributes
    ----------
    name : str
    position : (lon, lat)
        Degrees east and north.
    file : Path
        CSV, CF NetCDF, or the plain layouts of the sea-level data centres.
    quantity : str
        Alongshore velocity is positive in the direction in which the wave travels.
    units : str or None
        None where the file says them.
    column : str or None
        Column or variable, or the station's name in a file of many; the name of the observation
        where none is given.
    depth_m : float
        Of the instrument, positive down.
    zone : "UTC" or None
        The zone of clock times that the file gives without one.
    fill : float or None
        A value that stands for a missing one, beside those that are known.
    pressure_column : str or None
        Air pressure (hPa) in the same file, for the inverse barometer.
    gradient_c_per_m : float or None
        Cooling downward at the instrument, for temperature; from the stratification where None.
    """

    name: Name
    position: Position
    file: DataFile
    quantity: Quantity = "sea level"
    units: Name | None = None
    column: Name | None = None
    depth_m: Annotated[Number, Field(ge=0.0, le=DEEPEST)] = 0.0
    zone: Literal["UTC"] | None = None
    fill: Number | None = None
    pressure_column: Name | None = None
    gradient_c_per_m: Annotated[Number, Field(gt=0.0, le=10.0)] | None = None

    @model_validator(mode="after")
    def _fits_quantity(self) -> Observation:
        if self.pressure_column is not None and self.quantity != "sea level":
            raise ValueError("air pressure corrects sea level, and this is another quantity")
        if self.gradient_c_per_m is not None and self.quantity != "temperature":
            raise ValueError("a gradient of temperature belongs to a record of temperature")
        return self


class Compare(Table):
    """How records are compared with theory.

    Attributes
    ----------
    band_days : (shortest, longest)
        Periods that are looked at.
    pairs : tuple of (upstream, downstream)
        Names of observations; each one and the next in the file where none are given.
    longest_lag_days : float or None
        Lags within ± this are searched; from the prediction and the band where None.
    """

    band_days: tuple[Days, Days]
    pairs: tuple[tuple[Name, Name], ...] = ()
    longest_lag_days: Days | None = None

    @model_validator(mode="after")
    def _rising_band(self) -> Compare:
        if self.band_days[0] >= self.band_days[1]:
            raise ValueError("band_days must rise, from the shortest to the longest period")
        return self


class Lookout(Table):
    """What to look for in model output.

    Attributes
    ----------
    variable : str or None
        Name of the variable; sea level where None.
    depth_m : float or None
        Which depth of a variable with a vertical axis.
    """

    variable: Name | None = None
    depth_m: Annotated[Number, Field(ge=0.0, le=DEEPEST)] | None = None


def check_observations(observations: Sequence[Observation], compare: Compare | None) -> None:
    """Refuse names that are given twice, and pairs of unknown names.

    Parameters
    ----------
    observations : sequence of Observation
    compare : Compare or None

    Raises
    ------
    ValueError
    """
    names = [observation.name for observation in observations]
    twice = sorted({name for name in names if names.count(name) > 1})
    if twice:
        raise ValueError(
            f"the observations need distinct names, and {', '.join(map(repr, twice))} is given "
            "twice"
        )
    asked = [] if compare is None else [name for pair in compare.pairs for name in pair]
    unknown = [name for name in dict.fromkeys(asked) if name not in names]
    if unknown:
        raise ValueError(
            f"compare.pairs names {', '.join(map(repr, unknown))}, which is no observation; the "
            f"observations are {', '.join(map(repr, names)) or 'none'}"
        )
