"""The packaged data at places that are known from elsewhere."""

from __future__ import annotations

import numpy as np
import pytest
import shapely

from waveguide.coast.shoreline import LAKE, land_mask, shoreline, winding_numbers
from waveguide.errors import InputError
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.ocean.stratification import packaged_climatology

# Water depths of long-term stations, as their programmes state them (flag MEMORY): ALOHA
# (Karl and Lukas 1996, Deep-Sea Res. II 43, 129), Ocean Station Papa and the Kuroshio
# Extension Observatory (NOAA PMEL), Porcupine Abyssal Plain (Lampitt et al. 2010, Deep-Sea
# Res. II 57, 1267). 3 %: the stations move by kilometres and the grid has 11 km.
STATIONS = {
    "ALOHA": (-158.0, 22.75, 4750.0),
    "Papa": (-145.0, 50.0, 4230.0),
    "Kuroshio Extension": (144.6, 32.3, 5700.0),
    "Porcupine Abyssal Plain": (-16.5, 49.0, 4850.0),
}
# Common knowledge of shallow seas (flag MEMORY): least and greatest depth that would do.
SHALLOWS = {
    "Strait of Dover": (1.45, 51.0, 20.0, 60.0),
    "Dogger Bank": (2.5, 54.8, 13.0, 40.0),
    "Bering Strait": (-168.7, 65.9, 30.0, 60.0),
    "Java Sea": (110.0, -5.0, 30.0, 70.0),
    "Bass Strait": (145.5, -39.7, 50.0, 90.0),
    "Yellow Sea": (123.0, 36.0, 55.0, 90.0),
}
LAND = {
    "Madrid": (-3.7, 40.4), "Novosibirsk": (82.9, 55.0), "Manaus": (-60.0, -3.1),
    "Chukotka, east of 180": (-175.0, 67.0), "Chukotka, west of 180": (178.0, 67.0),
    "Chukotka, on 180": (180.0, 67.5), "Wrangel Island, on 180": (-180.0, 71.2),
    "Vanua Levu": (179.2, -16.5), "isthmus of Panama": (-79.75, 9.1),
    "South Pole": (0.0, -90.0), "Vostok": (106.8, -78.5), "Byrd, on 0": (0.0, -80.0),
    "Ross Ice Shelf": (-178.0, -80.0), "Ronne Ice Shelf": (-60.0, -78.5),
    "Caspian Sea": (51.0, 42.0), "Lake Superior": (-87.5, 47.7), "Lake Victoria": (33.0, -1.0),
    "Tasmania": (146.5, -42.0), "Hawaii": (-155.5, 19.6), "Kerguelen": (69.3, -49.3),
}
SEA = {
    "North Pole": (0.0, 90.0), "Black Sea": (34.0, 43.0), "Red Sea": (38.0, 20.0),
    "Ross Sea": (175.0, -76.0), "Weddell Sea, on 0": (0.0, -68.0), "Torres Strait": (142.6, -10.4),
    "Strait of Gibraltar": (-5.6, 35.95), "Gulf of California": (-110.5, 26.0),
    "Bering Sea, on 180": (180.0, 60.0), "Hudson Bay": (-85.0, 60.0), "Baltic": (19.5, 58.0),
    "Cook Strait": (174.5, -41.0), "Bay of Panama": (-79.5, 8.7), "Caribbean": (-79.9, 9.6),
}


@pytest.mark.parametrize("name", STATIONS)
def test_depth_at_stations(name):
    lon, lat, depth = STATIONS[name]
    assert packaged_bathymetry().sample(lon, lat) == pytest.approx(depth, rel=0.03)


@pytest.mark.parametrize("name", SHALLOWS)
def test_depth_of_shallow_seas(name):
    lon, lat, low, high = SHALLOWS[name]
    assert low <= packaged_bathymetry().sample(lon, lat) <= high


def test_depth_of_the_deepest_trench_is_short_by_the_width_of_the_grid():
    # Challenger Deep 10 925 m (Stewart and Jamieson 2019, Earth-Sci. Rev. 197; flag MEMORY):
    # its axis is narrower than 11 km, so the grid must be shallower, but not by 10 %.
    assert 0.9 * 10925.0 < packaged_bathymetry().sample(142.2, 11.35) < 10925.0


def test_depth_is_continuous_across_the_date_line_and_covers_the_globe():
    sea = packaged_bathymetry()
    west, on, east = sea.sample([179.999999, 180.0, -179.999999], -20.0)
    assert west == pytest.approx(on, abs=0.01)
    assert east == pytest.approx(on, abs=0.01)
    assert sea.sample(540.0, -20.0) == on
    assert sea.covers([-180.0, 0.0, 179.99, 12.3], [-90.0, 90.0, 89.99, -45.6]).all()


def test_depth_and_shoreline_are_in_register():
    sea = packaged_bathymetry()
    rows = np.abs(sea.lat) < 60.0  # ice shelves and inland ice have other grounds than shores
    land = land_mask(sea.lon, sea.lat[rows])
    dry = sea.depth[rows] <= 0.0
    wrong = {
        (dj, di): np.mean(np.roll(dry, (dj, di), (0, 1)) != land)
        for dj in (-1, 0, 1) for di in (-1, 0, 1)
    }
    assert min(wrong, key=wrong.get) == (0, 0)
    assert wrong[0, 0] < 0.005  # depressions below sea level, and shores inside a cell


@pytest.mark.parametrize("name", LAND)
def test_places_on_land(name):
    lon, lat = LAND[name]
    assert land_mask([lon], [lat])[0, 0]


