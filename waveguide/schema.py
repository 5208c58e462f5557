"""One table of the variables the package stores, and the check that holds results to it.

Units are those UDUNITS reads; names and attributes follow the CF conventions 1.11.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from waveguide.errors import WaveguideError
from waveguide.stored import Arrays, Column, Stored

if TYPE_CHECKING:
    import xarray as xr

Kind = Literal["text", "integer", "number", "date"]

CAUTION = (
    "A linear-theory estimate for research and planning. It is no warning system: for tsunami, "
    "storm surge, navigation or public safety follow the responsible national service and "
    "licensed practice."
)
"""Shown with every result."""

_KINDS: dict[Kind, str] = {"text": "UOT", "integer": "i", "number": "f", "date": "M"}
"""NumPy's dtype kinds that hold each kind of variable."""


class SchemaError(WaveguideError, ValueError):
    """A dataset is not what the table of stored variables declares."""


@dataclass(frozen=True)
class Variable:
    """The declaration of a stored variable.

    Parameters
    ----------
    dims : tuple of str
    kind : {"text", "integer", "number", "date"}
    long_name : str
        What it is, in plain words.
    units : str or None
        As UDUNITS reads it; None for texts, indices and dates.
    standard_name : str or None
        The CF standard name, where there is one.
    coordinate : bool
        Whether it says where, rather than what.
    """

    dims: tuple[str, ...]
    kind: Kind
    long_name: str
    units: str | None = None
    standard_name: str | None = None
    coordinate: bool = False

    def attributes(self) -> dict[str, str]:
        """The CF attributes of the variable."""
        named = {
            "long_name": self.long_name,
            "units": self.units,
            "standard_name": self.standard_name,
        }
        return {key: value for key, value in named.items() if value is not None}


def _longitude(dim: str, what: str) -> Variable:
    return Variable((dim,), "number", f"longitude of {what}", "degrees_east", "longitude", True)


def _latitude(dim: str, what: str) -> Variable:
    return Variable((dim,), "number", f"latitude of {what}", "degrees_north", "latitude", True)


def _number(dims: tuple[str, ...], long_name: str, units: str) -> Variable:
    return Variable(dims, "number", long_name, units)


_ROW = ("target", "mode")
_ROUTE, _LEG, _VERTEX = ("route",), ("leg",), ("vertex",)
_INSTRUMENT = ("instrument",)
_REMARK = ("remark",)

