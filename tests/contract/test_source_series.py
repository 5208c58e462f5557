"""The CSV file of a source's time function: what is read and what is refused."""

from __future__ import annotations

from datetime import UTC, datetime
from pathlib import Path

import pytest
from numpy.testing import assert_allclose

from waveguide.errors import InputError
from waveguide.scenario.source_series import read_source_series

START = datetime(2031, 3, 5, tzinfo=UTC)


def write(folder: Path, text: str) -> Path:
    path = folder / "burst.csv"
    path.write_text(text, encoding="utf-8")
    return path


def test_reads_times_in_any_zone_and_ignores_other_columns(tmp_path: Path) -> None:
    text = (
        "Value,note,time\n0.1,a,2031-03-04T18:00Z\n\n0.2,,2031-03-05T02:00:00+02:00\n"
        "-3e-1,b,2031-03-05T06:00Z\n"
    )
    time, value = read_source_series(write(tmp_path, text), START)
    assert_allclose(time, [-21600.0, 0.0, 21600.0])
    assert_allclose(value, [0.1, 0.2, -0.3])


def test_tells_all_rows_that_cannot_be_read(tmp_path: Path) -> None:
    text = (
        "time,value\n2031-03-05T00:00,1\nyesterday,1\n2031-03-05T12:00Z,\n2031-03-06T00:00Z,nan\n"
        "2031-03-06T12:00Z\n2031-03-07T00:00Z,-9999\n"
    )
    with pytest.raises(InputError) as caught:
        read_source_series(write(tmp_path, text), START)
    for words in (
        "row 2: time = '2031-03-05T00:00' lacks its zone",
        "row 3: time = 'yesterday' is not a date",
        "row 4: value = '' is not a number; gaps are not filled",
        "row 5: value = 'nan' is not a number",
        "row 6: a column is missing",
        "row 7: value = '-9999' is no sea level",
    ):
        assert any(words in problem for problem in caught.value.problems)
    assert len(caught.value.problems) == 6


@pytest.mark.parametrize(
    ("text", "words"),
    [("when,height\n", "write time,value"), ("", "write time,value")],
)
def test_refuses_other_headers(tmp_path: Path, text: str, words: str) -> None:
    with pytest.raises(InputError, match=words):
        read_source_series(write(tmp_path, text), START)


def test_refuses_what_is_no_text(tmp_path: Path) -> None:
    path = tmp_path / "burst.csv"
    path.write_bytes(b"time,value\n\xff\xfe,1\n")
    with pytest.raises(InputError, match="cannot be read as CSV"):
        read_source_series(path, START)
    with pytest.raises(InputError, match="cannot be read as CSV"):
        read_source_series(tmp_path / "absent.csv", START)
