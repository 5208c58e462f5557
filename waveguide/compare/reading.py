"""One record from its file to a regular series in SI units."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from waveguide.compare.clock import regular
from waveguide.compare.preparation import inverse_barometer
from waveguide.compare.series import Series
from waveguide.compare.text_files import Table, read_text
from waveguide.compare.units import check_scatter, robust_scatter, si_factor
from waveguide.errors import InputError

Array = NDArray[np.float64]

FILLS = (-32767.0, -32768.0, -99999.0, -9999.0, -999.9, -99.99, 99999.0, 1e20, 9.96921e36)
"""Values that stand for missing ones in common files and are no sea level in any unit."""

REPEATED = 5
"""A value far from all others that comes so often stands for a missing one."""

FAR = 12.0
"""Robust standard deviations."""


@dataclass(frozen=True)
class Record:
    """Where a record is and what it measures; see `waveguide.scenario.Observation`."""

    name: str
    position: tuple[float, float]
    path: Path
    quantity: str = "sea level"
    units: str | None = None
    column: str | None = None
    depth: float = 0.0
    zone: str | None = None
    fill: float | None = None
    pressure_column: str | None = None


def read_series(record: Record) -> Series:
    """Read, check and regularise a record.

    Parameters
    ----------
    record : Record

    Returns
    -------
    Series

    Raises
    ------
    InputError
        If it cannot be used, with what to do.
    """
    table = _table(record)
    values, told = without_fills(table.values, record.fill, record.name)
    stacked = values[:, None] if table.pressure is None else np.column_stack(
        [values, without_fills(table.pressure, None, record.name)[0]]
    )
    start, step, placed = regular(table.times, stacked, record.name)
    units = record.units or table.units
    level = placed[:, 0] * si_factor(units, record.quantity, record.name)
    check_scatter(level, record.quantity, str(units), record.name)
    notes = [*told, f"{np.isfinite(level).mean():.0%} of {level.size} values are there"]
    if table.pressure is not None:
        level = level + inverse_barometer(100.0 * placed[:, 1])
        notes.append("the inverse barometer was added")
    return Series(
        record.name, record.quantity, record.position, record.depth, start, step, level,
        tuple(notes),
    )


def _table(record: Record) -> Table:
    if record.path.suffix.lower() in (".nc", ".nc4", ".cdf", ".netcdf"):
        from waveguide.compare.netcdf_series import read_netcdf

        return read_netcdf(record.path, record.name, record.column, record.quantity,
                           record.pressure_column)
    return read_text(record.path, record.name, record.column, record.zone, record.pressure_column)


def without_fills(
    values: Array, fill: float | None, name: str
) -> tuple[Array, list[str]]:
    """Values with NaN in place of fills, and what was found.

    Parameters
    ----------
    values : ndarray, shape (n,)
    fill : float or None
        One more fill value.
    name : str

    Returns
    -------
    values : ndarray, shape (n,)
    notes : list of str

    Raises
    ------
    InputError
        If a value far from all others comes again and again.
    """
    fills = np.array([*FILLS, *([] if fill is None else [fill])])
    missing = np.isclose(values[:, None], fills, rtol=1e-6, atol=0.0).any(axis=1)
    kept = np.where(missing | ~np.isfinite(values), np.nan, values)
    left = int(np.isfinite(kept).sum())
    if left < 3:
        told = f"{left} of {values.size} values are there" if left else "all values are missing"
        raise InputError(f"{name!r}: {told}; look at column, units and fill")
    far = np.abs(kept - np.nanmedian(kept)) > FAR * max(robust_scatter(kept), 1e-300)
    suspects, count = np.unique(kept[far], return_counts=True)
    if count.size and count.max() >= REPEATED:
        value = suspects[np.argmax(count)]
        raise InputError(
            f"{name!r}: {value:g} comes {count.max()} times, far from all other values; if it "
            f"stands for missing ones write fill = {value:g} in its [[observations]] table, else "
            "correct the record"
        )
    return kept, [f"{int(missing.sum())} fill values left out"] if missing.any() else []
