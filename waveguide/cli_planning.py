"""The command that plans observations under uncertainty, and the page that shows a plan."""

from __future__ import annotations

from contextlib import nullcontext
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

from waveguide.cli_arguments import EVENT_SCENARIO, JSON, out_option, print_json, say_where
from waveguide.progress import Progress

if TYPE_CHECKING:
    from waveguide.pipeline import Study
    from waveguide.scenario import Scenario


def plan(
    scenario: EVENT_SCENARIO,
    out: Annotated[Path | None, out_option("plan.csv and plan.nc")] = None,
    json: JSON = False,
) -> None:
    """When to look, what to measure, and what the answer hangs on."""
    from waveguide.planning import plan as compute
    from waveguide.report.files import output_folder
    from waveguide.report.plan_files import write_plan
    from waveguide.report.plan_text import plan_document, plan_table
    from waveguide.scenario import read_scenario

    question = read_scenario(scenario)
    with nullcontext() if out is None else output_folder(out) as folder:
        with Progress() as progress:
            dataset = compute(question, progress=progress)
        if folder is not None:
            write_plan(dataset, folder, question.output.formats)
    if json:
        print_json(plan_document(dataset))
    else:
        print(plan_table(dataset))
    say_where(out)


def require_folder(page: bool, out: Path | None) -> None:
    """Refuse a page without a folder to write it to."""
    if page and out is None:
        from waveguide.errors import InputError

        raise InputError("--page: there is no folder to write the page to; name one with --out")


def answer_with_page(question: Scenario, folder: Path) -> Study:
    """Arrivals of a scenario, written to ``page.html`` together with their plan."""
    from waveguide.planning import planned
    from waveguide.report.page import write_page
    from waveguide.route_sections import route_sections

    with Progress() as progress:
        answer = planned(question, progress=progress)
        progress("page")
        write_page(answer.study.arrays, answer.dataset, route_sections(answer.study), folder)
    return answer.study
