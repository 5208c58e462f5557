"""What the variables of a wind file are: wind or stress, their components and units."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Literal

from waveguide.errors import InputError

if TYPE_CHECKING:
    import xarray as xr

Quantity = Literal["wind", "stress"]

UNITS: dict[Quantity, dict[str, float]] = {
    "wind": {
        "m/s": 1.0, "ms-1": 1.0, "meters/second": 1.0, "metres/second": 1.0, "meter/second": 1.0,
        "metre/second": 1.0, "meterssecond-1": 1.0, "m/sec": 1.0, "msec-1": 1.0,
        "cm/s": 0.01, "cms-1": 0.01, "km/h": 1.0 / 3.6, "kmh-1": 1.0 / 3.6,
        "knot": 0.514444, "knots": 0.514444, "kt": 0.514444, "kts": 0.514444, "kn": 0.514444,
    },
    "stress": {
        "n/m2": 1.0, "nm-2": 1.0, "pa": 1.0, "pascal": 1.0, "newton/m2": 1.0, "newtonm-2": 1.0,
        "kgm-1s-2": 1.0, "dyn/cm2": 0.1, "dyncm-2": 0.1, "dyne/cm2": 0.1, "dynecm-2": 0.1,
        "dynes/cm2": 0.1,
    },
}
"""SI value of the units of each quantity, written without blanks, dots, carets and asterisks."""

_STANDARD_NAMES: dict[tuple[Quantity, int], tuple[str, ...]] = {
    ("wind", 0): ("eastward_wind", "x_wind", "grid_eastward_wind"),
    ("wind", 1): ("northward_wind", "y_wind", "grid_northward_wind"),
    ("stress", 0): ("surface_downward_eastward_stress", "surface_downward_x_stress",
                    "downward_eastward_stress_at_sea_water_surface",
                    "downward_x_stress_at_sea_water_surface"),
    ("stress", 1): ("surface_downward_northward_stress", "surface_downward_y_stress",
                    "downward_northward_stress_at_sea_water_surface",
                    "downward_y_stress_at_sea_water_surface"),
}

_NAMES: dict[tuple[Quantity, int], str] = {
    ("wind", 0): r"u|u_?10(m|n)?|(10|1000)?u|uwnd|u_?wind|ugrd.*|uas|zonal wind|eastward wind",
    ("wind", 1): r"v|v_?10(m|n)?|(10|1000)?v|vwnd|v_?wind|vgrd.*|vas|meridional wind|"
                 r"northward wind",
    ("stress", 0): r"tau_?(x|u)|tauuo?|taux|zonal (wind )?stress|eastward (wind )?stress",
    ("stress", 1): r"tau_?(y|v)|tauvo?|tauy|meridional (wind )?stress|northward (wind )?stress",
}


@dataclass(frozen=True)
class Components:
    """The two variables of a file that are read.

    Attributes
    ----------
    quantity : {"wind", "stress"}
    names : (str, str)
        Eastward and northward variable.
    scale : float
        SI value of their unit.
    """

    quantity: Quantity
    names: tuple[str, str]
    scale: float


def find_components(
    dataset: xr.Dataset, path: str | Path, quantity: Quantity | None = None,
    names: tuple[str | None, str | None] = (None, None), units: str | None = None,
) -> Components:
    """The components of wind or stress in a file.

    Parameters
    ----------
    dataset : xarray.Dataset
    path : str or Path
        For the messages.
    quantity : {"wind", "stress"} or None
        What they are, where the attributes do not say it.
    names : (str or None, str or None)
        Names of the variables, where the attributes do not tell them.
    units : str or None
        Units in place of the attribute.

    Returns
    -------
    Components

    Raises
    ------
    InputError
        If they are not there, or their units are not those of the quantity.
    """
    chosen = _by_name(dataset, path, names) or _by_attributes(dataset, path, quantity)
    found = {units or str(dataset[name].attrs.get("units", "")) for name in chosen}
    if len(found) > 1:
        raise InputError(
            f"data file {path}: {chosen[0]} and {chosen[1]} have different units "
            f"({', '.join(sorted(found))}); convert one of them"
        )
    unit = found.pop()
    kind, scale = _parsed(unit, path, chosen, quantity)
    for name in chosen:
        _require_agreement(kind, str(dataset[name].attrs.get("standard_name", "")), name, path)
    return Components(kind, chosen, scale)


def _by_name(
    dataset: xr.Dataset, path: str | Path, names: tuple[str | None, str | None]
) -> tuple[str, str] | None:
    """The variables that the scenario names, if it does."""
    eastward, northward = names
    if eastward is None or northward is None:
        return None
    absent = [name for name in (eastward, northward) if name not in dataset.data_vars]
    if absent:
        raise InputError(
            f"data file {path}: there is no variable {' and '.join(map(repr, absent))}; it has "
            f"{', '.join(map(str, dataset.data_vars))}"
        )
    return eastward, northward


def _by_attributes(
    dataset: xr.Dataset, path: str | Path, quantity: Quantity | None
) -> tuple[str, str]:
    """The variables that tell by standard name, name or long name what they are."""
    kinds: tuple[Quantity, ...] = (quantity,) if quantity else ("stress", "wind")
    for kind in kinds:
        pair = [_matching(dataset, kind, component) for component in (0, 1)]
        if all(len(names) == 1 for names in pair):
            return pair[0][0], pair[1][0]
    raise InputError(
        f"data file {path}: no pair of eastward and northward {quantity or 'wind or stress'} is "
        f"recognised among {', '.join(map(str, dataset.data_vars))}; name the variables with "
        'eastward = "…" and northward = "…" in [wind]'
    )


def _matching(dataset: xr.Dataset, quantity: Quantity, component: int) -> list[str]:
    """Variables that could be a component, those with a fitting standard name alone if any."""
    key = (quantity, component)
    sure, likely = [], []
    for name, variable in dataset.data_vars.items():
        texts = (str(name).lower(), str(variable.attrs.get("long_name", "")).lower())
        if variable.attrs.get("standard_name") in _STANDARD_NAMES[key]:
            sure.append(str(name))
        elif any(re.fullmatch(_NAMES[key], text) for text in texts):
            likely.append(str(name))
    return sure or likely


def _parsed(
    unit: str, path: str | Path, names: tuple[str, str], quantity: Quantity | None
) -> tuple[Quantity, float]:
    """Quantity and SI value of a unit."""
    word = re.sub(r"[\s.^*·_]", "", unit.lower()).replace("²", "2").replace("⁻", "-")
    for kind, known in UNITS.items():
        if word in known:
            if quantity not in (None, kind):
                raise InputError(
                    f"data file {path}: {names[0]} and {names[1]} are in {unit!r}, which is a unit "
                    f"of {kind}, and the scenario says quantity = {quantity!r}; correct one of them"
                )
            return kind, known[word]
    raise InputError(
        f"data file {path}: the units of {names[0]} and {names[1]}, {unit!r}, are neither of wind "
        f"(m/s, knots, …) nor of stress (Pa, N m-2, dyn/cm2); give them with units in [wind], "
        "after dividing sums over a period by its length"
    )


def _require_agreement(kind: Quantity, standard_name: str, name: str, path: str | Path) -> None:
    """Refuse units that contradict the standard name."""
    says: Quantity | None = None
    if "stress" in standard_name:
        says = "stress"
    elif "wind" in standard_name:
        says = "wind"
    if says not in (None, kind):
        raise InputError(
            f"data file {path}: {name} has the standard name {standard_name!r} but units of "
            f"{kind}; correct the attribute that is wrong"
        )
