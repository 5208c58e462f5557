"""The page in a browser with the network off: it loads, moves, answers to pointer and keys.

Needs the command `chromium` (Debian: apt-get install chromium) and is skipped without it. The
browser is spoken to over pipes in its DevTools protocol, so no further package is needed.
"""

from __future__ import annotations

import base64
import fcntl
import io
import json
import os
import re
import shutil
import subprocess
import time
from typing import Any

import numpy as np
import pytest

from waveguide.planning import planned
from waveguide.report.page import write_page
from waveguide.route_sections import route_sections
from waveguide.scenario import Scenario, read_scenario

CHROMIUM = shutil.which("chromium")
pytestmark = pytest.mark.skipif(CHROMIUM is None, reason="the command chromium is not installed")

SIZE = 1280, 960
OPTIONS = [
    "--headless=new", "--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage",
    "--remote-debugging-pipe", "--host-resolver-rules=MAP * ~NOTFOUND", "--hide-scrollbars",
    f"--window-size={SIZE[0]},{SIZE[1]}", "about:blank",
]  # fmt: skip


class Browser:
    """A page of headless Chromium."""

    def __init__(self, folder) -> None:
        theirs_in, ours_out = os.pipe()
        ours_in, theirs_out = os.pipe()
        # the browser reads descriptor 3 and writes 4; copies far above them survive the exchange
        high = [fcntl.fcntl(end, fcntl.F_DUPFD, 30) for end in (theirs_in, theirs_out)]

        def exchange() -> None:
            os.dup2(high[0], 3)
            os.dup2(high[1], 4)

        self.process = subprocess.Popen(
            [CHROMIUM, f"--user-data-dir={folder}", *OPTIONS], pass_fds=(3, 4),
            preexec_fn=exchange, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL,
        )  # fmt: skip
        for end in (theirs_in, theirs_out, *high):
            os.close(end)
        self.input, self.output = os.fdopen(ours_in, "rb", 0), os.fdopen(ours_out, "wb", 0)
        self.rest, self.count, self.session = b"", 0, None
        self.events: list[dict[str, Any]] = []
        target = self.call("Target.createTarget", url="about:blank")["targetId"]
        attached = self.call("Target.attachToTarget", targetId=target, flatten=True)
        self.session = attached["sessionId"]
        for domain in ("Page", "Runtime", "Log", "Network"):
            self.call(f"{domain}.enable")

    def call(self, method: str, **parameters: Any) -> dict[str, Any]:
        self.count += 1
        message = {"id": self.count, "method": method, "params": parameters}
        if self.session:
            message["sessionId"] = self.session
        self.output.write(json.dumps(message).encode() + b"\0")
        while True:
            answer = self.receive()
            if answer.get("id") == self.count:
                assert "error" not in answer, answer
                return answer["result"]
            self.events.append(answer)

    def receive(self) -> dict[str, Any]:
        while b"\0" not in self.rest:
            part = self.input.read(1 << 16)
            assert part, "the browser has ended"
            self.rest += part
        message, self.rest = self.rest.split(b"\0", 1)
        return json.loads(message)

    def value(self, expression: str) -> Any:
        answer = self.call("Runtime.evaluate", expression=expression, returnByValue=True)
        assert "exceptionDetails" not in answer, answer["exceptionDetails"]
        return answer["result"].get("value")

    def open(self, path) -> None:
        self.call("Page.navigate", url=path.as_uri())
        self.wait("document.readyState === 'complete' && document.querySelector('#now')"
                  " && document.getElementById('now').textContent !== ''")

    def wait(self, condition: str) -> None:
        end = time.monotonic() + 30.0
        while not self.value(condition):
            assert time.monotonic() < end, condition
            time.sleep(0.05)

    def box(self, selector: str) -> tuple[float, float, float, float]:
        """Left, top, width and height of an element (pixels)."""
        return tuple(self.value(
            f"(() => {{ const b = document.querySelector('{selector}').getBoundingClientRect();"
            "return [b.left, b.top, b.width, b.height]; })()"
        ))  # fmt: skip

    def mouse(self, kind: str, x: float, y: float, **more: Any) -> None:
        self.call("Input.dispatchMouseEvent", type=kind, x=x, y=y, **more)

    def click(self, selector: str) -> None:
        self.value(f"document.querySelector('{selector}').click()")

    def key(self, key: str, selector: str = "body") -> None:
        self.value(
            f"document.querySelector('{selector}').dispatchEvent(new KeyboardEvent('keydown',"
            f"{{key: {json.dumps(key)}, bubbles: true, cancelable: true}}))"
        )

    def set_time(self, value: int) -> None:
        self.value(
            f"(() => {{ const t = document.getElementById('time'); t.value = {value};"
            "t.dispatchEvent(new Event('input')); })()"
        )

    def picture(self, selector: str | None = None) -> np.ndarray:
        """Pixels of the window or of an element, shape (height, width, 3), 0 to 1."""
        from matplotlib.image import imread

        clip = {}
        if selector:
            x, y, width, height = self.box(selector)
            clip = {"clip": {"x": x, "y": y, "width": width, "height": height, "scale": 1}}
        shot = self.call("Page.captureScreenshot", format="png", **clip)
        return imread(io.BytesIO(base64.b64decode(shot["data"])))[..., :3]

    def complaints(self) -> list[Any]:
        """Errors and messages of the console, and addresses asked for beside the page itself."""
        found: list[Any] = []
        for event in self.events:
            if event["method"] in ("Runtime.exceptionThrown", "Log.entryAdded",
                                   "Runtime.consoleAPICalled"):
                found.append(event["params"])
            if event["method"] == "Network.requestWillBeSent":
                address = event["params"]["request"]["url"]
                if not address.startswith(("file:", "data:")):
                    found.append(address)
        return found

    def close(self) -> None:
        self.process.terminate()
        self.process.wait(20)
        self.input.close()
        self.output.close()


