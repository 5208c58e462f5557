"""The page as a file: whole, self-contained, small, and safe whatever names it is given."""

from __future__ import annotations

import base64
import hashlib
import json
import re
from html.parser import HTMLParser

import numpy as np
import pytest

from waveguide.planning import planned
from waveguide.report.page import page
from waveguide.report.page_data import page_data
from waveguide.report.page_shore import UNITS_PER_DEGREE, shore_rings
from waveguide.route_sections import route_sections
from waveguide.scenario import Scenario

HOSTILE = [
    "</script><script>document.title='caught'</script>",
    "<img src=x onerror=\"document.title='caught'\">",
    "\u202eevil\u202c & <b>bold</b>",
    "two\nlines {{data}} {{script}}",
    "n" * 120,
    "-->]]><!--",
]
PLACES = [[-77.17, -12.06], [-72.12, -17.01], [-71.64, -33.02], [-70.42, -23.65], [-73.2, -39.8],
          [-120.0, -40.0]]  # fmt: skip


@pytest.fixture(scope="module")
def data():
    scenario = Scenario.model_validate({
        "title": "</title><script>document.title='caught'</script>",
        "description": "<!-- </style> &amp;",
        "event": {"name": "<script>1</script>", "box": [178.0, -1.0, -178.0, 1.0],
                  "start": "2031-03-05T00:00:00Z", "duration_days": 20, "amplitude_m": 0.2},
        "waves": {"modes": [1, 2], "period_days": 60},
        "targets": [{"name": n, "position": p} for n, p in zip(HOSTILE, PLACES, strict=True)],
        "uncertainty": {"members": 64},
    })  # fmt: skip
    found = planned(scenario)
    return page_data(found.study.dataset, found.dataset, route_sections(found.study))


@pytest.fixture(scope="module")
def text(data) -> str:
    return page(data)


