"""The table for the terminal and the JSON document."""

from __future__ import annotations

import json
import unicodedata

import numpy as np
import pytest

from waveguide.report.document import document
from waveguide.report.table import table
from waveguide.report.text import columns, pad, plain


def test_names_cannot_break_a_line():
    text = plain("a\nb\t\x1b[31m\u202e\u2028\u00a0z", 80)
    assert text == r"a\x0ab\x09\x1b[31m\u202e\u2028 z"
    assert len(plain("x" * 1000)) == 40
    assert plain("e\u0301") == "é"


def test_padding_counts_columns():
    assert columns("東京") == 4
    assert pad("東京", 6) == "東京  "
    assert pad("7", 3, right=True) == "  7"
    assert pad("חיפה", 6) == "חיפה\u200e  "  # the mark has no width


def test_the_table_tells_the_answer(arrivals):
    text = table(arrivals)
    lines = text.splitlines()
    assert max(map(columns, lines)) <= 120
    assert not [c for c in text if c != "\n" and unicodedata.category(c) in ("Cc", "Cf")]
    row = next(line for line in lines if line.startswith("Callao") and " 1 " in line)
    front = float(arrivals["front_time_days"][0, 0])
    for word in (f"{front:.2f}", "2031-05-", "14258", "0.5", "reached"):
        assert word in row
    assert any("Acapulco" in line and line.endswith("no route") for line in lines)
    assert "alternative via Galápagos: equator 11689 km → facing coast" in text
    assert "ω/|f| is not small (Callao mode 1, Callao mode 2)" in text
    assert "no warning system" in text
    units = next(line for line in lines if "(days)" in line)
    assert "(m)" not in units  # the event's amplitude is unknown


def test_amplitude_in_metres_is_shown_where_it_is_known(arrivals):
    known = arrivals.assign(amplitude_m=(0.1 * arrivals["amplitude_ratio"]).assign_attrs(units="m"))
    known.attrs["event_amplitude_m"] = 0.1
    text = table(known)
    assert "0.1 m" in text
    assert "0.051" in text


def test_the_table_of_nothing_reached(arrivals):
    text = table(arrivals.isel(target=[2], route=[], leg=[], vertex=[]))
    assert "off the guide" in text
    assert "Routes" not in text


@pytest.fixture
def parsed(arrivals):
    def refuse(constant: str) -> None:
        raise AssertionError(f"{constant} is not JSON")

    return json.loads(json.dumps(document(arrivals)), parse_constant=refuse)


def test_the_document_has_a_row_for_each_target_and_mode(arrivals, parsed):
    rows = [(a["target"], a["mode"]) for a in parsed["arrivals"]]
    names = arrivals["target"].values.tolist()
    assert rows == [(name, mode) for name in names for mode in (1, 2)]


def test_keys_of_the_document(parsed):
    for row in parsed["arrivals"]:
        assert {"target", "mode", "status", "front_time_days", "amplitude_ratio",
                "path_length_km", "legs"} <= set(row)  # fmt: skip
        for leg in row["legs"]:
            assert {"kind", "from", "to", "length_km", "time_days", "phase_speed_m_s"} <= set(leg)
    assert parsed["event"]["position"] == [165.0, 0.5]
    assert parsed["event"]["amplitude_m"] is None


def test_legs_of_the_document_join_and_add_up(parsed):
    row = parsed["arrivals"][0]
    assert row["front_date"].startswith("2031-05-09T")
    assert [leg["kind"] for leg in row["legs"]] == ["attachment", "equator", "coast"]
    for before, after in zip(row["legs"], row["legs"][1:], strict=False):
        assert before["to"] == after["from"]
    total = sum(leg["time_days"] for leg in row["legs"])
    assert np.isclose(total, row["front_time_days"], rtol=1e-8)  # nine digits are printed
    length = sum(leg["length_km"] for leg in row["legs"])
    assert np.isclose(length, row["path_length_km"], rtol=1e-8)


def test_rows_without_an_arrival_say_why(parsed):
    row = parsed["arrivals"][3]
    assert row["status"] == "no route"
    assert row["front_time_days"] is row["path_length_km"] is row["amplitude_ratio"] is None
    assert row["legs"] == []


def test_alternatives_are_listed(parsed):
    (other,) = parsed["alternatives"]
    assert (other["target"], other["mode"], other["kind"]) == ("Callao", 1, "alternative")
    assert other["front_time_days"] > parsed["arrivals"][0]["front_time_days"]
    assert len(other["legs"]) == 3