def written(scenario: Scenario, folder):
    found = planned(scenario)
    write_page(found.study.dataset, found.dataset, route_sections(found.study), folder)
    return folder / "page.html"


@pytest.fixture(scope="module")
def browser(tmp_path_factory):
    browser = Browser(tmp_path_factory.mktemp("profile"))
    yield browser
    browser.close()


@pytest.fixture(scope="module")
def pacific(tmp_path_factory):
    scenario = Scenario.model_validate({
        "title": "Across the Pacific",
        "event": {"name": "westerlies", "box": [155.0, -2.0, 175.0, 2.0],
                  "start": "2031-03-05T00:00:00Z", "duration_days": 15},
        "waves": {"modes": [1, 2], "period_days": 60},
        "targets": [{"name": "Callao", "position": [-77.17, -12.06]},
                    {"name": "Acapulco", "position": [-99.92, 16.82]},
                    {"name": "San Diego", "position": [-117.28, 32.68]}],
        "uncertainty": {"members": 512},
    })  # fmt: skip
    return written(scenario, tmp_path_factory.mktemp("pacific"))


@pytest.fixture
def page(browser, pacific):
    browser.events.clear()
    browser.open(pacific)
    yield browser
    assert browser.complaints() == []


def test_it_loads_and_is_not_blank(page):
    assert page.value("document.title") == "Across the Pacific"
    assert page.value("document.querySelectorAll('#list button').length") == 3
    whole, sea = page.picture(), page.picture("#map")
    assert whole.std() > 0.1
    # land, sea, both modes and the star of the event are all there
    for colour in ("#dcd8cf", "#eaf1f5", "#1f6fb4", "#e06c00", "#ffd23f"):
        wanted = np.array([int(colour[k : k + 2], 16) for k in (1, 3, 5)]) / 255.0
        share = np.mean(np.abs(sea - wanted).max(axis=-1) < 0.04)
        assert share > 5e-5, colour


def blue_reach(page) -> float:
    """Easternmost column of the map with the full colour of mode 1."""
    sea = page.picture("#map")
    blue = np.abs(sea - np.array([0x1F, 0x6F, 0xB4]) / 255.0).max(axis=-1) < 0.04
    return float(np.flatnonzero(blue.any(axis=0)).max(initial=0))


def test_the_slider_moves_the_front(page):
    reaches, clocks = [], []
    for value in (50, 120, 190):
        page.set_time(value)
        reaches.append(blue_reach(page))
        clocks.append(page.value("document.getElementById('now').textContent"))
    assert reaches[0] + 60 < reaches[1] < reaches[2] - 60
    assert len(set(clocks)) == 3
    assert clocks[0].startswith("day ")
    assert "2031-" in clocks[0]


