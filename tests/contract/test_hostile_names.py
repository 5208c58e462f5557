"""Names out of files with markup, formulas, line breaks, escapes, right-to-left letters and length.

They are data wherever they are shown: on the terminal, in CSV, GeoJSON, NetCDF, figures, the page.
"""

from __future__ import annotations

import csv
import json
import os
import subprocess
import sys
import unicodedata

import numpy as np
import pytest
import xarray as xr
from matplotlib.figure import Figure
from matplotlib.text import Text

from waveguide.planning import planned
from waveguide.report.document import document
from waveguide.report.files import write_outputs
from waveguide.report.page import write_page
from waveguide.report.plan_files import write_plan
from waveguide.report.plan_text import plan_document, plan_table
from waveguide.report.table import table
from waveguide.report.text import columns
from waveguide.route_sections import route_sections
from waveguide.scenario import read_scenario

HOSTILE = [
    "</script><script>alert(1)</script>",
    "<b onclick=\"x\">&amp;</b>",
    "=HYPERLINK(\"http://x\")",
    "@SUM(A1)",
    "two\nlines\r\nand a \x1b[31mcolour",
    "\u202e" + "evil" + "\u202c",
    "مرفأ حيفا",
    "$x_1$ \\frac{ % # {{data}}",
    "東京" * 30,
    "n" * 120,
    "a\u2028b\u0085c\u200bd",
]
PLACES = [(-77.2, -12.1), (-72.1, -17.0), (-71.6, -33.0), (-70.4, -23.65), (-73.2, -39.8),
          (-81.3, -6.0), (-79.0, -8.2), (-76.3, -14.0), (-70.3, -18.5), (-70.2, -20.2),
          (-73.1, -36.7)]  # fmt: skip
UNSAFE = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}
MARK = "\u200e"  # closes a right-to-left name in a table, so that it does not turn the line


def unsafe(text: str, allowed: str = "\n") -> list[str]:
    return [c for c in text if c not in allowed and unicodedata.category(c) in UNSAFE]


@pytest.fixture(scope="module")
def scenario_file(tmp_path_factory):
    """A scenario with its targets in a CSV file, as a spreadsheet would write them."""
    folder = tmp_path_factory.mktemp("hostile")
    with (folder / "gauges.csv").open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(["name", "longitude", "latitude"])
        writer.writerows([name, *place] for name, place in zip(HOSTILE, PLACES, strict=True))
    title = json.dumps("</title><script>alert(1)</script> \u202eevil\n$x$")
    (folder / "bad.toml").write_text(f"""
title = {title}
description = "<!-- </style> \\u001b[2J"
targets_file = "gauges.csv"
[event]
name = "<i>burst</i> \\u202e\\n=1+1"
position = [-81.3, -5.0]
start = 2031-03-05T00:00:00Z
duration_days = 6
amplitude_m = 0.2
[waves]
modes = [1]
period_days = 20
[uncertainty]
members = 64
""", encoding="utf-8")
    return folder / "bad.toml"


@pytest.fixture(scope="module")
def answer(scenario_file):
    return planned(read_scenario(scenario_file))


@pytest.fixture(scope="module")
def written(answer, tmp_path_factory):
    """A folder with every file, and all texts of the figures in it."""
    folder = tmp_path_factory.mktemp("out")
    texts: list[Text] = []
    save = Figure.savefig

    def remember(figure, *arguments, **options):
        texts.extend(figure.findobj(Text))
        return save(figure, *arguments, **options)

    arrivals = answer.study.dataset
    formats = ["csv", "netcdf", "geojson", "map", "waveforms", "distance-time", "budget"]
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Figure, "savefig", remember)
        write_outputs(arrivals, folder, formats)
    write_plan(answer.dataset, folder, ["csv", "netcdf"])
    write_page(arrivals, answer.dataset, route_sections(answer.study), folder)
    return folder, texts


def test_the_names_are_read_as_they_are(answer):
    assert answer.study.dataset["target"].values.tolist() == HOSTILE
    assert (answer.study.dataset["status"].values == "reached").all()


def test_terminal(answer):
    for text in (table(answer.study.dataset, budget=True), plan_table(answer.dataset)):
        assert unsafe(text, "\n" + MARK) == []
        assert max(map(columns, text.splitlines())) <= 130
        rows = [line for line in text.splitlines() if line.startswith("two\\x0alines")]
        assert rows


