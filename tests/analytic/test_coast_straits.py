"""Straits of made-up worlds, and those a chart adds to the real one."""

from __future__ import annotations

import numpy as np
import pytest

from waveguide.coast.charted import CHARTED_STRAITS, SAME_MOUTH, charted_straits
from waveguide.coast.effective import CoastRule, effective_coast
from waveguide.coast.gaps import strait_along, straits
from waveguide.coast.raster import GlobalGrid
from waveguide.constants import EARTH_RADIUS
from waveguide.geodesy import geodesic_length

CELL = np.radians(1.0) * EARTH_RADIUS
GRID = GlobalGrid(np.arange(-180.0, 180.0), np.arange(-90.0, 91.0))
SCALE = 500e3


def rule(sill=100.0, spacing=100e3):
    two = np.ones(2)
    return CoastRule(np.array([-90.0, 90.0]), SCALE * two, sill * two, 400e3 * two, 400e3 * two,
                     120e3 * two, spacing)


def cells(west, east, south, north):
    lon, lat = np.meshgrid(GRID.lon, GRID.lat)
    return ((lon - west) % 360.0 <= (east - west) % 360.0) & (lat >= south) & (lat <= north)


def barrier():
    """A wall of land between two oceans, six columns wide, from pole to pole, and another."""
    wall = cells(-3, 2, -90, 90) | cells(177, -178, -90, 90)
    return wall | cells(-180, 179, -90, -70) | cells(-180, 179, 70, 90)


def found_in(land, depth=None):
    depth = np.full(GRID.shape, 3000.0) if depth is None else depth
    coast = effective_coast(GRID, depth, land, rule())
    return coast, straits(coast, depth)


def test_strait_between_two_basins():
    depth = np.full(GRID.shape, 3000.0)
    channel = cells(-3, 2, 39, 40)
    depth[cells(0, 0, 39, 40)] = 700.0
    coast, found = found_in(barrier() & ~channel, depth)
    assert coast.basin.max() == 2
    assert len(found) == 1
    strait = found[0]
    # Two cells wide; from the ocean cell west of the wall to that east of it, seven steps.
    assert strait.width == pytest.approx(2 * CELL, rel=0.01)
    along = geodesic_length(-4.0, 40.0, 3.0, 40.0)
    assert strait.length == pytest.approx(along, rel=0.02)
    assert {round(float(strait.lon[0])), round(float(strait.lon[-1]))} == {-4, 3}
    assert strait.sill_depth == 700.0
    assert np.all(np.abs(np.diff(strait.lon)) < 1.01)


def test_strait_one_cell_long_has_two_mouths():
    wall = cells(0, 0, -90, 90) | cells(177, -178, -90, 90)
    wall |= cells(-180, 179, -90, -70) | cells(-180, 179, 70, 90)
    _, found = found_in(wall & ~cells(0, 0, 40, 40))
    assert len(found) == 1
    assert found[0].length == pytest.approx(geodesic_length(-1.0, 40.0, 1.0, 40.0), rel=0.01)


def test_strait_whose_cells_meet_at_corners_is_open():
    channel = cells(-3, -1, 40, 40) | cells(0, 2, 41, 41)
    _, found = found_in(barrier() & ~channel)
    assert len(found) == 1


@pytest.mark.parametrize("rows", [1, 2, 3, 4])
def test_width_is_that_of_the_channel_for_odd_and_even_numbers_of_cells(rows):
    _, found = found_in(barrier() & ~cells(-3, 2, 40, 39 + rows))
    assert [strait.width / CELL for strait in found] == pytest.approx([rows], rel=0.01)


def test_inlet_is_no_strait_and_a_wide_passage_is_no_gap():
    _, inlet = found_in(barrier() & ~cells(-3, 0, 39, 40))
    assert inlet == []
    coast, wide = found_in(barrier() & ~cells(-3, 2, 36, 46))
    assert coast.basin.max() == 1
    assert all(strait.length < 300e3 for strait in wide)  # corners of the passage at most


