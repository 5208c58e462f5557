"""The command line: read what was asked, call one function, print the answer.

Exit status: 0 answered, 2 the input cannot be used, 1 a defect of the package.
"""

from __future__ import annotations

import sys
import time
import traceback
from contextlib import nullcontext
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from waveguide.cli_planning import plan
from waveguide.cli_records import compare
from waveguide.cli_wind import response
from waveguide.progress import Progress

if TYPE_CHECKING:
    import xarray as xr

    from waveguide.network.trapped_atlas import TrappedAtlas
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
app.command()(response)
app.command()(plan)


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
) -> None:
    """When, by which route and how strongly a signal reaches each target."""
    from waveguide.report.files import output_folder, write_outputs
    from waveguide.scenario import read_scenario

    question = read_scenario(scenario)
    with nullcontext() if out is None else output_folder(out) as folder:
        answer = _answer(question)
        if folder is not None:
            write_outputs(answer, folder, question.output.formats)
    _show(answer, json)
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


@app.command(context_settings={"ignore_unknown_options": True, "allow_extra_args": True})
def section(
    context: typer.Context,
    lon: Annotated[str, typer.Argument(help="Longitude, degrees east.")],
    lat: Annotated[str, typer.Argument(help="Latitude, degrees north.")],
    out: Annotated[
        Path | None, typer.Option(help="Also write figure and NetCDF file to this folder.")
    ] = None,
    profile: Annotated[
        Path | None, typer.Option(help="Your own depths: CSV with offshore_km,depth_m.")
    ] = None,
    stratification: Annotated[
        Path | None,
        typer.Option(help="Your own: CSV with depth,n2 or depth,temperature,salinity."),
    ] = None,
    drag: Annotated[float, typer.Option(help="Linear bottom drag (m/s) of the decay length.")]
    = 5e-4,
    modes: Annotated[int, typer.Option(help="Highest mode number.")] = 3,
    period: Annotated[
        float | None, typer.Option(help="Period (days) of phase and group speed.")
    ] = None,
    json: Annotated[bool, typer.Option("--json", help="Print one JSON document.")] = False,
) -> None:
    """Cross-shelf section at a coast, and the speed and shape of its coastal-trapped modes."""
    from waveguide.report.files import output_folder
    from waveguide.report.section_files import write_section
    from waveguide.report.section_table import section_document, section_table
    from waveguide.sections import section as compute

    x, y = _numbers({"LON": lon, "LAT": lat}, context.args)
    with nullcontext() if out is None else output_folder(out) as folder:
        with Progress() as progress:
            progress("section and modes")
            answer = compute(
                x, y, profile=profile, stratification=stratification, drag=drag, modes=modes,
                period_days=period,
            )
        if folder is not None:
            write_section(answer, folder)
    _print_json(section_document(answer)) if json else print(section_table(answer))
    if out is not None:
        print(f"waveguide: outputs are in {out}", file=sys.stderr)


@app.command()
def atlas(
    region: Annotated[
        tuple[float, float, float, float] | None,
        typer.Option(help="West, south, east and north limit in degrees; the globe if not given."),
    ] = None,
    bathymetry: Annotated[Path | None, typer.Option(help="Your own depths (CF NetCDF).")] = None,
    climatology: Annotated[
        Path | None, typer.Option(help="Your own temperature and salinity (CF NetCDF).")
    ] = None,
    temperature: Annotated[
        str | None,
        typer.Option(help="Its kind, if the file does not say: in-situ, potential, conservative."),
    ] = None,
    out: Annotated[Path, typer.Option(help="Folder of atlas_trapped.nc.")] = Path(),
    workers: Annotated[int, typer.Option(help="Processes.", min=1)] = 2,
) -> None:
    """Compute the coastal-trapped modes of every section of the guide; goes on if interrupted."""
    from waveguide.network.trapped_build import atlas_file

    try:
        path, found = atlas_file(
            out, region, bathymetry, climatology,
            temperature,  # type: ignore[arg-type]  # checked where the file is read
            workers, Bar("atlas"),
        )
    except KeyboardInterrupt:
        print("\nwaveguide: interrupted; the same command goes on from here", file=sys.stderr)
        raise typer.Exit(130) from None
    print(f"{path}: {_coverage(found)}")


def _coverage(found: TrappedAtlas) -> str:
    """How many nodes have modes, and of which kind."""
    from waveguide.coast.section_quality import QualityFlag

    known = (found.phase_speed[1:] > 0.0).all(axis=0)
    sections = (found.error[1:] >= 0.0).all(axis=0)
    loose = (found.flags & int(QualityFlag.NOT_CONVERGED)) > 0
    return (
        f"{known.sum()} nodes, {sections.sum()} with the modes of their own section and "
        f"{(known & ~sections).sum()} with those of a flat bottom; {loose.sum()} not converged"
    )


def _numbers(given: dict[str, str], others: list[str]) -> list[float]:
    """Positions as numbers. Negative ones look like options, so unknown options end up here."""
    from waveguide.errors import InputError

    problems = []
    values = []
    for name, text in given.items():
        try:
            values.append(float(text))
        except ValueError:
            what = "no such option" if text.startswith("-") else f"{name} must be a number"
            problems.append(f"{text}: {what}; see `waveguide section --help`")
    problems += [
        f"{text}: {'no such option' if text.startswith('-') else 'unexpected'}; "
        "see `waveguide section --help`"
        for text in others
    ]
    if problems:
        raise InputError(problems)
    return values


def _answer(question: Scenario) -> xr.Dataset:
    from waveguide.pipeline import arrivals as compute

    with Progress() as progress:
        return compute(question, progress=progress)


def _show(answer: xr.Dataset, as_json: bool) -> None:
    if as_json:
        from waveguide.report.document import document

        _print_json(document(answer))
    else:
        from waveguide.report.table import table

        print(table(answer))


def _print_json(document: dict[str, Any]) -> None:
    import json

    print(json.dumps(document, indent=1, allow_nan=False))


class Bar:
    """A bar on stderr that fills as parts of a long piece of work are done.

    On a terminal it is redrawn in place; elsewhere a line is written for every tenth.
    """

    width = 40
    """Characters."""

    def __init__(self, name: str) -> None:
        self._name = name
        self._start = time.monotonic()
        self._first = 0
        self._tenth = -1

    def __call__(self, done: int, total: int) -> None:
        """Show that `done` of `total` parts are done; the first call sets what was done before."""
        if self._tenth < 0:
            self._first = done
        share = done / max(total, 1)
        tenth = int(10.0 * share)
        if sys.stderr.isatty():
            end = "\n" if done == total else ""
            print(f"\r{self._line(done, total, share)}", end=end, file=sys.stderr, flush=True)
        elif tenth > self._tenth:
            print(self._line(done, total, share), file=sys.stderr, flush=True)
        self._tenth = tenth

    def _line(self, done: int, total: int, share: float) -> str:
        seconds = time.monotonic() - self._start
        computed = done - self._first
        left = f", {seconds * (total - done) / computed:.0f} s left" if computed else ""
        filled = round(self.width * share)
        bar = "█" * filled + "·" * (self.width - filled)
        return f"waveguide: {self._name} {bar} {100.0 * share:3.0f} %{left}".ljust(100)
