"""The command line: read what was asked, call one function, print the answer.

Exit status: 0 answered, 2 the input cannot be used, 1 a defect of the package.
"""

from __future__ import annotations

import sys
import traceback
from contextlib import nullcontext
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from waveguide.cli_planning import answer_with_page, plan, require_folder
from waveguide.cli_records import compare, lookout
from waveguide.cli_sections import atlas, section
from waveguide.cli_wind import response
from waveguide.progress import Progress

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.scenario import Scenario

# Rich help and tracebacks are left out: importing them takes longer than many an answer.
app = typer.Typer(
    name="waveguide",
    help="Arrival of sea-level signals along coasts and the equator.",
    add_completion=False,
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
    no_args_is_help=True,
)


app.command()(compare)
app.command()(lookout)
app.command()(response)
app.command()(plan)
# A negative longitude looks like an option; `section` itself refuses what is neither.
app.command(context_settings={"ignore_unknown_options": True, "allow_extra_args": True})(section)
app.command()(atlas)


def main() -> None:
    """Run the command line and end the process with its exit status."""
    # A terminal that cannot show a name gets it escaped, not a traceback.
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="backslashreplace")
    from waveguide.errors import InputError

    try:
        app()
    except InputError as error:
        for problem in error.problems:
            print(f"waveguide: {problem}", file=sys.stderr)
        sys.exit(2)
    except Exception:
        traceback.print_exc()
        print("waveguide: this is a defect of waveguide; please report it", file=sys.stderr)
        sys.exit(1)


def _print_version(wanted: bool) -> None:
    if wanted:
        from waveguide.report.attributes import software_version

        print(f"waveguide {software_version()}")
        raise typer.Exit


@app.callback()
def _options(
    version: Annotated[
        bool,
        typer.Option(
            "--version", callback=_print_version, is_eager=True, help="Show the version and exit."
        ),
    ] = False,
) -> None:
    pass


@app.command()
def arrivals(
    scenario: Annotated[
        str, typer.Argument(help="A scenario file, or the name of a shipped scenario.")
    ],
    out: Annotated[
        Path | None,
        typer.Option(help="Also write the formats the scenario asks for to this folder."),
    ] = None,
    json: Annotated[bool, typer.Option("--json", help="Print one JSON document.")] = False,
    budget: Annotated[
        bool, typer.Option("--budget", help="Also print where the energy goes on every leg.")
    ] = False,
    page: Annotated[
        bool,
        typer.Option("--page", help="Also write page.html, to move through in a browser (--out)."),
    ] = False,
) -> None:
    """When, by which route and how strongly a signal reaches each target."""
    from waveguide.report.files import output_folder, write_outputs
    from waveguide.scenario import read_scenario

    require_folder(page, out)
    question = read_scenario(scenario)
    with nullcontext() if out is None else output_folder(out) as folder:
        answer = answer_with_page(question, folder) if page and folder else _answer(question)
        if folder is not None:
            write_outputs(answer, folder, question.output.formats)
    _show(answer, json, budget)
    if out is not None:
        print(f"waveguide: outputs are in {out}", file=sys.stderr)


@app.command()
def scenarios() -> None:
    """List the shipped scenarios."""
    from waveguide.scenario import scenario_title, shipped_scenarios

    shipped = shipped_scenarios()
    width = max(map(len, shipped), default=0)
    for name, path in shipped.items():
        print(f"{name:{width}}  {scenario_title(path)}")


def _answer(question: Scenario) -> xr.Dataset:
    from waveguide.pipeline import arrivals as compute

    with Progress() as progress:
        return compute(question, progress=progress)


def _show(answer: xr.Dataset, as_json: bool, budget: bool) -> None:
    if as_json:
        import json

        from waveguide.report.document import document

        print(json.dumps(document(answer), indent=1, allow_nan=False))
    else:
        from waveguide.report.table import table

        print(table(answer, budget))
