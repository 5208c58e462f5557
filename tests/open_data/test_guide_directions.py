"""Direction of travel, straits and equator of the packaged baroclinic guide.

Directions are those of the theory (Gill 1982, section 10.4: coast on the right in the northern
hemisphere, on the left in the southern; eastward along the equator). Places are common knowledge
(flag MEMORY), a few kilometres to tens of kilometres off the shelf edge.
"""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest

from waveguide.coast.charted import CHARTED_STRAITS
from waveguide.geodesy import geodesic_length
from waveguide.network.graph import StepKind
from waveguide.network.packaged import packaged_network

COASTS = {
    "Peru": ((-79.8, -8.0), (-76.6, -14.5)),
    "Chile": ((-71.8, -30.0), (-74.0, -40.0)),
    "California": ((-118.0, 32.0), (-123.0, 37.5)),
    "Gulf of Alaska": ((-137.5, 58.0), (-150.0, 58.5)),
    "Brazil south of Recife": ((-38.5, -14.0), (-34.6, -8.5)),
    "Brazil north of Recife": ((-35.2, -5.0), (-42.0, -2.3)),
    "North Brazil and Guiana": ((-51.5, 6.3), (-46.5, 1.8)),
    "United States, Atlantic": ((-71.0, 40.0), (-79.5, 31.0)),
    "West Africa, north": ((-17.8, 12.5), (-17.8, 20.5)),
    "Gulf of Guinea": ((8.0, 3.9), (-3.0, 4.6)),
    "West Africa, south": ((12.8, -8.0), (11.5, -17.0)),
    "Mozambique": ((36.0, -24.0), (40.9, -14.0)),
    "Somalia": ((50.9, 8.5), (46.5, 2.5)),
    "India, west": ((74.8, 11.0), (71.0, 17.5)),
    "India, east": ((85.5, 19.2), (80.6, 13.0)),
    "Sumatra": ((99.5, -2.3), (103.5, -5.8)),
    "Java": ((107.0, -8.2), (113.0, -8.9)),
    "Australia, west": ((113.2, -24.0), (114.8, -32.0)),
    "Australia, south": ((118.5, -35.5), (131.0, -33.8)),
    "Australia, east": ((151.2, -35.0), (153.8, -28.5)),
    "Japan, Pacific": ((142.2, 38.5), (136.5, 33.6)),
    "Norway": ((4.5, 62.3), (10.5, 66.8)),
    "East Greenland": ((-16.5, 74.5), (-32.0, 67.6)),
    "Antarctica, Indian sector": ((70.0, -66.5), (40.0, -67.8)),
    "Antarctica, Pacific sector": ((-100.0, -71.0), (-130.0, -73.3)),
}


@cache
def guide():
    return packaged_network("baroclinic")[0]


@cache
def onward():
    network = guide()
    coast = network.kind == StepKind.COAST
    result = np.full(network.size, -1)
    result[network.tail[coast]] = network.head[coast]
    return result


def nearest(lon, lat):
    network = guide()
    shore = np.nonzero(np.isfinite(network.offshore))[0]
    distance = geodesic_length(network.lon[shore], network.lat[shore], lon, lat)
    assert distance.min() < 120e3, (lon, lat, distance.min())
    return int(shore[np.argmin(distance)])


def way_along_coast(start, end, longest):
    """Length of the way along the coast in the direction of travel, infinite beyond `longest`."""
    network, node, length = guide(), nearest(*start), 0.0
    goal = nearest(*end)
    while length < longest:
        if node == goal:
            return length
        following = onward()[node]
        if following < 0:
            break
        length += float(geodesic_length(network.lon[node], network.lat[node],
                                        network.lon[following], network.lat[following]))
        node = int(following)
    return np.inf


@pytest.mark.parametrize("name", COASTS)
def test_direction_of_travel(name):
    start, end = COASTS[name]
    direct = float(geodesic_length(*start, *end))
    assert direct < 1.5e6
    # Along the effective coast it is a little farther, and there is no way back.
    assert 0.8 * direct < way_along_coast(start, end, 2.5 * direct) < 2.5 * direct
    assert way_along_coast(end, start, 2.5 * direct) == np.inf


