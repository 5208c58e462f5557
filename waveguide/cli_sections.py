"""The commands that look at one cross-shelf section, and at all of them."""

from __future__ import annotations

import sys
from contextlib import nullcontext
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from waveguide.cli_records import JSON, print_json, say_where
from waveguide.progress import Bar, Progress

if TYPE_CHECKING:
    from waveguide.network.trapped_atlas import TrappedAtlas


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
    json: JSON = False,
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
    if json:
        print_json(section_document(answer))
    else:
        print(section_table(answer))
    say_where(out)


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
