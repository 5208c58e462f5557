"""Networks of made-up worlds: directions, junctions with the equator, and crossings."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest

from waveguide.coast.effective import CoastRule, effective_coast, is_water
from waveguide.coast.raster import GlobalGrid
from waveguide.constants import deformation_radius
from waveguide.geodesy import destination, geodesic_length, wgs84
from waveguide.network.build import _passing_steps, build_network
from waveguide.network.graph import StepKind
from waveguide.network.lines import build_lines, equator_nodes, with_equator_nodes

GRID = GlobalGrid(np.arange(-180.0, 180.0), np.arange(-90.0, 91.0))
DEPTH = np.full(GRID.shape, 4000.0)
SPEED = 30.0  # R is 320 km at 40°, resolved by cells of 1°
SPACING = 100e3


def rule(scale=250e3):
    two = np.ones(2)
    return CoastRule(np.array([-90.0, 90.0]), scale * two, 100.0 * two, 400e3 * two, 600e3 * two,
                     120e3 * two, SPACING)


def cells(west, east, south, north):
    lon, lat = np.meshgrid(GRID.lon, GRID.lat)
    return ((lon - west) % 360.0 <= (east - west) % 360.0) & (lat >= south) & (lat <= north)


AMERICA, AFRICA = (-80, -50, -50, 50), (10, 40, -35, 60)


@cache
def network_of(*boxes, without=(), scale=250e3):
    land = np.zeros(GRID.shape, bool)
    for box in boxes:
        land |= cells(*box)
    for box in without:
        land &= ~cells(*box)
    network, coast = build_network(GRID, DEPTH, land, rule(scale), np.full(2, SPEED))
    return network, coast


def steps_of(network, kind):
    at = np.nonzero(network.kind == kind)[0]
    return network.tail[at], network.head[at]


def near(network, lon, lat):
    return int(np.argmin(geodesic_length(network.lon, network.lat, lon, lat)))


def test_land_lies_on_the_right_in_the_north_and_on_the_left_in_the_south():
    network, coast = network_of(AMERICA, AFRICA, (-180, 179, -90, -75))
    tail, head = steps_of(network, StepKind.COAST)
    middle = 0.5 * (network.lat[tail] + network.lat[head])
    clear = np.abs(middle) > 1.0
    tail, head, middle = tail[clear], head[clear], middle[clear]
    azimuth, _, _ = wgs84().inv(network.lon[tail], network.lat[tail], network.lon[head],
                                network.lat[head])
    side = np.where(middle > 0.0, 90.0, -90.0)
    landward = destination(network.lon[tail], network.lat[tail], azimuth + side, 2.5e5)
    seaward = destination(network.lon[tail], network.lat[tail], azimuth - side, 2.5e5)
    assert is_water(coast, *seaward).mean() > 0.99  # corners of the boxes, at most
    assert (~is_water(coast, *landward)).mean() > 0.97


@pytest.mark.parametrize(("start", "end"), [
    ((-80.5, 10.0), (-80.5, 40.0)),  # eastern boundary, north: poleward
    ((-80.5, -10.0), (-80.5, -40.0)),  # eastern boundary, south: poleward
    ((-49.5, 40.0), (-49.5, 10.0)),  # western boundary, north: equatorward
    ((-49.5, -40.0), (-49.5, -10.0)),  # western boundary, south: equatorward
    ((-70.0, -50.5), (-60.0, -50.5)),  # round the southern end: eastward
    ((-70.0, 50.5), (-60.0, 50.5)),  # round the northern end: eastward
    ((60.0, -74.5), (20.0, -74.5)),  # a southern polar coast: westward
])
def test_direction_of_travel(start, end):
    network, _ = network_of(AMERICA, AFRICA, (-180, 179, -90, -75))
    onward = dict(zip(*(part.tolist() for part in steps_of(network, StepKind.COAST)),
                      strict=True))
    for origin, goal, found in ((start, end, True), (end, start, False)):
        node, target = near(network, *origin), near(network, *goal)
        for _ in range(60):
            if node == target:
                break
            node = onward.get(node, node)
        assert (node == target) is found


def test_western_boundaries_feed_the_equator_and_eastern_ones_are_fed():
    network, _ = network_of(AMERICA, AFRICA)
    coast_tail, coast_head = steps_of(network, StepKind.COAST)
    tail, head = steps_of(network, StepKind.EQUATOR)
    assert np.all((network.lon[head] - network.lon[tail]) % 360.0 < 2.0)  # eastward
    assert np.all(network.lat[tail] == 0.0)
    junctions = np.nonzero((network.lat == 0.0) & ~network.equatorial)[0]
    assert junctions.size == 4
    for node in junctions:
        lon = network.lon[node]
        western = min(abs(lon - -49.5), abs(lon - 40.5)) < 1.0
        assert np.sum(coast_head == node) == (2 if western else 0)
        assert np.sum(coast_tail == node) == (0 if western else 2)
        assert np.sum(tail == node) == (1 if western else 0)
        assert np.sum(head == node) == (0 if western else 1)


def test_equator_runs_on_over_the_date_line():
    network, _ = network_of(AMERICA, AFRICA)
    line = network.line[near(network, 179.9, 0.0)]
    on_it = network.lon[(network.line == line) & network.equatorial]
    assert on_it[0] == pytest.approx(40.5 + 0.9, abs=0.3)
    assert on_it[-1] == pytest.approx(-80.5 - 0.9, abs=0.3)
    step = np.diff(np.unwrap(on_it, period=360.0))
    assert np.allclose(step, step[0])
    assert step[0] * 111.3 == pytest.approx(100.0, rel=0.02)


def test_small_island_on_the_equator_is_passed_and_a_large_one_is_not():
    small = (-140, -139, -1, 0)
    network, _ = network_of(AMERICA, AFRICA, small)
    assert np.unique(network.line[network.equatorial]).size == 2
    large = (-140, -133, -8, 8)
    network, _ = network_of(AMERICA, AFRICA, large)
    assert np.unique(network.line[network.equatorial]).size == 3


def test_equator_nodes_mark_even_the_shortest_stretch():
    assert equator_nodes(179.5, -179.5, SPACING).tolist() == [-180.0]
    assert equator_nodes(10.0, 12.0, SPACING) == pytest.approx([11.0])


def test_crossings_of_the_equator_get_nodes_exactly_on_it():
    lon, lat = with_equator_nodes(np.array([179.0, -179.0, -179.0, 179.0]),
                                  np.array([-1.0, 1.0, 2.0, 0.0]))
    assert np.sum(lat == 0.0) == 2
    # A node that lay on the equator by chance is moved off it, or two would lie there.
    assert lon[lat == 0.0] == pytest.approx([-180.0, 179.0])
    assert lat.size == 6


def crossings_between(network, kind):
    return {(int(network.tail[s]), int(network.head[s])) for s in
            np.nonzero((network.gap >= 0) & (network.kind == kind))[0]}


def passing_steps(network):
    return {int(network.passes[s]): s for s in np.nonzero(network.passes >= 0)[0]}


ISLAND_BY_CONTINENT = ((0, 60, 10, 70), (-14, -6, 33, 47))


def test_facing_coast_is_crossed_both_ways_at_its_nearest():
    network, _ = network_of(*ISLAND_BY_CONTINENT)
    facing = crossings_between(network, StepKind.FACING_COAST)
    lines = {(network.line[a], network.line[b]) for a, b in facing}
    assert lines == {(0, 1), (1, 0)}
    # Two parallel meridians are nearest in the north, 340 km at 47.5°.
    width = geodesic_length(-5.5, 47.0, -0.5, 47.0)
    assert network.gap_width.min() == pytest.approx(width, rel=0.1)
    # They face each other along the island's 15° of latitude.
    assert 0.5 * 15 * 111e3 < network.gap_length.max() < 15 * 111e3


def test_crossing_lands_past_the_mouth_it_comes_out_of():
    network, _ = network_of(*ISLAND_BY_CONTINENT)
    passing = passing_steps(network)
    count = network.gap_width.size
    assert sorted(passing) == list(range(count))
    for step in np.nonzero(network.gap >= 0)[0]:
        gap = int(network.gap[step])
        back = gap + count // 2 if gap < count // 2 else gap - count // 2
        assert network.tail[passing[gap]] == network.tail[step]
        assert network.head[step] == network.head[passing[back]]


@pytest.mark.parametrize("south", [False, True])
def test_mouth_of_a_gulf_is_an_opening_downstream_and_a_facing_coast_upstream(south):
    continent, gulf = (0, 60, 10, 70), (0, 35, 38, 42)
    if south:
        continent, gulf = (0, 60, -70, -10), (0, 35, -42, -38)
    network, _ = network_of(continent, without=(gulf,))
    openings = crossings_between(network, StepKind.OPENING)
    back = crossings_between(network, StepKind.FACING_COAST)
    assert len(openings) == len(back) >= 1
    # The signal comes from the equator along the west coast: the mouth is crossed poleward.
    for tail, head in openings:
        assert abs(network.lat[head]) > abs(network.lat[tail]) + 3.0
    for tail, head in back:
        assert abs(network.lat[head]) < abs(network.lat[tail]) - 3.0
    assert np.all(network.gap_sill == np.inf)


def test_gulf_wider_than_the_reach_of_the_wave_has_no_crossing():
    network, _ = network_of((0, 60, 10, 70), without=((0, 35, 34, 46),))
    radius = deformation_radius(SPEED, 40.0)
    assert 2.0 * radius < 13 * 111e3
    assert not np.any((network.gap >= 0) & (network.lon[network.tail] < 20.0))


def test_strait_joins_two_basins_both_ways_with_nodes_inside():
    wall = [(-3, 2, -90, 90), (177, -178, -90, 90), (-180, 179, -90, -70), (-180, 179, 70, 90)]
    network, coast = network_of(*wall, without=((-3, 2, 40, 41),))
    assert coast.basin.max() == 2
    strait = network.kind == StepKind.STRAIT
    entries = np.nonzero(strait & (network.gap >= 0))[0]
    assert entries.size == 2
    inside = np.nonzero(network.in_strait)[0]
    assert inside.size >= 6
    assert np.allclose(network.lat[inside], 40.5, atol=1.0)
    # Either way leads from one basin to the other and there is no turning round within.
    for start in entries:
        node, passed = int(network.head[start]), 0
        while network.in_strait[node]:
            (onward,) = np.nonzero(strait & (network.tail == node))[0]
            node, passed = int(network.head[onward]), passed + 1
        assert passed == inside.size // 2
        assert network.basin[node] != network.basin[network.tail[start]]


def test_several_gaps_at_one_node_are_passed_on_steps_that_follow_each_other():
    coast = effective_coast(GRID, DEPTH, cells(0, 60, 10, 70), rule())
    lines = build_lines(coast, SPACING)
    kind = np.zeros(lines.tail.size, dtype=np.int64)
    first, again = _passing_steps(lines, kind, [np.array([7, 9, 7]), np.array([7])])
    assert lines.tail[first[0]] == 7
    chain = [first[0], first[2]]
    assert lines.head[chain[0]] == lines.tail[chain[1]]
    taken = {int(s) for s in (*first, *again)}
    assert len(taken) == 4
    assert lines.tail[again[0]] in (9, 10)


def test_more_gaps_than_steps_on_a_ring_are_left_unpassed():
    coast = effective_coast(GRID, DEPTH, cells(0, 60, 10, 70), rule())
    lines = build_lines(coast, SPACING)
    kind = np.zeros(lines.tail.size, dtype=np.int64)
    count = lines.tail.size + 3
    (steps,) = _passing_steps(lines, kind, [np.full(count, 5)])
    assert np.sum(steps < 0) == 3
    assert np.unique(steps[steps >= 0]).size == lines.tail.size


def test_building_twice_gives_the_same():
    boxes = (AMERICA, AFRICA, (-14, -6, 33, 47))
    first, _ = network_of(*boxes)
    again, _ = network_of.__wrapped__(*boxes)
    for name in ("lon", "lat", "tail", "head", "kind", "gap", "passes", "gap_width"):
        assert np.array_equal(getattr(first, name), getattr(again, name))
