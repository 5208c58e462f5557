"""Flat-bottom phase speeds and travel times of the packaged ocean against published ones.

Sources beside each value. READ: read in the source; DERIVED: from the source's data by us;
MEMORY: plausibility only.
"""

from __future__ import annotations

import os
from functools import cache
from pathlib import Path

import numpy as np
import pytest
from scipy.spatial import cKDTree

from waveguide.constants import SECONDS_PER_DAY, deformation_radius
from waveguide.geodesy import destination, geodesic_length, unit_vectors, wrap_longitude
from waveguide.modes.vertical import phase_speeds
from waveguide.network.graph import StepKind
from waveguide.network.packaged import packaged_network
from waveguide.network.search import Origin, Searcher
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.ocean.stratification import packaged_climatology

TROPICS, ELSEWHERE = 0.05, 0.12
"""Agreement with the table of Chelton et al. that two climatologies of the same age and depths of
0.1° and 1° allow (the table is from Levitus 1994 and means of the depth over 1° cells)."""

# lon, lat, first-mode speed (m/s): Chelton, deSzoeke, Schlax, El Naggar & Siwertz (1998),
# J. Phys. Oceanogr. 28, 433, cells of its 1° table (READ).
CHELTON = [
    (150.5, 0.5, 3.019), (165.5, 0.5, 2.949), (-139.5, 0.5, 2.694), (-109.5, 0.5, 2.429),
    (-22.5, 0.5, 2.401), (80.5, 0.5, 2.841), (-78.5, -12.5, 2.372), (-119.5, 31.5, 2.266),
    (-126.5, 44.5, 2.072), (-52.5, 57.5, 1.079), (0.5, -60.5, 0.919),
]  # fmt: skip


def cell_speed(lon, lat):
    """First-mode speed over the mean depth of 1° cells, NaN where unknown."""
    off = np.linspace(-0.45, 0.45, 10)
    depth = packaged_bathymetry().sample(
        lon[:, None, None] + off[None, :, None], lat[:, None, None] + off[None, None, :]
    )
    wet = np.nan_to_num(depth) > 0.0
    depth = np.where(wet, depth, 0.0).sum(axis=(1, 2)) / np.maximum(wet.sum(axis=(1, 2)), 1)
    climatology = packaged_climatology()
    n2 = climatology.profiles(lon, lat).n2
    known = np.isfinite(n2).all(axis=1) & (depth > 200.0)
    speed = np.full(lon.size, np.nan)
    speed[known] = phase_speeds(n2[known], climatology.depth, depth[known], 1)[:, 0]
    return speed


@cache
def table():
    """The whole table (lon, lat, speed), from the folder of observation records."""
    folder = os.environ.get("WAVEGUIDE_OBSERVATIONS")
    if not folder:
        pytest.skip("set WAVEGUIDE_OBSERVATIONS to the folder with the observation records")
    lat, lon, speed, _ = np.loadtxt(
        Path(folder) / "first_mode_speed_and_radius_1deg.txt.gz", unpack=True
    )
    return wrap_longitude(lon), lat, speed


def table_at(lon, lat):
    """Speed of the cell a position is in (its centre is at most 0.71° away), NaN if none."""
    x, y, speed = table()
    distance, row = cKDTree(unit_vectors(x, y)).query(unit_vectors(lon, lat))
    return np.where(distance < np.radians(0.72), speed[row], np.nan)


@pytest.mark.parametrize(("lon", "lat", "expected"), CHELTON)
def test_first_mode_speed_at_cells_of_chelton_et_al(lon, lat, expected):
    tolerance = TROPICS if abs(lat) < 23.5 else ELSEWHERE
    found = cell_speed(np.array([lon]), np.array([lat]))[0]
    assert found == pytest.approx(expected, rel=tolerance)


def test_median_over_the_cells_of_chelton_et_al():
    found = np.array([cell_speed(np.array([x]), np.array([y]))[0] / c for x, y, c in CHELTON])
    assert np.median(found) == pytest.approx(1.0, abs=0.02)


