"""The command `lookout` on the shipped scenario: with and without model output, and refusals."""

from __future__ import annotations

import importlib.util
import json
from pathlib import Path

import numpy as np
import pytest
import xarray as xr

import waveguide
from waveguide.scenario import find_scenario


@pytest.fixture(scope="module")
def model(tmp_path_factory) -> Path:
    """Output made by the script that is shipped with the scenarios."""
    script = find_scenario("pacific_model").parent / "invent.py"
    spec = importlib.util.spec_from_file_location("invent", script)
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    path = tmp_path_factory.mktemp("model") / "model.nc"
    module.model(path)
    return path


def test_without_a_model_the_windows_are_told(run, tmp_path):
    status, out, _ = run("lookout", "pacific_model", "--json", "--out", tmp_path / "out")
    assert status == 0
    windows = json.loads(out)["windows"]
    assert len(windows) > 10
    assert {window["kind"] for window in windows} >= {"equator", "coast"}
    for window in windows:
        assert window["opens"] < window["closes"]
        assert window["trapping_width_km"] > 10.0
        assert abs(window["isopycnal_displacement_m"]) < 100.0
    assert {path.name for path in (tmp_path / "out").iterdir()} == {
        "windows.csv", "windows.geojson"
    }  # fmt: skip
    features = json.loads((tmp_path / "out" / "windows.geojson").read_text())["features"]
    assert len(features) == len(windows)


def test_with_a_model_the_speed_is_measured_and_the_cells_are_kept(
    run, model, tmp_path, printed_figures
):
    out_folder = tmp_path / "out"
    status, out, _ = run("lookout", "pacific_model", "--model", model, "--out", out_folder)
    assert status == 0
    assert "each read once" in out
    names = {path.name for path in out_folder.iterdir()}
    assert {"windows.csv", "speeds.csv", "subset.nc", "distance_time.nc"} <= names
    assert {"distance_time_callao_mode1.png", "distance_time_callao_mode1.pdf"} <= set(
        printed_figures
    )
    with xr.open_dataset(out_folder / "subset.nc") as kept:
        assert kept.sizes["cell"] > 1000
        assert kept["zos"].attrs["units"] == "m"
        assert np.isfinite(kept["zos"]).any("time").all()


def test_the_measured_speed_is_that_of_the_wave_in_the_output(run, model):
    pytest.importorskip("dask")
    status, out, _ = run("lookout", "pacific_model", "--model", model, "--json")
    assert status == 0
    document = json.loads(out)
    routes = document["routes"]
    told = {(row["target"], row["mode"]): row["cautions"] for row in document["cautions"]}
    critical = next(c for c in told["Callao", 1] if c["kind"] == "below the critical frequency")
    assert 50.0 < critical["number"] <= 100.0  # north of Callao, at 60 days
    callao = next(route for route in routes if route["target"] == "Callao")
    # 2.5 m/s along the equator (scenarios/invent.py), nothing but noise along the coast
    assert callao["measured_speed_m_s"] == pytest.approx(2.5, rel=0.05)
    assert callao["verdict"] == "consistent"


def test_python_gets_windows_and_speeds_as_a_dataset(model):
    scenario = waveguide.read_scenario("pacific_model")
    alone = waveguide.look_out(scenario)
    assert alone.sizes == {"window": alone.sizes["window"], "route": 0}
    assert (alone["closes"] > alone["opens"]).all()
    with xr.open_dataset(model) as output:
        found = waveguide.look_out(scenario, output)
    np.testing.assert_array_equal(found["opens"], alone["opens"])
    at = found["route_target"].values.tolist().index("Callao")
    assert found["measured_speed_m_s"].values[at] == pytest.approx(2.5, rel=0.05)
    assert found["chance"].values[at] <= 0.05
    assert found["depth_m"].attrs["units"] == "m"


def test_a_model_of_other_days_is_refused(run, model, tmp_path):
    for shift, message in ((-3000, "end before the event"), (3000, "start after the last window")):
        with xr.open_dataset(model) as dataset:
            moved = dataset.isel(time=slice(0, 10), lat=slice(28, 33)).assign_coords(
                time=dataset["time"][:10] + np.timedelta64(shift, "D")
            )
            moved.to_netcdf(tmp_path / f"{shift}.nc")
        status, out, err = run("lookout", "pacific_model", "--model", tmp_path / f"{shift}.nc")
        assert (status, out) == (2, "")
        assert message in err


def test_files_that_are_missing_or_none(run, tmp_path):
    status, _, err = run("lookout", "pacific_model", "--model", tmp_path / "nowhere.nc")
    assert status == 2
    assert "no such file" in err
    (tmp_path / "none.nc").write_bytes(b"nothing")
    status, _, err = run("lookout", "pacific_model", "--model", tmp_path / "none.nc")
    assert status == 2
    assert "cannot be read as NetCDF" in err
    status, _, err = run("lookout", "pacific_model", tmp_path / "a.nc")
    assert status == 2
    assert "follow --model" in err


def test_a_cluster_that_does_not_answer(run, monkeypatch):
    pytest.importorskip("distributed")
    status, out, err = run("lookout", "pacific_model", "--dask", "nonsense://nowhere")
    assert (status, out) == (2, "")
    assert "--dask nonsense://nowhere" in err


def test_a_local_cluster_gives_the_same_answer(run, model):
    distributed = pytest.importorskip("distributed")
    _, alone, _ = run("lookout", "pacific_model", "--model", model, "--json")
    with distributed.LocalCluster(
        n_workers=1, threads_per_worker=1, processes=True, dashboard_address=None
    ) as cluster:
        status, out, _ = run(
            "lookout", "pacific_model", "--model", model, "--json", "--dask",
            cluster.scheduler_address,
        )
    assert status == 0
    assert json.loads(out) == json.loads(alone)
