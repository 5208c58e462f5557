"""The numbers that say how far a route is from the assumptions, on guides of known shape."""

from __future__ import annotations

from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.constants import EARTH_RADIUS, SECONDS_PER_DAY, coriolis, deformation_radius
from waveguide.geodesy import destination, geodesic_length
from waveguide.network.attach import Ties
from waveguide.network.graph import StepKind
from waveguide.ocean.bathymetry import Bathymetry
from waveguide.ocean.stratification import Climatology
from waveguide.propagation.cautions import route_cautions
from waveguide.propagation.routes import Route
from waveguide.propagation.validity import (
    FARTHEST_SHORE,
    Survey,
    Validity,
    basin_width,
    coast_radius,
    fastest,
    speed_change,
    upper_share,
)

C = 2.5
OMEGA = 2.0 * np.pi / (20.0 * SECONDS_PER_DAY)


def ring(guides: SimpleNamespace, radius: float, lat: float = 40.0):
    """A coast on a circle about (0, lat)."""
    count = max(24, round(2.0 * np.pi * radius / 20e3))
    lon, y = destination(0.0, lat, np.linspace(0.0, 360.0, count + 1), radius)
    network = guides.chain([(guides.COAST, list(zip(lon, y, strict=True)))], 10.0)
    return replace(network, length=geodesic_length(lon[:-1], y[:-1], lon[1:], y[1:]))


@pytest.mark.parametrize("radius", [60e3, 150e3, 500e3])
def test_radius_of_a_circular_coast(guides: SimpleNamespace, radius: float) -> None:
    network = ring(guides, radius)
    mode, steps = guides.uniform(network, C), np.arange(network.tail.size)
    found = coast_radius(network, mode, steps) * float(deformation_radius(C, 40.0))
    # |f| varies over the circle by up to 10 %, and at the ends of the chain the window is cut
    assert_allclose(found, radius, rtol=0.12)


def test_straight_coast_has_no_curvature_and_the_equator_no_coast(guides: SimpleNamespace) -> None:
    straight = guides.chain([(guides.COAST, [(0.0, 20.0), (0.0, 45.0)])])
    along = np.arange(straight.tail.size)
    assert coast_radius(straight, guides.uniform(straight, C), along) > 100.0
    equator = guides.chain([(guides.EQUATOR, [(0.0, 0.0), (30.0, 0.0)])])
    along = np.arange(equator.tail.size)
    assert np.isnan(coast_radius(equator, guides.uniform(equator, C), along))


def test_one_corner_is_no_curved_coast_but_many_are(guides: SimpleNamespace) -> None:
    # 25 steps of 22 km, then a right angle, on 5 % of the way at most: R is 26 km
    long = [(0.0, 40.0), (12.0, 40.0), (12.0, 50.0)]
    network = guides.chain([(guides.COAST, long)])
    assert coast_radius(network, guides.uniform(network, C), np.arange(network.tail.size)) > 50.0
    zigzag = [(0.5 * k, 40.0 + 0.4 * (k % 2)) for k in range(20)]
    network = guides.chain([(guides.COAST, zigzag)])
    assert coast_radius(network, guides.uniform(network, C), np.arange(network.tail.size)) < 1.0


def test_frequency_is_held_against_the_smallest_f_beyond_the_equator(
    guides: SimpleNamespace,
) -> None:
    network = guides.chain([(guides.COAST, [(0.0, 0.0), (0.0, 30.0)])])
    mode = guides.uniform(network, C)
    steps = np.arange(network.tail.size)
    # beyond 2 L_e = 2 √(c/β), which is 5.8 m/s … 6.0° for 2.5 m/s
    edge = 2.0 * np.degrees(np.sqrt(C / 2.2891e-11) / EARTH_RADIUS)
    f = float(np.abs(coriolis(edge)))
    assert_allclose(fastest(network, mode, steps, OMEGA), OMEGA / f, rtol=0.05)
    poleward = steps[network.lat[network.tail] > 20.0]
    expected = OMEGA / float(coriolis(network.step_lat[poleward].min()))
    assert_allclose(fastest(network, mode, poleward, OMEGA), expected, rtol=1e-12)
    assert fastest(network, mode, steps[:10], OMEGA) == 0.0


def test_change_of_speed_over_a_wavelength_of_an_exponential() -> None:
    length = np.full(400, 20e3)
    place = np.concatenate([[0.0], np.cumsum(length)])
    for scale in (2e6, 2e7):
        speed = C * np.exp(place / scale)
        # c/ω grows along the path: over its last part that fits ln c changes by c/(ω scale)
        fits = place + speed / OMEGA <= place[-1]
        expected = np.quantile(speed[fits] / (OMEGA * scale), 0.95)
        assert_allclose(speed_change(speed, length, OMEGA), expected, rtol=1e-3)
    assert speed_change(np.full(401, C), length, OMEGA) == 0.0


def test_a_path_shorter_than_the_wavelength_counts_as_a_whole() -> None:
    speed = np.array([2.0, 2.2, 2.5])
    found = speed_change(speed, np.array([1e3, 1e3]), OMEGA)
    assert_allclose(found, np.log(1.25), rtol=1e-12)


