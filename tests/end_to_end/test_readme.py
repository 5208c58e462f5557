"""What the README tells a person to save, type and run does what it says, in a fresh folder.

The two blocks of Quick start are what `.ci/run` runs; all others are run here, in their order.
"""

from __future__ import annotations

import contextlib
import re
import shlex
import sys
from pathlib import Path
from typing import NamedTuple

import pytest

from waveguide import cli

README = (Path(__file__).resolve().parents[2] / "README.md").read_text(encoding="utf-8")
JOBS = README.split("\n## Three jobs\n")[1].split("\n## ")[0]
AFTER_QUICK_START = README.split("\n## Quick start\n")[1].split("\n## ", 1)[1]


class Block(NamedTuple):
    before: str
    language: str
    text: str


def blocks(text: str) -> list[Block]:
    """Fenced blocks, each with the line of text before it."""
    return [
        Block(text[: found.start()].rstrip().rpartition("\n")[2], found[1], found[2])
        for found in re.finditer(r"^```(\w+)\n(.*?)^```$", text, re.M | re.S)
    ]


BLOCKS = blocks(AFTER_QUICK_START)


def test_blocks_are_found():
    languages = [block.language for block in BLOCKS]
    assert languages.count("python") >= 5
    assert languages.count("sh") >= 4
    assert set(languages) <= {"python", "sh", "toml", "text"}
    assert README.count("\n```") == 2 * (len(BLOCKS) + 2)  # and the two of Quick start


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """A folder with the files that the README says to save."""
    path = tmp_path_factory.mktemp("reader")
    for block in BLOCKS:
        name = re.match(r"Save this as `([\w.]+)`", block.before)
        if name:
            (path / name[1]).write_text(block.text, encoding="utf-8")
    assert list(path.glob("*.toml"))
    return path


@pytest.fixture(scope="module")
def printed(folder):
    """What the commands of the three jobs print, in one text."""
    import io

    told = io.StringIO()
    with contextlib.chdir(folder), pytest.MonkeyPatch.context() as patch:
        for block in blocks(JOBS):
            for line in block.text.splitlines() if block.language == "sh" else []:
                patch.setattr(sys, "argv", shlex.split(line))
                with contextlib.redirect_stdout(told), pytest.raises(SystemExit) as ended:
                    cli.main()
                assert (ended.value.code or 0) == 0, line
    return told.getvalue()


def test_commands_run_and_all_of_them_stand_in_the_jobs(printed):
    assert printed.count("warning system") >= 6  # one for each answer
    outside = [b for b in BLOCKS if b.language == "sh" and b.text not in JOBS]
    assert outside == []


def test_what_a_reader_is_told_to_look_at_is_there(printed, folder):
    rows = re.findall(r"^\| .* \| (.*) \|$", JOBS, re.M)
    words = [word for row in rows for word in re.findall(r"\*+([^*]+)\*+", row)]
    assert len(words) > 12
    for word in words:
        assert word.lower() in printed.lower(), word
    names = set(re.findall(r"`((?:\w+/)?\w+\.(?:png|csv|geojson|html))`", JOBS))
    assert {"map.png", "results/page.html", "moorings.csv", "look/windows.csv"} <= names
    for name in names:
        assert list(folder.rglob(Path(name).name)), name


@pytest.mark.parametrize(
    "code", [b.text for b in BLOCKS if b.language == "python"], ids=lambda c: c.split("\n")[2][:40]
)
def test_python_examples_run(code, folder, capsys):
    with contextlib.chdir(folder):
        exec(compile(code, "README.md", "exec"), {"__name__": "__main__"})
    assert capsys.readouterr().out.strip()


def test_the_first_example_has_three_lines_and_gives_a_dataset(folder):
    import xarray as xr

    first = next(b.text for b in BLOCKS if b.language == "python")
    assert len([line for line in first.splitlines() if line]) == 3
    names: dict[str, object] = {}
    exec(first, names)
    assert isinstance(names["arrivals"], xr.Dataset)


def test_headings_that_are_linked_to_exist():
    headings = re.findall(r"^#+ (.*)$", README, re.M)
    anchors = {re.sub(r"[^\w\- ]", "", h.lower()).replace(" ", "-") for h in headings}
    links = set(re.findall(r"\]\(#([^)]+)\)", README))
    assert links
    assert links <= anchors, links - anchors


def test_sections_that_a_guide_must_have():
    headings = re.findall(r"^## (.*)$", README, re.M)
    for wanted in ("Quick start", "A first answer in a minute", "Three jobs", "From Python",
                   "The scenario file", "How good is it?", "What it will not do", "Cautions",
                   "How to cite", "Licence"):  # fmt: skip
        assert wanted in headings