@pytest.mark.parametrize("name", SEA)
def test_places_at_sea(name):
    lon, lat = SEA[name]
    assert not land_mask([lon], [lat])[0, 0]


def test_mask_does_not_depend_on_order_or_turn_of_the_axes():
    lon, lat = np.arange(-180.0, 180.0, 1.7), np.arange(-90.0, 90.1, 1.3)
    mask = land_mask(lon, lat, "low")
    assert 0.2 < mask.mean() < 0.5
    assert np.array_equal(land_mask(lon[::-1] + 360.0, lat[::-1], "low"), mask[::-1, ::-1])


def test_mask_is_that_of_polygons():
    rings = [ring for ring in shoreline("crude") if ring.level != LAKE]
    polygons = [shapely.make_valid(shapely.Polygon(np.column_stack([r.lon, r.lat])))
                for r in rings]
    lon, lat = np.arange(-179.63, 180.0, 2.9), np.arange(-89.51, 90.0, 2.3)
    points = shapely.points(*np.meshgrid(lon, lat)).ravel()
    inside = np.zeros(points.size, bool)
    inside[shapely.STRtree(polygons).query(points, predicate="within")[0]] = True
    assert np.array_equal(land_mask(lon, lat, "crude").ravel(), inside)


def test_area_of_land_is_that_of_its_rings():
    # GSHHG states the area of every island and continent, with Antarctica's ice shelves.
    areas = {(r.level, r.area) for r in shoreline() if r.level != LAKE and r.area > 1e4}
    small = sum(r.area for r in shoreline() if r.level != LAKE and r.area <= 1e4)
    lon, lat = np.arange(-180.0, 180.0, 0.25), np.arange(-89.875, 90.0, 0.25)
    mask = land_mask(lon, lat)
    weight = np.cos(np.radians(lat))
    area = 510.0656e6 * np.average(mask.mean(axis=1), weights=weight)  # area of the earth, km²
    assert area == pytest.approx(sum(area for _, area in areas) + small, rel=3e-3)


def test_winding_number_counts_overlapping_rings_and_direction():
    x0, y0 = np.array([0.0, 2, 2, 0, 1, 3, 3, 1]), np.array([0.0, 0, 2, 2, 1, 1, 3, 3])
    x1, y1 = np.array([2.0, 2, 0, 0, 3, 3, 1, 1]), np.array([0.0, 2, 2, 0, 1, 3, 3, 1])
    at = np.array([0.5, 1.5, 2.5])
    expected = [[1, 1, 0], [1, 2, 1], [0, 1, 1]]
    assert winding_numbers(x0, y0, x1, y1, at, at).tolist() == expected
    assert winding_numbers(x1, y1, x0, y0, at, at).tolist() == (-np.array(expected)).tolist()


def test_rings_are_closed_anticlockwise_and_known_by_name():
    for resolution in ("crude", "low", "intermediate"):
        rings = shoreline(resolution)
        assert {ring.level for ring in rings} == {1, 2, 5}
        for ring in rings:
            assert ring.lon[0] == ring.lon[-1]
            assert ring.lat[0] == ring.lat[-1]
            assert np.sum(ring.lon[:-1] * ring.lat[1:] - ring.lon[1:] * ring.lat[:-1]) > 0
    with pytest.raises(InputError, match="crude, low, intermediate"):
        shoreline("full")


def test_n2_is_positive_and_as_strong_as_sea_water_is():
    n2 = packaged_climatology().n2
    known = n2[np.isfinite(n2)]
    assert known.min() >= 1e-8 * (1.0 - 2.0**-12)  # the floor, rounded as stored
    assert known.max() < 1e-2
    # Nothing known below something unknown: the columns have no holes.
    assert not np.any(np.isfinite(n2[1:]) & ~np.isfinite(n2[:-1]))


def test_equatorial_thermocline_rises_eastward():
    # Deep in the western, shallow in the eastern equatorial Pacific (Gill 1982, section 11.1).
    column = packaged_climatology().profiles([160.0, -140.0, -100.0], 0.0, 1000.0)
    peak = column.depth[np.argmax(column.n2, axis=1)]
    assert peak[0] > peak[1] > peak[2]
    assert 100.0 < peak[0] < 250.0
    assert peak[2] < 75.0


def test_no_column_is_taken_across_an_isthmus():
    # The Pacific side of Panama has its sharp thermocline above 50 m, the Caribbean has not.
    columns = packaged_climatology().profiles([-79.6, -79.9], [8.9, 9.6], 1000.0)
    assert np.all(columns.distance < 400e3)
    pacific, caribbean = columns.n2[:, columns.depth < 50.0].max(axis=1)
    assert pacific > 1.5 * caribbean


@pytest.mark.parametrize(("lon", "lat"), [(34.0, 43.0), (51.0, 42.0), (83.0, 55.0)])
def test_seas_without_data_get_none_from_another_sea(lon, lat):
    column = packaged_climatology().profiles(lon, lat)
    assert np.isnan(column.n2).all()
    assert np.isnan(column.distance).all()
    assert np.isnan(column.depth_reached).all()


def test_profiles_agree_on_both_sides_of_the_date_line():
    columns = packaged_climatology().profiles([180.0, -180.0, 540.0], -20.0, 2000.0)
    assert np.array_equal(columns.n2[0], columns.n2[1])
    assert np.array_equal(columns.n2[0], columns.n2[2])
    assert np.all(columns.depth_reached >= 2000.0)