def test_equator_runs_eastward_through_three_oceans():
    network = guide()
    along = network.kind == StepKind.EQUATOR
    span = (network.lon[network.head[along]] - network.lon[network.tail[along]]) % 360.0
    assert np.all((span > 0.0) & (span < 0.5))
    assert np.all(network.lat[network.tail[along]] == 0.0)
    found = {}
    for line in np.unique(network.line[network.equatorial]):
        lon = network.lon[network.line == line]
        found[line] = (round(float(lon[0])), round(float(lon[-1])), lon.size)
    longest = sorted(found.values(), key=lambda stretch: -stretch[2])[:3]
    # Pacific from New Guinea over the date line to Ecuador, Indian from Somalia to Sumatra,
    # Atlantic from the mouth of the Amazon to Gabon.
    for (west, east, _), expected in zip(longest, ((135, -81), (43, 98), (-44, 9)), strict=True):
        assert abs(west - expected[0]) <= 2
        assert abs(east - expected[1]) <= 2
    # What is left are the Molucca and the Halmahera Sea, shorter than two L_e.
    assert all(size * 22.5 < 700.0 for _, _, size in found.values()) or len(found) == 5
    assert sorted(found.values(), key=lambda stretch: -stretch[2])[3][2] * 22.5 < 700.0


def test_every_coast_that_meets_the_equator_feeds_it_or_is_fed():
    network = guide()
    junctions = np.nonzero((network.lat == 0.0) & np.isfinite(network.offshore))[0]
    steps = {kind: np.nonzero(network.kind == kind)[0]
             for kind in (StepKind.COAST, StepKind.EQUATOR)}
    assert junctions.size == 2 * np.unique(network.line[network.equatorial]).size
    for node in junctions:
        out = [np.sum(network.tail[steps[kind]] == node) for kind in steps]
        into = [np.sum(network.head[steps[kind]] == node) for kind in steps]
        assert (into, out) in (([2, 0], [0, 1]), ([0, 1], [2, 0]))


def test_no_coast_node_is_a_dead_end():
    network = guide()
    shore = np.isfinite(network.offshore) & (network.lat != 0.0)
    along = network.kind == StepKind.COAST
    leaving = np.bincount(network.tail[along], minlength=network.size)
    coming = np.bincount(network.head[along], minlength=network.size)
    assert np.all(leaving[shore] == 1)
    assert np.all(coming[shore] == 1)
    leads_on = np.bincount(network.tail, minlength=network.size)
    assert np.all(leads_on > 0)


@pytest.mark.parametrize(("lon", "lat"), [(-91.0, -0.5), (173.0, 1.0), (73.1, 0.5), (6.6, 0.2)],
                         ids=["Galápagos", "Gilberts", "Maldives", "São Tomé"])
def test_islands_on_the_equator_are_passed(lon, lat):
    network = guide()
    shore = np.isfinite(network.offshore)
    assert geodesic_length(network.lon[shore], network.lat[shore], lon, lat).min() > 150e3
    assert geodesic_length(network.lon[network.equatorial], 0.0, lon, lat).min() < 120e3


def ring_of(lon, lat):
    return int(guide().line[nearest(lon, lat)])


def straits_between(first, second):
    """Sill depths of the straits that lead from one ring to another."""
    network = guide()
    strait = network.kind == StepKind.STRAIT
    following = dict(zip(network.tail[strait].tolist(), network.head[strait].tolist(),
                         strict=True))
    found = []
    for step in np.nonzero(strait & (network.gap >= 0))[0]:
        node = int(network.head[step])
        while network.in_strait[node]:
            node = following[node]
        if (network.line[network.tail[step]], network.line[node]) == (first, second):
            found.append(float(network.gap_sill[network.gap[step]]))
    return found


MEDITERRANEAN_WEST, MEDITERRANEAN_EAST = (5.0, 43.0), (30.0, 31.7)
INDONESIAN_SEAS = {"Java": (113.0, -8.9), "Banda": (128.0, -7.4), "Sulawesi": (120.0, 1.5),
                   "Sulu": (121.5, 10.2), "Borneo, South China Sea": (116.0, 7.3)}


