"""A person's own section and stratification: what is read, and what is refused with what words."""

from __future__ import annotations

import numpy as np
import pytest

from waveguide.coast.own_section import own_section
from waveguide.coast.profile_files import read_profile, read_stratification
from waveguide.coast.section_modes import Column, check_latitude, section_modes
from waveguide.coast.section_quality import QualityFlag
from waveguide.errors import InputError
from waveguide.network.section_query import check_reach
from waveguide.sections import check_numbers

OFFSHORE = np.array([0.0, 20e3, 60e3, 90e3, 200e3])
DEPTH = np.array([0.0, 80.0, 180.0, 3000.0, 4000.0])
COLUMN = Column(np.array([0.0, 500.0, 4000.0]), np.array([1e-4, 1e-5, 1e-6]), 4000.0, "made up")


def write(path, text):
    path.write_text(text, "utf-8")
    return path


def test_a_profile_that_deepens_is_used_point_by_point():
    section = own_section(OFFSHORE, DEPTH, -70.0, -20.0)
    x, h = section.monotonic(0)
    np.testing.assert_array_equal(x, OFFSHORE)
    np.testing.assert_array_equal(h[1:], DEPTH[1:])
    assert section.rms_change[0] < 1.0
    assert section.flags[0] == 0


def test_a_bank_is_levelled_marked_and_kept_in_the_raw_version():
    x = np.arange(0.0, 301e3, 5e3)
    h = np.interp(x, OFFSHORE, DEPTH)
    h[np.abs(x - 150e3) < 12e3] = 400.0
    section = own_section(x, h, -70.0, -20.0)
    assert QualityFlag(int(section.flags[0])) & QualityFlag.BANK
    fit_x, fit_h = section.monotonic(0)
    assert np.all(np.diff(fit_h) >= 0.0)
    np.testing.assert_allclose(np.interp([40e3, 250e3], fit_x, fit_h), [130.0, 4000.0], rtol=0.03)
    np.testing.assert_array_equal(section.raw(0)[1][1:], h[1:])
    result = section_modes(section, COLUMN, -20.0)
    assert result.raw_reverse_speed > 0.0
    smooth = own_section(x, np.interp(x, OFFSHORE, DEPTH), -70.0, -20.0)
    plain = section_modes(smooth, COLUMN, -20.0)
    # mode 3 lives on the outer slope, which the bank interrupts
    np.testing.assert_allclose(
        result.modes.phase_speed[:3], plain.modes.phase_speed[:3], rtol=0.01
    )


@pytest.mark.parametrize(
    ("offshore", "depth", "said"),
    [
        ([0, 1e4, 2e4], [10, np.nan, 100], "holes"),
        ([0, 1e4, 2e4], [10, -5, 100], "land at 10 km"),
        ([0, 1e4, 2e4], [-10, -50, -100], "positive down"),
        ([0, 2e4, 1e4], [10, 50, 100], "unsorted"),
        ([0, 1e4, 1e4], [10, 50, 100], "duplicate"),
        ([5e3, 1e4, 2e4], [10, 50, 100], "must start at 0"),
    ],
)
def test_profiles_that_are_refused(offshore, depth, said):
    with pytest.raises(InputError, match=said) as caught:
        own_section(offshore, depth, 0.0, 40.0, "profile mine.csv")
    assert all(problem.startswith("profile mine.csv") for problem in caught.value.problems)


def test_csv_profiles_in_km_and_m(tmp_path):
    rows = "# drawn by hand\noffshore_km,depth_m\n0,5\n10,100\n\n50,3000\n"
    km = write(tmp_path / "km.csv", rows)
    m = write(tmp_path / "m.csv", "depth_m, offshore_m\n5, 0\n100, 10000\n3000, 5e4\n")
    np.testing.assert_array_equal(read_profile(km), read_profile(m))
    np.testing.assert_array_equal(read_profile(km), [[0.0, 10e3, 50e3], [5.0, 100.0, 3000.0]])


def test_an_empty_cell_of_a_profile_is_a_hole(tmp_path):
    path = write(tmp_path / "a.csv", "offshore_km,depth_m\n0,5\n10,\n50,3000\n")
    with pytest.raises(InputError, match="holes"):
        own_section(*read_profile(path), 0.0, 40.0)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("0,5\n10,100\n", "first line must name"),
        ("", "first line must name"),
        ("offshore_km,depth_m\n0,5\n", "at least two"),
        ("offshore_km,depth_m\n0,5\n10,deep\n", "'deep' in row 2"),
        ("offshore_km,depth_m\n0,5\n10;100\n", "1 values where 2"),
        ("distance,depth_m\n0,5\n10,100\n", "offshore_km or offshore_m"),
        ("offshore_km;depth_m\n0,5;5\n10,5;100\n", "separate columns with commas"),
        ("offshore_km\tdepth_m\n0\t5\n10\t100\n", "separate columns with commas"),
        ("offshore_km,depth_m\n0,5\n300000,4000\n", "offshore_m if it is in metres"),
        ("offshore_km,depth_m\n0,5\n300,400000\n", "deeper than any trench"),
        ("offshore_km,depth_m\n0," + "5" * 140000 + "\n", "save it as CSV in UTF-8"),
    ],
)
def test_csv_files_that_are_refused(tmp_path, text, said):
    with pytest.raises(InputError, match=said):
        read_profile(write(tmp_path / "bad.csv", text))


