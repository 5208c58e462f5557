"""What the commands have in common: arguments, their completion, and the end of their help."""

from __future__ import annotations

import json as json_module
import sys
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

if TYPE_CHECKING:
    from collections.abc import Callable

EXIT = (
    "Exit status: 0 answered; 1 a defect of waveguide, which please report; 2 the input cannot be "
    "used, and standard error says why."
)


def ending(*examples: str, more: str = "") -> str:
    """The end of a command's help: examples, and what the exit status means.

    Parameters
    ----------
    *examples : str
        Commands as a person types them.
    more : str
        Of the exit status, where there is more to say.

    Returns
    -------
    str
        For click, which keeps the lines of a paragraph that starts with a backspace.
    """
    lines = "\n".join(f"  {example}" for example in examples)
    return f"\b\nExamples:\n{lines}\n\n{EXIT}{more}"


def scenario_argument(table: str) -> Any:
    """The argument that names a scenario.

    Parameters
    ----------
    table : str
        Of the scenario file, which the command needs.

    Returns
    -------
    typer.Argument
        Completed from the shipped scenarios that have the table, from folders and TOML files.
    """
    return typer.Argument(
        help=f"A scenario file (TOML) with [{table}], or the name of a shipped scenario: see "
        "`waveguide scenarios`.",
        autocompletion=_completion(table),
    )


def _completion(table: str) -> Callable[[str], list[str]]:
    def complete(incomplete: str) -> list[str]:
        from waveguide.shipped import shipped_scenarios

        names = [name for name in shipped_scenarios(table) if name.startswith(incomplete)]
        return names + _files(incomplete)

    return complete


def _files(incomplete: str) -> list[str]:
    """TOML files and folders whose path starts so."""
    folder = Path(incomplete) if incomplete.endswith("/") else Path(incomplete).parent
    start = "" if incomplete.endswith("/") else Path(incomplete).name
    if not folder.is_dir():
        return []
    found = sorted(p for p in folder.iterdir() if p.name.startswith(start) and p.name[0] != ".")
    kept = [f"{p}/" if p.is_dir() else str(p) for p in found if p.is_dir() or p.suffix == ".toml"]
    return [f"./{path}" for path in kept] if incomplete.startswith("./") else kept


EVENT_SCENARIO = Annotated[str, scenario_argument("event")]
WIND_SCENARIO = Annotated[str, scenario_argument("wind")]
RECORD_SCENARIO = Annotated[str, scenario_argument("compare")]

JSON = Annotated[
    bool,
    typer.Option(
        "--json", help="Print one JSON document instead of tables.  [default: tables]"
    ),
]


def out_option(what: str) -> Any:
    """The option that names a folder for files.

    Parameters
    ----------
    what : str
        What is written.

    Returns
    -------
    typer.Option
    """
    return typer.Option(
        metavar="FOLDER", show_default="no files",
        help=f"Also write {what} to this folder, which is made where it does not exist.",
    )


def print_json(document: object) -> None:
    """One JSON document on standard output."""
    print(json_module.dumps(document, indent=1, allow_nan=False))


def say_where(out: Path | None) -> None:
    """Where the files are, on standard error."""
    if out is not None:
        print(f"waveguide: outputs are in {out}", file=sys.stderr)
