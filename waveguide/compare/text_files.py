"""Records in text files: CSV with a header, and the plain layouts of sea-level data centres.

Layouts without a header are told by their columns:

- ``year, month, day, value``: daily means in mm, missing −32767;
- ``year, month, day, hour, value``: hourly heights in mm, missing −32767;
- ``year.fraction; value; …``: monthly means in mm, missing −99999.

All three are in UTC.
"""

from __future__ import annotations

import csv
import gzip
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from waveguide.compare.clock import parse_times
from waveguide.errors import InputError

Array = NDArray[np.float64]
Times = NDArray[np.datetime64]

TIME_NAMES = ("time", "date", "datetime", "date_time", "timestamp", "time_utc", "date_utc")


@dataclass(frozen=True)
class Table:
    """Times and values of a record as they are in its file.

    Attributes
    ----------
    times : ndarray of datetime64, shape (n,)
    values : ndarray, shape (n,)
        NaN where a cell is empty.
    pressure : ndarray, shape (n,), or None
        Air pressure in the file's units (hPa).
    units : str or None
        Where the file or its layout says them.
    """

    times: Times
    values: Array
    pressure: Array | None
    units: str | None


def read_text(
    path: Path, name: str, column: str | None, zone: str | None, pressure_column: str | None
) -> Table:
    """Read one record of a text file, which may be compressed (.gz).

    Parameters
    ----------
    path : Path
    name : str
        Of the record; that of its column where `column` is None.
    column : str or None
    zone : "UTC" or None
    pressure_column : str or None

    Returns
    -------
    Table

    Raises
    ------
    InputError
        If the file or a value of it cannot be read.
    """
    rows = _rows(path, name)
    if not rows:
        raise InputError(f"{name!r}: {path.name} is empty; name the file that holds the record")
    if not _all_numbers(rows[0]):
        return _with_header(rows, path, name, column or name, zone, pressure_column)
    if pressure_column is not None:
        raise InputError(
            f"{name!r}: {path.name} has no header, so no pressure_column {pressure_column!r}; give "
            "a CSV file with a header"
        )
    return _plain(rows, path, name)


def _rows(path: Path, name: str) -> list[list[str]]:
    """Cells of the file, blank lines and lines of remarks left out."""
    try:
        raw = path.read_bytes()
        text = (gzip.decompress(raw) if path.suffix == ".gz" else raw).decode("utf-8-sig")
    except (OSError, ValueError, EOFError) as error:
        raise InputError(
            f"{name!r}: {path.name} cannot be read as text ({error}); save it as UTF-8 CSV"
        ) from None
    lines = [
        line for line in text.splitlines() if line.strip(" ,;\t") and line.lstrip()[0] != "#"
    ]
    separator = ";" if lines and ";" in lines[0] and "," not in lines[0] else ","
    return [[cell.strip() for cell in row] for row in csv.reader(lines, delimiter=separator)]


def _with_header(
    rows: list[list[str]], path: Path, name: str, column: str, zone: str | None,
    pressure_column: str | None,
) -> Table:
    header = rows[0]
    lower = [cell.lower().replace(" ", "_") for cell in header]
    at_time = next((i for i, cell in enumerate(lower) if cell in TIME_NAMES), None)
    if at_time is None:
        raise InputError(
            f"{name!r}: {path.name} has no column of times among {', '.join(header)}; call it time "
            "or date"
        )
    times = parse_times([_cell(row, at_time) for row in rows[1:]], name, zone)
    values = _column(rows, header, column, path, name)
    pressure = (
        None if pressure_column is None else _column(rows, header, pressure_column, path, name)
    )
    return Table(times, values, pressure, None)


def _column(
    rows: list[list[str]], header: list[str], column: str, path: Path, name: str
) -> Array:
    if column not in header:
        raise InputError(
            f"{name!r}: {path.name} has no column {column!r}; write column = one of "
            f"{', '.join(header)}"
        )
    at = header.index(column)
    return np.array([_number(_cell(row, at), line, name) for line, row in enumerate(rows[1:], 2)])


def _cell(row: list[str], at: int) -> str:
    return row[at] if at < len(row) else ""


def _number(text: str, line: int, name: str) -> float:
    if text.lower() in ("", "nan", "na", "null", "-"):
        return float("nan")
    try:
        return float(text)
    except ValueError:
        raise InputError(
            f"{name!r}: {text!r} in row {line} is not a number; leave missing values empty, and "
            "write decimals with a point"
        ) from None


def _all_numbers(row: list[str]) -> bool:
    try:
        return all(np.isfinite(float(cell)) for cell in row[:4])
    except ValueError:
        return False


def _plain(rows: list[list[str]], path: Path, name: str) -> Table:
    """One of the layouts without a header."""
    first = [float(cell) for cell in rows[0] if cell]
    if first[0] != int(first[0]):
        return _monthly(rows, name)
    if len(first) not in (4, 5):
        raise InputError(
            f"{name!r}: {path.name} has no header and {len(first)} columns; known are year, month, "
            "day, value; year, month, day, hour, value; and year.fraction; value. Or give a CSV "
            "file with a header"
        )
    numbers = _grid(rows, len(first), name)
    values = numbers[:, -1]
    hour = numbers[:, 3] if len(first) == 5 else np.full(len(rows), 12.0)
    return Table(_calendar(numbers[:, :3], hour, name), values, None, "mm")


def _grid(rows: list[list[str]], width: int, name: str) -> Array:
    return np.array([
        [_number(_cell(row, i), line, name) for i in range(width)]
        for line, row in enumerate(rows, 1)
    ])


def _calendar(dates: Array, hour: Array, name: str) -> Times:
    texts = [f"{y:04.0f}-{m:02.0f}-{d:02.0f}" for y, m, d in dates]
    try:
        days = np.array(texts, "datetime64[s]")
    except ValueError as error:
        raise InputError(f"{name!r}: {error}; columns must be year, month, day") from None
    return np.asarray(days + np.rint(hour * 3600.0).astype("timedelta64[s]"))


def _monthly(rows: list[list[str]], name: str) -> Table:
    """Months told by the year and its fraction in the middle of the month."""
    numbers = _grid(rows, 2, name)
    month = np.floor(12.0 * numbers[:, 0]).astype(np.int64)
    times = (month - 12 * 1970).astype("datetime64[M]").astype("datetime64[s]")
    return Table(np.asarray(times), numbers[:, 1], None, "mm")