ARRIVALS: dict[str, Variable] = {
    "target": Variable(("target",), "text", "name of the target", coordinate=True),
    "mode": Variable(
        ("mode",), "integer", "mode number, 0 barotropic, 1 and up baroclinic", "1", None, True
    ),
    "target_longitude": _longitude("target", "the target"),
    "target_latitude": _latitude("target", "the target"),
    "status": Variable(_ROW, "text", "reached, or why there is no arrival"),
    "front_time_days": _number(_ROW, "time from the start of the event to the front", "day"),
    "front_date": Variable(_ROW, "date", "date of the front (UTC)", None, "time"),
    "half_height_time_days": _number(
        _ROW, "time from the start of the event until half of the peak is first reached", "day"
    ),
    "peak_time_days": _number(_ROW, "time from the start of the event to the peak", "day"),
    "centroid_time_days": _number(
        _ROW, "time from the start of the event to the centroid of squared sea level", "day"
    ),
    "peak_ratio": _number(
        _ROW,
        "peak of sea level at the target over that at the source, all routes together; negative "
        "where one is a rise and the other a lowering", "1",
    ),
    "amplitude_ratio": _number(
        _ROW, "sea level at the target over that at the source at the dominant period", "1"
    ),
    "amplitude_m": _number(_ROW, "peak of sea level at the target", "m"),
    "path_length_km": _number(_ROW, "length of the route", "km"),
    "mean_speed_m_s": _number(_ROW, "length of the route over the time of the front", "m s-1"),
    "source_distance_km": _number(_ROW, "distance from the source to the guide", "km"),
    "source_distance_radii": _number(
        _ROW, "distance from the source to the guide in deformation radii", "1"
    ),
    "source_factor": _number(_ROW, "amplitude factor for the source's distance", "1"),
    "target_distance_km": _number(_ROW, "distance from the target to the guide", "km"),
    "target_distance_radii": _number(
        _ROW, "distance from the target to the guide in deformation radii", "1"
    ),
    "target_factor": _number(_ROW, "amplitude factor for the target's distance", "1"),
    "frequency_over_f": _number(_ROW, "largest ω/|f| on the coasts of the route", "1"),
    "coast_radius_radii": _number(
        _ROW, "radius of curvature of the coast in deformation radii, smaller on 5 % of it", "1"
    ),
    "basin_width_radii": _number(
        _ROW, "width of the water beside the coast in deformation radii (5 at most), less on 5 %",
        "1",
    ),
    "speed_change": _number(
        _ROW, "relative change of the phase speed over a wavelength/2π, more on 5 % of the way", "1"
    ),
    "critical_share": _number(
        _ROW, "share of the coastal way that is poleward and below the critical frequency", "1"
    ),
    "narrowest_strait_km": _number(_ROW, "width of the narrowest strait of the route", "km"),
    "northernmost_latitude": _number(_ROW, "northernmost latitude of the route", "degrees_north"),
    "southernmost_latitude": _number(_ROW, "southernmost latitude of the route", "degrees_north"),
    "upper_ocean_share": _number(
        _ROW, "share of the phase speed from the upper 100 m, which seasons change", "1"
    ),
    "caution": Variable(_ROW, "text", "cautions, separated by '; '"),
    "remark_target": Variable(_REMARK, "integer", "index of the caution's target"),
    "remark_mode": Variable(_REMARK, "integer", "index of the caution's mode along mode"),
    "remark_kind": Variable(_REMARK, "text", "kind of the caution"),
    "remark_number": _number(_REMARK, "number of the caution, in its own unit", "1"),
    "remark_unit": Variable(_REMARK, "text", "unit of the number"),
    "route_target": Variable(_ROUTE, "integer", "index of the route's target"),
    "route_mode": Variable(_ROUTE, "integer", "index of the route's mode along mode"),
    "route_kind": Variable(_ROUTE, "text", "earliest, strongest or alternative"),
    "route_via": Variable(_ROUTE, "text", "what tells the route from the others"),
    "route_front_time_days": _number(_ROUTE, "time of the front by this route", "day"),
    "route_amplitude_ratio": _number(_ROUTE, "amplitude ratio by this route", "1"),
    "route_length_km": _number(_ROUTE, "length of the route", "km"),
    "leg_route": Variable(_LEG, "integer", "index of the leg's route"),
    "leg_kind": Variable(
        _LEG, "text", "attachment, coast, equator, strait, facing coast or opening"
    ),
    "leg_from_longitude": _longitude("leg", "the start of the leg"),
    "leg_from_latitude": _latitude("leg", "the start of the leg"),
    "leg_to_longitude": _longitude("leg", "the end of the leg"),
    "leg_to_latitude": _latitude("leg", "the end of the leg"),
    "leg_length_km": _number(_LEG, "length of the leg", "km"),
    "leg_time_days": _number(_LEG, "time the front takes along the leg", "day"),
    "leg_phase_speed_m_s": _number(_LEG, "length of the leg over its time", "m s-1"),
    "leg_amplitude_factor": _number(_LEG, "amplitude at the end over that at the start", "1"),
    "leg_energy_share": _number(_LEG, "energy at the end of the leg over that at the source", "1"),
    "leg_lost_rossby": _number(_LEG, "share of the source's energy radiated as Rossby waves", "1"),
    "leg_lost_friction": _number(_LEG, "share of the source's energy lost to bottom friction", "1"),
    "leg_lost_damping": _number(_LEG, "share of the source's energy lost to damping", "1"),
    "leg_lost_scattering": _number(_LEG, "share of the source's energy scattered", "1"),
    "leg_other_ways": _number(
        _LEG, "share of the source's energy that goes other ways at junctions and gaps", "1"
    ),
    "leg_critical_period_days": _number(
        _LEG, "typical critical period of the poleward part of the leg", "day"
    ),
    "leg_quasi_simultaneous": Variable(
        _LEG, "integer", "1 where most of the leg is below its critical frequency, else 0", "1"
    ),
    "vertex_leg": Variable(_VERTEX, "integer", "index of the vertex's leg"),
    "vertex_longitude": _longitude("vertex", "the vertex"),
    "vertex_latitude": _latitude("vertex", "the vertex"),
    "vertex_distance_km": _number(_VERTEX, "distance from the source along the route", "km"),
    "vertex_time_days": _number(_VERTEX, "time of the front at the vertex", "day"),
    "vertex_taken": _number(
        ("vertex", "fate"), "share of the source's energy taken up to the vertex, by fate", "1"
    ),
    "fate_name": Variable(("fate",), "text", "what becomes of energy on the way", coordinate=True),
    "instrument_target": Variable(_INSTRUMENT, "integer", "index of the instrument's target"),
    "instrument_mode": Variable(_INSTRUMENT, "integer", "index of the mode along mode"),
    "instrument_guide_ratio": _number(
        _INSTRUMENT, "peak of sea level on the guide beside the mooring over that at the source",
        "1",
    ),
    "instrument_depth_m": _number(_INSTRUMENT, "depth of the instrument", "m"),
    "instrument_offshore_km": _number(
        _INSTRUMENT, "distance of the mooring from the shore, or from the equator", "km"
    ),
    "instrument_bottom_m": _number(_INSTRUMENT, "depth of the water at the mooring", "m"),
    "instrument_structure": Variable(
        _INSTRUMENT, "text", "section, flat bottom or equator, or why there is no structure"
    ),
    "instrument_displacement_m_per_cm": _number(
        _INSTRUMENT, "rise of isopycnals per sea level on the guide", "m cm-1"
    ),
    "instrument_displacement_lag_degrees": _number(
        _INSTRUMENT, "phase by which it lags sea level on the guide", "degree"
    ),
    "instrument_current_cm_s_per_cm": _number(
        _INSTRUMENT, "current in the direction of travel per sea level on the guide", "cm s-1 cm-1"
    ),
    "instrument_current_lag_degrees": _number(
        _INSTRUMENT, "phase by which it lags sea level on the guide", "degree"
    ),
    "instrument_towards_degrees": _number(
        _INSTRUMENT, "azimuth of travel, to which a positive current flows", "degree"
    ),
    "instrument_bottom_pressure_cm_per_cm": _number(
        _INSTRUMENT, "bottom pressure, as height of water, per sea level on the guide", "cm cm-1"
    ),
    "instrument_bottom_pressure_lag_degrees": _number(
        _INSTRUMENT, "phase by which it lags sea level on the guide", "degree"
    ),
    "instrument_best_depth_m": _number(
        _INSTRUMENT, "depth where the mode stands out most from internal waves", "m"
    ),
    "time": Variable(("time",), "date", "date of the waveforms (UTC)", None, "time", True),
    "time_days": _number(("time",), "time from the start of the event", "day"),
    "source_waveform": _number(("time",), "sea level at the source over its peak", "1"),
    "waveform": _number(
        ("target", "mode", "time"), "sea level at the target over the peak at the source", "1"
    ),
    "waveform_sum": _number(
        ("target", "time"),
        "sea level of all modes, each weighted by its share in the sea level at the source", "1",
    ),
    "mode_share": _number(("mode",), "share of the mode in the sea level at the source", "1"),
}
"""Arrivals: one row for each target and mode, reached or not, and the routes behind them.

Routes, legs and vertices are ragged: each carries the index of what it belongs to, in rising
order, the vertices of a leg and the legs of a route in the order of travel.
"""

