"""Targets from a CSV file."""

from __future__ import annotations

import pytest

from waveguide.errors import InputError
from waveguide.scenario import read_scenario

TOP = """
title = "A test"
targets_file = "gauges.csv"
[event]
position = [0, 0]
start = 2031-03-05T00:00:00Z
duration_days = 3
[waves]
modes = [1]
period_days = 20
"""


@pytest.fixture
def read(tmp_path):
    """Read a scenario whose targets are in a CSV file of the given content."""

    def go(content: str | bytes, more: str = ""):
        data = content if isinstance(content, bytes) else content.encode()
        (tmp_path / "gauges.csv").write_bytes(data)
        path = tmp_path / "case.toml"
        path.write_text(TOP + more, encoding="utf-8")
        return read_scenario(path)

    return go


def problems(read, content: str | bytes) -> list[str]:
    with pytest.raises(InputError) as caught:
        read(content)
    return caught.value.problems


@pytest.mark.parametrize(
    "content",
    [
        "name,longitude,latitude\nA,1.5,-2\n\nB, 350 ,3\n",
        "id,LAT,Lon,Name,note\r\n7,-2,1.5,A,x\r\n8,3,350,B,\r\n",
        b"\xef\xbb\xbfname,lon,lat\nA,1.5,-2\nB,350,3",
    ],
)
def test_the_usual_forms_are_read(read, content):
    targets = read(content).targets
    assert [(t.name, t.position) for t in targets] == [("A", (1.5, -2.0)), ("B", (-10.0, 3.0))]


def test_inline_targets_come_first(read):
    more = '[[targets]]\nname = "C"\nposition = [4, 5]\n'
    assert [t.name for t in read("name,lon,lat\nA,1,2\n", more).targets] == ["C", "A"]


@pytest.mark.parametrize(
    ("content", "words"),
    [
        ("", ("row 1", "no column name", "name,longitude,latitude")),
        ("name,longitude\nA,1\n", ("no column latitude", "'longitude'")),
        ("name;lon;lat\nA;1;2\n", ("no column name", "commas")),
        ("name,lon,lat\n", ("gauges.csv", "no targets")),
        ("name,lon,lat\n\n , ,\n", ("no targets",)),
        ("name,lon,lat\nA,1,2\nB,x,2\n", ("row 3", "'x' is not a number")),
        ('name,lon,lat\nB,"1,5",2\n', ("row 2", "'1,5'", "point")),
        ("name,lon,lat\nA,1,2\nB,1\n", ("row 3", "only 2 columns")),
        ("name,lon,lat\nA,1,2\n,1,2\n", ("row 3 name", "must not be empty")),
        ("name,lon,lat\nA,nan,2\n", ("row 2 position", "finite")),
        ("name,lon,lat\nA,1,2\nB,2,110\n", ("row 3 position", "swapped")),
        ("name,lon,lat\nA,1,2\nA,2,3\n", ("distinct", "'A'")),
        (b"name,lon,lat\n\xe9,1,2\n", ("gauges.csv", "UTF-8")),
        (b"name,lon,lat\nA\x00,1,2\n", ("row 2 name", "NUL")),
    ],
)
def test_problems_name_the_row(read, content, words):
    lines = problems(read, content)
    assert len(lines) == 1
    assert all(word in lines[0] for word in words), lines


def test_every_bad_row_is_told(read):
    lines = problems(read, "name,lon,lat\nA,x,2\nB,2,y\nC,2,-95\n")
    assert [any(f"row {n}" in line for line in lines) for n in (2, 3, 4)] == [True] * 3


def test_a_targets_file_that_is_not_there(tmp_path):
    path = tmp_path / "case.toml"
    path.write_text(TOP, encoding="utf-8")
    with pytest.raises(InputError, match=r"targets_file = 'gauges.csv': there is no such file"):
        read_scenario(path)