def test_first_mode_speed_over_the_whole_table():
    lon, lat, expected = (column[::10] for column in table())
    ratio = cell_speed(lon, lat) / expected
    known = np.isfinite(ratio)
    assert known.mean() > 0.98
    tropics = known & (np.abs(lat) < 23.5)
    assert np.median(ratio[known]) == pytest.approx(1.0, abs=0.02)
    # Nine cells in ten within the tolerance, the rest on slopes and in fronts.
    assert np.mean(np.abs(ratio[tropics] - 1.0) < TROPICS) > 0.9
    assert np.mean(np.abs(ratio[known & ~tropics] - 1.0) < ELSEWHERE) > 0.9


def test_nodes_have_the_speeds_of_the_table_in_the_median():
    network, atlas = packaged_network("baroclinic")
    speed = atlas.phase_speed[0]
    on_equator = network.equatorial & np.isfinite(speed)
    ratio = speed[on_equator] / table_at(network.lon[on_equator], 0.5)
    assert np.nanmedian(ratio) == pytest.approx(1.0, abs=TROPICS)
    shore = np.nonzero(np.isfinite(network.offshore) & np.isfinite(speed))[0]
    # The atlas describes the deep water within 2 R (at least 60 km), not the slope at the node.
    reach = np.maximum(2.0 * deformation_radius(speed[shore], network.lat[shore]), 60e3)
    ratio = speed[shore] / table_at(
        *destination(network.lon[shore], network.lat[shore], network.offshore[shore], reach)
    )
    tropics = np.abs(network.lat[shore]) < 23.5
    assert np.nanmedian(ratio[tropics]) == pytest.approx(1.0, abs=TROPICS)
    assert np.nanmedian(ratio[~tropics]) == pytest.approx(1.0, abs=ELSEWHERE)


def along_equator(west, east, mode=1):
    """Length (m) and time (s) of a mode along the equator between two longitudes."""
    network, atlas = packaged_network("baroclinic")
    speed = atlas.phase_speed[atlas.row(mode)]
    steps = np.nonzero(network.kind == StepKind.EQUATOR)[0]
    tail, head = network.tail[steps], network.head[steps]
    from_west = (network.lon[tail] - west) % 360.0
    middle = from_west + ((network.lon[head] - network.lon[tail]) % 360.0) / 2.0
    steps = steps[middle % 360.0 <= (east - west) % 360.0]
    slowness = 0.5 * (1.0 / speed[network.tail[steps]] + 1.0 / speed[network.head[steps]])
    return network.length[steps].sum(), (network.length[steps] * slowness).sum()


# Days from coast to coast by ∫ ds/c₁ along 0.5°N in the table of Chelton et al. (DERIVED).
@pytest.mark.parametrize(("west", "east", "days"), [
    (145.0, -80.0, 65.4), (-45.0, 9.0, 28.4), (45.0, 98.0, 24.7),
], ids=["Pacific", "Atlantic", "Indian"])
def test_crossing_times_of_the_equator(west, east, days):
    _, seconds = along_equator(west, east)
    assert seconds / SECONDS_PER_DAY == pytest.approx(days, rel=TROPICS)


def mean_speed(west, east, mode=1):
    length, seconds = along_equator(west, east, mode)
    return length / seconds


# Observed speeds along the equator (m/s) with the interval their authors state; where they state
# none, half a unit of the last digit given.
MIXED = "sea level of the Atlantic mixes modes 1 and 2: the observed speed lies between the two"
SLOW = ("intraseasonal 20 °C isotherm depth of the central Pacific, with westward current and "
        "forcing that moves east with the wave; 2.4 m/s is slower than any climatology's c₁")
OBSERVED = [
    pytest.param(165.0, -110.0, 1, 2.35, 2.45, id="Kessler 1995, Pacific",
                 marks=pytest.mark.xfail(strict=True, reason=SLOW)),
    pytest.param(165.0, -110.0, 1, 1.86, 3.78, id="Delcroix 1991, Pacific"),
    pytest.param(-40.0, 0.0, 1, 2.05, 2.15, id="Katz 1997, Atlantic, faster",
                 marks=pytest.mark.xfail(strict=True, reason=MIXED)),
    pytest.param(-40.0, 0.0, 1, 1.75, 1.85, id="Katz 1997, Atlantic, slower",
                 marks=pytest.mark.xfail(strict=True, reason=MIXED)),
    pytest.param(60.0, 95.0, 1, 2.45, 3.37, id="Iskandar, Indian, mode 1"),
    pytest.param(60.0, 95.0, 2, 1.41, 1.77, id="Iskandar, Indian, mode 2"),
]


