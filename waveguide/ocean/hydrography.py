"""Reading temperature and salinity climatologies of the user's own into N²."""

from __future__ import annotations

import re
from contextlib import ExitStack
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, get_args

import numpy as np
from numpy.typing import NDArray

from waveguide.errors import InputError
from waveguide.ocean.gridded import (
    HorizontalGrid,
    axis_name,
    horizontal_grid,
    metres_per_unit,
    open_grid,
    read_values,
)
from waveguide.ocean.seawater import (
    AxisKind,
    SalinityKind,
    TemperatureKind,
    conservative_temperature_absolute_salinity,
    layer_n2,
    layer_pressures,
    stabilise,
)
from waveguide.ocean.stratification import Climatology

if TYPE_CHECKING:
    import xarray as xr

Array = NDArray[np.float64]

TEMPERATURE_KINDS: dict[str, TemperatureKind] = {
    "sea_water_temperature": "in-situ",
    "sea_water_potential_temperature": "potential",
    "sea_water_conservative_temperature": "conservative",
}
SALINITY_KINDS: dict[str, SalinityKind] = {
    "sea_water_practical_salinity": "practical",
    "sea_water_salinity": "practical",
    "sea_water_absolute_salinity": "absolute",
}
TEMPERATURE_NAMES = (
    "t_an", "temperature", "temp", "thetao", "bigthetao", "theta", "potential_temperature",
    "conservative_temperature", "ptemp", "ct", "votemper", "water_temp", "t",
)
SALINITY_NAMES = ("s_an", "salinity", "salt", "so", "psal", "sa", "vosaline", "s")
PRESSURES = {"dbar": 1.0, "decibar": 1.0, "decibars": 1.0, "db": 1.0, "bar": 10.0, "pa": 1e-4}
"""Units of sea pressure (dbar)."""

KILOGRAM_PER_KILOGRAM = ("kg kg-1", "kg/kg", "kg kg**-1")
CELSIUS = r"(deg(ree)?s?[ _]?)?c(elsius)?"
KELVIN = r"(deg(ree)?s?[ _]?)?k(elvin)?"
DEPTH_LATITUDE = 45.0
"""Latitude at which a pressure axis is turned into depth: 0.3 % at most from the others."""


@dataclass(frozen=True)
class _Field:
    """A variable of a file on ascending lon, lat and depth or pressure."""

    name: str
    attributes: dict[str, object]
    grid: HorizontalGrid
    axis: AxisKind
    levels: Array
    values: Array
    notes: tuple[str, ...]


def read_climatology(
    path: str | Path,
    temperature: TemperatureKind | None = None,
    salinity: SalinityKind | None = None,
    *,
    salinity_path: str | Path | None = None,
    temperature_variable: str | None = None,
    salinity_variable: str | None = None,
) -> Climatology:
    """Read a temperature and salinity climatology and work out N² by TEOS-10.

    Axes of any order and direction, depth (m, km, cm) or pressure, global or regional, °C or
    K. A time axis is averaged and that is said in `notes`.

    Parameters
    ----------
    path : str or Path
        NetCDF file with temperature, and salinity unless `salinity_path` is given.
    temperature : {"in-situ", "potential", "conservative"}, optional
        Kind of temperature; not needed where the file's standard name says it.
    salinity : {"practical", "absolute"}, optional
        Kind of salinity; the same.
    salinity_path : str or Path, optional
        File with salinity, on the same grid.
    temperature_variable, salinity_variable : str, optional
        Names of the variables; found by themselves where the file leaves no doubt.

    Returns
    -------
    Climatology

    Raises
    ------
    InputError
        If a variable, an axis or a kind cannot be told, units are unknown, or values are no
        temperatures (°C, K) or salinities.
    DataError
        If a file cannot be read.
    """
    salt_path = path if salinity_path is None else salinity_path
    t = _field(path, TEMPERATURE_KINDS, TEMPERATURE_NAMES, temperature_variable, "temperature")
    s = _field(salt_path, SALINITY_KINDS, SALINITY_NAMES, salinity_variable, "salinity")
    if not _same_grid(t, s):
        raise InputError(
            f"climatology {path}: {t.name} and {s.name} are not on the same grid; interpolate "
            "one to the other"
        )
    t_kind, t_note = _kind(t, TEMPERATURE_KINDS, get_args(TemperatureKind), temperature,
                           "temperature", path)
    s_kind, s_note = _kind(s, SALINITY_KINDS, get_args(SalinityKind), salinity,
                           "salinity", salt_path)
    celsius, unit_note = _celsius(t, path)
    salt = s.values * (1e3 if _unit(s) in KILOGRAM_PER_KILOGRAM else 1.0)
    _plausible(t.name, celsius, -5.0, 45.0, path)
    _plausible(s.name, salt, 0.0, 60.0, salt_path)
    if np.nanmax(salt) < 1.0:
        raise InputError(f"climatology {salt_path}: {s.name} is nowhere above {np.nanmax(salt):g}, "
                         "which is fresh water; convert it to g/kg (or practical salinity)")
    depth, n2 = _depth_and_n2(t, celsius, salt, t_kind, s_kind)
    if not np.isfinite(n2).any():
        raise InputError(f"climatology {path}: no column has two levels with both {t.name} and "
                         f"{s.name}; give another file")
    notes = (*t.notes, *(n for n in s.notes if n not in t.notes), *t_note, *s_note, *unit_note)
    source = f"{path}, {t_kind} temperature {t.name}, {s_kind} salinity {s.name}"
    return Climatology(t.grid.lon, t.grid.lat, depth, n2.astype(np.float32), source, notes)


