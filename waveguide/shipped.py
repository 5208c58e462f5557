"""The scenarios that come with the package: found by name, without reading what they ask for."""

from __future__ import annotations

import tomllib
from pathlib import Path

JOBS = {"arrivals": "event", "plan": "event", "lookout": "event", "response": "wind",
        "compare": "compare"}  # fmt: skip
"""The table of a scenario file without which a command has nothing to do."""


def shipped_scenarios(table: str | None = None) -> dict[str, Path]:
    """The scenarios that come with the package: name to path, in alphabetical order.

    Parameters
    ----------
    table : str or None
        Only those whose file has this table, such as "event" or "wind".

    Returns
    -------
    dict of Path
    """
    found = {path.stem: path for path in sorted(_folder().glob("*.toml"))}
    return {name: path for name, path in found.items() if table is None or table in _tables(path)}


def commands_for(path: Path) -> list[str]:
    """The commands that can answer a scenario.

    Parameters
    ----------
    path : Path

    Returns
    -------
    list of str
    """
    tables = _tables(path)
    return [command for command, table in JOBS.items() if table in tables]


def _folder() -> Path:
    """Inside an installed wheel, or beside the package in a clone."""
    package = Path(__file__).resolve().parent
    installed = package / "_scenarios"
    return installed if installed.is_dir() else package.parent / "scenarios"


def _tables(path: Path) -> set[str]:
    return set(tomllib.loads(path.read_text(encoding="utf-8")))