def test_shallow_strait_is_closed():
    depth = np.full(GRID.shape, 3000.0)
    depth[cells(-1, 0, 39, 40)] = 80.0
    coast, found = found_in(barrier() & ~cells(-3, 2, 39, 40), depth)
    assert found == []
    assert coast.basin.max() == 2


def test_the_wider_of_two_ways_through_is_taken():
    # A channel with an island in the middle: two rows pass in the north, one in the south.
    channel = cells(-3, 2, 38, 41) & ~cells(-1, 0, 39, 39)
    _, found = found_in(barrier() & ~channel)
    assert len(found) == 1
    by_the_island = np.abs(found[0].lon + 0.5) < 1.0
    assert np.all(found[0].lat[by_the_island] > 39.5)


def test_three_mouths_are_joined_in_pairs_and_never_through_the_third():
    # A gap inside a wall that opens west twice and east once, the western mouths on one way.
    channel = cells(-3, 2, 40, 40) | cells(-1, -1, 41, 50) | cells(-3, -1, 50, 50)
    _, found = found_in(barrier() & ~channel)
    ends = sorted(
        tuple(sorted((round(float(s.lat[0])), round(float(s.lat[-1]))))) for s in found
    )
    assert ends == [(40, 40), (40, 50), (40, 50)]


@pytest.mark.parametrize("shift", [1, 90, 180, 183])
def test_straits_do_not_depend_on_where_the_longitudes_are_cut(shift):
    land = barrier() & ~cells(-3, 2, 39, 40)
    _, here = found_in(land)
    _, there = found_in(np.roll(land, shift, axis=1))
    assert len(here) == len(there) == 1
    assert here[0].length == pytest.approx(there[0].length)
    assert here[0].width == pytest.approx(there[0].width)
    back = (there[0].lon - shift + 180.0) % 360.0 - 180.0  # it may be found from the other end
    assert np.sort(back) == pytest.approx(np.sort(here[0].lon))


def test_inertia_of_a_channel_that_widens():
    # ∫ ds/W over three steps of equal length, W 2, 1, 1, 2: (3/4 + 1 + 3/4)/3 of 3 steps at W = 1.
    lon = np.arange(4.0)
    strait = strait_along(lon, np.zeros(4), 1e4 * np.array([2.0, 1.0, 1.0, 2.0]), 100.0)
    assert strait.width == 1e4
    assert strait.inertia_length == pytest.approx(strait.length * 2.5 / 3.0, rel=1e-6)


def gibraltar():
    return next(c for c in CHARTED_STRAITS if c.name == "Strait of Gibraltar")


def iberia_closed():
    """A wall where Gibraltar is, with the Atlantic and the Mediterranean on either side."""
    depth = np.full(GRID.shape, 3000.0)
    land = cells(-6, -6, -90, 90) | cells(177, -178, -90, 90)
    land |= cells(-180, 179, -90, -70) | cells(-180, 179, 70, 90)
    return effective_coast(GRID, depth, land, rule()), depth


def test_charted_strait_is_added_only_where_the_rule_would_keep_it():
    coast, depth = iberia_closed()
    added = charted_straits(coast, rule(sill=200.0), straits(coast, depth))
    assert [s.sill_depth for s in added] == [gibraltar().sill_depth]
    assert added[0].width == 14e3
    assert 50e3 < added[0].length < 100e3
    # A chart's 284 m do not help a mode that needs 300 m.
    assert charted_straits(coast, rule(sill=300.0), []) == []


def test_charted_strait_gives_way_to_the_grid():
    coast, _ = iberia_closed()
    chart = gibraltar()
    own = strait_along(np.array(chart.lon[::-1]), np.array(chart.lat[::-1]),
                       np.array(chart.width), 250.0)
    assert charted_straits(coast, rule(sill=200.0), [own]) == []
    open_sea = effective_coast(GRID, np.full(GRID.shape, 3000.0), cells(20, 30, 30, 40), rule())
    assert charted_straits(open_sea, rule(sill=200.0), []) == []
    ends = (chart.lon[0], chart.lat[0], chart.lon[-1], chart.lat[-1])
    assert geodesic_length(*ends) > SAME_MOUTH
