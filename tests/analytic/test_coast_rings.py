"""Effective coasts of made-up worlds whose answer is known beforehand."""

from __future__ import annotations

import numpy as np
import pytest

from waveguide.coast.effective import (
    CoastRule,
    EffectiveCoast,
    cell_indices,
    effective_coast,
    is_water,
    offshore_azimuths,
)
from waveguide.coast.raster import GlobalGrid, component_areas, label_periodic, within
from waveguide.coast.trace import boundary_pieces, chain_rings, smooth_ring, space_evenly
from waveguide.constants import EARTH_RADIUS
from waveguide.errors import InputError
from waveguide.geodesy import arc, geodesic_length, unit_vectors

DEGREE = np.radians(1.0) * EARTH_RADIUS
GRID = GlobalGrid(np.arange(-180.0, 180.0), np.arange(-90.0, 91.0))
LAT = np.array([-90.0, 90.0])


def rule(scale=500e3, sill=100.0, island=500e3, basin=500e3, smoothing=120e3, spacing=100e3):
    two = np.ones(2)
    return CoastRule(LAT, scale * two, sill * two, island * two, basin * two, smoothing * two,
                     spacing)


def land_in(*boxes, grid=GRID):
    """Land in boxes (west, east, south, north) of cell centres, in degrees."""
    lon, lat = np.meshgrid(grid.lon, grid.lat)
    land = np.zeros(grid.shape, bool)
    for west, east, south, north in boxes:
        land |= ((lon - west) % 360.0 <= (east - west) % 360.0) & (lat >= south) & (lat <= north)
    return land


def coast_of(land, **changes) -> EffectiveCoast:
    return effective_coast(GRID, np.full(GRID.shape, 4000.0), land, rule(**changes))


def turning(lon, lat):
    """Signed area of a ring in the plane of its longitudes and latitudes, > 0 anticlockwise."""
    x = np.unwrap(lon, period=360.0)
    return 0.5 * np.sum(x * np.roll(lat, -1) - np.roll(x, -1) * lat)


@pytest.mark.parametrize("south", [30.0, -50.0])
def test_square_island_is_one_clockwise_ring_of_its_own_size(south):
    coast = coast_of(land_in((10, 29, south, south + 19)))
    assert len(coast.rings) == 1
    lon, lat = coast.rings[0]
    assert turning(lon, lat) < 0.0  # land on the right of the stored order in both hemispheres
    # Sides lie half a cell outside the outermost cells; corners are cut by the smoothing, each
    # by (2 − √2) of about its width.
    sides = 2 * 20 * DEGREE + 20 * DEGREE * (
        np.cos(np.radians(south - 0.5)) + np.cos(np.radians(south + 19.5))
    )
    length = geodesic_length(lon, lat, np.roll(lon, -1), np.roll(lat, -1))
    assert sides - 4 * 120e3 < length.sum() < sides * 1.005
    assert lon.min() == pytest.approx(9.5, abs=0.05)
    assert lon.max() == pytest.approx(29.5, abs=0.05)
    # Straight steps are a little shorter than along the bends.
    assert length.max() < 104e3
    assert np.median(length) == pytest.approx(100e3, rel=0.04)


def test_seaward_normals_point_away_from_the_land():
    coast = coast_of(land_in((10, 29, 30, 49)))
    lon, lat = coast.rings[0]
    azimuth = offshore_azimuths(lon, lat)
    west = (lon < 9.7) & (np.abs(lat - 40) < 5)
    east = (lon > 29.3) & (np.abs(lat - 40) < 5)
    north = (lat > 49.2) & (np.abs(lon - 19.5) < 4)
    assert np.allclose(azimuth[west], 270.0, atol=3.0)
    assert np.allclose(azimuth[east], 90.0, atol=3.0)
    assert np.allclose((azimuth[north] + 180.0) % 360.0, 180.0, atol=3.0)


def bay(width):
    """A continent with a bay of a width (degrees of latitude) in its west coast at 40°N."""
    land = land_in((0, 60, 10, 70))
    half = width / 2.0
    return land & ~land_in((0, 25, 40 - half + 0.5, 40 + half - 0.5))


