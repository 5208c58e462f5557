"""The command line: what it prints, where, and with which exit status.

The computation is replaced by arrivals made by hand, so that only the command line is tested.
"""

from __future__ import annotations

import json
import subprocess
import sys
import time
import types
from pathlib import Path

import pytest

from waveguide import cli


@pytest.fixture
def run(monkeypatch, capsys, arrivals):
    """Run the command line in this process: exit status, standard output, standard error."""

    def compute(scenario, progress=None):
        progress("looking at " + scenario.name)
        return arrivals

    def go(*arguments, compute=compute):
        module = types.ModuleType("waveguide.pipeline")
        module.study = lambda *given, **named: _study(compute(*given, **named))
        monkeypatch.setitem(sys.modules, "waveguide.pipeline", module)
        monkeypatch.setattr(sys, "argv", ["waveguide", *map(str, arguments)])
        with pytest.raises(SystemExit) as ended:
            cli.main()
        captured = capsys.readouterr()
        return ended.value.code or 0, captured.out, captured.err

    return go


def _study(dataset):
    return types.SimpleNamespace(arrays=dataset, dataset=dataset)


def test_the_answer_is_a_table(run):
    status, out, err = run("arrivals", "peru_burst")
    assert status == 0
    assert "Callao" in out
    assert "Cautions" in out
    assert err == ""


def test_json_alone_is_on_standard_output(run, tmp_path):
    status, out, err = run("arrivals", "peru_burst", "--json", "--out", tmp_path / "out")
    assert status == 0
    assert json.loads(out)["arrivals"][0]["target"] == "Callao"
    assert str(tmp_path / "out") in err


def test_out_writes_what_the_scenario_asks_for(run, tmp_path):
    status, out, _ = run("arrivals", "peru_burst", "--out", tmp_path / "out")
    assert status == 0
    assert "Callao" in out
    names = {path.name for path in (tmp_path / "out").iterdir()}
    assert names == {
        "arrivals.csv", "legs.csv", "arrivals.nc", "routes.geojson", "map.png", "map.pdf",
        "waveforms.csv", "waveforms.png", "waveforms.pdf", "distance_time.png",
        "distance_time.pdf", "budget.csv", "moorings.csv",
    }  # fmt: skip


@pytest.mark.parametrize(
    "arguments",
    [
        ("arrivals", "no_such_scenario"),
        ("arrivals", "peru_burst", "--out", "/dev/null/below"),
    ],
)
def test_bad_input_ends_with_2_and_one_message(run, arguments):
    def compute(scenario, progress=None):
        raise AssertionError("the work was begun")

    status, out, err = run(*arguments, compute=compute)
    assert status == 2
    assert out == ""
    assert err.startswith("waveguide: ")
    assert len(err.splitlines()) == 1


@pytest.mark.parametrize(
    "arguments",
    [("arrivals",), ("arrivals", "a", "b"), ("arrivals", "a", "--jsn"), ("arrival", "a")],
)
def test_a_command_that_is_not_understood_ends_with_2(run, arguments):
    status, out, err = run(*arguments)
    assert status == 2
    assert out == ""
    assert "Error:" in err


def test_problems_found_later_end_with_2_and_leave_nothing(run, tmp_path):
    from waveguide.errors import InputError

    def compute(scenario, progress=None):
        raise InputError(["target 'A': far inland", "target 'B': far inland"])

    status, out, err = run("arrivals", "peru_burst", "--out", tmp_path / "out", compute=compute)
    assert (status, out) == (2, "")
    assert err.splitlines() == [
        "waveguide: target 'A': far inland",
        "waveguide: target 'B': far inland",
    ]
    assert list(tmp_path.iterdir()) == []


def test_a_defect_ends_with_1(run, tmp_path):
    def compute(scenario, progress=None):
        raise ZeroDivisionError

    status, out, err = run("arrivals", "peru_burst", "--out", tmp_path / "out", compute=compute)
    assert (status, out) == (1, "")
    assert "defect" in err
    assert list(tmp_path.iterdir()) == []


def test_progress_is_told_after_a_while(run, arrivals, monkeypatch):
    monkeypatch.setattr(cli.Progress, "patience", 0.05)

    def compute(scenario, progress=None):
        progress("reading depths")
        time.sleep(0.2)
        progress("searching routes")
        return arrivals

    status, out, err = run("arrivals", "peru_burst", "--json", compute=compute)
    assert status == 0
    json.loads(out)
    assert [line.split(", ")[1] for line in err.splitlines()] == [
        "reading depths …",
        "searching routes …",
    ]


def test_shipped_scenarios_are_listed(run):
    from waveguide.scenario import shipped_scenarios

    status, out, _ = run("scenarios")
    assert status == 0
    assert [line.split()[0] for line in out.splitlines()] == list(shipped_scenarios())


def test_version(run):
    status, out, _ = run("--version")
    assert status == 0
    assert out.startswith("waveguide ")


def test_help_loads_no_heavy_library():
    code = (
        "import sys; sys.argv = ['waveguide', '--help']\n"
        "from waveguide.cli import main\n"
        "try: main()\n"
        "except SystemExit: pass\n"
        "print([m for m in ('numpy', 'xarray', 'scipy', 'matplotlib', 'pyproj', 'shapely')"
        " if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert "Usage" in done.stdout
    assert done.stdout.splitlines()[-1] == "[]"


def test_a_table_loads_no_library_it_can_do_without():
    """They take longer to import than most answers to compute."""
    code = (
        "import sys; sys.argv = ['waveguide', 'arrivals', 'patagonia_barotropic']\n"
        "from waveguide.cli import main\n"
        "try: main()\n"
        "except SystemExit: pass\n"
        "print([m for m in ('xarray', 'pandas', 'matplotlib', 'shapely', 'networkx', 'gsw',"
        " 'scipy.special', 'scipy.spatial', 'dask') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert "Cautions" in done.stdout
    assert done.stdout.splitlines()[-1] == "[]"


def test_a_name_the_terminal_cannot_show_is_escaped(run, arrivals, monkeypatch):
    import io

    narrow = io.TextIOWrapper(io.BytesIO(), encoding="ascii", write_through=True)
    monkeypatch.setattr(sys, "stdout", narrow)
    status, _, err = run("arrivals", "peru_burst")
    assert (status, err) == (0, "")
    assert b"Gal\\xe1pagos" in narrow.buffer.getvalue()


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no device that is always full")
def test_a_full_standard_output_is_told():
    with Path("/dev/full").open("w") as full:
        done = subprocess.run(
            [sys.executable, "-c", "from waveguide.cli import main; main()", "scenarios"],
            stdout=full, stderr=subprocess.PIPE, text=True, check=False,
        )  # fmt: skip
    assert done.returncode == 2
    assert done.stderr.startswith("waveguide: No space left on device")
    assert len(done.stderr.splitlines()) == 1
