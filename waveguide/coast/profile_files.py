"""A person's own section and stratification from CSV files."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from waveguide.coast.section_modes import Column
from waveguide.errors import DataError, InputError
from waveguide.ocean.seawater import (
    MINIMUM_N2,
    conservative_temperature_absolute_salinity,
    layer_n2,
    layer_pressures,
    stabilise,
)

Array = NDArray[np.float64]

DISTANCES = {"offshore_km": 1e3, "offshore_m": 1.0}
"""Columns that may hold the offshore distance, and metres per unit."""

WIDEST, DEEPEST = 2e7, 12e3
"""Half-way round the earth, and below the deepest trench (m): beyond them a unit is wrong."""

DEPTHS = ("depth_m", "depth", "z")
TEMPERATURES, SALINITIES, FREQUENCIES = ("temperature",), ("salinity",), ("n2",)


def read_table(path: Path, what: str) -> dict[str, Array]:
    """Columns of a CSV file with a line of names.

    Parameters
    ----------
    path : Path
    what : str
        What the file should hold, for the messages.

    Returns
    -------
    dict of str to ndarray, shape (n,)
        By name in lower case; NaN where a cell is empty.

    Raises
    ------
    InputError
        If there is no such file, no line of names, a line of another length, or a cell that is
        no number.
    DataError
        If the file cannot be read as text.
    """
    if not path.is_file():
        raise InputError(f"{what} {path}: no such file; give the path of a CSV file")
    try:
        text = path.read_text("utf-8-sig")
        lines = [line for line in text.splitlines() if line.strip() and not line.startswith("#")]
        rows = [[cell.strip() for cell in row] for row in csv.reader(lines)]
    except (OSError, UnicodeDecodeError, csv.Error) as error:
        raise DataError(
            f"{what} {path}: it cannot be read as text ({error}); save it as CSV in UTF-8"
        ) from None
    if not rows or any(_is_number(cell) for cell in rows[0]):
        raise InputError(
            f"{what} {path}: the first line must name the columns, for example "
            f"{'offshore_km,depth_m' if what == 'profile' else 'depth,temperature,salinity'}"
        )
    if len(rows[0]) == 1 and any(separator in rows[0][0] for separator in ";\t"):
        raise InputError(
            f"{what} {path}: the names {rows[0][0]!r} are not separated by commas; separate "
            "columns with commas, and write decimals with a point"
        )
    return _columns(rows[0], rows[1:], f"{what} {path}")


def _columns(names: list[str], rows: list[list[str]], file: str) -> dict[str, Array]:
    values = np.full((len(rows), len(names)), np.nan)
    problems = []
    for number, row in enumerate(rows):
        if len(row) != len(names):
            problems.append(
                f"{file}: row {number + 1} has {len(row)} values where {len(names)} columns are "
                "named; separate values with commas"
            )
            continue
        for column, cell in enumerate(row):
            if _is_number(cell):
                values[number, column] = float(cell)
            elif cell:
                problems.append(f"{file}: {cell!r} in row {number + 1} is no number")
    if len(rows) < 2:
        problems.append(f"{file}: {len(rows)} rows of numbers; give at least two")
    if problems:
        raise InputError(problems[:5])
    return {name.lower(): values[:, column] for column, name in enumerate(names)}


def _is_number(cell: str) -> bool:
    try:
        float(cell)
    except ValueError:
        return False
    return True


def _one(table: dict[str, Array], names: tuple[str, ...], file: str) -> Array:
    for name in names:
        if name in table:
            return table[name]
    raise InputError(
        f"{file}: no column {' or '.join(names)} among {', '.join(table)}; name it so"
    )


def read_profile(path: Path) -> tuple[Array, Array]:
    """Offshore distance and depth from a CSV file.

    Parameters
    ----------
    path : Path
        With columns ``offshore_km`` (or ``offshore_m``) and ``depth_m``.

    Returns
    -------
    offshore, depth : ndarray, shape (n,)
        Metres, as they stand in the file.

    Raises
    ------
    InputError
        If the file has not these columns, or they are in another unit.
    """
    table = read_table(path, "profile")
    distance = _one(table, tuple(DISTANCES), f"profile {path}")
    name, unit = next((name, scale) for name, scale in DISTANCES.items() if name in table)
    depth = _one(table, DEPTHS[:2], f"profile {path}")
    if np.any(distance * unit > WIDEST):
        raise InputError(
            f"profile {path}: {name} reaches {np.nanmax(distance):g}, farther than across any "
            "ocean; name the column offshore_m if it is in metres"
        )
    if np.any(depth > DEEPEST):
        raise InputError(
            f"profile {path}: depth reaches {np.nanmax(depth):g}, deeper than any trench; "
            "give it in metres"
        )
    return distance * unit, depth


def read_stratification(path: Path, lon: float, lat: float) -> Column:
    """Stratification from a CSV file.

    Parameters
    ----------
    path : Path
        With columns ``z`` or ``depth`` (m, positive down) and ``n2`` (1/s²), or with ``depth``,
        ``temperature`` (in situ, °C) and ``salinity`` (practical).
    lon, lat : float
        Position, degrees; TEOS-10 needs it.

    Returns
    -------
    Column

    Raises
    ------
    InputError
        If columns are missing, or depths are not increasing downward or have holes.
    """
    file = f"stratification {path}"
    table = read_table(path, "stratification")
    depth = _one(table, DEPTHS, file)
    from_n2 = FREQUENCIES[0] in table
    names = FREQUENCIES if from_n2 else (*TEMPERATURES, *SALINITIES)
    values = [_one(table, (name,), file) for name in names]
    holes = sum(int(np.isnan(column).sum()) for column in (depth, *values))
    if holes:
        raise InputError(f"{file}: {holes} empty cells; fill them, or leave those depths out")
    if np.all(depth <= 0.0) and np.any(depth < 0.0):
        raise InputError(
            f"{file}: depths are negative; depth is positive down here, change the sign"
        )
    if depth[0] < 0.0 or np.any(np.diff(depth) <= 0.0):
        raise InputError(
            f"{file}: depths must increase downward from 0 or more, without duplicates; sort them"
        )
    if from_n2:
        return _from_n2(depth, values[0], file)
    return column_from_water(depth, values[0], values[1], lon, lat, file)


def _from_n2(depth: Array, n2: Array, file: str) -> Column:
    """N² as given; unstable parts are mixed."""
    if not np.any(n2 > 0.0):
        raise InputError(f"{file}: n2 is nowhere positive; give it in 1/s², such as 1e-4")
    if n2.max() > 1.0:
        raise InputError(
            f"{file}: n2 reaches {n2.max():g} 1/s², which no sea has; give N² in 1/s², such as 1e-4"
        )
    middle = 0.5 * (depth[1:] + depth[:-1])
    levels = np.concatenate([depth[:1] - (middle[0] - depth[0]), middle,
                             depth[-1:] + (depth[-1] - middle[-1])])
    return Column(depth, stabilise(n2, levels), float(depth[-1]), file, _mixed(n2))


def column_from_water(
    depth: Array, temperature: Array, salinity: Array, lon: float, lat: float, file: str
) -> Column:
    """N² by TEOS-10 halfway between the depths; unstable parts are mixed.

    Parameters
    ----------
    depth : ndarray, shape (n,)
        Increasing (m).
    temperature, salinity : ndarray, shape (n,)
        In situ (°C) and practical.
    lon, lat : float
        Position, degrees.
    file : str
        Where it is from, for the messages.

    Returns
    -------
    Column

    Raises
    ------
    InputError
        If values are none of sea water, or there are fewer than three.
    """
    for name, values, low, high in (
        ("temperature", temperature, -5.0, 45.0), ("salinity", salinity, 0.0, 60.0),
    ):
        if values.min() < low or values.max() > high:
            raise InputError(
                f"{file}: {name} runs from {values.min():g} to {values.max():g}, beyond "
                f"{low:g}..{high:g} of sea water; give °C and practical salinity"
            )
    if depth.size < 3:
        raise InputError(f"{file}: {depth.size} depths; N² needs at least three")
    lats = np.array([lat])
    pressure = layer_pressures(depth, lats, "depth")
    ct, sa = conservative_temperature_absolute_salinity(
        temperature[:, None, None], salinity[:, None, None], pressure, np.array([lon]), lats,
        "in-situ", "practical",
    )
    n2 = layer_n2(ct, sa, pressure, lats)[:, 0, 0]
    notes = ("temperature taken as in situ (°C), salinity as practical", *_mixed(n2))
    middle = 0.5 * (depth[1:] + depth[:-1])
    return Column(middle, stabilise(n2, depth), float(depth[-1]), file, notes)


def _mixed(n2: Array) -> tuple[str, ...]:
    """What was done to an unstable profile."""
    unstable = int((n2 < 0.0).sum())
    if not unstable:
        return ()
    return (
        f"stratification unstable at {unstable} of {n2.size} depths (N² down to {n2.min():.2g} "
        f"1/s²): those layers were mixed with their neighbours until stable, N² {MINIMUM_N2:g} or "
        "more",
    )