@pytest.mark.parametrize(("west", "east", "mode", "low", "high"), OBSERVED)
def test_observed_speeds_along_the_equator(west, east, mode, low, high):
    """Against observation.

    READ: Kessler, McPhaden & Weickmann (1995), J. Geophys. Res. 100, 10613: 2.4 m/s. Delcroix
    et al. (1991), J. Geophys. Res.: 2.82 ± 0.96 m/s. Katz (1997), J. Phys. Oceanogr.: 2.1 and
    1.8 m/s. Iskandar, Masumoto & Mizuno: 2.91 ± 0.46 and 1.59 ± 0.18 m/s.
    """
    assert low <= mean_speed(west, east, mode) <= high


def test_atlantic_sea_level_travels_between_modes_one_and_two():
    # Katz (1997), as above: 1.8 to 2.1 m/s.
    assert mean_speed(-40.0, 0.0, 2) < 1.8
    assert mean_speed(-40.0, 0.0, 1) > 2.1


def coast_speed(lon, lat, mode=1):
    """Flat-bottom speed of the nearest coast node (m/s)."""
    network, atlas = packaged_network("baroclinic")
    shore = np.nonzero(np.isfinite(network.offshore))[0]
    distance = geodesic_length(network.lon[shore], network.lat[shore], lon, lat)
    assert distance.min() < 150e3
    return float(atlas.phase_speed[atlas.row(mode), shore[np.argmin(distance)]])


SHELF = ("a shelf makes the wave faster than the flat-bottom mode; that is the cross-shelf "
         "modes' business")
COASTS = [
    # (Smith 1978, J. Geophys. Res.: 200 km/day for 4–20 days, READ; one digit given.)
    pytest.param(-76.5, -12.5, 150.0, 250.0, id="Smith 1978, Peru"),
    # (Quispe & Rojas 2017, Rev. Inv. Fis. 19: about 250 km/day, READ.)
    pytest.param(-71.0, -18.5, 225.0, 275.0, id="Quispe and Rojas 2017, northern Chile",
                 marks=pytest.mark.xfail(strict=True, reason=SHELF)),
    # (Aydin & Besiktepe 2022, Ocean Sci. 18, 1081: 2.3–2.6 m/s eastward, READ.)
    pytest.param(35.0, 42.3, 199.0, 225.0, id="Aydin and Besiktepe 2022, Black Sea",
                 marks=pytest.mark.xfail(strict=True, reason="the climatology has no Black Sea")),
    # (Li et al. 2023, Ocean Sci. 19, 1545: about 10 m/s, READ.)
    pytest.param(123.5, 26.3, 780.0, 950.0, id="Li 2023, China",
                 marks=pytest.mark.xfail(strict=True, reason=SHELF)),
]


@pytest.mark.parametrize(("lon", "lat", "low", "high"), COASTS)
def test_observed_speeds_along_coasts(lon, lat, low, high):
    kilometres_a_day = coast_speed(lon, lat) * SECONDS_PER_DAY / 1e3
    assert low <= kilometres_a_day <= high


def round_antarctica():
    """Hours that the barotropic wave takes round Antarctica."""
    network, atlas = packaged_network("barotropic")
    ring = network.line == network.line[np.argmin(network.lat)]
    steps = (network.kind == StepKind.COAST) & ring[network.tail]
    slowness = 1.0 / atlas.phase_speed[0]
    mean = 0.5 * (slowness[network.tail[steps]] + slowness[network.head[steps]])
    return float((network.length[steps] * mean).sum() / 3600.0), network, steps


@pytest.mark.parametrize(("wavenumber", "hours"), [(1, 32.0), (2, 16.0), (3, 11.0)])
def test_barotropic_wave_round_antarctica(wavenumber, hours):
    # Kusahara & Ohshima (2014), J. Phys. Oceanogr. 44, 2909 (READ): 32, 16, 11 h, westward. √(gh)
    # leaves out the curvature of the earth (8–10 %) and the shelf (2–8 %), which slow the wave
    # (Miles 1972, J. Fluid Mech. 55, 113), so the period must be short by 0 to 18 %; the source
    # rounds to the hour.
    period, network, steps = round_antarctica()
    ratio = period / wavenumber / hours
    assert 0.82 - 0.5 / hours < ratio < 1.0
    east = (network.lon[network.head[steps]] - network.lon[network.tail[steps]] + 180) % 360 - 180
    assert east.sum() == pytest.approx(-360.0)