def channel(width_degrees: float) -> Bathymetry:
    """Deep water from 0 to some degrees east of the Greenwich meridian, land elsewhere."""
    lon, lat = np.arange(-10.0, 30.0, 0.05), np.arange(30.0, 50.01, 0.1)
    wet = (lon > 0.0) & (lon < width_degrees)
    return Bathymetry(lon, lat, np.broadcast_to(np.where(wet, 3000.0, -100.0),
                                                (lat.size, lon.size)).copy())


def test_basin_width_of_a_channel(guides: SimpleNamespace) -> None:
    network = guides.chain([(guides.COAST, [(0.0, 42.0), (0.0, 38.0)])])
    network = replace(network, offshore=np.full(network.size, 90.0))
    mode = guides.uniform(network, C)
    nodes = np.arange(1, network.size - 1)
    radius = deformation_radius(C, network.lat[nodes])
    width = geodesic_length(0.0, network.lat[nodes], 1.0, network.lat[nodes])
    found = basin_width(network, mode, nodes, channel(1.0))
    assert_allclose(found, width / radius, atol=0.3)  # cells of 4 km, R of 26 km
    assert np.all(basin_width(network, mode, nodes, channel(20.0)) == FARTHEST_SHORE)


def test_share_of_the_upper_ocean_of_uniform_stratification_is_that_of_the_depth() -> None:
    depth = np.arange(5.0, 1000.0, 10.0)
    lon, lat = np.arange(-180.0, 180.0), np.arange(-89.5, 90.0)
    n2 = np.full((depth.size, lat.size, lon.size), 1e-5, np.float32)
    n2[:, :, :20] = np.nan
    climatology = Climatology(lon, lat, depth, n2)
    assert_allclose(upper_share(climatology, 10.0, 20.0), 100.0 / 995.0, rtol=1e-3)
    assert np.isnan(upper_share(climatology, -170.0, 20.0))


# The whole, and what is said of it


def looked_at(guides: SimpleNamespace, network, mode=None, days: float = 20.0) -> Validity:
    omega = 2.0 * np.pi / (days * SECONDS_PER_DAY)
    survey = Survey(network, mode or guides.uniform(network, C), omega, channel(1.0), None)
    return survey.of(np.arange(network.tail.size))


def told(validity: Validity, amplitude: float = 1.0) -> str:
    one, none = np.ones(1), np.zeros(1)
    ties = Ties(np.zeros(1, int), none, none, none, none, none, one, none > 0.0, 0.0, 0.0)
    route = Route(np.arange(1), 0, 0, 1.0, amplitude)
    return "; ".join(caution.text for caution in route_cautions(validity, route, ties, ties))


GOOD = Validity(0.1, 5.0, 5.0, 0.1, 0.0, np.nan, 50.0, 20.0, 0.1)


def test_nothing_is_said_where_the_theory_holds() -> None:
    assert told(GOOD) == ""
    assert told(Validity(*([np.nan] * 9))) == ""


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"frequency_over_f": 0.42}, "ω/|f| reaches 0.42"),
        ({"critical_share": 0.3}, "30 % of the coastal way is below the critical frequency"),
        ({"coast_radius": 0.6}, "bends within 0.6 R"),
        ({"basin_width": 1.4}, "1.4 R wide"),
        ({"speed_change": 0.5}, "changes by 50 %"),
        ({"narrowest_strait": 12e3}, "a strait 12 km wide"),
        ({"northernmost": 71.0}, "71°N: sea ice"),
        ({"southernmost": -66.0}, "66°S: sea ice"),
        ({"upper_share": 0.2}, "20 % of the speed comes from the upper 100 m"),
    ],
)
def test_each_assumption_that_fails_is_named_with_its_number(change, words) -> None:
    said = told(replace(GOOD, **change))
    assert words in said
    assert said.count(";") <= 1


def test_faint_signals_are_called_faint() -> None:
    assert "0.005: faint" in told(GOOD, amplitude=0.005)


def test_survey_of_a_route_along_a_channel(guides: SimpleNamespace) -> None:
    network = guides.chain([(guides.COAST, [(0.0, 42.0), (0.0, 38.0)])])
    network = replace(network, offshore=np.full(network.size, 90.0))
    found = looked_at(guides, network)
    assert found.critical_share == 0.0  # equatorward
    assert found.northernmost == 42.0
    assert found.southernmost == 38.0
    assert np.isnan(found.narrowest_strait)
    assert np.isnan(found.upper_share)
    assert 2.5 < found.basin_width < 3.8
    none = Survey(network, guides.uniform(network, C), OMEGA, channel(1.0), None)
    assert np.isnan(list(vars(none.of(np.zeros(0, np.int64))).values())).all()


def test_strait_on_the_way_is_measured(guides: SimpleNamespace) -> None:
    network = guides.chain([(guides.COAST, [(0.0, 42.0), (0.0, 38.0)])])
    kind, gap = network.kind.copy(), network.gap.copy()
    kind[5], gap[5] = int(StepKind.STRAIT), 0
    network = replace(
        network, kind=kind, gap=gap, offshore=np.full(network.size, 90.0),
        gap_width=np.array([15e3]), gap_length=np.array([3e4]), gap_sill=np.array([500.0]),
    )  # fmt: skip
    assert looked_at(guides, network).narrowest_strait == 15e3
