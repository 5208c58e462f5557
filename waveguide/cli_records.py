"""The commands that confront theory with records and with model output."""

from __future__ import annotations

from contextlib import AbstractContextManager, nullcontext
from pathlib import Path
from typing import Annotated

import typer

from waveguide.cli_arguments import (
    EVENT_SCENARIO,
    JSON,
    RECORD_SCENARIO,
    out_option,
    print_json,
    say_where,
)
from waveguide.progress import Progress


def compare(
    scenario: RECORD_SCENARIO,
    out: Annotated[Path | None, out_option("tables, prepared records and figures")] = None,
    json: JSON = False,
) -> None:
    """Was it a trapped wave? Records against the theory."""
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


def lookout(
    scenario: EVENT_SCENARIO,
    files: Annotated[
        list[Path] | None,
        typer.Argument(
            help="Further files of --model, as a shell makes of a pattern.", show_default="none"
        ),
    ] = None,
    model: Annotated[
        Path | None,
        typer.Option(
            metavar="FILE", show_default="windows only",
            help="Output of an ocean model: NetCDF files, or one Zarr store.",
        ),
    ] = None,
    out: Annotated[Path | None, out_option("windows, diagrams and the subset")] = None,
    json: JSON = False,
    dask: Annotated[
        str | None,
        typer.Option(
            metavar="ADDRESS", show_default="this process",
            help="Scheduler of a running dask cluster that does the work, as in "
            "tcp://127.0.0.1:8786.",
        ),
    ] = None,
) -> None:
    """Where and when to look along the routes, also in model output."""
    from waveguide.report.files import output_folder
    from waveguide.report.lookout_files import write_lookout
    from waveguide.report.lookout_text import lookout_document, lookout_table
    from waveguide.scenario import read_scenario

    question = read_scenario(scenario)
    paths = model_paths(model, files or [])
    with nullcontext() if out is None else output_folder(out) as folder, cluster(dask):
        from waveguide.compare.model_grid import open_model
        from waveguide.lookout import lookout as look

        with Progress() as progress:
            result = look(question, open_model(paths) if paths else None, progress=progress)
        if folder is not None:
            write_lookout(result, folder, question.output.formats)
    if json:
        print_json(lookout_document(result))
    else:
        print(lookout_table(result))
    say_where(out)


def model_paths(model: Path | None, further: list[Path]) -> list[Path]:
    """All files of --model, which a shell may have made many of one pattern.

    Parameters
    ----------
    model : Path or None
    further : list of Path

    Returns
    -------
    list of Path

    Raises
    ------
    InputError
        If there are further files without --model.
    """
    from waveguide.errors import InputError

    if model is None and further:
        raise InputError(
            f"{further[0]}: files of model output follow --model, as in --model {further[0]}"
        )
    return [] if model is None else [model, *further]


def cluster(address: str | None) -> AbstractContextManager[object]:
    """The connection to a dask cluster, which all work goes to while it is open.

    Parameters
    ----------
    address : str or None
        None for none.

    Returns
    -------
    context manager

    Raises
    ------
    InputError
        If there is no such cluster, or dask's client is not installed.
    """
    from waveguide.errors import InputError

    if address is None:
        return nullcontext()
    try:
        from distributed import Client

        client: AbstractContextManager[object] = Client(address, timeout="10s")
    except ImportError:
        raise InputError(
            f"--dask {address}: the client of dask clusters is not installed; install it with "
            'pip install "waveguide[large]"'
        ) from None
    except (OSError, ValueError) as error:
        raise InputError(
            f"--dask {address}: no cluster answers ({error}); give the address of a running "
            "scheduler, as in tcp://127.0.0.1:8786"
        ) from None
    return client