def test_bay_narrower_than_the_scale_is_passed_and_a_wider_one_is_entered():
    narrow, wide = coast_of(bay(4), scale=600e3), coast_of(bay(8), scale=600e3)
    inside = (np.array([12.0]), np.array([40.0]))
    assert not is_water(narrow, *inside)
    assert is_water(wide, *inside)
    assert narrow.passable[cell_indices(GRID, *inside)]  # water it is, but not followed
    (lon, _), (wide_lon, wide_lat) = narrow.rings[0], wide.rings[0]
    assert np.sum((lon > 2.0) & (lon < 58.0)) < np.sum((wide_lon > 2.0) & (wide_lon < 58.0)) - 25
    assert np.any((wide_lon > 20.0) & (np.abs(wide_lat - 40.0) < 4.0))


def test_islands_closer_than_the_scale_are_one_and_farther_ones_two():
    land = land_in((0, 9, 40, 49), (14, 23, 40, 49))  # 4 columns of water: 340 km at 40–49°N
    assert len(coast_of(land, scale=500e3).rings) == 1
    assert len(coast_of(land, scale=250e3).rings) == 2


def test_ring_over_the_date_line_is_the_ring_elsewhere():
    land = land_in((-10, 9, 30, 49)) & ~land_in((-3, 2, 42, 49))
    here = coast_of(land)
    there = coast_of(np.roll(land, 175, axis=1))
    for (lon, lat), (far_lon, far_lat) in zip(here.rings, there.rings, strict=True):
        # The same ring, begun elsewhere: every far node lies on the near line.
        turned = unit_vectors(far_lon - 175.0, far_lat)
        near = unit_vectors(lon, lat)
        fine = 0.5 * (near + np.roll(near, -1, axis=0))
        line = np.concatenate([near, fine])
        gap = np.linalg.norm(turned[:, None] - line[None], axis=2).min(axis=1)
        assert arc(gap).max() < 30e3
    assert np.array_equal(np.roll(here.water, 175, axis=1), there.water)


@pytest.mark.parametrize("box", [(-180, 179, -90, -70), (-180, 179, 75, 90)])
def test_polar_continent_is_one_ring_round_the_pole(box):
    coast = coast_of(land_in(box))
    assert len(coast.rings) == 1
    lon, lat = coast.rings[0]
    turn = np.sum((np.diff(np.append(lon, lon[0])) + 180.0) % 360.0 - 180.0)
    edge = box[3] + 0.5 if box[2] == -90 else box[2] - 0.5
    assert np.allclose(lat, edge, atol=0.05)
    # Land on the right: eastward with the pole to the south, westward with it to the north.
    assert turn == pytest.approx(360.0 if box[2] == -90 else -360.0)


def test_pole_row_half_land_does_not_break_the_rings():
    land = land_in((-180, 179, -90, -70))
    land[0, :180] = False
    depth = np.full(GRID.shape, 4000.0)
    depth[-1, :90] = -10.0  # part of the pole row is dry; a point cannot be
    coast = effective_coast(GRID, depth, land, rule(scale=50e3, basin=50e3, island=50e3))
    assert {bool(v) for v in coast.water[0]} == {False}
    assert len(np.unique(coast.water[-1])) == 1
    assert next(np.round(np.median(lat)) for _, lat in coast.rings if lat.size > 50) == -70.0


def test_small_islands_and_basins_are_ignored_and_scattered_atolls_count_by_their_land():
    atolls = land_in(*[(x, x, y, y) for x in range(-60, -45, 3) for y in range(-20, -5, 3)])
    speck = land_in((100, 101, -30, -29))
    continent = land_in((0, 60, 10, 70)) & ~land_in((30, 31, 40, 41))  # a lake inside
    coast = coast_of(atolls | speck | continent, island=600e3, basin=600e3)
    assert len(coast.rings) == 1
    assert coast.basin.max() == 1
    # The group covers 14° square, but its land is 25 cells: passed like one small island.
    assert is_water(coast, np.array([-54.0]), np.array([-11.0]))
    kept = coast_of(atolls | speck | continent, island=100e3, basin=600e3)
    assert len(kept.rings) == 3


def test_shallow_water_is_a_wall():
    depth = np.full(GRID.shape, 4000.0)
    depth[land_in((0, 60, 10, 70))] = 60.0
    sill = effective_coast(GRID, depth, np.zeros(GRID.shape, bool), rule(sill=100.0))
    none = effective_coast(GRID, depth, np.zeros(GRID.shape, bool), rule(sill=50.0))
    assert len(sill.rings) == 1
    assert len(none.rings) == 0