def barotropic_hours(lon, lat):
    """Travel time to every node of the barotropic network from a place on a coast (hours)."""
    network, atlas = packaged_network("barotropic")
    slowness = 1.0 / atlas.phase_speed[0]
    weight = network.length * 0.5 * (slowness[network.tail] + slowness[network.head])
    start = int(np.argmin(geodesic_length(network.lon, network.lat, lon, lat)))
    reach = Searcher.of(network).reach(weight, Origin(np.array([start]), np.zeros(1)))
    return network, reach, reach.cost / 3600.0


# A barotropic boundary signal is felt round the globe within a day or two: common practice of
# the field, without a source.
OCEANS = {"Atlantic": (-70.0, 20.0), "Indian": (30.0, 110.0), "Pacific": (150.0, -75.0)}
ROUND_PACIFIC = "the signal goes round the North Pacific first: 52 h to the Atlantic, 79 h to India"
SOURCES = {"Brazil": (-48.0, -27.0), "Java": (110.0, -9.0), "Cape": (18.0, -35.0),
           "California": (-124.5, 40.0)}


@pytest.mark.parametrize("source", [
    "Brazil", "Java", "Cape",
    pytest.param("California", marks=pytest.mark.xfail(strict=True, reason=ROUND_PACIFIC)),
])
def test_barotropic_signal_is_felt_in_every_ocean_within_two_days(source):
    network, _, hours = barotropic_hours(*SOURCES[source])
    shore = np.isfinite(network.offshore) & (np.abs(network.lat) < 50.0)
    for west, east in OCEANS.values():
        there = shore & ((network.lon - west) % 360.0 < (east - west) % 360.0)
        assert hours[there].min() < 48.0


@pytest.mark.parametrize("source", SOURCES)
def test_barotropic_signal_is_felt_on_every_coast_within_five_days(source):
    network, _, hours = barotropic_hours(*SOURCES[source])
    assert hours[np.isfinite(network.offshore)].max() < 5 * 24.0


@pytest.mark.xfail(strict=True, reason="coasts just upstream are reached last, by way of all the "
                   "others: 35 to 49 % of the coasts within two days, all within 4.8")
@pytest.mark.parametrize("source", SOURCES)
def test_barotropic_signal_is_felt_on_every_coast_within_two_days(source):
    network, _, hours = barotropic_hours(*SOURCES[source])
    assert hours[np.isfinite(network.offshore)].max() < 48.0


def test_common_route_from_the_western_south_atlantic_to_africa_and_europe():
    # Equatorward with the coast on the left, along the equator, poleward with it on the right.
    network, reach, hours = barotropic_hours(-48.0, -27.0)
    for lon, lat in ((-17.5, 14.7), (-9.6, 38.7)):  # Dakar, Lisbon
        goal = int(np.argmin(geodesic_length(network.lon, network.lat, lon, lat)))
        steps = reach.steps_to(goal, network)
        kind = network.kind[steps]
        legs = kind[np.append(True, kind[1:] != kind[:-1])].tolist()
        assert legs == [StepKind.COAST, StepKind.EQUATOR, StepKind.COAST]
        assert hours[goal] < 48.0


def test_barotropic_speed_off_california():
    # Munk, Snodgrass & Wimbush (1970), Geophys. Fluid Dyn. 1, 161 (READ): tides travel along
    # California with 140 m/s (semidiurnal) and 214 m/s (diurnal), not pure Kelvin waves.
    network, atlas = packaged_network("barotropic")
    off = ((network.lon > -126.0) & (network.lon < -116.0) & (network.lat > 31.0)
           & (network.lat < 42.0) & np.isfinite(network.offshore))
    assert off.sum() > 5
    assert 140.0 < np.median(atlas.phase_speed[0, off]) < 214.0
