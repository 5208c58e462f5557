"""The command that plans observations under uncertainty."""

from __future__ import annotations

from contextlib import nullcontext
from pathlib import Path
from typing import Annotated

import typer

from waveguide.cli_records import JSON, SCENARIO, print_json, say_where
from waveguide.progress import Progress


def plan(
    scenario: SCENARIO,
    out: Annotated[
        Path | None, typer.Option(help="Also write plan.csv and plan.nc to this folder.")
    ] = None,
    json: JSON = False,
) -> None:
    """When to look for a signal, what to measure, and what the answer hangs on."""
    from waveguide.planning import plan as compute
    from waveguide.report.files import output_folder
    from waveguide.report.plan_dataset import plan_dataset
    from waveguide.report.plan_files import write_plan
    from waveguide.report.plan_text import plan_document, plan_table
    from waveguide.scenario import read_scenario

    question = read_scenario(scenario)
    with nullcontext() if out is None else output_folder(out) as folder:
        with Progress() as progress:
            answer = compute(question, progress=progress)
        dataset = plan_dataset(question, answer)
        if folder is not None:
            write_plan(dataset, folder, question.output.formats)
    if json:
        print_json(plan_document(dataset))
    else:
        print(plan_table(dataset))
    say_where(out)
