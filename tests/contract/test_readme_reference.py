"""The README's reference of the scenario file: every key the validation knows, and its default."""

from __future__ import annotations

import re
import tomllib
from pathlib import Path

import pytest

from waveguide.scenario.fields import Table
from waveguide.scenario.model import Event, Ocean, Output, Scenario, Target, Waves
from waveguide.scenario.observed import Compare, Lookout, Observation
from waveguide.scenario.uncertainty import Planning, Uncertainty
from waveguide.scenario.wind import Wind, WindPatch, WindStorm

README = Path(__file__).resolve().parents[2] / "README.md"
TABLES = {
    "Top of the file": Scenario, "[event]": Event, "[[targets]]": Target, "[waves]": Waves,
    "[ocean]": Ocean, "[output]": Output, "[uncertainty]": Uncertainty, "[plan]": Planning,
    "[[observations]]": Observation, "[compare]": Compare, "[lookout]": Lookout, "[wind]": Wind,
    "[[wind.patches]]": WindPatch, "[[wind.storms]]": WindStorm,
}  # fmt: skip
ELSEWHERE = {("Top of the file", "targets_file")}  # read before the validation


def reference() -> dict[str, dict[str, str]]:
    """Default of every key, by table, as the README has them."""
    text = README.read_text(encoding="utf-8")
    text = text.split("\n## The scenario file\n")[1].split("\n## ")[0]
    found = {}
    for part in text.split("\n### ")[1:]:
        heading, _, body = part.partition("\n")
        rows = re.findall(r"^\| `(\w+)` \| .*? \| ?(.*?) ?\|$", body, re.M)
        found[heading.split(":")[0].replace("`", "").strip()] = dict(rows)
    return found


REFERENCE = reference()


def test_every_table_has_its_place():
    assert set(REFERENCE) == set(TABLES)


@pytest.mark.parametrize("table", TABLES)
def test_every_key_is_there_and_no_other(table):
    known = set(TABLES[table].model_fields) | {key for where, key in ELSEWHERE if where == table}
    assert set(REFERENCE[table]) == known


@pytest.mark.parametrize(
    ("table", "key"),
    [(table, key) for table, model in TABLES.items() for key in model.model_fields],
)
def test_defaults_are_those_of_the_validation(table, key):
    told = REFERENCE[table][key]
    field = TABLES[table].model_fields[key]
    if field.is_required():
        assert told == ""
    elif told.startswith("`"):
        value = tomllib.loads(f"x = {told.strip('`')}")["x"]
        default = field.get_default(call_default_factory=True)
        assert value == (list(default) if isinstance(default, tuple) else default)
    else:  # nothing, or a table whose own keys have defaults, in words
        default = field.get_default(call_default_factory=True)
        assert told
        assert default in (None, "", ()) or isinstance(default, Table) or key == "name"