def test_json_keeps_the_names_and_shows_no_control_character(answer):
    for found in (document(answer.study.dataset), plan_document(answer.dataset)):
        text = json.dumps(found)
        assert unsafe(text) == []
        rows = json.loads(text).get("arrivals") or json.loads(text)["rows"]
        assert [row["target"] for row in rows] == HOSTILE


def test_csv(written):
    folder, _ = written
    files = sorted(folder.glob("*.csv"))
    assert {f.name for f in files} >= {"arrivals.csv", "legs.csv", "plan.csv", "waveforms.csv",
                                       "budget.csv"}  # fmt: skip
    for path in files:
        with path.open(encoding="utf-8", newline="") as file:
            rows = list(csv.reader(file))
        assert len({len(row) for row in rows}) == 1, path.name
        for cell in (cell for row in rows for cell in row):
            assert unsafe(cell) == [], path.name
            assert "\n" not in cell
            if cell.startswith(("=", "@", "+", "-")):
                float(cell)  # a number, not a formula


def test_geojson(written):
    folder, _ = written
    found = json.loads((folder / "routes.geojson").read_text(encoding="utf-8"))
    points = [f["properties"]["name"] for f in found["features"]
              if f["properties"]["feature"] == "target"]  # fmt: skip
    assert len(set(points)) == len(HOSTILE)
    assert unsafe((folder / "routes.geojson").read_text(encoding="utf-8")) == []


def test_netcdf_keeps_the_names(written):
    folder, _ = written
    for name in ("arrivals.nc", "plan.nc"):
        with xr.open_dataset(folder / name) as stored:
            assert stored["target_name"].values.tolist() == HOSTILE


def test_figures_hold_no_formula_and_no_unsafe_character(written):
    _, texts = written
    said = [t for t in texts if t.get_text()]
    assert any("two\\x0alines" in t.get_text() for t in said)
    for text in said:
        assert unsafe(text.get_text(), "\n" + MARK) == [], text.get_text()
        if "$x_1$" in text.get_text():
            assert not text.get_parse_math()


def test_page(written):
    folder, _ = written
    text = (folder / "page.html").read_text(encoding="utf-8")
    assert text.count("<script") == 2
    assert "<i>burst" not in text
    assert "<b onclick" not in text
    assert unsafe(text, "\n\t") == []


def shell(*arguments: object) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-c", "from waveguide.cli import main; main()", *map(str, arguments)],
        capture_output=True, text=True, env=os.environ, check=False,
    )  # fmt: skip


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (('name = "<i>', '"\\u001b[31m\\u202ekey" = 1\nname = "<i>'), "unknown key in [event]"),
        (("position = [-81.3, -5.0]", "position = [-81.3, -5.0]\nshape = \"\\u001b[31m\""),
         "event.shape"),
        (("modes = [1]", "modes = [1]\ndrag_m_s = \"\\u202e1\""), "waves.drag_m_s"),
        (("gauges.csv", "\\u001b[31mgauges.csv"), "there is no such file"),
    ],
)  # fmt: skip
def test_what_a_message_quotes_is_escaped(scenario_file, tmp_path, change, words):
    path = tmp_path / "b\x1b[31m\u202ead.toml"
    path.write_text(scenario_file.read_text(encoding="utf-8").replace(*change), encoding="utf-8")
    (tmp_path / "gauges.csv").write_bytes((scenario_file.parent / "gauges.csv").read_bytes())
    done = shell("arrivals", path, "--out", tmp_path / "out")
    assert done.returncode == 2
    assert words in done.stderr
    assert len(done.stderr.splitlines()) == 1
    assert unsafe(done.stderr) == []
    assert "Traceback" not in done.stderr
    assert not (tmp_path / "out").exists()


def test_a_name_that_is_too_long_is_refused_with_its_row(scenario_file, tmp_path):
    (tmp_path / "bad.toml").write_bytes(scenario_file.read_bytes())
    (tmp_path / "gauges.csv").write_text(
        f"name,longitude,latitude\n{'n' * 100_000},-77.2,-12.1\n \t ,-77.2,-12.1\n", "utf-8"
    )
    done = shell("arrivals", tmp_path / "bad.toml")
    assert done.returncode == 2
    lines = done.stderr.splitlines()
    assert "gauges.csv row 2 name" in lines[0]
    assert "at most 120 characters" in lines[0]
    assert "gauges.csv row 3 name" in lines[1]
    assert max(map(len, lines)) < 300


def test_numbers_are_finite_whatever_the_names(answer):
    assert np.isfinite(answer.study.dataset["front_time_days"].values).all()
