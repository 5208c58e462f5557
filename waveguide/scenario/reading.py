"""From a scenario file, named by its path or by the name of a shipped one, to a Scenario."""

from __future__ import annotations

import os
import tomllib
from difflib import get_close_matches
from pathlib import Path
from typing import Any, TypeVar

from pydantic import ValidationError

from waveguide.errors import InputError
from waveguide.scenario.model import Comparison, Scenario, WindScenario
from waveguide.scenario.problems import problem_lines, shown
from waveguide.scenario.target_table import TargetTable, read_target_table
from waveguide.shipped import shipped_scenarios

Model = TypeVar("Model", Scenario, Comparison, WindScenario)


def read_scenario(scenario: str | Path) -> Scenario:
    """Read and check a scenario file.

    Parameters
    ----------
    scenario : str or Path
        The path of a TOML file, or the name of a shipped scenario.

    Returns
    -------
    Scenario

    Raises
    ------
    InputError
        With every problem of the file and of its targets file at once.
    """
    return _read(scenario, Scenario)


def read_comparison(scenario: str | Path) -> Comparison:
    """Read and check a scenario file with records, in which an event and targets may be missing.

    Parameters
    ----------
    scenario : str or Path
        The path of a TOML file, or the name of a shipped scenario.

    Returns
    -------
    Comparison

    Raises
    ------
    InputError
        With every problem of the file at once.
    """
    return _read(scenario, Comparison)


def read_wind_scenario(scenario: str | Path) -> WindScenario:
    """Read and check a scenario file with a [wind] table, in which an event may be missing.

    Parameters
    ----------
    scenario : str or Path
        The path of a TOML file, or the name of a shipped scenario.

    Returns
    -------
    WindScenario

    Raises
    ------
    InputError
        With every problem of the file at once.
    """
    return _read(scenario, WindScenario)


def scenario_title(scenario: str | Path) -> str:
    """The title of a scenario, whatever its file asks for.

    Parameters
    ----------
    scenario : str or Path

    Returns
    -------
    str
    """
    return str(_parse(find_scenario(scenario)).get("title", ""))


def _read(scenario: str | Path, model: type[Model]) -> Model:
    """The file as one of the models, or all its problems."""
    path = find_scenario(scenario)
    document = _parse(path)
    listed = _listed_targets(document, path.parent)
    labels = _join_targets(document, listed)
    document.setdefault("name", path.stem)
    try:
        result = model.model_validate(document, context={"folder": path.parent})
        problems = listed.problems
    except ValidationError as error:
        errors = error.errors(include_url=False)
        if listed.problems:  # that no target is left then is no further news
            errors = [e for e in errors if e["loc"] != ("targets",)]
        problems = problem_lines(errors, labels) + listed.problems
    if problems:
        raise InputError([f"{path.name}: {problem}" for problem in problems])
    return result


def find_scenario(scenario: str | Path) -> Path:
    """The file that a path or the name of a shipped scenario stands for.

    Parameters
    ----------
    scenario : str or Path
        A path comes first where a file of that name exists.

    Returns
    -------
    Path

    Raises
    ------
    InputError
        Where there is neither such a file nor a shipped scenario of that name.
    """
    if os.path.isfile(scenario):
        return Path(scenario)
    shipped = shipped_scenarios()
    if str(scenario) in shipped:
        return shipped[str(scenario)]
    near = get_close_matches(str(scenario), shipped, n=1)
    meant = f"did you mean {near[0]}? " if near else ""
    raise InputError(
        f"scenario {shown(str(scenario))}: there is no such file and no shipped scenario of that "
        f"name; {meant}shipped are {', '.join(shipped)}"
    )


def _parse(path: Path) -> dict[str, Any]:
    try:
        return tomllib.loads(path.read_bytes().decode("utf-8-sig"))
    except OSError as error:
        raise InputError(f"scenario {path.name}: it cannot be opened ({error.strerror})") from None
    except (ValueError, RecursionError) as error:
        raise InputError(
            f"{path.name}: this is not a TOML file in UTF-8 ({error}); correct it there, or start "
            "from a shipped scenario"
        ) from None


def _listed_targets(document: dict[str, Any], folder: Path) -> TargetTable:
    """The targets of the targets file, which leaves `document`."""
    if "targets_file" not in document:
        return TargetTable([], [], [])
    name = document.pop("targets_file")
    if not isinstance(name, str) or not os.path.isfile(folder / name):
        problem = (
            f"targets_file = {shown(name)}: there is no such file, seen from the folder of the "
            'scenario; name a CSV file, as in targets_file = "gauges.csv"'
        )
        return TargetTable([], [], [problem])
    return read_target_table(folder / name)


def _join_targets(document: dict[str, Any], listed: TargetTable) -> list[str]:
    """Put the listed targets after the inline ones; what a person calls each of them."""
    inline = document.get("targets", [])
    if not isinstance(inline, list):
        return []  # refused by the model
    if inline or listed.targets:
        document["targets"] = inline + listed.targets
    return [f"target {number + 1}" for number in range(len(inline))] + listed.labels
