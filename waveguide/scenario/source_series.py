"""The time function of an event from a CSV file with a time and a value in each row."""

from __future__ import annotations

import csv
from datetime import datetime
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from waveguide.errors import InputError
from waveguide.scenario.problems import shown

Array = NDArray[np.float64]

HIGHEST = 9000.0
"""More than any sea level in mm; -9999, 32767 or 1e20 stand for a missing value."""


def read_source_series(path: Path, start: datetime) -> tuple[Array, Array]:
    """Read a series of sea level at the source; rows are counted from the header, which is row 1.

    Parameters
    ----------
    path : Path
        UTF-8 text with commas and a header naming the columns time (ISO 8601 with its zone) and
        value; further columns are not looked at.
    start : datetime
        Start of the event, with its zone.

    Returns
    -------
    time, value : ndarray, shape (k,)
        From the start of the event (s), and in the unit of the file. Evenness and gaps are for
        `waveguide.propagation.sources.series_source` to judge.

    Raises
    ------
    InputError
        With every row that cannot be read. An empty value is one: gaps are not filled.
    """
    try:
        with path.open(encoding="utf-8-sig", newline="") as lines:
            reader = csv.reader(lines)
            columns = _columns(path.name, next(reader, []))
            rows = [(reader.line_num, row) for row in reader if any(map(str.strip, row))]
    except (OSError, UnicodeDecodeError, csv.Error) as error:
        raise InputError(
            f"{path.name}: it cannot be read as CSV ({error}); save it as UTF-8 CSV"
        ) from None
    problems: list[str] = []
    pairs = []
    for number, row in rows:
        try:
            pairs.append(_pair(row, columns, start))
        except ValueError as error:
            problems.append(f"{path.name} row {number}: {error}")
    if problems:
        raise InputError(problems)
    table = np.array(pairs, dtype=float).reshape(-1, 2)
    return table[:, 0], table[:, 1]


def _columns(file: str, header: list[str]) -> tuple[int, int]:
    names = [cell.strip().lower() for cell in header]
    if "time" not in names or "value" not in names:
        raise InputError(
            f"{file} row 1: the header is {shown(header)}; write time,value with a comma between"
        )
    return names.index("time"), names.index("value")


def _pair(row: list[str], columns: tuple[int, int], start: datetime) -> tuple[float, float]:
    if len(row) <= max(columns):
        raise ValueError("a column is missing; write a time and a value")
    when, value = (row[column].strip() for column in columns)
    return _seconds(when, start), _number(value)


def _seconds(text: str, start: datetime) -> float:
    try:
        moment: Any = datetime.fromisoformat(text)
    except ValueError:
        raise ValueError(
            f"time = {shown(text)} is not a date and time, as in 2031-03-05T06:00Z"
        ) from None
    if moment.tzinfo is None:
        raise ValueError(f"time = {shown(text)} lacks its zone; write Z for UTC at the end")
    return float((moment - start).total_seconds())


def _number(text: str) -> float:
    try:
        number = float(text)
    except ValueError:
        number = np.nan
    if not np.isfinite(number):
        raise ValueError(
            f"value = {shown(text)} is not a number; gaps are not filled here, so interpolate "
            "them first or give a part without gaps"
        )
    if abs(number) > HIGHEST:
        raise ValueError(
            f"value = {shown(text)} is no sea level, but may stand for a missing one; gaps are not "
            "filled here, so interpolate them first or give a part without gaps"
        )
    return number
