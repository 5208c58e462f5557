"""The commands that confront theory with records and with model output."""

from __future__ import annotations

import sys
from contextlib import nullcontext
from pathlib import Path
from typing import Annotated

import typer

from waveguide.progress import Progress

SCENARIO = Annotated[
    str, typer.Argument(help="A scenario file, or the name of a shipped scenario.")
]
JSON = Annotated[bool, typer.Option("--json", help="Print one JSON document.")]


def compare(
    scenario: SCENARIO,
    out: Annotated[
        Path | None,
        typer.Option(help="Also write tables, prepared records and figures to this folder."),
    ] = None,
    json: JSON = False,
) -> None:
    """Was it a trapped wave? Records of gauges and moorings against the theory."""
    from waveguide.report.comparison_dataset import comparison_dataset
    from waveguide.report.comparison_files import write_comparison
    from waveguide.report.comparison_text import comparison_document, comparison_table
    from waveguide.report.files import output_folder
    from waveguide.scenario import read_comparison

    question = read_comparison(scenario)
    with nullcontext() if out is None else output_folder(out) as folder:
        from waveguide.comparison import comparison

        with Progress() as progress:
            result = comparison(question, progress=progress)
        dataset = comparison_dataset(result)
        if folder is not None:
            write_comparison(result, dataset, folder, question.output.formats)
    if json:
        print_json(comparison_document(result, dataset))
    else:
        print(comparison_table(result, dataset))
    say_where(out)


def print_json(document: object) -> None:
    """One JSON document on standard output."""
    import json

    print(json.dumps(document, indent=1, allow_nan=False))


def say_where(out: Path | None) -> None:
    """Where the files are, on standard error."""
    if out is not None:
        print(f"waveguide: outputs are in {out}", file=sys.stderr)
