"""Sections of invented seas whose shore, shelf and obstacles are known."""

from __future__ import annotations

import numpy as np
import pytest

from waveguide.coast.section import cross_shelf_sections, ray_offsets
from waveguide.coast.section_quality import MEANING, QualityFlag
from waveguide.constants import EARTH_RADIUS
from waveguide.ocean.bathymetry import Bathymetry

EQUATOR_DEGREE = np.radians(1.0) * EARTH_RADIUS
RADIUS = 50e3


def sea(depth_of_distance, spacing=0.02):
    """A sea at the equator west of a meridional shore at 0°E; depth by distance offshore (m)."""
    lon = np.arange(-12.0, 12.0 + spacing / 2.0, spacing)
    depth = depth_of_distance(-lon * EQUATOR_DEGREE)
    lat = np.array([-1.0, 1.0])
    return Bathymetry(lon, lat, np.tile(depth.astype(np.float32), (2, 1)))


def shelf(x, width=60e3, edge=150.0, deep=4000.0, foot=120e3):
    """Land, a shelf of even slope, a slope, and a deep plain."""
    return np.interp(x, [-10e3, 0.0, width, foot], [-100.0, 0.0, edge, deep]) - 50.0 * (x < -2e3)


def section(depth_of_distance, node=60e3, radius=RADIUS):
    return cross_shelf_sections(
        -node / EQUATOR_DEGREE, 0.0, 270.0, radius, sea(depth_of_distance)
    )


def test_a_plain_section_is_kept_as_it_is():
    found = section(shelf)
    x, h = found.monotonic(0)
    assert found.flags[0] == 0
    assert found.inshore[0] == pytest.approx(60e3, abs=300.0)
    assert found.wall[0] == 0.0
    # isobaths are 8 % apart, and the samples 2 km: the corners are cut by less than that
    np.testing.assert_allclose(np.interp([30e3, 90e3, 200e3], x, h), [75.0, 2075.0, 4000.0],
                               rtol=0.01)
    assert found.shelf_width[0] == pytest.approx(60e3 + 50.0 / 3850.0 * 60e3, rel=0.01)
    assert found.slope[0] == pytest.approx(3850.0 / 60e3, rel=0.02)
    assert found.rms_share[0] < 0.01
    assert found.coverage[0] > 0.95


def test_isobaths_go_outward_and_down():
    found = section(lambda x: shelf(x) + 60.0 * np.sin(x / 7e3) * (x > 0))
    x, h = found.monotonic(0)
    assert np.all(np.diff(x) > 0.0)
    assert np.all(np.diff(h) >= 0.0)


@pytest.mark.parametrize(
    ("change", "flag"),
    [
        (lambda x: -3500.0 * np.exp(-(((x - 200e3) / 8e3) ** 2)), QualityFlag.BANK),
        (lambda x: -5000.0 * np.exp(-(((x - 200e3) / 8e3) ** 2)), QualityFlag.ISLAND),
        (lambda x: 3000.0 * np.exp(-(((x - 160e3) / 6e3) ** 2)), QualityFlag.TRENCH),
    ],
)
def test_narrow_obstacles_are_marked_and_leave_the_rest_alone(change, flag):
    plain = section(shelf)
    found = section(lambda x: shelf(x) + change(x))
    assert QualityFlag(int(found.flags[0])) & flag
    at = np.array([20e3, 50e3, 100e3, 240e3])
    np.testing.assert_allclose(
        np.interp(at, *found.monotonic(0)), np.interp(at, *plain.monotonic(0)), rtol=0.02
    )
    raw = np.interp(np.linspace(140e3, 220e3, 81), *found.raw(0))
    assert np.abs(raw - 4000.0).max() > 2000.0  # the raw version keeps what was levelled
    assert found.max_change[0] > 2000.0