def _depth_and_n2(
    t: _Field, celsius: Array, salt: Array, t_kind: str, s_kind: str
) -> tuple[Array, Array]:
    """Depths halfway between the levels, and N² there."""
    import gsw

    pressure = layer_pressures(t.levels, t.grid.lat, t.axis)
    ct, sa = conservative_temperature_absolute_salinity(
        celsius, salt, pressure, t.grid.lon, t.grid.lat,
        t_kind, s_kind,  # type: ignore[arg-type]  # checked by _kind
    )
    levels = t.levels
    if t.axis == "pressure":
        levels = -np.asarray(gsw.z_from_p(levels, DEPTH_LATITUDE), float)
    n2 = stabilise(layer_n2(ct, sa, pressure, t.grid.lat), levels)
    return 0.5 * (levels[:-1] + levels[1:]), n2


def _same_grid(t: _Field, s: _Field) -> bool:
    """Whether two fields share axes, to 1e-4 of a degree and of a depth."""
    pairs = ((t.grid.lon, s.grid.lon), (t.grid.lat, s.grid.lat), (t.levels, s.levels))
    return t.axis == s.axis and all(
        a.shape == b.shape and np.allclose(a, b, rtol=1e-4, atol=1e-4) for a, b in pairs
    )


def _kind(
    field: _Field, known: dict[str, TemperatureKind] | dict[str, SalinityKind],
    allowed: tuple[str, ...], given: str | None, what: str, path: str | Path,
) -> tuple[str, tuple[str, ...]]:
    """The kind of temperature or salinity; what the user says goes before the file."""
    stated = known.get(str(field.attributes.get("standard_name", "")))
    if given is not None and given not in allowed:
        raise InputError(f"{what} = {given!r}: must be one of {', '.join(allowed)}")
    if given is None and stated is None:
        raise InputError(
            f"climatology {path}: {field.name} does not say which {what} it is; say so with "
            f"{what} = {' or '.join(repr(kind) for kind in allowed)}"
        )
    if given is not None and stated is not None and given != stated:
        return given, (f"{field.name}: taken as {given} as told, though the file says {stated}",)
    return given or str(stated), ()


def _unit(field: _Field) -> str:
    """Unit of a field in lower case, empty where there is none."""
    return str(field.attributes.get("units", "")).strip().lower().replace("°", "deg")


def _celsius(field: _Field, path: str | Path) -> tuple[Array, tuple[str, ...]]:
    """Temperature in °C."""
    unit = _unit(field)
    if re.fullmatch(CELSIUS, unit):
        return field.values, ()
    if re.fullmatch(KELVIN, unit):
        return field.values - 273.15, ()
    if unit:
        raise InputError(
            f"climatology {path}: {field.name} is in {unit!r}; convert it to degC or K"
        )
    kelvin = bool(np.nanmedian(field.values) > 200.0)
    note = f"{field.name}: no unit, taken as {'K' if kelvin else '°C'} by its values"
    return field.values - (273.15 if kelvin else 0.0), (note,)


def _plausible(name: str, values: Array, low: float, high: float, path: str | Path) -> None:
    """Refuse values that no sea water has, which a wrong unit or fill value gives."""
    known = values[np.isfinite(values)]
    if known.size == 0:
        raise InputError(f"climatology {path}: every value of {name} is missing")
    if known.min() < low or known.max() > high:
        raise InputError(
            f"climatology {path}: {name} runs from {known.min():g} to {known.max():g}, beyond "
            f"{low:g}..{high:g} of sea water; check its unit and its fill value"
        )