def test_the_clock_runs_and_stops(page):
    page.set_time(0)
    page.key(" ")
    page.wait("Number(document.getElementById('time').value) > 5")
    page.key(" ")
    stopped = page.value("document.getElementById('time').value")
    time.sleep(0.3)
    assert page.value("document.getElementById('time').value") == stopped


def test_pointing_at_a_route_tells_of_the_place(page):
    left, top, width, height = page.box("#map")
    # somewhere along the equator the pointer meets the route
    found = ""
    for share in np.linspace(0.35, 0.65, 61):
        page.mouse("mouseMoved", left + 0.5 * width, top + share * height)
        if not page.value("document.getElementById('tip').hidden"):
            found = page.value("document.getElementById('tip').textContent")
            break
    assert "equator" in found
    assert "P10 to P90" in found
    assert "m/s" in found
    assert "of the source's" in found
    # the diagram of distance and time shows the same place, where it is on the target's own route
    page.key(">", "#map")
    mark = "document.querySelector('#path circle').getAttribute('visibility')"
    assert page.value(mark) == "visible"
    page.mouse("mouseMoved", left + 0.5 * width, top + 5)
    assert page.value("document.getElementById('tip').hidden")
    assert page.value(mark) == "hidden"


def test_the_diagram_points_at_the_map(page):
    page.click("#list li:nth-child(3) button")
    page.value("document.querySelector('#path').scrollIntoView()")
    left, top, width, height = page.box("#path svg")
    page.mouse("mouseMoved", left + 0.9 * width, top + 0.6 * height)
    assert not page.value("document.getElementById('tip').hidden")
    assert "coast" in page.value("document.getElementById('tip').textContent")
    assert page.value("!!document.querySelector('#tip svg')")  # the section of the coast there


def test_a_target_brings_its_windows_waveforms_and_budget(page):
    page.click("#list li:nth-child(3) button")
    assert page.value("document.getElementById('name').textContent") == "San Diego"
    assert page.value("document.querySelectorAll('#rows .row').length") == 2
    assert page.value("document.querySelectorAll('#wave path').length") == 3
    lengths = page.value(
        "[...document.querySelectorAll('#wave path')].map(p => p.getAttribute('d').length)"
    )
    assert min(lengths) > 1000
    text = page.value("document.getElementById('rows').textContent")
    for words in ("Look from", "Longest gap", "Measure first", "Time hangs on", "Where the theory",
                  "Energy left"):  # fmt: skip
        assert words in text
    assert page.value("document.querySelectorAll('#rows .budget rect').length") > 10
    page.key("[")
    assert page.value("document.getElementById('name').textContent") == "Acapulco"


def test_wheel_buttons_and_keys_move_and_magnify_the_map(page):
    start = page.picture("#map")
    left, top, width, height = page.box("#map")
    page.mouse("mouseWheel", left + 0.8 * width, top + 0.5 * height, deltaX=0, deltaY=-400)
    closer = page.picture("#map")
    assert np.abs(closer - start).mean() > 0.01
    page.key("ArrowLeft", "#map")
    moved = page.picture("#map")
    assert np.abs(moved - closer).mean() > 0.005
    page.mouse("mousePressed", left + 300, top + 300, button="left", buttons=1, clickCount=1)
    page.mouse("mouseMoved", left + 380, top + 320, button="left", buttons=1)
    page.mouse("mouseReleased", left + 380, top + 320, button="left", clickCount=1)
    dragged = page.picture("#map")
    np.testing.assert_allclose(dragged[50:300, 300:600], moved[30:280, 220:520], atol=0.7)
    assert np.abs(dragged - moved).mean() > 0.005
    page.key("0", "#map")
    assert np.abs(page.picture("#map") - start).mean() < 1e-3


def test_keys_walk_along_the_route_and_say_where(page):
    page.key(">", "#map")
    first = page.value("document.getElementById('said').textContent")
    page.key(">", "#map")
    second = page.value("document.getElementById('said').textContent")
    assert "day" in first
    assert "km from the source" in first
    assert first != second