def test_a_facing_coast_ends_the_section_at_the_deepest_water():
    def strait(x):
        return np.where(x < 150e3, shelf(x), shelf(290e3 - x))

    found = section(strait)
    assert QualityFlag(int(found.flags[0])) & QualityFlag.FACING_COAST
    # water of less than a tenth of 4000 m, wide enough to stop a wave of this radius
    assert found.facing[0] == pytest.approx(290e3 - 63.9e3, abs=10e3)
    x, h = found.monotonic(0)
    assert 118e3 < x[-1] < 172e3
    assert h[-1] == pytest.approx(4000.0, rel=0.02)


def test_an_island_wider_than_half_the_radius_is_a_facing_coast_and_a_narrower_one_is_not():
    def with_island(x):
        return np.where(np.abs(x - 250e3) < 30e3, -50.0, shelf(x))

    flags = [int(section(with_island, radius=r).flags[0]) for r in (100e3, 160e3)]
    assert flags[0] & QualityFlag.FACING_COAST
    assert not flags[1] & QualityFlag.FACING_COAST
    assert flags[1] & QualityFlag.ISLAND


def test_a_bank_without_land_begins_at_its_crest_as_a_wall():
    def bank(x):
        return np.interp(np.abs(x - 20e3), [0.0, 40e3, 100e3], [120.0, 200.0, 4000.0])

    found = section(bank)
    assert QualityFlag(int(found.flags[0])) & QualityFlag.NO_SHORE
    assert found.wall[0] == pytest.approx(120.0, rel=0.1)
    assert found.inshore[0] == pytest.approx(40e3, abs=3e3)


def test_a_shelf_wider_than_the_ray_is_cut_and_marked():
    found = section(lambda x: np.interp(x, [0.0, 60e3, 120e3], [50.0, 200.0, 4000.0]))
    assert QualityFlag(int(found.flags[0])) & QualityFlag.WIDE_SHELF
    assert found.wall[0] == pytest.approx(50.0, rel=0.1)
    assert found.inshore[0] == pytest.approx(600e3, abs=1e3)


def test_depths_that_end_first_are_told():
    found = section(lambda x: np.where(x < 130e3, shelf(x), np.nan))
    assert QualityFlag(int(found.flags[0])) & QualityFlag.CUT_BY_DATA
    assert found.coverage[0] == pytest.approx(130.0 / 360.0, abs=0.02)
    assert found.monotonic(0)[0][-1] == pytest.approx(130e3, abs=5e3)


def test_a_node_inland_of_all_water_has_no_section():
    found = section(lambda x: np.full(x.shape, -10.0))
    assert QualityFlag(int(found.flags[0])) & QualityFlag.NO_SECTION
    assert found.monotonic(0)[0].size == 0


def test_low_latitudes_have_wider_sections():
    near, far = (section(shelf, radius=r).monotonic(0)[0][-1] for r in (20e3, 230e3))
    assert near == pytest.approx(360e3, rel=0.05)
    assert far == pytest.approx(980e3, rel=0.05)


def test_many_sections_at_once_are_those_of_each_alone():
    sea_of_rows = sea(shelf)
    lon = np.array([-50e3, -60e3, -75e3]) / EQUATOR_DEGREE
    together = cross_shelf_sections(lon, 0.0, 270.0, RADIUS, sea_of_rows)
    for row in range(3):
        alone = cross_shelf_sections(lon[row], 0.0, 270.0, RADIUS, sea_of_rows)
        np.testing.assert_array_equal(alone.monotonic(0), together.monotonic(row))


def test_rays_are_densest_at_the_node():
    step = np.diff(ray_offsets())
    assert np.all(step > 0.0)
    assert step.min() == pytest.approx(2e3)
    assert step[np.searchsorted(ray_offsets(), 0.0)] == pytest.approx(2e3)


def test_every_flag_has_a_meaning():
    assert set(MEANING) == set(QualityFlag)
    assert QualityFlag(6).words == "facing coast, island"