def test_enclosed_seas_have_coasts_of_their_own_or_none():
    world = ring_of(-79.8, -8.0)
    west, east = ring_of(*MEDITERRANEAN_WEST), ring_of(*MEDITERRANEAN_EAST)
    black, red, japan = ring_of(35.0, 42.2), ring_of(38.0, 21.0), ring_of(131.0, 43.0)
    assert len({world, west, east, black, red, japan}) == 6
    network = guide()
    for lon, lat in ((51.0, 40.0), (83.0, 55.0), (-87.0, 47.5)):  # Caspian, land, Lake Superior
        assert geodesic_length(network.lon, network.lat, lon, lat).min() > 200e3
    atlas = packaged_network("baroclinic")[1]
    on_black = network.line == black
    assert np.isnan(atlas.phase_speed[:, on_black]).all()  # no stratification in the climatology
    assert np.isfinite(atlas.phase_speed[0, network.line == west]).all()


def test_straits_that_must_exist():
    world = ring_of(-79.8, -8.0)
    banda = ring_of(*INDONESIAN_SEAS["Banda"])
    sulawesi, sulu = ring_of(*INDONESIAN_SEAS["Sulawesi"]), ring_of(*INDONESIAN_SEAS["Sulu"])
    west, east = ring_of(*MEDITERRANEAN_WEST), ring_of(*MEDITERRANEAN_EAST)
    gibraltar = next(c for c in CHARTED_STRAITS if c.name == "Strait of Gibraltar")
    assert straits_between(world, west) == [gibraltar.sill_depth]
    assert straits_between(west, world) == [gibraltar.sill_depth]
    assert max(straits_between(west, east)) > 280.0  # Sicily, 430 m on charts
    assert max(straits_between(world, banda)) > 1400.0  # Ombai and Timor
    assert any(150.0 < sill < 300.0 for sill in straits_between(world, banda))  # Lombok
    assert max(straits_between(banda, sulawesi)) > 400.0  # Makassar
    assert max(straits_between(sulawesi, sulu)) > 240.0  # Sibutu
    assert max(straits_between(world, sulu)) > 190.0  # Mindoro


def test_straits_that_are_too_shallow_are_closed():
    world = ring_of(-79.8, -8.0)
    for inner in (ring_of(131.0, 43.0), ring_of(38.0, 21.0), ring_of(35.0, 42.2)):
        # Tsushima and Tsugaru (130–140 m), Bab el Mandeb (137 m), Dardanelles (55 m)
        assert straits_between(world, inner) == []
        assert straits_between(inner, world) == []
    # Bering Strait (50 m), Taiwan Strait (60 m), Torres Strait (12 m): no guide within.
    network = guide()
    for lon, lat in ((-168.8, 65.9), (119.5, 24.8), (142.2, -10.4), (-4.0, 50.0)):
        assert geodesic_length(network.lon, network.lat, lon, lat).min() > 150e3


@pytest.mark.parametrize(("one", "other"), [
    ((-80.2, 25.5), (-79.2, 26.5)),  # Florida Strait
    ((-74.3, 20.0), (-73.5, 19.9)),  # Windward Passage
    ((-68.2, 18.4), (-67.4, 18.3)),  # Mona Passage
    ((-85.8, 21.0), (-85.0, 21.9)),  # Yucatan Channel
    ((-31.0, 67.3), (-24.5, 66.2)),  # Denmark Strait
    ((120.7, 21.8), (120.6, 18.8)),  # Luzon Strait
    ((35.5, -23.0), (43.8, -22.0)),  # Mozambique Channel
], ids=["Florida", "Windward", "Mona", "Yucatan", "Denmark", "Luzon", "Mozambique"])
def test_straits_wider_than_the_radius_have_a_guide_on_either_side(one, other):
    network = guide()
    first, second = nearest(*one), nearest(*other)
    across = float(geodesic_length(*one, *other))
    round_about = min(way_along_coast(one, other, 8 * across), way_along_coast(other, one,
                                                                             8 * across))
    assert network.line[first] != network.line[second] or round_about > 6 * across
    assert network.basin[first] == network.basin[second]