def test_files_that_are_not_there_or_no_text(tmp_path):
    with pytest.raises(InputError, match="no such file"):
        read_profile(tmp_path / "none.csv")
    (tmp_path / "binary.csv").write_bytes(bytes(range(256)))
    with pytest.raises(InputError, match="cannot be read as text"):
        read_profile(tmp_path / "binary.csv")


def test_stratification_as_n2(tmp_path):
    path = write(tmp_path / "n2.csv", "z,N2\n0,1e-4\n100,2e-4\n1000,1e-5\n4000,1e-6\n")
    column = read_stratification(path, -70.0, -20.0)
    np.testing.assert_allclose(column.n2, [1e-4, 2e-4, 1e-5, 1e-6])
    assert column.reached == 4000.0
    assert column.notes == ()


def test_unstable_stratification_is_mixed_and_said(tmp_path):
    path = write(tmp_path / "n2.csv", "z,n2\n0,1e-4\n50,-5e-5\n100,1e-4\n4000,1e-6\n")
    column = read_stratification(path, -70.0, -20.0)
    assert np.all(column.n2 > 0.0)
    assert "unstable at 1 of 4 depths" in column.notes[0]
    assert "mixed" in column.notes[0]


def test_temperature_and_salinity_become_n2(tmp_path):
    """A mean ocean: N² of 1e-4 1/s² in the thermocline, 1e-6 in the deep (Gill 1982, 3.7)."""
    rows = ["depth,temperature,salinity"]
    for z in (0, 50, 100, 200, 500, 1000, 2000, 3000, 4000):
        rows.append(f"{z},{2.0 + 18.0 * np.exp(-z / 300.0):.3f},{34.7}")
    column = read_stratification(write(tmp_path / "ts.csv", "\n".join(rows)), -70.0, -20.0)
    assert column.depth[0] == 25.0
    assert 5e-5 < column.n2[0] < 3e-4
    assert column.n2[-1] < 2e-6
    assert "in situ" in column.notes[0]


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("depth,temperature\n0,20\n100,10\n1000,4\n", "salinity"),
        ("depth,temperature,salinity\n0,293,35\n100,283,35\n1000,277,35\n", "temperature runs"),
        ("depth,temperature,salinity\n0,20,35\n100,10,35\n", "at least three"),
        ("depth,n2\n0,1e-4\n100,\n1000,1e-6\n", "1 empty cells"),
        ("depth,n2\n0,1e-4\n-100,1e-5\n-1000,1e-6\n", "positive down"),
        ("depth,n2\n100,1e-4\n0,1e-5\n", "increase downward"),
        ("depth,n2\n0,0\n100,0\n", "nowhere positive"),
        ("depth,n2\n0,100\n100,10\n", "no sea has"),
    ],
)
def test_stratifications_that_are_refused(tmp_path, text, said):
    with pytest.raises(InputError, match=said):
        read_stratification(write(tmp_path / "bad.csv", text), -70.0, -20.0)


def test_a_stratification_that_ends_far_above_the_bottom_is_refused():
    section = own_section(OFFSHORE, DEPTH, -70.0, -20.0)
    shallow = Column(np.array([0.0, 500.0]), np.array([1e-4, 1e-5]), 500.0, "ctd.csv")
    with pytest.raises(InputError, match=r"ctd.csv.*500 m.*4000 m deep"):
        check_reach(shallow, section)
    check_reach(COLUMN, section)


@pytest.mark.parametrize("lat", [0.0, 0.04, -0.01])
def test_the_equator_has_no_section_problem(lat):
    with pytest.raises(InputError, match="the guide is the equator itself"):
        check_latitude(lat)


@pytest.mark.parametrize(
    ("given", "said"),
    [
        ((38.5, -123.3, 5e-4, 3), "Are they swapped"),
        ((400.0, 38.5, 5e-4, 3), "longitude 400"),
        ((-77.0, float("nan"), 5e-4, 3), "degrees.$"),
        ((float("nan"), 38.5, 5e-4, 3), "longitude nan"),
        ((-123.3, 38.5, -1.0, 3), "drag"),
        ((-123.3, 38.5, 5e-4, 0), "modes 0"),
    ],
)
def test_numbers_that_cannot_be_meant(given, said):
    with pytest.raises(InputError, match=said):
        check_numbers(*given)
