"""The command line: read what was asked, call one function, print the answer.

Exit status: 0 answered, 2 the input cannot be used, 1 a defect of the package.
"""

from __future__ import annotations

import errno
import os
import sys
import traceback
from contextlib import nullcontext
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from waveguide.cli_arguments import (
    EVENT_SCENARIO,
    JSON,
    ending,
    out_option,
    print_json,
    say_where,
)
from waveguide.cli_planning import answer_with_page, plan, require_folder
from waveguide.cli_records import compare, lookout
from waveguide.cli_sections import atlas, section
from waveguide.cli_wind import response
from waveguide.progress import Progress

if TYPE_CHECKING:
    from waveguide.pipeline import Study
    from waveguide.scenario import Scenario
    from waveguide.stored import Stored

# Rich help and tracebacks are left out: importing them takes longer than many an answer.
app = typer.Typer(
    name="waveguide",
    help="Arrival of sea-level signals along coasts and the equator.",
    epilog=ending(
        "waveguide scenarios", "waveguide arrivals peru_burst --out results",
        "waveguide COMMAND --help",
    ),
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
    no_args_is_help=True,
)


_LONGEST_PROBLEM = 2000  # characters: a message is to be read


def main() -> None:
    """Run the command line and end the process with its exit status."""
    # Many small matrices: threads that wait for each other cost more than they do. A plan took 25 s
    # of processor with two on a busy machine, 6 s with one.
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    # A terminal that cannot show a name gets it escaped, not a traceback.
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="backslashreplace")
    from waveguide.errors import InputError

    try:
        app()
    except InputError as error:
        from waveguide.report.text import plain

        for problem in error.problems:  # which may quote a file, whatever it holds
            print(f"waveguide: {plain(problem, _LONGEST_PROBLEM)}", file=sys.stderr)
        sys.exit(2)
    except Exception as error:
        if isinstance(error, OSError) and error.errno == errno.ENOSPC:
            print(f"waveguide: {error.strerror}; free some, or send the output elsewhere",
                  file=sys.stderr)  # fmt: skip
            os._exit(2)  # without another attempt to empty what waits for standard output
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


@app.command(
    epilog=ending(
        "waveguide arrivals peru_burst", "waveguide arrivals peru_burst --out results --page",
        "waveguide arrivals my_event.toml --json > arrivals.json",
    )
)
def arrivals(
    scenario: EVENT_SCENARIO,
    out: Annotated[Path | None, out_option("the formats the scenario asks for")] = None,
    json: JSON = False,
    budget: Annotated[
        bool,
        typer.Option(
            "--budget",
            help="Also print where the energy goes on every leg.  [default: not printed]",
        ),
    ] = False,
    page: Annotated[
        bool,
        typer.Option(
            "--page",
            help="Also write page.html, to move through in a browser, to the folder of --out.  "
            "[default: no page]",
        ),
    ] = False,
) -> None:
    """When, by which route and how strongly a signal arrives."""
    from waveguide.report.files import output_folder, write_outputs
    from waveguide.scenario import read_scenario

    require_folder(page, out)
    question = read_scenario(scenario)
    with nullcontext() if out is None else output_folder(out) as folder:
        answer = answer_with_page(question, folder) if page and folder else _answer(question)
        if folder is not None:
            write_outputs(answer.dataset, folder, question.output.formats)
    _show(answer.arrays, json, budget)
    say_where(out)


app.command(
    epilog=ending("waveguide plan peru_burst", "waveguide plan my_cruise.toml --out results")
)(plan)
app.command(
    epilog=ending(
        "waveguide lookout pacific_model", "waveguide lookout pacific_model --model run_*.nc"
    )
)(lookout)
app.command(epilog=ending("waveguide compare my_gauges.toml --out results"))(compare)
app.command(
    epilog=ending(
        "waveguide response westerly_burst", "waveguide response pacific_winds --out results"
    )
)(response)
# A negative longitude looks like an option; `section` itself refuses what is neither.
app.command(
    context_settings={"ignore_unknown_options": True, "allow_extra_args": True},
    epilog=ending(
        "waveguide section -77.2 -12.1", "waveguide section 151.3 -33.9 --period 10 --out results"
    ),
)(section)
app.command(
    epilog=ending(
        "waveguide atlas --region -82 -20 -70 0 --bathymetry depths.nc --out my_atlas",
        more=" 130: interrupted; the same command goes on from there.",
    )
)(atlas)


@app.command(epilog=ending("waveguide scenarios"))
def scenarios() -> None:
    """List the shipped scenarios, and the commands that answer them."""
    from waveguide.scenario import scenario_title
    from waveguide.shipped import commands_for, shipped_scenarios

    shipped = shipped_scenarios()
    width = max(map(len, shipped), default=0)
    for name, path in shipped.items():
        print(f"{name:{width}}  {scenario_title(path)} ({', '.join(commands_for(path))})")


@app.command(epilog=ending("waveguide cite", "waveguide cite --bibtex > waveguide.bib"))
def cite(
    bibtex: Annotated[
        bool, typer.Option("--bibtex", help="Print BibTeX entries.  [default: text]")
    ] = False,
) -> None:
    """How to cite the software, its data and its methods."""
    from waveguide.report.citation import citation_bibtex, citation_text

    print(citation_bibtex() if bibtex else citation_text())


def _answer(question: Scenario) -> Study:
    from waveguide.pipeline import study

    with Progress() as progress:
        return study(question, progress=progress)


def _show(answer: Stored, as_json: bool, budget: bool) -> None:
    if as_json:
        from waveguide.report.document import document

        print_json(document(answer))
    else:
        from waveguide.report.table import table

        print(table(answer, budget))