ARRIVALS_ATTRIBUTES = (
    "Conventions",
    "title",
    "summary",
    "scenario",
    "event_name",
    "event_start",
    "event_duration_days",
    "event_amplitude_m",
    "source_longitude",
    "source_latitude",
    "period_days",
    "ocean",
    "source",
    "history",
    "data_sha256",
    "caution",
)
"""Global attributes of the arrivals; `source` is the software, in the sense of CF."""

VALIDITY = (
    "frequency_over_f", "coast_radius_radii", "basin_width_radii", "speed_change",
    "critical_share", "narrowest_strait_km", "northernmost_latitude", "southernmost_latitude",
    "upper_ocean_share",
)  # fmt: skip
"""Variables that say how far an answer is from what the theory assumes."""

REMARKS = ("caution", *(name for name, v in ARRIVALS.items() if v.dims == _REMARK))
"""Variables of the cautions, which a plan repeats."""

_PARENTS = {
    "route_target": "target",
    "route_mode": "mode",
    "leg_route": "route",
    "vertex_leg": "leg",
    "remark_target": "target",
    "remark_mode": "mode",
    "instrument_target": "target",
    "instrument_mode": "mode",
}


def assemble(
    values: Mapping[str, ArrayLike],
    attributes: Mapping[str, Any],
    table: Mapping[str, Variable] = ARRIVALS,
) -> xr.Dataset:
    """Put arrays into a dataset with the dimensions, types and attributes of a table.

    Its parameters and errors are those of :func:`arranged`.

    Returns
    -------
    xarray.Dataset
        Not yet checked: see :func:`check`.
    """
    return arranged(values, attributes, table).dataset()


