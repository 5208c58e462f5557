"""`waveguide section` and `waveguide atlas` as a person types them, on the packaged data."""

from __future__ import annotations

import json
import subprocess
import sys

import numpy as np
import pytest
import xarray as xr


def test_a_negative_longitude_typed_plainly(run):
    status, out, _ = run("section", "-123.3", "38.5")
    assert status == 0
    assert "the guide's coast is" in out
    assert "km/day" in out
    assert "no warning system" in out


def test_json_is_one_document(run):
    status, out, _ = run("section", "-123.3", "38.5", "--json", "--modes", "2", "--period", "5")
    assert status == 0
    document = json.loads(out)
    for mode in document["modes"][1:]:
        assert (
            mode["group_speed_at_period_m_s"]
            < mode["phase_speed_at_period_m_s"]
            < mode["phase_speed_m_s"]
        )
        assert (mode["cut_off_period_days"] or 1.0) > 0.7  # no shorter than half a pendulum day
    assert [mode["mode"] for mode in document["modes"]] == [0, 1, 2]
    speeds = [mode["phase_speed_m_s"] for mode in document["modes"]]
    assert speeds == sorted(speeds, reverse=True)
    assert document["modes"][1]["phase_speed_km_day"] == pytest.approx(86.4 * speeds[1])
    assert len(document["section"]["section_depth_m"]) > 20
    assert document["snap_distance_km"] > 0.0


def test_out_writes_figure_and_netcdf(run, tmp_path, printed_figures):
    status, _, err = run("section", "150.6", "-36.0", "--modes", "1", "--out", tmp_path / "new")
    assert status == 0
    assert str(tmp_path / "new") in err
    assert {p.name for p in (tmp_path / "new").iterdir()} == {
        *printed_figures, "section.nc",
    }  # fmt: skip
    with xr.open_dataset(tmp_path / "new" / "section.nc") as stored:
        assert stored.attrs["Conventions"] == "CF-1.11"
        assert stored["phase_speed_m_s"].attrs["units"] == "m s-1"
        surface = stored["pressure"].isel(level=0, column=0)
        np.testing.assert_allclose(surface, 1.0)


def test_own_profile_and_stratification(run, tmp_path):
    """Exponential shelf under hardly any stratification: c = 2bf/(b² + m²), tan mL = −m/b.

    h₀ 20 m, h_L 4000 m, L 80 km, f 8.2e-5: 2.7154 and 1.0253 m/s (DERIVED from Buchwald &
    Adams 1968, Proc. R. Soc. A 305, 235; Gill & Schumann 1974, J. Phys. Oceanogr. 4, 83).
    """
    x = np.linspace(0.0, 80.0, 321)
    depth = 20.0 * np.exp(np.log(200.0) * x / 80.0)
    profile = tmp_path / "shelf.csv"
    rows = [f"{a},{h}" for a, h in zip(x, depth, strict=True)]
    profile.write_text("offshore_km,depth_m\n" + "\n".join(rows))
    column = tmp_path / "n2.csv"
    column.write_text("depth,n2\n0,1e-9\n4000,1e-9\n")
    lat = np.degrees(np.arcsin(8.2e-5 / 2.0 / 7.292115e-5))
    status, out, _ = run("section", "-30", f"{lat:.6f}", "--profile", profile,
                         "--stratification", column, "--modes", "2", "--json")
    assert status == 0
    modes = json.loads(out)["modes"]
    # the free surface slows mode 1 by 1.5 % here (f²L²/gH), the grid errs by up to 0.5 %
    np.testing.assert_allclose(
        [mode["phase_speed_m_s"] for mode in modes[1:]], [2.7154, 1.0253], rtol=0.02
    )


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("-123.3", "38.5", "--colour"), "--colour: no such option"),
        (("--colour", "-123.3", "38.5"), "--colour: no such option"),
        (("-123.3", "38.5", "7"), "7: unexpected"),
        (("west", "38.5"), "LON must be decimal degrees"),
        (("-123,3", "38.5"), "LON must be decimal degrees with a point"),
        (("-80.5", "0"), "the guide is the equator itself"),
        (("-100", "45"), "nearest coast of the guide"),
        (("-123.3", "38.5", "--profile", "none.csv"), "no such file"),
        (("-123.3", "38.5", "--period", "0.5"), "between 0 and |f|"),
        (("-123.3", "38.5", "--period", "-3"), "give a period in days"),
        (("-123.3", "38.5", "--out", "/dev/null/below"), "cannot be written"),
    ],
)
def test_bad_input_ends_with_2_and_its_reason(run, arguments, said):
    status, out, err = run("section", *arguments)
    assert status == 2
    assert out == ""
    assert said in err
    assert all(line.startswith("waveguide: ") for line in err.splitlines())


def test_a_region_of_the_atlas_with_a_bar_on_stderr(tmp_path):
    """A few nodes near Hawaii, in two runs of one process each."""
    command = [sys.executable, "-c", "from waveguide.cli import main; main()", "atlas",
               "--region", "-157", "18.5", "-154.5", "20.5", "--workers", "1", "--out", tmp_path]
    done = subprocess.run(command, capture_output=True, text=True, timeout=120, check=False)
    assert done.returncode == 0, done.stderr
    assert "100 %" in done.stderr
    assert "with the modes of their own section" in done.stdout
    assert [path.name for path in tmp_path.iterdir()] == ["atlas_trapped.nc"]
    with xr.open_dataset(tmp_path / "atlas_trapped.nc") as stored:
        assert stored.attrs["region"] == "-157 18.5 -154.5 20.5"
        assert np.isfinite(stored["phase_speed"].sel(mode=1)).sum() >= 3


def test_a_region_without_coast(run, tmp_path):
    status, _, err = run("atlas", "--region", "-140", "-5", "-130", "5", "--out", tmp_path)
    assert status == 2
    assert "no coast" in err
    assert not list(tmp_path.iterdir())
