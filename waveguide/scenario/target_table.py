"""Targets from a CSV file with a name, a longitude and a latitude in each row."""

from __future__ import annotations

import csv
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any, NamedTuple

from waveguide.scenario.problems import shown

_COLUMNS = {"name": ("name",), "longitude": ("longitude", "lon"), "latitude": ("latitude", "lat")}


class TargetTable(NamedTuple):
    """What a targets file holds.

    Attributes
    ----------
    targets : list of dict
        With the keys of a ``[[targets]]`` table, not yet validated.
    labels : list of str
        ``"gauges.csv row 3"`` for each target.
    problems : list of str
        One line for each thing that could not be read.
    """

    targets: list[dict[str, Any]]
    labels: list[str]
    problems: list[str]


def read_target_table(path: Path) -> TargetTable:
    """Read the targets of a CSV file; rows are counted from the header, which is row 1.

    Parameters
    ----------
    path : Path
        UTF-8 text with commas and a header naming the columns name, longitude (or lon) and
        latitude (or lat); further columns are not looked at.

    Returns
    -------
    TargetTable
    """
    try:
        with path.open(encoding="utf-8-sig", newline="") as lines:
            return _read_rows(path.name, csv.reader(lines))
    except (OSError, ValueError, csv.Error) as error:
        return _refused(f"{path.name}: it cannot be read as CSV ({error}); save it as UTF-8 CSV")


def _refused(problem: str) -> TargetTable:
    return TargetTable([], [], [problem])


def _read_rows(file: str, reader: Any) -> TargetTable:
    header = [cell.strip().lower() for cell in next(reader, [])]
    places = {
        column: header.index(found)
        for column, names in _COLUMNS.items()
        if (found := next((name for name in names if name in header), None)) is not None
    }
    absent = [column for column in _COLUMNS if column not in places]
    if absent:
        return _refused(
            f"{file} row 1: no column {' and no column '.join(absent)}, only {shown(header)}; "
            "write the header name,longitude,latitude, with commas between the columns"
        )
    table = _collect(file, places, ((reader.line_num, row) for row in reader))
    if not table.targets and not table.problems:
        return _refused(f"{file}: it holds no targets; write one row for each below the header")
    return table


def _collect(
    file: str, places: Mapping[str, int], rows: Iterable[tuple[int, list[str]]]
) -> TargetTable:
    table = TargetTable([], [], [])
    for number, row in rows:
        if not any(cell.strip() for cell in row):
            continue  # a blank line
        label = f"{file} row {number}"
        try:
            table.targets.append(_target(places, row))
            table.labels.append(label)
        except ValueError as error:
            table.problems.append(f"{label}: {error}")
    return table


def _target(places: Mapping[str, int], row: list[str]) -> dict[str, Any]:
    if len(row) <= max(places.values()):
        raise ValueError(f"only {len(row)} columns; write name, longitude and latitude")
    cells = {column: row[place].strip() for column, place in places.items()}
    return {
        "name": cells["name"],
        "position": [_number(cells, "longitude"), _number(cells, "latitude")],
    }


def _number(cells: Mapping[str, str], column: str) -> float:
    try:
        return float(cells[column])
    except ValueError:
        raise ValueError(
            f"{column} = {shown(cells[column])} is not a number; "
            "write decimal degrees with a point, as in -77.15"
        ) from None