def arranged(
    values: Mapping[str, ArrayLike],
    attributes: Mapping[str, Any],
    table: Mapping[str, Variable] = ARRIVALS,
) -> Arrays:
    """Give arrays the dimensions, types and attributes of a table.

    Parameters
    ----------
    values : mapping of str to array_like
        One array for each variable of `table`.
    attributes : mapping
        The global attributes.
    table : mapping of str to Variable

    Returns
    -------
    Arrays
        Not yet checked: see :func:`check`.

    Raises
    ------
    SchemaError
        Where a variable of the table has no values, or a value has no variable.
    """
    if set(values) != set(table):
        raise SchemaError(_difference(set(table), set(values)))
    columns = {
        name: Column(variable.dims, _typed(values[name], variable.kind), variable.attributes())
        for name, variable in table.items()
    }
    coordinates = [name for name, variable in table.items() if variable.coordinate]
    return Arrays(columns, coordinates, dict(attributes))


def check(dataset: Stored) -> None:
    """Refuse arrivals that are not what the table declares.

    Parameters
    ----------
    dataset : xarray.Dataset or Arrays

    Raises
    ------
    SchemaError
        With every difference: names, dimensions, types, units, global attributes, indices out of
        range or order, and rows that are reached without a time or not reached with one.
    """
    names = {str(name) for name in dataset.variables}
    problems = [] if names == set(ARRIVALS) else [_difference(set(ARRIVALS), names)]
    for name in sorted(names & set(ARRIVALS)):
        problems += _variable_problems(name, dataset[name], ARRIVALS[name])
    absent = [name for name in ARRIVALS_ATTRIBUTES if name not in dataset.attrs]
    if absent:
        problems.append(f"global attributes missing: {', '.join(absent)}")
    if not problems:
        problems = _index_problems(dataset) + _row_problems(dataset)
    if problems:
        raise SchemaError("; ".join(problems))


def _difference(wanted: set[str], given: set[str]) -> str:
    parts = {"missing": sorted(wanted - given), "not declared": sorted(given - wanted)}
    return "variables " + "; ".join(f"{k}: {', '.join(v)}" for k, v in parts.items() if v)


def _typed(values: ArrayLike, kind: Kind) -> NDArray[Any]:
    dtype: dict[Kind, Any] = {"text": str, "integer": np.int64, "number": np.float64}
    return np.asarray(values, dtype=dtype.get(kind, "datetime64[ns]"))


def _variable_problems(name: str, array: xr.DataArray | Column, variable: Variable) -> list[str]:
    problems = []
    if array.dims != variable.dims:
        problems.append(f"{name} has dimensions {array.dims}, not {variable.dims}")
    if array.values.dtype.kind not in _KINDS[variable.kind]:
        problems.append(f"{name} has type {array.values.dtype}, not {variable.kind}")
    if variable.units is not None and array.attrs.get("units") != variable.units:
        problems.append(f"{name} has units {array.attrs.get('units')}, not {variable.units}")
    return problems


def _index_problems(dataset: Stored) -> list[str]:
    problems = []
    for name, parent in _PARENTS.items():
        index = dataset[name].values
        if index.size and not 0 <= index.min() <= index.max() < dataset.sizes[parent]:
            problems.append(f"{name} points outside {parent}")
        if name in ("leg_route", "vertex_leg") and np.any(np.diff(index) < 0):
            problems.append(f"{name} does not rise")
    return problems


def _row_problems(dataset: Stored) -> list[str]:
    reached = dataset["status"].values == "reached"
    problems = []
    for name in ("front_time_days", "path_length_km", "amplitude_ratio"):
        if np.any(np.isfinite(dataset[name].values) != reached):
            problems.append(f"{name} is finite where the target is not reached, or the other way")
    return problems
