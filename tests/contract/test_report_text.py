"""The table for the terminal and the JSON document."""

from __future__ import annotations

import json
import unicodedata

import numpy as np
import pytest
import xarray as xr

from waveguide.report.caution_text import cautions_text
from waveguide.report.document import document
from waveguide.report.table import table
from waveguide.report.text import columns, pad, plain


def test_names_cannot_break_a_line():
    text = plain("a\nb\t\x1b[31m\u202e\u2028\u00a0z", 80)
    assert text == r"a\x0ab\x09\x1b[31m\u202e\u2028 z"
    assert len(plain("x" * 1000)) == 40
    assert columns(plain("東" * 1000)) == 39  # two columns each, and an ellipsis of one
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
    assert "earliest via the equator: attachment 55 km → equator" in text
    assert "alternative via Galápagos: 67.30 days, amplitude ratio 0.512" in text
    assert "no warning system" in text
    units = next(line for line in lines if "(days)" in line)
    assert "(m)" not in units  # the event's amplitude is unknown


def test_modes_are_summed_with_their_shares(arrivals):
    text = table(arrivals)
    line = next(line for line in text.splitlines() if line.startswith("Callao") and " sum " in line)
    # By hand (conftest): 0.7 × mode 1 is the larger peak, 0.5 at 70.28 d, in steps of half a day.
    assert line.split() == ["Callao", "sum", "70.5", "0.348", "peak", "2031-05-14", "12", "h"]
    expected = 0.35 * np.exp(-(((70.5 - float(arrivals["peak_time_days"][0, 0])) / 3.0) ** 2))
    assert "70 % mode 1, 30 % mode 2." in " ".join(text.split())
    assert not any(line.startswith("=Lima") and " sum " in line for line in text.splitlines())
    (first, second) = document(arrivals)["sums"]
    assert (first["target"], first["peak_time_days"]) == ("Callao", 70.5)
    assert first["peak_date"] == "2031-05-14T12:00:00Z"
    assert first["amplitude_m"] is None
    assert first["peak_ratio"] == pytest.approx(expected, rel=1e-8)
    assert second["target"] == "Acapulco"


def test_one_mode_has_no_sum(arrivals):
    one = arrivals.isel(
        mode=[0], route=[0], leg=slice(0, 3), vertex=slice(0, 11), remark=[], instrument=[]
    )
    assert " sum " not in table(one)
    assert document(one)["sums"] == []


def test_cautions_are_told_once_with_the_range_of_their_numbers(arrivals):
    told = table(arrivals).split("Cautions, the most serious first")[1].splitlines()[1:]
    assert told[:6] == [
        "  ω/|f| reaches 0.33 to 0.51 on the route: the wave is not slow beside the earth's "
        "rotation",
        "      all answers",
        "  the water beside the coast is 2.2 R wide on a twentieth of the way: the other shore is "
        "felt",
        "      Callao (mode 1)",
        "  the coast bends within 0.8 R on a twentieth of the way: bends shift the phase",
        "      Acapulco (mode 1)",
    ]
    assert "no warning system" in told[6]


@pytest.mark.parametrize(
    ("rows", "words"),
    [
        ([(0, 0), (1, 0)], "all targets in mode 1"),
        ([(0, 0), (0, 1)], "all answers but Acapulco (mode 1)"),
        ([(0, 1), (1, 0)], "all answers but Callao (mode 1)"),
        ([(0, 1)], "all targets in mode 2"),
        ([(1, 0)], "Acapulco (mode 1)"),
    ],
)
def test_whom_a_caution_concerns_is_said_exactly(arrivals, rows, words):
    few = arrivals.isel(remark=np.arange(len(rows)))
    few["remark_kind"].values[:] = "season"
    few["remark_target"].values[:], few["remark_mode"].values[:] = np.transpose(rows)
    assert f"\n      {words}\n" in table(few)


def test_long_lists_of_targets_end_in_a_count(arrivals):
    names = [f"gauge {i}" for i in range(14)]
    many = xr.Dataset({
        "status": (("target", "mode"), [["reached"]] * 13 + [["no route"]]),
        "remark_target": ("remark", list(range(10))), "remark_mode": ("remark", [0] * 10),
        "remark_kind": ("remark", ["season"] * 10), "remark_number": ("remark", [20.0] * 10),
    }, {"target": names, "mode": [1]}, arrivals.attrs)  # fmt: skip
    assert "gauge 7 · 2 more (mode 1)" in cautions_text(many)


def test_amplitude_in_metres_is_shown_where_it_is_known(arrivals):
    known = arrivals.assign(amplitude_m=(0.1 * arrivals["amplitude_ratio"]).assign_attrs(units="m"))
    known.attrs["event_amplitude_m"] = 0.1
    text = table(known)
    assert "0.1 m" in text
    assert "0.051" in text


def test_the_table_of_nothing_reached(arrivals):
    text = table(arrivals.isel(target=[2], route=[], leg=[], vertex=[], remark=[]))
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


def test_every_caution_is_in_the_document_with_its_number(arrivals, parsed):
    found = {
        (row["target"], row["mode"]): [(c["kind"], c["number"], c["unit"]) for c in row["cautions"]]
        for row in parsed["arrivals"]
    }
    assert found["Callao", 1] == [("fast wave", 0.42, "1"), ("narrow basin", 2.2, "R")]
    assert found["Callao", 2] == [("fast wave", 0.51, "1")]
    assert sum(map(len, found.values())) == arrivals.sizes["remark"]


def test_alternatives_are_listed(parsed):
    (other,) = parsed["alternatives"]
    assert (other["target"], other["mode"], other["kind"]) == ("Callao", 1, "alternative")
    assert other["front_time_days"] > parsed["arrivals"][0]["front_time_days"]
    assert len(other["legs"]) == 3