def test_two_basins_get_two_numbers_and_one_round_a_date_line_cape_one():
    wall = land_in((-180, 179, -90, -60), (0, 4, -60, 90), (180 - 4, 179, -60, 90),
                   (-180, 179, 80, 90))
    assert coast_of(wall).basin.max() == 2
    assert coast_of(wall & ~land_in((176, 179, -20, 20))).basin.max() == 1


def test_land_cells_that_meet_at_a_corner_stay_apart_and_water_cells_do_not():
    ocean = np.ones((6, 8), bool)
    ocean[2, 3] = ocean[3, 4] = False
    rings = chain_rings(*boundary_pieces(ocean), 8)
    assert sorted(ring.size for ring in rings) == [4, 4]
    water = ~ocean
    assert label_periodic(water, diagonal=False)[1] == 2
    assert label_periodic(water, diagonal=True)[1] == 1


def test_labels_join_over_the_seam_and_at_the_poles():
    mask = np.zeros((6, 8), bool)
    mask[2, [0, 7]] = True
    assert label_periodic(mask)[1] == 1
    mask[2, 7], mask[3, 7] = False, True
    assert label_periodic(mask)[1] == 2
    assert label_periodic(mask, diagonal=True)[1] == 1
    pole = np.zeros((6, 8), bool)
    pole[5, [1, 4]] = True
    assert label_periodic(pole)[1] == 1


def test_every_piece_of_boundary_is_on_one_ring():
    rng = np.random.default_rng(7)
    ocean = rng.random((30, 40)) < 0.6
    ocean[[0, -1]] = True
    start, end = boundary_pieces(ocean)
    rings = chain_rings(start, end, 40)
    assert sum(ring.size for ring in rings) == start.size
    pieces = set(zip(start.tolist(), end.tolist(), strict=True))
    traced = {(a, b) for ring in rings
              for a, b in zip(ring.tolist(), np.roll(ring, -1).tolist(), strict=True)}
    assert traced == pieces


def test_area_of_all_cells_is_that_of_the_sphere():
    labels, count = label_periodic(np.ones(GRID.shape, bool))
    area = component_areas(GRID, labels, count)
    assert area[1] == pytest.approx(4.0 * np.pi * EARTH_RADIUS**2, rel=1e-4)


def test_within_measures_on_the_sphere():
    mask = land_in((179, 179, 60, 60))
    near = within(GRID, mask, ~mask, np.full(GRID.lat.size, 1.01 * DEGREE))
    # One degree of latitude, and at 60° two of longitude, over the date line.
    found = {(GRID.lon[i], GRID.lat[j]) for j, i in zip(*np.nonzero(near), strict=True)}
    assert {(179.0, 61.0), (179.0, 59.0), (178.0, 60.0), (-180.0, 60.0), (-179.0, 60.0),
            (177.0, 60.0)} <= found
    assert (176.0, 60.0) not in found
    assert not within(GRID, np.zeros_like(mask), ~mask, np.full(GRID.lat.size, 1e6)).any()


def test_smoothing_keeps_a_circle_and_shrinks_it_by_the_known_factor():
    # A Gaussian of width σ along a circle of radius r damps its first harmonic by e^(−σ²/2r²).
    theta = np.linspace(0.0, -2.0 * np.pi, 2000, endpoint=False)
    radius, width = 5.0, 1.5 * DEGREE
    lat, lon = radius * np.sin(theta), radius * np.cos(theta)
    smooth = smooth_ring(unit_vectors(lon, lat), np.full(2000, width))
    size = np.degrees(np.arccos(smooth[:, 0]))
    assert np.allclose(size, radius * np.exp(-0.5 * (1.5 / radius) ** 2), rtol=5e-3)


def test_nodes_are_evenly_spaced_along_the_line():
    theta = np.linspace(0.0, 2.0 * np.pi, 4000, endpoint=False)
    nodes = space_evenly(unit_vectors(10 * np.cos(theta), 10 * np.sin(theta)), 150e3)
    step = arc(np.linalg.norm(nodes - np.roll(nodes, -1, axis=0), axis=1))
    assert np.ptp(step) < 0.01 * step.mean()
    assert step.mean() == pytest.approx(150e3, rel=0.02)
    assert len(space_evenly(unit_vectors(np.cos(theta), np.sin(theta)), 1e7)) == 4


def test_grid_that_does_not_close_the_globe_is_refused():
    with pytest.raises(InputError, match=r"do not close the globe.*360"):
        GlobalGrid(np.arange(0.0, 350.0), np.arange(-90.0, 91.0))