class Elements(HTMLParser):
    """Names of elements with their attributes, and the text within script and style."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.found: list[tuple[str, dict[str, str | None]]] = []
        self.texts: list[str] = []
        self.inside = False
        self.feed(text)
        self.close()

    def handle_starttag(self, tag, attrs):
        self.found.append((tag, dict(attrs)))
        self.inside = tag in ("script", "style")
        if self.inside:
            self.texts.append("")

    def handle_endtag(self, tag):
        self.inside = False

    def handle_data(self, data):
        if self.inside:
            self.texts[-1] += data


def test_names_add_no_element(text):
    tags = [tag for tag, _ in Elements(text).found]
    assert tags.count("script") == 2
    assert tags.count("style") == 1
    assert tags.count("title") == 1
    assert "img" not in tags
    assert "b" not in tags
    handlers = [name for _, attrs in Elements(text).found for name in attrs if name[:2] == "on"]
    assert handlers == []


def test_data_block_is_the_data(text, data):
    block = re.search(r'<script type="application/json" id="data">(.*?)</script>', text, re.S)[1]
    assert "<" not in block
    assert json.loads(block) == json.loads(json.dumps(data))
    names = [target["name"] for target in json.loads(block)["targets"]]
    assert names[0] == HOSTILE[0]
    assert names[2] == "\\u202eevil\\u202c & <b>bold</b>"
    assert names[3] == "two\\x0alines {{data}} {{script}}"
    assert len(names[4]) == 80


def test_policy_allows_the_own_script_and_style_alone(text):
    elements = Elements(text)
    policy = next(a["content"] for t, a in elements.found if t == "meta" and "http-equiv" in a)
    assert policy.startswith("default-src 'none'; ")
    assert "unsafe" not in policy
    style, _, script = elements.texts
    for kind, content in (("style", style), ("script", script)):
        digest = base64.b64encode(hashlib.sha256(content.encode()).digest()).decode()
        assert f"{kind}-src 'sha256-{digest}'" in policy


def test_nothing_is_asked_of_a_network(text):
    for tag, attributes in Elements(text).found:
        for name in ("src", "href", "srcset", "action", "data", "poster"):
            value = attributes.get(name)
            assert value is None or value.startswith("data:"), (tag, name, value)
    addresses = re.findall(r"https?://[^\s\"'<]+", text)
    assert set(addresses) == {"http://www.w3.org/2000/svg"}  # the name of SVG, never asked for
    assert "@import" not in text
    assert "url(" not in text
    assert "fetch(" not in text
    assert "XMLHttpRequest" not in text


def test_script_sets_texts_and_never_markup(text):
    script = Elements(text).texts[2]
    for word in ("innerHTML", "outerHTML", "insertAdjacentHTML", "document.write", "eval("):
        assert word not in script


def test_page_is_small_and_has_every_row_in_its_table(text, data):
    assert len(text.encode()) < 5_000_000
    body = text.split("<tbody>")[1].split("</tbody>")[0]
    assert body.count("<tr>") == len(data["targets"]) * len(data["modes"])
    assert "&lt;b&gt;bold" in body
    assert data["caution"].split(":")[0] in text


def test_routes_come_back_from_their_steps(data):
    for route in data["routes"]:
        count = sum(leg["vertices"] for leg in route["legs"])
        assert {len(route[key]) for key in ("lon", "lat", "days", "km")} == {count}
        days, km = np.cumsum(route["days"]) / 1e3, np.cumsum(route["km"]) / 10.0
        assert np.all(np.diff(days) >= 0.0)
        assert np.all(np.diff(km) >= -0.11)
        if route["kind"] == "earliest":
            row = data["targets"][route["target"]]["rows"][route["mode"]]
            assert days[-1] == pytest.approx(row["front"], abs=2e-3)
            assert km[-1] == pytest.approx(row["km"], abs=0.2)
            lon, lat = (np.cumsum(route[key])[-1] / 1e3 for key in ("lon", "lat"))
            target = data["targets"][route["target"]]
            assert (lon, lat) == pytest.approx((target["lon"], target["lat"]), abs=2e-3)


def test_rows_not_reached_say_why_and_nothing_else(data):
    assert data["targets"][-1]["rows"] == [{"status": "target off the guide"}] * 2


def test_every_check_has_a_number_a_limit_and_a_verdict(data):
    for target in data["targets"][:-1]:
        for row in target["rows"]:
            assert len(row["checks"]) >= 8
            raised = sum(beyond for _, _, _, beyond in row["checks"])
            assert raised <= len(row["cautions"])  # one for each number beyond its limit
            for name, value, bound, beyond in row["checks"]:
                assert name
                assert isinstance(value, float)
                assert bound.split()[0] in ("below", "above")
                assert isinstance(beyond, bool)


def test_shore_is_fine_close_to_the_routes_and_coarse_elsewhere():
    def around(rings, west, south, east, north):
        count = 0
        for ring in rings:
            lon, lat = (np.cumsum(ring[k::2]) / UNITS_PER_DEGREE for k in (1, 2))
            count += np.sum((lon > west) & (lon < east) & (lat > south) & (lat < north))
        return count

    chile = shore_rings(np.full(20, -73.0), np.linspace(-45.0, -35.0, 20))
    norway = shore_rings(np.full(20, 8.0), np.linspace(58.0, 65.0, 20))
    assert around(chile, -76, -50, -71, -41) > 1.5 * around(norway, -76, -50, -71, -41)
    assert around(norway, 4, 58, 14, 66) > 1.5 * around(chile, 4, 58, 14, 66)
    assert len(json.dumps(chile)) < 1_000_000


def test_shore_keeps_land_where_it_is():
    rings = shore_rings(np.array([150.0]), np.array([-30.0]))
    outlines = [
        [np.cumsum(ring[k::2]) / UNITS_PER_DEGREE for k in (1, 2)] for ring in rings if not ring[0]
    ]
    # Australia: the ring that reaches farthest south-east of 113°E 39°S
    lon, lat = next(
        (x, y) for x, y in outlines
        if 112.0 < x.min() < 114.5 and x.max() > 153.0 and y.min() > -40.0
    )
    assert lon.max() == pytest.approx(153.64, abs=0.1)  # Cape Byron
    assert lat.max() == pytest.approx(-10.69, abs=0.1)  # Cape York
