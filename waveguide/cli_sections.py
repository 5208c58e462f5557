"""The commands that look at one cross-shelf section, and at all of them."""

from __future__ import annotations

import sys
from contextlib import nullcontext
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from waveguide.cli_arguments import JSON, out_option, print_json, say_where
from waveguide.progress import Bar, Progress

if TYPE_CHECKING:
    from waveguide.network.atlas import TrappedAtlas


def section(
    context: typer.Context,
    lon: Annotated[str, typer.Argument(help="Longitude of a coast, degrees east.")],
    lat: Annotated[str, typer.Argument(help="Latitude of a coast, degrees north.")],
    out: Annotated[Path | None, out_option("a figure and a NetCDF file")] = None,
    profile: Annotated[
        Path | None,
        typer.Option(
            metavar="FILE", show_default="the packaged depths",
            help="Your own depths: CSV with columns offshore_km (km), depth_m (m).",
        ),
    ] = None,
    stratification: Annotated[
        Path | None,
        typer.Option(
            metavar="FILE", show_default="the packaged climatology",
            help="Your own: CSV with columns depth (m), n2 (1/s²), or depth, temperature (°C), "
            "salinity.",
        ),
    ] = None,
    drag: Annotated[
        float,
        typer.Option(
            metavar="NUMBER", help="Linear bottom drag of the decay length (m/s).",
        ),
    ] = 5e-4,
    modes: Annotated[
        int, typer.Option(metavar="NUMBER", help="Highest number of a mode, 1 or more.")
    ] = 3,
    period: Annotated[
        float | None,
        typer.Option(
            metavar="DAYS", show_default="long waves only",
            help="Period (days) at which phase and group speed are told too.",
        ),
    ] = None,
    json: JSON = False,
) -> None:
    """A cross-shelf section and its coastal-trapped modes."""
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
    if json:
        print_json(section_document(answer))
    else:
        print(section_table(answer))
    say_where(out)


def atlas(
    region: Annotated[
        tuple[float, float, float, float] | None,
        typer.Option(
            metavar="W S E N", show_default="the globe",
            help="West, south, east and north limit (degrees).",
        ),
    ] = None,
    bathymetry: Annotated[
        Path | None,
        typer.Option(
            metavar="FILE", show_default="the packaged depths", help="Your own depths: CF NetCDF."
        ),
    ] = None,
    climatology: Annotated[
        Path | None,
        typer.Option(
            metavar="FILE", show_default="the packaged climatology",
            help="Your own temperature and salinity: CF NetCDF.",
        ),
    ] = None,
    temperature: Annotated[
        str | None,
        typer.Option(
            metavar="KIND", show_default="what the file says",
            help="Kind of its temperature: in-situ, potential or conservative.",
        ),
    ] = None,
    out: Annotated[
        Path, typer.Option(metavar="FOLDER", help="Folder of atlas_trapped.nc.")
    ] = Path(),
    workers: Annotated[
        int, typer.Option(metavar="NUMBER", help="Number of processes, 1 or more.", min=1)
    ] = 2,
) -> None:
    """Modes of every section of the guide; goes on if interrupted."""
    from waveguide.network.trapped_build import atlas_file
    from waveguide.report.files import written

    try:
        with written():
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
            meant = f"{name} must be decimal degrees with a point, as in -77.2"
            what = "no such option" if _is_option(text) else meant
            problems.append(f"{text}: {what}; see `waveguide section --help`")
    problems += [
        f"{text}: {'no such option' if _is_option(text) else 'unexpected'}; "
        "see `waveguide section --help`"
        for text in others
    ]
    if problems:
        raise InputError(problems)
    return values


def _is_option(text: str) -> bool:
    """Whether somebody meant an option; -77,2 is a number gone wrong."""
    return text.startswith("-") and not text[1:2].isdigit()
