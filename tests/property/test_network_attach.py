"""Ties between positions and the guide, in a world of one continent from pole to pole."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from waveguide.coast.effective import CoastRule
from waveguide.coast.raster import GlobalGrid
from waveguide.constants import BETA_EQUATOR, deformation_radius
from waveguide.geodesy import destination, geodesic_length
from waveguide.network.attach import FARTHEST_RADII, closest_in_box, point_box, tie
from waveguide.network.build import build_network
from waveguide.ocean.bathymetry import Bathymetry

GRID = GlobalGrid(np.arange(-180.0, 180.0), np.arange(-90.0, 91.0))
SPEED = 10.0  # R is 100 km at 43°, a node spacing


@cache
def world(middle=0):
    """A continent 40° wide about a meridian, its network and its depths."""
    lon, lat = np.meshgrid(GRID.lon, GRID.lat)
    land = (np.abs((lon - middle + 180.0) % 360.0 - 180.0) <= 20.0) & (np.abs(lat) <= 60.0)
    two = np.ones(2)
    rule = CoastRule(np.array([-90.0, 90.0]), 200e3 * two, 100.0 * two, 400e3 * two, 600e3 * two,
                     60e3 * two, 50e3)
    depth = np.where(land, -100.0, 4000.0)
    network, _ = build_network(GRID, depth, land, rule, np.full(2, SPEED))
    return network, Bathymetry(GRID.lon, GRID.lat, depth.astype(np.float32))


def ties(lon, lat, middle=0):
    network, depths = world(middle)
    return network, tie(network, np.full(network.size, SPEED), point_box(lon, lat), depths)


@given(st.floats(-180.0, 180.0), st.floats(0.0, 350.0), st.floats(-80.0, 70.0),
       st.floats(0.0, 10.0), st.floats(-180.0, 180.0), st.floats(-85.0, 85.0))
def test_closest_place_of_a_box_is_in_it_and_no_corner_is_closer(west, width, south, height, x, y):
    box = (west, south, (west + width + 180.0) % 360.0 - 180.0, south + height)
    lon, lat = closest_in_box(box, np.array([x]), np.array([y]))
    assert (lon[0] - west + 1e-8) % 360.0 <= width + 3e-8
    assert south <= lat[0] <= south + height
    off = abs((lon[0] - x + 180.0) % 360.0 - 180.0)
    for corner in (box[0], box[2]):
        assert off <= abs((corner - x + 180.0) % 360.0 - 180.0) + 1e-8


def test_sides_swapped_by_rounding_do_not_open_the_globe():
    lon, _ = closest_in_box((0.1 + 0.2, 0.0, 0.3, 0.0), np.array([120.0]), np.array([0.0]))
    assert lon[0] == pytest.approx(0.3)


def test_box_round_the_globe_is_everywhere():
    lon = np.array([-180.0, -100.0, 0.0, 179.0])
    found, lat = closest_in_box((-180.0, -10.0, 180.0, 10.0), lon, np.array([50.0, 5.0, -5.0, -50]))
    assert found == pytest.approx(lon)
    assert lat.tolist() == [10.0, 5.0, -5.0, -10.0]


@settings(deadline=None, max_examples=25)
@given(st.floats(-45.0, -15.0) | st.floats(15.0, 45.0), st.floats(60e3, 900e3),
       st.sampled_from(["west", "east"]))
def test_amplitude_falls_off_the_coast_as_theory_says(lat, offshore, side):
    edge, away = (-20.5, 270.0) if side == "west" else (20.5, 90.0)
    lon, place = destination(edge, lat, away, offshore)
    network, found = ties(float(lon), float(place))
    radius = float(deformation_radius(SPEED, lat))
    if offshore > 1.05 * FARTHEST_RADII * radius:
        assert found.node.size == 0
        assert found.nearest_radii > FARTHEST_RADII
    elif offshore < 0.95 * FARTHEST_RADII * radius:
        assert found.node.size == 1
        assert not found.inshore[0]
        assert found.distance[0] == pytest.approx(offshore, rel=0.03)
        at_node = deformation_radius(SPEED, network.lat[found.node[0]])
        assert found.factor[0] == pytest.approx(np.exp(-found.distance[0] / at_node))
        assert abs(network.lat[found.node[0]] - lat) < 0.5
    assert found.nearest == pytest.approx(offshore, rel=0.05)


@settings(deadline=None, max_examples=25)
@given(st.floats(60.0, 175.0) | st.floats(-175.0, -60.0), st.floats(-5.0, 5.0))
def test_amplitude_falls_off_the_equator_as_a_gaussian(lon, lat):
    network, found = ties(lon, lat)
    y = float(geodesic_length(lon, lat, lon, 0.0))
    assert network.equatorial[found.node].all()
    assert found.distance == pytest.approx([y] * found.node.size, rel=0.01, abs=1e3)
    expected = np.exp(-BETA_EQUATOR * y**2 / (2.0 * SPEED))
    assert found.factor == pytest.approx([expected] * found.node.size, rel=0.03)


def test_place_on_the_shelf_gets_the_amplitude_of_the_guide():
    _, found = ties(-19.9, 40.0)
    assert found.inshore.all()
    assert found.factor.tolist() == [1.0] * found.node.size
    assert found.node.size >= 1


def test_place_far_inland_is_refused_with_its_distance():
    _, found = ties(0.0, 40.0)
    assert found.node.size == 0
    expected = geodesic_length(0.0, 40.0, 20.5, 40.0)
    assert found.nearest == pytest.approx(expected, rel=0.03)


@settings(deadline=None, max_examples=10)
@given(st.floats(-45.0, 45.0), st.floats(-30.0, 30.0))
def test_ties_do_not_know_the_date_line(lat, lon):
    here, found = ties(lon, lat)
    there, turned = ties((lon + 180.0 + 180.0) % 360.0 - 180.0, lat, 180)
    assume(abs(found.nearest_radii - 3.0) > 0.06)  # distances agree within 2 %, the limit is sharp
    assert turned.node.size == found.node.size
    assert np.sort(turned.distance) == pytest.approx(np.sort(found.distance), rel=0.02, abs=3e3)
    assert np.sort(turned.factor) == pytest.approx(np.sort(found.factor), rel=0.05)
    assert here.size == there.size


def test_box_over_the_date_line_takes_every_node_in_it():
    network, depths = world()
    box = (170.0, -2.0, -170.0, 2.0)
    found = tie(network, np.full(network.size, SPEED), box, depths)
    inside = (np.abs(network.lon) >= 170.0) & (np.abs(network.lat) <= 2.0)
    assert set(found.node) >= set(np.nonzero(inside)[0])
    assert found.factor[found.distance == 0.0].tolist() == [1.0] * int(inside.sum())


def test_no_tie_where_the_mode_does_not_exist():
    network, depths = world()
    found = tie(network, np.full(network.size, np.nan), point_box(-25.0, 40.0), depths)
    assert found.node.size == 0
    assert found.nearest == np.inf
