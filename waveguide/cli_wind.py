"""The command that lets a wind drive the guide."""

from __future__ import annotations

from contextlib import nullcontext
from pathlib import Path
from typing import Annotated

from waveguide.cli_arguments import JSON, WIND_SCENARIO, out_option, print_json, say_where
from waveguide.progress import Progress


def response(
    scenario: WIND_SCENARIO,
    out: Annotated[Path | None, out_option("tables, series and figures")] = None,
    json: JSON = False,
) -> None:
    """What sea level a wind drives, and which wind did it."""
    from waveguide.report.files import output_folder
    from waveguide.report.response_dataset import response_dataset
    from waveguide.report.response_text import response_document, response_table
    from waveguide.scenario import read_wind_scenario

    question = read_wind_scenario(scenario)
    with nullcontext() if out is None else output_folder(out) as folder:
        from waveguide.wind_response import wind_response

        with Progress() as progress:
            result = wind_response(question, progress)
        dataset = response_dataset(result)
        if folder is not None:
            from waveguide.report.response_files import write_response

            write_response(result, dataset, folder, question.output.formats)
    if json:
        print_json(response_document(dataset))
    else:
        print(response_table(dataset))
    say_where(out)