def _field(
    path: str | Path, standard_names: dict[str, TemperatureKind] | dict[str, SalinityKind],
    names: tuple[str, ...], chosen: str | None, what: str,
) -> _Field:
    """Read one variable, averaged over time, on ascending axes."""
    with ExitStack() as stack:
        dataset = stack.enter_context(open_grid(path))
        lon, lat = (axis_name(dataset, axis, path) for axis in ("longitude", "latitude"))
        across = [str(dataset[axis].dims[0]) for axis in (lat, lon)]
        variable = _variable(dataset, set(across), set(standard_names), names, chosen, what, path)
        vertical, times = _other_axes(dataset, variable, across, path)
        axis, levels = _levels(dataset[vertical], path)
        grid = horizontal_grid(
            np.asarray(dataset[lon].values, float), np.asarray(dataset[lat].values, float), path
        )
        ordered = variable.transpose(*times, vertical, *across)
        values = read_values(ordered, path).astype(float)
        name, attributes = str(variable.name), dict(variable.attrs)
    notes = []
    for dimension in times:
        if values.shape[0] > 1:
            notes.append(f"{name}: mean of {values.shape[0]} values along {dimension}")
        values = _mean(values)
    order = np.argsort(levels)
    return _Field(name, attributes, grid, axis, levels[order],
                  np.asarray(grid.apply(values[order]), float), tuple(notes))


def _mean(values: Array) -> Array:
    """Mean along the first axis of what is known there, NaN where nothing is."""
    number = np.isfinite(values).sum(axis=0)
    total = np.nansum(values, axis=0)
    return np.where(number > 0, total / np.maximum(number, 1), np.nan)


def _variable(
    dataset: xr.Dataset, across: set[str], standard_names: set[str], names: tuple[str, ...],
    chosen: str | None, what: str, path: str | Path,
) -> xr.DataArray:
    """The variable that holds temperature or salinity, by standard name, then by name."""
    ranks: dict[str, tuple[bool, int]] = {}
    for name, array in dataset.data_vars.items():
        usual = names.index(key) if (key := str(name).lower()) in names else len(names)
        stated = array.attrs.get("standard_name") in standard_names
        wanted = name == chosen if chosen is not None else stated or usual < len(names)
        if across <= set(map(str, array.dims)) and wanted:
            ranks[str(name)] = (not stated, usual)
    best = [name for name, rank in ranks.items() if rank == min(ranks.values())]
    if len(best) == 1:
        return dataset[best[0]]
    found = f"{what} could be {' or '.join(best)}" if best else f"no {what} on longitude, latitude"
    raise InputError(
        f"climatology {path}: {found}; the file holds {', '.join(map(str, dataset.variables))}: "
        f"name the one to use with {what}_variable"
    )


def _other_axes(
    dataset: xr.Dataset, variable: xr.DataArray, across: list[str], path: str | Path
) -> tuple[str, list[str]]:
    """The vertical dimension and those to be averaged (time, or of length 1)."""
    others = [str(d) for d in variable.dims if d not in across]
    times = [d for d in others if _is_time(dataset, d)]
    vertical = [d for d in others if d not in times and variable.sizes[d] > 1]
    if len(vertical) != 1:
        raise InputError(
            f"climatology {path}: {variable.name} has dimensions {', '.join(others)} besides "
            "longitude and latitude; one depth or pressure axis of at least 2 levels is needed"
        )
    return vertical[0], [d for d in others if d != vertical[0]]


def _is_time(dataset: xr.Dataset, dimension: str) -> bool:
    """Whether a dimension is time."""
    attributes = dataset[dimension].attrs if dimension in dataset.variables else {}
    return (
        attributes.get("standard_name") == "time"
        or attributes.get("axis") == "T"
        or " since " in str(attributes.get("units", ""))
        or re.fullmatch(r"time.*|month.*|season.*", dimension.lower()) is not None
    )


def _levels(axis: xr.DataArray, path: str | Path) -> tuple[AxisKind, Array]:
    """Kind and values (m or dbar, positive down) of the vertical axis."""
    name, standard = str(axis.name), str(axis.attrs.get("standard_name", ""))
    values = np.asarray(axis.values, float)
    if not axis.coords or "sigma" in standard or "ocean_s" in standard or "hybrid" in standard:
        raise InputError(
            f"climatology {path}: the vertical axis {name} is neither depth nor pressure; "
            "interpolate to levels of depth first"
        )
    unit = str(axis.attrs.get("units", "")).strip().lower()
    if standard == "sea_water_pressure" or unit in PRESSURES:
        kind: AxisKind = "pressure"
        values = values * PRESSURES.get(unit or "dbar", np.nan)
    else:
        kind = "depth"
        values = np.abs(values * metres_per_unit(dict(axis.attrs), name, path))
    steps = np.diff(values)
    if not np.isfinite(values).all() or not (np.all(steps > 0) or np.all(steps < 0)):
        raise InputError(
            f"climatology {path}: the vertical axis {name} ({unit or 'no unit'}) is not "
            "monotonic depth or pressure; repair it"
        )
    return kind, values