def test_everything_interactive_has_a_name_and_contrast(page):
    unnamed = page.value(
        "[...document.querySelectorAll('button, input, canvas')].filter(e =>"
        "!e.textContent.trim() && !e.getAttribute('aria-label') && !e.labels?.length).length"
    )
    assert unnamed == 0
    undescribed = page.value(
        "[...document.querySelectorAll('main svg[role=img]')].filter(s =>"
        "!s.querySelector('title')?.textContent).length"
    )
    assert undescribed == 0
    poor = page.value("""(() => {
      const light = (c) => { const [r, g, b] = c.match(/[\\d.]+/g).slice(0, 3).map((v) => {
        const s = v / 255; return s <= 0.03928 ? s / 12.92 : ((s + 0.055) / 1.055) ** 2.4; });
        return 0.2126 * r + 0.7152 * g + 0.0722 * b; };
      const ground = (e) => { for (; e; e = e.parentElement) {
        const c = getComputedStyle(e).backgroundColor;
        if (!/rgba\\(.*, 0\\)/.test(c) && c !== 'transparent') return c; }
        return 'rgb(255, 255, 255)'; };
      return [...document.querySelectorAll('h1, h2, h3, p, dt, dd, li, label, output, button, span,'
        + 'figcaption, td, th, summary')].filter((e) => e.textContent.trim()).filter((e) => {
        const a = light(getComputedStyle(e).color), b = light(ground(e));
        return (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05) < 4.5; }).length; })()""")
    assert poor == 0


def test_print_view_hides_controls_and_shows_the_table(page):
    page.call("Emulation.setEmulatedMedia", media="print")
    page.value("window.dispatchEvent(new Event('beforeprint'))")
    hidden = page.value(
        "['.tools', '.zoom', '#time', '#play'].every(s =>"
        "getComputedStyle(document.querySelector(s)).display === 'none')"
    )
    assert hidden
    assert page.value("document.getElementById('all').open")
    pdf = page.call("Page.printToPDF", printBackground=True)["data"]
    page.call("Emulation.setEmulatedMedia", media="")
    assert base64.b64decode(pdf).startswith(b"%PDF")
    assert len(pdf) > 50_000


def test_the_dashed_line_is_told_with_the_shares(page):
    note = page.value("document.getElementById('sum').textContent")
    shares = [int(share) for share in re.findall(r"(\d+) %", note)]
    assert page.value("document.getElementById('sum').hidden") == (len(shares) < 2)
    assert 99 <= sum(shares) <= 101


def test_it_fits_a_narrow_window(page):
    page.call("Emulation.setDeviceMetricsOverride", width=390, height=800, deviceScaleFactor=2,
              mobile=True)
    page.wait("document.getElementById('map').width < 800")
    assert page.value("document.documentElement.scrollWidth") <= 392
    page.call("Emulation.clearDeviceMetricsOverride")


def test_hostile_names_run_nothing(browser, tmp_path):
    names = ["</script><script>document.title='caught'</script>",
             "<img src=x onerror=\"document.title='caught'\">", "\u202eevil", "a\nb", "n" * 120]
    places = [[-77.2, -12.1], [-72.1, -17.0], [-71.6, -33.0], [-70.4, -23.6], [-73.2, -39.8]]
    scenario = Scenario.model_validate({
        "title": "<b>bold</b>",
        "event": {"position": [-81.3, -5.0], "start": "2031-03-05T00:00:00Z", "duration_days": 6},
        "waves": {"modes": [1], "period_days": 20},
        "targets": [{"name": n, "position": p} for n, p in zip(names, places, strict=True)],
        "uncertainty": {"members": 64},
    })  # fmt: skip
    browser.events.clear()
    browser.open(written(scenario, tmp_path))
    for k in range(1, 6):
        browser.click(f"#list li:nth-child({k}) button")
    assert browser.value("document.title") == "<b>bold</b>"
    assert browser.value("document.querySelectorAll('img, b').length") == 0
    first = browser.value("document.querySelector('#list bdi').textContent")
    assert first == names[0]
    assert browser.value("document.documentElement.scrollWidth") <= SIZE[0]
    assert browser.complaints() == []


def test_a_page_about_a_pole_is_drawn(browser, tmp_path):
    browser.events.clear()
    browser.open(written(read_scenario("antarctic_ring"), tmp_path))
    sea = browser.picture("#map")
    land = np.abs(sea - np.array([0xDC, 0xD8, 0xCF]) / 255.0).max(axis=-1) < 0.02
    assert 0.05 < land.mean() < 0.6
    height, width = land.shape
    middle = land[height // 3 : 2 * height // 3, width // 3 : 2 * width // 3]
    assert middle.mean() > 0.5  # Antarctica in the middle
    assert browser.complaints() == []
